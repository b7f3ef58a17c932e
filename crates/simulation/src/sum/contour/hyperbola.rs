//! Inversion of a Laplace transform over one hyperbola, with its errors, for a range of arguments.
//!
//! The contour s(u) = c + μ(1 − sin α cosh u + i cos α sinh u), u real (Weideman & Trefethen 2007, Math. Comp.
//! 76:1341), bends around the cut s ≤ c of the transform into the left half plane, where e^(sx) decays. Turning α
//! by v is the same as moving u to u + iv, so the trapezoidal rule with step h has an error of at most
//! (N(d) + N(−d))/(e^(2πd/h) − 1), N(v) the integral of |integrand| over the hyperbola of angle α + v, as long as
//! these hyperbolas cross no singularity (Trefethen & Weideman 2014, SIAM Review 56:385, theorem 5.1). N is
//! computed, not guessed: h follows from it. As functions of x, N and every other error term are sums of
//! exponentials, hence log-convex: evaluated at both ends of a range they bound the error inside.

use super::summand::OneSidedSum;
use num_complex::Complex64;
use rayon::prelude::*;
use std::f64::consts::PI;

/// Which probability a contour computes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Side {
    /// P(0 < T ≤ x), the contour passing to the right of the pole at 0.
    Lower,
    /// P(T > x), the contour passing to its left (transforms analytic beyond the pole only).
    Upper,
}

/// One point of the contour.
#[derive(Debug, Clone, Copy)]
struct Node {
    s: Complex64,
    /// h/π · s′(u) D(s)/s, halved at u = 0 and with the sign of the side.
    weight: Complex64,
    /// Error of the weight.
    noise: f64,
}

/// A hyperbola that serves x in [low, high].
#[derive(Debug, Clone)]
pub(super) struct Hyperbola {
    pub(super) side: Side,
    pub(super) low: f64,
    pub(super) high: f64,
    nodes: Vec<Node>,
    /// ln of the error at `low` and `high`.
    log_errors: (f64, f64),
}

/// A family of hyperbolas through the same foci.
#[derive(Debug, Clone, Copy)]
struct Shape {
    center: f64,
    size: f64,
}

impl Shape {
    fn point(self, tilt: f64, u: f64) -> (Complex64, Complex64) {
        let (sine, cosine) = tilt.sin_cos();
        let s =
            Complex64::new(self.center + self.size * (1.0 - sine * u.cosh()), self.size * cosine * u.sinh());
        (s, Complex64::new(-self.size * sine * u.sinh(), self.size * cosine * u.cosh()))
    }
}

/// One sample of the integrand without e^(sx): s, s′·D/s, and the error of the latter.
type Sample = (Complex64, Complex64, f64);

/// Samples at u = 0, step, 2·step, … until the integrand is below `negligible` of its largest value at both ends
/// of the range for three samples in a row. `None` if it doesn't come to that.
fn samples(
    sum: &OneSidedSum,
    shape: Shape,
    tilt: f64,
    step: f64,
    (low, high): (f64, f64),
    negligible: f64,
) -> Option<Vec<Sample>> {
    const CHUNK: usize = 24;
    let mut found: Vec<Sample> = Vec::new();
    let mut largest = [0.0f64; 2];
    let mut quiet = 0;
    while found.len() < 4000 {
        let from = found.len();
        let chunk: Vec<Sample> = (from..from + CHUNK)
            .into_par_iter()
            .map(|k| {
                let (s, slope) = shape.point(tilt, step * k as f64);
                let transform = sum.transform(s, shape.center);
                let factor = slope / s;
                (s, transform.value * factor, transform.error * factor.norm())
            })
            .collect();
        for sample in chunk {
            let mut small = true;
            for (x, peak) in [low, high].into_iter().zip(&mut largest) {
                let size = (sample.0.re * x).exp() * (sample.1.norm() + sample.2);
                if !(size.is_finite() && sample.2.is_finite()) {
                    return None;
                }
                *peak = peak.max(size);
                small &= size <= negligible * *peak;
            }
            found.push(sample);
            quiet = if small { quiet + 1 } else { 0 };
            if quiet == 3 {
                return Some(found);
            }
        }
    }
    None
}

/// N(v) at x: ∫|integrand| du over the whole hyperbola, with a third added for the coarse rule.
fn total(samples: &[Sample], step: f64, x: f64) -> f64 {
    let sum: f64 = samples
        .iter()
        .enumerate()
        .map(|(k, v)| if k == 0 { 0.5 } else { 1.0 } * (v.0.re * x).exp() * (v.1.norm() + v.2))
        .sum();
    1.33 * sum * step / PI
}

impl Hyperbola {
    /// The contour through `vertex` around the cut that starts at `center` < `vertex`, for x in [low, high]. `None`
    /// if its errors cannot be bounded.
    pub(super) fn build(
        sum: &OneSidedSum,
        side: Side,
        vertex: f64,
        center: f64,
        (low, high): (f64, f64),
        opening: f64,
    ) -> Option<Self> {
        let (tilt, half_width) = (0.5 * opening, 0.42 * opening);
        let shape = Shape { center, size: (vertex - center) / (1.0 - tilt.sin()) };
        let coarse = 0.3;
        let range = (low, high);
        let inner = samples(sum, shape, tilt - half_width, coarse, range, 1e-7)?;
        let mut outer_width = half_width;
        let mut outer = samples(sum, shape, tilt + outer_width, coarse, range, 1e-7)?;
        if side == Side::Upper && shape.point(tilt - half_width, 0.0).0.re >= 0.0 {
            // The wide hyperbola would pass on the wrong side of the pole.
            return None;
        }
        let totals = |outer: &[Sample], x: f64| total(&inner, coarse, x) + total(outer, coarse, x);
        let (s, slope) = shape.point(tilt, 0.0);
        let middle = sum.transform(s, center);
        let scale = |x: f64| (s.re * x).exp() * (middle.value * slope / s).norm() / PI;
        if totals(&outer, low) > 1e12 * scale(low) || totals(&outer, high) > 1e12 * scale(high) {
            // Turned too far into a region where the transform grows: half as far does.
            outer_width *= 0.5;
            outer = samples(sum, shape, tilt + outer_width, coarse, range, 1e-7)?;
        }
        let width = half_width.min(outer_width);
        let needed = [low, high]
            .into_iter()
            .map(|x| (totals(&outer, x) / (2e-17 * scale(x))).max(10.0).ln())
            .fold(0.0, f64::max);
        let step = (2.0 * PI * width / needed).min(0.3);
        let found = samples(sum, shape, tilt, step, range, 1e-18)?;
        let sign = if side == Side::Lower { 1.0 } else { -1.0 };
        let nodes: Vec<Node> = found
            .iter()
            .enumerate()
            .map(|(k, (s, value, noise))| {
                let weight = step / PI * if k == 0 { 0.5 } else { 1.0 };
                Node { s: *s, weight: sign * weight * value, noise: weight * noise }
            })
            .collect();
        let error = |x: f64| {
            let discretisation = totals(&outer, x) / (2.0 * PI * width / step).exp_m1();
            let mut rounding = 0.0;
            for node in &nodes {
                let size = (node.s.re * x).exp();
                rounding +=
                    size * (node.noise + f64::EPSILON * (3.0 + node.s.norm() * x) * node.weight.norm());
            }
            // Beyond the last node the integrand falls doubly exponentially.
            let last =
                nodes.last().map_or(0.0, |node| 8.0 * (node.s.re * x).exp() * node.weight.norm() / step);
            discretisation + rounding + last + 1e-300
        };
        let log_errors = (error(low).ln(), error(high).ln());
        (log_errors.0.is_finite() && log_errors.1.is_finite()).then_some(Self {
            side,
            low,
            high,
            nodes,
            log_errors,
        })
    }

    /// The probability of this contour's side and the density of the sum at x.
    pub(super) fn evaluate(&self, x: f64) -> (f64, f64) {
        let (mut probability, mut density) = (0.0, 0.0);
        for node in &self.nodes {
            let exponent = node.s * x;
            if exponent.re < -700.0 {
                continue;
            }
            let (sine, cosine) = exponent.im.sin_cos();
            let term = exponent.re.exp() * Complex64::new(cosine, sine) * node.weight;
            probability += term.im;
            density += (term * node.s).im;
        }
        let sign = if self.side == Side::Lower { 1.0 } else { -1.0 };
        (probability, sign * density)
    }

    /// Bound on the error of the probability at x, low ≤ x ≤ high.
    pub(super) fn error(&self, x: f64) -> f64 {
        let share = ((x - self.low) / (self.high - self.low)).clamp(0.0, 1.0);
        (self.log_errors.0 + share * (self.log_errors.1 - self.log_errors.0)).exp()
    }

    pub(super) fn len(&self) -> usize {
        self.nodes.len()
    }
}

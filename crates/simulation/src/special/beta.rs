//! The beta law (regularized incomplete beta functions), relative accuracy in both tails.
//!
//! Notation: y = 1 − x, t = b·x − a·y, which has the sign of x minus the mean. Every route multiplies a
//! well-conditioned number by the mass Γ(a+b+1)/(Γ(a+1)Γ(b+1)) x^a y^b, evaluated after Loader (see
//! [`super::gamma`]) from t, so that neither a + b nor 1 − x is rounded where it matters.

use super::elementary::{ln_1p_minus_x, two_product, two_sum};
use super::gamma::stirling_error;
use super::legendre;
use super::normal;
use super::solve::{Probe, Tail, on_positive_axis};
use std::f64::consts::PI;

/// x in (0, 1) together with 1 − x, each a sum of a double and its rounding.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Point {
    x: (f64, f64),
    y: (f64, f64),
}

impl Point {
    /// From x.
    pub(crate) fn at(x: f64) -> Self {
        Self { x: (x, 0.0), y: two_sum(1.0, -x) }
    }

    /// From 1 − x.
    pub(crate) fn below_one(y: f64) -> Self {
        Self::at(y).reflected()
    }

    /// x and 1 − x exchanged.
    pub(crate) fn reflected(self) -> Self {
        Self { x: self.y, y: self.x }
    }

    /// b·x − a·y in double-double arithmetic, rounded at the end.
    fn balance(self, a: f64, b: f64) -> f64 {
        let (bx, bx_low) = two_product(b, self.x.0);
        let (ay, ay_low) = two_product(a, self.y.0);
        let (difference, low) = two_sum(bx, -ay);
        difference + (low + (bx_low - ay_low) + (b * self.x.1 - a * self.y.1))
    }

    /// ln x.
    fn ln_x(self) -> f64 {
        if self.y.0 < 0.5 { libm::log1p(-self.y.0) } else { self.x.0.ln() }
    }
}

/// ln Γ(b + a) − ln Γ(b) for 0 ≤ a ≤ 1, b > 0, with full relative accuracy for small a.
pub(crate) fn ln_gamma_ratio(a: f64, b: f64) -> f64 {
    let mut shifted = b;
    let mut steps = 0.0;
    while shifted < 10.0 {
        steps -= libm::log1p(a / shifted);
        shifted += 1.0;
    }
    let r = a / shifted;
    a * shifted.ln()
        + shifted * ln_1p_minus_x(r)
        + (a - 0.5) * libm::log1p(r)
        + (stirling_error(shifted + a) - stirling_error(shifted))
        + steps
}

/// Γ(a+b+1)/(Γ(a+1)Γ(b+1)) x^a y^b for a, b ≥ 0: the binomial mass at real counts.
pub(crate) fn mass(a: f64, b: f64, point: Point) -> f64 {
    if a == 0.0 {
        return if b == 0.0 { 1.0 } else { (b * point.reflected().ln_x()).exp() };
    }
    if b == 0.0 {
        return (a * point.ln_x()).exp();
    }
    let n = a + b;
    let t = point.balance(a, b);
    let exponent = a * deviation(t / a, point.x.0 * (n / a)) + b * deviation(-t / b, point.y.0 * (n / b));
    let stirling = stirling_error(n) - stirling_error(a) - stirling_error(b);
    (exponent + stirling).exp() * (n / (2.0 * PI * a) / b).sqrt()
}

/// ln(1 + u) − u where `one_plus` is 1 + u computed without going through u.
fn deviation(u: f64, one_plus: f64) -> f64 {
    if u > -0.7 {
        ln_1p_minus_x(u)
    } else if one_plus > 0.0 {
        one_plus.ln() - u
    } else {
        f64::NEG_INFINITY
    }
}

/// The density x^(a−1) y^(b−1)/B(a, b) on (0, 1), 0 outside; +∞ at an end with exponent below 1. Relative error
/// ≈ (8 + |ln density|) units in the last place.
pub fn density(a: f64, b: f64, x: f64) -> f64 {
    if !(0.0..=1.0).contains(&x) {
        return 0.0;
    }
    if x == 0.0 || x == 1.0 {
        let (near, far) = if x == 0.0 { (a, b) } else { (b, a) };
        return if near < 1.0 {
            f64::INFINITY
        } else if near == 1.0 {
            far
        } else {
            0.0
        };
    }
    density_at(a, b, Point::at(x))
}

/// [`density`] inside the interval.
fn density_at(a: f64, b: f64, point: Point) -> f64 {
    let (x, y) = (point.x.0, point.y.0);
    match (a >= 1.0, b >= 1.0) {
        (true, true) => mass(a - 1.0, b - 1.0, point) * (a + b - 1.0),
        (true, false) => mass(a - 1.0, b, point) * b / y,
        (false, true) => mass(a, b - 1.0, point) * a / x,
        (false, false) => mass(a, b, point) * (a / (a + b)) * b / x / y,
    }
}

/// P(X ≤ x), the regularized incomplete beta function I_x(a, b). a, b from 1e-3 to 1e9 and beyond; relative
/// error below 1e-13·(1 + |ln P|/100) down to 1e-300.
pub fn below(a: f64, b: f64, x: f64) -> f64 {
    if x <= 0.0 {
        0.0
    } else if x >= 1.0 {
        1.0
    } else {
        both(a, b, Point::at(x)).0
    }
}

/// P(X > x) = I_{1−x}(b, a); accuracy as [`below`].
pub fn above(a: f64, b: f64, x: f64) -> f64 {
    if x <= 0.0 {
        1.0
    } else if x >= 1.0 {
        0.0
    } else {
        both(a, b, Point::at(x)).1
    }
}

/// (P, Q), each with full relative accuracy.
pub(crate) fn both(a: f64, b: f64, point: Point) -> (f64, f64) {
    let (x, y) = (point.x.0, point.y.0);
    if x <= 0.0 {
        return (0.0, 1.0);
    }
    if y <= 0.0 {
        return (1.0, 0.0);
    }
    let exchanged = |(p, q): (f64, f64)| (q, p);
    if a >= 1.0 && b >= 1.0 {
        if point.balance(a, b) > 0.0 {
            return exchanged(both_below_mean(b, a, point.reflected()));
        }
        return both_below_mean(a, b, point);
    }
    if a < 1.0 && b < 1.0 {
        return if x <= 0.5 {
            small_parameter(a, b, point)
        } else {
            exchanged(small_parameter(b, a, point.reflected()))
        };
    }
    if a >= 1.0 {
        return exchanged(both(b, a, point.reflected()));
    }
    // a < 1 ≤ b
    if b * x <= 1.0 && x <= 0.7 {
        return small_parameter(a, b, point);
    }
    let upper = (mass(b, a, point.reflected()) * fraction(b, a, point.reflected())).clamp(0.0, 1.0);
    (1.0 - upper, upper)
}

/// Both parameters from here on use quadrature instead of the continued fraction.
const QUADRATURE_FROM: f64 = 1000.0;

/// (P, Q) for a, b ≥ 1 and x at or below the mean.
fn both_below_mean(a: f64, b: f64, point: Point) -> (f64, f64) {
    let lower = if a.min(b) >= QUADRATURE_FROM {
        tail_quadrature(a, b, point)
    } else {
        let mass = mass(a, b, point);
        if mass == 0.0 { 0.0 } else { mass * fraction(a, b, point) }
    };
    let lower = lower.clamp(0.0, 1.0);
    (lower, 1.0 - lower)
}

/// I_x(a, b)/mass for x below the mean, by the continued fraction of DiDonato & Morris (1992, ACM Trans. Math.
/// Softw. 18:360, eq. 9; from memory), whose coefficients are positive for n < b; forward recurrence.
fn fraction(a: f64, b: f64, point: Point) -> f64 {
    let (x, y) = (point.x.0, point.y.0);
    let c = 1.0 - point.balance(a, b);
    let c0 = b / a;
    let c1 = 1.0 + 1.0 / a;
    let (mut p, mut s) = (1.0, a + 1.0);
    let (mut an, mut bn) = (0.0, 1.0);
    let (mut an_next, mut bn_next) = (1.0, c / c1);
    let mut ratio = c1 / c;
    for n in 1..10_000_000 {
        let n = f64::from(n);
        let t = n / a;
        let w = n * (b - n) * x;
        let e = a / s;
        let alpha = (p * (p + c0) * e * e) * (w * x);
        let e = (1.0 + t) / (c1 + t + t);
        let beta = n + w / s + e * (c + n * (1.0 + y));
        p = 1.0 + t;
        s += 2.0;
        let (a_new, b_new) = (alpha * an + beta * an_next, alpha * bn + beta * bn_next);
        an = an_next / b_new;
        bn = bn_next / b_new;
        an_next = a_new / b_new;
        bn_next = 1.0;
        let previous = ratio;
        ratio = an_next;
        if (ratio - previous).abs() <= 1e-16 * ratio.abs() || !ratio.is_finite() {
            break;
        }
    }
    // x^a y^b/B(a, b) = mass·ab/(a + b)
    ratio * (a / (a + b)) * b
}

/// I_x(a, b) for large a, b and x at or below the mean: density(x)·∫_0^x f(x − h)/f(x) dh, where
/// ln f(x−h)/f(x) = −s·h + (a−1)·L(−h/x) + (b−1)·L(h/y), L(u) = ln(1+u) − u, s the slope of ln f at x: nothing
/// cancels, and 40 Gauss–Legendre points reach the last bits.
fn tail_quadrature(a: f64, b: f64, point: Point) -> f64 {
    let (x, y) = (point.x.0, point.y.0);
    let density = density_at(a, b, point);
    if density == 0.0 {
        return 0.0;
    }
    let slope = (x - y - point.balance(a, b)) / x / y;
    let curvature = (a - 1.0) / x / x + (b - 1.0) / y / y;
    let reach = 2.0 * 48.0;
    let length = (reach / (slope + (slope * slope + reach * curvature).sqrt())).min(0.999_999 * x);
    let ratio = legendre::integrate(length, |h| {
        (-slope * h + (a - 1.0) * ln_1p_minus_x(-h / x) + (b - 1.0) * ln_1p_minus_x(h / y)).exp()
    });
    density * ratio
}

/// (P, Q) for a < 1 by the power series in x, for b·x ≤ 1 or b < 1.
///
/// P = (1+u)(1 + a Σ_{j≥1} (1−b)_j x^j/(j! (a+j))), 1 + u = x^a Γ(a+b)/(Γ(a+1)Γ(b)) (DLMF 8.17.7), and Q from the
/// same without subtracting P from 1.
fn small_parameter(a: f64, b: f64, point: Point) -> (f64, f64) {
    let x = point.x.0;
    let (mut sum, mut coefficient, mut j) = (0.0f64, 1.0, 0.0);
    loop {
        j += 1.0;
        coefficient *= (j - b) / j * x;
        let addend = coefficient / (a + j);
        sum += addend;
        if addend.abs() <= 1e-18 * sum.abs() || coefficient == 0.0 {
            break;
        }
    }
    let exponent = a * point.ln_x() + ln_gamma_ratio(a, b) - ln_gamma_ratio(a, 1.0);
    let upper = -libm::expm1(exponent) - exponent.exp() * a * sum;
    ((exponent.exp() * (1.0 + a * sum)).clamp(0.0, 1.0), upper.clamp(0.0, 1.0))
}

/// The x with P(X ≤ x) = p, 0 < p < 1 (0 and 1 outside): a few units in the last place of x, times the
/// conditioning of the problem. 0 where the quantile underflows.
pub fn quantile(a: f64, b: f64, p: f64) -> f64 {
    if p <= 0.0 {
        0.0
    } else if p >= 1.0 {
        1.0
    } else {
        invert(a, b, p, Tail::Lower)
    }
}

/// The x with P(X > x) = q; accurate for tiny q.
pub fn quantile_above(a: f64, b: f64, q: f64) -> f64 {
    if q <= 0.0 {
        1.0
    } else if q >= 1.0 {
        0.0
    } else {
        invert(a, b, q, Tail::Upper)
    }
}

/// Solves for the smaller of x and 1 − x.
fn invert(a: f64, b: f64, target: f64, tail: Tail) -> f64 {
    let (lower, upper) = both(a, b, Point::at(0.5));
    let in_left_half = match tail {
        Tail::Lower => target <= lower,
        Tail::Upper => target >= upper,
    };
    if in_left_half {
        invert_left(a, b, target, tail)
    } else {
        let mirrored = if tail == Tail::Lower { Tail::Upper } else { Tail::Lower };
        1.0 - invert_left(b, a, target, mirrored)
    }
}

/// The solution x ≤ ½.
fn invert_left(a: f64, b: f64, target: f64, tail: Tail) -> f64 {
    // Work with the smaller of target and 1 − target where the subtraction is harmless.
    let (target, tail) = match tail {
        Tail::Lower if target > 0.6 => (1.0 - target, Tail::Upper),
        Tail::Upper if target > 0.6 => (1.0 - target, Tail::Lower),
        _ => (target, tail),
    };
    let start = start(a, b, target, tail);
    if start == 0.0 {
        return 0.0;
    }
    on_positive_axis(target, start.min(0.5), tail, |x| {
        if x >= 1.0 {
            let probability = if tail == Tail::Lower { 1.0 } else { 0.0 };
            return Probe { probability, density: 0.0 };
        }
        let (lower, upper) = both(a, b, Point::at(x));
        Probe {
            probability: if tail == Tail::Lower { lower } else { upper },
            density: density_at(a, b, Point::at(x)),
        }
    })
    .min(0.5)
}

/// A start for the iteration: the power law near 0, or a normal approximation to half the logit of X (Abramowitz
/// & Stegun 26.5.22; from memory, only a start).
fn start(a: f64, b: f64, target: f64, tail: Tail) -> f64 {
    if a > 1.0 && b > 1.0 {
        let z = if tail == Tail::Lower { -normal::quantile(target) } else { -normal::quantile_above(target) };
        let lambda = (z * z - 3.0) / 6.0;
        let (from_a, from_b) = (1.0 / (2.0 * a - 1.0), 1.0 / (2.0 * b - 1.0));
        let h = 2.0 / (from_a + from_b);
        let w =
            z * (h + lambda).max(0.0).sqrt() / h - (from_b - from_a) * (lambda + 5.0 / 6.0 - 2.0 / (3.0 * h));
        let x = a / (a + b * (2.0 * w).exp());
        return if x > 0.0 { x } else { f64::MIN_POSITIVE };
    }
    let ln_lower = if tail == Tail::Lower { target.ln() } else { libm::log1p(-target) };
    // ln 1/(a B(a, b)), roughly where only a start is needed.
    let ln_scale = libm::lgamma(a + b) - libm::lgamma(a + 1.0) - libm::lgamma(b);
    ((ln_lower - ln_scale) / a).exp()
}

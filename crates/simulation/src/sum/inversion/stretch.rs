//! Continuous laws cut into stretches that quadrature can handle: smooth, one-directional, with graded panels.
//!
//! Everything here is in the summand's own standard units, (x − mean)/sd, so that shift and scale of the law
//! cancel. A stretch runs outwards from its start; the panels come from the family's skeleton and are halved
//! until two Gauss–Legendre rules agree on the mass and the second moment.

use super::ray::{Ray, RayValue};
use super::tails::at_or_below;
use crate::law::{Density, Piece};
use num_complex::Complex64;
use std::sync::Arc;

/// Nodes per panel of the finer rule.
const FINE: usize = 24;
/// Nodes per panel of the rule it is compared with.
const COARSE: usize = 18;

/// Gauss–Legendre nodes and weights on [−1, 1].
///
/// Newton's method on the Legendre recurrence from the usual cosine start; accurate to a few units in the last
/// place for the small orders used here.
pub(super) fn gauss_legendre(order: usize) -> Vec<(f64, f64)> {
    let n = order as f64;
    (0..order)
        .map(|i| {
            let mut x = -((std::f64::consts::PI * (i as f64 + 0.75)) / (n + 0.5)).cos();
            let mut derivative = 1.0;
            for _ in 0..100 {
                let (mut p0, mut p1) = (1.0, x);
                for k in 2..=order {
                    let k = k as f64;
                    (p0, p1) = (p1, ((2.0 * k - 1.0) * x * p1 - (k - 1.0) * p0) / k);
                }
                derivative = n * (x * p1 - p0) / (x * x - 1.0);
                let step = p1 / derivative;
                x -= step;
                if step.abs() < 1e-16 {
                    break;
                }
            }
            (x, 2.0 / ((1.0 - x * x) * derivative * derivative))
        })
        .collect()
}

/// One panel of a stretch.
#[derive(Debug, Clone)]
pub(super) struct StretchPanel {
    /// The end nearer the start of the stretch, in the family's units.
    pub(super) inner: f64,
    /// Length in standard units.
    pub(super) length: f64,
    /// Standardized nodes.
    pub(super) nodes: Vec<f64>,
    /// Probabilities at the nodes.
    pub(super) weights: Vec<f64>,
    /// Mass and first moment (about the law's mean) of this panel and all beyond it in the stretch.
    pub(super) mass_from_here: f64,
    /// See `mass_from_here`.
    pub(super) mean_from_here: f64,
}

/// A smooth stretch of one piece.
#[derive(Debug, Clone)]
pub(super) struct Stretch {
    density: Arc<dyn Density>,
    factor: f64,
    /// Standardized image of the family's zero, and scale of the image.
    add: f64,
    multiply: f64,
    direction: f64,
    start: f64,
    end: f64,
    near: f64,
    /// Whether rays may leave the axis in this direction.
    pub(super) rotates: bool,
    /// Panels from the start outwards.
    pub(super) panels: Vec<StretchPanel>,
    /// Mass beyond the last panel that no panel covers, and its first moment; part of the `…_from_here` sums.
    pub(super) mass_beyond: f64,
    /// Mass left out altogether: beyond the last panel of a stretch whose rays may not be turned.
    pub(super) mass_left_out: f64,
    /// Largest disagreement of the two rules, as a share of mass plus second moment of the law.
    pub(super) rule_error: f64,
}

/// Where and how a law's continuous part is standardized.
#[derive(Debug, Clone, Copy)]
pub(super) struct Standard {
    /// Mean of the law.
    pub(super) mean: f64,
    /// Standard deviation of the law.
    pub(super) sd: f64,
}

/// Panels of one stretch; what is left unsplit counts in the error.
const MOST_PANELS: usize = 1500;

impl Stretch {
    /// All stretches of a piece, cut at its breakpoints and, for two-sided families, at the median.
    pub(super) fn of_piece(piece: &Piece, standard: Standard) -> Vec<Self> {
        let density = &piece.density;
        let (support_low, support_high) = density.support();
        let low = piece.low.max(support_low);
        let high = piece.high.min(support_high);
        if low.is_nan() || high.is_nan() || low >= high {
            return Vec::new();
        }
        let mut cuts: Vec<f64> =
            density.breakpoints().into_iter().filter(|b| *b > low && *b < high).collect();
        let two_sided = support_low == f64::NEG_INFINITY;
        if two_sided {
            let median = density.quantile(0.5);
            if median > low
                && median < high
                && !cuts.iter().any(|c| (c - median).abs() < 1e-9 * (1.0 + median.abs()))
            {
                cuts.push(median);
            }
        }
        cuts.sort_by(f64::total_cmp);
        let mut ends = vec![low];
        ends.extend(cuts);
        ends.push(high);
        let median = density.quantile(0.5);
        ends.windows(2)
            .map(|w| {
                let (a, b) = (w[0], w[1]);
                let downwards =
                    a == f64::NEG_INFINITY || (two_sided && b <= median + 1e-9 * (1.0 + median.abs()));
                let (start, end, direction) = if downwards { (b, a, -1.0) } else { (a, b, 1.0) };
                let near = middle_of(density.as_ref(), a, b);
                Self::build(piece, standard, start, end, direction, near)
            })
            .collect()
    }

    fn build(piece: &Piece, standard: Standard, start: f64, end: f64, direction: f64, near: f64) -> Self {
        let density = Arc::clone(&piece.density);
        let multiply = piece.multiply / standard.sd;
        let add = (piece.add - standard.mean) / standard.sd;
        let turn = if direction > 0.0 { density.rotation_up() } else { density.rotation_down() };
        let mut result = Self {
            density,
            factor: piece.factor,
            add,
            multiply,
            direction,
            start,
            end,
            near,
            rotates: turn > 0.01,
            panels: Vec::new(),
            mass_beyond: 0.0,
            mass_left_out: 0.0,
            rule_error: 0.0,
        };
        let mut edges: Vec<f64> = result
            .density
            .skeleton()
            .into_iter()
            .filter(|x| (x - start) * direction > 0.0 && (end - x) * direction > 0.0 && x.is_finite())
            .collect();
        if start.is_finite() {
            edges.push(start);
        }
        if end.is_finite() {
            edges.push(end);
        }
        edges.sort_by(|a, b| (a * direction).total_cmp(&(b * direction)));
        edges.dedup();
        let (fine, coarse) = (gauss_legendre(FINE), gauss_legendre(COARSE));
        for w in edges.windows(2) {
            result.add_panels(w[0], w[1], &fine, &coarse, 0);
        }
        let last = edges.last().copied().unwrap_or(start);
        let mut mean_beyond = 0.0;
        if end.is_infinite() {
            let beyond =
                if direction > 0.0 { result.density.above(last) } else { result.density.at_or_below(last) };
            let mass = piece.factor * beyond;
            if result.rotates {
                let ray = Ray::new(result.density.as_ref(), last, last, direction);
                let moment = piece.factor * ray.first_moment();
                result.mass_beyond = mass;
                mean_beyond = mass * result.image(last) + direction * multiply * moment;
            } else {
                result.mass_left_out = mass;
            }
        }
        let (mut mass, mut mean) = (result.mass_beyond, mean_beyond);
        for panel in result.panels.iter_mut().rev() {
            for (x, w) in panel.nodes.iter().zip(&panel.weights) {
                mass += w;
                mean += w * x;
            }
            panel.mass_from_here = mass;
            panel.mean_from_here = mean;
        }
        result
    }

    fn image(&self, x: f64) -> f64 {
        self.add + self.multiply * x
    }

    fn add_panels(&mut self, inner: f64, outer: f64, fine: &[(f64, f64)], coarse: &[(f64, f64)], depth: u32) {
        let (middle, half) = (0.5 * (inner + outer), 0.5 * (outer - inner).abs());
        let length = 2.0 * half * self.multiply.abs();
        let rule = |rule: &[(f64, f64)]| -> (Vec<f64>, Vec<f64>, f64) {
            let mut nodes = Vec::with_capacity(rule.len());
            let mut weights = Vec::with_capacity(rule.len());
            let mut total = 0.0;
            for (u, w) in rule {
                let x = middle + half * u;
                let f = self.density.density(x);
                let weight = if f.is_finite() { self.factor * half * w * f } else { 0.0 };
                let image = self.image(x);
                nodes.push(image);
                weights.push(weight);
                total += weight * (1.0 + image * image);
            }
            (nodes, weights, total)
        };
        let (nodes, weights, total) = rule(fine);
        let (_, _, rough) = rule(coarse);
        let difference = (total - rough).abs();
        let too_long = !self.rotates && length > 8.0;
        let splittable = middle != inner && middle != outer && self.panels.len() < MOST_PANELS;
        // Halving gains many digits until the density's own rounding is reached, which shows as a difference
        // far below what the whole law weighs.
        let rough_panel = difference > 2e-15 * total && difference > 2e-17;
        if splittable && ((depth < 60 && rough_panel) || (too_long && depth < 12)) {
            self.add_panels(inner, middle, fine, coarse, depth + 1);
            self.add_panels(middle, outer, fine, coarse, depth + 1);
            return;
        }
        // The finer rule is better than the coarser one by far more than this factor.
        self.rule_error += if depth < 60 { 1e-2 * difference } else { difference };
        self.panels.push(StretchPanel {
            inner,
            length,
            nodes,
            weights,
            mass_from_here: 0.0,
            mean_from_here: 0.0,
        });
    }

    /// Total variation of the density over the stretch, jumps at its ends included, per standard unit; from
    /// its values at the nodes and ends, with a tenth added for what lies between them.
    pub(super) fn variation(&self) -> f64 {
        let scale = self.factor / self.multiply.abs();
        let (mut last, mut sum) = (0.0, 0.0);
        for panel in &self.panels {
            let mut points: Vec<f64> = panel.nodes.iter().map(|x| (x - self.add) / self.multiply).collect();
            points.push(panel.inner);
            points.sort_by(|a, b| (a * self.direction).total_cmp(&(b * self.direction)));
            for x in points {
                let f = scale * self.density.density(x);
                sum += (f - last).abs();
                last = f;
            }
        }
        1.1 * (sum + 2.0 * last)
    }

    /// Adds Gauss–Legendre nodes on sub-panels no longer than `longest`, unless there are more than `limit`.
    pub(super) fn dense_nodes(&self, longest: f64, limit: usize, nodes: &mut Vec<(f64, f64)>) {
        let rule = gauss_legendre(FINE);
        for panel in &self.panels {
            let parts = (panel.length / longest).ceil().max(1.0);
            if nodes.len() as f64 + parts * FINE as f64 > limit as f64 {
                nodes.resize(limit, (0.0, 0.0));
                return;
            }
            let half = 0.5 * panel.length / parts / self.multiply.abs();
            for k in 0..parts as usize {
                let middle = panel.inner + self.direction * half * (2.0 * k as f64 + 1.0);
                for (u, w) in &rule {
                    let x = middle + half * u;
                    let f = self.density.density(x);
                    if f.is_finite() {
                        nodes.push((self.image(x), self.factor * half * w * f));
                    }
                }
            }
        }
    }

    /// Standardized position of the start, if finite.
    pub(super) fn start(&self) -> Option<f64> {
        self.start.is_finite().then(|| self.image(self.start))
    }

    /// Standardized position of the end, if finite.
    pub(super) fn end(&self) -> Option<f64> {
        self.end.is_finite().then(|| self.image(self.end))
    }

    /// factor·∫₀^∞ f(e ± y) e^{−i t (image(e ± y) − image(e))} dy, for a real point e of the stretch (family units)
    /// and t > 0: the transform of the untruncated rest, seen from e.
    fn seen_from(&self, point: f64, t: f64, enough: f64) -> RayValue {
        let ray = Ray::new(self.density.as_ref(), point, self.near, self.direction);
        let slope = t * self.multiply * self.direction;
        let mut value = ray.fourier(slope.abs(), enough / self.factor);
        if slope < 0.0 {
            value.value = value.value.conj();
        }
        value.value *= self.factor;
        value.absolute *= self.factor;
        value.error *= self.factor;
        value
    }

    /// The rest seen from the start.
    pub(super) fn seen_from_start(&self, t: f64, enough: f64) -> RayValue {
        self.seen_from(self.start, t, enough)
    }

    /// The rest seen from the end; zero where the stretch is unbounded.
    pub(super) fn seen_from_end(&self, t: f64, enough: f64) -> RayValue {
        if self.end.is_finite() {
            self.seen_from(self.end, t, enough)
        } else {
            RayValue { value: Complex64::ZERO, absolute: 0.0, error: 0.0 }
        }
    }

    /// ∫ over the stretch of (e^{−itx} − 1 + itx) dF, and its error: panels near the start node by node, the
    /// panels over which the kernel turns fast by rays.
    pub(super) fn compensated(&self, t: f64) -> (Complex64, f64) {
        let (mut real, mut imaginary) = (0.0, 0.0);
        let mut error = 0.0;
        for panel in &self.panels {
            if self.rotates && panel.length * t > 10.0 {
                let near = self.seen_from(panel.inner, t, 0.0);
                let far = self.seen_from_end(t, 0.0);
                let at_near = Complex64::from_polar(1.0, -t * self.image(panel.inner)) * near.value;
                let at_far = match self.end() {
                    Some(end) => Complex64::from_polar(1.0, -t * end) * far.value,
                    None => Complex64::ZERO,
                };
                let rest = at_near - at_far;
                real += rest.re - panel.mass_from_here;
                imaginary += rest.im + t * panel.mean_from_here;
                error +=
                    near.error + far.error + 1e-16 * (panel.mass_from_here + t * panel.mean_from_here.abs());
                return (Complex64::new(real, imaginary), error);
            }
            for (x, w) in panel.nodes.iter().zip(&panel.weights) {
                let (re, im) = compensated_kernel(t * x);
                real += w * re;
                imaginary += w * im;
            }
        }
        if self.mass_beyond > 0.0
            && let Some(last) = self.panels.last()
        {
            let outer = last.inner + self.direction * last.length / self.multiply.abs();
            let near = self.seen_from(outer, t, 0.0);
            let value = Complex64::from_polar(1.0, -t * self.image(outer)) * near.value;
            let mean =
                last.mean_from_here - last.nodes.iter().zip(&last.weights).map(|(x, w)| x * w).sum::<f64>();
            real += value.re - self.mass_beyond;
            imaginary += value.im + t * mean;
            error += near.error + 1e-16 * (self.mass_beyond + t * mean.abs());
        }
        (Complex64::new(real, imaginary), error)
    }
}

fn middle_of(density: &dyn Density, low: f64, high: f64) -> f64 {
    let p = 0.5 * (at_or_below(density, low) + at_or_below(density, high));
    let middle = if p > 0.0 && p < 1.0 { density.quantile(p) } else { f64::NAN };
    if middle > low && middle < high {
        middle
    } else if low.is_finite() && high.is_finite() {
        0.5 * (low + high)
    } else if low.is_finite() {
        low + 1.0
    } else {
        high - 1.0
    }
}

/// e^{−iw} − 1 + iw for real w, with full relative accuracy of both parts near 0.
pub(super) fn compensated_kernel(w: f64) -> (f64, f64) {
    let (sine, _) = (0.5 * w).sin_cos();
    let imaginary = if w.abs() < 0.7 {
        // w − sin w = w³/3! − w⁵/5! + …
        let q = w * w;
        let series = 1.0 / 6.0
            - q * (1.0 / 120.0
                - q * (1.0 / 5040.0
                    - q * (1.0 / 362_880.0
                        - q * (1.0 / 39_916_800.0 - q * (1.0 / 6_227_020_800.0 - q / 1_307_674_368_000.0)))));
        w * q * series
    } else {
        w - w.sin()
    };
    (-2.0 * sine * sine, imaginary)
}

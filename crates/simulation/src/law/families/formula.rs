//! A density typed as text in `x` on [low, high], normalised here. The grammar is in [`crate::law::expression`].
//!
//! The interval is bisected until a 20-node rule and its two halves agree on every stretch to 1e-15 of the
//! whole (probabilities are right to that absolute error, not relatively in the tails); kinks end up between stretches. Refused are negative or undefined values at any node, a total that
//! does not converge (infinite mass) or vanishes, and singular ends away from 0 that doubles cannot resolve.

use crate::law::Piece;
use crate::law::checks::{Checks, compensated_sum, show};
use crate::law::density::Density;
use crate::law::expression::Expression;
use crate::law::form::Form;
use crate::law::quadrature::{standard_rule, stretch};
use num_complex::Complex64;
use rand::RngExt;
use std::sync::Arc;

/// Most stretches before a density counts as too rough.
const MOST_STRETCHES: usize = 1 << 13;

/// A normalised formula.
#[derive(Debug)]
struct Formula {
    expression: Expression,
    /// Ends of the stretches, ascending, low and high included.
    ends: Vec<f64>,
    /// P(X ≤ end) and P(X > end).
    below: Vec<f64>,
    above: Vec<f64>,
    /// For draws: a little more than the largest density on each stretch.
    ceilings: Vec<f64>,
    /// Divides the typed density.
    total: f64,
}

pub(super) fn compile(density: &str, low: f64, high: f64, checks: &mut Checks) -> Option<Form> {
    if !checks.ordered("low", low, "high", high) {
        return None;
    }
    let expression = match Expression::parse(density) {
        Ok(expression) => expression,
        Err(message) => {
            checks.problem("density", message);
            return None;
        }
    };
    match Formula::new(expression, low, high) {
        Ok(formula) => Some(Form::piece(Piece::whole(Arc::new(formula), 1.0, 0.0, 1.0))),
        Err(message) => {
            checks.problem("density", message);
            None
        }
    }
}

impl Formula {
    fn new(expression: Expression, low: f64, high: f64) -> Result<Self, String> {
        let largest = check_values(&expression, low, high)?;
        let scale = largest * (high - low);
        if !scale.is_finite() || scale < 1e-290 {
            return Err("is too large or too small to be normalised".to_owned());
        }
        // Stretches still to be looked at, and done ones with their integrals.
        let first = 32;
        let width = (high - low) / f64::from(first);
        let at = |i: i32| if i == first { high } else { low + width * f64::from(i) };
        let mut open: Vec<(f64, f64)> = (0..first).rev().map(|i| (at(i), at(i + 1))).collect();
        let mut done: Vec<(f64, f64)> = Vec::new();
        let f = |x: f64| expression.at(x);
        let rough: f64 = open.iter().map(|&(a, b)| stretch(a, b, f).abs()).sum();
        let mut total = rough;
        // Mass of stretches too short to bisect further, whose integral is not certain.
        let mut uncertain = 0.0;
        while let Some((a, b)) = open.pop() {
            check_values(&expression, a, b)?;
            let middle = 0.5 * a + 0.5 * b;
            let whole = stretch(a, b, f);
            let halves = stretch(a, middle, f) + stretch(middle, b, f);
            if !halves.is_finite() || halves > 1e6 * total {
                return Err(infinite_mass());
            }
            total = total.max(halves);
            let off = (whole - halves).abs();
            if off <= 1e-16 * total || (off <= 4e-15 * halves && halves < 0.1 * total) {
                done.push((a, halves));
            } else if b - a <= 16.0 * f64::EPSILON * a.abs().max(b.abs()) || b - a < 1e-300 {
                uncertain += halves.abs() + off;
                done.push((a, halves));
            } else if open.len() + done.len() > MOST_STRETCHES {
                return Err("has too many peaks or kinks, or infinite mass".to_owned());
            } else {
                open.push((middle, b));
                open.push((a, middle));
            }
        }
        let total = compensated_sum(done.iter().map(|stretch| stretch.1));
        if uncertain > 1e-13 * total {
            return Err(infinite_mass());
        }
        let mut ends: Vec<f64> = done.iter().map(|stretch| stretch.0).collect();
        ends.push(high);
        let running = |masses: &mut dyn Iterator<Item = f64>| {
            let mut sum = 0.0;
            std::iter::once(0.0)
                .chain(masses.map(|mass| {
                    sum += mass / total;
                    sum
                }))
                .collect::<Vec<f64>>()
        };
        let below = running(&mut done.iter().map(|stretch| stretch.1));
        let mut above = running(&mut done.iter().rev().map(|stretch| stretch.1));
        above.reverse();
        let mut formula = Self { expression, ends, below, above, ceilings: Vec::new(), total };
        // 20 nodes resolve each stretch to rounding, so what lies between them exceeds them by little.
        formula.ceilings = formula
            .ends
            .windows(2)
            .map(|pair| {
                let (half, middle) = (0.5 * (pair[1] - pair[0]), 0.5 * pair[0] + 0.5 * pair[1]);
                let nodes = standard_rule().iter().map(|&(node, _)| formula.value(middle + half * node));
                1.05 * nodes
                    .chain(pair.iter().map(|&end| formula.value(end)).filter(|f| f.is_finite()))
                    .fold(0.0, f64::max)
            })
            .collect();
        Ok(formula)
    }

    /// The stretch that contains x, which lies inside the support.
    fn stretch_of(&self, x: f64) -> usize {
        self.ends.partition_point(|&end| end <= x).clamp(1, self.ends.len() - 1) - 1
    }

    fn low(&self) -> f64 {
        self.ends[0]
    }

    fn high(&self) -> f64 {
        self.ends[self.ends.len() - 1]
    }

    fn value(&self, x: f64) -> f64 {
        let value = self.expression.at(x) / self.total;
        if value.is_nan() { 0.0 } else { value.max(0.0) }
    }

    /// The x inside stretch `index` where the increasing `reached(x)` crosses 0, by bisection and secants.
    fn solve(&self, index: usize, excess: impl Fn(f64) -> f64) -> f64 {
        let (mut a, mut b) = (self.ends[index], self.ends[index + 1]);
        let mut x = 0.5 * a + 0.5 * b;
        for _ in 0..80 {
            let off = excess(x);
            if off > 0.0 {
                b = x
            } else {
                a = x
            }
            let newton = x - off / self.value(x);
            let next = if newton > a && newton < b { newton } else { 0.5 * a + 0.5 * b };
            if next == x || b - a <= f64::EPSILON * a.abs().max(b.abs()) {
                break;
            }
            x = next;
        }
        x
    }

    /// 1 + d ln f/d ln r at distance r from an end.
    fn exponent(&self, end: f64, inwards: f64) -> f64 {
        let (near, far) = (self.value(end + 1e-7 * inwards), self.value(end + 1e-6 * inwards));
        if near <= 0.0 || far <= 0.0 {
            return f64::INFINITY;
        }
        let exponent = 1.0 + (far / near).log10();
        // A jump up to a slope of the density is a jump.
        if (exponent - exponent.round()).abs() < 1e-4 { exponent.round() } else { exponent }
    }
}

fn infinite_mass() -> String {
    "has infinite mass, or a singular end that cannot be resolved there (move a singular end to x = 0)"
        .to_owned()
}

/// Whether all nodes of the rule on [a, b] have a usable value; the largest of them.
fn check_values(expression: &Expression, a: f64, b: f64) -> Result<f64, String> {
    let mut largest = 0.0f64;
    for &(node, _) in standard_rule() {
        let x = 0.5 * a + 0.5 * b + 0.5 * (b - a) * node;
        let value = expression.at(x);
        if !value.is_finite() {
            return Err(format!(
                "must be a finite number everywhere (got {} at x = {})",
                show(value),
                show(x)
            ));
        }
        if value < 0.0 {
            return Err(format!("must not be negative (got {} at x = {})", show(value), show(x)));
        }
        largest = largest.max(value);
    }
    Ok(largest)
}

impl Density for Formula {
    fn name(&self) -> &'static str {
        "formula"
    }
    fn support(&self) -> (f64, f64) {
        (self.low(), self.high())
    }
    fn density(&self, x: f64) -> f64 {
        if x < self.low() || x > self.high() { 0.0 } else { self.value(x) }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= self.low() {
            return 0.0;
        }
        if x >= self.high() {
            return 1.0;
        }
        let index = self.stretch_of(x);
        (self.below[index] + stretch(self.ends[index], x, |t| self.value(t))).min(1.0)
    }
    fn above(&self, x: f64) -> f64 {
        if x <= self.low() {
            return 1.0;
        }
        if x >= self.high() {
            return 0.0;
        }
        let index = self.stretch_of(x);
        (self.above[index + 1] + stretch(x, self.ends[index + 1], |t| self.value(t))).min(1.0)
    }
    fn quantile(&self, p: f64) -> f64 {
        let index = self.below.partition_point(|&below| below < p).clamp(1, self.ends.len() - 1) - 1;
        self.solve(index, |x| self.at_or_below(x) - p)
    }
    fn quantile_above(&self, q: f64) -> f64 {
        let index = self.above.partition_point(|&above| above > q).clamp(1, self.ends.len() - 1) - 1;
        self.solve(index, |x| q - self.above(x))
    }
    fn density_complex(&self, x: Complex64, near: f64) -> Complex64 {
        let value = self.expression.at_complex(x, near) / self.total;
        if value.re.is_nan() || value.im.is_nan() { Complex64::new(0.0, 0.0) } else { value }
    }
    /// Nothing is known of a typed formula off the axis.
    fn rotation_up(&self) -> f64 {
        0.0
    }
    fn rotation_down(&self) -> f64 {
        0.0
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    fn skeleton(&self) -> Vec<f64> {
        self.ends.clone()
    }
    fn lower_exponent(&self) -> f64 {
        self.exponent(self.low(), self.high() - self.low())
    }
    fn upper_exponent(&self) -> f64 {
        self.exponent(self.high(), self.low() - self.high())
    }
    fn upper_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    /// The stretch by its probability, the place on it by rejection under its ceiling.
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        let u: f64 = random.random();
        let index = self.below.partition_point(|&below| below <= u).clamp(1, self.ends.len() - 1) - 1;
        let (from, to, ceiling) = (self.ends[index], self.ends[index + 1], self.ceilings[index]);
        for _ in 0..1000 {
            let x = from + (to - from) * random.random::<f64>();
            if random.random::<f64>() * ceiling <= self.value(x) {
                return x;
            }
        }
        0.5 * from + 0.5 * to
    }
}

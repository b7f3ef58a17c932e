//! One analytic stretch of a law: masses, distribution function, quantiles and quadrature panels.

use super::Piece;
use super::density::Density;
use super::quadrature::{LEVELS, grade_from, stretch, tidy};
use std::sync::Arc;

impl Piece {
    /// The whole of a density, at x = add + multiply·y, carrying the probability `factor`.
    pub(crate) fn whole(density: Arc<dyn Density>, factor: f64, add: f64, multiply: f64) -> Self {
        let (low, high) = density.support();
        Self { factor, density, add, multiply, low, high }
    }

    /// x = add + multiply·y.
    pub fn image(&self, y: f64) -> f64 {
        self.add + self.multiply * y
    }

    /// y = (x − add)/multiply.
    pub fn preimage(&self, x: f64) -> f64 {
        (x - self.add) / self.multiply
    }

    /// Lower end in the quantity's unit.
    pub fn image_low(&self) -> f64 {
        self.image(if self.multiply > 0.0 { self.low } else { self.high })
    }

    /// Upper end in the quantity's unit.
    pub fn image_high(&self) -> f64 {
        self.image(if self.multiply > 0.0 { self.high } else { self.low })
    }

    /// Whether nothing of the density was cut off.
    pub fn is_whole(&self) -> bool {
        (self.low, self.high) == self.density.support()
    }

    /// sup of r with E max(X, 0)^r < ∞ on the piece, and the same for −X.
    pub fn tail_indices(&self) -> (f64, f64) {
        let upper = if self.high.is_finite() { f64::INFINITY } else { self.density.upper_tail_index() };
        let lower = if self.low.is_finite() { f64::INFINITY } else { self.density.lower_tail_index() };
        if self.multiply > 0.0 { (upper, lower) } else { (lower, upper) }
    }

    /// Probability carried by the piece.
    pub fn mass(&self) -> f64 {
        self.factor * self.between(self.low, self.high)
    }

    /// P(X ≤ x, on this piece).
    pub fn at_or_below(&self, x: f64) -> f64 {
        let y = self.clamped_preimage(x);
        self.factor * if self.multiply > 0.0 { self.between(self.low, y) } else { self.between(y, self.high) }
    }

    /// P(X > x, on this piece).
    pub fn above(&self, x: f64) -> f64 {
        let y = self.clamped_preimage(x);
        self.factor * if self.multiply > 0.0 { self.between(y, self.high) } else { self.between(self.low, y) }
    }

    /// Density at x, in the quantity's unit; 0 outside the piece. Finite: a singular end is answered by the
    /// largest double.
    pub fn density(&self, x: f64) -> f64 {
        let y = self.preimage(x);
        if y < self.low || y > self.high || y.is_nan() {
            return 0.0;
        }
        (self.factor / self.multiply.abs() * self.density.density(y)).min(f64::MAX)
    }

    /// The y that splits the piece into `p` of its mass below and the rest above, 0 < p < 1, in family units.
    pub(crate) fn conditional_quantile(&self, p: f64) -> f64 {
        let (low, high) = (self.density.at_or_below(self.low), self.density.above(self.high));
        let y = if low == 0.0 && high == 0.0 {
            if p <= 0.5 { self.density.quantile(p) } else { self.density.quantile_above(1.0 - p) }
        } else if low <= 0.5 && low + p * self.between(self.low, self.high) <= 0.5 {
            self.quantile_or_end(low + p * self.between(self.low, self.high))
        } else {
            self.quantile_above_or_end(high + (1.0 - p) * self.between(self.low, self.high))
        };
        y.clamp(self.low, self.high)
    }

    /// The y with `q` of the piece's mass above it, accurate for tiny q.
    pub(crate) fn conditional_quantile_above(&self, q: f64) -> f64 {
        let high = self.density.above(self.high);
        let target = high + q * self.between(self.low, self.high);
        let y = if target <= 0.5 {
            self.quantile_above_or_end(target)
        } else {
            self.quantile_or_end(
                self.density.at_or_below(self.low) + (1.0 - q) * self.between(self.low, self.high),
            )
        };
        y.clamp(self.low, self.high)
    }

    fn quantile_or_end(&self, p: f64) -> f64 {
        if p > 0.0 && p < 1.0 {
            self.density.quantile(p)
        } else if p <= 0.0 {
            self.low
        } else {
            self.high
        }
    }

    fn quantile_above_or_end(&self, q: f64) -> f64 {
        if q > 0.0 && q < 1.0 {
            self.density.quantile_above(q)
        } else if q <= 0.0 {
            self.high
        } else {
            self.low
        }
    }

    fn clamped_preimage(&self, x: f64) -> f64 {
        let y = self.preimage(x);
        // Only (±∞ − ±∞) and the like give NaN, which no finite law meets; answer as for the lower end.
        if y.is_nan() { self.low } else { y.clamp(self.low, self.high) }
    }

    /// P(a < Y < b) of the untruncated density, by whichever difference loses least; short stretches, where
    /// both differences cancel, by quadrature.
    pub(crate) fn between(&self, a: f64, b: f64) -> f64 {
        if a >= b {
            return 0.0;
        }
        let f = &self.density;
        let (support_low, support_high) = f.support();
        if a <= support_low {
            return if b >= support_high { 1.0 } else { f.at_or_below(b) };
        }
        if b >= support_high {
            return f.above(a);
        }
        let (below_a, above_b) = (f.at_or_below(a), f.above(b));
        let (larger, smaller) =
            if below_a <= above_b { (f.at_or_below(b), below_a) } else { (f.above(a), above_b) };
        let difference = larger - smaller;
        if difference > 0.05 * larger {
            return difference;
        }
        // Short stretch: f is smooth here except close to a singular support end.
        let mut points = vec![a];
        points.extend(f.skeleton().into_iter().filter(|&y| y > a && y < b));
        points.push(b);
        if f.lower_exponent() != 1.0 && support_low.is_finite() {
            points = grade_from(&points, support_low, 3.0);
        }
        points.windows(2).map(|w| stretch(w[0], w[1], |y| f.density(y))).sum()
    }

    /// Points in family units, ascending, from close to `low` to close to `high`, between which a 16–24 node
    /// Gauss–Legendre rule integrates the density: the family's skeleton inside the piece, conditional
    /// quantiles where the piece is a far-off part of the density, and its ends where they are finite.
    pub fn panel_points(&self) -> Vec<f64> {
        let mut points: Vec<f64> =
            self.density.skeleton().into_iter().filter(|&y| y > self.low && y < self.high).collect();
        points.extend(self.density.breakpoints().into_iter().filter(|&y| y > self.low && y < self.high));
        if !self.is_whole() {
            for level in LEVELS {
                points.push(self.conditional_quantile(level));
                points.push(self.conditional_quantile_above(level));
            }
        }
        let (support_low, support_high) = self.density.support();
        let singular_low = support_low.is_finite() && self.density.lower_exponent() != 1.0;
        let singular_high = support_high.is_finite() && self.density.upper_exponent() != 1.0;
        if self.low > support_low || (self.low.is_finite() && !singular_low) {
            points.push(self.low);
        }
        if self.high < support_high || (self.high.is_finite() && !singular_high) {
            points.push(self.high);
        }
        let mut points = tidy(points);
        if support_low.is_finite() {
            let smallest = support_low + f64::MIN_POSITIVE;
            points.retain(|&y| y >= support_low && (y >= smallest || !singular_low));
            points = grade_from(&points, support_low, 4.0);
        }
        points
    }

    /// The panels of [`Piece::panel_points`] in the quantity's unit, ascending.
    pub fn panels(&self) -> Vec<(f64, f64)> {
        let points = self.panel_points();
        let mut panels: Vec<(f64, f64)> = points
            .windows(2)
            .map(|w| {
                let (a, b) = (self.image(w[0]), self.image(w[1]));
                if a <= b { (a, b) } else { (b, a) }
            })
            .filter(|(a, b)| a < b)
            .collect();
        panels.sort_by(|one, other| one.0.total_cmp(&other.0));
        panels
    }

    /// The part of the piece on x_low ≤ x ≤ x_high, or `None` if nothing of positive length is left.
    pub(crate) fn restricted(&self, x_low: f64, x_high: f64) -> Option<Self> {
        let (mut low, mut high) = (self.low, self.high);
        let (from, to) = if self.multiply > 0.0 { (x_low, x_high) } else { (x_high, x_low) };
        if from.is_finite() {
            low = low.max(self.snapped(self.preimage(from)));
        }
        if to.is_finite() {
            high = high.min(self.snapped(self.preimage(to)));
        }
        (low < high).then(|| Self { low, high, ..self.clone() })
    }

    /// An end of the support where y is one up to rounding.
    fn snapped(&self, y: f64) -> f64 {
        let (low, high) = (self.low, self.high);
        let near = |end: f64| {
            end.is_finite()
                && (y - end).abs()
                    <= 4.0 * f64::EPSILON * (end.abs().max(y.abs()) + (self.add / self.multiply).abs())
                && (y - end).abs() < 1e-3 * (high - low)
        };
        if near(low) {
            low
        } else if near(high) {
            high
        } else {
            y
        }
    }

    /// One draw from the piece, conditional on lying on it.
    pub fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        use rand::RngExt;
        if self.is_whole() {
            return self.image(self.density.sample(random));
        }
        let u: f64 = random.sample(rand::distr::Open01);
        self.image(if u <= 0.5 {
            self.conditional_quantile(u)
        } else {
            self.conditional_quantile_above(1.0 - u)
        })
    }
}

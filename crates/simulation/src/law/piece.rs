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
        Slice::of(self).quantile(p)
    }

    /// The y with `q` of the piece's mass above it, accurate for tiny q.
    pub(crate) fn conditional_quantile_above(&self, q: f64) -> f64 {
        Slice::of(self).quantile_above(q)
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
        let integral: f64 = points.windows(2).map(|w| stretch(w[0], w[1], |y| f.density(y))).sum();
        // So far out that the density is no ordinary double any more, the difference is all there is.
        if integral > 1e-290 && integral.is_finite() { integral } else { difference }
    }

    /// Points in family units, ascending, from close to `low` to close to `high`, between which a 16–24 node
    /// Gauss–Legendre rule integrates the density: the family's skeleton inside the piece, conditional
    /// quantiles where the piece is a far-off part of the density, and its ends where they are finite.
    pub fn panel_points(&self) -> Vec<f64> {
        let mut points: Vec<f64> =
            self.density.skeleton().into_iter().filter(|&y| y >= self.low && y <= self.high).collect();
        points.extend(self.density.breakpoints().into_iter().filter(|&y| y > self.low && y < self.high));
        let (support_low, support_high) = self.density.support();
        let singular_low = support_low.is_finite() && self.density.lower_exponent() != 1.0;
        let singular_high = support_high.is_finite() && self.density.upper_exponent() != 1.0;
        if !self.is_whole() {
            let slice = Slice::of(self);
            // Quantiles that are hardly doubles any more would open a panel onto the singularity.
            let usable = |y: &f64| !(singular_low && *y - support_low < 1e-290);
            points.extend(LEVELS.iter().map(|&level| slice.quantile(level)).filter(usable));
            points.extend(LEVELS.iter().map(|&level| slice.quantile_above(level)).filter(usable));
        }
        if self.low > support_low || (self.low.is_finite() && !singular_low) {
            points.push(self.low);
        }
        if self.high < support_high || (self.high.is_finite() && !singular_high) {
            points.push(self.high);
        }
        let mut points = tidy(points);
        if support_low.is_finite() {
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
            .filter(|(a, b)| a < b && a.is_finite() && b.is_finite())
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
}

/// A piece with what its conditional quantiles need, computed once.
#[derive(Debug, Clone)]
pub(crate) struct Slice {
    piece: Piece,
    /// P(Y ≤ low), P(low < Y < high), P(Y > high) of the untruncated density.
    below: f64,
    inside: f64,
    above: f64,
}

impl Slice {
    pub(crate) fn of(piece: &Piece) -> Self {
        Self {
            below: piece.density.at_or_below(piece.low),
            inside: piece.between(piece.low, piece.high),
            above: piece.density.above(piece.high),
            piece: piece.clone(),
        }
    }

    /// The y with share `p` of the piece's mass below it.
    pub(crate) fn quantile(&self, p: f64) -> f64 {
        let target = self.below + p * self.inside;
        if target <= 0.5 {
            self.at_level(target)
        } else {
            self.at_level_above(self.above + (1.0 - p) * self.inside)
        }
    }

    /// The y with share `q` of the piece's mass above it.
    pub(crate) fn quantile_above(&self, q: f64) -> f64 {
        let target = self.above + q * self.inside;
        if target <= 0.5 {
            self.at_level_above(target)
        } else {
            self.at_level(self.below + (1.0 - q) * self.inside)
        }
    }

    /// One draw by inverse transform, tails included.
    pub(crate) fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        use rand::RngExt;
        let u: f64 = random.sample(rand::distr::Open01);
        self.piece.image(if u <= 0.5 { self.quantile(u) } else { self.quantile_above(1.0 - u) })
    }

    fn at_level(&self, p: f64) -> f64 {
        let piece = &self.piece;
        let y = if p > 0.0 && p < 1.0 {
            piece.density.quantile(p)
        } else if p <= 0.0 {
            piece.low
        } else {
            piece.high
        };
        y.clamp(piece.low, piece.high)
    }

    fn at_level_above(&self, q: f64) -> f64 {
        let piece = &self.piece;
        let y = if q > 0.0 && q < 1.0 {
            piece.density.quantile_above(q)
        } else if q <= 0.0 {
            piece.high
        } else {
            piece.low
        };
        y.clamp(piece.low, piece.high)
    }
}

//! Laws outside the normal form: they can be drawn from, their moments are known, exact routes refuse them.

use super::density::StandardMoments;
use std::fmt::Debug;
use std::sync::Arc;

/// What is still known of a law that no table and no density describes.
pub(crate) trait OpaqueLaw: Debug + Send + Sync {
    /// Why the law is not in the normal form, as a clause.
    fn reason(&self) -> String;
    /// Whether its sums still have a closed form although the law has no table.
    fn has_closed_form(&self) -> bool;
    /// The moments.
    fn moments(&self) -> StandardMoments;
    /// Ends of the support.
    fn support(&self) -> (f64, f64);
    /// P(X ≤ x), or P(X < x) with `strictly`.
    fn at_or_below(&self, x: f64, strictly: bool) -> f64;
    /// P(X > x), or P(X ≥ x) with `or_equal`.
    fn above(&self, x: f64, or_equal: bool) -> f64;
    /// sup of r with E max(X, 0)^r < ∞, and the same for −X.
    fn tail_indices(&self) -> (f64, f64);
    /// One draw.
    fn sample(&self, random: &mut dyn rand::Rng) -> f64;
}

/// An affine image of an opaque law, with its share of the whole.
#[derive(Debug, Clone)]
pub(crate) struct Opaque {
    pub(crate) weight: f64,
    pub(crate) law: Arc<dyn OpaqueLaw>,
    pub(crate) add: f64,
    pub(crate) multiply: f64,
}

impl Opaque {
    pub(crate) fn support(&self) -> (f64, f64) {
        let (low, high) = self.law.support();
        let (a, b) = (self.add + self.multiply * low, self.add + self.multiply * high);
        if a <= b { (a, b) } else { (b, a) }
    }

    /// Share of P(X ≤ x), or of P(X < x).
    pub(crate) fn at_or_below(&self, x: f64, strictly: bool) -> f64 {
        let y = (x - self.add) / self.multiply;
        self.weight
            * if self.multiply > 0.0 {
                self.law.at_or_below(y, strictly)
            } else {
                self.law.above(y, !strictly)
            }
    }

    /// Share of P(X > x), or of P(X ≥ x).
    pub(crate) fn above(&self, x: f64, or_equal: bool) -> f64 {
        let y = (x - self.add) / self.multiply;
        self.weight
            * if self.multiply > 0.0 {
                self.law.above(y, or_equal)
            } else {
                self.law.at_or_below(y, !or_equal)
            }
    }

    /// (upper, lower) tail index of the image.
    pub(crate) fn tail_indices(&self) -> (f64, f64) {
        let (upper, lower) = self.law.tail_indices();
        if self.multiply > 0.0 { (upper, lower) } else { (lower, upper) }
    }

    pub(crate) fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        self.add + self.multiply * self.law.sample(random)
    }
}

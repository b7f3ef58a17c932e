//! Questions to a law: moments, probabilities, density and quantiles across atoms and pieces.

use super::form::same;
use super::opaque::Opaque;
use super::sampler::Sampler;
use super::{Law, LawParts, Piece};
use std::sync::{Arc, OnceLock};

/// A normal form with what is computed from it once.
#[derive(Debug)]
pub(super) struct Prepared {
    pub(super) parts: LawParts,
    pub(super) opaque: Vec<Opaque>,
    sd: Option<f64>,
    third_absolute_ratio: Option<f64>,
    /// Σ masses of the first k atoms, and of all from the k-th on.
    from_below: Vec<f64>,
    from_above: Vec<f64>,
    sampler: OnceLock<Sampler>,
}

impl Prepared {
    pub(super) fn new(
        parts: LawParts,
        opaque: Vec<Opaque>,
        sd: Option<f64>,
        third_absolute_ratio: Option<f64>,
    ) -> Self {
        // Compensated, so that a million small masses add up to full accuracy.
        let running = |masses: &mut dyn Iterator<Item = f64>| {
            let (mut sum, mut lost) = (0.0f64, 0.0f64);
            let mut sums = vec![0.0];
            for mass in masses {
                let next = sum + mass;
                lost += if sum >= mass { (sum - next) + mass } else { (mass - next) + sum };
                sum = next;
                sums.push(sum + lost);
            }
            sums
        };
        let from_below = running(&mut parts.atoms.iter().map(|a| a.mass));
        let mut from_above = running(&mut parts.atoms.iter().rev().map(|a| a.mass));
        from_above.reverse();
        Self { parts, opaque, sd, third_absolute_ratio, from_below, from_above, sampler: OnceLock::new() }
    }
}

impl Law {
    pub(super) fn from_prepared(prepared: Prepared) -> Self {
        Self { inner: Arc::new(prepared) }
    }

    pub(super) fn prepared(&self) -> &Prepared {
        &self.inner
    }

    /// E X, where it exists.
    pub fn mean(&self) -> Option<f64> {
        self.moments.mean
    }

    /// E (X − mean)², where it is finite; kept inside the range of doubles (see [`Law::sd`]).
    pub fn variance(&self) -> Option<f64> {
        self.moments.variance
    }

    /// The standard deviation, where it is finite; exact also where its square leaves the range of doubles.
    pub fn sd(&self) -> Option<f64> {
        self.inner.sd
    }

    /// E (X − mean)³/sd³, where it exists.
    pub fn skewness(&self) -> Option<f64> {
        self.moments.skewness
    }

    /// E (X − mean)⁴/sd⁴ − 3, where it exists.
    pub fn excess_kurtosis(&self) -> Option<f64> {
        self.moments.excess_kurtosis
    }

    /// E |X − mean|³, where it is finite and known.
    pub fn third_absolute_central_moment(&self) -> Option<f64> {
        self.moments.third_absolute_central
    }

    /// E |X − mean|³/sd³, what Berry–Esseen bounds need; exact at every scale.
    pub fn third_absolute_ratio(&self) -> Option<f64> {
        self.inner.third_absolute_ratio
    }

    /// Whether the law is one value.
    pub fn is_constant(&self) -> bool {
        self.is_discrete() && self.atoms.len() == 1
    }

    /// Whether a part of the law is neither tabulated nor given by a density.
    pub fn share_is_opaque(&self) -> bool {
        !self.inner.opaque.is_empty()
    }

    /// Whether all mass sits on tabulated atoms.
    pub fn is_discrete(&self) -> bool {
        self.pieces.is_empty() && self.inner.opaque.is_empty()
    }

    /// P(X = 0).
    pub fn share_of_zeros(&self) -> f64 {
        let listed = self.atoms.iter().find(|atom| atom.value == 0.0).map_or(0.0, |atom| atom.mass);
        let opaque: f64 = self
            .inner
            .opaque
            .iter()
            .map(|o| (o.at_or_below(0.0, false) - o.at_or_below(0.0, true)).max(0.0))
            .sum();
        (listed + opaque).min(1.0)
    }

    /// Number of atoms with value ≤ x (or < x with `strictly`), one within 4 units in the last place being x.
    fn atoms_up_to(&self, x: f64, strictly: bool) -> usize {
        if strictly {
            self.atoms.partition_point(|atom| atom.value < x && !same(atom.value, x))
        } else {
            self.atoms.partition_point(|atom| atom.value <= x || same(atom.value, x))
        }
    }

    fn below_with(&self, x: f64, strictly: bool) -> f64 {
        let atoms = self.inner.from_below[self.atoms_up_to(x, strictly)];
        let pieces: f64 = self.pieces.iter().map(|piece| piece.at_or_below(x)).sum();
        let opaque: f64 = self.inner.opaque.iter().map(|o| o.at_or_below(x, strictly)).sum();
        (atoms + pieces + opaque).clamp(0.0, 1.0)
    }

    fn above_with(&self, x: f64, or_equal: bool) -> f64 {
        let atoms = self.inner.from_above[self.atoms_up_to(x, or_equal)];
        let pieces: f64 = self.pieces.iter().map(|piece| piece.above(x)).sum();
        let opaque: f64 = self.inner.opaque.iter().map(|o| o.above(x, or_equal)).sum();
        (atoms + pieces + opaque).clamp(0.0, 1.0)
    }

    /// P(X ≤ x), relative accuracy in the lower tail.
    pub fn at_or_below(&self, x: f64) -> f64 {
        self.below_with(x, false)
    }

    /// P(X < x).
    pub fn below(&self, x: f64) -> f64 {
        self.below_with(x, true)
    }

    /// P(X > x), relative accuracy in the upper tail.
    pub fn above(&self, x: f64) -> f64 {
        self.above_with(x, false)
    }

    /// P(X ≥ x).
    pub fn at_or_above(&self, x: f64) -> f64 {
        self.above_with(x, true)
    }

    /// Density of the continuous part at x.
    pub fn density(&self, x: f64) -> f64 {
        self.pieces.iter().map(|piece| piece.density(x)).sum::<f64>().min(f64::MAX)
    }

    /// The smallest x with P(X ≤ x) ≥ p, for 0 < p < 1; the ends of the support beyond.
    pub fn quantile(&self, p: f64) -> f64 {
        if p.is_nan() || p <= 0.0 {
            return self.support.0;
        }
        if p >= 1.0 {
            return self.support.1;
        }
        if let ([piece], true, true) = (&self.pieces[..], self.atoms.is_empty(), self.inner.opaque.is_empty())
        {
            let y = if piece.multiply > 0.0 {
                piece.conditional_quantile(p)
            } else {
                piece.conditional_quantile_above(p)
            };
            return piece.image(y).clamp(f64::MIN, f64::MAX);
        }
        self.smallest(|x| self.at_or_below(x) >= p)
    }

    /// The smallest x with P(X > x) ≤ q, for 0 < q < 1, accurate for tiny q.
    pub fn quantile_above(&self, q: f64) -> f64 {
        if q.is_nan() || q <= 0.0 {
            return self.support.1;
        }
        if q >= 1.0 {
            return self.support.0;
        }
        if let ([piece], true, true) = (&self.pieces[..], self.atoms.is_empty(), self.inner.opaque.is_empty())
        {
            let y = if piece.multiply > 0.0 {
                piece.conditional_quantile_above(q)
            } else {
                piece.conditional_quantile(q)
            };
            return piece.image(y).clamp(f64::MIN, f64::MAX);
        }
        self.smallest(|x| self.above(x) <= q)
    }

    /// The smallest double in the support from which on the monotone `reached` holds, by bisection over the
    /// doubles themselves (64 steps at any scale); atoms are hit exactly.
    fn smallest(&self, reached: impl Fn(f64) -> bool) -> f64 {
        let (low, high) = self.support;
        let (mut from, mut to) = (ordinal(low.max(f64::MIN)), ordinal(high.min(f64::MAX)));
        if reached(value_at(from)) {
            return value_at(from);
        }
        while to - from > 1 {
            let middle = from + (to - from) / 2;
            if reached(value_at(middle)) { to = middle } else { from = middle }
        }
        let x = value_at(to);
        // Snapping answers for an atom a few units below it: return the atom itself.
        let next = self.atoms.partition_point(|atom| atom.value < x);
        match self.atoms.get(next) {
            Some(atom) if same(atom.value, x) => atom.value,
            _ => x,
        }
    }

    /// sup of r with E max(X, 0)^r < ∞, and the same for −X; infinite for light tails.
    pub fn tail_indices(&self) -> (f64, f64) {
        let pieces = self.pieces.iter().map(Piece::tail_indices);
        let opaque = self.inner.opaque.iter().map(Opaque::tail_indices);
        pieces
            .chain(opaque)
            .fold((f64::INFINITY, f64::INFINITY), |(up, down), (u, d)| (up.min(u), down.min(d)))
    }

    /// One draw. [`Law::sampler`] gives the prepared sampler for many.
    pub fn sample(&self, random: &mut impl rand::Rng) -> f64 {
        self.sampler().sample(random)
    }

    /// The prepared sampler.
    pub fn sampler(&self) -> &Sampler {
        self.inner.sampler.get_or_init(|| Sampler::new(&self.inner.parts, &self.inner.opaque))
    }
}

/// The position of a double among all doubles.
fn ordinal(x: f64) -> i128 {
    let bits = x.to_bits();
    if x.is_sign_negative() { -i128::from(bits & (u64::MAX >> 1)) } else { i128::from(bits) }
}

fn value_at(ordinal: i128) -> f64 {
    let size = f64::from_bits(ordinal.unsigned_abs() as u64);
    if ordinal < 0 { -size } else { size }
}

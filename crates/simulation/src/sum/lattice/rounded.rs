//! Sums of discrete laws that lie on no usable lattice: their values moved to a fine grid, with a proven bracket.
//!
//! **Method.** Each value x of a summand is split between its two neighbours on a grid of span δ so that its mean
//! stays: X̃ = X + ε with E(ε | X) = 0 and, given X, ε in an interval of length δ. The sum S̃ of the moved values is a
//! lattice sum like any other, and S̃ = S + E with, by Hoeffding's inequality given the values,
//!
//! P(E ≥ u) ≤ η and P(E ≤ −u) ≤ η for u = δ√(n ln(1/η)/2).
//!
//! **Bracket.** Hence P(S̃ ≤ s − u) − η ≤ P(S < s) ≤ P(S ≤ s) ≤ P(S̃ ≤ s + u) + η for every s: both ends are computed, and half
//! their distance is the stated error. With D̃ the distance of the law of S̃ to the normal law with the same mean and
//! standard deviation, r = sd(S̃)/sd(S) and u in units of sd(S), the distance of S differs from D̃ by at most
//! η + u/√(2π) + (r − 1)/√(2πe), because Φ moves by no more when its argument does.
//!
//! The grid has sd(S)/√n = 16 000 δ, whatever n is: the error is near 8e-5 where the law of the sum is smooth on that
//! scale. Where it is not (two summands of pilot data), the route is refused.

use super::commensurable::CommonLattice;
use super::summand::Part;
use super::{LatticeSum, unavailable};
use crate::figure::Figure;
use crate::sum::{Distance, Route, StandardizedSum, SumError, SumMoments, SumSpec, Term};
use crate::work::Work;
use std::collections::BTreeMap;

/// √(sum's variance/n) in units of the grid.
const FINENESS: f64 = 16_000.0;

/// η: probability that rounding moves the sum further than u, on either side.
const BEYOND: f64 = 1e-8;

/// Largest error of a probability that is worth more than simulation.
const USEFUL: f64 = 1e-4;

/// The distribution of a standardized sum of discrete laws, bracketed by a lattice sum.
#[derive(Debug)]
pub struct RoundedSum {
    inner: LatticeSum,
    moments: SumMoments,
    /// sd(S̃)/sd(S), a little above 1.
    ratio: f64,
    /// u in units of sd(S).
    shift: f64,
    /// Smallest and largest z the sum may take.
    ends: (f64, f64),
}

impl RoundedSum {
    /// Builds the bracket, or says why it is of no use.
    pub fn build(spec: &SumSpec, work: &Work) -> Result<Self, SumError> {
        work.check()?;
        let terms: Vec<&Term> =
            spec.terms.iter().filter(|term| term.count > 0 && term.multiply != 0.0).collect();
        if terms.iter().any(|term| !term.law.pieces.is_empty() || term.law.atoms.is_empty()) {
            return Err(unavailable("the law is not discrete"));
        }
        let moments = moments_of(&terms)?;
        let n = moments.n as f64;
        let span = moments.sd / (n.sqrt() * FINENESS);
        let (mut base, mut low, mut high, mut missing) = (0.0, 0.0, 0.0, 0.0);
        let mut parts = Vec::new();
        for term in &terms {
            let offset = term.multiply * term.law.moments.mean.unwrap_or(0.0);
            let count = term.count as f64;
            base += count * offset;
            missing += count * term.law.missing_mass;
            let values = term.law.atoms.iter().map(|atom| term.multiply * atom.value - offset);
            low += count * values.clone().fold(f64::INFINITY, f64::min);
            high += count * values.fold(f64::NEG_INFINITY, f64::max);
            parts.push(moved(term, offset, span)?);
        }
        let common = CommonLattice { base, span, parts, missing };
        let inner = LatticeSum::of_common(common, moments.n, work)?;
        let shift = (0.5 * (1.0 / BEYOND).ln()).sqrt() / FINENESS;
        let ratio = inner.moments().sd / moments.sd;
        let ends = (low / moments.sd, high / moments.sd);
        let sum = Self { inner, moments, ratio, shift, ends };
        for step in -30..=30 {
            work.check()?;
            let error = sum.lower(0.1 * f64::from(step)).error;
            if error > USEFUL {
                return Err(unavailable(format!(
                    "its values lie on no usable lattice, and on a grid its probabilities are only known within \
                     {error:.1e}"
                )));
            }
        }
        Ok(sum)
    }

    /// P(S ≤ s) and P(S < s), between the ends of the bracket.
    fn lower(&self, z: f64) -> Figure {
        if z < self.ends.0 - 1e-9 {
            return Figure::bound(0.0, 0.0);
        }
        if z > self.ends.1 + 1e-9 {
            return Figure::bound(1.0, 0.0);
        }
        let low = self.inner.at_or_below((z - self.slack(z)) / self.ratio);
        let high = self.inner.at_or_below((z + self.slack(z)) / self.ratio);
        between(low, high)
    }

    /// P(S > s) and P(S ≥ s).
    fn upper(&self, z: f64) -> Figure {
        if z < self.ends.0 - 1e-9 {
            return Figure::bound(1.0, 0.0);
        }
        if z > self.ends.1 + 1e-9 {
            return Figure::bound(0.0, 0.0);
        }
        let low = self.inner.at_or_above((z + self.slack(z)) / self.ratio);
        let high = self.inner.at_or_above((z - self.slack(z)) / self.ratio);
        between(low, high)
    }

    /// u, and room for the rounding of z and of the standard deviations: the lattice sum takes an argument up to a
    /// quarter of its span from a point for that point.
    fn slack(&self, z: f64) -> f64 {
        self.shift + 0.25 * self.inner.lattice_span().unwrap_or(0.0) + 1e-12 * (1.0 + z.abs())
    }
}

/// The figure between two probabilities that may each be off by their errors and by η.
fn between(low: Figure, high: Figure) -> Figure {
    let low = (low.value - low.error - BEYOND).max(0.0);
    let high = (high.value + high.error + BEYOND).min(1.0).max(low);
    Figure::bound(0.5 * (low + high), 0.5 * (high - low) + f64::EPSILON)
}

/// The moments of the sum, from those of the laws.
fn moments_of(terms: &[&Term]) -> Result<SumMoments, SumError> {
    let (mut n, mut mean, mut variance) = (0_u64, 0.0, 0.0);
    let (mut third, mut fourth) = (Some(0.0), Some(0.0));
    for term in terms {
        let moments = &term.law.moments;
        let (Some(m), Some(v)) = (moments.mean, moments.variance) else { return Err(SumError::NoVariance) };
        let count = term.count as f64;
        let sd = v.sqrt() * term.multiply;
        n = n.saturating_add(term.count);
        mean += count * term.multiply * m;
        variance += count * sd * sd;
        // A constant has no skewness and adds none.
        let add = |sum: Option<f64>, own: Option<f64>, power: i32| {
            if v > 0.0 { sum.zip(own).map(|(sum, own)| sum + count * own * sd.powi(power)) } else { sum }
        };
        third = add(third, moments.skewness, 3);
        fourth = add(fourth, moments.excess_kurtosis, 4);
    }
    let sd = variance.sqrt();
    if !(sd > 0.0 && sd.is_finite() && mean.is_finite()) {
        return Err(SumError::NoVariance);
    }
    Ok(SumMoments {
        n,
        mean,
        sd,
        skewness: third.map(|third| third / (variance * sd)),
        excess_kurtosis: fourth.map(|fourth| fourth / (variance * variance)),
    })
}

/// One term in grid units about `offset`, each value split between its two neighbours.
fn moved(term: &Term, offset: f64, span: f64) -> Result<Part, SumError> {
    let mut masses: BTreeMap<i64, f64> = BTreeMap::new();
    for atom in term.law.atoms.iter().filter(|atom| atom.mass > 0.0) {
        let place = (term.multiply * atom.value - offset) / span;
        if place.is_nan() || place.abs() > 1e12 {
            return Err(unavailable("the law has values too far apart to be moved to a grid"));
        }
        let (below, share) = (place.floor(), place - place.floor());
        *masses.entry(below as i64).or_default() += atom.mass * (1.0 - share);
        if share > 0.0 {
            *masses.entry(below as i64 + 1).or_default() += atom.mass * share;
        }
    }
    let (values, masses): (Vec<i64>, Vec<f64>) = masses.into_iter().unzip();
    Ok(Part::new(term.count as f64, &values, &masses))
}

impl StandardizedSum for RoundedSum {
    fn route(&self) -> Route {
        Route::Lattice
    }

    fn detail(&self) -> String {
        format!(
            "values on no usable lattice, moved to a grid with their means kept; the error allows for the move; {}",
            self.inner.detail()
        )
    }

    fn moments(&self) -> SumMoments {
        self.moments
    }

    fn at_or_below(&self, z: f64) -> Figure {
        self.lower(z)
    }

    fn below(&self, z: f64) -> Figure {
        self.lower(z)
    }

    fn above(&self, z: f64) -> Figure {
        self.upper(z)
    }

    fn at_or_above(&self, z: f64) -> Figure {
        self.upper(z)
    }

    fn kolmogorov(&self) -> Distance {
        let found = self.inner.kolmogorov();
        let error = found.kolmogorov.error
            + BEYOND
            + 0.398_943 * self.slack(0.0)
            + 0.241_971 * (self.ratio - 1.0).abs()
            + f64::EPSILON;
        Distance {
            kolmogorov: Figure::bound(found.kolmogorov.value, error),
            at_z: found.at_z * self.ratio,
            ..found
        }
    }

    fn quantile(&self, p: f64) -> Figure {
        let end = |p: f64, sign: f64| {
            if p <= 0.0 {
                return self.ends.0;
            }
            if p >= 1.0 {
                return self.ends.1;
            }
            let found = self.inner.quantile(p);
            let z = (found.value + sign * found.error) * self.ratio;
            (z + sign * self.slack(z)).clamp(self.ends.0, self.ends.1)
        };
        let (low, high) = (end(p - BEYOND, -1.0), end(p + BEYOND, 1.0));
        Figure::bound(
            0.5 * (low + high),
            0.5 * (high - low).abs() + 4.0 * f64::EPSILON * low.abs().max(high.abs()),
        )
    }

    fn jumps(&self, _from: f64, _to: f64, _limit: usize) -> Option<Vec<f64>> {
        None
    }

    fn lattice_span(&self) -> Option<f64> {
        None
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::law::{Law, LawSpec};
    use crate::sum::Method;

    /// Values with seven digits and no usable common span: 400 quantiles of an exponential law.
    fn pilot() -> Vec<f64> {
        (0..400)
            .map(|i| -((f64::from(i) + 0.5) / 400.0).ln() + 7.123_456e-7 * f64::from(i * i % 91))
            .collect()
    }

    fn data(values: Vec<f64>) -> Law {
        LawSpec::Data { values: Some(values), path: None, column: None, tail: None }.compile().expect("data")
    }

    /// A law on a lattice has exact answers: the bracket must hold them, and be narrow.
    #[test]
    fn brackets_hold_the_exact_law() {
        let law = data((0..300).map(|i| f64::from(i * i * 17 % 100_003) * 0.37).collect());
        for n in [60, 700, 100_000] {
            let spec = SumSpec::like_summands(law.clone(), n);
            let exact = LatticeSum::build(&spec, &Method::default(), &Work::new()).expect("a lattice");
            let moved = RoundedSum::build(&spec, &Work::new()).expect("a bracket");
            for step in -40..=40 {
                let z = 0.11 * f64::from(step) + 0.003;
                for (found, truth) in [
                    (moved.at_or_below(z), exact.at_or_below(z)),
                    (moved.below(z), exact.below(z)),
                    (moved.above(z), exact.above(z)),
                    (moved.at_or_above(z), exact.at_or_above(z)),
                ] {
                    assert!((found.value - truth.value).abs() <= found.error + truth.error, "{n} {z}");
                    assert!(found.error < 1.2e-4, "{n} {z}: {}", found.error);
                }
            }
            let (a, b) = (moved.kolmogorov().kolmogorov, exact.kolmogorov().kolmogorov);
            assert!((a.value - b.value).abs() <= a.error + b.error, "{n}: {a:?} {b:?}");
            assert!(a.error < 1e-4, "{n}: {a:?}");
            for p in [1e-4, 0.025, 0.5, 0.99] {
                let (a, b) = (moved.quantile(p), exact.quantile(p));
                assert!((a.value - b.value).abs() <= a.error + b.error, "{n} {p}: {a:?} {b:?}");
                assert!(a.error < 1e-2, "{n} {p}: {a:?}");
            }
        }
    }

    /// Many digits: an exact route, near the one-term expansion Φ − γ(z² − 1)φ/(6√n), whose next terms are below
    /// 2e-3/√(n/100) here.
    #[test]
    fn many_digits_get_an_exact_route() {
        let law = data(pilot());
        let skewness = law.moments.skewness.expect("finitely many values");
        let spec = SumSpec::like_summands(law, 400);
        let sum = crate::sum::build_exact(&spec, &Method::default(), &Work::new()).expect("an exact route");
        assert_eq!(sum.route(), Route::Lattice);
        for z in [-2.0, -1.0, 0.0, 1.0, 2.0f64] {
            let found = sum.at_or_below(z);
            let density = (-0.5 * z * z).exp() / (2.0 * std::f64::consts::PI).sqrt();
            let expansion =
                crate::special::normal::at_or_below(z) - skewness * (z * z - 1.0) * density / (6.0 * 20.0);
            assert!((found.value - expansion).abs() < 1e-3, "{z}: {found:?} {expansion}");
            assert!(found.error <= 1e-4, "{z}: {found:?}");
        }
    }

    /// One summand of pilot data has steps of 1/400: no use for a bracket.
    #[test]
    fn steps_are_not_smoothed_away() {
        let spec = SumSpec::like_summands(data(pilot()), 1);
        assert!(matches!(RoundedSum::build(&spec, &Work::new()), Err(SumError::NotAvailable { .. })));
    }
}

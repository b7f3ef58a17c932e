//! Sums of one-sided laws by a deformed inversion contour: for few summands with a density that jumps or is
//! singular at its lower end, whose characteristic function decays too slowly for Fourier inversion.
//!
//! With m the smallest value of the sum and T = S − m in standard units, the transform E e^(−sT) of a law that is
//! analytic in a sector continues beyond the imaginary axis, and P(T ≤ x) = (1/2πi) ∫ e^(sx) E e^(−sT)/s ds may be
//! taken over a hyperbola on which the integrand decays exponentially ([`hyperbola`]). A ladder of such contours
//! ([`ladder`]) covers every argument; the transforms come from closed forms or from integrals along rays
//! ([`summand`]). The mass at m is split off and exact.

mod hyperbola;
mod ladder;
mod summand;
mod supremum;
#[cfg(test)]
mod tests;

use super::{Distance, Method, Route, StandardizedSum, SumError, SumMoments, SumSpec};
use crate::figure::Figure;
use crate::work::Work;
use hyperbola::Side as ContourSide;
use ladder::{Failure, Ladder};
use summand::{OneSided, OneSidedSum};

/// Largest error a contour may have.
const CERTIFIED: f64 = 1e-9;

/// The distribution of a standardized sum of one-sided laws.
#[derive(Debug)]
pub struct ContourSum {
    moments: SumMoments,
    /// +1 if T grows with S, −1 if the law was reflected.
    direction: f64,
    sum: OneSidedSum,
    ladder: Ladder,
    /// The smallest value of T, −E T, in standard units.
    end: f64,
    /// Bound on the error of an argument x = z − end near the mean.
    blur: f64,
}

/// P(T ≤ x) split into parts: the atom at 0 excluded.
#[derive(Debug, Clone, Copy)]
struct Split {
    /// P(0 < T ≤ x).
    lower: Figure,
    /// P(T > x).
    upper: Figure,
    /// Density of T at x.
    density: f64,
}

fn refuse(reason: impl Into<String>) -> SumError {
    SumError::NotAvailable { route: Route::Inversion, reason: reason.into() }
}

/// Moments of the sum in its own units.
fn sum_moments(spec: &SumSpec) -> Result<SumMoments, SumError> {
    let (mut n, mut mean) = (0_u64, 0.0);
    let mut sizes = Vec::new();
    for term in &spec.terms {
        let (Some(m), Some(sd)) = (term.law.mean(), term.law.sd()) else {
            return Err(SumError::NoVariance);
        };
        n = n.saturating_add(term.count);
        mean += term.count as f64 * term.multiply * m;
        sizes.push(sd * term.multiply.abs());
    }
    let largest = sizes.iter().copied().fold(0.0, f64::max);
    let squares =
        spec.terms.iter().zip(&sizes).map(|(t, s)| t.count as f64 * (s / largest).powi(2)).sum::<f64>();
    let sd = largest * squares.sqrt();
    if !(sd > 0.0 && sd.is_finite() && mean.is_finite()) {
        return Err(SumError::NoVariance);
    }
    let (mut skewness, mut excess_kurtosis) = (Some(0.0), Some(0.0));
    for (term, size) in spec.terms.iter().zip(&sizes) {
        if *size == 0.0 || term.count == 0 {
            continue;
        }
        let (share, count) = (size / sd, term.count as f64);
        let sign = term.multiply.signum();
        skewness = skewness.zip(term.law.skewness()).map(|(sum, s)| sum + count * sign * s * share.powi(3));
        excess_kurtosis =
            excess_kurtosis.zip(term.law.excess_kurtosis()).map(|(sum, k)| sum + count * k * share.powi(4));
    }
    Ok(SumMoments { n, mean, sd, skewness, excess_kurtosis })
}

impl ContourSum {
    /// Builds the distribution, or says why a deformed contour cannot: every summand must have a density that is
    /// analytic in a sector from its lower end (or its upper end, for all summands) to infinity, and no atoms
    /// except at that end.
    pub fn build(spec: &SumSpec, _method: &Method, work: &Work) -> Result<Self, SumError> {
        let moments = sum_moments(spec)?;
        let one_sided = |direction: f64| -> Result<Vec<OneSided>, String> {
            spec.terms
                .iter()
                .filter(|t| t.count > 0 && t.multiply != 0.0 && !t.law.is_constant())
                .map(|t| OneSided::new(&t.law, t.count, t.multiply, moments.sd, direction))
                .collect()
        };
        let (direction, summands) = match one_sided(1.0) {
            Ok(summands) => (1.0, summands),
            Err(reason) => (-1.0, one_sided(-1.0).map_err(|_| refuse(reason))?),
        };
        let sum = OneSidedSum::new(summands);
        if !(sum.mean > 0.0 && sum.mean.is_finite()) {
            return Err(refuse("the distance from the lower end to the mean is not a usable number"));
        }
        let ladder = Ladder::build(&sum, work).map_err(|failure| match failure {
            Failure::Cancelled(cancelled) => cancelled.into(),
            Failure::Refused(reason) => refuse(reason),
        })?;
        let worst = ladder.rungs.iter().map(|r| r.error(r.low).max(r.error(r.high))).fold(0.0, f64::max);
        if worst.is_nan() || worst > CERTIFIED {
            return Err(refuse(format!("the contour's error could only be bounded by {worst:.1e}")));
        }
        let end = -sum.mean;
        let blur = sum.mean_error + 4.0 * f64::EPSILON * sum.mean;
        Ok(Self { moments, direction, sum, ladder, end, blur })
    }

    /// Whether z is the smallest value of T, up to rounding.
    fn at_end(&self, z: f64) -> bool {
        (z - self.end).abs() <= self.blur + 8.0 * f64::EPSILON * self.end.abs()
    }

    /// The continuous part at z (in the direction of T), z above the end; without the rounding of z.
    fn split_exactly(&self, x: f64) -> Split {
        let continuous = 1.0 - self.sum.atom;
        let atom_error = self.sum.atom * self.sum.atom_error() + f64::EPSILON;
        if let Some(rung) = self.ladder.rung(x) {
            let (probability, density) = rung.evaluate(x);
            let error = rung.error(x);
            let value = probability.clamp(0.0, continuous);
            let own = Figure::bound(value, error);
            let other = Figure::bound(continuous - value, error + atom_error);
            let (lower, upper) = if rung.side == ContourSide::Lower { (own, other) } else { (other, own) };
            return Split { lower, upper, density: density.max(0.0) };
        }
        let first = self.ladder.rungs.first().map_or(f64::INFINITY, |r| r.low);
        if x < first {
            let half = 0.5 * self.ladder.bottom_bound;
            let upper = Figure::bound(continuous - half, half + atom_error);
            return Split { lower: Figure::bound(half, half), upper, density: 0.0 };
        }
        // Cantelli's inequality, or Chernoff's at the end of the ladder.
        let z = x + self.end;
        let half = 0.5 * self.ladder.top_bound.min(1.0 / (1.0 + z * z));
        let lower = Figure::bound(continuous - half, half + atom_error);
        Split { lower, upper: Figure::bound(half, half), density: 0.0 }
    }

    /// The same with the rounding of x taken into the errors.
    fn split(&self, x: f64) -> Split {
        let mut split = self.split_exactly(x);
        let blur = self.blur + 4.0 * f64::EPSILON * (x + self.end).abs();
        let slack = if x < 1e3 * blur {
            let (near, far) = (self.split_exactly((x - blur).max(0.0)), self.split_exactly(x + blur));
            (far.lower.value - near.lower.value).abs()
        } else {
            1.5 * split.density * blur
        };
        split.lower.error += slack;
        split.upper.error += slack;
        split
    }

    /// P(T ≤ z) or, strictly, P(T < z), in T's direction.
    fn lower(&self, z: f64, strictly: bool) -> Figure {
        if z == f64::INFINITY {
            return Figure::bound(1.0, 0.0);
        }
        let atom = self.sum.atom;
        if self.at_end(z) {
            return if strictly { Figure::bound(0.0, 0.0) } else { self.near_end(atom) };
        }
        if z < self.end {
            return Figure::bound(0.0, 0.0);
        }
        let lower = self.split(z - self.end).lower;
        Figure::bound(
            (atom + lower.value).min(1.0),
            lower.error + atom * self.sum.atom_error() + f64::EPSILON * atom,
        )
    }

    /// The probability of the end itself, and of what may lie within its rounding.
    fn near_end(&self, atom: f64) -> Figure {
        let within = if atom > 0.0 { 0.0 } else { self.split_exactly(2.0 * self.blur).lower.value };
        Figure::bound(atom, atom * self.sum.atom_error() + within)
    }

    /// P(T > z) or, with the atom, P(T ≥ z).
    fn upper(&self, z: f64, with_atom: bool) -> Figure {
        if z == f64::INFINITY {
            return Figure::bound(0.0, 0.0);
        }
        if self.at_end(z) && !with_atom {
            let figure = self.near_end(self.sum.atom);
            return Figure::bound(1.0 - figure.value, figure.error + f64::EPSILON);
        }
        if z < self.end || self.at_end(z) {
            return Figure::bound(1.0, 0.0);
        }
        self.split(z - self.end).upper
    }

    /// Density of T − E T at z.
    fn density(&self, z: f64) -> f64 {
        if z <= self.end { 0.0 } else { self.split_exactly(z - self.end).density }
    }

    /// The smallest z with P(T ≤ z) ≥ p (`tail` false), or with P(T > z) ≤ p (`tail` true).
    fn solve(&self, p: f64, tail: bool) -> Figure {
        let atom = self.sum.atom;
        let reached = |x: f64| {
            let split = self.split_exactly(x);
            if tail { split.upper.value <= p } else { atom + split.lower.value >= p }
        };
        let atom_reaches = if tail { 1.0 - atom <= p } else { atom >= p };
        if atom_reaches && atom > 0.0 {
            return Figure::bound(self.end, self.blur);
        }
        let (Some(first), Some(last)) = (self.ladder.rungs.first(), self.ladder.rungs.last()) else {
            return Figure::bound(self.end, f64::MAX);
        };
        let (mut low, mut high) = (first.low, last.high);
        if reached(low) {
            return Figure::bound(self.end, low + self.blur);
        }
        if !reached(high) {
            // Beyond the ladder: between its end and where Cantelli's inequality has certainly fallen to 1 − p.
            let q = if tail { p } else { 1.0 - p };
            let farthest = (1.0 / q.max(1e-300)).sqrt();
            let nearest = (high + self.end).min(farthest);
            return Figure::bound(0.5 * (nearest + farthest), 0.5 * (farthest - nearest));
        }
        while high / low > 1.5 {
            let middle = low.sqrt() * high.sqrt();
            if reached(middle) { high = middle } else { low = middle }
        }
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                break;
            }
            if reached(middle) { high = middle } else { low = middle }
        }
        let split = self.split(high);
        let doubt = if tail { split.upper.error } else { split.lower.error + atom * self.sum.atom_error() };
        let mut width = 2.0 * doubt / split.density.max(1e-300) + (high - low) + self.blur;
        // Widen until the error of the probability is certainly covered on both sides.
        for _ in 0..200 {
            let probability = |x: f64| {
                let split = self.split_exactly(x.max(0.0));
                if tail { -split.upper.value } else { atom + split.lower.value }
            };
            let wanted = if tail { -p } else { p };
            let covered_below = width >= high || probability(high - width) <= wanted - doubt;
            if covered_below && probability(high + width) >= wanted + doubt {
                break;
            }
            width *= 1.5;
        }
        let z = high + self.end;
        Figure::bound(z, width + 4.0 * f64::EPSILON * z.abs())
    }

    fn negated(figure: Figure) -> Figure {
        figure.map(|z| -z)
    }
}

impl StandardizedSum for ContourSum {
    fn route(&self) -> Route {
        Route::Inversion
    }

    fn detail(&self) -> String {
        let nodes: usize = self.ladder.rungs.iter().map(hyperbola::Hyperbola::len).sum();
        format!("inversion over a deformed contour: {} hyperbolas, {nodes} nodes", self.ladder.rungs.len())
    }

    fn moments(&self) -> SumMoments {
        self.moments
    }

    fn at_or_below(&self, z: f64) -> Figure {
        if self.direction > 0.0 { self.lower(z, false) } else { self.upper(-z, true) }
    }

    fn below(&self, z: f64) -> Figure {
        if self.direction > 0.0 { self.lower(z, true) } else { self.upper(-z, false) }
    }

    fn above(&self, z: f64) -> Figure {
        if self.direction > 0.0 { self.upper(z, false) } else { self.lower(-z, true) }
    }

    fn at_or_above(&self, z: f64) -> Figure {
        if self.direction > 0.0 { self.upper(z, true) } else { self.lower(-z, false) }
    }

    fn kolmogorov(&self) -> Distance {
        supremum::distance(self)
    }

    fn quantile(&self, p: f64) -> Figure {
        if self.direction > 0.0 {
            // Close to 1 the tail asked for is computed itself.
            if p > 0.5 { self.solve(1.0 - p, true) } else { self.solve(p, false) }
        } else {
            // Smallest z with P(T ≥ −z) ≥ p.
            Self::negated(if p > 0.5 { self.solve(1.0 - p, false) } else { self.solve(p, true) })
        }
    }

    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>> {
        let jump = self.direction * self.end;
        let inside = self.sum.atom > 0.0 && from <= jump && jump <= to;
        match (inside, limit) {
            (false, _) => Some(Vec::new()),
            (true, 0) => None,
            (true, _) => Some(vec![jump]),
        }
    }

    fn lattice_span(&self) -> Option<f64> {
        None
    }
}

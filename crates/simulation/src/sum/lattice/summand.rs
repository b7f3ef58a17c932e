//! The unlike parts of a lattice sum in lattice units, and their generating functions.

use super::shared::{Shared, nearest_tilt, tilt};
use crate::special::elementary::exp_minus_1_minus_real;
use crate::sum::twofold::Twofold;
use std::sync::Arc;

/// `count` independent copies of a law on the integers, centred at its mean.
#[derive(Debug, Clone)]
pub(crate) struct Part {
    /// Number of copies.
    pub count: f64,
    /// The integer nearest to the mean; the lists below count from it.
    pub anchor: i64,
    /// Values minus `anchor`.
    pub offsets: Vec<i64>,
    /// Probabilities, summing to 1 as doubles do.
    pub masses: Vec<f64>,
    /// Mean minus `anchor`.
    pub mean: Twofold,
    /// What does not depend on the number of copies.
    pub shared: Arc<Shared>,
}

/// Cumulant generating function of the centred sum with two derivatives.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Cumulants {
    /// ln E e^(θ(S − E S)).
    pub value: f64,
    /// Its derivative: the mean of the tilted sum minus E S.
    pub slope: f64,
    /// Its second derivative: the variance of the tilted sum.
    pub curvature: f64,
}

/// The exponent up to which e^u is summed as it stands.
const SAFE_EXPONENT: f64 = 600.0;

impl Part {
    /// A part from its values (ascending or not) and their probabilities, which are normalized.
    pub fn new(count: f64, values: &[i64], masses: &[f64]) -> Self {
        let total = masses.iter().fold(Twofold::default(), |sum, &mass| sum.plus(mass)).value();
        let near = values.iter().zip(masses).map(|(&k, &mass)| k as f64 * mass).sum::<f64>() / total;
        let anchor = near.round() as i64;
        let offsets: Vec<i64> = values.iter().map(|&k| k - anchor).collect();
        let masses: Vec<f64> = masses.iter().map(|mass| mass / total).collect();
        let mean = mean_of(&offsets, &masses);
        Self { count, anchor, offsets, masses, mean, shared: Arc::default() }
    }

    /// Smallest and largest value.
    pub fn ends(&self) -> (i64, i64) {
        let low = self.offsets.iter().min().copied().unwrap_or(0);
        let high = self.offsets.iter().max().copied().unwrap_or(0);
        (self.anchor + low, self.anchor + high)
    }

    /// Value minus mean, for each value.
    pub fn deviations(&self) -> impl Iterator<Item = (f64, f64)> + '_ {
        self.offsets
            .iter()
            .zip(&self.masses)
            .map(|(&offset, &mass)| (self.mean.distance_to(offset as f64), mass))
    }

    /// Variance, third and fourth central moments of one copy.
    pub fn central_moments(&self) -> (f64, f64, f64) {
        self.deviations().fold((0.0, 0.0, 0.0), |(two, three, four), (y, mass)| {
            let square = mass * y * y;
            (two + square, three + square * y, four + square * y * y)
        })
    }

    /// E |X − mean|, in lattice units.
    pub fn mean_deviation(&self) -> f64 {
        self.deviations().map(|(y, mass)| mass * y.abs()).sum()
    }

    /// Adds this part's cumulants at θ. With u = θ(x − mean), E e^u − 1 = E(e^u − 1 − u), a sum of non-negative
    /// terms, so that the logarithm keeps its relative accuracy however small θ is.
    fn add_cumulants(&self, theta: f64, to: &mut Cumulants) {
        let largest = self.deviations().map(|(y, _)| theta * y).fold(0.0, f64::max);
        let shift = if largest > SAFE_EXPONENT { largest } else { 0.0 };
        let (mut excess, mut total, mut first, mut second) = (0.0, 0.0, 0.0, 0.0);
        for (y, mass) in self.deviations() {
            let u = theta * y;
            let weight = mass * (u - shift).exp();
            if shift == 0.0 {
                excess += mass * exp_minus_1_minus_real(u);
            }
            total += weight;
            first += weight * y;
            second += weight * y * y;
        }
        let mean = first / total;
        let variance = (second / total - mean * mean).max(0.0);
        let logarithm = if shift == 0.0 { libm::log1p(excess) } else { shift + total.ln() };
        to.value += self.count * logarithm;
        to.slope += self.count * mean;
        to.curvature += self.count * variance;
    }

    /// ln E e^(θ(X − E X)) of one copy.
    pub fn cumulant(&self, theta: f64) -> f64 {
        let largest = self.deviations().map(|(y, _)| theta * y).fold(0.0, f64::max);
        if largest > SAFE_EXPONENT {
            let sum: f64 = self.deviations().map(|(y, mass)| mass * (theta * y - largest).exp()).sum();
            return largest + sum.ln();
        }
        libm::log1p(self.deviations().map(|(y, mass)| mass * exp_minus_1_minus_real(theta * y)).sum())
    }

    /// The part tilted by e^(θx), renormalized.
    pub fn tilted(&self, theta: f64) -> Self {
        let largest = self.deviations().map(|(y, _)| theta * y).fold(f64::NEG_INFINITY, f64::max);
        let mut values = Vec::with_capacity(self.offsets.len());
        let mut masses = Vec::with_capacity(self.offsets.len());
        for ((y, mass), &offset) in self.deviations().zip(&self.offsets) {
            let weight = mass * (theta * y - largest).exp();
            if weight > 0.0 {
                values.push(offset + self.anchor);
                masses.push(weight);
            }
        }
        Self::new(self.count, &values, &masses)
    }
}

fn mean_of(offsets: &[i64], masses: &[f64]) -> Twofold {
    let mut first = Twofold::default();
    let mut total = Twofold::default();
    for (&offset, &mass) in offsets.iter().zip(masses) {
        first = first.plus_twofold(Twofold::product(offset as f64, mass));
        total = total.plus(mass);
    }
    // first/total with total = 1 + ε: divide by the double, then correct for its low part.
    let quotient = first.over(total.high);
    quotient.plus(-quotient.high * total.low / total.high)
}

/// Cumulants of the whole centred sum at θ.
pub(crate) fn cumulants(parts: &[Part], theta: f64) -> Cumulants {
    let mut sum = Cumulants { value: 0.0, slope: 0.0, curvature: 0.0 };
    for part in parts {
        part.add_cumulants(theta, &mut sum);
    }
    sum
}

/// E S in lattice units.
pub(crate) fn center(parts: &[Part]) -> Twofold {
    parts.iter().fold(Twofold::default(), |sum, part| {
        sum.plus_twofold(Twofold::product(part.count, part.anchor as f64))
            .plus_twofold(part.mean.times(part.count))
    })
}

/// Smallest and largest value of the sum.
pub(crate) fn range(parts: &[Part]) -> (f64, f64) {
    parts.iter().fold((0.0, 0.0), |(low, high), part| {
        let (least, most) = part.ends();
        (low + part.count * least as f64, high + part.count * most as f64)
    })
}

/// Indices outside which the sum has at most e^(−`exponent`) of its mass on either side.
///
/// Chernoff: P(S − E S ≥ d) ≤ exp(K(θ) − θd) for *every* θ > 0, hence d = (K(θ) + exponent)/θ is safe whatever
/// θ is; the search only makes it small. Two indices are added for rounding.
pub(crate) fn window(parts: &[Part], exponent: f64, sd: f64) -> (i64, i64) {
    let center = center(parts).value();
    let (least, most) = range(parts);
    let reach = |upper: bool| -> f64 {
        let distance = |i: i32| {
            let value: f64 = parts.iter().map(|part| part.count * part.cumulant_at(i, upper)).sum();
            let distance = (value + exponent) / tilt(i);
            if distance.is_finite() { distance } else { f64::MAX }
        };
        // Halving strides among the tilts that are kept, from the normal answer √(2·exponent)/sd.
        let mut best = nearest_tilt((2.0 * exponent).sqrt() / sd);
        let (mut least, mut stride) = (distance(best), 8);
        while stride > 0 {
            let (before, after) = (distance(best - stride), distance(best + stride));
            if before.min(after) < least {
                best += if before < after { -stride } else { stride };
                least = before.min(after);
            } else {
                stride /= 2;
            }
        }
        least
    };
    // The whole support is cheaper than a search where it is narrow.
    let low =
        if center - least < 4.0 * sd { least } else { (center - reach(false) - 2.0).floor().max(least) };
    let high = if most - center < 4.0 * sd { most } else { (center + reach(true) + 2.0).ceil().min(most) };
    (low as i64, high as i64)
}

/// The θ at which the tilted sum has mean E S + `target` (strictly inside the range), by Newton steps kept in a
/// bracket. A rough answer is good enough: any tilt gives the same law.
pub(crate) fn tilt_for(parts: &[Part], target: f64, start: f64) -> (f64, Cumulants) {
    let mut theta = start;
    let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
    let mut at = cumulants(parts, theta);
    for _ in 0..100 {
        let miss = at.slope - target;
        if miss.abs() <= 0.05 * at.curvature.sqrt() || (high - low).abs() <= 1e-12 * theta.abs() {
            break;
        }
        if miss > 0.0 {
            high = theta;
        } else {
            low = theta;
        }
        let mut next = theta - miss / at.curvature;
        if !(next > low && next < high) {
            next = match (low.is_finite(), high.is_finite()) {
                (true, true) => 0.5 * (low + high),
                (true, false) => theta + theta.abs().max(1e-12),
                (false, true) => theta - theta.abs().max(1e-12),
                (false, false) => theta,
            };
        }
        theta = next;
        at = cumulants(parts, theta);
    }
    (theta, at)
}

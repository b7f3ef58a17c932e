//! Standardized sums that live on a lattice: from cumulative probabilities by index to answers by z.
//!
//! The sum takes the values base + span·k, k integer. Everything here is in *lattice units* (the index k as a
//! real number): the mean is `center`, the standard deviation `sd`, and z = (k − center)/sd.

use super::twofold::Twofold;
use super::{Distance, Route, Side, StandardizedSum, SumMoments};
use crate::figure::Figure;
use crate::special::normal;

/// Cumulative probabilities of an integer-valued quantity K, with their errors.
pub(crate) trait Cumulative: Send + Sync + std::fmt::Debug {
    /// P(K ≤ k).
    fn at_or_below(&self, k: i64) -> Figure;
    /// P(K ≥ k).
    fn at_or_above(&self, k: i64) -> Figure;
    /// P(K ≤ k) where absolute accuracy is enough: no dearer tail is worked out for it.
    fn absolutely_at_or_below(&self, k: i64) -> Figure {
        self.at_or_below(k)
    }
    /// P(K ≥ k) likewise.
    fn absolutely_at_or_above(&self, k: i64) -> Figure {
        self.at_or_above(k)
    }
    /// Smallest and largest index the quantity may take.
    fn range(&self) -> (i64, i64);
    /// Whether the probabilities at neighbouring indices lie on one curve that is smooth over many of them.
    fn is_smooth(&self) -> bool {
        false
    }
}

/// Where the lattice lies relative to the standard units.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Scale {
    /// The mean, in lattice units.
    pub center: Twofold,
    /// The standard deviation, in lattice units.
    pub sd: f64,
    /// |mean of the sum|/span: how large the numbers are that callers subtract to get z.
    pub magnitude: f64,
    /// How far `center` may be from the true mean, because probabilities were given as doubles.
    pub center_error: f64,
}

impl Scale {
    /// The standard units of an index.
    pub fn z(&self, k: i64) -> f64 {
        self.center.distance_to(k as f64) / self.sd
    }

    /// The index just at or below z, and whether z *is* that lattice point (or the next above, then returned).
    ///
    /// A caller gets z from (s − mean)/sd with s and the mean of the order of `magnitude`·span: each of the
    /// three operations and each of the two moments contributes a few units in the last place of that
    /// magnitude. The tolerance is 16 such units, never more than a quarter of the span.
    fn locate(&self, z: f64, (first, last): (i64, i64)) -> (i64, bool) {
        let x = self.center.high + (z * self.sd + self.center.low);
        if x < first as f64 - 0.5 {
            return (first - 1, false);
        }
        if x > last as f64 + 0.5 {
            return (last, false);
        }
        let size = self.magnitude + self.center.high.abs() + (z * self.sd).abs();
        let tolerance = (16.0 * f64::EPSILON * size).min(0.25);
        let nearest = x.round();
        if (x - nearest).abs() <= tolerance { (nearest as i64, true) } else { (x.floor() as i64, false) }
    }
}

/// A standardized sum on a lattice.
#[derive(Debug)]
pub(crate) struct Steps<C> {
    /// Cumulative probabilities by index.
    pub cumulative: C,
    /// Standard units.
    pub scale: Scale,
    /// Moments of the sum in its own units.
    pub moments: SumMoments,
    /// The route that led here.
    pub route: Route,
    /// How.
    pub detail: String,
    /// The sum is base − span·k instead: z counts downwards in k.
    pub reflected: bool,
}

impl<C: Cumulative> Steps<C> {
    /// P(Z ≤ z), or P(Z < z) if not `inclusive`, for the unreflected sum.
    fn lower(&self, z: f64, inclusive: bool) -> Figure {
        let range = self.cumulative.range();
        let (k, on_atom) = self.scale.locate(z, range);
        let k = if on_atom && !inclusive { k - 1 } else { k };
        if k < range.0 {
            Figure::bound(0.0, 0.0)
        } else if k >= range.1 {
            Figure::bound(1.0, 0.0)
        } else {
            self.with_input_error(self.cumulative.at_or_below(k), z)
        }
    }

    /// Allows for the centre: a tail probability falls by the factor e^(−h·δz) when the centre moves by δz, with a
    /// hazard h of about |z| + 1; twice that is allowed for.
    fn with_input_error(&self, figure: Figure, z: f64) -> Figure {
        let shift = self.scale.center_error / self.scale.sd;
        let tail = figure.value.min(1.0 - figure.value).max(0.0);
        Figure { error: figure.error + 2.0 * (1.0 + z.abs()) * shift * tail, ..figure }
    }

    /// P(Z ≥ z), or P(Z > z) if not `inclusive`, for the unreflected sum.
    fn upper(&self, z: f64, inclusive: bool) -> Figure {
        let range = self.cumulative.range();
        let (k, on_atom) = self.scale.locate(z, range);
        let k = if on_atom && inclusive { k } else { k + 1 };
        if k > range.1 {
            Figure::bound(0.0, 0.0)
        } else if k <= range.0 {
            Figure::bound(1.0, 0.0)
        } else {
            self.with_input_error(self.cumulative.at_or_above(k), z)
        }
    }

    fn below_index(&self, k: i64) -> Figure {
        let (first, last) = self.cumulative.range();
        if k < first {
            Figure::bound(0.0, 0.0)
        } else if k >= last {
            Figure::bound(1.0, 0.0)
        } else {
            self.cumulative.at_or_below(k)
        }
    }

    fn above_index(&self, k: i64) -> Figure {
        let (first, last) = self.cumulative.range();
        if k > last {
            Figure::bound(0.0, 0.0)
        } else if k <= first {
            Figure::bound(1.0, 0.0)
        } else {
            self.cumulative.at_or_above(k)
        }
    }

    /// P(K ≤ k) for a gap to Φ, which needs absolute accuracy only.
    fn lower_for_gap(&self, k: i64) -> Figure {
        let (first, last) = self.cumulative.range();
        if k < first || k >= last { self.below_index(k) } else { self.cumulative.absolutely_at_or_below(k) }
    }

    /// P(K ≥ k) likewise.
    fn upper_for_gap(&self, k: i64) -> Figure {
        let (first, last) = self.cumulative.range();
        if k <= first || k > last { self.above_index(k) } else { self.cumulative.absolutely_at_or_above(k) }
    }

    /// Scans outwards from the centre. At index k the candidates are |F(k) − Φ(z)| and |F(k−1) − Φ(z)|; once the
    /// tail of F and that of Φ are both below the best difference found, nothing further out can beat it,
    /// because a difference of two tail probabilities is at most the larger of them.
    ///
    /// Stated error: the largest error of any F looked at, plus ½·|δz| with |δz| ≤ `center_error`/sd + 4 units in
    /// the last place of 4 (no winner lies further out, where φ(z)·z is smaller still), plus 4 units of 1.
    fn widest(&self) -> Distance {
        let best = if self.cumulative.is_smooth() && self.scale.sd > SMOOTH_FROM {
            self.widest_on_a_curve()
        } else {
            self.widest_of_all()
        };
        let z = self.scale.z(best.k);
        let shift = self.scale.center_error / self.scale.sd + 16.0 * f64::EPSILON;
        let error = best.error + 0.5 * shift + 4.0 * f64::EPSILON;
        Distance { kolmogorov: Figure::bound(best.gap.clamp(0.0, 1.0), error), at_z: z, side: best.side }
    }

    /// Both sides of the jump at k.
    fn consider(&self, k: i64, best: &mut Candidate) {
        let z = self.scale.z(k);
        if z <= 0.0 {
            best.consider_both(k, self.lower_for_gap(k), self.lower_for_gap(k - 1), normal::at_or_below(z));
        } else {
            best.consider_both(k, self.upper_for_gap(k + 1), self.upper_for_gap(k), normal::above(z));
        }
    }

    /// Where the indices are many and F runs through them on a smooth curve, |F − Φ| at either side of the jumps
    /// is a smooth function of k whose local maxima lie tenths of a standard deviation apart or more. Indices a
    /// sixty-fourth of a standard deviation apart bracket each maximum; halving strides then climb to it. A climb
    /// stops early only where neighbours differ by less than their own errors.
    fn widest_on_a_curve(&self) -> Candidate {
        let (first, last) = self.cumulative.range();
        let middle = self.scale.center.value().round() as i64;
        let stride = (self.scale.sd / 64.0) as i64;
        let mut best = Candidate { gap: -1.0, k: middle.clamp(first, last), side: Side::At, error: 0.0 };
        let gap = |k: i64, side: Side| {
            let z = self.scale.z(k);
            let (figure, normal) = match (z <= 0.0, side) {
                (true, Side::At) => (self.lower_for_gap(k), normal::at_or_below(z)),
                (true, Side::JustBelow) => (self.lower_for_gap(k - 1), normal::at_or_below(z)),
                (false, Side::At) => (self.upper_for_gap(k + 1), normal::above(z)),
                (false, Side::JustBelow) => (self.upper_for_gap(k), normal::above(z)),
            };
            (figure.value - normal).abs()
        };
        let points: Vec<i64> = (-320..=320)
            .map(|i| middle + i * stride)
            .filter(|&k| k >= first && k <= last)
            .chain([first, last].into_iter().filter(|&k| (k - middle).abs() < 320 * stride))
            .collect();
        for side in [Side::At, Side::JustBelow] {
            let gaps: Vec<f64> = points.iter().map(|&k| gap(k, side)).collect();
            let most = gaps.iter().copied().fold(0.0, f64::max);
            for (i, &at) in gaps.iter().enumerate() {
                let before = if i > 0 { gaps[i - 1] } else { 0.0 };
                let after = gaps.get(i + 1).copied().unwrap_or(0.0);
                // A maximum between two points exceeds the higher by little: skip those that cannot win.
                if at < before || at < after || at < 0.9 * most {
                    continue;
                }
                let (mut k, mut here, mut step) = (points[i], at, stride);
                while step >= 1 {
                    let sides = [(k - step).max(first), (k + step).min(last)];
                    let better = sides
                        .into_iter()
                        .map(|k| (gap(k, side), k))
                        .fold((here, k), |a, b| if b.0 > a.0 { b } else { a });
                    if better.1 == k {
                        step /= 2;
                    } else {
                        (here, k) = better;
                    }
                }
                for near in (k - 2).max(first)..=(k + 2).min(last) {
                    self.consider(near, &mut best);
                }
            }
        }
        best.error += 8.0 * f64::EPSILON;
        best
    }

    fn widest_of_all(&self) -> Candidate {
        let (first, last) = self.cumulative.range();
        let start = (self.scale.center.value().floor() as i64).clamp(first, last);
        let mut best = Candidate { gap: -1.0, k: start, side: Side::At, error: 0.0 };
        let mut k = start;
        loop {
            let z = self.scale.z(k);
            let lower = self.lower_for_gap(k);
            let below = self.lower_for_gap(k - 1);
            best.consider_both(k, lower, below, normal::at_or_below(z));
            if k <= first || lower.value.max(normal::at_or_below(z)) < best.gap {
                break;
            }
            k -= 1;
        }
        k = start + 1;
        while k <= last {
            let z = self.scale.z(k);
            // In upper-tail terms: F(k) − Φ = normal above − P(K ≥ k+1).
            let above = self.upper_for_gap(k + 1);
            let at_or_above = self.upper_for_gap(k);
            let normal_above = normal::above(z);
            best.consider_both(k, above, at_or_above, normal_above);
            if at_or_above.value.max(normal_above) < best.gap {
                break;
            }
            k += 1;
        }
        best
    }

    /// Smallest k with P(K ≤ k) ≥ p, by bisection; `slack` is added to the probability in units of its error.
    fn first_reaching(&self, p: f64, slack: f64) -> i64 {
        let q = 1.0 - p;
        let (first, last) = self.cumulative.range();
        self.first_index(first - 1, last, |k| {
            if p <= 0.5 {
                let lower = self.below_index(k);
                lower.value + slack * (lower.error + 4.0 * f64::EPSILON * p) >= p
            } else {
                let above = self.above_index(k + 1);
                above.value - slack * (above.error + 4.0 * f64::EPSILON * q) <= q
            }
        })
    }

    /// Largest k with P(K ≥ k) ≥ p, likewise.
    fn last_reaching(&self, p: f64, slack: f64) -> i64 {
        let q = 1.0 - p;
        let (first, last) = self.cumulative.range();
        let beyond = self.first_index(first, last + 1, |k| {
            !if p <= 0.5 {
                let upper = self.above_index(k);
                upper.value + slack * (upper.error + 4.0 * f64::EPSILON * p) >= p
            } else {
                let below = self.below_index(k - 1);
                below.value - slack * (below.error + 4.0 * f64::EPSILON * q) <= q
            }
        });
        beyond - 1
    }

    /// The first k in (low, high] with a property that all larger k have and `high` is known to have.
    ///
    /// Steps of doubling width lead from the mean to a bracket, which is then bisected: the far tails, which are
    /// costly where they need transforms of their own, are looked at only where the answer lies in them.
    fn first_index(&self, mut low: i64, mut high: i64, has: impl Fn(i64) -> bool) -> i64 {
        let range = self.cumulative.range();
        let mean = self.scale.locate(0.0, range).0;
        let mut step = (self.scale.locate(1.0, range).0 - mean).max(1);
        let mut k = mean;
        let mut upwards = None;
        while low < k && k < high {
            let found = has(k);
            if found {
                high = k;
            } else {
                low = k;
            }
            if *upwards.get_or_insert(!found) == found {
                break;
            }
            k = if found { k.saturating_sub(step) } else { k.saturating_add(step) };
            step = step.saturating_mul(2);
        }
        while high - low > 1 {
            let middle = low + (high - low) / 2;
            if has(middle) {
                high = middle;
            } else {
                low = middle;
            }
        }
        high
    }
}

/// Standard deviations, in indices, from which a smooth curve is searched instead of every index.
const SMOOTH_FROM: f64 = 512.0;

/// The best difference found so far.
struct Candidate {
    gap: f64,
    k: i64,
    side: Side,
    error: f64,
}

impl Candidate {
    /// `after` includes the jump at k, `before` does not (or the reverse in upper-tail terms, where `after` is
    /// again the value right of the jump).
    fn consider_both(&mut self, k: i64, after: Figure, before: Figure, normal: f64) {
        for (figure, side) in [(after, Side::At), (before, Side::JustBelow)] {
            let gap = (figure.value - normal).abs();
            self.error = self.error.max(figure.error);
            if gap > self.gap {
                (self.gap, self.k, self.side) = (gap, k, side);
            }
        }
    }
}

impl<C: Cumulative> StandardizedSum for Steps<C> {
    fn route(&self) -> Route {
        self.route
    }

    fn detail(&self) -> String {
        self.detail.clone()
    }

    fn moments(&self) -> SumMoments {
        self.moments
    }

    fn at_or_below(&self, z: f64) -> Figure {
        if self.reflected { self.upper(-z, true) } else { self.lower(z, true) }
    }

    fn below(&self, z: f64) -> Figure {
        if self.reflected { self.upper(-z, false) } else { self.lower(z, false) }
    }

    fn above(&self, z: f64) -> Figure {
        if self.reflected { self.lower(-z, false) } else { self.upper(z, false) }
    }

    fn at_or_above(&self, z: f64) -> Figure {
        if self.reflected { self.lower(-z, true) } else { self.upper(z, true) }
    }

    fn kolmogorov(&self) -> Distance {
        let distance = self.widest();
        if self.reflected {
            let side = match distance.side {
                Side::At => Side::JustBelow,
                Side::JustBelow => Side::At,
            };
            Distance { at_z: -distance.at_z, side, ..distance }
        } else {
            distance
        }
    }

    /// The stated error covers the indices between which the error of the probabilities cannot decide; among
    /// them the one is returned that p belongs to if p was read off this distribution.
    fn quantile(&self, p: f64) -> Figure {
        let p = p.clamp(f64::MIN_POSITIVE, 1.0 - f64::EPSILON / 2.0);
        let (near, far) = if self.reflected {
            (-self.scale.z(self.last_reaching(p, 1.0)), -self.scale.z(self.last_reaching(p, -1.0)))
        } else {
            (self.scale.z(self.first_reaching(p, 1.0)), self.scale.z(self.first_reaching(p, -1.0)))
        };
        Figure::bound(near, (far - near).abs() + 8.0 * f64::EPSILON * near.abs())
    }

    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>> {
        let (from, to) = if self.reflected { (-to, -from) } else { (from, to) };
        let range = self.cumulative.range();
        let (start, on_start) = self.scale.locate(from, range);
        let (end, _) = self.scale.locate(to, range);
        let start = if on_start { start } else { start + 1 };
        if end < start {
            return Some(Vec::new());
        }
        let mut found = Vec::new();
        // Lattice points without mass are no jumps; there may be many of them between jumps, so bound the walk.
        if (end - start) as u64 > 64 * limit as u64 + 1024 {
            return None;
        }
        for k in start..=end {
            let z = self.scale.z(k);
            let jumps = if z <= 0.0 {
                self.below_index(k).value > self.below_index(k - 1).value
            } else {
                self.above_index(k).value > self.above_index(k + 1).value
            };
            if jumps {
                if found.len() == limit {
                    return None;
                }
                found.push(if self.reflected { -z } else { z });
            }
        }
        if self.reflected {
            found.reverse();
        }
        Some(found)
    }

    fn lattice_span(&self) -> Option<f64> {
        Some(1.0 / self.scale.sd)
    }
}

/// Masses cumulated from both ends inwards, so that both tails keep their relative accuracy.
#[derive(Debug)]
pub(crate) struct CumulativeTable {
    /// Index of the first entry.
    pub first: i64,
    /// P(K ≤ first + i).
    pub lower: Vec<f64>,
    /// P(K ≥ first + i).
    pub upper: Vec<f64>,
}

impl CumulativeTable {
    /// Cumulates masses with compensation: at most 2 units in the last place beyond the errors of the masses.
    /// Masses may be slightly negative by rounding; the running maximum of the sums is kept, which is monotone and
    /// no further from the truth than the worst of the sums.
    pub fn new(first: i64, masses: &[f64]) -> Self {
        let mut lower = vec![0.0; masses.len()];
        let mut upper = vec![0.0; masses.len()];
        let mut sum = Compensated::default();
        let mut most = 0.0;
        for (out, &mass) in lower.iter_mut().zip(masses) {
            most = sum.add(mass).clamp(most, 1.0);
            *out = most;
        }
        (sum, most) = (Compensated::default(), 0.0);
        for (out, &mass) in upper.iter_mut().zip(masses).rev() {
            most = sum.add(mass).clamp(most, 1.0);
            *out = most;
        }
        Self { first, lower, upper }
    }

    /// P(K ≤ k); 0 below the table, 1 above it.
    pub fn at_or_below(&self, k: i64) -> f64 {
        match usize::try_from(k - self.first) {
            Ok(i) => self.lower.get(i).copied().unwrap_or(1.0),
            Err(_) => 0.0,
        }
    }

    /// P(K ≥ k); 1 below the table, 0 above it.
    pub fn at_or_above(&self, k: i64) -> f64 {
        match usize::try_from(k - self.first) {
            Ok(i) => self.upper.get(i).copied().unwrap_or(0.0),
            Err(_) => 1.0,
        }
    }
}

/// A running sum with compensation (Kahan).
#[derive(Default, Clone, Copy)]
pub(crate) struct Compensated {
    sum: f64,
    lost: f64,
}

impl Compensated {
    /// Adds and returns the sum so far.
    pub fn add(&mut self, value: f64) -> f64 {
        let value = value - self.lost;
        let sum = self.sum + value;
        self.lost = (sum - self.sum) - value;
        self.sum = sum;
        sum
    }
}

//! Far tails of a lattice sum with relative accuracy, by exponential tilting: one tilt per region.
//!
//! With p_θ(k) = p(k)e^(θk)/M(θ) for each summand, P(S = k) = M(θ)ⁿ e^(−θk) P_θ(S = k). Choosing θ so that the
//! tilted sum is centred near k makes P_θ(S = k) large compared with the rounding of its transform (Wilson and
//! Keich 2016; Grübel and Hermesmeier 1999).

use super::power::{masses, transform_length};
use super::summand::{Part, center, range, tilt_for, window};
use crate::figure::Figure;
use crate::work::Work;
use std::sync::{Arc, Mutex};

/// Unit roundoff.
const U: f64 = f64::EPSILON / 2.0;

/// Tail probabilities from `near` outwards to `far` (by index, either direction).
#[derive(Debug)]
struct Region {
    near: i64,
    far: i64,
    theta: f64,
    /// Probability of the tail beginning at the index `near` ± i.
    tails: Vec<Figure>,
}

/// One tail, in regions that are computed when first asked for, always in the same order.
#[derive(Debug)]
pub(crate) struct Tail {
    /// +1 for P(S ≥ k), −1 for P(S ≤ k).
    sign: f64,
    /// Where the first region begins.
    begin: i64,
    /// The furthest index with mass.
    end: i64,
    /// Standard deviation of the untilted sum.
    sd: f64,
    regions: Mutex<Vec<Arc<Region>>>,
}

/// Mass left outside the window of a tilted sum on each side: e^−46 ≈ 1e-20.
const OUTSIDE: f64 = 46.0;

/// Relative accuracy of the tails of a region.
const SHARP: f64 = 1e-9;

/// Tilted standard deviations from the centre of a region to its ends.
const HALF_WIDTH: f64 = 2.0;

/// Whether a tail probability is known to the relative accuracy a region must have.
fn is_sharp(tail: &Figure) -> bool {
    tail.error <= SHARP * tail.value || tail.value < 1e-300
}

impl Tail {
    /// The tail beyond `begin`; `upper` says which.
    pub fn new(parts: &[Part], upper: bool, begin: i64, sd: f64) -> Self {
        let (least, most) = range(parts);
        let end = if upper { most } else { least } as i64;
        Self { sign: if upper { 1.0 } else { -1.0 }, begin, end, sd, regions: Mutex::new(Vec::new()) }
    }

    /// Whether k lies in this tail.
    pub fn contains(&self, k: i64) -> bool {
        if self.sign > 0.0 { k >= self.begin } else { k <= self.begin }
    }

    /// P(S ≥ k), or P(S ≤ k) in the lower tail, for k at or beyond the beginning; 0 below 1e-300, with the bound
    /// as its error.
    pub fn probability(&self, parts: &[Part], k: i64) -> Figure {
        let beyond = |a: i64, b: i64| if self.sign > 0.0 { a > b } else { a < b };
        if beyond(k, self.end) {
            return Figure::bound(0.0, 0.0);
        }
        let mut regions = self.regions.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
        loop {
            let near = regions.last().map_or(self.begin, |region| region.far + self.sign as i64);
            if let Some(region) = regions.last() {
                if !beyond(k, region.far) {
                    break;
                }
                if let Some(last) = region.tails.last()
                    && last.value < 1e-300
                {
                    return Figure::bound(0.0, last.value + last.error);
                }
            }
            let start = regions.last().map_or(self.sign * 4.0 / self.sd, |region| region.theta);
            let mut region = self.region(parts, near, start, HALF_WIDTH);
            // A lumpy law may have little mass where the tilt for further out puts it: tilt for here instead.
            if region.tails.first().is_some_and(|first| !is_sharp(first)) {
                let closer = self.region(parts, near, start, 0.0);
                if closer.tails[0].error < region.tails[0].error {
                    region = closer;
                }
            }
            // The region ends where its relative accuracy does; the next one begins there.
            let sharp = region.tails.iter().skip(1).take_while(|tail| is_sharp(tail)).count() + 1;
            region.tails.truncate(sharp);
            region.far = near + self.sign as i64 * (sharp as i64 - 1);
            regions.push(Arc::new(region));
        }
        let found = regions.iter().rev().find(|region| !beyond(region.near, k));
        found
            .and_then(|region| region.tails.get((k - region.near).unsigned_abs() as usize).copied())
            .unwrap_or(Figure::bound(0.0, f64::MIN_POSITIVE))
    }

    /// Computes the region beginning at `near`.
    fn region(&self, parts: &[Part], near: i64, start: f64, half_width: f64) -> Region {
        let mean = center(parts);
        // All distances from the mean are counted outwards, so that both tails read alike.
        let near_distance = self.sign * mean.distance_to(near as f64);
        let furthest = self.sign * mean.distance_to(self.end as f64);
        let mut sd = self.sd;
        let mut theta = start;
        let mut cumulants;
        let mut target;
        let mut tries = 0;
        loop {
            target =
                (near_distance + half_width * sd).min(0.5 * (near_distance + furthest)).min(furthest - 0.4);
            (theta, cumulants) = tilt_for(parts, self.sign * target, theta);
            let tilted_sd = cumulants.curvature.sqrt();
            tries += 1;
            if target - near_distance <= 1.5 * HALF_WIDTH * tilted_sd.max(0.5) || tries == 8 {
                break;
            }
            sd = tilted_sd;
        }
        let tilted_sd = cumulants.curvature.sqrt();
        let reach = (target + HALF_WIDTH * tilted_sd - near_distance).floor().max(0.0) as i64;
        let length = reach.min((self.end - near).abs()) as usize + 1;
        let tilted: Vec<Part> = parts.iter().map(|part| part.tilted(theta)).collect();
        let (first, last) = window(&tilted, OUTSIDE, tilted_sd.max(0.1));
        let (first, last) = (first.min(near), last.max(near));
        let size = transform_length((last - first + 1) as usize);
        let damping = theta.abs();
        // Not cancelled half-way: a region is kept for everybody.
        let Ok(found) = masses(&tilted, first, size, 2.0 * (-OUTSIDE).exp(), damping, &Work::new()) else {
            return Region { near, far: near, theta, tails: vec![Figure::bound(0.0, 1.0)] };
        };
        // T(k) = mass(k) + e^(−|θ|)·T(k ± 1), from the far end.
        let shrink = (-damping).exp();
        let end = if self.sign > 0.0 { first + found.values.len() as i64 - 1 } else { first };
        let mut tails = vec![Figure::bound(0.0, 0.0); length];
        let mut sum = 0.0;
        // Tails grow inwards; where rounding says otherwise the larger one is no further from the truth.
        let mut least = 0.0f64;
        let mut k = end;
        loop {
            sum = sum * shrink + found.values[(k - first) as usize];
            let i = (k - near).unsigned_abs() as usize;
            if i < length {
                // ln(M(θ)ⁿ e^(−θ(k − E S))); both terms are known to a few units in their last places. The
                // recursion rounds twice a step, with a memory of 1/(1 − e^−|θ|) steps.
                let turned = theta * mean.distance_to(k as f64);
                let factor = (cumulants.value - turned).exp();
                let memory = (4.0 / damping.max(U)).min(4.0 * size as f64);
                let relative = U * (32.0 + 8.0 * (cumulants.value.abs() + turned.abs()) + memory);
                least = least.max(factor * sum);
                let error = factor * (found.damped_error + relative * sum.abs()) + f64::MIN_POSITIVE;
                tails[i] = Figure::bound(least.min(1.0), error);
            }
            if k == near {
                break;
            }
            k -= self.sign as i64;
        }
        Region { near, far: near + self.sign as i64 * (length as i64 - 1), theta, tails }
    }
}

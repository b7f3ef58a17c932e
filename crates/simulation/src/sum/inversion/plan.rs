//! How far and how finely to sample the transform, from bounds made before anything is computed.

use super::selection::{Selection, selections};
use super::tails::{ScaledTerm, beyond, reach_of};

/// What to compute.
#[derive(Debug)]
pub(super) struct Plan {
    /// Window of z in which values are interpolated.
    pub(super) low: f64,
    /// Its upper end.
    pub(super) high: f64,
    /// Selections up to this many continuous summands are kept out of the transform; −1 for none.
    pub(super) degree: i64,
    /// Those of them that are added in real space.
    pub(super) subtracted: Vec<Selection>,
    /// Probability of those too improbable to be added.
    pub(super) dropped: f64,
    /// Mass left for the transform.
    pub(super) remaining: f64,
    /// Period of the series.
    pub(super) period: f64,
    /// Number of frequencies; 0 where nothing is left to invert.
    pub(super) frequencies: usize,
    /// Bound on the sum of what lies beyond the last frequency.
    pub(super) truncation: f64,
    /// Bound on the aliases inside the window.
    pub(super) alias: f64,
}

/// Weights below this are not worth adding in real space; they go into the error.
const NEGLIGIBLE: f64 = 1e-15;
/// (alias wanted, truncation wanted, most frequencies).
const LEVELS: [(f64, f64, usize); 4] =
    [(1e-14, 2e-13, 1 << 15), (1e-13, 2e-12, 1 << 17), (5e-12, 2e-11, 1 << 18), (3e-11, 1e-10, 1 << 19)];
/// Steps of the ladder of frequencies on which truncation is bounded.
const LADDER: f64 = 1.1;

/// Bound on the modulus of the part of the transform of degree above `degree`, for all frequencies ≥ t.
fn ceiling(terms: &[ScaledTerm], t: f64, degree: i64) -> f64 {
    let whole: f64 = terms
        .iter()
        .map(|term| term.count as f64 * term.summand.ceiling().log_whole(&term.summand, t * term.scale.abs()))
        .sum();
    let whole = whole.exp();
    if degree < 0 {
        return whole;
    }
    let (mut log_base, mut share, mut forced) = (0.0, 0.0, 0_i64);
    for term in terms {
        let continuous = term.summand.ceiling().continuous(&term.summand, t * term.scale.abs());
        let n = term.count as f64;
        if term.summand.atom_mass > 0.0 {
            log_base += n * term.summand.atom_mass.ln();
            share += n * continuous / term.summand.atom_mass;
        } else {
            log_base += n * continuous.ln();
            forced = forced.saturating_add(term.count.min(1 << 40) as i64);
        }
    }
    let base = log_base.exp();
    let first = (degree + 1 - forced).max(0);
    // Σ_{j ≥ first} share^j/j!
    let mut power = 1.0;
    let mut low = 0.0;
    for j in 1..=first {
        low += power;
        power *= share / j as f64;
    }
    let tail = if share < 1.0 {
        let mut sum = power;
        let mut term = power;
        for j in first + 1..first + 40 {
            term *= share / j as f64;
            sum += term;
        }
        sum
    } else {
        share.exp()
    };
    (base * tail).min(whole + base * low)
}

/// The frequency beyond which the rest of Σ|·|/(π(k + ½)) is at most `wanted`, and that rest.
fn cut_off(terms: &[ScaledTerm], degree: i64, wanted: &[f64]) -> Vec<Option<(f64, f64)>> {
    let mut rungs = vec![0.5];
    let mut heights = vec![ceiling(terms, 0.5, degree)];
    while rungs.len() < 420 {
        let t = rungs[rungs.len() - 1] * LADDER;
        let height = ceiling(terms, t, degree);
        rungs.push(t);
        heights.push(height);
        if height < 1e-16 {
            break;
        }
    }
    let last = heights.len() - 1;
    if heights[last] > 2e-16 {
        return vec![None; wanted.len()];
    }
    // Beyond the ladder a power t^(−a) adds height/a in units of 1/π: the factor 100 covers every a ≥ 0.1.
    let share = LADDER.ln() / std::f64::consts::PI;
    let mut rest = heights[last] * 10.0 / std::f64::consts::PI;
    let mut sums = vec![rest; heights.len()];
    for k in (0..last).rev() {
        rest += heights[k] * share;
        sums[k] = rest;
    }
    wanted.iter().map(|w| sums.iter().position(|s| s <= w).map(|k| (rungs[k], sums[k]))).collect()
}

/// Makes the plan, or says why there is none.
pub(super) fn plan(terms: &[ScaledTerm], reach_z: f64) -> Result<Plan, String> {
    let reach = reach_z.clamp(8.0, 60.0) + 1.0;
    let window = |upper: bool| reach_of(terms, 1e-18, upper).map_or(reach, |x| x.min(reach));
    let (low, high) = (-window(false), window(true));
    let all = selections(terms);
    let total: u64 = terms.iter().map(|t| t.count).fold(0, u64::saturating_add);
    let max_degree = all.iter().map(|s| s.degree as i64).max().unwrap_or(-1);
    let mut degrees: Vec<i64> = vec![-1];
    degrees.extend((0..=max_degree).filter(|d| all.iter().any(|s| s.degree as i64 == *d)));
    if total == 1 {
        degrees = vec![max_degree];
    }
    let mut best: Option<(usize, Plan)> = None;
    for degree in degrees {
        let (mut subtracted, mut dropped) = (Vec::new(), 0.0);
        for s in all.iter().filter(|s| s.degree as i64 <= degree) {
            if s.weight < NEGLIGIBLE { dropped += s.weight } else { subtracted.push(s.clone()) }
        }
        let base = Plan {
            low,
            high,
            degree,
            remaining: if total <= degree.max(0) as u64 {
                0.0
            } else {
                (1.0 - subtracted.iter().map(|s| s.weight).sum::<f64>()).max(0.0)
            },
            subtracted,
            dropped,
            period: 0.0,
            frequencies: 0,
            truncation: 0.0,
            alias: 0.0,
        };
        if base.remaining == 0.0 {
            if best.is_none() {
                best = Some((0, base));
            }
            break;
        }
        let cuts = cut_off(terms, degree, &LEVELS.map(|l| l.1));
        for (level, ((wanted, _, most), cut)) in LEVELS.iter().zip(cuts).enumerate() {
            let (Some((frequency, truncation)), Some(upper), Some(lower)) =
                (cut, reach_of(terms, *wanted, true), reach_of(terms, *wanted, false))
            else {
                continue;
            };
            let period = (high + lower).max(upper - low).max(1.3 * (high - low));
            let frequencies = frequency * period / (2.0 * std::f64::consts::PI) + 1.0;
            let reachable = terms.iter().all(|t| frequency * t.scale.abs() < t.summand.highest_frequency());
            if frequencies > *most as f64 || !reachable {
                continue;
            }
            let alias = beyond(terms, period - high, false).max(beyond(terms, period + low, true));
            let found = Plan { period, frequencies: frequencies.ceil() as usize, truncation, alias, ..base };
            let cost = found.frequencies + level;
            if best.as_ref().is_none_or(|(c, _)| cost < *c) {
                best = Some((cost, found));
            }
            break;
        }
        if best.as_ref().is_some_and(|(cost, _)| *cost <= 1 << 13) {
            break;
        }
    }
    best.map(|(_, plan)| plan).ok_or_else(|| {
        "its transform falls too slowly at this number of summands to be inverted to the accuracy promised".to_owned()
    })
}

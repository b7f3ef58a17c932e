//! Skewness-corrected t-intervals for a mean with estimated spread: Johnson's and Hall's, by simulation.
//!
//! With x̄, s and the third central moment m₃ of the sample (divisor n):
//! - Johnson 1978 (JASA 73:536): the interval x̄ + m₃/(6s²n) ± t·s/√n covers μ when |√n(x̄ + m₃/(6s²n) − μ)/s| ≤ t;
//! - Hall 1992 (JRSS B 54): with T = √n(x̄ − μ)/σ̂, γ̂ = m₃/σ̂³ and g(T) = T + γ̂T²/(3√n) + γ̂²T³/(27n) + γ̂/(6√n)
//!   (monotone), the interval covers μ when |g(T)| ≤ z; σ̂ has divisor n.
//!
//! Samples are added in three looks, each twice the last, until both rows are decided; the looks share the risk of a
//! wrong band equally, so that the figures hold wherever it stops.
//!
//! (Formulas from memory, algebra checked.) Samples come in blocks of fixed size, each with its own stream, so that
//! the result does not depend on the number of threads. A sample with s = 0 is a point: it covers if it hits.

use super::{MOST_SIMULATED, REMEDY_SHARE, SUMMANDS, near};
use crate::claims::{covered, critical_value, tail_probability};
use crate::figures::NEVER;
use crate::prepared::{Prepared, share_of_confidence};
use crate::report::{ClaimFacts, Remedy};
use crate::scenario::{Claim, Sides, Source, Spread};
use crate::words::numbers::whole;
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::Law;
use gaussgap_simulation::special::{beta, student};
use gaussgap_simulation::work::{Cancelled, Work};
use rand::SeedableRng;
use rayon::prelude::*;

/// Samples per block.
const BLOCK: u64 = 1024;

/// Looks at the counts.
const LOOKS: u32 = 3;

/// Most and fewest samples at the first look.
const MOST_SAMPLES: u64 = 100_000;
const FEWEST_SAMPLES: u64 = 4 * BLOCK;

/// The rows, for an interval for the mean of like summands with estimated spread.
pub(super) fn remedies(
    prepared: &Prepared,
    claim: &ClaimFacts,
    work: &Work,
) -> Result<Vec<Remedy>, Cancelled> {
    let (Claim::Interval { level, sides, spread: Spread::Estimated }, Source::Like { n, .. }, [law]) =
        (prepared.scenario.claim, &prepared.scenario.source, prepared.laws.as_slice())
    else {
        return Ok(Vec::new());
    };
    let first = (SUMMANDS / n).min(MOST_SAMPLES) / BLOCK;
    if *n < 3 || first * BLOCK < FEWEST_SAMPLES {
        return Ok(Vec::new());
    }
    let limits = Limits {
        t: student::quantile_above(*n as f64 - 1.0, tail_probability(1.0 - level, sides)),
        z: critical_value(1.0 - level, sides),
    };
    let share = REMEDY_SHARE / f64::from(MOST_SIMULATED * LOOKS);
    let risk = 1.0 - share_of_confidence(prepared.scenario.method.confidence, share);
    let row = |samples: u64, name: &str, [low, high]: [u64; 2], note: &str| {
        // Two figures share the risk of this row.
        let low = if sides == Sides::Lower { NEVER } else { clopper_pearson(low, samples, risk / 2.0) };
        let high = if sides == Sides::Upper { NEVER } else { clopper_pearson(high, samples, risk / 2.0) };
        let note = format!("{note}; {} simulated samples", whole(samples));
        near(prepared, name, covered(low, high), claim, &note)
    };
    let seed = prepared.scenario.method.seed;
    let mut counts = Counts::default();
    let mut rows = Vec::new();
    let mut done = 0;
    for look in 0..LOOKS {
        let blocks = first << look;
        counts = counts.plus(simulate(law, *n, done..blocks, seed, limits, work)?);
        done = blocks;
        let samples = blocks * BLOCK;
        let johnson = "shifts the t-interval by m₃/(6s²n)";
        let hall = "straightens the t-statistic by a cubic in the sample skewness";
        rows = vec![
            row(samples, "Johnson's skewness-corrected interval", counts.johnson, johnson),
            row(samples, "Hall's transformed interval", counts.hall, hall),
        ];
        if rows.iter().all(|row| decided(row, claim)) {
            break;
        }
    }
    Ok(rows)
}

/// Whether a row holds or fails beyond its error.
fn decided(row: &Remedy, claim: &ClaimFacts) -> bool {
    row.actual
        .is_none_or(|actual| ((actual.value - claim.nominal).abs() - claim.allowed).abs() > actual.error)
}

/// Critical values.
#[derive(Clone, Copy)]
struct Limits {
    t: f64,
    z: f64,
}

/// Misses [low, high] of each interval.
#[derive(Clone, Copy, Default)]
struct Counts {
    johnson: [u64; 2],
    hall: [u64; 2],
}

impl Counts {
    fn plus(self, other: Self) -> Self {
        let add = |a: [u64; 2], b: [u64; 2]| [a[0] + b[0], a[1] + b[1]];
        Self { johnson: add(self.johnson, other.johnson), hall: add(self.hall, other.hall) }
    }
}

fn simulate(
    law: &Law,
    n: u64,
    blocks: std::ops::Range<u64>,
    seed: u64,
    limits: Limits,
    work: &Work,
) -> Result<Counts, Cancelled> {
    let mean = law.moments.mean.unwrap_or(0.0);
    let scale = law.moments.variance.unwrap_or(1.0).sqrt();
    blocks
        .into_par_iter()
        .map(|block| {
            work.check()?;
            let mut random = rand::rngs::StdRng::seed_from_u64(stream_of(seed, block));
            let mut counts = Counts::default();
            let mut values = vec![0.0; n as usize];
            for _ in 0..BLOCK {
                for value in &mut values {
                    *value = (law.sample(&mut random) - mean) / scale;
                }
                let [johnson, hall] = statistics(&values);
                tally(&mut counts.johnson, johnson, limits.t);
                tally(&mut counts.hall, hall, limits.z);
            }
            Ok(counts)
        })
        .try_reduce(Counts::default, |a, b| Ok(a.plus(b)))
}

/// The stream of one block: the seed and the block number mixed by SplitMix64 (Steele, Lea and Flood 2014), apart
/// from the streams of other uses by a constant of its own.
fn stream_of(seed: u64, block: u64) -> u64 {
    let mut state = seed ^ 0x6a6f_686e_6861_6c6c_u64 ^ block.wrapping_mul(0x9e37_79b9_7f4a_7c15);
    state = (state ^ (state >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    state = (state ^ (state >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    state ^ (state >> 31)
}

/// The two pivots of a sample given as deviations from the true mean.
fn statistics(deviations: &[f64]) -> [f64; 2] {
    let n = deviations.len() as f64;
    let mean = deviations.iter().sum::<f64>() / n;
    let (mut second, mut third) = (0.0, 0.0);
    for value in deviations {
        let deviation = value - mean;
        second += deviation * deviation;
        third += deviation * deviation * deviation;
    }
    // All values equal up to rounding: the interval is a point.
    if second <= n * (4.0 * f64::EPSILON * (1.0 + mean.abs())).powi(2) {
        let miss = if mean.abs() <= 8.0 * f64::EPSILON { 0.0 } else { f64::INFINITY * mean.signum() };
        return [miss, miss];
    }
    let third = third / n;
    let sample_sd = (second / (n - 1.0)).sqrt();
    let johnson = n.sqrt() * (mean + third / (6.0 * sample_sd * sample_sd * n)) / sample_sd;
    let sd = (second / n).sqrt();
    let skewness = third / (sd * sd * sd);
    let t = n.sqrt() * mean / sd;
    let hall = t
        + skewness * t * t / (3.0 * n.sqrt())
        + skewness * skewness * t * t * t / (27.0 * n)
        + skewness / (6.0 * n.sqrt());
    [johnson, hall]
}

fn tally(misses: &mut [u64; 2], statistic: f64, limit: f64) {
    if statistic < -limit {
        misses[0] += 1;
    } else if statistic > limit {
        misses[1] += 1;
    }
}

/// The Clopper–Pearson interval of a frequency as a figure: value the frequency, error to the farther end.
fn clopper_pearson(hits: u64, samples: u64, risk: f64) -> Figure {
    let (k, n) = (hits as f64, samples as f64);
    let low = if hits == 0 { 0.0 } else { beta::quantile(k, n - k + 1.0, risk / 2.0) };
    let high = if hits == samples { 1.0 } else { beta::quantile_above(k + 1.0, n - k, risk / 2.0) };
    let value = k / n;
    Figure::confidence(value, (value - low).max(high - value))
}

#[cfg(test)]
mod tests {
    use super::*;
    use gaussgap_simulation::law::LawSpec;

    /// Exponential, n = 30, nominal 95 %: Hall's interval covers 0.933 (simulated, standard error ≤ 0.0004, in the
    /// notes on published results).
    #[test]
    fn hall_on_exponential_samples() {
        let law = LawSpec::Exponential { mean: 1.0 }.compile().expect("a valid law");
        let limits = Limits { t: student::quantile_above(29.0, 0.025), z: critical_value(0.05, Sides::Two) };
        let samples = 50 * BLOCK;
        let counts = simulate(&law, 30, 0..50, 7, limits, &Work::new()).expect("not cancelled");
        let covered = 1.0 - (counts.hall[0] + counts.hall[1]) as f64 / samples as f64;
        assert!((covered - 0.933).abs() < 0.005, "{covered}");
        let one = rayon::ThreadPoolBuilder::new().num_threads(1).build().expect("a pool");
        let again =
            one.install(|| simulate(&law, 30, 0..50, 7, limits, &Work::new())).expect("not cancelled");
        assert_eq!(counts.hall, again.hall);
        assert_eq!(counts.johnson, again.johnson);
    }
}

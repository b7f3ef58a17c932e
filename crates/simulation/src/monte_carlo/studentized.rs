//! How often intervals and tests with an estimated spread miss, and on which side.
//!
//! A sample mean with the interval x̄ ± t·s/√n: T = √n(x̄ − μ₀)/s against Student's t with n − 1 degrees of freedom.
//! A difference of two means with Welch's interval: T = (x̄₂ − x̄₁ − Δ₀)/√(s₁²/n₁ + s₂²/n₂) against Student's t with
//! the estimated degrees of freedom. μ₀ (Δ₀) is what the interval is asked to contain: the true value, or with
//! `shift` a value that far below it.
//!
//! Routes, the first that applies: normal laws in closed form or by quadrature (`normal_samples`); laws
//! on few atoms by exact enumeration (`enumeration`); lattice laws with moderately many values by the
//! joint law of Σx and Σx² (`pairs`); simulation in batches until the caller has what is needed.

use super::bands::clopper_pearson;
use super::critical::{CriticalValues, degrees_of_freedom};
use super::streams::{Purpose, block_stream, for_blocks};
use super::summands::{SampleDrawer, natural_unit};
use super::{enumeration, normal_samples, pairs};
use crate::figure::Figure;
use crate::law::Law;
use crate::special::student;
use crate::sum::{Route, SumError};
use crate::work::Work;

/// Simulated draws of single values stop after about so many, whatever the budget of samples says.
pub const VALUE_CAP: f64 = 4e9;
/// Samples in the first batch; each further one doubles the number of samples.
const FIRST_BATCH: u64 = 16_384;
/// Fewer samples than this say nothing worth stating; a plan that cannot have them is refused.
const FEWEST_SAMPLES: u64 = 400;
/// Values per block, about.
const BLOCK_COST: f64 = 65_536.0;

/// What is studentized.
#[derive(Debug, Clone, Copy)]
pub enum Studentized<'a> {
    /// The mean of n independent copies.
    Mean {
        /// The law of one.
        law: &'a Law,
        /// How many, at least 2.
        n: u64,
    },
    /// The difference of two means, second minus first (Welch).
    Difference {
        /// The law in the first group.
        first: &'a Law,
        /// Size of the first group, at least 2.
        n_first: u64,
        /// The law in the second group.
        second: &'a Law,
        /// Size of the second group, at least 2.
        n_second: u64,
    },
}

/// What is asked of a studentized statistic.
#[derive(Debug, Clone, Copy)]
pub struct StudentizedRequest<'a> {
    /// The statistic.
    pub statistic: Studentized<'a>,
    /// Nominal probability beyond the critical value on *one* side, in (0, ½): 0.025 for a two-sided 95 % interval.
    pub tail_probability: f64,
    /// True value minus hypothesised value: in units of σ for a mean, of √(σ₁²/n₁ + σ₂²/n₂) for a difference.
    /// 0 asks for coverage; `high` with a positive shift is the power of the upper one-sided test.
    pub shift: f64,
    /// Budget of simulated samples.
    pub draws: u64,
    /// Seed of the simulation.
    pub seed: u64,
    /// Joint confidence of the simulated figures, in (0, 1).
    pub confidence: f64,
}

/// How often the interval misses.
#[derive(Debug, Clone, PartialEq)]
pub struct Misses {
    /// P(T < −t): the whole interval lies below the hypothesised value.
    pub low: Figure,
    /// P(T > t): the whole interval lies above it.
    pub high: Figure,
    /// P(|T| ≤ t): it is covered.
    pub covered: Figure,
    /// Number of simulated samples, for simulation.
    pub draws: Option<u64>,
    /// One sentence on how.
    pub detail: String,
    /// How the figures were obtained; [`Route::Lattice`] stands for every exact enumeration.
    pub route: Route,
}

/// Probabilities of the three outcomes with one error for each.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Outcome {
    pub low: f64,
    pub high: f64,
    pub error: f64,
}

impl Outcome {
    /// Figures with bounded errors.
    pub(crate) fn misses(self, route: Route, detail: String) -> Misses {
        let covered = (1.0 - self.low - self.high).clamp(0.0, 1.0);
        Misses {
            low: Figure::bound(self.low.clamp(0.0, 1.0), self.error),
            high: Figure::bound(self.high.clamp(0.0, 1.0), self.error),
            covered: Figure::bound(covered, self.error),
            draws: None,
            detail,
            route,
        }
    }
}

/// How often the interval misses on each side.
///
/// A sample whose values are all equal has s = 0: its interval is a point, which misses low if it lies below the
/// hypothesised value, high if above, and covers if equal. With n = 1 there is no interval:
/// [`SumError::NotAvailable`].
///
/// Simulation goes on in batches, the number of samples doubling, until `decided` says that the figures suffice or
/// the budget (`draws`, and about [`VALUE_CAP`] values in all) is spent. The peeking is paid for: with L looks
/// possible, the last has half of the risk 1 − confidence, each earlier one 1/(2(L−1)), and each look shares its
/// part among the three figures by Bonferroni's inequality; Clopper–Pearson intervals. So the figures returned hold
/// jointly at the stated confidence wherever the simulation stops. The result depends on the request and on
/// `decided` only, not on the number of threads.
pub fn misses(
    request: &StudentizedRequest,
    decided: &dyn Fn(&Misses) -> bool,
    work: &Work,
) -> Result<Misses, SumError> {
    work.check()?;
    let refuse =
        |reason: &str| Err(SumError::NotAvailable { route: Route::Simulation, reason: reason.to_owned() });
    let smallest = match request.statistic {
        Studentized::Mean { n, .. } => n,
        Studentized::Difference { n_first, n_second, .. } => n_first.min(n_second),
    };
    if smallest < 2 {
        return refuse("a single value has no estimated spread, so there is no interval");
    }
    if !(request.tail_probability > 0.0 && request.tail_probability < 0.5) {
        return refuse("the tail probability must lie between 0 and 1/2");
    }
    if !request.shift.is_finite() {
        return refuse("the shift must be finite");
    }
    let laws = request.laws();
    if laws.iter().any(|law| law.moments.mean.is_none()) {
        return refuse("the law has no mean");
    }
    let varies = |law: &&Law| law.sd().is_none_or(|sd| sd > 0.0);
    if request.shift != 0.0 && laws.iter().any(|law| law.sd().is_none()) {
        return refuse("without a finite variance a shift has no unit");
    }
    if !laws.iter().any(varies) {
        return Err(SumError::NoVariance);
    }
    if let Some(exact) = normal_samples::misses(request, work)? {
        return Ok(exact);
    }
    if let Some(exact) = enumeration::misses(request, work)? {
        return Ok(exact);
    }
    if let Some(exact) = pairs::misses(request, work)? {
        return Ok(exact);
    }
    simulate(request, decided, work)
}

impl StudentizedRequest<'_> {
    fn laws(&self) -> Vec<&Law> {
        match self.statistic {
            Studentized::Mean { law, .. } => vec![law],
            Studentized::Difference { first, second, .. } => vec![first, second],
        }
    }

    /// A unit in which neither values nor squares overflow: for two groups the larger one's, of those that vary.
    pub(crate) fn unit(&self) -> f64 {
        self.laws()
            .into_iter()
            .filter(|law| !law.is_constant())
            .map(natural_unit)
            .fold(f64::MIN_POSITIVE, f64::max)
    }

    /// True minus hypothesised value, in the quantity's unit.
    pub(crate) fn shift_in_units(&self) -> f64 {
        if self.shift == 0.0 {
            return 0.0;
        }
        let sd_of_mean = |law: &Law, n: u64| law.sd().unwrap_or(0.0) / (n as f64).sqrt();
        self.shift
            * match self.statistic {
                Studentized::Mean { law, .. } => sd_of_mean(law, 1),
                Studentized::Difference { first, n_first, second, n_second } => {
                    sd_of_mean(first, n_first).hypot(sd_of_mean(second, n_second))
                }
            }
    }
}

/// The simulation of one statistic, ready to draw.
struct Sampler {
    drawers: Vec<(SampleDrawer, f64)>,
    rule: Rule,
    shift: f64,
    seed: u64,
    per_block: u64,
}

/// The critical value.
enum Rule {
    /// One for all samples.
    Fixed(f64),
    /// Depends on the sample.
    Welch(CriticalValues),
}

/// Samples that missed low, missed high, and all.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
struct Counts {
    low: u64,
    high: u64,
    all: u64,
}

impl Sampler {
    fn new(request: &StudentizedRequest) -> Self {
        let tail = request.tail_probability;
        let unit = request.unit();
        let (drawers, rule) = match request.statistic {
            Studentized::Mean { law, n } => {
                let fixed = student::quantile_above((n - 1) as f64, tail);
                (vec![(SampleDrawer::new(law, n, unit), n as f64)], Rule::Fixed(fixed))
            }
            Studentized::Difference { first, n_first, second, n_second } => {
                let (n1, n2) = (n_first as f64, n_second as f64);
                let drawers = vec![
                    (SampleDrawer::new(first, n_first, unit), n1),
                    (SampleDrawer::new(second, n_second, unit), n2),
                ];
                (drawers, Rule::Welch(CriticalValues::new(tail, n1.min(n2) - 1.0, n1 + n2 - 2.0)))
            }
        };
        let mut sampler =
            Self { drawers, rule, shift: request.shift_in_units() / unit, seed: request.seed, per_block: 1 };
        sampler.per_block = ((BLOCK_COST / sampler.cost()) as u64).clamp(1, 1024);
        sampler
    }

    /// Values drawn per sample.
    fn cost(&self) -> f64 {
        self.drawers.iter().map(|(drawer, _)| drawer.cost).sum::<f64>().max(1.0)
    }

    /// Drawing by table moves the law of each value by at most its error in Kolmogorov distance. With all values but
    /// one held fixed, {T > t} is an interval in that one (x̄ − t·s/√n is concave), so its probability moves by at
    /// most twice that; so does {T < −t}, and their complement by the sum of both. Varying the values one by one
    /// gives 4 × the error of the sum. A relative error of the critical values enters at most once.
    fn error(&self) -> f64 {
        let critical = match &self.rule {
            Rule::Fixed(_) => 0.0,
            Rule::Welch(table) => table.error,
        };
        critical + 4.0 * self.drawers.iter().map(|(drawer, _)| drawer.error).sum::<f64>()
    }

    fn draw_block(&self, block: u64, counts: &mut Counts) {
        let mut random = block_stream(self.seed, Purpose::Studentized, block);
        for _ in 0..self.per_block {
            let (difference, margin) = match (&self.rule, self.drawers.as_slice()) {
                (Rule::Fixed(t), [(drawer, n), ..]) => {
                    let (mean, spread) = mean_and_spread(drawer, *n, &mut random);
                    (self.shift + mean, t * spread.sqrt())
                }
                (Rule::Welch(table), [(first, n1), (second, n2), ..]) => {
                    let (mean1, spread1) = mean_and_spread(first, *n1, &mut random);
                    let (mean2, spread2) = mean_and_spread(second, *n2, &mut random);
                    let margin = if spread1 + spread2 > 0.0 {
                        let df = degrees_of_freedom(spread1, spread2, *n1, *n2);
                        table.at(df) * (spread1 + spread2).sqrt()
                    } else {
                        0.0
                    };
                    (self.shift + mean2 - mean1, margin)
                }
                _ => (0.0, 0.0),
            };
            // With no spread, a difference that is only rounding is none.
            let slack = if margin > 0.0 { margin } else { 1e-13 * self.scale() };
            counts.low += u64::from(difference < -slack);
            counts.high += u64::from(difference > slack);
        }
        counts.all += self.per_block;
    }

    /// A size against which rounding of means is measured.
    fn scale(&self) -> f64 {
        self.drawers.iter().map(|(drawer, _)| drawer.scale).fold(self.shift.abs(), f64::max)
    }
}

/// x̄ minus the mean, and s²/n.
#[inline]
fn mean_and_spread(drawer: &SampleDrawer, n: f64, random: &mut super::streams::Stream) -> (f64, f64) {
    let totals = drawer.draw::<true>(random);
    let mean = totals.sum / n;
    let spread =
        if totals.all_equal { 0.0 } else { (totals.squares - totals.sum * mean).max(0.0) / (n - 1.0) / n };
    (mean, spread)
}

fn simulate(
    request: &StudentizedRequest,
    decided: &dyn Fn(&Misses) -> bool,
    work: &Work,
) -> Result<Misses, SumError> {
    let sampler = Sampler::new(request);
    let cost = sampler.cost();
    let most = (VALUE_CAP / cost) as u64;
    if most < FEWEST_SAMPLES {
        return Err(SumError::NotAvailable {
            route: Route::Simulation,
            reason: format!(
                "one simulated sample takes about {cost:.0} draws, too many for {FEWEST_SAMPLES} samples within reach"
            ),
        });
    }
    let budget = request.draws.clamp(1, most);
    let blocks_for = |samples: u64| samples.div_ceil(sampler.per_block);
    let mut schedule = vec![];
    let mut samples = FIRST_BATCH;
    while samples < budget {
        schedule.push(blocks_for(samples));
        samples = samples.saturating_mul(2);
    }
    schedule.push(blocks_for(budget));
    schedule.dedup();
    let looks = schedule.len();
    let risk = (1.0 - request.confidence).clamp(1e-15, 1.0);
    let last_block = schedule[looks - 1];
    let mut counts = Counts::default();
    let mut done = 0;
    let mut result = None;
    for (look, &blocks) in schedule.iter().enumerate() {
        let added = for_blocks(
            done,
            blocks,
            work,
            |finished| finished as f64 / last_block as f64,
            Counts::default,
            |block, counts| sampler.draw_block(block, counts),
            |a, b| Counts { low: a.low + b.low, high: a.high + b.high, all: a.all + b.all },
        )?;
        counts = Counts {
            low: counts.low + added.low,
            high: counts.high + added.high,
            all: counts.all + added.all,
        };
        done = blocks;
        let spent = if looks == 1 {
            risk
        } else if look + 1 == looks {
            0.5 * risk
        } else {
            0.5 * risk / (looks - 1) as f64
        };
        let figures = figures(&counts, spent / 3.0, &sampler, request);
        let enough = decided(&figures);
        result = Some(figures);
        if enough {
            break;
        }
    }
    result.ok_or(SumError::NotAvailable {
        route: Route::Simulation,
        reason: "no samples were asked for".to_owned(),
    })
}

fn figures(counts: &Counts, risk: f64, sampler: &Sampler, request: &StudentizedRequest) -> Misses {
    let figure = |count: u64| {
        let value = count as f64 / counts.all as f64;
        let band = clopper_pearson(count, counts.all, risk).widened(sampler.error());
        Figure::confidence(value, band.error_about(value))
    };
    Misses {
        low: figure(counts.low),
        high: figure(counts.high),
        covered: figure(counts.all - counts.low - counts.high),
        draws: Some(counts.all),
        detail: format!(
            "simulation of {} samples (seed {}, joint confidence {})",
            counts.all, request.seed, request.confidence
        ),
        route: Route::Simulation,
    }
}

#[cfg(test)]
#[path = "studentized_tests.rs"]
mod tests;

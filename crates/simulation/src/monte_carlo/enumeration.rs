//! Exact misses of studentized intervals for laws on few atoms: every possible sample, as a multiset.
//!
//! A sample of n values from A atoms is a point of the multinomial law of the counts (k₁, …, k_A). Successive
//! conditional binomials give its mass; T depends on the counts alone. Cells with |T| beyond t are added up.
//!
//! **Error** of each probability, all of it stated:
//! - counts left out: each conditional binomial is cut where 1e-18 is left outside, and a branch whose mass so far
//!   is below 1e-22 is not followed but added up as left out;
//! - rounding of the masses ([`super::alias::binomial_masses`]): 5e-16·(sd + 2) per conditional binomial;
//! - cells whose T agrees with ±t to within the accuracy of t and of T: their mass, whichever way they are counted;
//! - adding up: below 1e-15.

use super::alias::binomial_masses;
use super::critical::{CriticalValues, degrees_of_freedom};
use super::studentized::{Misses, Outcome, Studentized, StudentizedRequest};
use crate::law::Law;
use crate::special::student;
use crate::sum::{Route, SumError};
use crate::work::Work;
use rayon::prelude::*;

/// Most samples (pairs of samples for a difference) that are enumerated; some 10 nanoseconds each.
const MOST_CELLS: f64 = 4e7;
/// More atoms than this are not tried.
const MOST_ATOMS: usize = 40;
/// Probability that a conditional binomial may leave outside.
const OUTSIDE: f64 = 1e-18;
/// A branch with less mass is left out.
const NEGLIGIBLE: f64 = 1e-22;
/// Relative accuracy granted to t and to T in deciding which cells are in doubt.
const DOUBT: f64 = 1e-11;

/// One possible sample.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Sample {
    /// Its probability.
    pub mass: f64,
    /// x̄ minus the true mean, in units.
    pub mean: f64,
    /// s²/n, in units squared.
    pub spread: f64,
}

/// All samples of n values from a law on few atoms.
#[derive(Debug)]
pub(crate) struct Samples {
    n: u64,
    /// (Atoms minus mean)/unit, lightest first.
    values: Vec<f64>,
    /// Per atom but the last: its share of what is left, and one minus that.
    shares: Vec<(f64, f64)>,
    /// Rounding of x̄ − mean is below this, in units.
    pub slack: f64,
}

/// Sums over samples.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(crate) struct Sums {
    pub low: f64,
    pub high: f64,
    pub doubtful: f64,
    pub left_out: f64,
}

impl Sums {
    pub(crate) fn plus(self, other: Self) -> Self {
        Self {
            low: self.low + other.low,
            high: self.high + other.high,
            doubtful: self.doubtful + other.doubtful,
            left_out: self.left_out + other.left_out,
        }
    }
}

impl Samples {
    /// `None` unless the law has few atoms and nothing else.
    pub(crate) fn new(law: &Law, n: u64, unit: f64) -> Option<Self> {
        if law.only_simulation.is_some() || !law.pieces.is_empty() || law.missing_mass > 0.0 {
            return None;
        }
        let mut atoms: Vec<_> = law.atoms.iter().filter(|atom| atom.mass > 0.0).copied().collect();
        if atoms.is_empty() || atoms.len() > MOST_ATOMS {
            return None;
        }
        atoms.sort_by(|a, b| a.mass.total_cmp(&b.mass));
        let total: f64 = atoms.iter().map(|atom| atom.mass).sum();
        // Measured from an atom first: the mean is then a sum of small differences.
        let origin = atoms[atoms.len() - 1].value;
        let offset: f64 = atoms.iter().map(|atom| atom.mass / total * (atom.value - origin)).sum();
        let values: Vec<f64> = atoms.iter().map(|atom| (atom.value - origin - offset) / unit).collect();
        let size = atoms.iter().map(|atom| (atom.value - origin).abs()).fold(0.0f64, f64::max);
        // From the light end, so that 1 − share does not cancel.
        let mut rest = vec![0.0; atoms.len() + 1];
        for index in (0..atoms.len()).rev() {
            rest[index] = rest[index + 1] + atoms[index].mass;
        }
        let shares = (0..atoms.len() - 1)
            .map(|index| (atoms[index].mass / rest[index], rest[index + 1] / rest[index]))
            .collect();
        // Atoms are written in decimals: each is known to half a unit in the last place.
        let slack = f64::EPSILON * (16.0 * size + 4.0 * origin.abs()) / unit;
        Some(Self { n, values, shares, slack })
    }

    /// About how many samples there are to visit.
    pub(crate) fn number(&self) -> f64 {
        let n = self.n as f64;
        let (mut possible, mut likely, mut left) = (1.0f64, 1.0f64, 1.0);
        for (index, (p, q)) in self.shares.iter().enumerate() {
            possible *= (n + index as f64 + 1.0) / (index as f64 + 1.0);
            let share = left * p;
            left *= q;
            likely *= (17.0 * (n * share * (1.0 - share)).sqrt() + 12.0).min(n + 1.0);
        }
        // An ellipsoid fills this part of its box.
        let filled = [1.0, 1.0, 0.785, 0.524, 0.308, 0.164, 0.081][self.shares.len().min(6)];
        possible.min(likely * filled)
    }

    /// Bound on the error of any sum of masses by rounding.
    pub(crate) fn mass_error(&self) -> f64 {
        let mut left = 1.0;
        let per_level = self.shares.iter().map(|(p, q)| {
            let share: f64 = left * p;
            left *= q;
            5e-16 * ((self.n as f64 * share * (1.0 - share)).sqrt() + 2.0) + OUTSIDE
        });
        per_level.sum::<f64>() + 1e-15
    }

    /// Visits all samples on all threads; sums are merged in a fixed order.
    pub(crate) fn visit(
        &self,
        work: &Work,
        visit: impl Fn(&Sample, &mut Sums) + Sync,
    ) -> Result<Sums, SumError> {
        let Some(&(p, q)) = self.shares.first() else {
            // One atom: one sample.
            let mut sums = Sums::default();
            visit(&Sample { mass: 1.0, mean: self.values[0], spread: 0.0 }, &mut sums);
            return Ok(sums);
        };
        let Some((first, masses)) = binomial_masses(self.n, p, q, OUTSIDE, usize::MAX) else {
            return Ok(Sums { left_out: 1.0, ..Sums::default() });
        };
        // Fixed pieces of the outermost range.
        let chunk = if self.shares.len() == 1 { 4096 } else { 1 };
        let parts: Vec<Result<Sums, SumError>> = masses
            .par_chunks(chunk)
            .enumerate()
            .map(|(index, masses)| {
                work.check()?;
                let mut sums = Sums::default();
                let mut counts = vec![0u64; self.values.len()];
                for (offset, &mass) in masses.iter().enumerate() {
                    counts[0] = first + (index * chunk + offset) as u64;
                    self.descend(1, self.n - counts[0], mass, &mut counts, &visit, &mut sums);
                }
                Ok(sums)
            })
            .collect();
        parts.into_iter().try_fold(Sums::default(), |sums, part| Ok(sums.plus(part?)))
    }

    fn descend(
        &self,
        level: usize,
        left: u64,
        mass: f64,
        counts: &mut [u64],
        visit: &impl Fn(&Sample, &mut Sums),
        sums: &mut Sums,
    ) {
        if mass < NEGLIGIBLE {
            sums.left_out += mass;
            return;
        }
        let Some(&(p, q)) = self.shares.get(level) else {
            counts[level] = left;
            visit(&self.sample(mass, counts), sums);
            return;
        };
        let Some((first, masses)) = binomial_masses(left, p, q, OUTSIDE, usize::MAX) else {
            sums.left_out += mass;
            return;
        };
        for (offset, own) in masses.iter().enumerate() {
            counts[level] = first + offset as u64;
            self.descend(level + 1, left - counts[level], mass * own, counts, visit, sums);
        }
    }

    fn sample(&self, mass: f64, counts: &[u64]) -> Sample {
        let n = self.n as f64;
        let mean = counts.iter().zip(&self.values).map(|(&k, value)| k as f64 * value).sum::<f64>() / n;
        // Two passes: no cancellation; exactly 0 only where all values are equal.
        let squares = if counts.contains(&self.n) {
            0.0
        } else {
            counts
                .iter()
                .zip(&self.values)
                .map(|(&k, value)| k as f64 * (value - mean) * (value - mean))
                .sum()
        };
        Sample { mass, mean, spread: squares / (n - 1.0) / n }
    }
}

/// Counts a sample with mean difference `difference` and margin `margin`; doubtful within rounding.
#[inline]
pub(crate) fn classify(difference: f64, margin: f64, mass: f64, slack: f64, sums: &mut Sums) {
    if margin == 0.0 {
        // A point interval covers only what it equals, up to rounding.
        if difference.abs() > slack {
            *(if difference < 0.0 { &mut sums.low } else { &mut sums.high }) += mass;
        }
        return;
    }
    let beyond = difference.abs() - margin;
    if beyond > 0.0 {
        *(if difference < 0.0 { &mut sums.low } else { &mut sums.high }) += mass;
    }
    if beyond.abs() <= DOUBT * margin + slack {
        sums.doubtful += mass;
    }
}

/// Exact misses, if the laws have few enough atoms for the sample sizes.
pub(crate) fn misses(request: &StudentizedRequest, work: &Work) -> Result<Option<Misses>, SumError> {
    let unit = request.unit();
    let shift = request.shift_in_units() / unit;
    let (sums, rounding, cells) = match request.statistic {
        Studentized::Mean { law, n } => {
            let Some(samples) = Samples::new(law, n, unit).filter(|samples| samples.number() <= MOST_CELLS)
            else {
                return Ok(None);
            };
            let t = student::quantile_above((n - 1) as f64, request.tail_probability);
            let slack = samples.slack + 4.0 * f64::EPSILON * shift.abs();
            let sums = samples.visit(work, |sample, sums| {
                classify(sample.mean + shift, t * sample.spread.sqrt(), sample.mass, slack, sums);
            })?;
            (sums, samples.mass_error(), samples.number())
        }
        Studentized::Difference { first, n_first, second, n_second } => {
            let (Some(one), Some(two)) =
                (Samples::new(first, n_first, unit), Samples::new(second, n_second, unit))
            else {
                return Ok(None);
            };
            let cells = one.number() * two.number();
            if cells > MOST_CELLS {
                return Ok(None);
            }
            let (n1, n2) = (n_first as f64, n_second as f64);
            let table = CriticalValues::new(request.tail_probability, n1.min(n2) - 1.0, n1 + n2 - 2.0);
            let slack = one.slack + two.slack + 4.0 * f64::EPSILON * shift.abs();
            // The shorter list is kept, the longer one streamed.
            let swap = one.number() < two.number();
            let (kept, streamed) = if swap { (&one, &two) } else { (&two, &one) };
            let (list, left_out) = listed(kept, work)?;
            let (most, least) = (table.at(n1.min(n2) - 1.0), table.at(n1 + n2 - 2.0));
            let sums = streamed.visit(work, |outer, sums| {
                for inner in &list {
                    let mass = outer.mass * inner.mass;
                    let (a, b) = if swap { (inner, outer) } else { (outer, inner) };
                    let difference = b.mean - a.mean + shift;
                    let spread = (a.spread + b.spread).sqrt();
                    // Most samples are decided by the extreme critical values.
                    if spread > 0.0 {
                        let size = difference.abs();
                        if size < 0.999_999 * least * spread - slack {
                            continue;
                        }
                        if size > 1.000_001 * most * spread + slack {
                            *(if difference < 0.0 { &mut sums.low } else { &mut sums.high }) += mass;
                            continue;
                        }
                        let df = degrees_of_freedom(a.spread, b.spread, n1, n2);
                        let mut margin = table.at(df) * spread;
                        if (size - margin).abs() <= 10.0 * table.error * margin + slack {
                            margin = table.exactly(df) * spread;
                        }
                        classify(difference, margin, mass, slack, sums);
                    } else {
                        classify(difference, 0.0, mass, slack, sums);
                    }
                }
            })?;
            let sums = Sums { left_out: sums.left_out + left_out, ..sums };
            (sums, one.mass_error() + two.mass_error(), cells)
        }
    };
    let error = sums.doubtful + sums.left_out + rounding;
    if error.is_nan() || error >= 1e-8 {
        return Ok(None);
    }
    let outcome = Outcome { low: sums.low, high: sums.high, error };
    let detail = format!("exact enumeration of all possible samples (about {cells:.0} of them)");
    Ok(Some(outcome.misses(Route::Lattice, detail)))
}

/// All samples that matter, and the mass of those left out.
fn listed(samples: &Samples, work: &Work) -> Result<(Vec<Sample>, f64), SumError> {
    let list = std::sync::Mutex::new(Vec::new());
    let sums = samples.visit(work, |sample, _| {
        // Poisoning needs a panic in another visit, which only pushes.
        list.lock().unwrap_or_else(std::sync::PoisonError::into_inner).push(*sample);
    })?;
    let mut list = list.into_inner().unwrap_or_else(std::sync::PoisonError::into_inner);
    let order = |a: &Sample, b: &Sample| b.mass.total_cmp(&a.mass).then(b.mean.total_cmp(&a.mean));
    list.sort_by(order);
    let mut left_out = sums.left_out;
    let mut dropped = 0.0;
    while let Some(last) = list.last() {
        if dropped + last.mass > 1e-16 {
            break;
        }
        dropped += last.mass;
        list.pop();
    }
    left_out += dropped;
    Ok((list, left_out))
}

//! *Safe from*: the smallest n from which on the claim holds at every n up to the search limit.
//!
//! Claims decided by the law of the sum (and studentized ones that are enumerated exactly) are checked at *every*
//! n. Only the n above the last failing one matter, so the search first looks at a coarse grid, takes the largest
//! failing n there, and then checks every n above it from the top down, in parallel, until one fails. Where the
//! Berry–Esseen bound alone proves that the claim holds from some n on, these n count as checked.
//!
//! Where the estimated cost of that exceeds the work allowed, a finer grid and a bisection replace it; then `every_n`
//! is false and the n that were looked at are listed. Simulated claims are always searched that way, with the
//! confidence spent over the whole search. No limit is one of time: the same scenario is searched at the same n on
//! every machine, with any number of threads.

use crate::bounds::berry_esseen;
use crate::claims::{self, StudentizedBudget, evaluate_studentized, is_studentized, state};
use crate::cost;
use crate::prepared::Prepared;
use crate::report::{Checked, State};
use crate::scenario::{Claim, Sides, Source, Tolerance};
use gaussgap_simulation::figure::Basis;
use gaussgap_simulation::sum::{Method, SumError, build_exact};
use gaussgap_simulation::work::{Cancelled, Work};
use rayon::prelude::*;

/// Units of work the whole search may take (see [`cost`]).
const ALLOWED: f64 = 6000.0;

/// At most this many simulated evaluations; the confidence is divided among them.
const MOST_SIMULATED: u64 = 24;

/// Share of the allowed probability of error spent on the search.
const SEARCH_SHARE: f64 = 0.1;

/// Simulated summands of the whole search.
const SUMMANDS: u64 = 320_000_000;

/// Simulated samples that show nothing but whether a claim is enumerated exactly.
const PROBE: u64 = 1;

/// What the search found.
#[derive(Debug, Clone)]
pub(crate) struct Found {
    pub safe_from: Option<u64>,
    /// The largest n looked at where the claim is not shown to hold.
    pub last_failing: Option<u64>,
    pub checked: Checked,
    /// How, where that needs saying.
    pub how: Option<String>,
}

/// What one n says.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
struct Judged {
    /// The claim is shown to hold.
    holds: bool,
    /// By an exact route.
    exact: bool,
    /// Simulated summands it took.
    summands: u64,
}

impl Judged {
    /// No route reaches this n.
    const UNREACHED: Self = Self { holds: false, exact: false, summands: 0 };

    /// What an exact route says.
    fn exactly(holds: bool) -> Self {
        Self { holds, exact: true, summands: 0 }
    }
}

/// Searches for *safe from* of the scenario's claim, whose state at the planned n is known.
pub(crate) fn search(prepared: &Prepared, planned: State, work: &Work) -> Result<Found, Cancelled> {
    let judge = |n: u64| judge(prepared, n, SUMMANDS / 4, work);
    let proven = proven_from(prepared);
    if is_studentized(&prepared.scenario.claim) {
        // Exactly enumerated at a middle n? Then every n can be checked like any exact claim.
        let middle = prepared.scenario.search.up_to.clamp(prepared.smallest_n(), 40);
        if !self::judge(prepared, middle, PROBE, work)?.exact {
            return simulated(prepared, planned, work);
        }
    }
    every_n(prepared, proven, work, &judge)
}

/// The smallest n from which on P(|statistic − expectation| > ε) stays at or below δ, up to the search limit.
pub(crate) fn needed_n(prepared: &Prepared, probability: f64, work: &Work) -> Result<Option<u64>, Cancelled> {
    let judge = |n: u64| {
        work.check()?;
        let Some(counts) = prepared.counts_at(n) else { return Ok(Judged::exactly(false)) };
        let spec = prepared.sum_spec(&counts);
        match build_exact(&spec, &Method::default(), work) {
            Ok(sum) => {
                let actual = claims::evaluate(prepared, &counts, sum.as_ref()).actual;
                let holds = actual.is_some_and(|actual| actual.value + actual.error <= probability);
                Ok(Judged::exactly(holds))
            }
            Err(SumError::Cancelled(cancelled)) => Err(cancelled),
            Err(_) => Ok(Judged::UNREACHED),
        }
    };
    let found = every_n(prepared, None, work, &judge)?;
    Ok(found.safe_from.filter(|_| found.checked.every_n))
}

/// Judges the claim at one n, with at most so many simulated summands where it must be simulated.
fn judge(prepared: &Prepared, n: u64, summands: u64, work: &Work) -> Result<Judged, Cancelled> {
    work.check()?;
    let Some(counts) = prepared.counts_at(n) else { return Ok(Judged::exactly(false)) };
    if is_studentized(&prepared.scenario.claim) {
        let budget = StudentizedBudget {
            draws: prepared.scenario.method.draws.min((summands / n.max(1)).max(1)),
            share: SEARCH_SHARE / MOST_SIMULATED as f64,
            precision: 1.0,
        };
        return match evaluate_studentized(prepared, &prepared.laws, &counts, &budget, work) {
            Ok((facts, misses)) => Ok(Judged {
                holds: state(&facts) == State::Holds,
                exact: facts.actual.is_none_or(|actual| actual.basis == Basis::Bound),
                summands: misses.and_then(|misses| misses.draws).unwrap_or(0).saturating_mul(n),
            }),
            Err(SumError::Cancelled(cancelled)) => Err(cancelled),
            Err(_) => Ok(Judged::UNREACHED),
        };
    }
    match build_exact(&prepared.sum_spec(&counts), &Method::default(), work) {
        Ok(sum) => {
            let facts = claims::evaluate(prepared, &counts, sum.as_ref());
            Ok(Judged::exactly(state(&facts) == State::Holds))
        }
        Err(SumError::Cancelled(cancelled)) => Err(cancelled),
        Err(_) => Ok(Judged::UNREACHED),
    }
}

/// The n from which on the Berry–Esseen bound proves the claim, for like summands and an absolute tolerance.
fn proven_from(prepared: &Prepared) -> Option<u64> {
    let Tolerance::Absolute(allowed) = prepared.scenario.tolerance else { return None };
    if !matches!(prepared.scenario.source, Source::Like { .. }) || is_studentized(&prepared.scenario.claim) {
        return None;
    }
    // A probability between two points of the law is off by at most two distances.
    let distances = match prepared.scenario.claim {
        Claim::Curve | Claim::Threshold { .. } => 1.0,
        Claim::Interval { sides, .. } | Claim::Test { sides, .. } if sides != Sides::Two => 1.0,
        Claim::Interval { .. } | Claim::Test { .. } | Claim::Deviation { .. } => 2.0,
        Claim::Quantile { .. } => return None,
    };
    let proves = |n: u64| {
        let bound = berry_esseen(&prepared.sum_spec(&[n]));
        bound.is_some_and(|bound| distances * bound.value * (1.0 + 1e-9) <= allowed)
    };
    // The bound falls with n.
    let up_to = prepared.scenario.search.up_to;
    if !proves(up_to) {
        return None;
    }
    let (mut without, mut with) = (0, up_to);
    while with - without > 1 {
        let middle = without + (with - without) / 2;
        if proves(middle) { with = middle } else { without = middle }
    }
    Some(with)
}

/// Checks every n above the last failing one, or a finer grid where that would take too long.
fn every_n(
    prepared: &Prepared,
    proven: Option<u64>,
    work: &Work,
    judge: &(impl Fn(u64) -> Result<Judged, Cancelled> + Sync),
) -> Result<Found, Cancelled> {
    let (low, up_to) = (prepared.smallest_n(), prepared.scenario.search.up_to);
    let high = proven.map_or(up_to, |proven| proven - 1).min(up_to);
    let proven_note =
        proven.map(|proven| format!("from n = {proven} on the Berry–Esseen bound proves the claim"));
    if up_to < low {
        let checked = Checked { from: low, to: up_to, every_n: false, which: Some(Vec::new()) };
        return Ok(Found { safe_from: None, last_failing: None, checked, how: None });
    }
    if high < low {
        let checked = Checked { from: low, to: up_to, every_n: true, which: None };
        return Ok(Found { safe_from: Some(low), last_failing: None, checked, how: proven_note });
    }
    let grid = coarse(low, high);
    let looked_at = grid
        .par_iter()
        .rev()
        .map(|n| judge(*n).map(|judged| (*n, judged, units(prepared, *n))))
        .collect::<Result<Vec<_>, Cancelled>>()?;
    if looked_at.iter().all(|(_, judged, _)| !judged.exact) {
        let checked = Checked { from: low, to: up_to, every_n: false, which: Some(Vec::new()) };
        let how = Some("no exact route reaches this sum, so safe-from was not searched".to_owned());
        return Ok(Found { safe_from: None, last_failing: None, checked, how });
    }
    let failing = looked_at.iter().filter(|(_, judged, _)| !judged.holds).map(|(n, _, _)| *n).max();
    let from = failing.map_or(low, |failing| failing + 1);
    let cost = cost_of_every_n(&looked_at, from, high);
    let left = ALLOWED - looked_at.iter().map(|(_, _, units)| units).sum::<f64>();
    if cost > left {
        let finer = finer_grid(from, high, cost, left.max(0.0));
        return thinned(low, up_to, failing, &looked_at, finer, proven_note, judge);
    }
    let last_failing = match last_failing_between(from, high, work, judge)? {
        Some(n) => Some(n),
        None => failing,
    };
    let checked = Checked { from: last_failing.unwrap_or(low), to: up_to, every_n: true, which: None };
    let safe_from = match last_failing {
        None => Some(low),
        Some(last) if last < up_to => Some(last + 1),
        Some(_) => None,
    };
    Ok(Found { safe_from, last_failing, checked, how: proven_note })
}

/// A coarse grid: every n up to 8, then about six per factor of ten, the ends included.
fn coarse(low: u64, high: u64) -> Vec<u64> {
    let mut grid = (low..=high.min(8)).collect::<Vec<_>>();
    let mut n = 10.0_f64;
    while (n as u64) < high {
        if n as u64 >= low {
            grid.push(n as u64);
        }
        n *= 1.5;
    }
    grid.push(low);
    grid.push(high);
    grid.sort_unstable();
    grid.dedup();
    grid
}

/// The estimated cost of judging the claim at n. A studentized claim that is enumerated costs about ten units.
fn units(prepared: &Prepared, n: u64) -> f64 {
    if is_studentized(&prepared.scenario.claim) {
        return 10.0;
    }
    prepared.counts_at(n).map_or(0.0, |counts| cost::of_sum(&prepared.sum_spec(&counts)))
}

/// The cost of checking every n in [from, high], from the costs at the coarse grid.
fn cost_of_every_n(looked_at: &[(u64, Judged, f64)], from: u64, high: u64) -> f64 {
    if high < from {
        return 0.0;
    }
    let mut inside = looked_at.iter().filter(|(n, _, _)| *n >= from).collect::<Vec<_>>();
    inside.sort_by_key(|(n, _, _)| *n);
    let mut previous = from.saturating_sub(1);
    let mut total = 0.0;
    for (n, _, units) in inside {
        total += (n - previous) as f64 * units;
        previous = *n;
    }
    total
}

/// The largest failing n in [from, high], checked from the top down in parallel blocks.
fn last_failing_between(
    from: u64,
    high: u64,
    work: &Work,
    judge: &(impl Fn(u64) -> Result<Judged, Cancelled> + Sync),
) -> Result<Option<u64>, Cancelled> {
    const BLOCK: u64 = 256;
    let mut top = high;
    while top >= from && top > 0 {
        work.check()?;
        let bottom = from.max(top.saturating_sub(BLOCK - 1));
        let failing = (bottom..=top)
            .into_par_iter()
            .map(|n| judge(n).map(|judged| if judged.holds { 0 } else { n }))
            .try_reduce(|| 0, |a, b| Ok(a.max(b)))?;
        if failing > 0 {
            return Ok(Some(failing));
        }
        if bottom == 0 {
            break;
        }
        top = bottom - 1;
    }
    Ok(None)
}

/// A grid of as many n as there is work left for, evenly spaced in ln n.
fn finer_grid(from: u64, high: u64, cost: f64, left: f64) -> Vec<u64> {
    let every = (high - from + 1) as f64;
    let count = (every * (left / cost)).clamp(20.0, 1000.0) as u64;
    let ratio = (high as f64 / from as f64).ln();
    let mut grid = (0..=count)
        .map(|index| (from as f64 * (ratio * index as f64 / count as f64).exp()).round() as u64)
        .map(|n| n.clamp(from, high))
        .collect::<Vec<_>>();
    grid.dedup();
    grid
}

/// The search over a grid that leaves n out.
fn thinned(
    low: u64,
    up_to: u64,
    failing: Option<u64>,
    looked_at: &[(u64, Judged, f64)],
    finer: Vec<u64>,
    proven_note: Option<String>,
    judge: &(impl Fn(u64) -> Result<Judged, Cancelled> + Sync),
) -> Result<Found, Cancelled> {
    let judged = finer
        .par_iter()
        .map(|n| judge(*n).map(|judged| (*n, judged.holds)))
        .collect::<Result<Vec<_>, Cancelled>>()?;
    let mut which = looked_at.iter().map(|(n, _, _)| *n).collect::<Vec<_>>();
    which.extend(&finer);
    let last = judged.iter().filter(|(_, holds)| !holds).map(|(n, _)| *n).max().max(failing);
    let mut last_failing = last;
    let mut safe_from = match last {
        None => which.iter().copied().min(),
        Some(last) => which.iter().copied().filter(|n| *n > last).min(),
    };
    // Narrow the gap between the last failing n and the next one that holds.
    while let (Some(fails), Some(holds)) = (last_failing, safe_from) {
        if holds - fails <= 1 {
            break;
        }
        let middle = fails + (holds - fails) / 2;
        which.push(middle);
        if judge(middle)?.holds { safe_from = Some(middle) } else { last_failing = Some(middle) }
    }
    which.sort_unstable();
    which.dedup();
    let mut how = format!("safe-from was searched at {} values of n, not at every one", which.len());
    if let Some(note) = proven_note {
        how = format!("{how}; {note}");
    }
    let checked = Checked { from: low, to: up_to, every_n: false, which: Some(which) };
    Ok(Found { safe_from, last_failing, checked, how: Some(how) })
}

/// The largest n that a simulation within its budget can decide: the number of samples that narrow a band to half
/// the tolerance, with 4.5 standard errors on each side, must fit into the budget of simulated summands.
fn simulated_reach(prepared: &Prepared) -> u64 {
    let up_to = prepared.scenario.search.up_to;
    let (nominal, missing) = match prepared.scenario.claim {
        Claim::Interval { level, .. } => (level, 1.0 - level),
        Claim::Test { significance, .. } => (significance, significance),
        _ => return up_to,
    };
    let allowed = prepared.scenario.tolerance.allowed(nominal);
    let samples = (9.0 / allowed).powi(2) * missing * (1.0 - missing);
    let affordable = (SUMMANDS as f64 / 4.0 / samples.max(1.0)) as u64;
    affordable.max(prepared.total()).clamp(prepared.smallest_n(), up_to.max(prepared.smallest_n()))
}

/// The search for a simulated claim: a grid from the top down until one n is not shown to hold, then a bisection,
/// while simulated summands are left.
fn simulated(prepared: &Prepared, planned: State, work: &Work) -> Result<Found, Cancelled> {
    let low = prepared.smallest_n();
    let mut left = SUMMANDS;
    let mut holds_at = |n: u64| {
        if n == prepared.total() {
            return Ok((planned == State::Holds, true));
        }
        let judged = judge(prepared, n, (left / 2).max(SUMMANDS / 50), work)?;
        left = left.saturating_sub(judged.summands);
        Ok::<_, Cancelled>((judged.holds, left > SUMMANDS / 50))
    };
    let mut affordable = true;
    let up_to = simulated_reach(prepared);
    let mut which = Vec::new();
    let (mut safe_from, mut last_failing) = (None, None);
    let mut grid = Vec::new();
    let mut n = up_to.max(low) as f64;
    while n > 4.0_f64.max(low as f64) && grid.len() < MOST_SIMULATED as usize * 2 / 3 {
        grid.push(n.round() as u64);
        n /= 2.0;
    }
    if prepared.total() <= up_to {
        grid.push(prepared.total());
    }
    grid.sort_unstable_by_key(|n| std::cmp::Reverse(*n));
    grid.dedup();
    for n in grid {
        if !affordable {
            break;
        }
        which.push(n);
        let (holds, more) = holds_at(n)?;
        affordable = more;
        if holds {
            safe_from = Some(n);
        } else {
            last_failing = Some(n);
            break;
        }
    }
    while let (Some(fails), Some(holds)) = (last_failing, safe_from) {
        if holds - fails <= 1 + fails / 50 || !affordable || which.len() as u64 >= MOST_SIMULATED {
            break;
        }
        let middle = fails + (holds - fails) / 2;
        which.push(middle);
        let (holds, more) = holds_at(middle)?;
        affordable = more;
        if holds { safe_from = Some(middle) } else { last_failing = Some(middle) }
    }
    which.sort_unstable();
    let how = format!(
        "safe-from was searched by simulation at {} values of n up to {up_to}, jointly at the stated confidence",
        which.len()
    );
    let checked = Checked {
        from: which.first().copied().unwrap_or(low),
        to: up_to,
        every_n: false,
        which: Some(which),
    };
    Ok(Found { safe_from, last_failing, checked, how: Some(how) })
}

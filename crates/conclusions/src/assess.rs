//! The assessment: from a scenario to a report, room by room.

use crate::claims::{
    self, StudentizedBudget, add_guarantees, evaluate_studentized, is_studentized, needed_n_of, state,
};
use crate::prepared::Prepared;
use crate::report::{
    ClaimFacts, Curve, DistanceFacts, Growth, MethodFacts, Program, REPORT_FORMAT, Report, State, SumFacts,
    Verdict,
};
use crate::scenario::{Claim, Scenario};
use crate::words::finding::{NoFigure, because, more_draws, without_figure};
use crate::{AssessError, Effort, Problem, cautions, facts, growth, remedies, rules_of_thumb, safe_from};
use gaussgap_simulation::monte_carlo::studentized::Misses;
use gaussgap_simulation::sum::{StandardizedSum, SumError, SumSpec, build};
use gaussgap_simulation::work::Work;
use std::time::Instant;

/// Share of the allowed probability of error spent on the claim's own studentized figure.
const CLAIM_SHARE: f64 = 0.3;

/// Assesses a scenario; see [`crate::assess`].
pub(crate) fn assess(scenario: &Scenario, effort: Effort, work: &Work) -> Result<Report, AssessError> {
    let start = Instant::now();
    work.set_fraction(0.0);
    let prepared = Prepared::new(scenario).map_err(AssessError::Scenario)?;
    if !prepared.has_variance() {
        return no_variance(&prepared, effort, start, work);
    }
    let spec = prepared.sum_spec(&prepared.planned);
    let sum = build(&spec, &prepared.method(8.0), work).map_err(refused)?;
    let sum = sum.as_ref();
    work.check()?;
    work.set_fraction(0.2);
    let (claim, misses) = claim_facts(&prepared, sum, effort, work)?;
    let planned_state = state(&claim);
    let draws = misses.as_ref().map_or_else(|| sum.draws(), |misses| misses.draws);
    work.set_fraction(0.4);

    let growth = if effort.growth { growth::growth(&prepared, work)? } else { Growth::default() };
    work.set_fraction(0.6);
    let search =
        if effort.safe_from { Some(safe_from::search(&prepared, planned_state, work)?) } else { None };
    work.set_fraction(0.8);
    let verdict = Verdict {
        state: planned_state,
        because: finding(&prepared, &claim, planned_state, draws),
        safe_from: search.as_ref().and_then(|search| search.safe_from),
        last_failing: search.as_ref().and_then(|search| search.last_failing),
        checked: search.as_ref().map(|search| search.checked.clone()),
    };
    let mut claim = claim;
    if effort.safe_from
        && let Claim::Deviation { epsilon, probability: Some(probability) } = scenario.claim
        && let Some(mut needed) = needed_n_of(&prepared, epsilon, probability)
    {
        needed.insert("actual".to_owned(), safe_from::needed_n(&prepared, probability, work)?);
        claim.needed_n = Some(needed);
    }
    let remedies = if effort.remedies {
        remedies::remedies(&prepared, sum, &claim, &verdict, work)?
    } else {
        Vec::new()
    };
    let rules = if effort.remedies { rules_of_thumb::rules(&prepared, planned_state) } else { Vec::new() };
    work.set_fraction(1.0);
    Ok(Report {
        format: REPORT_FORMAT.to_owned(),
        program: program(),
        scenario: report_scenario(scenario),
        summand: facts::summand(&prepared.laws[0]),
        summands: all_summands(&prepared),
        sum: facts::sum(&sum.moments()),
        method: method_facts(&prepared, sum, misses.as_ref(), search.as_ref(), start),
        distance: facts::distance(&spec, sum),
        tails: facts::tails(&prepared, Some(sum)),
        cautions: cautions::cautions(&prepared, &claim, search.is_some()),
        claim,
        verdict,
        remedies,
        rules_of_thumb: rules,
        growth,
        curve: facts::curve(&prepared, sum),
    })
}

/// The program's name and version.
fn program() -> Program {
    Program { name: "gaussgap".to_owned(), version: env!("CARGO_PKG_VERSION").to_owned() }
}

/// The scenario as a report carries it: loaded data values stay in their file.
fn report_scenario(scenario: &Scenario) -> Scenario {
    let mut carried = scenario.clone();
    carried.source.visit_laws_mut(&mut |_, law| {
        if let gaussgap_simulation::law::LawSpec::Data { values, path: Some(_), .. } = law {
            *values = None;
        }
    });
    carried
}

/// Why the asked route could not be taken, at its place in the scenario.
fn refused(error: SumError) -> AssessError {
    match error {
        SumError::Cancelled(cancelled) => AssessError::Cancelled(cancelled),
        SumError::NotAvailable { reason, .. } => AssessError::Scenario(vec![Problem {
            pointer: "/method/route".to_owned(),
            message: format!("this route cannot take the sum: {reason}"),
        }]),
        other => AssessError::Scenario(vec![Problem { pointer: String::new(), message: other.to_string() }]),
    }
}

/// The claim at the planned size, with how its studentized figure was found.
fn claim_facts(
    prepared: &Prepared,
    sum: &dyn StandardizedSum,
    effort: Effort,
    work: &Work,
) -> Result<(ClaimFacts, Option<Misses>), AssessError> {
    let claim = prepared.scenario.claim;
    if is_studentized(&claim) {
        let precision = if effort == Effort::PLANNED_N { 0.25 } else { 0.05 };
        let budget =
            StudentizedBudget { draws: prepared.scenario.method.draws, share: CLAIM_SHARE, precision };
        return evaluate_studentized(prepared, &prepared.laws, &prepared.planned, &budget, work).map_err(
            |error| match error {
                SumError::Cancelled(cancelled) => AssessError::Cancelled(cancelled),
                other => AssessError::Scenario(vec![Problem {
                    pointer: "/claim/spread".to_owned(),
                    message: format!("this claim cannot be computed: {other}"),
                }]),
            },
        );
    }
    let mut facts = claims::evaluate(prepared, &prepared.planned, sum);
    if let Claim::Deviation { epsilon, .. } = claim {
        add_guarantees(prepared, epsilon, &mut facts);
    }
    Ok((facts, None))
}

/// The finding in one sentence.
fn finding(prepared: &Prepared, claim: &ClaimFacts, state: State, draws: Option<u64>) -> String {
    if claim.actual.is_none() && is_studentized(&prepared.scenario.claim) {
        return without_figure(prepared.scenario, NoFigure::NoSpread);
    }
    let sentence = because(prepared.scenario, claim, state);
    match draws.and_then(|draws| more_draws(claim, draws)) {
        Some(more) if state == State::Undecided => format!("{}; {more}.", sentence.trim_end_matches('.')),
        _ => sentence,
    }
}

/// The facts of every kind of summand, where there are several.
fn all_summands(prepared: &Prepared) -> Vec<crate::report::Summand> {
    if prepared.laws.len() < 2 { Vec::new() } else { prepared.laws.iter().map(facts::summand).collect() }
}

/// How the figures were computed.
fn method_facts(
    prepared: &Prepared,
    sum: &dyn StandardizedSum,
    misses: Option<&Misses>,
    search: Option<&safe_from::Found>,
    start: Instant,
) -> MethodFacts {
    let mut detail = vec![sum.detail()];
    if let Some(misses) = misses {
        let what =
            if matches!(prepared.scenario.claim, Claim::Test { .. }) { "the test" } else { "the interval" };
        detail.push(format!("{what}: {}", misses.detail));
    }
    if let Some(how) = search.and_then(|search| search.how.as_deref()) {
        detail.push(how.to_owned());
    }
    let draws = misses.and_then(|misses| misses.draws).or_else(|| sum.draws());
    MethodFacts {
        route: Some(sum.route()),
        detail: detail.join("; "),
        seconds: start.elapsed().as_secs_f64(),
        draws,
        seed: draws.map(|_| prepared.scenario.method.seed),
    }
}

/// The report on a law without a finite variance: the claim fails, and no figure exists.
fn no_variance(
    prepared: &Prepared,
    effort: Effort,
    start: Instant,
    work: &Work,
) -> Result<Report, AssessError> {
    let scenario = prepared.scenario;
    let claim = claims::without_figure(&scenario.claim, &scenario.tolerance, None);
    let remedies = if effort.remedies { remedies::without_variance(prepared, work)? } else { Vec::new() };
    Ok(Report {
        format: REPORT_FORMAT.to_owned(),
        program: program(),
        scenario: report_scenario(scenario),
        summand: facts::summand(&prepared.laws[0]),
        summands: all_summands(prepared),
        sum: no_sum(prepared),
        method: MethodFacts {
            route: None,
            detail: "nothing was computed: a summand has no finite variance".to_owned(),
            seconds: start.elapsed().as_secs_f64(),
            draws: None,
            seed: None,
        },
        distance: DistanceFacts {
            kolmogorov: None,
            at_z: None,
            side: None,
            leading_term: None,
            berry_esseen: None,
        },
        tails: facts::tails(prepared, None),
        cautions: cautions::cautions(prepared, &claim, false),
        claim,
        verdict: Verdict {
            state: State::Fails,
            because: without_figure(scenario, NoFigure::InfiniteVariance),
            safe_from: None,
            last_failing: None,
            checked: None,
        },
        remedies,
        rules_of_thumb: Vec::new(),
        growth: Growth::default(),
        curve: Curve::default(),
    })
}

/// The moments of a sum without a variance: its mean, where it exists.
fn no_sum(prepared: &Prepared) -> SumFacts {
    let spec: SumSpec = prepared.sum_spec(&prepared.planned);
    let mean = spec
        .terms
        .iter()
        .map(|term| term.law.moments.mean.map(|mean| mean * term.multiply * term.count as f64))
        .sum::<Option<f64>>();
    SumFacts { mean: mean.filter(|mean| mean.is_finite()), sd: None, skewness: None, excess_kurtosis: None }
}

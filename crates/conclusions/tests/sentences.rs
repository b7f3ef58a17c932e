//! The plan and the finding in words: every kind of claim, every state, to be read aloud.

use gaussgap_conclusions::plan_sentence;
use gaussgap_conclusions::report::{ClaimFacts, State};
use gaussgap_conclusions::scenario::{
    Claim, Direction, Group, Part, Quantity, Scenario, Sides, Source, Spread, Statistic, Tolerance,
};
use gaussgap_conclusions::words::finding::{NoFigure, because, without_figure};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::LawSpec;

fn scenario(name: &str, unit: &str, n: u64, claim: Claim) -> Scenario {
    let law = LawSpec::Lognormal { log_mean: None, log_sd: None, mean: Some(48.0), sd: Some(31.0) };
    let mut scenario = Scenario::new(Source::Like { law, n, dependence: None });
    scenario.quantity = Some(Quantity { name: Some(name.to_owned()), unit: Some(unit.to_owned()) });
    scenario.claim = claim;
    scenario
}

fn facts(nominal: f64, actual: Figure, allowed: f64, misses: Option<[f64; 2]>) -> ClaimFacts {
    let miss = |value| Figure { value, ..actual };
    ClaimFacts {
        kind: String::new(),
        nominal,
        actual: Some(actual),
        difference: Some(actual.value - nominal),
        allowed,
        miss_low: misses.map(|misses| miss(misses[0])),
        miss_high: misses.map(|misses| miss(misses[1])),
        nominal_miss_low: misses.map(|_| 0.025),
        nominal_miss_high: misses.map(|_| 0.025),
        normal_quantile: None,
        actual_quantile: None,
        guarantees: None,
        needed_n: None,
    }
}

#[test]
fn findings_read_well() {
    use State::{Fails, Holds, Undecided};
    let exact = |value| Figure::bound(value, 1e-12);
    let simulated = |value| Figure::confidence(value, 2e-4);
    let interval = |sides| Claim::Interval { level: 0.95, sides, spread: Spread::Estimated };
    let test = |sides, shift| Claim::Test { significance: 0.05, sides, spread: Spread::Known, shift };
    let threshold = |direction| Claim::Threshold { at: 55.0, direction };
    let boarding = |claim| scenario("boarding time", "s", 40, claim);
    let total = |claim| {
        let mut scenario = scenario("vehicle weight", "t", 28, claim);
        scenario.statistic = Statistic::Sum;
        scenario
    };
    let cases = vec![
        (boarding(Claim::Curve), facts(0.0, exact(0.0067), 0.01, None), Holds),
        (boarding(Claim::Curve), facts(0.0, exact(0.0243), 0.01, None), Fails),
        (boarding(Claim::Curve), facts(0.0, Figure::confidence(0.01, 8e-4), 0.01, None), Undecided),
        (boarding(interval(Sides::Two)), facts(0.95, simulated(0.921), 0.01, Some([0.0132, 0.0658])), Fails),
        (boarding(interval(Sides::Two)), facts(0.95, exact(0.948), 0.01, Some([0.0132, 0.0388])), Holds),
        (boarding(interval(Sides::Two)), facts(0.95, exact(0.9615), 0.01, Some([0.0192, 0.0193])), Fails),
        (boarding(interval(Sides::Two)), facts(0.95, exact(0.9), 0.01, Some([0.0, 0.1])), Fails),
        (boarding(interval(Sides::Two)), facts(0.95, simulated(0.94), 0.01, Some([0.02, 0.04])), Undecided),
        (boarding(interval(Sides::Lower)), facts(0.95, exact(0.93), 0.01, None), Fails),
        (total(interval(Sides::Upper)), facts(0.95, exact(0.951), 0.01, None), Holds),
        (boarding(test(Sides::Two, None)), facts(0.05, exact(0.079), 0.01, Some([0.01, 0.069])), Fails),
        (boarding(test(Sides::Upper, None)), facts(0.05, exact(0.0501), 0.01, None), Holds),
        (boarding(test(Sides::Lower, None)), facts(0.05, simulated(0.0399), 0.01, None), Undecided),
        (boarding(test(Sides::Two, Some(0.5))), facts(0.8, exact(0.71), 0.01, None), Fails),
        (boarding(test(Sides::Two, Some(0.5))), facts(0.8, exact(0.803), 0.01, None), Holds),
        (boarding(threshold(Direction::AtMost)), facts(0.934, exact(0.912), 0.01, None), Fails),
        (total(threshold(Direction::AtLeast)), facts(3.2e-5, exact(2.9e-6), 0.001, None), Holds),
        (boarding(threshold(Direction::AtMost)), facts(0.934, simulated(0.924), 0.01, None), Undecided),
        (
            boarding(Claim::Deviation { epsilon: 2.0, probability: None }),
            facts(0.029, exact(0.034), 0.001, None),
            Fails,
        ),
        (
            boarding(Claim::Deviation { epsilon: 2.0, probability: Some(0.05) }),
            facts(0.029, exact(0.0291), 0.001, None),
            Holds,
        ),
        (scenario("no-show", "cars", 1, Claim::Curve), facts(0.0, exact(0.3), 0.02, None), Fails),
    ];
    let mut page =
        cases.iter().map(|(scenario, facts, state)| because(scenario, facts, *state)).collect::<Vec<_>>();
    for (state, actual) in [(Holds, 2.35), (Fails, 2.777), (Undecided, 2.42)] {
        let scenario = boarding(Claim::Quantile { p: 0.99 });
        let mut facts = facts(2.326, exact(actual), 0.1, None);
        facts.normal_quantile = Some(59.40);
        facts.actual_quantile = Some(exact(48.0 + 4.9 * actual));
        page.push(because(&scenario, &facts, state));
    }
    page.push(without_figure(&boarding(Claim::Curve), NoFigure::InfiniteVariance));
    page.push(without_figure(&scenario("boarding time", "s", 1, interval(Sides::Two)), NoFigure::NoSpread));
    insta::assert_snapshot!(page.join("\n"));
}

/// Every kind of claim, on every side and in every direction, in every state.
#[test]
fn every_claim_in_every_state_reads_well() {
    let mut claims = vec![(Claim::Curve, 0.0)];
    for sides in [Sides::Two, Sides::Lower, Sides::Upper] {
        for spread in [Spread::Known, Spread::Estimated] {
            claims.push((Claim::Interval { level: 0.95, sides, spread }, 0.95));
            claims.push((Claim::Test { significance: 0.05, sides, spread, shift: None }, 0.05));
            claims.push((Claim::Test { significance: 0.05, sides, spread, shift: Some(0.5) }, 0.8));
        }
    }
    for direction in [Direction::AtMost, Direction::AtLeast] {
        claims.push((Claim::Threshold { at: 55.0, direction }, 0.9));
    }
    claims.push((Claim::Quantile { p: 0.999 }, 3.09));
    claims.push((Claim::Deviation { epsilon: 2.0, probability: None }, 0.1));
    claims.push((Claim::Deviation { epsilon: 2.0, probability: Some(0.05) }, 0.1));
    let mut page = Vec::new();
    for (claim, nominal) in claims {
        for (state, off) in [(State::Holds, 0.004), (State::Fails, 0.03), (State::Undecided, 0.01)] {
            let estimated = claim.spread() == Some(Spread::Estimated);
            let actual = nominal + off;
            let figure =
                if estimated { Figure::confidence(actual, 4e-4) } else { Figure::bound(actual, 1e-12) };
            let two_sided = matches!(claim, Claim::Interval { sides: Sides::Two, .. });
            let misses = two_sided.then_some([0.03 - off / 2.0, 0.02 - off / 2.0]);
            let mut facts = facts(nominal, figure, 0.01, misses);
            facts.normal_quantile = Some(48.0 + 4.9 * nominal);
            facts.actual_quantile = Some(Figure { value: 48.0 + 4.9 * actual, ..figure });
            let sentence = because(&scenario("boarding time", "s", 40, claim), &facts, state);
            assert!(sentence.ends_with('.') && !sentence.contains(". "), "{sentence}");
            page.push(sentence);
        }
    }
    insta::assert_snapshot!(page.join("\n"));
}

#[test]
fn plans_read_well() {
    let law = LawSpec::Exponential { mean: 2.0 };
    let mut page = Vec::new();
    let claims = [
        Claim::Curve,
        Claim::Interval { level: 0.95, sides: Sides::Two, spread: Spread::Estimated },
        Claim::Interval { level: 0.8, sides: Sides::Lower, spread: Spread::Known },
        Claim::Interval { level: 0.999, sides: Sides::Upper, spread: Spread::Known },
        Claim::Test { significance: 0.05, sides: Sides::Two, spread: Spread::Estimated, shift: None },
        Claim::Test { significance: 0.01, sides: Sides::Upper, spread: Spread::Known, shift: Some(0.5) },
        Claim::Threshold { at: 55.0, direction: Direction::AtMost },
        Claim::Threshold { at: 12345.6, direction: Direction::AtLeast },
        Claim::Quantile { p: 0.999 },
        Claim::Deviation { epsilon: 2.0, probability: None },
        Claim::Deviation { epsilon: 0.5, probability: Some(0.05) },
    ];
    for claim in claims {
        page.push(plan_sentence(&scenario("boarding time", "s", 40, claim)));
    }
    for (name, n) in [("on-board spending", 300), ("no-show", 1), ("loss", 12_000), ("delivery", 3), ("", 7)]
    {
        page.push(plan_sentence(&scenario(name, "qm", n, Claim::Curve)));
    }
    let mut sum = scenario("vehicle weight", "t", 28, Claim::Quantile { p: 0.999 });
    sum.statistic = Statistic::Sum;
    sum.tolerance = Tolerance::Relative(0.02);
    page.push(plan_sentence(&sum));
    let part = |count| Part { law: law.clone(), count };
    for counts in [vec![60, 40], vec![1], vec![5, 6, 7]] {
        let mut parts = Scenario::new(Source::Parts { parts: counts.into_iter().map(part).collect() });
        parts.quantity =
            Some(Quantity { name: Some("vehicle weight".to_owned()), unit: Some("t".to_owned()) });
        parts.claim = Claim::Threshold { at: 95.0, direction: Direction::AtMost };
        page.push(plan_sentence(&parts));
    }
    let group = |n| Group { law: law.clone(), n };
    let mut groups = Scenario::new(Source::Groups { groups: [group(900), group(100)] });
    groups.quantity = Some(Quantity { name: Some("on-board spending".to_owned()), unit: None });
    groups.claim = Claim::usual_interval();
    page.push(plan_sentence(&groups));
    insta::assert_snapshot!(page.join("\n"));
}

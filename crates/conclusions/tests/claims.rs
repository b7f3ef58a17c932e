//! Every kind of claim against closed forms, and what must hold of every report.

use gaussgap_conclusions::report::{Report, State};
use gaussgap_conclusions::scenario::{Claim, Scenario, Sides, Source, Spread, apply_overrides};
use gaussgap_conclusions::{AssessError, Effort, assess};
use gaussgap_simulation::figure::Basis;
use gaussgap_simulation::work::Work;
use serde_json::json;

fn report_of(scenario: &Scenario, effort: Effort) -> Report {
    assess(scenario, effort, &Work::new()).unwrap_or_else(|error| panic!("{error}\n{}", scenario.to_json()))
}

fn scenario(value: serde_json::Value) -> Scenario {
    let mut document = json!({"format": "gaussgap-scenario/1"});
    let members = value.as_object().expect("an object").clone();
    document.as_object_mut().expect("an object").extend(members);
    Scenario::from_value(&document).unwrap_or_else(|problems| panic!("{problems:?}"))
}

/// SciPy 1.17.1: `references/claims.py` (the distance of the curve has six digits).
#[test]
fn claims_agree_with_closed_forms() {
    let references: &[(&str, &str, f64, f64)] = include!("../references/claims.in");
    for (name, text, nominal, actual) in references {
        let report = report_of(&Scenario::parse(text).expect("a valid scenario"), Effort::PLANNED_N);
        let found = report.claim.actual.expect("a figure");
        let accuracy = if name.starts_with("curve") { 1e-6 } else { 1e-9 };
        assert!((report.claim.nominal - nominal).abs() < 1e-9, "{name}: nominal {}", report.claim.nominal);
        assert!((found.value - actual).abs() < accuracy, "{name}: {} instead of {actual}", found.value);
        assert!(found.error < 1e-8 && found.basis == Basis::Bound, "{name}: {found:?}");
        let written = serde_json::to_string(&report).expect("serializable");
        assert!(!written.contains("NaN"));
    }
}

#[test]
fn safe_from_is_the_brute_force_integer() {
    let laws = [
        json!({"kind": "bernoulli", "p": 0.3}),
        json!({"kind": "exponential", "mean": 2}),
        json!({"kind": "poisson", "rate": 0.4}),
        json!({"kind": "table", "values": [0, 1, 5], "weights": [3, 2, 1]}),
        json!({"kind": "uniform", "low": 0, "high": 1}),
    ];
    let claims = [
        (json!({"kind": "curve"}), 0.04),
        (json!({"kind": "interval", "level": 0.9, "sides": "two", "spread": "known"}), 0.012),
        (json!({"kind": "interval", "level": 0.95, "sides": "upper", "spread": "known"}), 0.012),
        (json!({"kind": "quantile", "p": 0.9}), 0.06),
    ];
    for law in &laws {
        let cases =
            claims.iter().flat_map(|(claim, tolerance)| [(claim, *tolerance), (claim, 1.7 * tolerance)]);
        for (claim, tolerance) in cases {
            let value = json!({"law": law, "n": 7, "claim": claim, "tolerance": {"absolute": tolerance},
                "search": {"up_to": 40}});
            let base = scenario(value.clone());
            let found = report_of(&base, Effort { growth: false, safe_from: true, remedies: false }).verdict;
            let holds = |n: u64| {
                let mut document = serde_json::to_value(&base).expect("serializable");
                apply_overrides(&mut document, &[("/n".to_owned(), json!(n))]).expect("settable");
                let planned = Scenario::from_value(&document).expect("a valid scenario");
                report_of(&planned, Effort::PLANNED_N).verdict.state == State::Holds
            };
            let last_failing = (1..=40).rev().find(|n| !holds(*n));
            let checked = found.checked.expect("a search was made");
            assert!(checked.every_n && checked.to == 40, "{value}: {checked:?}");
            assert_eq!(found.last_failing, last_failing, "{value}");
            let safe_from = match last_failing {
                None => Some(1),
                Some(40) => None,
                Some(last) => Some(last + 1),
            };
            assert_eq!(found.safe_from, safe_from, "{value}");
        }
    }
}

#[test]
fn one_observation_has_no_estimated_spread() {
    let report = report_of(
        &scenario(json!({"law": {"kind": "exponential", "mean": 2}, "n": 1,
            "claim": {"kind": "interval", "level": 0.95, "sides": "two", "spread": "estimated"}})),
        Effort::PLANNED_N,
    );
    assert_eq!(report.verdict.state, State::Fails);
    assert_eq!(report.claim.actual, None);
    assert!(report.verdict.because.contains("no estimate"), "{}", report.verdict.because);
}

#[test]
fn infinite_variance_fails_with_nulls_and_a_way_out() {
    let report = report_of(
        &scenario(json!({"law": {"kind": "pareto", "shape": 1.7, "minimum": 900}, "n": 200})),
        Effort::FULL,
    );
    assert_eq!(report.verdict.state, State::Fails);
    assert!(report.distance.kolmogorov.is_none() && report.claim.actual.is_none());
    assert!(report.tails.iter().all(|row| row.at_or_below.is_none()) && report.tails.len() == 9);
    assert!(report.cautions.iter().any(|caution| caution.contains("cap it")), "{:?}", report.cautions);
    assert!(report.remedies.iter().any(|remedy| remedy.name.starts_with("cap")), "{:?}", report.remedies);
}

#[test]
fn zero_variance_and_unloaded_data_are_bad_input() {
    for (law, pointer) in [
        (json!({"kind": "constant", "value": 3}), "/law"),
        (json!({"kind": "data", "path": "pilot.csv", "column": "time"}), "/law"),
        (
            json!({"kind": "mixture", "parts": [{"weight": -1, "law": {"kind": "constant", "value": 3}}]}),
            "/law/parts/0/weight",
        ),
    ] {
        let result = assess(&scenario(json!({"law": law, "n": 3})), Effort::PLANNED_N, &Work::new());
        match result {
            Err(AssessError::Scenario(problems)) => assert_eq!(problems[0].pointer, pointer, "{problems:?}"),
            other => panic!("{law}: {other:?}"),
        }
    }
}

#[test]
fn cancelled_work_stops() {
    let work = Work::new();
    work.cancel();
    let result =
        assess(&scenario(json!({"law": {"kind": "exponential", "mean": 3}, "n": 3})), Effort::FULL, &work);
    assert!(matches!(result, Err(AssessError::Cancelled(_))), "{result:?}");
}

/// t-interval for exponential values, n = 10: coverage .900, misses .0955 (the true mean above the interval) and
/// .0040 (simulated, standard error ≤ .0004, in the notes on published results).
#[test]
fn estimated_spread_of_exponential_values() {
    let report = report_of(
        &scenario(json!({"law": {"kind": "exponential", "mean": 3}, "n": 10,
            "claim": {"kind": "interval", "level": 0.95, "sides": "two", "spread": "estimated"}})),
        Effort::PLANNED_N,
    );
    let claim = &report.claim;
    let near = |figure: Option<gaussgap_simulation::figure::Figure>, expected: f64| {
        let figure = figure.expect("a figure");
        assert!((figure.value - expected).abs() <= figure.error + 0.0012, "{figure:?} {expected}");
    };
    near(claim.actual, 0.900);
    near(claim.miss_low, 0.0955);
    near(claim.miss_high, 0.0040);
    assert_eq!(report.verdict.state, State::Fails);
    assert!(report.method.draws.is_some() && report.method.seed.is_some());
}

/// With groups the statistic is the second mean minus the first: a longer right tail in the smaller second group
/// makes the interval lie above the true difference more often (known spread).
#[test]
fn groups_compare_second_minus_first() {
    let value = json!({"groups": [{"law": {"kind": "exponential", "mean": 1}, "n": 90},
        {"law": {"kind": "exponential", "mean": 1}, "n": 10}],
        "claim": {"kind": "interval", "level": 0.95, "sides": "two", "spread": "known"}});
    let report = report_of(&scenario(value), Effort::FULL);
    let (low, high) = (report.claim.miss_low.expect("low"), report.claim.miss_high.expect("high"));
    assert!(high.value > 2.0 * low.value, "{low:?} {high:?}");
    // γ(n₁ − n₂)/√(n₁n₂(n₁ + n₂)) with γ = 2.
    let expected = 2.0 * 80.0 / (90.0_f64 * 10.0 * 100.0).sqrt();
    assert!((report.sum.skewness.expect("skewness") - expected).abs() < 1e-9);
    let balanced =
        report.remedies.iter().find(|remedy| remedy.name.starts_with("split evenly")).expect("a remedy");
    assert!(balanced.holds, "{balanced:?}");
    assert_eq!(report.summands.len(), 2);
}

#[test]
fn guarantees_of_a_deviation_are_ordered_and_hold() {
    let value = json!({"law": {"kind": "beta", "a": 2, "b": 5}, "n": 60,
        "claim": {"kind": "deviation", "epsilon": 0.06, "probability": 0.01}, "search": {"up_to": 2000}});
    let report = report_of(&scenario(value), Effort::FULL);
    let actual = report.claim.actual.expect("a figure").value;
    let guarantees = report.claim.guarantees.expect("guarantees");
    assert_eq!(guarantees.len(), 6);
    for guarantee in &guarantees {
        let value = guarantee.value.expect("a bounded law meets every condition");
        assert!(value >= actual && value <= 1.0, "{guarantee:?} {actual}");
    }
    let needed = report.claim.needed_n.expect("needed n");
    let actual_n = needed["actual"].expect("within the search");
    for name in ["Chebyshev", "Hoeffding", "Bernstein", "Chernoff"] {
        assert!(needed[name].expect("exists") >= actual_n, "{needed:?}");
    }
    // Hoeffding: 2 exp(−2nε²) ≤ 0.01 at n = ln(200)/(2·0.0036) = 735.9.
    assert_eq!(needed["Hoeffding"], Some(736));
}

/// Reads every bundled scenario; prints the findings with their remedies, to be read aloud with `--nocapture`.
#[test]
fn every_bundled_scenario_has_a_finding_and_a_remedy() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenarios");
    let mut paths = std::fs::read_dir(&folder)
        .expect("the folder of bundled scenarios")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|extension| extension == "json"))
        .collect::<Vec<_>>();
    paths.sort();
    let mut page = Vec::new();
    for path in paths {
        let text = std::fs::read_to_string(&path).expect("readable");
        let mut scenario = Scenario::parse(&text).unwrap_or_else(|problems| panic!("{path:?}: {problems:?}"));
        for request in scenario.data_requests() {
            let csv = std::fs::read_to_string(folder.join(&request.path)).expect("readable");
            let mut lines = csv.lines();
            let header = lines.next().expect("a header").split(',').collect::<Vec<_>>();
            let column = header.iter().position(|name| *name == request.column).expect("the column");
            let values =
                lines.map(|line| line.split(',').nth(column).expect("a cell").parse().expect("a number"));
            scenario.fill_data(&request.pointer, values.collect()).expect("the place exists");
        }
        // The search and the growth curve are not looked at here; they cost most.
        let report = report_of(&scenario, Effort { growth: false, safe_from: false, remedies: true });
        assert!(!report.remedies.is_empty(), "{path:?} has no remedy");
        assert!(report.remedies.iter().all(|remedy| remedy.actual.is_some() && !remedy.note.is_empty()));
        // One sentence: an opening that says the verdict, one full stop at the end.
        let finding = &report.verdict.because;
        assert!(["Safe at ", "Not safe at ", "Undecided at "].iter().any(|start| finding.starts_with(start)));
        assert!(finding.ends_with('.') && !finding.contains(". "), "{finding}");
        if let Some(actual) = report.claim.actual
            && let Claim::Interval { sides: Sides::Two, spread: Spread::Known, .. } = scenario.claim
        {
            let (low, high) = (report.claim.miss_low.expect("low"), report.claim.miss_high.expect("high"));
            assert!((actual.value + low.value + high.value - 1.0).abs() < 1e-12);
        }
        let remedies = report.remedies.iter().map(|remedy| {
            format!("   {} {} — {}", if remedy.holds { "+" } else { "-" }, remedy.name, remedy.note)
        });
        page.push(report.verdict.because.clone());
        page.extend(remedies);
    }
    println!("{}", page.join("\n"));
}

/// Random laws, closed-form, lattice and continuous, random claims and tolerances: the search finds the integer
/// that judging every single n finds.
#[test]
fn safe_from_is_the_brute_force_integer_for_random_laws() {
    use rand::{Rng, RngExt, SeedableRng};
    let mut random = rand::rngs::StdRng::seed_from_u64(20_260_101);
    let uniform = |random: &mut rand::rngs::StdRng, low: f64, high: f64| random.random_range(low..high);
    let mut decided_by_search = 0;
    for case in 0..40 {
        let (law, up_to) = match case % 5 {
            0 => (json!({"kind": "bernoulli", "p": uniform(&mut random, 0.05, 0.95)}), 250),
            1 => (json!({"kind": "gamma", "shape": uniform(&mut random, 0.3, 4.0), "scale": 2}), 250),
            2 => {
                let weights = [1, 2, 3].map(|_| uniform(&mut random, 0.1, 1.0));
                let gap = 1 + random.next_u32() % 9;
                (json!({"kind": "table", "values": [0, 1, 1 + gap], "weights": weights}), 150)
            }
            3 => (
                json!({"kind": "triangular", "low": 0, "mode": uniform(&mut random, 0.0, 1.0), "high": 1}),
                40,
            ),
            _ => {
                let parts = json!([
                    {"weight": 3, "law": {"kind": "normal", "mean": 0, "sd": 1}},
                    {"weight": 1, "law": {"kind": "normal", "mean": uniform(&mut random, 1.0, 9.0), "sd": 2}}
                ]);
                (json!({"kind": "mixture", "parts": parts}), 60)
            }
        };
        let (claim, allowed) = match random.next_u32() % 4 {
            0 => (json!({"kind": "curve"}), uniform(&mut random, 0.015, 0.06)),
            1 => (json!({"kind": "interval", "level": 0.95, "sides": "two", "spread": "known"}), 0.01),
            2 => (
                json!({"kind": "interval", "level": 0.9, "sides": "lower", "spread": "known"}),
                uniform(&mut random, 0.005, 0.02),
            ),
            _ => (json!({"kind": "quantile", "p": 0.95}), uniform(&mut random, 0.03, 0.15)),
        };
        let mut base =
            scenario(json!({"law": law, "n": 5, "claim": claim, "tolerance": {"absolute": allowed},
            "search": {"up_to": up_to}}));
        let found = report_of(&base, Effort { growth: false, safe_from: true, remedies: false }).verdict;
        let mut last_failing = None;
        for n in (1..=up_to).rev() {
            if let Source::Like { n: planned, .. } = &mut base.source {
                *planned = n;
            }
            if report_of(&base, Effort::PLANNED_N).verdict.state != State::Holds {
                last_failing = Some(n);
                break;
            }
        }
        let safe_from = match last_failing {
            None => Some(1),
            Some(last) if last == up_to => None,
            Some(last) => Some(last + 1),
        };
        assert!(found.checked.as_ref().is_some_and(|checked| checked.every_n), "{}", base.to_json());
        assert_eq!((found.safe_from, found.last_failing), (safe_from, last_failing), "{}", base.to_json());
        decided_by_search += u32::from(safe_from.is_some_and(|safe| safe > 1));
    }
    assert!(decided_by_search >= 20, "{decided_by_search}");
}

/// The hand-checked examples in the documentation of the claims.
#[test]
fn documented_examples_are_what_is_computed() {
    let interval =
        |sides: &str| json!({"kind": "interval", "level": 0.95, "sides": sides, "spread": "estimated"});
    // Three coins: none or three alike have s = 0 and miss; the others cover.
    let coins = report_of(
        &scenario(json!({"law": {"kind": "bernoulli", "p": 0.5}, "n": 3, "claim": interval("two")})),
        Effort::PLANNED_N,
    );
    let value = |figure: Option<gaussgap_simulation::figure::Figure>| figure.expect("a figure").value;
    assert!((value(coins.claim.actual) - 0.75).abs() < 1e-12);
    assert!((value(coins.claim.miss_low) - 0.125).abs() < 1e-12);
    assert!((value(coins.claim.miss_high) - 0.125).abs() < 1e-12);
    let test = json!({"kind": "test", "significance": 0.05, "sides": "two", "spread": "estimated"});
    let coins = report_of(
        &scenario(json!({"law": {"kind": "bernoulli", "p": 0.5}, "n": 3, "claim": test})),
        Effort::PLANNED_N,
    );
    assert!((value(coins.claim.actual) - 0.25).abs() < 1e-12);
    // One exponential value: Φ(−1) at z = −1.
    let curve =
        report_of(&scenario(json!({"law": {"kind": "exponential", "mean": 7}, "n": 1})), Effort::PLANNED_N);
    assert!((value(curve.claim.actual) - 0.158_655_253_931_457).abs() < 1e-12);
}

/// No limit is one of time: one thread or many, and a report read back, give the same figures.
#[test]
fn figures_depend_on_the_scenario_alone() {
    let cases = [
        json!({"law": {"kind": "weibull", "shape": 1.5, "scale": 75}, "n": 12, "method": {"draws": 60000},
            "claim": {"kind": "interval", "level": 0.95, "sides": "two", "spread": "estimated"},
            "tolerance": {"absolute": 0.02}, "search": {"up_to": 300}}),
        json!({"law": {"kind": "lomax", "shape": 3.2, "scale": 40}, "n": 35, "statistic": "sum",
            "claim": {"kind": "quantile", "p": 0.99}, "tolerance": {"absolute": 0.3},
            "search": {"up_to": 120}}),
        json!({"law": {"kind": "table", "values": [0, 1, 7.25], "weights": [5, 3, 1]}, "n": 40,
            "claim": {"kind": "threshold", "at": 1.5, "direction": "at-most"}}),
    ];
    let one = rayon::ThreadPoolBuilder::new().num_threads(1).build().expect("a pool");
    for case in cases {
        let planned = scenario(case);
        let figures = |mut report: Report| {
            report.method.seconds = 0.0;
            serde_json::to_value(&report).expect("serializable")
        };
        let many = report_of(&planned, Effort::FULL);
        let back = Scenario::parse(&many.scenario.to_json()).expect("a report's scenario is valid");
        let single = one.install(|| report_of(&back, Effort::FULL));
        assert_eq!(figures(many), figures(single));
    }
}

/// Where the budget of draws does not decide, the finding says how many more would.
#[test]
fn undecided_says_how_many_more_draws() {
    // Exponential values, n = 10: the interval covers 90.0 %; the limit is put there.
    let report = report_of(
        &scenario(json!({"law": {"kind": "exponential", "mean": 3}, "n": 10, "method": {"draws": 20000},
            "claim": {"kind": "interval", "level": 0.95, "sides": "two", "spread": "estimated"},
            "tolerance": {"absolute": 0.0525}})),
        Effort::PLANNED_N,
    );
    assert_eq!(report.verdict.state, State::Undecided);
    let finding = &report.verdict.because;
    assert!(finding.contains("more draws would probably tell") && finding.ends_with('.'), "{finding}");
}

/// A rule that speaks only of skewed laws is silent on others.
#[test]
fn rules_speak_where_they_apply() {
    let names = |law: serde_json::Value| {
        let report = report_of(
            &scenario(json!({"law": law, "n": 500})),
            Effort { growth: false, safe_from: false, remedies: true },
        );
        report.rules_of_thumb.iter().map(|rule| rule.rule.clone()).collect::<Vec<_>>().join("; ")
    };
    let skewed = names(json!({"kind": "exponential", "mean": 2}));
    assert!(skewed.contains("355") && skewed.contains("n ≥ 30") && !skewed.contains("np"), "{skewed}");
    assert!(!names(json!({"kind": "gamma", "shape": 16, "scale": 2})).contains("355"));
    assert!(names(json!({"kind": "bernoulli", "p": 0.2})).contains("np ≥ 5"));
}

/// At another n a total and a fixed value are another question: no remedy of more n, and a caution.
#[test]
fn a_fixed_value_of_a_total_is_no_reason_for_more() {
    let value = json!({"law": {"kind": "exponential", "mean": 2}, "n": 10, "statistic": "sum",
        "claim": {"kind": "threshold", "at": 25, "direction": "at-most"}, "search": {"up_to": 200}});
    let report = report_of(&scenario(value), Effort::FULL);
    assert_eq!(report.verdict.state, State::Fails);
    assert!(report.verdict.safe_from.is_some_and(|safe| safe > 10));
    assert!(report.remedies.iter().all(|remedy| !remedy.name.starts_with("take")), "{:?}", report.remedies);
    assert!(report.cautions.iter().any(|caution| caution.contains("other plans")), "{:?}", report.cautions);
}

mod properties {
    use super::*;
    use proptest::prelude::*;

    fn any_law() -> impl Strategy<Value = serde_json::Value> {
        prop_oneof![
            (0.01..0.99_f64).prop_map(|p| json!({"kind": "bernoulli", "p": p})),
            (0.05..20.0_f64).prop_map(|shape| json!({"kind": "gamma", "shape": shape, "scale": 3})),
            (0.05..5.0_f64).prop_map(|rate| json!({"kind": "poisson", "rate": rate})),
            prop::collection::vec((0..40_i32, 1..20_u32), 2..6).prop_map(|points| {
                let values = points.iter().map(|(value, _)| *value).chain([41]).collect::<Vec<_>>();
                let weights = points.iter().map(|(_, weight)| *weight).chain([3]).collect::<Vec<_>>();
                json!({"kind": "table", "values": values, "weights": weights})
            }),
        ]
    }

    /// More families, for like summands: sums of unlike continuous parts can take long.
    fn any_law_of_more() -> impl Strategy<Value = serde_json::Value> {
        prop_oneof![
            any_law(),
            (0.02..0.9_f64).prop_map(|p| json!({"kind": "geometric", "p": p})),
            (0.2..30.0_f64).prop_map(|shape| json!({"kind": "inverse-gaussian", "mean": 2, "shape": shape})),
            (0.3..9.0_f64, 0.3..9.0_f64).prop_map(|(a, b)| json!({"kind": "beta", "a": a, "b": b})),
            (0.2..1.5_f64).prop_map(|log_sd| json!({"kind": "lognormal", "log_mean": 0, "log_sd": log_sd})),
            (3.1..9.0_f64).prop_map(|shape| json!({"kind": "lomax", "shape": shape, "scale": 5})),
            (0.1..0.9_f64, 0.5..9.0_f64).prop_map(|(zero, mean)| json!({"kind": "mixture", "parts": [
                {"weight": zero, "law": {"kind": "constant", "value": 0}},
                {"weight": 1.0 - zero, "law": {"kind": "exponential", "mean": mean}}]})),
        ]
    }

    proptest! {
        #![proptest_config(ProptestConfig { cases: 24, ..ProptestConfig::default() })]

        /// A bound shown next to a distance is never below it.
        #[test]
        fn berry_esseen_is_never_below_the_distance(law in any_law_of_more(), n in 1_u64..300) {
            let report = report_of(&scenario(json!({"law": law, "n": n})), Effort::PLANNED_N);
            let distance = report.distance.kolmogorov.expect("a distance");
            let bound = report.distance.berry_esseen.expect("a bound");
            prop_assert!(bound.value >= distance.value - distance.error, "{bound:?} {distance:?}");
        }

        /// The same for unlike parts.
        #[test]
        fn berry_esseen_of_parts(first in any_law(), second in any_law(), a in 1_u64..30, b in 1_u64..30) {
            let value = json!({"parts": [{"law": first, "count": a}, {"law": second, "count": b}],
                "method": {"draws": 2000}});
            let report = report_of(&scenario(value), Effort::PLANNED_N);
            let distance = report.distance.kolmogorov.expect("a distance");
            let bound = report.distance.berry_esseen.expect("a bound");
            prop_assert!(bound.value >= distance.value - distance.error, "{bound:?} {distance:?}");
        }

        /// The report holds only finite numbers, and its sentence ends.
        #[test]
        fn reports_are_whole(law in any_law(), n in 1_u64..2000, p in 0.001..0.999_f64) {
            let value = json!({"law": law, "n": n, "claim": {"kind": "quantile", "p": p}});
            let report = report_of(&scenario(value), Effort { growth: false, safe_from: false, remedies: true });
            let text = serde_json::to_string(&report).expect("serializable");
            prop_assert!(!text.contains("NaN") && !text.contains("inf"), "{}", text);
            prop_assert!(report.verdict.because.ends_with('.'));
            prop_assert!(report.claim.actual.is_some());
        }
    }
}

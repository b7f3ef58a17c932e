//! Every law and route against distributions computed at 60 digits by other methods (`references/sums.py`).
//!
//! `cargo test -p gaussgap-tests --test references -- --nocapture` prints the worst error per law and route.

use gaussgap_conclusions::scenario::{Scenario, Source};
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::{self, Method, Route, StandardizedSum, SumSpec};
use gaussgap_simulation::work::Work;
use serde::Deserialize;
use std::path::Path;

/// One law's file.
#[derive(Deserialize)]
struct Reference {
    law: serde_json::Value,
    cases: Vec<Case>,
}

/// One number of summands.
#[derive(Deserialize)]
struct Case {
    n: u64,
    kolmogorov: String,
    points: Vec<Point>,
}

#[derive(Deserialize)]
struct Point {
    z: f64,
    at_or_below: String,
    below: String,
    above: String,
}

/// What the issue asks for: absolute error of distances and probabilities, and the largest error stated.
const ABSOLUTE: f64 = 1e-10;
const STATED: f64 = 1e-8;

/// What the methods of the references leave at most (see `references/sums.py`).
const LEFT: f64 = 1e-19;

/// Laws of the main job; each has its file.
const LAWS: [&str; 28] = [
    "bernoulli",
    "binomial",
    "poisson",
    "geometric",
    "negative-binomial",
    "discrete-uniform",
    "table",
    "data",
    "normal",
    "uniform",
    "exponential",
    "gamma",
    "weibull-0.7",
    "weibull-1.5",
    "weibull-3",
    "lognormal",
    "lognormal-mean-sd",
    "lomax-2.3",
    "lomax-4.5",
    "pareto",
    "inverse-gaussian",
    "mostly-zero-lognormal",
    "capped-lomax",
    "capped-lognormal",
    "capped-exponential",
    "normals-and-uniform",
    "different-ends",
    "nested",
];

fn number(text: &str) -> f64 {
    text.parse().expect("the references hold numbers")
}

/// Worst errors of one law by one route.
#[derive(Debug, Clone, Copy)]
struct Worst {
    route: Route,
    n: (u64, u64),
    distance: f64,
    probability: f64,
    stated: f64,
}

fn build(reference: &Reference, n: u64, method: &Method) -> Box<dyn StandardizedSum> {
    let document = serde_json::json!({ "format": "gaussgap-scenario/1", "law": reference.law, "n": n });
    let scenario = Scenario::from_value(&document).expect("the law is well written");
    let Source::Like { law, n, .. } = scenario.source else { panic!("one law was given") };
    let law = law.compile().expect("the law can be made ready");
    sum::build(&SumSpec::like_summands(law, n), method, &Work::new()).expect("the sum can be built")
}

/// Judges one figure; returns a complaint if it is wrong.
fn judge(what: &str, figure: Figure, truth: f64, complaints: &mut Vec<String>) -> f64 {
    let error = (figure.value - truth).abs();
    // A reference read as a double is off by half a unit in its last place, and by what its method leaves.
    if error.is_nan() || error > figure.error + 0.5 * f64::EPSILON * truth + LEFT {
        complaints.push(format!(
            "{what}: {} ± {:.1e}, true {truth}, off by {error:.1e}",
            figure.value, figure.error
        ));
    } else if error > ABSOLUTE {
        complaints.push(format!("{what}: off by {error:.1e}"));
    } else if figure.error > STATED {
        complaints.push(format!("{what}: states {:.1e}", figure.error));
    }
    error
}

/// Compares one law; returns the worst errors per route.
fn compare(name: &str, complaints: &mut Vec<String>) -> Vec<Worst> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("references").join(format!("{name}.json"));
    let text = match std::fs::read_to_string(&path) {
        Ok(text) => text,
        Err(error) => {
            complaints.push(format!("{}: {error}", path.display()));
            return Vec::new();
        }
    };
    let reference: Reference = serde_json::from_str(&text).expect("a reference file");
    let mut worst: Vec<Worst> = Vec::new();
    assert_eq!(
        reference.cases.iter().map(|case| case.n).collect::<Vec<_>>(),
        [1, 2, 3, 5, 40, 1000],
        "{name}"
    );
    for case in &reference.cases {
        let sum = build(&reference, case.n, &Method::default());
        let route = sum.route();
        if route == Route::Simulation {
            complaints.push(format!("{name} n = {}: simulated: {}", case.n, sum.detail()));
            continue;
        }
        let at = worst.iter().position(|one| one.route == route).unwrap_or_else(|| {
            worst.push(Worst { route, n: (case.n, case.n), distance: 0.0, probability: 0.0, stated: 0.0 });
            worst.len() - 1
        });
        let so_far = &mut worst[at];
        so_far.n.1 = case.n;
        let distance = sum.kolmogorov();
        let label = |what: &str| format!("{name} n = {} {route:?} {what}", case.n);
        let error = judge(&label("distance"), distance.kolmogorov, number(&case.kolmogorov), complaints);
        so_far.distance = so_far.distance.max(error);
        so_far.stated = so_far.stated.max(distance.kolmogorov.error);
        for point in &case.points {
            for (side, figure, truth) in [
                ("at or below", sum.at_or_below(point.z), &point.at_or_below),
                ("below", sum.below(point.z), &point.below),
                ("above", sum.above(point.z), &point.above),
            ] {
                let error = judge(&label(&format!("{side} {}", point.z)), figure, number(truth), complaints);
                so_far.probability = so_far.probability.max(error);
                so_far.stated = so_far.stated.max(figure.error);
            }
        }
    }
    worst
}

#[test]
fn every_law_agrees_with_its_references() {
    let mut complaints = Vec::new();
    println!("| law | n | route | distance off by | probabilities off by | largest error stated |");
    println!("|---|---|---|---|---|---|");
    for name in LAWS {
        for one in compare(name, &mut complaints) {
            let n =
                if one.n.0 == one.n.1 { one.n.0.to_string() } else { format!("{}–{}", one.n.0, one.n.1) };
            println!(
                "| {name} | {n} | {:?} | {:.0e} | {:.0e} | {:.0e} |",
                one.route, one.distance, one.probability, one.stated
            );
        }
    }
    assert!(complaints.is_empty(), "{} complaints:\n{}", complaints.len(), complaints.join("\n"));
}

/// Reference values for the open data set (`references/arrival_delays.py`).
#[derive(Deserialize)]
struct Delays {
    flights: u64,
    mean: String,
    sd: String,
    skewness: String,
    excess_kurtosis: String,
    third_absolute_central_moment: String,
    sums: Vec<DelaySum>,
}

#[derive(Deserialize)]
struct DelaySum {
    n: u64,
    kolmogorov: String,
    points: Vec<DelayPoint>,
}

#[derive(Deserialize)]
struct DelayPoint {
    k: i64,
    at_or_below: String,
}

/// Arrival delays of flights from New York City in 2013 (`data/README.md`), as pilot data.
#[test]
fn open_arrival_delays_agree_with_their_references() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR"));
    let text =
        std::fs::read_to_string(folder.join("references/arrival_delays.json")).expect("the references");
    let reference: Delays = serde_json::from_str(&text).expect("a reference file");
    let mut values = Vec::new();
    let mut reader = csv::Reader::from_path(folder.join("data/arrival_delays.csv")).expect("the data");
    for row in reader.deserialize() {
        let (minutes, flights): (f64, usize) = row.expect("a row of numbers");
        values.extend(std::iter::repeat_n(minutes, flights));
    }
    assert_eq!(values.len() as u64, reference.flights);
    let spec = LawSpec::Data { values: Some(values), path: None, column: None, tail: None };
    let law = spec.compile().expect("the law can be made ready");
    let moments = law.moments;
    for (found, truth) in [
        (moments.mean, &reference.mean),
        (moments.variance.map(f64::sqrt), &reference.sd),
        (moments.skewness, &reference.skewness),
        (moments.excess_kurtosis, &reference.excess_kurtosis),
        (moments.third_absolute_central, &reference.third_absolute_central_moment),
    ] {
        let (found, truth) = (found.expect("a finite law has every moment"), number(truth));
        assert!((found - truth).abs() <= 1e-12 * truth.abs(), "{found} {truth}");
    }
    let mut complaints = Vec::new();
    for case in &reference.sums {
        let sum = sum::build(&SumSpec::like_summands(law.clone(), case.n), &Method::default(), &Work::new())
            .expect("the sum can be built");
        assert_eq!(sum.route(), Route::Lattice);
        let label = |what: &str| format!("delays n = {} {what}", case.n);
        let mut worst =
            judge(&label("distance"), sum.kolmogorov().kolmogorov, number(&case.kolmogorov), &mut complaints);
        let moments = sum.moments();
        for point in &case.points {
            let z = (point.k as f64 - moments.mean) / moments.sd;
            let what = label(&format!("at or below {}", point.k));
            worst = worst.max(judge(&what, sum.at_or_below(z), number(&point.at_or_below), &mut complaints));
        }
        println!("arrival delays n = {}: off by {worst:.0e}", case.n);
    }
    assert!(complaints.is_empty(), "{}", complaints.join("\n"));
}

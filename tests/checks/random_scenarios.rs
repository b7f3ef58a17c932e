//! Random scenarios: nested laws with ordinary and extreme parameters, any n, any route.
//!
//! 60 in the usual test run; `GAUSSGAP_SCENARIOS=10000 cargo test --release -p gaussgap-tests --test
//! random_scenarios` runs as many as wanted. The seed is fixed, `GAUSSGAP_SEED` changes it, and
//! `GAUSSGAP_TRACE=1` names each scenario before it is assessed.

use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::Scenario;
use gaussgap_conclusions::{AssessError, Effort, assess};
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::{Method, RouteChoice, SumError, SumSpec, build, build_exact};
use gaussgap_simulation::work::Work;
use gaussgap_tests::random::Random;
use std::time::{Duration, Instant};

fn setting(name: &str, otherwise: u64) -> u64 {
    std::env::var(name).ok().and_then(|text| text.parse().ok()).unwrap_or(otherwise)
}

fn scenario_of(law: &LawSpec, n: u64, claim: &str) -> String {
    let law = serde_json::to_string(law).expect("a law is written as JSON");
    format!(
        r#"{{"format":"gaussgap-scenario/1","law":{law},"n":{n},"claim":{claim},"method":{{"draws":20000}}}}"#
    )
}

/// Nothing a person waits for may take this long on an idle machine; far more is allowed on a busy one.
const LIMIT: Duration = Duration::from_secs(120);

/// Does the work, cancelling it after the limit.
fn within<T>(limit: Duration, work: &Work, body: impl FnOnce() -> T) -> T {
    let (done, finished) = std::sync::mpsc::channel::<()>();
    let watched = work.clone();
    let watcher = std::thread::spawn(move || {
        if finished.recv_timeout(limit) == Err(std::sync::mpsc::RecvTimeoutError::Timeout) {
            watched.cancel();
        }
    });
    let result = body();
    drop(done);
    watcher.join().expect("the watcher ends");
    result
}

fn no_surprises(report: &Report) -> Result<(), String> {
    let text = serde_json::to_string(report).map_err(|e| e.to_string())?;
    if text.contains("NaN") || text.contains("inf,") {
        return Err("a number that is none".to_owned());
    }
    if let Some(distance) = report.distance.kolmogorov {
        if !(distance.value >= 0.0 && distance.value - distance.error <= 0.540_937_1) {
            return Err(format!("a distance of {distance:?}"));
        }
        if let Some(bound) = &report.distance.berry_esseen
            && bound.value + distance.error < distance.value
        {
            return Err(format!("the Berry–Esseen bound {} is below the distance {distance:?}", bound.value));
        }
        for (index, &z) in report.curve.z.iter().enumerate() {
            let (at, below) = (report.curve.at_or_below[index], report.curve.below[index]);
            let gap = (at - report.curve.normal[index]).abs().max((below - report.curve.normal[index]).abs());
            if gap > distance.value + distance.error + 1e-9 {
                return Err(format!("at z = {z} the gap {gap} exceeds the distance {distance:?}"));
            }
            if !(0.0..=1.0).contains(&at) || !(0.0..=1.0).contains(&below) || below > at + 1e-9 {
                return Err(format!("at z = {z}: P(Z < z) = {below}, P(Z ≤ z) = {at}"));
            }
            if index > 0 && below + 2.0 * distance.error + 1e-9 < report.curve.at_or_below[index - 1] {
                return Err(format!("the distribution function falls before z = {z}"));
            }
        }
        for row in &report.tails {
            let (Some(at), Some(above)) = (row.at_or_below, row.above) else {
                return Err("a probability is missing".to_owned());
            };
            if (at.value + above.value - 1.0).abs() > at.error + above.error + 1e-15 {
                return Err(format!("at z = {}: {at:?} and {above:?} do not add up to 1", row.z));
            }
        }
    }
    Ok(())
}

#[test]
fn random_scenarios_hold_no_surprises() {
    let mut random = Random::new(setting("GAUSSGAP_SEED", 7));
    let mut complaints = Vec::new();
    let mut slowest = (Duration::ZERO, String::new());
    let (mut assessed, mut refused) = (0, 0);
    for index in 0..setting("GAUSSGAP_SCENARIOS", 60) {
        let law = random.law(3);
        let n = random.size();
        let claim = random.claim();
        let text = scenario_of(&law, n, claim);
        let scenario = match Scenario::parse(&text) {
            Ok(scenario) => scenario,
            Err(problems) => {
                complaints.push(format!("{index}: {text}: not read: {problems:?}"));
                continue;
            }
        };
        if setting("GAUSSGAP_TRACE", 0) == 1 {
            eprintln!("{index}: {text}");
        }
        let start = Instant::now();
        let work = Work::new();
        let outcome =
            std::panic::catch_unwind(|| within(LIMIT, &work, || assess(&scenario, Effort::PLANNED_N, &work)));
        let taken = start.elapsed();
        if taken > LIMIT / 10 {
            println!("{taken:?}: {text}");
        }
        if taken > slowest.0 {
            slowest = (taken, text.clone());
        }
        match outcome {
            Err(_) => complaints.push(format!("{index}: {text}: panicked")),
            Ok(Ok(report)) => {
                assessed += 1;
                if let Err(complaint) = no_surprises(&report) {
                    complaints.push(format!("{index}: {text}: {complaint}"));
                }
            }
            // Refused with a reason, all of them about the law's parameters.
            Ok(Err(AssessError::Scenario(problems))) => {
                refused += 1;
                assert!(problems.iter().all(|problem| !problem.message.is_empty()));
            }
            Ok(Err(other)) => complaints.push(format!("{index}: {text}: {other}")),
        }
    }
    println!("{assessed} assessed, {refused} refused; slowest {:?}: {}", slowest.0, slowest.1);
    assert!(assessed > refused, "most random laws are usable");
    assert!(complaints.is_empty(), "{} complaints:\n{}", complaints.len(), complaints.join("\n"));
}

#[test]
fn shifting_scaling_and_reflecting_change_nothing_in_standard_units() {
    let mut random = Random::new(setting("GAUSSGAP_SEED", 11));
    let mut compared = 0;
    for _ in 0..setting("GAUSSGAP_SCENARIOS", 60) / 2 {
        let law = random.ordinary_law(2);
        let n = random.size().min(3000);
        let (add, multiply) = (random.between(-50.0, 50.0), random.between(0.01, 30.0));
        let image = LawSpec::Affine { law: Box::new(law.clone()), add, multiply };
        let (Ok(law), Ok(image)) = (law.compile(), image.compile()) else { continue };
        let method = Method::default();
        let exact = |law| build_exact(&SumSpec::like_summands(law, n), &method, &Work::new());
        let (Ok(plain), Ok(moved)) = (exact(law), exact(image)) else { continue };
        let (a, b) = (plain.kolmogorov().kolmogorov, moved.kolmogorov().kolmogorov);
        assert!((a.value - b.value).abs() <= a.error + b.error, "{a:?} {b:?} {plain:?}");
        compared += 1;
    }
    assert!(compared > 5, "only {compared} compared");
}

#[test]
fn exact_routes_and_simulation_agree_within_their_errors() {
    let mut random = Random::new(setting("GAUSSGAP_SEED", 13));
    let mut compared = 0;
    for _ in 0..setting("GAUSSGAP_SCENARIOS", 60) / 3 {
        let spec = random.ordinary_law(2);
        let n = random.size().min(60);
        let Ok(law) = spec.compile() else { continue };
        let sum = SumSpec::like_summands(law, n);
        let method = Method { draws: 40_000, confidence: 0.999_999, ..Method::default() };
        let simulated = Method { route: RouteChoice::Simulation, ..method };
        let work = Work::new();
        let exact = match within(LIMIT, &work, || build_exact(&sum, &method, &work)) {
            Ok(exact) => exact,
            Err(SumError::NoVariance | SumError::NotAvailable { .. }) => continue,
            Err(other) => panic!("{other}"),
        };
        let Ok(simulated) = build(&sum, &simulated, &work) else { continue };
        for z in [-2.5, -1.0, -0.3, 0.0, 0.4, 1.1, 3.0] {
            let (a, b) = (exact.at_or_below(z), simulated.at_or_below(z));
            assert!((a.value - b.value).abs() <= a.error + b.error, "z = {z}, n = {n}: {a:?} {b:?} {spec:?}");
        }
        compared += 1;
    }
    assert!(compared > 5, "only {compared} compared");
}

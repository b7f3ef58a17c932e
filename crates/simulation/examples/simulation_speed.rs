//! Draws per second of the simulated sums and studentized statistics.
//!
//! `cargo run --release -p gaussgap-simulation --example simulation_speed [threads [draws [law [sums|studentized]]]]`

use gaussgap_simulation::law::{Law, LawSpec};
use gaussgap_simulation::monte_carlo::{Misses, SimulatedSum, Studentized, StudentizedRequest, misses};
use gaussgap_simulation::sum::{Method, StandardizedSum, SumSpec};
use gaussgap_simulation::work::Work;
use std::time::Instant;

fn main() {
    let argument = |index: usize| std::env::args().nth(index);
    let threads = argument(1).and_then(|text| text.parse().ok()).unwrap_or(1);
    let budget = argument(2).and_then(|text| text.parse().ok()).unwrap_or(1_000_000);
    let only_law = argument(3);
    let only_kind = argument(4);
    if let Err(problem) = rayon::ThreadPoolBuilder::new().num_threads(threads).build_global() {
        eprintln!("{problem}");
    }
    println!("{threads} thread(s)");
    let lognormal = LawSpec::Lognormal { log_mean: Some(0.0), log_sd: Some(1.0), mean: None, sd: None };
    let mostly_zero = LawSpec::Cap { law: Box::new(lognormal.clone()), low: Some(1.5), high: None };
    let counts: Vec<f64> = (0..5000).map(|i| f64::from(i % 977) + 0.37 * f64::from(i)).collect();
    let laws = [
        ("lognormal", lognormal),
        ("exponential", LawSpec::Exponential { mean: 1.0 }),
        ("lomax", LawSpec::Lomax { shape: 4.5, scale: 1.0 }),
        ("gamma", LawSpec::Gamma { shape: 0.4, scale: 1.0 }),
        ("beta", LawSpec::Beta { a: 0.5, b: 3.0, low: None, high: None }),
        ("student-t", LawSpec::StudentT { df: 5.0, location: None, scale: None }),
        (
            "formula",
            LawSpec::Formula { density: "exp(-x) * (1 + sin(x)^2)".to_owned(), low: 0.0, high: 40.0 },
        ),
        (
            "histogram",
            LawSpec::Histogram {
                edges: (0..=1000).map(|i| 0.01 * f64::from(i)).collect(),
                weights: (0..1000).map(|i| f64::from(1 + i % 7)).collect(),
            },
        ),
        ("capped lognormal", mostly_zero),
        ("5000 atoms", LawSpec::Table { weights: vec![1.0; counts.len()], values: counts }),
    ];
    for (name, spec) in laws {
        if only_law.as_ref().is_some_and(|wanted| wanted != name) {
            continue;
        }
        let law = match spec.compile() {
            Ok(law) => law,
            Err(problems) => {
                eprintln!("{name}: {problems:?}");
                continue;
            }
        };
        if only_kind.as_ref().is_none_or(|wanted| wanted == "sums") {
            time_sums(name, &law, budget);
        }
        if only_kind.as_ref().is_none_or(|wanted| wanted == "studentized") {
            time_studentized(name, &law, budget);
        }
    }
}

/// Number of values per sum or sample.
const N: u64 = 40;

fn time_sums(name: &str, law: &Law, draws: u64) {
    let method = Method { draws, ..Method::default() };
    let start = Instant::now();
    let spec = SumSpec::like_summands(law.clone(), N);
    let sum = SimulatedSum::build(&spec, &method, &[], "of a trial", &Work::new());
    let seconds = start.elapsed().as_secs_f64();
    if let Ok(sum) = sum {
        let values = (sum.draws().unwrap_or(0) * N) as f64;
        println!("{name}: sums of {N}: {:.1} million values per second", values / seconds / 1e6);
    }
}

fn time_studentized(name: &str, law: &Law, draws: u64) {
    let request = StudentizedRequest {
        statistic: Studentized::Mean { law, n: N },
        tail_probability: 0.025,
        shift: 0.0,
        draws,
        seed: 1,
        confidence: 0.999,
    };
    let start = Instant::now();
    let found = misses(&request, &|_: &Misses| false, &Work::new());
    let seconds = start.elapsed().as_secs_f64();
    if let Ok(found) = found {
        let values = (found.draws.unwrap_or(0) * N) as f64;
        println!(
            "{name}: studentized, {:.1} million values per second; covers {:.5} ± {:.5}, low {:.5}, high {:.5} ({:?})",
            values / seconds / 1e6,
            found.covered.value,
            found.covered.error,
            found.low.value,
            found.high.value,
            found.route,
        );
    }
}

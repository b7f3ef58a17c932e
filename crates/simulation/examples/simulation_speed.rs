//! Draws per second of the simulated sums and studentized statistics.
//!
//! `cargo run --release -p gaussgap-simulation --example simulation_speed [threads]`

use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::monte_carlo::{Misses, SimulatedSum, Studentized, StudentizedRequest, misses};
use gaussgap_simulation::sum::{Method, SumSpec};
use gaussgap_simulation::work::Work;
use std::time::Instant;

fn main() {
    let threads = std::env::args().nth(1).and_then(|text| text.parse().ok()).unwrap_or(1);
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
        ("capped lognormal", mostly_zero),
        ("5000 atoms", LawSpec::Table { weights: vec![1.0; counts.len()], values: counts }),
    ];
    for (name, spec) in laws {
        let law = match spec.compile() {
            Ok(law) => law,
            Err(problems) => {
                eprintln!("{name}: {problems:?}");
                continue;
            }
        };
        let n = 40;
        let method = Method { draws: 1_000_000, ..Method::default() };
        let start = Instant::now();
        let sum = SimulatedSum::build(
            &SumSpec::like_summands(law.clone(), n),
            &method,
            &[],
            "of a trial",
            &Work::new(),
        );
        let seconds = start.elapsed().as_secs_f64();
        if let Ok(sum) = sum {
            use gaussgap_simulation::sum::StandardizedSum;
            let draws = sum.draws().unwrap_or(0) as f64;
            println!(
                "{name}: sums of {n}: {:.1} million values per second",
                draws * n as f64 / seconds / 1e6
            );
        }
        let request = StudentizedRequest {
            statistic: Studentized::Mean { law: &law, n },
            tail_probability: 0.025,
            shift: 0.0,
            draws: 1_000_000,
            seed: 1,
            confidence: 0.999,
        };
        let start = Instant::now();
        let found = misses(&request, &|_: &Misses| false, &Work::new());
        let seconds = start.elapsed().as_secs_f64();
        if let Ok(found) = found {
            let draws = found.draws.unwrap_or(0) as f64;
            println!(
                "{name}: studentized, {:.1} million values per second; covers {:.5} ± {:.5}, low {:.5}, high {:.5} ({:?})",
                draws * n as f64 / seconds / 1e6,
                found.covered.value,
                found.covered.error,
                found.low.value,
                found.high.value,
                found.route,
            );
        }
    }
}

//! Time and peak memory of the exact routes over a growth grid: `cargo run --example sum_cost -- LAW…`.
//!
//! Each argument is `lomax:SHAPE:SCALE`, `capped-lomax:SHAPE:SCALE:CAP` or the name of a text file with one value
//! per line, taken as data. For each: Kolmogorov distance at every n up to 10, then ten per decade up to 10 000, on all
//! threads, then every n from 2 000 to 2 199.

use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::{Method, SumSpec, build_exact};
use gaussgap_simulation::work::Work;
use rayon::prelude::*;
use std::time::Instant;

fn peak_megabytes() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM"))?;
    line.split_whitespace().nth(1)?.parse::<f64>().ok().map(|kilobytes| kilobytes / 1024.0)
}

fn main() {
    for argument in std::env::args().skip(1) {
        let numbers: Vec<f64> = argument.split(':').filter_map(|word| word.parse().ok()).collect();
        let spec = match (argument.split(':').next(), &numbers[..]) {
            (Some("lomax"), &[shape, scale]) => LawSpec::Lomax { shape, scale },
            (Some("capped-lomax"), &[shape, scale, high]) => {
                LawSpec::Cap { law: Box::new(LawSpec::Lomax { shape, scale }), low: None, high: Some(high) }
            }
            _ => {
                let lines = std::fs::read_to_string(&argument).expect("a file of values");
                let values = lines.split_whitespace().map(|value| value.parse().expect("a number")).collect();
                LawSpec::Data { values: Some(values), path: None, column: None, tail: None }
            }
        };
        let law = spec.compile().expect("a valid law");
        let mut grid: Vec<u64> =
            (1..=10).chain((11..=40).map(|i| 10_f64.powf(f64::from(i) / 10.0).round() as u64)).collect();
        grid.dedup();
        println!("{}", argument.chars().take(70).collect::<String>());
        for (name, list) in [("grid", grid), ("every n", (2000..2200).collect())] {
            let start = Instant::now();
            let rows: Vec<(u64, f64, String)> = list
                .into_par_iter()
                .with_max_len(1)
                .map(|n| {
                    let start = Instant::now();
                    let sum = build_exact(
                        &SumSpec::like_summands(law.clone(), n),
                        &Method::default(),
                        &Work::new(),
                    );
                    let told = match sum {
                        Ok(sum) => {
                            let d = sum.kolmogorov().kolmogorov;
                            format!("{:.10} ± {:.1e} {}", d.value, d.error, sum.detail())
                        }
                        Err(error) => error.to_string(),
                    };
                    (n, start.elapsed().as_secs_f64(), told)
                })
                .collect();
            let took = start.elapsed().as_secs_f64();
            for (n, seconds, told) in rows.iter().filter(|row| row.0 % 100 == 0 || row.1 > 0.3 || row.0 < 3) {
                println!("  n = {n:5} {seconds:7.4} s  {told}");
            }
            println!("  {name}: {took:.3} s, peak {:.0} MB", peak_megabytes().unwrap_or(0.0));
        }
    }
}

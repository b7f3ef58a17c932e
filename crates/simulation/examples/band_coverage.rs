//! How often the stated bands of the simulations contain the truth, over 1 000 seeds.
//!
//! `cargo run --release -p gaussgap-simulation --example band_coverage [seeds]`
//!
//! Joint confidence 0.9 for everything asked; the bands are conservative, so more than 90 % must cover (less only
//! by three standard errors of the count).

use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::monte_carlo::{Misses, SimulatedSum, Studentized, StudentizedRequest, misses};
use gaussgap_simulation::special::gamma;
use gaussgap_simulation::sum::{Method, StandardizedSum, SumSpec};
use gaussgap_simulation::work::Work;

const PROBES: [f64; 9] = [-4.0, -3.0, -2.0, -1.0, 0.0, 1.0, 2.0, 3.0, 4.0];

fn main() {
    let seeds: u64 = std::env::args().nth(1).and_then(|text| text.parse().ok()).unwrap_or(1000);
    let within = |figure: Figure, value: f64| (figure.value - value).abs() <= figure.error;
    let exponential = LawSpec::Exponential { mean: 1.0 }.compile().expect("a valid law");
    // The sum of 30 exponentials has the gamma law; its distance to Φ is .024291 (SciPy, 5 digits).
    let n = 30u64;
    let root = (n as f64).sqrt();
    let mut covers = 0;
    for seed in 0..seeds {
        let method = Method { draws: 20_000, seed, confidence: 0.9, ..Method::default() };
        let spec = SumSpec::like_summands(exponential.clone(), n);
        let sum =
            SimulatedSum::build(&spec, &method, &PROBES, "of a trial", &Work::new()).expect("buildable");
        let all = PROBES.iter().chain(&[-2.2, -0.7, 0.1, 1.9, 2.9, 5.1]).all(|&z| {
            within(sum.at_or_below(z), gamma::below(n as f64, n as f64 + z * root))
                && within(sum.above(z), gamma::above(n as f64, n as f64 + z * root))
        }) && [0.001, 0.05, 0.5, 0.95, 0.999]
            .iter()
            .all(|&p| within(sum.quantile(p), (gamma::quantile(n as f64, p) - n as f64) / root))
            && within(sum.kolmogorov().kolmogorov, 0.024_291);
        covers += u32::from(all);
    }
    println!("sums: {covers} of {seeds} at joint confidence 0.9");
    // Student's t interval for the mean of 5 normal values, the law disguised as a mixture: exactly 0.025 on each side.
    let part =
        || gaussgap_simulation::law::MixturePart { weight: 1.0, law: LawSpec::Normal { mean: 0.0, sd: 1.0 } };
    let disguised = LawSpec::Mixture { parts: vec![part(), part()] }.compile().expect("a valid law");
    for (name, until) in [("whole budget", 0.0), ("stopping early", 0.012)] {
        let mut covers = 0;
        let mut simulated = 0;
        for seed in 0..seeds {
            let request = StudentizedRequest {
                statistic: Studentized::Mean { law: &disguised, n: 5 },
                tail_probability: 0.025,
                shift: 0.0,
                draws: 100_000,
                seed,
                confidence: 0.9,
            };
            // Stops as soon as the sides look unequal or are known well enough: peeking that would break a plain band.
            let decided = |m: &Misses| until > 0.0 && (m.low.value - m.high.value).abs() > 0.1 * until;
            let found = misses(&request, &decided, &Work::new()).expect("computable");
            simulated += u32::from(found.draws.is_some());
            covers += u32::from(
                within(found.low, 0.025) && within(found.high, 0.025) && within(found.covered, 0.95),
            );
        }
        println!("studentized, {name}: {covers} of {seeds} ({simulated} simulated) at joint confidence 0.9");
    }
}

//! Inverted sums against closed forms and high-precision references.

use super::*;
use crate::law::{LawSpec, MixturePart};

fn law(spec: LawSpec) -> crate::law::Law {
    spec.compile().expect("a valid law")
}

fn build(spec: LawSpec, n: u64) -> InversionSum {
    let spec = SumSpec::like_summands(law(spec), n);
    InversionSum::build(&spec, &Method::default(), &Work::new()).expect("invertible")
}

/// Checks a value against its reference and the stated error, and that the error is small.
fn check(name: &str, figure: Figure, reference: f64) {
    let wrong = (figure.value - reference).abs();
    assert!(figure.error <= 1e-9, "{name}: states {:.1e}", figure.error);
    assert!(
        wrong <= figure.error + 2e-16,
        "{name}: {} is {:.2e} off {reference}, states {:.1e}",
        figure.value,
        wrong,
        figure.error
    );
}

#[test]
fn uniform_sums_are_irwin_hall() {
    // Exact rationals of the Irwin–Hall law.
    let uniform = LawSpec::Uniform { low: 3.0, high: 5.0 };
    for (n, x, reference) in [
        (3_u64, 0.5, 1.0 / 48.0),
        (3, 1.0, 1.0 / 6.0),
        (4, 1.0, 1.0 / 24.0),
        (6, 2.0, 29.0 / 360.0),
        (12, 3.0, 397.0 / 394_240.0),
        (2, 0.5, 0.125),
        (2, 1.5, 0.875),
        (1, 0.3, 0.3),
    ] {
        let sum = build(uniform.clone(), n);
        let count = n as f64;
        let z = (x - 0.5 * count) / (count / 12.0).sqrt();
        println!(
            "n={n} {} err {:.1e} real {:.1e}",
            sum.detail(),
            sum.at_or_below(z).error,
            (sum.at_or_below(z).value - reference).abs()
        );
        check(&format!("Irwin–Hall {n} at {x}"), sum.at_or_below(z), reference);
    }
}
#[test]
fn exponential_sums_are_gamma() {
    for n in [1_u64, 2, 3, 4, 5, 10, 40, 1000, 1_000_000] {
        let started = std::time::Instant::now();
        let sum = build(LawSpec::Exponential { mean: 7.0 }, n);
        let took = started.elapsed();
        let mut worst: f64 = 0.0;
        for z in [-3.0, -1.0, -0.5, 0.0, 0.3, 1.0, 2.0, 4.0, 7.0] {
            let count = n as f64;
            let x = count + z * count.sqrt();
            let reference = if x > 0.0 { crate::special::gamma::below(count, x) } else { 0.0 };
            worst = worst.max((sum.at_or_below(z).value - reference).abs());
            check(&format!("gamma {n} at {z}"), sum.at_or_below(z), reference);
        }
        println!(
            "n={n} {took:?} {} err {:.1e} worst {worst:.1e} D {:?}",
            sum.detail(),
            sum.at_or_below(0.0).error,
            sum.kolmogorov()
        );
    }
}

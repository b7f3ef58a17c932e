//! The deformed contour against the 20-digit table of `references/contour.py`, and against laws known otherwise.

use super::*;
use crate::law::{LawSpec, MixturePart};
use crate::special::gamma;

const TABLE: &str = include_str!("../../../references/contour.txt");

fn named(name: &str) -> LawSpec {
    let lognormal = |log_mean, log_sd| LawSpec::Lognormal {
        log_mean: Some(log_mean),
        log_sd: Some(log_sd),
        mean: None,
        sd: None,
    };
    match name {
        "lomax2.3" => LawSpec::Lomax { shape: 2.3, scale: 1.0 },
        "lomax4.5" => LawSpec::Lomax { shape: 4.5, scale: 1.0 },
        "pareto3.2" => LawSpec::Pareto { shape: 3.2, minimum: 1.0 },
        "weibull0.7" => LawSpec::Weibull { shape: 0.7, scale: 1.0 },
        "weibull1.5" => LawSpec::Weibull { shape: 1.5, scale: 1.0 },
        "lognormal" => lognormal(0.0, 1.0),
        "boarding" => lognormal(0.0, (0.65f64 * 0.65).ln_1p().sqrt()),
        "exponential" => LawSpec::Exponential { mean: 1.0 },
        "spending" => LawSpec::Mixture {
            parts: vec![
                MixturePart { weight: 7.0, law: LawSpec::Constant { value: 0.0 } },
                MixturePart { weight: 3.0, law: lognormal(0.0, 1.0) },
            ],
        },
        _ => panic!("no law {name}"),
    }
}

fn built(law: &LawSpec, n: u64) -> ContourSum {
    let law = law.compile().expect("a valid law");
    ContourSum::build(&SumSpec::like_summands(law, n), &Method::default(), &Work::new())
        .unwrap_or_else(|e| panic!("{e} for n = {n}"))
}

fn assert_within(figure: Figure, expected: f64, real: f64, what: &str) -> f64 {
    let error = (figure.value - expected).abs();
    assert!(error <= figure.error, "{what}: {figure:?} against {expected:e}: {error:.2e}");
    assert!(error <= real, "{what}: real error {error:.2e}");
    assert!(figure.error <= 1e-9, "{what}: stated error {:.2e}", figure.error);
    error
}

fn check_against_table(name: &str) {
    let law = named(name);
    let (mut worst, mut stated, mut count) = (0.0f64, 0.0f64, 0);
    for n in [1, 2, 3, 5, 10, 40] {
        let mut sum = None;
        for line in TABLE.lines() {
            let words: Vec<&str> = line.split_whitespace().collect();
            if words[0] != name || words[1] != n.to_string() {
                continue;
            }
            let sum = sum.get_or_insert_with(|| built(&law, n));
            let number = |k: usize| words[k].parse::<f64>().expect("a number");
            if words[2] == "kolmogorov" {
                let figure = sum.kolmogorov().kolmogorov;
                worst = worst.max(assert_within(figure, number(3), 1e-11, line));
                stated = stated.max(figure.error);
                continue;
            }
            let z = number(2);
            for (figure, expected) in [
                (sum.at_or_below(z), number(3)),
                (sum.below(z), number(3)),
                (sum.above(z), number(4)),
                (sum.at_or_above(z), number(4)),
            ] {
                worst = worst.max(assert_within(figure, expected, 1e-11, line));
                stated = stated.max(figure.error);
            }
            count += 1;
        }
        if let Some(sum) = sum {
            println!("{name} n = {n}: {}", sum.detail());
        }
    }
    println!("{name}: {count} arguments, worst error {worst:.1e}, largest stated {stated:.1e}");
    assert!(count >= 12, "the table holds {count} rows for {name}");
}

#[test]
fn exponential() {
    check_against_table("exponential");
}

#[test]
fn lomax_with_infinite_third_moment() {
    check_against_table("lomax2.3");
}

#[test]
fn lomax_with_four_moments() {
    check_against_table("lomax4.5");
}

#[test]
fn pareto() {
    check_against_table("pareto3.2");
}

#[test]
fn weibull_with_singular_density() {
    check_against_table("weibull0.7");
}

#[test]
fn weibull_with_light_tail() {
    check_against_table("weibull1.5");
}

#[test]
fn lognormal() {
    check_against_table("lognormal");
}

#[test]
fn boarding_times() {
    check_against_table("boarding");
}

#[test]
fn mostly_zero_lognormal() {
    check_against_table("spending");
}

/// Both tails of sums of exponentials (gamma laws) with relative accuracy down to 1e-30.
#[test]
fn exponential_tails_keep_relative_accuracy() {
    for n in [1u64, 3, 10] {
        let sum = built(&named("exponential"), n);
        let shape = n as f64;
        for level in [1e-30, 1e-20, 1e-10, 1e-4, 0.3] {
            for x in [gamma::quantile(shape, level), gamma::quantile_above(shape, level)] {
                let z = (x - shape) / shape.sqrt();
                let x = shape + z * shape.sqrt();
                for (figure, expected) in
                    [(sum.at_or_below(z), gamma::below(shape, x)), (sum.above(z), gamma::above(shape, x))]
                {
                    let error = (figure.value - expected).abs();
                    // The argument's own rounding, which the lower end magnifies.
                    let rounding = 4.0 * f64::EPSILON * gamma::density(shape, x) * (x + shape);
                    assert!(error <= figure.error + rounding, "n = {n}, z = {z}: {figure:?}, {expected:e}");
                    if expected < 0.5 && x > 1e-3 {
                        assert!(error <= 1e-7 * expected, "n = {n}, z = {z}: {figure:?}, {expected:e}");
                    }
                }
            }
        }
    }
}

/// Reflecting the law reflects every answer.
#[test]
fn reflection() {
    let up = named("spending");
    let down = LawSpec::Affine { law: Box::new(up.clone()), add: 3.0, multiply: -2.0 };
    let (up, down) = (built(&up, 3), built(&down, 3));
    for z in [-1.2, -0.3, 0.4, 2.5] {
        assert!((up.at_or_below(z).value - down.at_or_above(-z).value).abs() < 1e-12);
        assert!((up.above(z).value - down.below(-z).value).abs() < 1e-12);
    }
    let jump = up.jumps(-10.0, 10.0, 5).expect("few jumps")[0];
    let mirrored = down.jumps(-10.0, 10.0, 5).expect("few jumps")[0];
    assert!((jump + mirrored).abs() < 1e-12);
    assert!((up.at_or_below(jump).value - 0.343).abs() < 1e-14);
    assert_eq!(up.below(jump).value, 0.0);
    assert!((down.at_or_above(mirrored).value - 0.343).abs() < 1e-14);
    assert_eq!(down.above(mirrored).value, 0.0);
    let (a, b) = (up.kolmogorov(), down.kolmogorov());
    assert!((a.kolmogorov.value - b.kolmogorov.value).abs() < 1e-12);
    assert!((a.at_z + b.at_z).abs() < 1e-6);
    for p in [0.2, 0.343, 0.5, 0.99] {
        let (q, r) = (up.quantile(p), down.quantile(1.0 - p));
        assert!((q.value + r.value).abs() <= q.error + r.error + 1e-12, "{p}: {q:?} {r:?}");
    }
}

/// Quantiles give back their probabilities, each within the other's error.
#[test]
fn quantiles_invert() {
    for (name, n) in [("lomax2.3", 1), ("lognormal", 3), ("weibull0.7", 2), ("exponential", 5)] {
        let sum = built(&named(name), n);
        for p in [1e-6, 0.01, 0.3, 0.5, 0.9, 0.999, 1.0 - 1e-7] {
            let z = sum.quantile(p);
            assert!(z.error < 1e-5 * (1.0 + z.value.abs()), "{name} {p}: {z:?}");
            let (low, high) = (sum.at_or_below(z.value - z.error), sum.at_or_below(z.value + z.error));
            assert!(
                low.value - low.error <= p && p <= high.value + high.error,
                "{name} {p}: {z:?} {low:?} {high:?}"
            );
        }
    }
    // n = 1: the law's own quantile.
    let sum = built(&named("lomax2.3"), 1);
    let law = named("lomax2.3").compile().expect("valid");
    let (mean, sd) = (law.mean().expect("finite"), law.sd().expect("finite"));
    for p in [0.001, 0.4, 0.95, 0.9999] {
        let (z, expected) = (sum.quantile(p), (law.quantile(p) - mean) / sd);
        assert!(
            (z.value - expected).abs() <= z.error + 1e-14 * (1.0 + expected.abs()),
            "{p}: {z:?} {expected}"
        );
    }
}

/// Unlike one-sided laws: an exponential and a gamma law with the same scale add up to a gamma law.
#[test]
fn unlike_terms() {
    let law = |spec: LawSpec| spec.compile().expect("valid");
    let spec = SumSpec {
        terms: vec![
            super::super::Term { law: law(LawSpec::Exponential { mean: 2.0 }), count: 2, multiply: 0.5 },
            super::super::Term {
                law: law(LawSpec::Gamma { shape: 0.4, scale: 1.0 }),
                count: 3,
                multiply: 1.0,
            },
        ],
    };
    let sum = ContourSum::build(&spec, &Method::default(), &Work::new()).expect("one-sided");
    let shape: f64 = 3.2;
    for z in [-1.5, -0.6, 0.0, 1.0, 4.0] {
        let expected = gamma::below(shape, shape + z * shape.sqrt());
        assert_within(sum.at_or_below(z), expected, 1e-12, &format!("{z}"));
    }
}

/// Scale and shift change nothing.
#[test]
fn scale_and_shift_do_not_matter() {
    let plain = built(&named("weibull0.7"), 2);
    let moved = LawSpec::Affine { law: Box::new(named("weibull0.7")), add: 1e4, multiply: 1e-3 };
    let moved = built(&moved, 2);
    for z in [-0.9, 0.0, 3.0] {
        let (a, b) = (plain.at_or_below(z), moved.at_or_below(z));
        assert!((a.value - b.value).abs() <= a.error + b.error, "{a:?} {b:?}");
    }
}

/// Laws that are not one-sided, or have atoms elsewhere, are refused with the reason.
#[test]
fn refusals_name_the_reason() {
    for spec in [
        LawSpec::Normal { mean: 0.0, sd: 1.0 },
        LawSpec::Bernoulli { p: 0.3 },
        LawSpec::Uniform { low: 0.0, high: 1.0 },
        LawSpec::Cap { law: Box::new(named("exponential")), low: None, high: Some(3.0) },
    ] {
        let law = spec.compile().expect("valid");
        let result = ContourSum::build(&SumSpec::like_summands(law, 2), &Method::default(), &Work::new());
        assert!(matches!(result, Err(SumError::NotAvailable { route: Route::Inversion, .. })), "{spec:?}");
    }
    let work = Work::new();
    work.cancel();
    let law = named("lomax4.5").compile().expect("valid");
    let result = ContourSum::build(&SumSpec::like_summands(law, 2), &Method::default(), &work);
    assert!(matches!(result, Err(SumError::Cancelled(_))));
}

/// Extreme arguments give numbers, never panics.
#[test]
fn extreme_arguments() {
    let sum = built(&named("lomax2.3"), 2);
    for z in [f64::NEG_INFINITY, -1e300, -1.0, sum.end, 1e3, 9e3, 1e5, 1e300, f64::INFINITY] {
        let (lower, upper) = (sum.at_or_below(z), sum.above(z));
        assert!((0.0..=1.0).contains(&lower.value) && (0.0..=1.0).contains(&upper.value), "{z}");
        assert!((lower.value + upper.value - 1.0).abs() < 1e-9, "{z}: {lower:?} {upper:?}");
        assert!(lower.error <= 1e-8 && upper.error <= 1e-8, "{z}: {lower:?} {upper:?}");
    }
}

/// One summand of many laws: the law's own distribution function, which shares nothing with the contour. Laws whose
/// density may not be turned far enough are refused, the others keep their stated errors.
#[test]
fn one_summand_of_many_laws() {
    let lognormal =
        |log_sd| LawSpec::Lognormal { log_mean: Some(0.0), log_sd: Some(log_sd), mean: None, sd: None };
    let mixture = |parts: Vec<(f64, LawSpec)>| LawSpec::Mixture {
        parts: parts.into_iter().map(|(weight, law)| MixturePart { weight, law }).collect(),
    };
    let exponential = |mean| LawSpec::Exponential { mean };
    let zero = || LawSpec::Constant { value: 0.0 };
    let mut laws = vec![
        mixture(vec![(0.2, exponential(1.0)), (0.8, exponential(30.0))]),
        mixture(vec![(0.999, zero()), (0.001, LawSpec::Lomax { shape: 2.5, scale: 3.0 })]),
        mixture(vec![(0.5, exponential(1.0)), (0.5, LawSpec::Lomax { shape: 3.0, scale: 1.0 })]),
        mixture(vec![(1e-3, zero()), (1.0, LawSpec::Weibull { shape: 0.5, scale: 1.0 })]),
        LawSpec::Restrict {
            law: Box::new(LawSpec::Lomax { shape: 3.0, scale: 1.0 }),
            low: Some(0.5),
            high: None,
        },
        LawSpec::Restrict { law: Box::new(lognormal(1.0)), low: Some(2.0), high: None },
        LawSpec::Cap {
            law: Box::new(LawSpec::Weibull { shape: 1.4, scale: 1.0 }),
            low: Some(0.3),
            high: None,
        },
        LawSpec::GeneralizedPareto { threshold: 2.0, scale: 1.5, shape: 0.2 },
    ];
    laws.extend([2.01, 2.5, 4.0, 10.0, 60.0].map(|shape| LawSpec::Lomax { shape, scale: 1.0 }));
    laws.extend([0.3, 0.5, 0.9, 1.2, 1.9, 3.0].map(|shape| LawSpec::Weibull { shape, scale: 1.0 }));
    laws.extend([0.15, 0.3, 0.6, 1.3, 2.0].map(lognormal));
    laws.extend([0.05, 0.4, 1.7, 6.0].map(|shape| LawSpec::Gamma { shape, scale: 1.0 }));
    laws.extend([0.1, 2.0].map(|shape| LawSpec::InverseGaussian { mean: 1.0, shape }));
    let mut refused = Vec::new();
    for spec in &laws {
        let law = spec.compile().expect("valid");
        let (mean, sd) = (law.mean().expect("finite"), law.sd().expect("finite"));
        let sum = match ContourSum::build(
            &SumSpec::like_summands(law.clone(), 1),
            &Method::default(),
            &Work::new(),
        ) {
            Ok(sum) => sum,
            Err(error) => {
                println!("refused {spec:?}: {error}");
                refused.push(spec.clone());
                continue;
            }
        };
        let mut stated = 0.0f64;
        for level in [1e-12, 1e-6, 1e-3, 0.1, 0.3, 0.5, 0.8, 0.97, 0.999, 1.0 - 1e-6, 1.0 - 1e-10] {
            let z = (law.quantile(level) - mean) / sd;
            let x = mean + sd * z;
            // Nearer to a singular end the rounding of z itself moves probability, and the figure says so.
            if z - sum.end < 1e-3 {
                continue;
            }
            for (figure, expected, what) in [
                (sum.at_or_below(z), law.at_or_below(x), "at or below"),
                (sum.below(z), law.below(x), "below"),
                (sum.above(z), law.above(x), "above"),
            ] {
                let error = (figure.value - expected).abs();
                // The rounding of x, which the law's density turns into probability, and the law's own error.
                let rounding = 4.0 * f64::EPSILON * (mean.abs() + x.abs());
                let slack = 1e-15 + law.at_or_below(x + rounding) - law.at_or_below(x - rounding);
                let allowed = figure.error + if sum.at_end(z) { 1.0 } else { slack };
                assert!(
                    error <= allowed,
                    "{spec:?} {what} {level}: {figure:?} against {expected:e} ({error:.1e})"
                );
                stated = stated.max(figure.error);
            }
        }
        println!("{stated:.1e} {} {spec:?}", sum.detail());
        assert!(stated <= 1e-10, "{spec:?} {stated:e}");
    }
    assert!(refused.len() <= 5, "{refused:?}");
}

/// Many summands, where Fourier inversion would do as well: exponentials against the gamma law.
#[test]
fn many_summands() {
    for n in [200u64, 5_000] {
        let sum = built(&named("exponential"), n);
        let (shape, root) = (n as f64, (n as f64).sqrt());
        for z in [-6.0, -3.0, -0.5, 0.0, 1.0, 3.5, 7.0] {
            let x = shape + z * root;
            let what = format!("n = {n}, z = {z}");
            assert_within(sum.at_or_below(z), gamma::below(shape, x), 1e-10, &what);
            assert_within(sum.above(z), gamma::above(shape, x), 1e-10, &what);
        }
        println!("n = {n}: {}", sum.detail());
    }
}

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
        check(&format!("Irwin–Hall {n} at {x}"), sum.at_or_below(z), reference);
    }
}
#[test]
fn exponential_sums_are_gamma() {
    for n in [1_u64, 2, 3, 4, 5, 10, 40, 1000, 1_000_000] {
        let sum = build(LawSpec::Exponential { mean: 7.0 }, n);
        for z in [-3.0, -1.0, -0.5, 0.0, 0.3, 1.0, 2.0, 4.0, 7.0] {
            let count = n as f64;
            let x = count + z * count.sqrt();
            let reference = if x > 0.0 { crate::special::gamma::below(count, x) } else { 0.0 };
            check(&format!("gamma {n} at {z}"), sum.at_or_below(z), reference);
        }
    }
}

#[test]
fn distances_agree_with_independent_figures() {
    // Re-derived with SciPy: exponential and Irwin–Hall Kolmogorov distances, five and three digits.
    for (n, reference) in
        [(1, 0.158655), (2, 0.094463), (5, 0.059629), (10, 0.042114), (30, 0.024291), (100, 0.013300)]
    {
        let distance = build(LawSpec::Exponential { mean: 0.1 }, n).kolmogorov();
        assert!((distance.kolmogorov.value - reference).abs() < 1.1e-6, "{n}: {distance:?}");
    }
    for (n, reference) in [(2, 0.01643), (3, 0.00985), (4, 0.00738), (12, 0.00234)] {
        let distance = build(LawSpec::Uniform { low: 0.0, high: 1.0 }, n).kolmogorov();
        assert!((distance.kolmogorov.value - reference).abs() < 6e-6, "{n}: {distance:?}");
    }
}

/// Law name, n, x in the law's units, P(S ≤ x): see `references/inversion.py`.
const REFERENCES: &[(&str, u64, f64, f64)] = include!("../../../references/inversion_table.rs");

fn zeros(share: f64, law: LawSpec) -> LawSpec {
    LawSpec::Mixture {
        parts: vec![
            MixturePart { weight: share, law: LawSpec::Constant { value: 0.0 } },
            MixturePart { weight: 1.0 - share, law },
        ],
    }
}

fn named(name: &str) -> LawSpec {
    match name {
        "zero-exponential" => zeros(0.7, LawSpec::Exponential { mean: 1.0 }),
        "zero-normal" => zeros(0.9, LawSpec::Normal { mean: 3.0, sd: 1.0 }),
        "zero-uniform" => zeros(0.6, LawSpec::Uniform { low: 0.0, high: 1.0 }),
        "normal-mixture" => LawSpec::Mixture {
            parts: vec![
                MixturePart { weight: 0.3, law: LawSpec::Normal { mean: 0.0, sd: 0.1 } },
                MixturePart { weight: 0.7, law: LawSpec::Normal { mean: 2.0, sd: 1.0 } },
            ],
        },
        "capped-exponential" => {
            LawSpec::Cap { law: Box::new(LawSpec::Exponential { mean: 1.0 }), low: None, high: Some(2.0) }
        }
        "lomax-2.3" => LawSpec::Lomax { shape: 2.3, scale: 1.0 },
        "lomax-4.5" => LawSpec::Lomax { shape: 4.5, scale: 1.0 },
        "lognormal-brute" => {
            LawSpec::Lognormal { log_mean: Some(0.0), log_sd: Some(1.0), mean: None, sd: None }
        }
        "capped-lomax-brute" => LawSpec::Cap {
            law: Box::new(LawSpec::Lomax { shape: 1.5, scale: 1.0 }),
            low: None,
            high: Some(50.0),
        },
        other => panic!("no law {other}"),
    }
}

#[test]
fn sums_agree_with_the_references() {
    let mut laws: Vec<(&str, crate::law::Law)> = Vec::new();
    let mut last: Option<(&str, u64, Option<InversionSum>)> = None;
    let mut checked = 0;
    for (name, n, x, reference) in REFERENCES {
        if !laws.iter().any(|l| l.0 == *name) {
            laws.push((name, law(named(name))));
        }
        let law = &laws.iter().find(|l| l.0 == *name).expect("just added").1;
        if last.as_ref().is_none_or(|l| l.0 != *name || l.1 != *n) {
            let spec = SumSpec::like_summands(law.clone(), *n);
            let sum = InversionSum::build(&spec, &Method::default(), &Work::new());
            // Three summands with a heavy tail are left to the deformed contour.
            assert!(sum.is_ok() || (name.starts_with("lomax") && *n == 3), "{name} n={n}: {:?}", sum.err());
            last = Some((name, *n, sum.ok()));
        }
        let Some((_, _, Some(sum))) = &last else { continue };
        let moments = sum.moments();
        let figure = sum.at_or_below((x - moments.mean) / moments.sd);
        let slack = if name.ends_with("brute") { 2e-12 } else { 3e-16 };
        let wrong = (figure.value - reference).abs();
        assert!(wrong <= figure.error + slack, "{name} n={n} x={x}: {figure:?} but {reference}");
        assert!(wrong <= 5e-11, "{name} n={n} x={x}: {figure:?} but {reference}");
        checked += 1;
    }
    assert!(checked > 150, "{checked} references checked");
}

fn other_laws() -> Vec<(&'static str, LawSpec)> {
    vec![
        ("weibull 0.7", LawSpec::Weibull { shape: 0.7, scale: 2.0 }),
        ("weibull 10", LawSpec::Weibull { shape: 10.0, scale: 2.0 }),
        ("gamma 100", LawSpec::Gamma { shape: 100.0, scale: 2.0 }),
        ("gamma 0.1", LawSpec::Gamma { shape: 0.1, scale: 2.0 }),
        ("student 3", LawSpec::StudentT { df: 3.0, location: None, scale: None }),
        ("student 5", LawSpec::StudentT { df: 5.0, location: None, scale: None }),
        ("laplace", LawSpec::Laplace { mean: 1.0, scale: 2.0 }),
        ("logistic", LawSpec::Logistic { mean: 1.0, scale: 2.0 }),
        ("triangular", LawSpec::Triangular { low: 0.0, mode: 1.0, high: 5.0 }),
        ("beta .5 .5", LawSpec::Beta { a: 0.5, b: 0.5, low: None, high: None }),
        ("beta 2 5", LawSpec::Beta { a: 2.0, b: 5.0, low: None, high: None }),
        ("inverse gaussian", LawSpec::InverseGaussian { mean: 1.0, shape: 0.5 }),
        ("histogram", LawSpec::Histogram { edges: vec![0.0, 1.0, 3.0, 4.0], weights: vec![1.0, 4.0, 2.0] }),
        (
            "capped normal",
            LawSpec::Cap {
                law: Box::new(LawSpec::Normal { mean: 0.0, sd: 1.0 }),
                low: Some(-1.0),
                high: Some(2.0),
            },
        ),
        (
            "restricted lognormal",
            LawSpec::Restrict {
                law: Box::new(LawSpec::Lognormal {
                    log_mean: Some(0.0),
                    log_sd: Some(1.5),
                    mean: None,
                    sd: None,
                }),
                low: Some(0.5),
                high: Some(100.0),
            },
        ),
        ("formula", LawSpec::Formula { density: "x*(3-x)".to_owned(), low: 0.0, high: 3.0 }),
    ]
}

#[test]
fn ends_agree_with_quadrature_on_the_axis() {
    for (name, spec) in other_laws().into_iter().filter(|l| !l.0.starts_with("student")) {
        let transform = transform::SummandTransform::new(&law(spec)).expect("finite variance");
        for t in [0.3, 1.01, 1.7, 5.0, 19.0] {
            let value = transform.split(t);
            let twin = transform.continuous_on_the_axis(t);
            let wrong = (value.continuous - twin).norm();
            // The twin itself is good to 1e-14.
            assert!(wrong <= value.error + 1e-14, "{name} t = {t}: {wrong:.1e}, states {:.1e}", value.error);
        }
    }
}

#[test]
fn student_transform_with_three_degrees_is_known() {
    // e^{−t}(1 + t) in units of 1/sd: the two halves of the law cancel to it.
    let law = law(LawSpec::StudentT { df: 3.0, location: Some(2.0), scale: Some(0.3) });
    let transform = transform::SummandTransform::new(&law).expect("finite variance");
    for t in [1e-3_f64, 0.1, 0.6, 1.5, 4.0, 10.0, 25.0] {
        let value = transform.split(t);
        let known = (-t).exp() * (1.0 + t);
        let wrong = (value.continuous - known).norm();
        assert!(
            wrong <= value.error + 1e-16 && value.error < 1e-12,
            "{t}: {wrong:.1e}, states {:.1e}",
            value.error
        );
    }
}

#[test]
fn other_laws_build() {
    for (name, spec) in other_laws() {
        let law = law(spec);
        for n in [1_u64, 8, 40] {
            let sum = InversionSum::build(
                &SumSpec::like_summands(law.clone(), n),
                &Method::default(),
                &Work::new(),
            );
            // A singular density leaves too slow a decay at small numbers of summands.
            let Ok(sum) = sum else {
                assert!(name == "gamma 0.1" && n == 8, "{name} n={n}: {:?}", sum.err());
                continue;
            };
            let distance = sum.kolmogorov();
            assert!(
                distance.kolmogorov.error < 1e-10 && distance.kolmogorov.value > 1e-4,
                "{name} {n}: {distance:?}"
            );
            let mut last = 0.0;
            for k in -80..=80 {
                let figure = sum.at_or_below(f64::from(k) * 0.1);
                assert!(figure.value >= last - 2.0 * figure.error, "{name} {n} falls at {k}");
                last = figure.value;
            }
        }
    }
}

#[test]
fn unlike_parts_and_differences() {
    // Normal + uniform, by convolution in closed form: P(U + N ≤ x) with U on (0, 1), N standard:
    // G(x) − G(x − 1), G(x) = xΦ(x) + φ(x).
    use crate::special::normal;
    use crate::sum::Term;
    let spec = SumSpec {
        terms: vec![
            Term { law: law(LawSpec::Uniform { low: 0.0, high: 1.0 }), count: 1, multiply: -1.0 },
            Term { law: law(LawSpec::Normal { mean: 5.0, sd: 2.0 }), count: 1, multiply: 0.5 },
        ],
    };
    let sum = InversionSum::build(&spec, &Method::default(), &Work::new()).expect("invertible");
    let (mean, sd) = (2.0, (1.0 + 1.0_f64 / 12.0).sqrt());
    let g = |x: f64| x * normal::at_or_below(x) + normal::density(x);
    for z in [-3.0, -1.0, 0.0, 0.5, 2.0] {
        // 0.5 N − U = 2.5 + Z − U, and 1 − U is uniform: 1.5 + Z + U′.
        let x = mean + z * sd - 1.5;
        check("normal and uniform", sum.at_or_below(z), g(x) - g(x - 1.0));
    }
    // The difference of two means of one skewed law with equal numbers is symmetric.
    let skewed =
        law(zeros(0.7, LawSpec::Lognormal { log_mean: Some(0.0), log_sd: Some(1.0), mean: None, sd: None }));
    let spec = SumSpec {
        terms: vec![
            Term { law: skewed.clone(), count: 60, multiply: -1.0 / 60.0 },
            Term { law: skewed, count: 60, multiply: 1.0 / 60.0 },
        ],
    };
    let sum = InversionSum::build(&spec, &Method::default(), &Work::new()).expect("invertible");
    for z in [0.0, 0.5, 2.0] {
        let (below, above) = (sum.at_or_below(-z), sum.at_or_above(z));
        assert!((below.value - above.value).abs() <= below.error + above.error, "{z}: {below:?} {above:?}");
    }
}

#[test]
fn jumps_quantiles_and_shifts() {
    let spec = zeros(0.7, LawSpec::Exponential { mean: 1.0 });
    let sum = build(spec.clone(), 5);
    let moments = sum.moments();
    let z = -moments.mean / moments.sd;
    // All five are zero with probability 0.7⁵.
    let jump = sum.at_or_below(z).value - sum.below(z).value;
    assert!((jump - 0.7_f64.powi(5)).abs() < 2.0 * sum.below(z).error, "{jump}");
    assert_eq!(sum.jumps(-8.0, 8.0, 10).map(|j| j.len()), Some(1));
    assert!((sum.quantile(0.1).value - z).abs() < 1e-9);
    let quantile = sum.quantile(0.9);
    assert!(
        (sum.at_or_below(quantile.value).value - 0.9).abs() < 1e-10 && quantile.error < 1e-8,
        "{quantile:?}"
    );
    let moved = build(LawSpec::Affine { law: Box::new(spec), add: -3.0, multiply: -0.5 }, 5);
    for z in [-2.0, -0.5, 0.1, 1.0, 3.0] {
        let (one, other) = (sum.below(z), moved.at_or_above(-z));
        assert!((one.value - other.value).abs() <= one.error + other.error + 1e-14, "{z}: {one:?} {other:?}");
    }
}

//! The list of laws the harness runs over; a test keeps it complete.

use crate::law::{LawSpec, MixturePart};

fn boxed(spec: LawSpec) -> Box<LawSpec> {
    Box::new(spec)
}

/// A lognormal law by its logarithm.
pub(super) fn lognormal(log_mean: f64, log_sd: f64) -> LawSpec {
    LawSpec::Lognormal { log_mean: Some(log_mean), log_sd: Some(log_sd), mean: None, sd: None }
}

/// A mixture of two laws.
pub(super) fn mixture(weight: f64, law: LawSpec, other_weight: f64, other: LawSpec) -> LawSpec {
    LawSpec::Mixture {
        parts: vec![MixturePart { weight, law }, MixturePart { weight: other_weight, law: other }],
    }
}

/// Names and laws; names that occur in `references/laws.txt` are compared with it.
pub(super) fn all() -> Vec<(&'static str, LawSpec)> {
    let student = |df| LawSpec::StudentT { df, location: None, scale: None };
    let beta = |a, b| LawSpec::Beta { a, b, low: None, high: None };
    let gpd = |shape| LawSpec::GeneralizedPareto { threshold: 1.0, scale: 2.0, shape };
    let cap = |law, low, high| LawSpec::Cap { law: boxed(law), low, high };
    let restrict = |law, low, high| LawSpec::Restrict { law: boxed(law), low, high };
    let geometric = LawSpec::Geometric { p: 0.3 };
    vec![
        ("constant", LawSpec::Constant { value: 3.5 }),
        ("bernoulli", LawSpec::Bernoulli { p: 0.3 }),
        ("bernoulli-rare", LawSpec::Bernoulli { p: 1e-12 }),
        ("binomial-20-0.3", LawSpec::Binomial { trials: 20, p: 0.3 }),
        ("binomial-long", LawSpec::Binomial { trials: 100_000, p: 0.02 }),
        ("poisson-2.5", LawSpec::Poisson { rate: 2.5 }),
        ("poisson-rare", LawSpec::Poisson { rate: 1e-9 }),
        ("geometric-0.2", LawSpec::Geometric { p: 0.2 }),
        ("negative-binomial-2.5-0.4", LawSpec::NegativeBinomial { size: 2.5, p: 0.4 }),
        ("discrete-uniform", LawSpec::DiscreteUniform { low: -2, high: 7 }),
        ("table", LawSpec::Table { values: vec![0.1, 0.25, 250.0, 0.1], weights: vec![1.0, 2.0, 3.0, 4.0] }),
        (
            "data",
            LawSpec::Data { values: Some(vec![3.0, 1.5, 1.5, 9.25]), path: None, column: None, tail: None },
        ),
        ("histogram", LawSpec::Histogram { edges: vec![0.0, 1.0, 3.0, 4.5], weights: vec![5.0, 2.0, 1.0] }),
        ("normal", LawSpec::Normal { mean: -3.0, sd: 2.0 }),
        ("uniform", LawSpec::Uniform { low: -1.0, high: 5.0 }),
        ("exponential", LawSpec::Exponential { mean: 4.0 }),
        ("gamma-0.3", LawSpec::Gamma { shape: 0.3, scale: 2.0 }),
        ("gamma-40", LawSpec::Gamma { shape: 40.0, scale: 1.0 }),
        ("gamma-large", LawSpec::Gamma { shape: 2e5, scale: 1.0 }),
        ("weibull-0.7", LawSpec::Weibull { shape: 0.7, scale: 1.0 }),
        ("weibull-3", LawSpec::Weibull { shape: 3.0, scale: 1.0 }),
        ("weibull-30", LawSpec::Weibull { shape: 30.0, scale: 1.0 }),
        ("lognormal", lognormal(0.0, 1.0)),
        (
            "lognormal-mean-sd",
            LawSpec::Lognormal { log_mean: None, log_sd: None, mean: Some(48.0), sd: Some(31.0) },
        ),
        ("lognormal-wide", lognormal(1.0, 2.5)),
        ("lomax-2.3", LawSpec::Lomax { shape: 2.3, scale: 1.0 }),
        ("lomax-3.2", LawSpec::Lomax { shape: 3.2, scale: 1.0 }),
        ("lomax-4.5", LawSpec::Lomax { shape: 4.5, scale: 1.0 }),
        ("pareto-3.2", LawSpec::Pareto { shape: 3.2, minimum: 2.0 }),
        ("generalized-pareto-0.2", gpd(0.2)),
        ("generalized-pareto-0", gpd(0.0)),
        ("generalized-pareto--0.3", gpd(-0.3)),
        ("beta-0.4-0.7", beta(0.4, 0.7)),
        ("beta-2-5", beta(2.0, 5.0)),
        ("beta-3-0.5", LawSpec::Beta { a: 3.0, b: 0.5, low: Some(-1.0), high: Some(1.0) }),
        ("triangular", LawSpec::Triangular { low: 1.0, mode: 2.0, high: 9.0 }),
        ("laplace", LawSpec::Laplace { mean: 1.0, scale: 2.0 }),
        ("logistic", LawSpec::Logistic { mean: 0.0, scale: 1.0 }),
        ("student-3.5", student(3.5)),
        ("student-7", student(7.0)),
        ("student-300", student(300.0)),
        ("inverse-gaussian", LawSpec::InverseGaussian { mean: 2.0, shape: 3.0 }),
        ("inverse-gaussian-narrow", LawSpec::InverseGaussian { mean: 1.0, shape: 400.0 }),
        ("formula", LawSpec::Formula { density: "x*exp(-x)".into(), low: 0.0, high: 8.0 }),
        (
            "formula-kinked",
            LawSpec::Formula { density: "2 + abs(sin(3*x)) - x^2/10".into(), low: -1.0, high: 4.0 },
        ),
        ("formula-singular", LawSpec::Formula { density: "1/sqrt(x)".into(), low: 0.0, high: 4.0 }),
        ("mostly-zero", mixture(7.0, LawSpec::Constant { value: 0.0 }, 3.0, lognormal(3.0, 0.8))),
        (
            "affine",
            LawSpec::Affine {
                law: boxed(LawSpec::Gamma { shape: 2.5, scale: 1.0 }),
                add: 3.0,
                multiply: -2.0,
            },
        ),
        ("lognormal-capped", cap(lognormal(0.0, 1.0), Some(0.5), Some(5.0))),
        ("student-2.5-capped", cap(student(2.5), Some(-10.0), Some(10.0))),
        ("logistic-capped", cap(LawSpec::Logistic { mean: 0.0, scale: 1.0 }, None, Some(2.0))),
        ("normal-above-3", restrict(LawSpec::Normal { mean: 0.0, sd: 1.0 }, Some(3.0), None)),
        ("normal-far", restrict(LawSpec::Normal { mean: 0.0, sd: 1.0 }, Some(12.0), Some(13.0))),
        ("lomax-inside", restrict(LawSpec::Lomax { shape: 1.1, scale: 1.0 }, Some(0.2), Some(50.0))),
        ("exponential-rounded", LawSpec::Round { law: boxed(LawSpec::Exponential { mean: 2.0 }), step: 0.5 }),
        (
            "compound-exponential",
            LawSpec::Compound {
                count: boxed(LawSpec::Poisson { rate: 2.0 }),
                each: boxed(LawSpec::Exponential { mean: 1.0 }),
            },
        ),
        (
            "compound-geometric",
            LawSpec::Compound { count: boxed(LawSpec::Poisson { rate: 3.0 }), each: boxed(geometric) },
        ),
        (
            "nested",
            cap(
                mixture(
                    1.0,
                    LawSpec::Round { law: boxed(LawSpec::Gamma { shape: 3.0, scale: 2.0 }), step: 1.0 },
                    2.0,
                    mixture(
                        1.0,
                        LawSpec::Normal { mean: 5.0, sd: 0.5 },
                        1.0,
                        LawSpec::Constant { value: 4.0 },
                    ),
                ),
                Some(2.0),
                Some(6.0),
            ),
        ),
    ]
}

#[test]
fn every_kind_of_law_is_in_the_list() {
    let schema = serde_json_text();
    let present: Vec<String> = all().iter().map(|(_, spec)| format!("{spec:?}")).collect();
    for kind in kinds(&schema) {
        // `student-t` is the variant StudentT, and so on.
        let variant: String = kind.split('-').map(|word| word[..1].to_uppercase() + &word[1..]).collect();
        assert!(
            present.iter().any(|text| text.contains(&format!("{variant} "))),
            "no case of kind {kind} ({variant})"
        );
    }
}

/// The JSON Schema of laws, as text.
fn serde_json_text() -> String {
    format!("{:?}", schemars::schema_for!(LawSpec).as_value())
}

/// The constants of `kind` in the schema that belong to laws.
fn kinds(schema: &str) -> Vec<String> {
    let mut kinds: Vec<String> = schema
        .split("\"const\": String(\"")
        .skip(1)
        .filter_map(|rest| rest.split('"').next())
        .map(str::to_owned)
        .collect();
    kinds.sort();
    kinds.dedup();
    assert!(kinds.len() >= 32, "the schema lists {kinds:?}");
    kinds
}

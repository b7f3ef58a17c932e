//! The list of laws and steps a card can be, with starting parameters that keep the mean and spread at hand.

use gaussgap_simulation::law::{LawSpec, MixturePart};

/// Base laws: the scenario name and the name in words.
pub const BASES: [(&str, &str); 28] = [
    ("bernoulli", "Bernoulli"),
    ("binomial", "Binomial"),
    ("poisson", "Poisson"),
    ("geometric", "Geometric"),
    ("negative-binomial", "Negative binomial"),
    ("discrete-uniform", "Discrete uniform"),
    ("table", "Table of values"),
    ("data", "Pilot data (CSV)"),
    ("histogram", "Histogram"),
    ("constant", "Constant"),
    ("normal", "Normal"),
    ("uniform", "Uniform"),
    ("exponential", "Exponential"),
    ("gamma", "Gamma"),
    ("weibull", "Weibull"),
    ("lognormal", "Lognormal"),
    ("inverse-gaussian", "Inverse Gaussian"),
    ("lomax", "Lomax"),
    ("pareto", "Pareto"),
    ("generalized-pareto", "Generalized Pareto"),
    ("beta", "Beta"),
    ("triangular", "Triangular"),
    ("laplace", "Laplace"),
    ("logistic", "Logistic"),
    ("student-t", "Student t"),
    ("formula", "Formula"),
    ("mixture", "Mixture"),
    ("compound", "Random number of …"),
];

/// Steps done to a law: the name used by [`step`] and the name in words.
pub const STEPS: [(&str, &str); 5] = [
    ("cap", "Capped"),
    ("mostly-zero", "Mostly zero"),
    ("affine", "Scaled and shifted"),
    ("restrict", "Restricted to a range"),
    ("round", "Rounded"),
];

/// The scenario name of a law.
pub fn kind(law: &LawSpec) -> &'static str {
    match law {
        LawSpec::Constant { .. } => "constant",
        LawSpec::Bernoulli { .. } => "bernoulli",
        LawSpec::Binomial { .. } => "binomial",
        LawSpec::Poisson { .. } => "poisson",
        LawSpec::Geometric { .. } => "geometric",
        LawSpec::NegativeBinomial { .. } => "negative-binomial",
        LawSpec::DiscreteUniform { .. } => "discrete-uniform",
        LawSpec::Table { .. } => "table",
        LawSpec::Data { .. } => "data",
        LawSpec::Histogram { .. } => "histogram",
        LawSpec::Normal { .. } => "normal",
        LawSpec::Uniform { .. } => "uniform",
        LawSpec::Exponential { .. } => "exponential",
        LawSpec::Gamma { .. } => "gamma",
        LawSpec::Weibull { .. } => "weibull",
        LawSpec::Lognormal { .. } => "lognormal",
        LawSpec::Lomax { .. } => "lomax",
        LawSpec::Pareto { .. } => "pareto",
        LawSpec::GeneralizedPareto { .. } => "generalized-pareto",
        LawSpec::Beta { .. } => "beta",
        LawSpec::Triangular { .. } => "triangular",
        LawSpec::Laplace { .. } => "laplace",
        LawSpec::Logistic { .. } => "logistic",
        LawSpec::StudentT { .. } => "student-t",
        LawSpec::InverseGaussian { .. } => "inverse-gaussian",
        LawSpec::Formula { .. } => "formula",
        LawSpec::Mixture { .. } => "mixture",
        LawSpec::Affine { .. } => "affine",
        LawSpec::Cap { .. } => "cap",
        LawSpec::Restrict { .. } => "restrict",
        LawSpec::Round { .. } => "round",
        LawSpec::Compound { .. } => "compound",
    }
}

/// The name of a law in words.
pub fn title(law: &LawSpec) -> &'static str {
    if super::law_tree::mostly_zero(law).is_some() {
        return "Mostly zero";
    }
    let kind = kind(law);
    BASES.iter().chain(&STEPS).find(|(name, _)| *name == kind).map_or("Law", |(_, words)| words)
}

/// What is known of the law being replaced, so that the new one starts near it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Near {
    /// Its mean.
    pub mean: f64,
    /// Its sd, positive.
    pub sd: f64,
}

impl Near {
    /// Usable figures from what a report states.
    pub fn new(mean: Option<f64>, sd: Option<f64>) -> Self {
        let sd = sd.filter(|sd| *sd > 0.0 && sd.is_finite()).unwrap_or(1.0);
        let mean = mean.filter(|mean| mean.is_finite()).unwrap_or(1.0);
        Self { mean, sd }
    }
}

/// A base law of a kind, with starting parameters: the same mean and spread where the family can have them,
/// rounded to three digits.
pub fn base(kind: &str, near: Near) -> LawSpec {
    let Near { mean, sd } = near;
    let r = |value: f64| round_to(value, 3);
    let positive = if mean > 0.0 { mean } else { sd };
    let ratio = (positive / sd).clamp(1e-3, 1e3);
    match kind {
        "constant" => LawSpec::Constant { value: r(mean) },
        "bernoulli" => LawSpec::Bernoulli { p: 0.1 },
        "binomial" => LawSpec::Binomial { trials: 10, p: 0.1 },
        "poisson" => LawSpec::Poisson { rate: r(positive.min(1e6)) },
        "geometric" => LawSpec::Geometric { p: r(1.0 / (1.0 + positive)) },
        "negative-binomial" => LawSpec::NegativeBinomial { size: 2.0, p: r(2.0 / (2.0 + positive)) },
        "discrete-uniform" => LawSpec::DiscreteUniform { low: 1, high: 6 },
        "table" => LawSpec::Table { values: vec![0.0, 1.0, 4.0], weights: vec![6.0, 3.0, 1.0] },
        "data" => LawSpec::Data { values: Some(vec![0.0, 1.0]), path: None, column: None, tail: None },
        "histogram" => LawSpec::Histogram {
            edges: vec![0.0, r(positive), r(2.0 * positive), r(4.0 * positive)],
            weights: vec![5.0, 4.0, 1.0],
        },
        "uniform" => LawSpec::Uniform { low: r(mean - 3f64.sqrt() * sd), high: r(mean + 3f64.sqrt() * sd) },
        "exponential" => LawSpec::Exponential { mean: r(positive) },
        "gamma" => LawSpec::Gamma { shape: r(ratio * ratio), scale: r(positive / (ratio * ratio)) },
        "weibull" => LawSpec::Weibull { shape: 1.5, scale: r(positive / 0.902_745_292_950_933_6) },
        "lognormal" => {
            LawSpec::Lognormal { log_mean: None, log_sd: None, mean: Some(r(positive)), sd: Some(r(sd)) }
        }
        "inverse-gaussian" => {
            LawSpec::InverseGaussian { mean: r(positive), shape: r(positive * ratio * ratio) }
        }
        "lomax" => LawSpec::Lomax { shape: 4.5, scale: r(3.5 * positive) },
        "pareto" => LawSpec::Pareto { shape: 4.5, minimum: r(positive * 3.5 / 4.5) },
        "generalized-pareto" => {
            LawSpec::GeneralizedPareto { threshold: 0.0, scale: r(0.8 * positive), shape: 0.2 }
        }
        "beta" => LawSpec::Beta { a: 2.0, b: 5.0, low: None, high: None },
        "triangular" => {
            let half = 6f64.sqrt() * sd;
            LawSpec::Triangular { low: r(mean - half), mode: r(mean), high: r(mean + half) }
        }
        "laplace" => LawSpec::Laplace { mean: r(mean), scale: r(sd / 2f64.sqrt()) },
        "logistic" => LawSpec::Logistic { mean: r(mean), scale: r(sd * 3f64.sqrt() / std::f64::consts::PI) },
        "student-t" => {
            LawSpec::StudentT { df: 5.0, location: Some(r(mean)), scale: Some(r(sd * 0.6f64.sqrt())) }
        }
        "formula" => LawSpec::Formula { density: "x*exp(-x)".to_owned(), low: 0.0, high: 20.0 },
        "mixture" => LawSpec::Mixture {
            parts: vec![
                MixturePart { weight: 3.0, law: LawSpec::Normal { mean: r(mean), sd: r(sd) } },
                MixturePart { weight: 1.0, law: LawSpec::Normal { mean: r(mean + 3.0 * sd), sd: r(sd) } },
            ],
        },
        "compound" => LawSpec::Compound {
            count: Box::new(LawSpec::Poisson { rate: 2.0 }),
            each: Box::new(LawSpec::Exponential { mean: r(positive) }),
        },
        _ => LawSpec::Normal { mean: r(mean), sd: r(sd) },
    }
}

/// A law with one more step done to it.
pub fn step(kind: &str, law: LawSpec, near: Near) -> LawSpec {
    let law = Box::new(law);
    let top = round_to(near.mean + 3.0 * near.sd, 2);
    match kind {
        "cap" => LawSpec::Cap { law, low: None, high: Some(top) },
        "restrict" => LawSpec::Restrict { law, low: None, high: Some(top) },
        "round" => LawSpec::Round { law, step: 10f64.powf(near.sd.log10().floor()).clamp(1e-300, 1e300) },
        "mostly-zero" => LawSpec::Mixture {
            parts: vec![
                MixturePart { weight: 0.7, law: LawSpec::Constant { value: 0.0 } },
                MixturePart { weight: 0.3, law: *law },
            ],
        },
        _ => LawSpec::Affine { law, add: 0.0, multiply: 1.0 },
    }
}

/// Rounds to a number of significant digits.
pub fn round_to(value: f64, digits: usize) -> f64 {
    format!("{value:.*e}", digits.max(1) - 1).parse().unwrap_or(value)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::model::law_parameters::{self, Value};

    #[test]
    fn every_kind_makes_itself_and_its_parameters_can_be_set() {
        for (name, words) in BASES {
            let mut law = base(name, Near { mean: 48.0, sd: 31.0 });
            assert_eq!(kind(&law), name);
            assert_eq!(title(&law), words);
            let names: Vec<&str> =
                law_parameters::parameters(&mut law).iter().map(|(name, _)| *name).collect();
            for parameter in names {
                let changed = law_parameters::with_parameter(&law, parameter, &Value::Real(0.25));
                let again = law_parameters::with_parameter(&changed, parameter, &Value::Real(0.25));
                assert_eq!(changed, again);
            }
        }
        for (name, words) in STEPS {
            assert_eq!(title(&step(name, LawSpec::Exponential { mean: 1.0 }, Near::new(None, None))), words);
        }
    }

    #[test]
    fn starting_parameters_keep_mean_and_spread() {
        let near = Near { mean: 48.0, sd: 31.0 };
        let LawSpec::Gamma { shape, scale } = base("gamma", near) else { panic!("a gamma law") };
        assert!((shape * scale - 48.0).abs() < 0.2 && (shape.sqrt() * scale - 31.0).abs() < 0.2);
        let LawSpec::Uniform { low, high } = base("uniform", near) else { panic!("a uniform law") };
        assert!(((high - low) / 12f64.sqrt() - 31.0).abs() < 0.2);
    }
}

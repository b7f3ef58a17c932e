//! What a summand law is, as it is written down: the plain data of a scenario's `law`.

use serde::Serialize;

/// One part of a mixture.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct MixturePart {
    /// Weight on any positive scale.
    pub weight: f64,
    /// The law of this part.
    pub law: LawSpec,
}

/// A fitted tail put behind pilot data.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(tag = "kind", rename_all = "kebab-case", deny_unknown_fields)]
pub enum DataTail {
    /// Values beyond this quantile of the data are replaced by a fitted generalized Pareto tail.
    GeneralizedPareto {
        /// Share of the data below the fitted tail, in (0, 1).
        above_quantile: f64,
    },
}

/// The law of one summand, exactly as a scenario writes it.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(tag = "kind", rename_all = "kebab-case", deny_unknown_fields)]
#[allow(missing_docs, reason = "the parameters carry their field's usual names, documented per law")]
pub enum LawSpec {
    Constant {
        value: f64,
    },
    Bernoulli {
        p: f64,
    },
    Binomial {
        trials: u64,
        p: f64,
    },
    Poisson {
        rate: f64,
    },
    /// Failures before the first success.
    Geometric {
        p: f64,
    },
    /// Failures before the `size`-th success.
    NegativeBinomial {
        size: f64,
        p: f64,
    },
    DiscreteUniform {
        low: i64,
        high: i64,
    },
    Table {
        values: Vec<f64>,
        weights: Vec<f64>,
    },
    /// Pilot data. Before compiling, whoever reads files fills `values` from `path` and `column`.
    Data {
        #[serde(skip_serializing_if = "Option::is_none")]
        values: Option<Vec<f64>>,
        #[serde(skip_serializing_if = "Option::is_none")]
        path: Option<String>,
        #[serde(skip_serializing_if = "Option::is_none")]
        column: Option<String>,
        #[serde(skip_serializing_if = "Option::is_none")]
        tail: Option<DataTail>,
    },
    Histogram {
        edges: Vec<f64>,
        weights: Vec<f64>,
    },
    Normal {
        mean: f64,
        sd: f64,
    },
    Uniform {
        low: f64,
        high: f64,
    },
    Exponential {
        mean: f64,
    },
    Gamma {
        shape: f64,
        scale: f64,
    },
    Weibull {
        shape: f64,
        scale: f64,
    },
    /// Either `log_mean` and `log_sd`, or `mean` and `sd`.
    Lognormal {
        #[serde(skip_serializing_if = "Option::is_none")]
        log_mean: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        log_sd: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        mean: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        sd: Option<f64>,
    },
    /// Survival (1 + x/scale)^(−shape), x ≥ 0.
    Lomax {
        shape: f64,
        scale: f64,
    },
    /// Survival (x/minimum)^(−shape), x ≥ minimum.
    Pareto {
        shape: f64,
        minimum: f64,
    },
    GeneralizedPareto {
        threshold: f64,
        scale: f64,
        shape: f64,
    },
    Beta {
        a: f64,
        b: f64,
        #[serde(skip_serializing_if = "Option::is_none")]
        low: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        high: Option<f64>,
    },
    Triangular {
        low: f64,
        mode: f64,
        high: f64,
    },
    Laplace {
        mean: f64,
        scale: f64,
    },
    Logistic {
        mean: f64,
        scale: f64,
    },
    StudentT {
        df: f64,
        #[serde(skip_serializing_if = "Option::is_none")]
        location: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        scale: Option<f64>,
    },
    InverseGaussian {
        mean: f64,
        shape: f64,
    },
    /// A density typed as text in `x` on [low, high], normalised by the program.
    Formula {
        density: String,
        low: f64,
        high: f64,
    },
    Mixture {
        parts: Vec<MixturePart>,
    },
    /// add + multiply·X.
    Affine {
        law: Box<LawSpec>,
        add: f64,
        multiply: f64,
    },
    /// Values beyond a limit are moved to the limit.
    Cap {
        law: Box<LawSpec>,
        #[serde(skip_serializing_if = "Option::is_none")]
        low: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        high: Option<f64>,
    },
    /// Conditional on lying inside the limits.
    Restrict {
        law: Box<LawSpec>,
        #[serde(skip_serializing_if = "Option::is_none")]
        low: Option<f64>,
        #[serde(skip_serializing_if = "Option::is_none")]
        high: Option<f64>,
    },
    /// To the nearest multiple of `step`, ties to even.
    Round {
        law: Box<LawSpec>,
        step: f64,
    },
    /// The sum of a random number (`count`, a law on 0, 1, 2, …) of independent copies of `each`.
    Compound {
        count: Box<LawSpec>,
        each: Box<LawSpec>,
    },
}

//! The scenario document (`gaussgap-scenario/1`) as typed data.

mod data;
mod defaults;
mod fields;
mod laws;
mod overrides;
mod read;
mod write;

pub use data::DataRequest;
pub use overrides::{apply_overrides, parse_override};
pub use read::LARGEST_N;

use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::RouteChoice;
use serde::{Deserialize, Serialize};

/// The `format` of a scenario.
pub const SCENARIO_FORMAT: &str = "gaussgap-scenario/1";

/// What is measured.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct Quantity {
    /// Its name, singular: `boarding time`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub name: Option<String>,
    /// Its unit: `s`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub unit: Option<String>,
}

/// One of several unlike kinds of summand.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct Part {
    /// The law of one copy.
    pub law: LawSpec,
    /// How many copies.
    pub count: u64,
}

/// One of the two groups of a difference of means.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct Group {
    /// The law of one observation.
    pub law: LawSpec,
    /// Observations in the group.
    pub n: u64,
}

/// How the summands of one law depend on each other.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(tag = "kind", rename_all = "kebab-case", deny_unknown_fields)]
#[allow(missing_docs, reason = "the parameters carry their field's usual names")]
pub enum Dependence {
    MovingAverage { weights: Vec<f64> },
    Autoregressive { correlation: f64 },
    WithoutReplacement { population: u64 },
}

/// Where the summands come from.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(untagged)]
pub enum Source {
    /// n independent (or dependent) copies of one law.
    Like {
        /// The law.
        law: LawSpec,
        /// How many.
        n: u64,
        /// Dependence between them, if any.
        #[serde(skip_serializing_if = "Option::is_none")]
        dependence: Option<Dependence>,
    },
    /// Unlike summands, all counts together.
    Parts {
        /// The kinds.
        parts: Vec<Part>,
    },
    /// Difference of two means, second minus first.
    Groups {
        /// The two groups.
        groups: [Group; 2],
    },
}

/// Which statistic is reported.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Statistic {
    /// The mean of the n summands.
    #[default]
    Mean,
    /// Their total.
    Sum,
}

/// Sides of an interval or a test.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs, reason = "named as the field names them")]
pub enum Sides {
    Two,
    Lower,
    Upper,
}

/// Whether the spread is known beforehand or estimated from the same data.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs, reason = "named as the field names them")]
pub enum Spread {
    Known,
    Estimated,
}

/// Direction of a threshold.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs, reason = "named as the contract names them")]
pub enum Direction {
    AtMost,
    AtLeast,
}

/// What the normal approximation is going to be used for.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, schemars::JsonSchema)]
#[serde(tag = "kind", rename_all = "kebab-case", deny_unknown_fields)]
#[allow(missing_docs, reason = "the parameters carry their field's usual names")]
#[derive(Default)]
pub enum Claim {
    #[default]
    Curve,
    Interval {
        level: f64,
        sides: Sides,
        spread: Spread,
    },
    Test {
        significance: f64,
        sides: Sides,
        spread: Spread,
        #[serde(skip_serializing_if = "Option::is_none")]
        shift: Option<f64>,
    },
    Threshold {
        at: f64,
        direction: Direction,
    },
    Quantile {
        p: f64,
    },
    Deviation {
        epsilon: f64,
        #[serde(skip_serializing_if = "Option::is_none")]
        probability: Option<f64>,
    },
}

/// How far the compared number may be off.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case", deny_unknown_fields)]
pub enum Tolerance {
    /// By this much.
    Absolute(f64),
    /// By this share of the nominal number.
    Relative(f64),
}

/// How the figures are computed.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct MethodSpec {
    /// Which route.
    pub route: RouteChoice,
    /// Budget of simulated sums.
    pub draws: u64,
    /// Seed.
    pub seed: u64,
    /// Joint confidence of simulated figures.
    pub confidence: f64,
}

/// How far *safe from* is searched.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct Search {
    /// The largest n looked at.
    pub up_to: u64,
}

/// A whole scenario with every default filled in.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
pub struct Scenario {
    /// Always [`SCENARIO_FORMAT`].
    pub format: String,
    /// Short title.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub title: Option<String>,
    /// Free text.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub notes: Option<String>,
    /// What is measured.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub quantity: Option<Quantity>,
    /// Where the summands come from. Values loaded from a data file are not written: path and column are.
    #[serde(flatten, serialize_with = "write::source_without_loaded_values")]
    pub source: Source,
    /// Which statistic.
    pub statistic: Statistic,
    /// The use.
    pub claim: Claim,
    /// The tolerance.
    pub tolerance: Tolerance,
    /// How to compute.
    pub method: MethodSpec,
    /// Where tail probabilities are reported.
    pub probe_z: Vec<f64>,
    /// How far safe-from is searched.
    pub search: Search,
}

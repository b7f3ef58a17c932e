//! The report document (`gaussgap-report/1`) as typed data: everything an assessment found.

use crate::scenario::Scenario;
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::{Atom, Lattice};
use gaussgap_simulation::sum::{Route, Side};
use serde::Serialize;

/// The `format` of a report.
pub const REPORT_FORMAT: &str = "gaussgap-report/1";

/// Which program wrote the report.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "self-describing")]
pub struct Program {
    pub name: String,
    pub version: String,
}

/// The law of one summand.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Summand {
    pub mean: Option<f64>,
    pub sd: Option<f64>,
    pub skewness: Option<f64>,
    pub excess_kurtosis: Option<f64>,
    pub third_absolute_central_moment: Option<f64>,
    /// Ends of the support, null where unbounded.
    pub support: [Option<f64>; 2],
    pub lattice: Option<Lattice>,
    /// At most the 200 heaviest atoms, ascending by value.
    pub atoms: Vec<Atom>,
    pub warnings: Vec<String>,
}

/// Moments of the sum (of the difference of means for groups).
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct SumFacts {
    pub mean: Option<f64>,
    pub sd: Option<f64>,
    pub skewness: Option<f64>,
    pub excess_kurtosis: Option<f64>,
}

/// How the figures were computed.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct MethodFacts {
    /// Null only where nothing could be computed (no finite variance).
    pub route: Option<Route>,
    pub detail: String,
    pub seconds: f64,
    pub draws: Option<u64>,
    pub seed: Option<u64>,
}

/// The Berry–Esseen bound.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct BerryEsseen {
    pub value: f64,
    pub constant: f64,
    pub source: String,
}

/// The Kolmogorov distance and what theory says of it.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct DistanceFacts {
    pub kolmogorov: Option<Figure>,
    pub at_z: Option<f64>,
    pub side: Option<Side>,
    pub leading_term: Option<f64>,
    pub berry_esseen: Option<BerryEsseen>,
}

/// Probabilities at one probe point; null where the law has no finite variance.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct TailRow {
    pub z: f64,
    pub at_or_below: Option<Figure>,
    pub below: Option<Figure>,
    pub above: Option<Figure>,
    pub normal_at_or_below: f64,
    pub normal_above: f64,
}

/// One guarantee of a deviation claim.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Guarantee {
    pub name: String,
    pub value: Option<f64>,
    pub conditions: String,
    pub source: String,
}

/// The claim, computed. Fields that do not belong to the claim's kind are left out.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct ClaimFacts {
    pub kind: String,
    /// The number the normal approximation promises (0 for `curve`).
    pub nominal: f64,
    pub actual: Option<Figure>,
    /// actual − nominal.
    pub difference: Option<f64>,
    /// Largest |difference| the tolerance allows.
    pub allowed: f64,
    /// Interval: the whole interval lies below the mean.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub miss_low: Option<Figure>,
    /// Interval: the whole interval lies above the mean.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub miss_high: Option<Figure>,
    /// Nominal miss on each side.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub nominal_miss_low: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub nominal_miss_high: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub normal_quantile: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub actual_quantile: Option<Figure>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub guarantees: Option<Vec<Guarantee>>,
    /// n each guarantee needs for the asked probability, by name; null where no n does.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub needed_n: Option<std::collections::BTreeMap<String, Option<u64>>>,
}

/// The state of a verdict.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs, reason = "named as in the contract")]
pub enum State {
    Holds,
    Fails,
    Undecided,
}

/// Which n were looked at for *safe from*.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Checked {
    pub from: u64,
    pub to: u64,
    pub every_n: bool,
    /// The n that were checked, where not every one was.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub which: Option<Vec<u64>>,
}

/// The verdict.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Verdict {
    pub state: State,
    /// One sentence a manager understands.
    pub because: String,
    pub safe_from: Option<u64>,
    pub last_failing: Option<u64>,
    /// Null where no search was made.
    pub checked: Option<Checked>,
}

/// Something else that could be done at the planned n.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Remedy {
    pub name: String,
    pub actual: Option<Figure>,
    pub holds: bool,
    pub note: String,
}

/// A rule of thumb, judged.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct RuleOfThumb {
    pub rule: String,
    pub source: String,
    /// The n the rule asks for, where it asks for one.
    pub n: Option<u64>,
    /// `enough` or `not enough`.
    pub says: String,
    /// Whether the computed verdict agrees; null while undecided.
    pub agrees: Option<bool>,
}

/// The distance over n.
#[derive(Debug, Clone, PartialEq, Default, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Growth {
    pub n: Vec<u64>,
    pub kolmogorov: Vec<Option<f64>>,
    pub berry_esseen: Vec<Option<f64>>,
    pub leading_term: Vec<Option<f64>>,
}

/// The distribution functions over z.
#[derive(Debug, Clone, PartialEq, Default, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Curve {
    pub z: Vec<f64>,
    pub at_or_below: Vec<f64>,
    pub below: Vec<f64>,
    pub normal: Vec<f64>,
}

/// Everything an assessment found.
#[derive(Debug, Clone, PartialEq, Serialize, schemars::JsonSchema)]
#[allow(missing_docs, reason = "named as in the contract")]
pub struct Report {
    pub format: String,
    pub program: Program,
    pub scenario: Scenario,
    /// The law of one summand; for `parts` and `groups` of the first, the others in `summands`.
    pub summand: Summand,
    /// All kinds of summand, where there are several.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub summands: Vec<Summand>,
    pub sum: SumFacts,
    pub method: MethodFacts,
    pub distance: DistanceFacts,
    pub tails: Vec<TailRow>,
    pub claim: ClaimFacts,
    pub verdict: Verdict,
    pub remedies: Vec<Remedy>,
    pub rules_of_thumb: Vec<RuleOfThumb>,
    pub growth: Growth,
    pub curve: Curve,
    pub cautions: Vec<String>,
}

//! Conclusions about the normal approximation of a sum: scenario in, report out.

mod assess;
mod bounds;
mod cautions;
mod claims;
mod cost;
mod facts;
mod figures;
mod growth;
mod prepared;
mod remedies;
pub mod report;
mod rules_of_thumb;
mod safe_from;
pub mod scenario;
pub mod words;

pub use words::{describe_law, plan_sentence, summary_paragraph};

use gaussgap_simulation::work::{Cancelled, Work};
use report::Report;
use scenario::Scenario;

/// Something wrong with a scenario: a place and a message.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{pointer}: {message}")]
pub struct Problem {
    /// JSON pointer of the offending value in the scenario.
    pub pointer: String,
    /// What was expected and found.
    pub message: String,
}

/// Why no report could be made.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum AssessError {
    /// The scenario is not usable; every problem found.
    #[error("{}", .0.iter().map(ToString::to_string).collect::<Vec<_>>().join("\n"))]
    Scenario(Vec<Problem>),
    /// The caller asked to stop.
    #[error(transparent)]
    Cancelled(#[from] Cancelled),
}

/// What to compute; the window asks for less first and more later.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Effort {
    /// Compute the growth curve.
    pub growth: bool,
    /// Search for *safe from*.
    pub safe_from: bool,
    /// Compute remedies and rules of thumb.
    pub remedies: bool,
}

impl Effort {
    /// Everything: what `assess` does.
    pub const FULL: Self = Self { growth: true, safe_from: true, remedies: true };
    /// Only the planned n: what a drag shows first.
    pub const PLANNED_N: Self = Self { growth: false, safe_from: false, remedies: false };
}

/// Assesses a scenario whose `data` laws already carry their values.
///
/// Everything the report contains is computed at the planned n; `effort` decides whether the growth curve, the
/// search for *safe from* and the remedies are computed too. A bad scenario gives every problem with its JSON
/// pointer; a cancelled `work` gives [`AssessError::Cancelled`] soon after.
pub fn assess(scenario: &Scenario, effort: Effort, work: &Work) -> Result<Report, AssessError> {
    assess::assess(scenario, effort, work)
}

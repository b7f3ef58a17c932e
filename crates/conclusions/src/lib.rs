//! Conclusions about the normal approximation of a sum: scenario in, report out.

pub mod report;
pub mod scenario;
pub mod words;

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
pub fn assess(scenario: &Scenario, effort: Effort, work: &Work) -> Result<Report, AssessError> {
    let _ = (scenario, effort, work);
    todo!()
}

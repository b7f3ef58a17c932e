//! A number together with the error a reader may rely on.

use serde::{Deserialize, Serialize};

/// What stands behind the stated error of a [`Figure`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Basis {
    /// The true value lies within ± error, by a stated error analysis.
    Bound,
    /// The true value lies within ± error with the confidence of the scenario, jointly for all figures.
    Confidence,
}

/// A value with its error: the true value lies in `[value − error, value + error]`.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize, schemars::JsonSchema)]
pub struct Figure {
    /// The computed value.
    pub value: f64,
    /// Half-width of the interval that contains the true value.
    pub error: f64,
    /// Why the interval may be trusted.
    pub basis: Basis,
}

impl Figure {
    /// A figure with a bounded error.
    pub const fn bound(value: f64, error: f64) -> Self {
        Self { value, error, basis: Basis::Bound }
    }

    /// A simulated figure.
    pub const fn confidence(value: f64, error: f64) -> Self {
        Self { value, error, basis: Basis::Confidence }
    }

    /// Applies a function with Lipschitz constant 1 (a shift, a reflection) to the value.
    pub fn map(self, f: impl FnOnce(f64) -> f64) -> Self {
        Self { value: f(self.value), ..self }
    }
}

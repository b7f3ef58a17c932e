//! Distributions of standardized sums: Z = (S − E S)/sd(S).
//!
//! [`build`] picks the best route (closed form, lattice, inversion, simulation) and says which it took. All
//! routes answer the same questions through [`StandardizedSum`], always in standard units z.

pub mod closed_form;
mod continuous;
pub mod contour;
#[cfg(test)]
mod counted_checks;
mod counting;
pub mod inversion;
pub mod lattice;
mod route;
mod steps;
mod supremum;
mod twofold;

use crate::figure::Figure;
use crate::law::Law;
use crate::work::Cancelled;

pub use route::{build, build_exact};

/// How a distribution was obtained.
#[derive(Debug, Clone, Copy, PartialEq, Eq, serde::Serialize, serde::Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Route {
    /// The sum is a named law.
    ClosedForm,
    /// Fast Fourier transform of a lattice law.
    Lattice,
    /// Numerical inversion of the characteristic function.
    Inversion,
    /// Monte Carlo.
    Simulation,
}

/// `count` independent copies of `law`, each multiplied by `multiply`.
#[derive(Debug, Clone)]
pub struct Term {
    /// The law of one copy.
    pub law: Law,
    /// How many independent copies.
    pub count: u64,
    /// Factor on each copy (1 for a sum, ∓1/n for a difference of means).
    pub multiply: f64,
}

/// Which independent quantities are added.
#[derive(Debug, Clone)]
pub struct SumSpec {
    /// The terms, at least one, all with finite variance, not all with zero variance.
    pub terms: Vec<Term>,
}

impl SumSpec {
    /// n independent copies of one law.
    pub fn like_summands(law: Law, n: u64) -> Self {
        Self { terms: vec![Term { law, count: n, multiply: 1.0 }] }
    }
}

/// Moments of a sum, in its own units. `None` where they do not exist.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SumMoments {
    /// Number of summands.
    pub n: u64,
    /// E S.
    pub mean: f64,
    /// sd(S) > 0.
    pub sd: f64,
    /// Skewness of S.
    pub skewness: Option<f64>,
    /// Excess kurtosis of S.
    pub excess_kurtosis: Option<f64>,
}

/// Which side of a jump a supremum is taken on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, serde::Serialize, serde::Deserialize, schemars::JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Side {
    /// At z, the jump at z included: P(Z ≤ z).
    At,
    /// Just below z: P(Z < z).
    JustBelow,
}

/// A Kolmogorov distance to Φ and where it is attained.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Distance {
    /// sup over z of |P(Z ≤ z) − Φ(z)|.
    pub kolmogorov: Figure,
    /// Where the supremum is attained (or approached).
    pub at_z: f64,
    /// On which side of a jump.
    pub side: Side,
}

/// The distribution of a standardized sum.
///
/// An argument within a few units in the last place of an atom *is* that atom. No method panics or returns
/// `NaN`, whatever finite or infinite z is given; a `NaN` argument is a programming error.
pub trait StandardizedSum: Send + Sync + std::fmt::Debug {
    /// How the distribution was obtained.
    fn route(&self) -> Route;
    /// One sentence on how: family, transform length, number of draws, why exact routes were refused.
    fn detail(&self) -> String;
    /// Moments of the sum.
    fn moments(&self) -> SumMoments;
    /// P(Z ≤ z).
    fn at_or_below(&self, z: f64) -> Figure;
    /// P(Z < z).
    fn below(&self, z: f64) -> Figure;
    /// P(Z > z); closed-form and lattice routes keep relative accuracy in the tail.
    fn above(&self, z: f64) -> Figure;
    /// P(Z ≥ z).
    fn at_or_above(&self, z: f64) -> Figure;
    /// Kolmogorov distance to Φ: both sides of each jump, refined between grid points.
    fn kolmogorov(&self) -> Distance;
    /// Smallest z with P(Z ≤ z) ≥ p, 0 < p < 1.
    fn quantile(&self, p: f64) -> Figure;
    /// Jumps of the distribution inside [from, to], ascending; `None` if there are more than `limit`, an empty
    /// list where it is continuous there.
    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>>;
    /// Distance between neighbouring lattice points in standard units, for lattice laws.
    fn lattice_span(&self) -> Option<f64>;
    /// Number of draws, for simulation.
    fn draws(&self) -> Option<u64> {
        None
    }
}

/// Which route to take.
#[derive(
    Debug, Clone, Copy, PartialEq, Eq, Default, serde::Serialize, serde::Deserialize, schemars::JsonSchema,
)]
#[serde(rename_all = "kebab-case")]
pub enum RouteChoice {
    /// The best exact route, else simulation.
    #[default]
    Auto,
    /// Only the closed form.
    ClosedForm,
    /// Only the lattice transform.
    Lattice,
    /// Only inversion.
    Inversion,
    /// Only simulation.
    Simulation,
}

/// How to compute.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Method {
    /// Which route.
    pub route: RouteChoice,
    /// Budget of simulated sums.
    pub draws: u64,
    /// Seed of the simulation.
    pub seed: u64,
    /// Joint confidence of all simulated figures, in (0, 1).
    pub confidence: f64,
    /// Probabilities are needed for |z| up to this at least (exact routes may answer further out).
    pub reach_z: f64,
}

impl Default for Method {
    fn default() -> Self {
        Self { route: RouteChoice::Auto, draws: 4_000_000, seed: 20_260_101, confidence: 0.999, reach_z: 8.0 }
    }
}

/// Why a distribution could not be built.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum SumError {
    /// The caller asked to stop.
    #[error(transparent)]
    Cancelled(#[from] Cancelled),
    /// The sum has no finite, positive variance.
    #[error("the sum has no finite, positive variance")]
    NoVariance,
    /// A route asked for by name cannot take this sum, and why.
    #[error("{reason}")]
    NotAvailable {
        /// The route.
        route: Route,
        /// Why not, as a clause: `"the law is not on a lattice"`.
        reason: String,
    },
}

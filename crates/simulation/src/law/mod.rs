//! Laws of one summand: written down ([`spec`]), and made ready for computing ([`Law`]).
//!
//! Every law, however nested, compiles to the same normal form: finitely many *atoms* (or a whole lattice of
//! them) and finitely many *pieces*, each a shifted, scaled, truncated analytic density. Mixtures, affine
//! images, caps and restrictions stay inside this form, so the routes in [`crate::sum`] need to know nothing
//! about how a law was built. What does not fit (compound sums of amounts without a closed form, heavy tails rounded to
//! a fine step) keeps its moments and can be drawn from; `only_simulation` says so.

mod checks;
mod compile;
mod compound;
pub mod density;
mod expression;
mod families;
mod form;
mod lattice;
mod moments;
mod opaque;
mod piece;
mod probabilities;
mod quadrature;
mod rounded;
mod sampler;
pub mod spec;
#[cfg(test)]
mod tests;

pub use density::Density;
pub use quadrature::gauss_legendre;
pub use sampler::Sampler;
pub use spec::{DataTail, LawSpec, MixturePart};

use std::sync::Arc;

/// A value that is taken with positive probability.
#[derive(Debug, Clone, Copy, PartialEq, serde::Serialize, serde::Deserialize, schemars::JsonSchema)]
pub struct Atom {
    /// The value.
    pub value: f64,
    /// Its probability.
    pub mass: f64,
}

/// All mass lies on offset + k·span, k integer, and on no coarser such set.
#[derive(Debug, Clone, Copy, PartialEq, serde::Serialize, serde::Deserialize, schemars::JsonSchema)]
pub struct Lattice {
    /// A value of the law (its smallest where there is one).
    pub offset: f64,
    /// The maximal span.
    pub span: f64,
}

/// factor · f(y) dy for low < y < high, at x = add + multiply·y: one analytic stretch of the law. `f` is the
/// *untruncated* density, so the mass of the piece is factor·(F(high) − F(low)).
#[derive(Debug, Clone)]
pub struct Piece {
    /// Multiplies the density.
    pub factor: f64,
    /// The family, in its own units.
    pub density: Arc<dyn Density>,
    /// Shift of the image, in the quantity's unit.
    pub add: f64,
    /// Scale of the image, not 0; negative reflects.
    pub multiply: f64,
    /// Lower end in the family's units; may be −∞.
    pub low: f64,
    /// Upper end in the family's units; may be +∞.
    pub high: f64,
}

/// A family whose n-fold sums stay in the family.
#[derive(Debug, Clone, Copy, PartialEq)]
#[allow(missing_docs, reason = "the parameters carry their field's usual names")]
pub enum ClosedFamily {
    Normal { mean: f64, sd: f64 },
    Gamma { shape: f64, scale: f64 },
    Poisson { rate: f64 },
    Binomial { trials: u64, p: f64 },
    NegativeBinomial { size: f64, p: f64 },
    InverseGaussian { mean: f64, shape: f64 },
}

/// An affine image of a law whose sums have a closed form: the law is that of add + multiply·Y.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ClosedForm {
    /// The law of Y.
    pub family: ClosedFamily,
    /// Shift.
    pub add: f64,
    /// Scale, not 0.
    pub multiply: f64,
}

/// Moments of a law. `None` where the moment does not exist (infinite or undefined).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Moments {
    /// E X.
    pub mean: Option<f64>,
    /// E (X − mean)².
    pub variance: Option<f64>,
    /// E (X − mean)³ / sd³.
    pub skewness: Option<f64>,
    /// E (X − mean)⁴ / sd⁴ − 3.
    pub excess_kurtosis: Option<f64>,
    /// E |X − mean|³, in units of X cubed.
    pub third_absolute_central: Option<f64>,
}

/// Something wrong with a [`LawSpec`].
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{pointer}: {message}")]
pub struct LawProblem {
    /// JSON pointer of the offending value relative to the law, e.g. `/parts/1/weight`; empty for the law itself.
    pub pointer: String,
    /// What was expected and what was found: `must be greater than 0 (got -0.2)`.
    pub message: String,
}

/// A law made ready for computing. Cheap to clone.
#[derive(Debug, Clone)]
pub struct Law {
    inner: Arc<probabilities::Prepared>,
}

/// The normal form of a law.
#[derive(Debug)]
pub struct LawParts {
    /// Values with positive probability, ascending, merged. Infinite discrete families are cut where the mass
    /// left out, `missing_mass`, is negligible.
    pub atoms: Vec<Atom>,
    /// Upper bound on the discrete probability not listed in `atoms` (0 for finite laws, else ≤ 1e-30).
    pub missing_mass: f64,
    /// Continuous pieces; empty for a discrete law.
    pub pieces: Vec<Piece>,
    /// The lattice, for a purely discrete law that lives on one.
    pub lattice: Option<Lattice>,
    /// The closed form of its sums, if it has one.
    pub closed_form: Option<ClosedForm>,
    /// The moments.
    pub moments: Moments,
    /// Ends of the support; infinite where unbounded.
    pub support: (f64, f64),
    /// Why exact routes cannot take this law, if they can't.
    pub only_simulation: Option<String>,
    /// Plain sentences about the law a reader must know (missing moments, data caveats).
    pub warnings: Vec<String>,
}

impl std::ops::Deref for Law {
    type Target = LawParts;
    fn deref(&self) -> &LawParts {
        &self.inner.parts
    }
}

//! The families of laws, one file each, and the one list that joins them.

mod bernoulli;
mod constant;
mod discrete_uniform;
mod exponential;
mod gamma;
mod lognormal;
mod lomax;
mod normal;
mod pareto;
mod table;
mod uniform;
mod weibull;

use super::checks::Checks;
use super::density::Density;
use super::form::Form;
use super::spec::LawSpec;
use rand::RngExt;

/// The normal form of a law that is not built from other laws; `None` after reporting what is wrong with it,
/// or, without a report, for an operation.
pub(super) fn compile(spec: &LawSpec, checks: &mut Checks) -> Option<Form> {
    match spec {
        LawSpec::Constant { value } => constant::compile(*value, checks),
        LawSpec::Bernoulli { p } => bernoulli::compile(*p, checks),
        LawSpec::DiscreteUniform { low, high } => discrete_uniform::compile(*low, *high, checks),
        LawSpec::Table { values, weights } => table::compile(values, weights, checks),
        LawSpec::Normal { mean, sd } => normal::compile(*mean, *sd, checks),
        LawSpec::Uniform { low, high } => uniform::compile(*low, *high, checks),
        LawSpec::Exponential { mean } => exponential::compile(*mean, checks),
        LawSpec::Gamma { shape, scale } => gamma::compile(*shape, *scale, checks),
        LawSpec::Weibull { shape, scale } => weibull::compile(*shape, *scale, checks),
        LawSpec::Lognormal { log_mean, log_sd, mean, sd } => {
            lognormal::compile(*log_mean, *log_sd, *mean, *sd, checks)
        }
        LawSpec::Lomax { shape, scale } => lomax::compile(*shape, *scale, checks),
        LawSpec::Pareto { shape, minimum } => pareto::compile(*shape, *minimum, checks),
        _ => None,
    }
}

/// A draw by inverse transform, tails included.
fn by_inversion(density: &dyn Density, random: &mut dyn rand::Rng) -> f64 {
    let u: f64 = random.sample(rand::distr::Open01);
    if u <= 0.5 { density.quantile(u) } else { density.quantile_above(1.0 - u) }
}

/// Moments of the Bernoulli law, whose affine images are all laws on two values.
pub(super) fn bernoulli_moments(p: f64) -> super::density::StandardMoments {
    bernoulli::moments(p)
}

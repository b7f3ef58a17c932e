//! The families of laws, one file each, and the one list that joins them.

mod bernoulli;
mod beta;
mod binomial;
mod constant;
mod data;
mod discrete_uniform;
mod exponential;
mod formula;
mod gamma;
mod generalized_pareto;
mod geometric;
mod histogram;
mod inverse_gaussian;
mod laplace;
mod logistic;
mod lognormal;
mod lomax;
mod long_table;
mod negative_binomial;
mod normal;
mod pareto;
mod poisson;
mod student_t;
mod table;
mod triangular;
mod uniform;
mod weibull;

use super::checks::Checks;
use super::density::Density;
use super::form::Form;
use super::spec::LawSpec;
use super::{ClosedFamily, Piece};
use rand::RngExt;

/// The normal form of a law that is not built from other laws; `None` after reporting what is wrong with it,
/// or, without a report, for an operation.
pub(super) fn compile(spec: &LawSpec, checks: &mut Checks) -> Option<Form> {
    match spec {
        LawSpec::Constant { value } => constant::compile(*value, checks),
        LawSpec::Bernoulli { p } => bernoulli::compile(*p, checks),
        LawSpec::Binomial { trials, p } => binomial::compile(*trials, *p, checks),
        LawSpec::Poisson { rate } => poisson::compile(*rate, checks),
        LawSpec::Geometric { p } => geometric::compile(*p, checks),
        LawSpec::NegativeBinomial { size, p } => negative_binomial::compile(*size, *p, checks),
        LawSpec::DiscreteUniform { low, high } => discrete_uniform::compile(*low, *high, checks),
        LawSpec::Table { values, weights } => table::compile(values, weights, checks),
        LawSpec::Data { values, tail, .. } => data::compile(values.as_deref(), tail.as_ref(), checks),
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
        LawSpec::InverseGaussian { mean, shape } => inverse_gaussian::compile(*mean, *shape, checks),
        LawSpec::Histogram { edges, weights } => histogram::compile(edges, weights, checks),
        LawSpec::GeneralizedPareto { threshold, scale, shape } => {
            generalized_pareto::compile(*threshold, *scale, *shape, checks)
        }
        LawSpec::Beta { a, b, low, high } => beta::compile(*a, *b, *low, *high, checks),
        LawSpec::Triangular { low, mode, high } => triangular::compile(*low, *mode, *high, checks),
        LawSpec::Laplace { mean, scale } => laplace::compile(*mean, *scale, checks),
        LawSpec::Logistic { mean, scale } => logistic::compile(*mean, *scale, checks),
        LawSpec::StudentT { df, location, scale } => student_t::compile(*df, *location, *scale, checks),
        LawSpec::Formula { density, low, high } => formula::compile(density, *low, *high, checks),
        LawSpec::Mixture { .. }
        | LawSpec::Affine { .. }
        | LawSpec::Cap { .. }
        | LawSpec::Restrict { .. }
        | LawSpec::Round { .. }
        | LawSpec::Compound { .. } => None,
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

/// The sum of k copies of a continuous family with a closed form, as one piece of probability 1.
pub(super) fn closed_sum(family: ClosedFamily, k: f64) -> Option<Piece> {
    match family {
        ClosedFamily::Normal { mean, sd } => {
            Some(Piece::whole(normal::density(), 1.0, k * mean, k.sqrt() * sd))
        }
        ClosedFamily::Gamma { shape, scale } => {
            Some(Piece::whole(gamma::density(k * shape), 1.0, 0.0, scale))
        }
        ClosedFamily::InverseGaussian { mean, shape } => {
            // Mean kμ and shape k²λ: in units of the mean, shape kλ/μ.
            Some(Piece::whole(inverse_gaussian::density(k * shape / mean), 1.0, 0.0, k * mean))
        }
        ClosedFamily::Poisson { .. }
        | ClosedFamily::Binomial { .. }
        | ClosedFamily::NegativeBinomial { .. } => None,
    }
}

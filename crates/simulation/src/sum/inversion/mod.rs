//! Inversion of the characteristic function: sums whose summands have a continuous part.
//!
//! # How
//! 1. Each summand's transform is tabulated once ([`transform`]) from its analytic pieces ([`stretch`], [`ray`]).
//! 2. A plan is made from bounds alone ([`plan`]): the period from tail bounds ([`tails`]), the last frequency from
//!    bounds without oscillation on the transform ([`ceiling`]), and which terms of Π (A_i + C_i)^{n_i} (A the atoms, C the
//!    continuous part) fall too slowly and are added in real space ([`selection`], [`atoms`], [`direct`]).
//! 3. The rest is summed by one Fourier transform ([`fourier`]) and everything is put together ([`distribution`]).
//!
//! All in standard units, so that shift and scale of a law change nothing.
//!
//! # Error
//! The stated error of a probability is the sum of
//! - *aliases*: P(Z < z − P) or P(Z > z + P), bounded by a Fuk–Nagaev inequality;
//! - *truncation*: the integral of a ceiling on the modulus of what is transformed, over 1/(πt);
//! - *transform*: Σ_k δ(t_k)·Σ_i n_i |φ_i|^{n_i−1}∏…/(π(k + ½)), δ the error of one summand's transform (two quadrature
//!   rules compared, step halving along rays, last coefficients of the interpolants, agreement of mass and second
//!   moment with the law's);
//! - *interpolation* between grid points, wave by wave;
//! - *rounding*: ε·Σ|terms|·(2 + log₂ length), and ε·|ln φⁿ| per term for the power;
//! - *left out*: 2.2 × the probability of selections too improbable to be added (a truncated Fourier series of a
//!   distribution of mass w stays within 1.2 w).

mod atoms;
mod ceiling;
mod chebyshev;
mod direct;
mod distribution;
mod fourier;
mod plan;
pub mod ray;
mod selection;
mod stretch;
mod summands;
mod tails;
mod transform;

#[cfg(test)]
mod tests;

use super::{Distance, Method, Route, Side, StandardizedSum, SumError, SumMoments, SumSpec};
use crate::figure::Figure;
use crate::work::Work;
use atoms::PointMasses;
use direct::{ContinuousPart, PairSum};
use distribution::{Distribution, Few, Steps};
use fourier::FourierPart;
use num_complex::Complex64;
use plan::Plan;
use rayon::prelude::*;
use selection::{TermValue, remainder};
use std::sync::{Arc, OnceLock};
use tails::{ScaledTerm, beyond};

/// Errors above this are not accepted.
const LARGEST_ERROR: f64 = 1e-9;

/// The distribution of a standardized sum by inversion of its transform.
#[derive(Debug)]
pub struct InversionSum {
    moments: SumMoments,
    terms: Vec<ScaledTerm>,
    distribution: Distribution,
    period: f64,
    detail: String,
    supremum: OnceLock<Distance>,
}

fn refuse(reason: impl Into<String>) -> SumError {
    SumError::NotAvailable { route: Route::Inversion, reason: reason.into() }
}

impl InversionSum {
    /// Builds the distribution, or says why its error cannot be certified.
    pub fn build(spec: &SumSpec, method: &Method, work: &Work) -> Result<Self, SumError> {
        work.check()?;
        let (terms, moments) = scaled_terms(spec)?;
        if terms.iter().all(|t| t.summand.continuous_mass == 0.0) {
            return Err(refuse("no summand has a continuous part"));
        }
        let plan = plan::plan(&terms, method.reach_z).map_err(refuse)?;
        work.check()?;
        let mut error = plan.alias + plan.truncation + 2.2 * plan.dropped + 4e-16;
        let (steps, few) = real_space(&terms, &plan, &mut error, work)?;
        work.set_fraction(0.3);
        let fourier =
            if plan.frequencies > 0 { Some(transform_part(&terms, &plan, &mut error, work)?) } else { None };
        if error.is_nan() || error > LARGEST_ERROR {
            return Err(refuse(format!("the error of the inversion could only be bounded by {error:.1e}")));
        }
        let detail = describe(&plan, fourier.as_ref(), &few);
        let distribution = Distribution { steps, few, fourier, low: plan.low, high: plan.high, error };
        work.set_fraction(1.0);
        Ok(Self { moments, terms, distribution, period: plan.period, detail, supremum: OnceLock::new() })
    }

    /// Error at z: inside the window the common one, outside with the aliases there.
    fn error_at(&self, z: f64) -> f64 {
        let d = &self.distribution;
        if z >= d.low && z <= d.high || d.fourier.is_none() {
            return d.error;
        }
        d.error + beyond(&self.terms, self.period - z, false) + beyond(&self.terms, self.period + z, true)
    }

    /// A probability F(z) with its error, also far outside the window.
    fn lower(&self, z: f64, raw: impl Fn(f64) -> f64) -> Figure {
        let d = &self.distribution;
        if z >= d.low && z <= d.high {
            return Figure::bound(raw(z).clamp(0.0, 1.0), d.error);
        }
        // Between the tail bounds lies the truth; where they are not sharp enough, the series is summed.
        let (low, high) = if z < 0.0 {
            (0.0, beyond(&self.terms, -z, false).min(1.0))
        } else {
            (1.0 - beyond(&self.terms, z, true).min(1.0), 1.0)
        };
        let bounded = Figure::bound(0.5 * (low + high), 0.5 * (high - low));
        if high - low <= 1e-13 || !z.is_finite() {
            return bounded;
        }
        let error = self.error_at(z);
        if error < bounded.error { Figure::bound(raw(z).clamp(0.0, 1.0), error) } else { bounded }
    }

    fn quantile_raw(&self, p: f64) -> f64 {
        let value = |z: f64| self.distribution.at_or_below(z);
        let (mut low, mut high) = (self.distribution.low, self.distribution.high);
        let limit = 1e9;
        while value_or_bound(self, low) > p && low > -limit {
            low *= 2.0;
        }
        while value_or_bound(self, high) < p && high < limit {
            high *= 2.0;
        }
        for _ in 0..200 {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                break;
            }
            let here = if middle >= self.distribution.low && middle <= self.distribution.high {
                value(middle)
            } else {
                value_or_bound(self, middle)
            };
            if here >= p {
                high = middle;
            } else {
                low = middle;
            }
        }
        high
    }
}

fn value_or_bound(sum: &InversionSum, z: f64) -> f64 {
    sum.at_or_below(z).value
}

/// The terms in standard units, constants left out, and the moments of the sum.
fn scaled_terms(spec: &SumSpec) -> Result<(Vec<ScaledTerm>, SumMoments), SumError> {
    let mut parts = Vec::new();
    let (mut n, mut mean) = (0_u64, 0.0);
    for term in &spec.terms {
        let (Some(m), Some(v)) = (term.law.moments.mean, term.law.moments.variance) else {
            return Err(SumError::NoVariance);
        };
        n = n.saturating_add(term.count);
        mean += term.count as f64 * term.multiply * m;
        if let Some(reason) = &term.law.only_simulation {
            return Err(refuse(reason.clone()));
        }
        if v > 0.0 && term.count > 0 && term.multiply != 0.0 {
            parts.push((term, v.sqrt() * term.multiply.abs()));
        }
    }
    let largest = parts.iter().map(|p| p.1).fold(0.0, f64::max);
    let sd = largest * parts.iter().map(|(t, s)| t.count as f64 * (s / largest).powi(2)).sum::<f64>().sqrt();
    if !(sd > 0.0 && sd.is_finite()) {
        return Err(SumError::NoVariance);
    }
    let (mut skewness, mut kurtosis) = (Some(0.0), Some(0.0));
    let mut terms = Vec::new();
    for (term, size) in parts {
        let share = size / sd;
        let moments = &term.law.moments;
        let n = term.count as f64;
        skewness = skewness
            .zip(moments.skewness)
            .map(|(sum, s)| sum + n * s * share.powi(3) * term.multiply.signum());
        kurtosis = kurtosis.zip(moments.excess_kurtosis).map(|(sum, k)| sum + n * k * share.powi(4));
        let summand = summands::prepared(&term.law).map_err(refuse)?;
        terms.push(ScaledTerm { summand, count: term.count, scale: share * term.multiply.signum() });
    }
    Ok((terms, SumMoments { n, mean, sd, skewness, excess_kurtosis: kurtosis }))
}

type RealSpace = (Option<Steps>, Vec<(PointMasses, Few)>);

/// The selections that are added in real space.
fn real_space(
    terms: &[ScaledTerm],
    plan: &Plan,
    error: &mut f64,
    work: &Work,
) -> Result<RealSpace, SumError> {
    let mut steps = None;
    let mut few = Vec::new();
    let mut pairs: Vec<((usize, usize), Arc<PairSum>)> = Vec::new();
    for selection in &plan.subtracted {
        work.check()?;
        let mut masses = PointMasses::single(0.0, selection.multiplicity);
        let mut continuous = Vec::new();
        for (i, (term, k)) in terms.iter().zip(&selection.counts).enumerate() {
            for _ in 0..*k {
                continuous.push(i);
            }
            let sum = PointMasses::sum_of(&term.summand.atoms, term.count - k, term.scale);
            masses = sum.and_then(|s| masses.plus(&s)).ok_or_else(|| {
                refuse(
                    "the sums of its atoms take too many different values to be kept apart from its density",
                )
            })?;
        }
        *error += 2.2 * masses.left_out + 1e-15 * masses.mass();
        match continuous[..] {
            [] => steps = Some(Steps::new(masses)),
            [i] => {
                few.push((
                    masses,
                    Few::One(ContinuousPart::new(Arc::clone(&terms[i].summand), terms[i].scale)),
                ));
            }
            [i, j] => {
                let pair = match pairs.iter().find(|(key, _)| *key == (i, j)) {
                    Some((_, pair)) => Arc::clone(pair),
                    None => {
                        let part =
                            |i: usize| ContinuousPart::new(Arc::clone(&terms[i].summand), terms[i].scale);
                        let (first, last) = (masses.points.first(), masses.points.last());
                        let from = plan.low - last.copied().unwrap_or(0.0);
                        let to = plan.high - first.copied().unwrap_or(0.0);
                        let pair = Arc::new(PairSum::new(part(i), part(j), from, to));
                        pairs.push(((i, j), Arc::clone(&pair)));
                        pair
                    }
                };
                *error += pair.error * masses.mass();
                few.push((masses, Few::Two(pair)));
            }
            _ => {}
        }
    }
    Ok((steps, few))
}

/// What is left, sampled and transformed.
fn transform_part(
    terms: &[ScaledTerm],
    plan: &Plan,
    error: &mut f64,
    work: &Work,
) -> Result<FourierPart, SumError> {
    let spacing = 2.0 * std::f64::consts::PI / plan.period;
    for term in terms {
        work.check()?;
        let scale = term.scale.abs() * spacing;
        term.summand.prepare(0.5 * scale, (plan.frequencies as f64 + 1.0) * scale);
    }
    work.set_fraction(0.6);
    let samples: Result<Vec<(Complex64, f64)>, crate::work::Cancelled> = (0..plan.frequencies)
        .into_par_iter()
        .with_min_len(256)
        .map(|k| {
            if k % 256 == 0 {
                work.check()?;
            }
            let order = k as f64 + 0.5;
            let (value, wrong) = sample(terms, plan, order * spacing);
            let share = 1.0 / (std::f64::consts::PI * order);
            Ok((value * share, wrong * share))
        })
        .collect();
    let samples = samples?;
    *error += samples.iter().map(|s| s.1).sum::<f64>();
    let coefficients = samples.into_iter().map(|s| s.0).collect();
    let part = FourierPart::new(spacing, coefficients, plan.remaining, plan.low, plan.high);
    *error += part.interpolation + part.rounding;
    Ok(part)
}

/// The transform of what is left at one frequency, and its error.
fn sample(terms: &[ScaledTerm], plan: &Plan, t: f64) -> (Complex64, f64) {
    if plan.subtracted.is_empty() {
        return whole(terms, t);
    }
    let (mut log_modulus, mut slope, mut lowered) = (0.0, 0.0, 0.0);
    let values: Vec<TermValue> = terms
        .iter()
        .map(|term| {
            let (split, sign) = (term.summand.split(t * term.scale.abs()), term.scale.signum());
            let modulus = (split.atoms + split.continuous).norm().max(1e-300);
            let n = term.count as f64;
            log_modulus += n * modulus.ln();
            slope += n * split.error / modulus;
            // The subtracted terms are made of the same values and err by no more than with |A|.
            lowered += n * split.error / term.summand.atom_mass.max(1e-300);
            let turn = |z: Complex64| if sign < 0.0 { z.conj() } else { z };
            TermValue { count: term.count, atoms: turn(split.atoms), continuous: turn(split.continuous) }
        })
        .collect();
    let weight: f64 = plan.subtracted.iter().map(|s| s.weight).sum();
    let (value, sharp) = remainder(&values, plan.degree, &plan.subtracted);
    let modulus = log_modulus.exp();
    let copies: f64 = terms.iter().map(|t| t.count as f64).sum();
    // The series branch errs relative to what is left, the difference relative to what is subtracted.
    let size = if sharp { value.norm() } else { modulus + weight };
    (value, modulus * slope + weight * lowered.min(1.0) + 3e-16 * size * (10.0 + copies))
}

/// Π φ_i^{n_i} at one frequency, and its error.
fn whole(terms: &[ScaledTerm], t: f64) -> (Complex64, f64) {
    let mut log = Complex64::ZERO;
    let mut relative = 0.0;
    for term in terms {
        let (u, n) = (t * term.scale.abs(), term.count as f64);
        let small = (u < 1.0).then(|| term.summand.cumulant(u)).flatten();
        let (value, wrong) = match small {
            Some((value, wrong)) => (value, wrong),
            None => {
                let split = term.summand.split(u);
                let sum = split.atoms + split.continuous;
                let modulus = sum.norm();
                if modulus <= split.error {
                    // Nothing but error left: the power is bounded, not known.
                    let others = (2.0 * split.error).powf(n);
                    return (Complex64::ZERO, others);
                }
                (sum.ln(), split.error / modulus)
            }
        };
        log += n * if term.scale < 0.0 { value.conj() } else { value };
        relative += n * wrong;
    }
    if log.re < -700.0 {
        return (Complex64::ZERO, 0.0);
    }
    let value = log.exp();
    let rounding = 4e-16 * (1.0 + log.re.abs() + log.im.abs());
    (value, value.norm() * (relative.min(700.0).exp_m1() + rounding))
}

fn describe(plan: &Plan, fourier: Option<&FourierPart>, few: &[(PointMasses, Few)]) -> String {
    let mut text = match fourier {
        Some(part) => format!(
            "characteristic function sampled at {} frequencies, period {:.0} standard deviations",
            part.frequencies(),
            plan.period
        ),
        None => "direct integration of the law".to_owned(),
    };
    if fourier.is_some() && !plan.subtracted.is_empty() {
        text.push_str("; atoms ");
        text.push_str(if few.is_empty() { "added exactly" } else { "and nearly atomic parts added exactly" });
    }
    text
}

impl StandardizedSum for InversionSum {
    fn route(&self) -> Route {
        Route::Inversion
    }

    fn detail(&self) -> String {
        self.detail.clone()
    }

    fn moments(&self) -> SumMoments {
        self.moments
    }

    fn at_or_below(&self, z: f64) -> Figure {
        self.lower(z, |z| self.distribution.at_or_below(z))
    }

    fn below(&self, z: f64) -> Figure {
        self.lower(z, |z| self.distribution.below(z))
    }

    fn above(&self, z: f64) -> Figure {
        self.at_or_below(z).map(|p| 1.0 - p)
    }

    fn at_or_above(&self, z: f64) -> Figure {
        self.below(z).map(|p| 1.0 - p)
    }

    fn kolmogorov(&self) -> Distance {
        *self.supremum.get_or_init(|| {
            let (value, at_z, just_below) = self.distribution.supremum();
            Distance {
                // The place of an extreme is found to 1e-7, its value therefore to 1e-14.
                kolmogorov: Figure::bound(value, self.distribution.error + 1e-14),
                at_z,
                side: if just_below { Side::JustBelow } else { Side::At },
            }
        })
    }

    fn quantile(&self, p: f64) -> Figure {
        if !(p > 0.0 && p < 1.0) {
            let (low, high) = (self.distribution.low, self.distribution.high);
            return Figure::bound(if p > 0.5 { high } else { low }, f64::MAX);
        }
        let value = self.quantile_raw(p);
        let doubt = 2.0 * self.error_at(value);
        let low = if p > doubt { self.quantile_raw(p - doubt) } else { value - f64::MAX };
        let high = if p + doubt < 1.0 { self.quantile_raw(p + doubt) } else { f64::MAX };
        let rounding = 4.0 * f64::EPSILON * (1.0 + value.abs());
        Figure::bound(value, (high - value).max(value - low).min(f64::MAX) + rounding)
    }

    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>> {
        let Some(steps) = &self.distribution.steps else { return Some(Vec::new()) };
        let inside = steps.inside(from - atoms::snap(from), to + atoms::snap(to));
        (inside.len() <= limit).then(|| inside.to_vec())
    }

    fn lattice_span(&self) -> Option<f64> {
        None
    }
}

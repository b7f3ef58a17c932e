//! Sums of independent quantities that are a named law themselves.

use super::continuous::{Family, Smooth};
use super::counting::{CountTable, Counting};
use super::steps::{Scale, Steps};
use super::twofold::Twofold;
use super::{Distance, Method, Route, StandardizedSum, SumError, SumMoments, SumSpec};
use crate::figure::Figure;
use crate::law::{ClosedFamily, ClosedForm};
use crate::work::Work;

/// The distribution of a standardized sum whose law is known by name: normal, gamma, inverse Gaussian, binomial,
/// Poisson or negative binomial, or an affine image of one.
#[derive(Debug)]
pub struct ClosedFormSum {
    inner: Box<dyn StandardizedSum>,
}

/// One term, count and factor folded in: the sum of its copies is shift + factor·Y, Y of the family.
#[derive(Debug, Clone, Copy)]
struct Folded {
    family: ClosedFamily,
    factor: f64,
    shift: f64,
    count: u64,
}

fn unavailable(reason: impl Into<String>) -> SumError {
    SumError::NotAvailable { route: Route::ClosedForm, reason: reason.into() }
}

/// The law of n copies, within the family.
fn copies(form: ClosedForm, count: u64, multiply: f64) -> Folded {
    let n = count as f64;
    let family = match form.family {
        ClosedFamily::Normal { mean, sd } => ClosedFamily::Normal { mean: n * mean, sd: n.sqrt() * sd },
        ClosedFamily::Gamma { shape, scale } => ClosedFamily::Gamma { shape: n * shape, scale },
        // Rates are multiplied in twice the precision where the count is made.
        ClosedFamily::Poisson { rate } => ClosedFamily::Poisson { rate },
        ClosedFamily::Binomial { trials, p } => {
            ClosedFamily::Binomial { trials: trials.saturating_mul(count), p }
        }
        ClosedFamily::NegativeBinomial { size, p } => ClosedFamily::NegativeBinomial { size: n * size, p },
        ClosedFamily::InverseGaussian { mean, shape } => {
            ClosedFamily::InverseGaussian { mean: n * mean, shape: n * n * shape }
        }
    };
    Folded { family, factor: form.multiply * multiply, shift: n * form.add * multiply, count }
}

/// The sum of two folded terms, if it stays in the family.
fn join(a: Folded, b: Folded) -> Option<Folded> {
    use ClosedFamily as F;
    let count = a.count + b.count;
    let shift = a.shift + b.shift;
    let family = match (a.family, b.family) {
        (F::Normal { mean: m, sd: s }, F::Normal { mean, sd }) => {
            let family =
                F::Normal { mean: a.factor * m + b.factor * mean, sd: (a.factor * s).hypot(b.factor * sd) };
            return Some(Folded { family, factor: 1.0, shift, count });
        }
        (F::Gamma { shape: k, scale: t }, F::Gamma { shape, scale }) if a.factor * t == b.factor * scale => {
            return Some(Folded { family: F::Gamma { shape: k + shape, scale: t }, shift, count, ..a });
        }
        (F::Binomial { trials: n, p: q }, F::Binomial { trials, p }) if p == q => {
            F::Binomial { trials: n.saturating_add(trials), p }
        }
        (F::NegativeBinomial { size: r, p: q }, F::NegativeBinomial { size, p }) if p == q => {
            F::NegativeBinomial { size: r + size, p }
        }
        // The rate is the one of a single copy, so only equal rates can be joined by adding counts.
        (F::Poisson { rate: r }, F::Poisson { rate }) if r == rate => F::Poisson { rate },
        _ => return None,
    };
    (a.factor == b.factor).then_some(Folded { family, factor: a.factor, shift, count })
}

impl ClosedFormSum {
    /// Builds the distribution, or says why the sum has no closed form.
    pub fn build(spec: &SumSpec, _method: &Method, work: &Work) -> Result<Self, SumError> {
        work.check()?;
        let mut folded: Option<Folded> = None;
        for term in spec.terms.iter().filter(|term| term.count > 0 && term.multiply != 0.0) {
            let form = term
                .law
                .closed_form
                .ok_or_else(|| unavailable("the sum of copies of this law is not a named law"))?;
            let next = copies(form, term.count, term.multiply);
            folded = Some(match folded {
                None => next,
                Some(so_far) => join(so_far, next)
                    .ok_or_else(|| unavailable("the sum of these unlike laws is not a named law"))?,
            });
        }
        let folded = folded.ok_or(SumError::NoVariance)?;
        let inner = distribution(folded)?;
        let moments = inner.moments();
        if !(moments.sd > 0.0 && moments.sd.is_finite() && moments.mean.is_finite()) {
            return Err(SumError::NoVariance);
        }
        Ok(Self { inner })
    }
}

/// Mean, standard deviation, skewness and excess kurtosis of Y.
fn family_moments(family: ClosedFamily, count: u64) -> (f64, f64, f64, f64) {
    match family {
        ClosedFamily::Normal { mean, sd } => (mean, sd, 0.0, 0.0),
        ClosedFamily::Gamma { shape, scale } => {
            (shape * scale, shape.sqrt() * scale, 2.0 / shape.sqrt(), 6.0 / shape)
        }
        ClosedFamily::Poisson { rate } => {
            let rate = rate * count as f64;
            (rate, rate.sqrt(), 1.0 / rate.sqrt(), 1.0 / rate)
        }
        ClosedFamily::Binomial { trials, p } => {
            let (trials, q) = (trials as f64, 1.0 - p);
            let variance = trials * p * q;
            (trials * p, variance.sqrt(), (q - p) / variance.sqrt(), (1.0 - 6.0 * p * q) / variance)
        }
        ClosedFamily::NegativeBinomial { size, p } => {
            let q = 1.0 - p;
            let root = (size * q).sqrt();
            (size * q / p, root / p, (2.0 - p) / root, 6.0 / size + p * p / (size * q))
        }
        ClosedFamily::InverseGaussian { mean, shape } => {
            let ratio = shape / mean;
            (mean, mean / ratio.sqrt(), 3.0 / ratio.sqrt(), 15.0 / ratio)
        }
    }
}

fn distribution(folded: Folded) -> Result<Box<dyn StandardizedSum>, SumError> {
    let Folded { family, factor, shift, count } = folded;
    let (mean, sd, skewness, excess_kurtosis) = family_moments(family, count);
    let reflected = factor < 0.0;
    let moments = SumMoments {
        n: count,
        mean: shift + factor * mean,
        sd: factor.abs() * sd,
        skewness: Some(if reflected { -skewness } else { skewness }),
        excess_kurtosis: Some(excess_kurtosis),
    };
    if !(sd > 0.0 && moments.sd > 0.0 && moments.sd.is_finite() && moments.mean.is_finite()) {
        return Err(SumError::NoVariance);
    }
    let smooth = |family, name: &str| -> Result<Box<dyn StandardizedSum>, SumError> {
        Ok(Box::new(Smooth { family, reflected, moments, detail: format!("the sum is {name}") }))
    };
    let (law, name) = match family {
        ClosedFamily::Normal { .. } => return smooth(Family::Normal, "normal"),
        ClosedFamily::Gamma { shape, .. } => {
            return smooth(Family::Gamma { shape }, &format!("gamma with shape {shape}"));
        }
        ClosedFamily::InverseGaussian { mean, shape } => {
            let ratio = shape / mean;
            let name = format!("inverse Gaussian with shape/mean = {ratio}");
            return smooth(Family::InverseGaussian { ratio }, &name);
        }
        ClosedFamily::Binomial { trials, p } => {
            if trials > 1 << 52 {
                return Err(unavailable("more than 2^52 trials cannot be counted exactly"));
            }
            (Counting::Binomial { trials: trials as f64, p }, format!("binomial with {trials} trials"))
        }
        ClosedFamily::Poisson { rate } => {
            let rate = Twofold::product(rate, count as f64);
            (Counting::Poisson { rate }, format!("Poisson with rate {}", rate.value()))
        }
        ClosedFamily::NegativeBinomial { size, p } => {
            (Counting::NegativeBinomial { size, p }, format!("negative binomial with size {size}"))
        }
    };
    let scale = Scale {
        center: law.center(),
        sd: law.sd(),
        magnitude: (moments.mean / factor).abs().max((shift / factor).abs()),
        center_error: 0.0,
    };
    if scale.center.high > 1e15 {
        return Err(unavailable("the counts are too large to be told apart"));
    }
    let table = CountTable::new(law)
        .ok_or_else(|| unavailable(format!("the sum is {name}, spread over too many values to tabulate")))?;
    let detail = format!("the sum is {name}; {} values tabulated", table.len());
    Ok(Box::new(Steps { cumulative: table, scale, moments, route: Route::ClosedForm, detail, reflected }))
}

impl StandardizedSum for ClosedFormSum {
    fn route(&self) -> Route {
        Route::ClosedForm
    }

    fn detail(&self) -> String {
        self.inner.detail()
    }

    fn moments(&self) -> SumMoments {
        self.inner.moments()
    }

    fn at_or_below(&self, z: f64) -> Figure {
        self.inner.at_or_below(z)
    }

    fn below(&self, z: f64) -> Figure {
        self.inner.below(z)
    }

    fn above(&self, z: f64) -> Figure {
        self.inner.above(z)
    }

    fn at_or_above(&self, z: f64) -> Figure {
        self.inner.at_or_above(z)
    }

    fn kolmogorov(&self) -> Distance {
        self.inner.kolmogorov()
    }

    fn quantile(&self, p: f64) -> Figure {
        self.inner.quantile(p)
    }

    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>> {
        self.inner.jumps(from, to, limit)
    }

    fn lattice_span(&self) -> Option<f64> {
        self.inner.lattice_span()
    }
}

//! Misses of studentized intervals for normal laws: exactly Student's t, or a smooth integral over the spreads.

use super::critical::{CriticalValues, degrees_of_freedom};
use super::studentized::{Misses, Outcome, Studentized, StudentizedRequest};
use crate::law::{ClosedFamily, Law};
use crate::special::{normal, student};
use crate::sum::{Route, SumError};
use crate::work::Work;

/// Most nodes of a quadrature.
const MOST_NODES: usize = 4_000_000;

/// Misses for normal laws; `None` for other laws.
pub(crate) fn misses(request: &StudentizedRequest, work: &Work) -> Result<Option<Misses>, SumError> {
    match request.statistic {
        Studentized::Mean { law, n } => {
            if sd_of_normal(law).is_none() {
                return Ok(None);
            }
            let (tail, df) = (request.tail_probability, (n - 1) as f64);
            if request.shift == 0.0 {
                let outcome = Outcome { low: tail, high: tail, error: 1e-15 };
                return Ok(Some(
                    outcome.misses(Route::ClosedForm, "the statistic has Student's t law".to_owned()),
                ));
            }
            let t = student::quantile_above(df, tail);
            let center = request.shift * (n as f64).sqrt();
            let Some(outcome) = refined(|fineness| {
                let spread = Spread::new(df, center, fineness)?;
                let mut outcome = (0.0, 0.0);
                for &(w, mass) in &spread.nodes {
                    outcome.0 += mass * normal::at_or_below(-t * w - center);
                    outcome.1 += mass * normal::above(t * w - center);
                }
                Some(outcome)
            }) else {
                return Ok(None);
            };
            Ok(Some(outcome.misses(Route::ClosedForm, "the statistic has the noncentral t law".to_owned())))
        }
        Studentized::Difference { first, n_first, second, n_second } => {
            let (Some(sd1), Some(sd2)) = (sd_of_normal(first), sd_of_normal(second)) else { return Ok(None) };
            let (n1, n2) = (n_first as f64, n_second as f64);
            let (a, b) = (sd1 / n1.sqrt(), sd2 / n2.sqrt());
            let scale = a.hypot(b);
            let (a, b) = ((a / scale).powi(2), (b / scale).powi(2));
            let table = CriticalValues::new(request.tail_probability, n1.min(n2) - 1.0, n1 + n2 - 2.0);
            let center = request.shift;
            let Some(mut outcome) = refined(|fineness| {
                let one = Spread::new(n1 - 1.0, center, fineness)?;
                let two = Spread::new(n2 - 1.0, center, fineness)?;
                if one.nodes.len() * two.nodes.len() > MOST_NODES {
                    return None;
                }
                let mut outcome = (0.0, 0.0);
                for &(w1, mass1) in &one.nodes {
                    if work.is_cancelled() {
                        return None;
                    }
                    for &(w2, mass2) in &two.nodes {
                        let (s1, s2) = (a * w1 * w1, b * w2 * w2);
                        let margin = table.at(degrees_of_freedom(s1, s2, n1, n2)) * (s1 + s2).sqrt();
                        outcome.0 += mass1 * mass2 * normal::at_or_below(-margin - center);
                        outcome.1 += mass1 * mass2 * normal::above(margin - center);
                    }
                }
                Some(outcome)
            }) else {
                work.check()?;
                return Ok(None);
            };
            // A relative error ε of the critical value moves a probability by at most ε·max x φ(x) < ε/4 on average.
            outcome.error += table.error;
            if outcome.error >= 1e-8 {
                return Ok(None);
            }
            let detail = "quadrature over the two sample variances of normal laws".to_owned();
            Ok(Some(outcome.misses(Route::ClosedForm, detail)))
        }
    }
}

/// The sd of a normal law.
fn sd_of_normal(law: &Law) -> Option<f64> {
    match law.closed_form {
        Some(form) => match form.family {
            ClosedFamily::Normal { sd, .. } => Some(sd * form.multiply.abs()),
            _ => None,
        },
        None => None,
    }
}

/// The value on the finer of two grids; its error is stated as ten times the difference to the coarser, plus rounding.
fn refined(quadrature: impl Fn(f64) -> Option<(f64, f64)>) -> Option<Outcome> {
    let coarse = quadrature(1.0)?;
    let fine = quadrature(1.7)?;
    let change = (fine.0 - coarse.0).abs().max((fine.1 - coarse.1).abs());
    let error = 10.0 * change + 1e-13;
    (error < 1e-8).then_some(Outcome { low: fine.0, high: fine.1, error })
}

/// A quadrature rule for w = s/σ: w² df has the χ² law with df degrees of freedom.
///
/// In v = ln w the density is proportional to exp(df·(v − (e^{2v} − 1)/2)), analytic with a strip of width π/4 in
/// which it decays on both sides: the trapezoid rule converges geometrically, and dividing by its own total removes
/// the constant. The integrand Φ(±t e^v − δ) varies over lengths 1/(1+|δ|), which the step follows.
struct Spread {
    nodes: Vec<(f64, f64)>,
}

impl Spread {
    fn new(df: f64, center: f64, fineness: f64) -> Option<Self> {
        let width = 1.0 / (2.0 * df).sqrt();
        let step = (0.25 * width).min(0.06).min(0.25 / (1.0 + center.abs())) / fineness;
        let exponent = |v: f64| df * (v - 0.5 * (2.0 * v).exp_m1());
        let mut nodes = vec![(1.0, 1.0)];
        for direction in [-1.0, 1.0] {
            for index in 1.. {
                let v = direction * step * f64::from(index);
                let e = exponent(v);
                if e < -45.0 {
                    break;
                }
                nodes.push((v.exp(), e.exp()));
                if nodes.len() > MOST_NODES {
                    return None;
                }
            }
        }
        let total: f64 = nodes.iter().map(|node| node.1).sum();
        for node in &mut nodes {
            node.1 /= total;
        }
        Some(Self { nodes })
    }
}

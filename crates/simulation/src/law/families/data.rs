//! Pilot data: each recorded value with the same probability, optionally with a fitted generalized-Pareto tail
//! in place of the largest values.
//!
//! The tail is fitted to the excesses over the threshold (the data's quantile at `above_quantile`) by
//! probability-weighted moments: with a₀ the mean excess and a₁ = E[Y(1 − F(Y))] estimated from the order
//! statistics, shape ξ = 2 − a₀/(a₀ − 2a₁), scale = 2a₀a₁/(a₀ − 2a₁). Reference: J. R. M. Hosking & J. R.
//! Wallis (1987), "Parameter and quantile estimation for the generalized Pareto distribution",
//! *Technometrics* 29:339–349 (their k is −ξ), from memory; checked on exact quantiles in the tests.

use super::generalized_pareto;
use crate::law::checks::{Checks, show};
use crate::law::form::{Form, MOST_ATOMS};
use crate::law::{Atom, DataTail, Piece};

/// Fewest values above the threshold a tail is fitted to.
const FEWEST_EXCESSES: usize = 10;

pub(super) fn compile(values: Option<&[f64]>, tail: Option<&DataTail>, checks: &mut Checks) -> Option<Form> {
    let Some(values) = values else {
        checks.problem("", "must hold `values`, or `path` and `column` of a file that was read");
        return None;
    };
    if values.is_empty() {
        checks.problem("values", "must hold at least one value (got none)");
        return None;
    }
    if values.len() > MOST_ATOMS {
        checks.problem("values", format!("must hold at most {MOST_ATOMS} values (got {})", values.len()));
        return None;
    }
    let mut good = true;
    for (index, &value) in values.iter().enumerate() {
        good &= checks.finite(&format!("values/{index}"), value);
    }
    if !good {
        return None;
    }
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    match tail {
        None => Some(plain(&sorted)),
        Some(DataTail::GeneralizedPareto { above_quantile }) => with_tail(&sorted, *above_quantile, checks),
    }
}

fn atoms(sorted: &[f64], total: usize) -> Vec<Atom> {
    // Equal values are counted first: count/total is exact to half an ulp, a sum of 1/total is not.
    sorted
        .chunk_by(|a, b| a == b)
        .map(|same| Atom { value: same[0], mass: same.len() as f64 / total as f64 })
        .collect()
}

fn plain(sorted: &[f64]) -> Form {
    let mut form = Form::atoms(atoms(sorted, sorted.len()), 0.0);
    if form.atoms.len() == 1 {
        form.warnings.push(format!("all {} pilot values are equal: the data show no spread", sorted.len()));
    } else {
        form.warnings.push(format!(
            "the law is the {} pilot values themselves: values beyond the largest one, {}, count as impossible, \
             and the largest few decide skewness and tail",
            sorted.len(),
            show(sorted[sorted.len() - 1]),
        ));
    }
    form
}

fn with_tail(sorted: &[f64], above_quantile: f64, checks: &mut Checks) -> Option<Form> {
    let place = "tail/above_quantile";
    if !(above_quantile > 0.0 && above_quantile < 1.0) {
        checks.problem(
            place,
            format!("must lie between 0 and 1, ends excluded (got {})", show(above_quantile)),
        );
        return None;
    }
    let count = sorted.len();
    let kept = ((above_quantile * count as f64).ceil() as usize).clamp(1, count);
    let threshold = sorted[kept - 1];
    // Values equal to the threshold stay below it, so that all excesses are positive.
    let kept = sorted.partition_point(|&value| value <= threshold);
    let excesses: Vec<f64> = sorted[kept..].iter().map(|value| value - threshold).collect();
    if excesses.len() < FEWEST_EXCESSES {
        checks.problem(
            place,
            format!(
                "must leave at least {FEWEST_EXCESSES} values above it to fit a tail to (got {})",
                excesses.len()
            ),
        );
        return None;
    }
    let Some((shape, scale)) = fit(&excesses) else {
        checks.problem(place, "no generalized Pareto tail fits the values above it");
        return None;
    };
    let tail_share = excesses.len() as f64 / count as f64;
    let mut form = Form::atoms(atoms(&sorted[..kept], count), 0.0);
    let piece = generalized_pareto::piece(threshold, scale, shape);
    form.pieces.push(Piece { factor: tail_share, ..piece });
    form.warnings.push(format!(
        "beyond {} the {} largest of {count} pilot values are replaced by a fitted generalized Pareto tail (shape \
         {}, scale {}): what is said of the far tail rests on that fit",
        show(threshold),
        excesses.len(),
        show((shape * 1e4).round() / 1e4),
        show(scale),
    ));
    Some(form)
}

/// Shape ξ and scale from ascending positive excesses by probability-weighted moments.
fn fit(excesses: &[f64]) -> Option<(f64, f64)> {
    let count = excesses.len() as f64;
    let size = *excesses.last()?;
    let (mut mean, mut weighted) = (0.0, 0.0);
    for (index, excess) in excesses.iter().enumerate() {
        // Unbiased estimator of E[Y(1 − F)]: weight (m − i)/(m − 1) for the i-th smallest.
        let weight = (count - 1.0 - index as f64) / (count - 1.0);
        mean += excess / size / count;
        weighted += weight * (excess / size) / count;
    }
    let denominator = mean - 2.0 * weighted;
    let shape = 2.0 - mean / denominator;
    let scale = size * (2.0 * mean * weighted / denominator);
    (denominator > 0.0 && shape.is_finite() && shape > -20.0 && scale > 1e-304 && scale < 1e304)
        .then_some((shape, scale))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fit_recovers_the_shape_from_exact_quantiles() {
        for shape in [-0.3, 0.1, 0.4] {
            let count = 20_000;
            let excesses: Vec<f64> = (0..count)
                .map(|i| {
                    let survival = 1.0 - (f64::from(i) + 0.5) / f64::from(count);
                    2.0 * (survival.powf(-shape) - 1.0) / shape
                })
                .collect();
            let (found, scale) = fit(&excesses).unwrap();
            assert!((found - shape).abs() < 0.01 && (scale - 2.0).abs() < 0.02, "{shape}: {found}, {scale}");
        }
    }
}

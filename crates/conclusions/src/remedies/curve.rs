//! The whole curve: what distance is left with an expansion, or with the exact law.

use crate::bounds::{Shape, edgeworth, edgeworth_slope};
use crate::prepared::Prepared;
use crate::report::Remedy;
use crate::words::numbers::about_points;
use gaussgap_simulation::figure::{Basis, Figure};
use gaussgap_simulation::sum::StandardizedSum;

/// Cells of the search for the largest gap.
const CELLS: usize = 256;

/// Beyond this |z| both laws are bounded by their tails.
const REACH: f64 = 7.0;

/// The rows for the planned claim.
pub(super) fn remedies(prepared: &Prepared, sum: &dyn StandardizedSum) -> Vec<Remedy> {
    let allowed = prepared.scenario.tolerance.allowed(0.0);
    let mut rows = Vec::new();
    let moments = sum.moments();
    if let (Some(skewness), Some(excess_kurtosis)) = (moments.skewness, moments.excess_kurtosis) {
        let left = largest_gap(sum, Shape { skewness, excess_kurtosis }, (allowed / 20.0).clamp(1e-4, 1e-2));
        let steps = if sum.lattice_span().is_some() { ", because the steps of the law remain" } else { "" };
        let note = format!(
            "leaves a gap of at most {} of probability{steps}",
            about_points(left.value + left.error)
        );
        rows.push(row("Edgeworth expansion, two terms", left, allowed, note));
    }
    let error = sum.kolmogorov().kolmogorov;
    let left = Figure { value: 0.0, ..error };
    let name = if error.basis == Basis::Bound { "use the exact law" } else { "use the simulated law" };
    let gap = if error.basis == Basis::Bound {
        "no gap is left".to_owned()
    } else {
        format!("leaves a gap of at most {} of probability", about_points(error.error))
    };
    let note = format!("{gap}; the curve of this law itself can be exported as columns");
    rows.push(row(name, left, allowed, note));
    rows
}

/// A row whose figure is the gap that is left.
fn row(name: &str, left: Figure, allowed: f64, note: String) -> Remedy {
    Remedy { name: name.to_owned(), actual: Some(left), holds: left.value + left.error <= allowed, note }
}

/// sup |P(Z ≤ z) − E(z)| with E the two-term expansion.
///
/// On a cell [a, b] the law F grows, so that F − E lies between F(a) − max E and F(b−) − min E, and with the slope of
/// E bounded there by L the supremum exceeds the values at the ends by at most L(b − a). Cells whose bound exceeds
/// the largest value found so far are halved until that excess is below `fine`; this is the stated error.
fn largest_gap(sum: &dyn StandardizedSum, shape: Shape, fine: f64) -> Figure {
    let gap = |z: f64| {
        let expansion = edgeworth(shape, z);
        let (at, below) = (sum.at_or_below(z), sum.below(z));
        ((at.value - expansion).abs().max((below.value - expansion).abs()), at.error.max(below.error))
    };
    let edges =
        (0..=CELLS).map(|index| REACH * (2.0 * index as f64 / CELLS as f64 - 1.0)).collect::<Vec<_>>();
    let values = edges.iter().map(|z| gap(*z)).collect::<Vec<_>>();
    let mut largest = values.iter().map(|(value, _)| *value).fold(0.0, f64::max);
    let mut error = values.iter().map(|(_, error)| *error).fold(0.0, f64::max);
    let mut cells = (0..CELLS)
        .map(|index| (edges[index], edges[index + 1], values[index].0, values[index + 1].0))
        .collect::<Vec<_>>();
    while let Some((a, b, at_a, at_b)) = cells.pop() {
        let excess = edgeworth_slope(shape, a, b) * (b - a);
        if excess <= fine || at_a.max(at_b) + excess <= largest {
            continue;
        }
        let middle = 0.5 * (a + b);
        let (value, its_error) = gap(middle);
        largest = largest.max(value);
        error = f64::max(error, its_error);
        cells.push((a, middle, at_a, value));
        cells.push((middle, b, value, at_b));
    }
    // Beyond the reach both functions lie within their values there of 0 or 1.
    let low = sum.below(-REACH).value + edgeworth(shape, -REACH).abs();
    let high = sum.above(REACH).value + (1.0 - edgeworth(shape, REACH)).abs();
    let basis = sum.at_or_below(0.0).basis;
    Figure { value: largest.max(low).max(high), error: error + fine, basis }
}

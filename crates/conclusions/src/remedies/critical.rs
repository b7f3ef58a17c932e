//! Intervals and tests with known spread: other critical values.

use super::near;
use crate::bounds::{Shape, cornish_fisher};
use crate::claims::{covered, critical_value, shift_of, tail_probability};
use crate::figures::{NEVER, complement};
use crate::prepared::Prepared;
use crate::report::{ClaimFacts, Remedy};
use crate::scenario::{Claim, Sides};
use crate::words::numbers::number_to;
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::sum::StandardizedSum;

/// The rows for the planned claim.
pub(super) fn remedies(prepared: &Prepared, sum: &dyn StandardizedSum, claim: &ClaimFacts) -> Vec<Remedy> {
    let (missing, sides, is_test) = match prepared.scenario.claim {
        Claim::Interval { level, sides, .. } => (1.0 - level, sides, false),
        Claim::Test { significance, sides, .. } => (significance, sides, true),
        _ => return Vec::new(),
    };
    let shift = shift_of(prepared);
    let tail = tail_probability(missing, sides);
    let c = critical_value(missing, sides);
    // The compared number with the limits low ≤ Z ≤ high.
    let actual = |low: f64, high: f64| -> Figure {
        let below = if sides == Sides::Lower && !is_test || sides == Sides::Upper && is_test {
            NEVER
        } else {
            sum.below(low - shift)
        };
        let above = if sides == Sides::Upper && !is_test || sides == Sides::Lower && is_test {
            NEVER
        } else {
            sum.above(high - shift)
        };
        let inside = covered(below, above);
        if is_test { complement(inside) } else { inside }
    };
    let row = |name: &str, low: f64, high: f64, note: &str| {
        let note = match (sides, is_test) {
            (Sides::Two, _) => {
                let [low, high, c] = told_apart(low, high, c);
                format!("{note}: limits at {low} and {high} standard deviations instead of ± {c}")
            }
            (Sides::Upper, true) | (Sides::Lower, false) => {
                let [_, high, c] = told_apart(high, high, c);
                format!("{note}: a limit at {high} standard deviations instead of {c}")
            }
            (Sides::Lower, true) | (Sides::Upper, false) => {
                let [low, _, c] = told_apart(low, low, c);
                format!("{note}: a limit at {low} standard deviations instead of -{c}")
            }
        };
        near(prepared, name, actual(low, high), claim, &note)
    };
    let mut rows = Vec::new();
    if let Some(span) = sum.lattice_span() {
        let wide = c + span / 2.0;
        rows.push(row("continuity correction", -wide, wide, "half a step wider"));
    }
    let moments = sum.moments();
    if let (Some(skewness), Some(excess_kurtosis)) = (moments.skewness, moments.excess_kurtosis) {
        let shape = Shape { skewness, excess_kurtosis };
        let (low, high) = (cornish_fisher(shape, -c), cornish_fisher(shape, c));
        if low < high {
            rows.push(row("Cornish–Fisher critical values", low, high, "from skewness and kurtosis"));
        }
    }
    if tail < 0.5 {
        let (low, high) = (sum.quantile(tail).value, sum.quantile(1.0 - tail).value);
        rows.push(row("exact critical values of this law", low, high, "its own quantiles"));
    }
    rows
}

/// Limits and the normal critical value, with as many digits as tell each limit from it.
fn told_apart(low: f64, high: f64, c: f64) -> [String; 3] {
    let texts = |digits| [number_to(low, digits), number_to(high, digits), number_to(c, digits)];
    (4..=8)
        .map(texts)
        .find(|[low, high, c]| low.trim_start_matches('-') != c && high.trim_start_matches('-') != c)
        .unwrap_or_else(|| texts(4))
}

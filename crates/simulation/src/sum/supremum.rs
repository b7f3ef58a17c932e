//! The widest gap between a continuous distribution and the normal one, from the points where densities cross.

use super::{Distance, Side};
use crate::figure::Figure;

/// A root of `g` between `low` and `high`, where `g` has opposite signs (infinite values count by their sign), by
/// bisection to neighbouring doubles; `None` if the signs agree.
pub(crate) fn crossing(g: impl Fn(f64) -> f64, low: f64, high: f64) -> Option<f64> {
    let (mut low, mut high) = (low, high);
    let rising = g(high) > 0.0;
    if (g(low) > 0.0) == rising {
        return None;
    }
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high {
            break;
        }
        if (g(middle) > 0.0) == rising {
            high = middle;
        } else {
            low = middle;
        }
    }
    Some(0.5 * (low + high))
}

/// The largest |gap| among the candidates. The gap is stationary at each crossing, so that a crossing off by ε
/// changes it by O(ε²) only: the error of the supremum is that of the gap itself.
pub(crate) fn widest(candidates: impl IntoIterator<Item = f64>, gap: impl Fn(f64) -> Figure) -> Distance {
    let mut best = Distance { kolmogorov: Figure::bound(0.0, 0.0), at_z: 0.0, side: Side::At };
    let mut error = 0.0f64;
    for z in candidates {
        let figure = gap(z);
        error = error.max(figure.error);
        if figure.value.abs() > best.kolmogorov.value {
            best.kolmogorov.value = figure.value.abs();
            best.at_z = z;
        }
    }
    best.kolmogorov.error = error;
    best
}

//! The Kolmogorov distance of a sum with one possible jump and a smooth rest.

use super::ContourSum;
use crate::figure::Figure;
use crate::special::normal;
use crate::sum::{Distance, Side};

/// Points of the scan.
const POINTS: usize = 600;

/// Both sides of the jump, a scan of P(T ≤ z) − Φ(z) over the smooth rest, and the bisection of its derivative at
/// every high local extreme.
pub(super) fn distance(sum: &ContourSum) -> Distance {
    // In T's direction; reflecting T and Φ together changes no distance.
    let difference = |z: f64| sum.lower(z, false).value - normal::at_or_below(z);
    let slope = |z: f64| sum.density(z) - normal::density(z);
    let mut best =
        Candidate { size: normal::at_or_below(sum.end), error: 4.0 * sum.blur, z: sum.end, below: true };
    if sum.sum.atom > 0.0 {
        let figure = sum.lower(sum.end, false);
        let size = (figure.value - normal::at_or_below(sum.end)).abs();
        best =
            best.better(Candidate { size, error: figure.error + 4.0 * sum.blur, z: sum.end, below: false });
    }
    let grid = grid(sum.end);
    let values: Vec<f64> = grid.iter().map(|z| difference(*z)).collect();
    let highest = values.iter().map(|v| v.abs()).fold(0.0, f64::max);
    for k in 1..grid.len() - 1 {
        let here = values[k].abs();
        let local = here >= values[k - 1].abs() && here >= values[k + 1].abs();
        if !local || here < 0.8 * highest {
            continue;
        }
        let (mut low, mut high) = (grid[k - 1], grid[k + 1]);
        let rising = values[k].signum();
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                break;
            }
            if slope(middle) * rising > 0.0 { low = middle } else { high = middle }
        }
        for z in [0.5 * (low + high), grid[k]] {
            let figure = sum.lower(z, false);
            let size = (figure.value - normal::at_or_below(z)).abs();
            // The extreme is flat: the bracket's width matters only through the slope that is left there.
            let error = figure.error + (high - low) * slope(z).abs().min(1e3) * 0.5 + 4.0 * f64::EPSILON;
            best = best.better(Candidate { size, error, z, below: false });
        }
    }
    // At an end the supremum is approached from one side; inside it is attained.
    let side =
        if best.below != (sum.direction < 0.0 && best.z == sum.end) { Side::JustBelow } else { Side::At };
    Distance { kolmogorov: Figure::bound(best.size, best.error), at_z: sum.direction * best.z, side }
}

#[derive(Clone, Copy)]
struct Candidate {
    size: f64,
    error: f64,
    z: f64,
    below: bool,
}

impl Candidate {
    fn better(self, other: Self) -> Self {
        if other.size > self.size { other } else { self }
    }
}

/// Even in z over the normal law's range, and in powers near the lower end, where a singular density rises fast.
fn grid(end: f64) -> Vec<f64> {
    let from = end.max(-9.0);
    let mut grid: Vec<f64> = (1..=POINTS).map(|k| from + (9.0 - from) * (k as f64) / POINTS as f64).collect();
    if end > -9.0 {
        grid.extend((1..200).map(|k| end - end * (-0.12 * f64::from(k)).exp()));
    }
    grid.retain(|z| *z > end);
    grid.sort_by(f64::total_cmp);
    grid.dedup();
    grid
}

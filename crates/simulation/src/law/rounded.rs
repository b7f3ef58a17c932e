//! A continuous piece rounded to so many multiples of a step that no table holds them (heavy tails).

use super::Piece;
use super::density::StandardMoments;
use super::form::{MOST_ATOMS, same};
use super::moments::{self, Component};
use super::opaque::OpaqueLaw;
use super::piece::Slice;

/// Cells whose masses enter the moments one by one, on each side of the median.
const NEAR_CELLS: f64 = (1u32 << 18) as f64;

/// round(X/step)·step for X on one piece, conditional on lying on it.
#[derive(Debug)]
pub(crate) struct Rounded {
    piece: Piece,
    slice: Slice,
    mass: f64,
    step: f64,
    moments: StandardMoments,
}

impl Rounded {
    pub(crate) fn new(piece: Piece, step: f64) -> Self {
        let (mass, slice) = (piece.mass(), Slice::of(&piece));
        let moments = rounded_moments(&piece, mass, step);
        Self { piece, slice, mass, step, moments }
    }

    /// The upper edge of the last cell whose value is ≤ x (or < x).
    fn edge(&self, x: f64, strictly: bool) -> f64 {
        let nearest = (x / self.step).round();
        let cell = if same(nearest * self.step, x) {
            nearest - f64::from(u8::from(strictly))
        } else {
            (x / self.step).floor()
        };
        (cell + 0.5) * self.step
    }
}

/// Cells near the median one by one; beyond, rounding acts like an independent uniform error (Sheppard's
/// corrections): variance + h²/12, fourth cumulant − h⁴/120. Beyond 2¹⁸ cells the density changes so little
/// within a cell that the relative error of the moments stays below about 1e-11.
fn rounded_moments(piece: &Piece, mass: f64, step: f64) -> StandardMoments {
    let nearest = |x: f64| (x / step).round_ties_even();
    let middle = nearest(piece.image(piece.conditional_quantile(0.5)));
    let first = (middle - NEAR_CELLS).max(nearest(piece.image_low()));
    let last = (middle + NEAR_CELLS).min(nearest(piece.image_high()));
    let (low, high) = ((first - 0.5) * step, (last + 0.5) * step);
    let mut components = Vec::with_capacity((last - first) as usize + 3);
    for (from, to) in [(f64::NEG_INFINITY, low), (high, f64::INFINITY)] {
        let Some(tail) = piece.restricted(from, to) else { continue };
        let share = tail.mass() / mass;
        if share <= 0.0 {
            continue;
        }
        let plain = moments::of_piece(&tail);
        let error = step * step / 12.0;
        let corrected = plain.sd.map(|sd| sd.hypot(error.sqrt()));
        let ratio = plain.sd.zip(corrected).map(|(sd, corrected)| sd / corrected);
        components.push(Component {
            mass: share,
            moments: StandardMoments {
                mean: plain.mean,
                sd: corrected,
                skewness: plain.skewness.zip(ratio).map(|(skewness, ratio)| skewness * ratio.powi(3)),
                excess_kurtosis: plain
                    .excess_kurtosis
                    .zip(ratio)
                    .zip(corrected)
                    .map(|((excess, ratio), sd)| excess * ratio.powi(4) - (step / sd).powi(4) / 120.0),
            },
        });
    }
    let (mut below, mut above) = (piece.at_or_below(low), piece.above(low));
    for k in 0..=(last - first) as u64 {
        let cell = first + k as f64;
        let edge = (cell + 0.5) * step;
        let (next_below, next_above) = (piece.at_or_below(edge), piece.above(edge));
        let inside = if cell < middle { next_below - below } else { above - next_above };
        (below, above) = (next_below, next_above);
        if inside > 0.0 {
            let moments = StandardMoments::finite(cell * step, 0.0, 0.0, -3.0);
            components.push(Component { mass: inside / mass, moments });
        }
    }
    moments::combine(&components)
}

impl OpaqueLaw for Rounded {
    fn reason(&self) -> String {
        format!("rounding leaves more than {MOST_ATOMS} values")
    }
    fn has_closed_form(&self) -> bool {
        false
    }
    fn moments(&self) -> StandardMoments {
        self.moments
    }
    fn support(&self) -> (f64, f64) {
        let value = |x: f64| (x / self.step).round_ties_even() * self.step;
        (value(self.piece.image_low()), value(self.piece.image_high()))
    }
    fn at_or_below(&self, x: f64, strictly: bool) -> f64 {
        (self.piece.at_or_below(self.edge(x, strictly)) / self.mass).min(1.0)
    }
    fn above(&self, x: f64, or_equal: bool) -> f64 {
        (self.piece.above(self.edge(x, or_equal)) / self.mass).min(1.0)
    }
    fn tail_indices(&self) -> (f64, f64) {
        self.piece.tail_indices()
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        (self.slice.sample(random) / self.step).round_ties_even() * self.step
    }
}

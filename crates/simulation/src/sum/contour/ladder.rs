//! Which hyperbolas are needed: a ladder of ranges from the smallest value of the sum outwards.
//!
//! Each contour crosses the real axis at the saddle of e^(sx) D(s)/|s| for one end of its range, so that nothing is
//! computed as a small difference of large terms: to the right of the pole at 0 for lower tails (and for the upper
//! tails of heavy laws, which then keep absolute accuracy only), to its left for the upper tails of laws with a
//! moment generating function. A range ends where x has changed by a factor 8 or the probability by about e^12.

use super::hyperbola::{Hyperbola, Side};
use super::summand::OneSidedSum;
use crate::work::{Cancelled, Work};
use num_complex::Complex64;

/// Largest ratio of the ends of a range: where the law has its bulk, and near the end, where it is a power.
const RATIO: f64 = 16.0;
const RATIO_NEAR_END: f64 = 1e5;
/// Largest change of ln probability over a range.
const DROP: f64 = 12.0;
/// ln probability at which a tail is left, for laws with a moment generating function.
const FLOOR: f64 = -76.0;
/// The same for heavy laws.
const HEAVY_FLOOR: f64 = -48.0;
/// Farthest argument of heavy tails, in standard deviations above the mean.
const HEAVY_TOP: f64 = 1e4;

/// The saddle for x, and the bound ln P ≤ ln D(s) + s·x there (Chernoff).
#[derive(Debug, Clone, Copy)]
struct Saddle {
    s: f64,
    log_bound: f64,
}

/// The contours in ascending order of their ranges.
#[derive(Debug)]
pub(super) struct Ladder {
    pub(super) rungs: Vec<Hyperbola>,
    /// P(0 < T ≤ x) is at most this for x below the first range.
    pub(super) bottom_bound: f64,
    /// P(T > x) is at most this for x above the last range (Chernoff; 1 for heavy tails).
    pub(super) top_bound: f64,
}

/// Why a ladder was not built.
pub(super) enum Failure {
    Cancelled(Cancelled),
    Refused(String),
}

impl From<Cancelled> for Failure {
    fn from(value: Cancelled) -> Self {
        Self::Cancelled(value)
    }
}

/// ln D(s) + s·x on the real axis; +∞ where D cannot be computed.
fn log_bound(sum: &OneSidedSum, s: f64, x: f64) -> f64 {
    let pivot = if s > 0.0 { 0.0 } else { center(sum, s) };
    let transform = sum.transform(Complex64::new(s, 0.0), pivot);
    if transform.error.is_finite() { transform.value.re.max(1e-300).ln() + s * x } else { f64::INFINITY }
}

/// Where the cut of the transform is taken to start for a contour that crosses the axis at s.
fn center(sum: &OneSidedSum, s: f64) -> f64 {
    if s > 0.0 { 0.0 } else { (-sum.rate).max(2.0 * s) }
}

/// Real s from a coordinate on the whole line.
fn from_coordinate(sum: &OneSidedSum, side: Side, v: f64) -> f64 {
    match side {
        Side::Lower => v.exp(),
        Side::Upper if sum.rate.is_finite() => -sum.rate / (1.0 + (-v).exp()),
        Side::Upper => -v.exp(),
    }
}

/// Minimizes the convex ln D(s) + s·x − ln|s| from the coordinate `guess`, to about 10 %; returns the saddle and its
/// coordinate.
fn saddle(sum: &OneSidedSum, side: Side, x: f64, guess: f64) -> (Saddle, f64) {
    let value = |v: f64| {
        let s = from_coordinate(sum, side, v);
        log_bound(sum, s, x) - s.abs().ln()
    };
    let mut step = 0.7;
    let (mut middle, mut at_middle) = (guess, value(guess));
    let (mut left, mut right) = (value(middle - step), value(middle + step));
    for _ in 0..400 {
        if left < at_middle && left <= right {
            (right, at_middle) = (at_middle, left);
            middle -= step;
            left = value(middle - step);
        } else if right < at_middle {
            (left, at_middle) = (at_middle, right);
            middle += step;
            right = value(middle + step);
        } else {
            break;
        }
    }
    for _ in 0..3 {
        step *= 0.5;
        let (near_left, near_right) = (value(middle - step), value(middle + step));
        if near_left < at_middle {
            middle -= step;
            at_middle = near_left;
        } else if near_right < at_middle {
            middle += step;
            at_middle = near_right;
        }
    }
    let s = from_coordinate(sum, side, middle);
    (Saddle { s, log_bound: at_middle + s.abs().ln() }, middle)
}

impl Ladder {
    /// Ranges from where the lower tail is 1e-33 to where the upper one is; for heavy laws from 1e-20 to 10⁴
    /// standard deviations.
    pub(super) fn build(sum: &OneSidedSum, work: &Work) -> Result<Self, Failure> {
        let opening = sum.opening.min(if sum.n <= 4.0 { 1.1 } else { 0.7 });
        if opening < 0.25 {
            return Err(Failure::Refused(
                "a density may not be turned far enough into the complex plane".into(),
            ));
        }
        let add = |side: Side, saddle: Saddle, range: (f64, f64)| -> Result<Hyperbola, Failure> {
            work.check()?;
            // A narrower opening is tried where the transform grows too fast beyond the imaginary axis.
            [1.0, 0.6, 0.36]
                .into_iter()
                .find_map(|share| {
                    Hyperbola::build(sum, side, saddle.s, center(sum, saddle.s), range, share * opening)
                })
                .ok_or_else(|| Failure::Refused("no contour with a bounded error was found".into()))
        };
        let lower_floor = if sum.rate > 0.0 { FLOOR } else { HEAVY_FLOOR };
        let mut descending = Vec::new();
        let middle = sum.mean;
        // Downwards from the mean: the saddle belongs to the upper end of each range.
        let (mut high, mut guess) = (middle, -middle.ln());
        let (mut upper_saddle, coordinate) = saddle(sum, Side::Lower, high, guess);
        guess = coordinate;
        let bottom_bound = loop {
            let mut ratio: f64 = if high < 0.02 * middle { RATIO_NEAR_END } else { RATIO };
            let (mut low, mut lower_saddle, mut coordinate);
            loop {
                low = high / ratio;
                (lower_saddle, coordinate) = saddle(sum, Side::Lower, low, guess + ratio.ln());
                if upper_saddle.log_bound - lower_saddle.log_bound <= DROP || ratio < 1.000_1 {
                    break;
                }
                ratio = ratio.powf((0.9 * DROP / (upper_saddle.log_bound - lower_saddle.log_bound)).max(0.2));
            }
            descending.push(add(Side::Lower, upper_saddle, (low, high))?);
            (high, upper_saddle, guess) = (low, lower_saddle, coordinate);
            if upper_saddle.log_bound < lower_floor || low < 1e-100 {
                break upper_saddle.log_bound.exp().min(1.0);
            }
            if descending.len() > 400 {
                return Err(Failure::Refused("the lower tail needs too many contours".into()));
            }
        };
        descending.reverse();
        let mut rungs = descending;
        let mut low = middle;
        let mut top_bound = 1.0;
        if sum.rate > 0.0 {
            let start = if sum.rate.is_finite() { -3.0 } else { -middle.ln() };
            let (mut lower_saddle, mut guess) = saddle(sum, Side::Upper, low, start);
            while lower_saddle.log_bound > FLOOR {
                let mut ratio: f64 = RATIO;
                let (mut high, mut upper_saddle, mut coordinate);
                loop {
                    high = low * ratio;
                    (upper_saddle, coordinate) = saddle(sum, Side::Upper, high, guess);
                    let drop = lower_saddle.log_bound - upper_saddle.log_bound;
                    if drop <= DROP || ratio < 1.000_1 {
                        break;
                    }
                    ratio = 1.0 + (ratio - 1.0) * (0.9 * DROP / drop).max(0.2);
                }
                match add(Side::Upper, lower_saddle, (low, high)) {
                    Ok(rung) => rungs.push(rung),
                    Err(Failure::Refused(_)) => break,
                    Err(cancelled) => return Err(cancelled),
                }
                (low, lower_saddle, guess) = (high, upper_saddle, coordinate);
                if rungs.len() > 400 {
                    return Err(Failure::Refused("the upper tail needs too many contours".into()));
                }
            }
            top_bound = lower_saddle.log_bound.exp().min(1.0);
        }
        if top_bound > 1e-20 {
            // A heavy law, or one whose transform grows too fast beyond the pole: absolute accuracy only.
            while low < middle + HEAVY_TOP {
                let high = low * RATIO;
                let (upper_saddle, _) = saddle(sum, Side::Lower, high, -high.ln());
                rungs.push(add(Side::Lower, upper_saddle, (low, high))?);
                low = high;
            }
        }
        Ok(Self { rungs, bottom_bound, top_bound })
    }

    /// The contour for x, if x lies inside the ladder.
    pub(super) fn rung(&self, x: f64) -> Option<&Hyperbola> {
        let k = self.rungs.partition_point(|rung| rung.high < x);
        self.rungs.get(k).filter(|rung| x >= rung.low)
    }
}

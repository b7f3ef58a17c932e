//! Upper bounds on the tails of a standardized sum that need only the tail of a summand.
//!
//! For independent centred X_i with ΣVar X_i ≤ 1, any x, y > 0 (Fuk & Nagaev 1971; Bennett's inequality for the
//! summands cut at y, plus the chance that one of them exceeds y):
//!
//! P(ΣX_i ≥ x) ≤ Σ P(X_i > y) + exp(q − (q + 1/y²) ln(1 + xy)),  q = x/y.
//!
//! The bound is minimised over a ladder of y. It holds whatever moments exist beyond the second.

use super::transform::SummandTransform;
use crate::law::{Density, Law};

/// One term of a standardized sum: `count` copies, each scale·(standardized summand).
#[derive(Debug)]
pub(super) struct ScaledTerm {
    /// The summand.
    pub(super) summand: std::sync::Arc<SummandTransform>,
    /// Number of copies.
    pub(super) count: u64,
    /// Factor on each standardized copy.
    pub(super) scale: f64,
}

/// Upper bounds on one tail of a standardized summand, on a ladder.
#[derive(Debug)]
struct TailLadder {
    /// P(±X > rung k).
    heights: Vec<f64>,
}

/// Both tails of a standardized summand.
#[derive(Debug)]
pub(super) struct Tails {
    upper: TailLadder,
    lower: TailLadder,
}

const FIRST_RUNG: f64 = 1e-3;
const RUNG_RATIO: f64 = 1.04;
const MOST_RUNGS: usize = 900;

impl TailLadder {
    fn new(tail: impl Fn(f64) -> f64) -> Self {
        let mut heights = Vec::new();
        let mut y = FIRST_RUNG;
        while heights.len() < MOST_RUNGS {
            let height = tail(y);
            heights.push(height);
            if height <= 0.0 {
                break;
            }
            y *= RUNG_RATIO;
        }
        Self { heights }
    }

    /// An upper bound on the tail at y > 0: its value at the rung below y.
    fn beyond(&self, y: f64) -> f64 {
        if y < FIRST_RUNG {
            return 1.0;
        }
        let k = ((y / FIRST_RUNG).ln() / RUNG_RATIO.ln() - 1e-9).floor() as usize;
        self.heights[k.min(self.heights.len() - 1)]
    }
}

impl Tails {
    /// Evaluates both ladders.
    pub(super) fn new(law: &Law, mean: f64, sd: f64) -> Self {
        Self {
            upper: TailLadder::new(|y| above(law, mean + y * sd)),
            lower: TailLadder::new(|y| below(law, mean - y * sd)),
        }
    }
}

/// P(X > x) for an unstandardized law, computed from its parts so that small values keep their accuracy.
pub(super) fn above(law: &Law, x: f64) -> f64 {
    let atoms: f64 = law.atoms.iter().rev().take_while(|a| a.value > x).map(|a| a.mass).sum();
    let pieces: f64 = law
        .pieces
        .iter()
        .map(|p| {
            let y = (x - p.add) / p.multiply;
            let (low, high) = if p.multiply > 0.0 { (y.max(p.low), p.high) } else { (p.low, y.min(p.high)) };
            interval_mass(p, low, high)
        })
        .sum();
    atoms + pieces + law.missing_mass
}

/// P(X < x).
pub(super) fn below(law: &Law, x: f64) -> f64 {
    let atoms: f64 = law.atoms.iter().take_while(|a| a.value < x).map(|a| a.mass).sum();
    let pieces: f64 = law
        .pieces
        .iter()
        .map(|p| {
            let y = (x - p.add) / p.multiply;
            let (low, high) = if p.multiply > 0.0 { (p.low, y.min(p.high)) } else { (y.max(p.low), p.high) };
            interval_mass(p, low, high)
        })
        .sum();
    atoms + pieces + law.missing_mass
}

/// factor·P(low < Y ≤ high) for the family of a piece, from whichever tail is smaller.
pub(super) fn interval_mass(piece: &crate::law::Piece, low: f64, high: f64) -> f64 {
    if low.is_nan() || high.is_nan() || low >= high {
        return 0.0;
    }
    let density = piece.density.as_ref();
    let lower = at_or_below(density, low);
    let share = if lower < 0.5 {
        at_or_below(density, high) - lower
    } else {
        survival(density, low) - survival(density, high)
    };
    (piece.factor * share).max(0.0)
}

/// F(x), infinite x included.
pub(super) fn at_or_below(density: &dyn Density, x: f64) -> f64 {
    if x.is_finite() { density.at_or_below(x) } else { f64::from(u8::from(x > 0.0)) }
}

/// 1 − F(x), infinite x included.
pub(super) fn survival(density: &dyn Density, x: f64) -> f64 {
    if x.is_finite() { density.above(x) } else { f64::from(u8::from(x < 0.0)) }
}

impl ScaledTerm {
    /// P(scale·X > y) for one copy (`upper`), or P(scale·X < −y).
    fn one_beyond(&self, y: f64, upper: bool) -> f64 {
        let tails = self.summand.tails();
        let tail = if upper == (self.scale > 0.0) { &tails.upper } else { &tails.lower };
        tail.beyond(y / self.scale.abs())
    }

    /// Largest value of the term (`upper`), or largest value of its negative.
    fn reach(&self, upper: bool) -> f64 {
        let standard = self.summand.standard;
        let (low, high) = self.summand.law.support;
        let end = if upper == (self.scale > 0.0) { high - standard.mean } else { standard.mean - low };
        end / standard.sd * self.scale.abs() * self.count as f64
    }
}

/// Upper bound on P(Z > x) (`upper`) or P(Z < −x), for x > 0.
pub(super) fn beyond(terms: &[ScaledTerm], x: f64, upper: bool) -> f64 {
    if x <= 0.0 {
        return 1.0;
    }
    let reach: f64 = terms.iter().map(|t| t.reach(upper)).sum();
    if x > reach * (1.0 + 1e-12) {
        return 0.0;
    }
    let mut best: f64 = 1.0;
    for q in [
        1.02, 1.05, 1.1, 1.2, 1.35, 1.5, 1.75, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0, 15.0, 20.0,
        30.0, 50.0, 100.0, 1000.0,
    ] {
        let y = x / q;
        let second = (q - (q + 1.0 / (y * y)) * (x * y).ln_1p()).exp();
        if second >= best {
            continue;
        }
        let first: f64 = terms.iter().map(|t| t.count as f64 * t.one_beyond(y, upper)).sum();
        best = best.min(first + second);
    }
    best
}

/// The smallest x (to a few per cent) with [`beyond`] ≤ `probability`; `None` above 10⁹.
pub(super) fn reach_of(terms: &[ScaledTerm], probability: f64, upper: bool) -> Option<f64> {
    let mut high = 1.0;
    while beyond(terms, high, upper) > probability {
        high *= 1.5;
        if high > 1e9 {
            return None;
        }
    }
    let mut low = if high > 1.0 { high / 1.5 } else { 0.0 };
    for _ in 0..6 {
        let middle = 0.5 * (low + high);
        if beyond(terms, middle, upper) > probability {
            low = middle;
        } else {
            high = middle;
        }
    }
    Some(high)
}

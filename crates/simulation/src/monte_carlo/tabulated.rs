//! Fast draws from one continuous piece of a law: its inverse distribution function in a checked table.
//!
//! The draws are X = Q(U) with U uniform, Q the conditional quantile function of the piece. Evaluating Q costs
//! hundreds of operations; a cubic Hermite polynomial through Q and Q' = 1/f on each of 1 024 equal stretches of
//! U costs three multiplications. The outermost thirty-second on either side has a finer table of its own, and a
//! stretch where the polynomial is not good enough (next to an infinite end, a breakpoint, a zero of f) is
//! drawn exactly. Numerical inversion with a controlled error in U goes back to Hörmann and Leydold 2003 (ACM
//! TOMACS 13:347) and Derflinger, Hörmann and Leydold 2010 (ACM TOMACS 20:18).
//!
//! **Error.** A polynomial is accepted only if |F(Q̃(u)) − u| ≤ [`TOLERANCE`]/2 at five points inside its stretch, F
//! being the accurate distribution function; the error of a Hermite cubic is near t²(1−t)² there. In the middle U has 32 bits, which adds half of 2⁻³². The law F̃ of
//! the draws then satisfies sup|F̃ − F| ≤ [`DRAW_ERROR`] (couple both through U), and the n-fold sum n times as
//! much, because convolving with a law cannot enlarge a Kolmogorov distance. Callers add that to their bands.

use crate::law::Piece;
use rand::Rng;

/// Largest error in U of an accepted polynomial; it is checked to half of that.
const TOLERANCE: f64 = 2e-9;

/// Bound on the Kolmogorov distance between the law of one draw and the piece.
pub(crate) const DRAW_ERROR: f64 = TOLERANCE + 1.2e-10;

/// log₂ of the number of stretches per table.
const CELL_BITS: u32 = 10;
const CELLS: usize = 1 << CELL_BITS;
/// Stretches of the main table, on each side, that the finer tables take over: 1/32 of the probability.
const OUTER: usize = CELLS / 32;
/// Bits of a 32-bit word left for the place inside a stretch.
const PLACE_BITS: u32 = 32 - CELL_BITS;

/// Coefficients of the polynomial in t ∈ [0, 1]; the first is `NaN` where a stretch must be drawn another way.
type Cell = [f64; 4];
const ANOTHER_WAY: Cell = [f64::NAN; 4];

/// A piece conditional on itself, drawn by inversion.
#[derive(Debug, Clone)]
pub(crate) struct TabulatedQuantile {
    inverse: PieceInverse,
    middle: Vec<Cell>,
    lower: Vec<Cell>,
    upper: Vec<Cell>,
}

/// The exact conditional quantile of a piece, of (image − centre)/unit.
#[derive(Debug, Clone)]
struct PieceInverse {
    piece: Piece,
    shift: f64,
    factor: f64,
    at_low: f64,
    above_high: f64,
    mass: f64,
}

impl PieceInverse {
    fn new(piece: &Piece, center: f64, unit: f64) -> Self {
        let at_low = if piece.low.is_finite() { piece.density.at_or_below(piece.low) } else { 0.0 };
        let above_high = if piece.high.is_finite() { piece.density.above(piece.high) } else { 0.0 };
        let mass = piece.between(piece.low, piece.high);
        let (shift, factor) = ((piece.add - center) / unit, piece.multiply / unit);
        Self { piece: piece.clone(), shift, factor, at_low, above_high, mass }
    }

    /// y with conditional probability `p` below it and `q` = 1 − p above it, in the family's units.
    fn family_units(&self, p: f64, q: f64) -> f64 {
        let below = self.at_low + self.mass * p;
        let above = self.above_high + self.mass * q;
        let y = if below <= above {
            self.piece.density.quantile(below.clamp(f64::MIN_POSITIVE, 1.0 - f64::EPSILON))
        } else {
            self.piece.density.quantile_above(above.clamp(f64::MIN_POSITIVE, 1.0 - f64::EPSILON))
        };
        y.clamp(self.piece.low, self.piece.high)
    }

    fn image(&self, y: f64) -> f64 {
        self.shift + self.factor * y
    }

    /// How far `y` is from conditional probability p (q = 1 − p), in probability.
    fn miss(&self, y: f64, p: f64, q: f64) -> f64 {
        let y = y.clamp(self.piece.low, self.piece.high);
        if p <= q {
            ((self.piece.density.at_or_below(y) - self.at_low) / self.mass - p).abs()
        } else {
            ((self.piece.density.above(y) - self.above_high) / self.mass - q).abs()
        }
    }

    /// Tables the equal parts of [0, width] of the probability; `upper` measures from above.
    fn table(&self, width: f64, upper: bool, skip_outer: bool) -> Vec<Cell> {
        let step = width / CELLS as f64;
        let sides = |u: f64| if upper { (1.0 - u, u) } else { (u, 1.0 - u) };
        let direction = if upper { -1.0 } else { 1.0 };
        let node = |index: usize| {
            let (p, q) = sides(index as f64 * step);
            if p <= 0.0 || q <= 0.0 {
                let end = if p <= 0.0 { self.piece.low } else { self.piece.high };
                return (end, self.piece.density.density(end));
            }
            let y = self.family_units(p, q);
            (y, self.piece.density.density(y))
        };
        let mut cells = vec![ANOTHER_WAY; CELLS];
        let range = if skip_outer { OUTER..CELLS - OUTER } else { 0..CELLS };
        let mut left = node(range.start);
        for index in range {
            let right = node(index + 1);
            let ((y0, f0), (y1, f1)) = (left, right);
            left = right;
            // dy/dt = ± step·mass/f(y).
            let (d0, d1) = (direction * step * self.mass / f0, direction * step * self.mass / f1);
            let rise = y1 - y0;
            let cell = [y0, d0, 3.0 * rise - 2.0 * d0 - d1, d0 + d1 - 2.0 * rise];
            if !cell.iter().all(|c| c.is_finite()) {
                continue;
            }
            let good = [0.08, 0.27, 0.5, 0.73, 0.92].iter().all(|&t| {
                let (p, q) = sides((index as f64 + t) * step);
                self.miss(evaluate(&cell, t), p, q) <= 0.5 * TOLERANCE
            });
            if good {
                let factor = self.factor;
                let image = [self.shift + factor * y0, factor * cell[1], factor * cell[2], factor * cell[3]];
                if image.iter().all(|c| c.is_finite()) {
                    cells[index] = image;
                }
            }
        }
        cells
    }
}

#[inline(always)]
fn evaluate(cell: &Cell, t: f64) -> f64 {
    cell[0] + t * (cell[1] + t * (cell[2] + t * cell[3]))
}

impl TabulatedQuantile {
    /// Tables a piece of positive mass. Draws are (X − `center`)/`unit`.
    pub(crate) fn new(piece: &Piece, center: f64, unit: f64) -> Self {
        let inverse = PieceInverse::new(piece, center, unit);
        let outer = OUTER as f64 / CELLS as f64;
        Self {
            middle: inverse.table(1.0, false, true),
            lower: inverse.table(outer, false, false),
            upper: inverse.table(outer, true, false),
            inverse,
        }
    }

    /// Draws `count` times and hands each value to `take`.
    #[inline]
    pub(crate) fn draw_each<R: Rng>(&self, count: u64, random: &mut R, mut take: impl FnMut(f64)) {
        for _ in 0..count / 2 {
            let word = random.next_u64();
            let first = self.from_word(word as u32, random);
            let second = self.from_word((word >> 32) as u32, random);
            take(first);
            take(second);
        }
        if count % 2 == 1 {
            let word = random.next_u64();
            take(self.from_word((word >> 32) as u32, random));
        }
    }

    #[inline(always)]
    fn from_word<R: Rng>(&self, word: u32, random: &mut R) -> f64 {
        const PLACE: f64 = 1.0 / (1u32 << PLACE_BITS) as f64;
        let index = (word >> PLACE_BITS) as usize;
        let t = (f64::from(word & ((1 << PLACE_BITS) - 1)) + 0.5) * PLACE;
        let value = evaluate(&self.middle[index], t);
        if value.is_nan() { self.another_way(index, random) } else { value }
    }

    /// A stretch of the middle table that has no polynomial: a fresh 53-bit place in it, by a finer table or exactly.
    #[cold]
    #[inline(never)]
    fn another_way<R: Rng>(&self, index: usize, random: &mut R) -> f64 {
        // Strictly between 0 and 1.
        let place = ((random.next_u64() >> 11) as f64 + 0.5) / (1u64 << 53) as f64;
        let p = (index as f64 + place) / CELLS as f64;
        let q = ((CELLS - 1 - index) as f64 + (1.0 - place)) / CELLS as f64;
        let fine = |table: &[Cell], tail: f64| {
            let u = tail * (CELLS / OUTER * CELLS) as f64;
            let cell = (u as usize).min(CELLS - 1);
            evaluate(&table[cell], u - cell as f64)
        };
        let value = if index < OUTER {
            fine(&self.lower, p)
        } else if index >= CELLS - OUTER {
            fine(&self.upper, q)
        } else {
            f64::NAN
        };
        if value.is_nan() { self.inverse.image(self.inverse.family_units(p, q)) } else { value }
    }
}

#[cfg(test)]
mod tests {
    use super::super::streams::{Purpose, block_stream};
    use super::*;
    use crate::law::LawSpec;

    fn examples() -> Vec<(&'static str, Piece)> {
        let first = |spec: LawSpec| spec.compile().expect("a valid law").pieces[0].clone();
        let lognormal = LawSpec::Lognormal { log_mean: Some(0.0), log_sd: Some(1.0), mean: None, sd: None };
        vec![
            ("exponential", first(LawSpec::Exponential { mean: 2.0 })),
            ("normal", first(LawSpec::Normal { mean: 1.0, sd: 3.0 })),
            ("uniform", first(LawSpec::Uniform { low: -1.0, high: 4.0 })),
            ("lognormal", first(lognormal.clone())),
            ("weibull", first(LawSpec::Weibull { shape: 0.7, scale: 1.0 })),
            ("gamma", first(LawSpec::Gamma { shape: 0.4, scale: 1.0 })),
            ("lomax", first(LawSpec::Lomax { shape: 2.3, scale: 1.0 })),
            (
                "restricted",
                first(LawSpec::Restrict { law: Box::new(lognormal), low: Some(0.5), high: Some(2.0) }),
            ),
        ]
    }

    #[test]
    fn accepted_polynomials_meet_the_tolerance_between_the_checked_points() {
        for (name, piece) in examples() {
            let table = TabulatedQuantile::new(&piece, 0.0, 1.0);
            let inverse = &table.inverse;
            let mut without = 0;
            for index in OUTER..CELLS - OUTER {
                if table.middle[index][0].is_nan() {
                    without += 1;
                    continue;
                }
                for t in [0.0, 0.02, 0.15, 0.39, 0.61, 0.83, 0.99, 1.0] {
                    let u = (index as f64 + t) / CELLS as f64;
                    let y = piece.preimage(evaluate(&table.middle[index], t));
                    assert!(inverse.miss(y, u, 1.0 - u) <= TOLERANCE, "{name} at {u}");
                }
            }
            assert!(without <= 8, "{name}: {without} stretches without a polynomial");
        }
    }

    #[test]
    fn draws_follow_the_law() {
        for (name, piece) in examples() {
            let table = TabulatedQuantile::new(&piece, 0.5, 2.0);
            let mut random = block_stream(11, Purpose::Sums, 0);
            let draws = 300_001u64;
            let mut values = Vec::new();
            table.draw_each(draws, &mut random, |value| values.push(0.5 + 2.0 * value));
            values.sort_by(f64::total_cmp);
            let mass = piece.mass();
            let mut largest = 0.0f64;
            for (index, x) in values.iter().enumerate() {
                let p = piece.at_or_below(*x) / mass;
                largest = largest.max((index as f64 / draws as f64 - p).abs());
            }
            // Probability 1e-6 of exceeding it, each (Massart's inequality).
            assert!(largest < ((2.0f64 / 1e-6).ln() / (2.0 * draws as f64)).sqrt(), "{name}: {largest}");
            // The outer tables, alone: 1/32 on either side, and a thousandth.
            for share in [1.0 / 32.0, 1e-3] {
                let low = values.iter().filter(|x| piece.at_or_below(**x) < share * mass).count() as f64;
                let high = values.iter().filter(|x| piece.above(**x) < share * mass).count() as f64;
                let (expected, sd) = (share * draws as f64, (share * draws as f64).sqrt());
                assert!((low - expected).abs() < 5.0 * sd, "{name}: {low} for {expected}");
                assert!((high - expected).abs() < 5.0 * sd, "{name}: {high} for {expected}");
            }
        }
    }
}

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

use super::alias::BinomialCount;
use super::streams::Stream;
use crate::law::Piece;
use rand::Rng;

/// Largest error in U of an accepted polynomial; it is checked to half of that.
const TOLERANCE: f64 = 2e-9;

/// Bound on the Kolmogorov distance between the law of one draw and the piece.
pub(crate) const DRAW_ERROR: f64 = TOLERANCE + 1.2e-10;

/// Number of stretches per table.
const CELLS: usize = 1 << 10;
/// Stretches of the main table, on each side, that the finer tables take over: 1/32 of the probability.
const OUTER: usize = CELLS / PARTS;
/// Stretches of the finer tables per stretch of the main one.
const PARTS: usize = 32;
/// Coefficients of the polynomial in t ∈ [0, 1]; the first is `NaN` where there is none.
type Cell = [f64; 4];
const ANOTHER_WAY: Cell = [f64::NAN; 4];

/// Counts of special stretches come from tables for 1, 2, 4, … values up to 2 to this power.
const COUNT_TABLES: u32 = 20;

/// A piece conditional on itself, drawn by inversion.
#[derive(Debug, Clone)]
pub(crate) struct TabulatedQuantile {
    inverse: PieceInverse,
    /// The stretches of the main table that have a polynomial, as polynomials in 2³²·t minus a half step.
    plain: Box<[Cell; CELLS]>,
    /// How many of them there are.
    plain_count: u32,
    /// Numbers of the inner stretches without one.
    bare: Vec<u16>,
    /// How many of 2ⁱ values fall on outer or bare stretches.
    special_counts: Vec<BinomialCount>,
    /// The finer tables: the lower outer stretches counted from below, then the upper ones counted from above.
    outer: Vec<Cell>,
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

    /// The value with conditional probability p below it, without a table.
    #[cold]
    fn exactly(&self, p: f64, q: f64) -> f64 {
        self.shift + self.factor * self.family_units(p, q)
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

/// The polynomial as one in w = 2³²·t less half a step of w: words w are multiples of `step` on average.
fn in_words(cell: &Cell, step: f64) -> Cell {
    const WORD: f64 = 1.0 / 4_294_967_296.0;
    let [_, c1, c2, c3] = *cell;
    let t = 0.5 * step * WORD;
    [
        evaluate(cell, t),
        WORD * (c1 + t * (2.0 * c2 + t * 3.0 * c3)),
        WORD * WORD * (c2 + 3.0 * t * c3),
        WORD * WORD * WORD * c3,
    ]
}

impl TabulatedQuantile {
    /// Tables a piece of positive mass. Draws are (X − `center`)/`unit`.
    pub(crate) fn new(piece: &Piece, center: f64, unit: f64) -> Self {
        let inverse = PieceInverse::new(piece, center, unit);
        let share = OUTER as f64 / CELLS as f64;
        let mut outer = inverse.table(share, false, false);
        outer.extend(inverse.table(share, true, false));
        let cells = inverse.table(1.0, false, true);
        let (bare, good): (Vec<u16>, Vec<u16>) =
            (OUTER as u16..(CELLS - OUTER) as u16).partition(|&index| cells[usize::from(index)][0].is_nan());
        let mut plain = Box::new([[0.0; 4]; CELLS]);
        for (cell, &index) in plain.iter_mut().zip(&good) {
            *cell = in_words(&cells[usize::from(index)], good.len() as f64);
        }
        let q = good.len() as f64 / CELLS as f64;
        let p = (2 * OUTER + bare.len()) as f64 / CELLS as f64;
        let special_counts = (0..=COUNT_TABLES).map(|power| BinomialCount::new(1 << power, p, q)).collect();
        Self { inverse, plain, plain_count: good.len() as u32, bare, special_counts, outer }
    }

    /// Draws `count` values; their sum and, unless `SQUARES` is false, the sum of their squares.
    ///
    /// First how many fall on special stretches; the rest is a loop without branches.
    #[inline]
    pub(crate) fn totals<const SQUARES: bool>(&self, count: u64, random: &mut Stream) -> (f64, f64) {
        // Two running totals: additions to one need not wait for the other.
        let (mut sums, mut squares) = ([0.0; 2], [0.0; 2]);
        let mut add = |which: usize, value: f64| {
            sums[which] += value;
            if SQUARES {
                squares[which] += value * value;
            }
        };
        // A copy of the generator's state lives in registers.
        let mut own = random.clone();
        let special = self.draw_special_count(count, &mut own);
        let plain = count - special;
        // The high half of word × number of stretches chooses the stretch, the low half the place in it.
        let draw = |word: u64| {
            let product = (word & 0xffff_ffff) * u64::from(self.plain_count);
            let cell = &self.plain[(product >> 32) as usize % CELLS];
            evaluate(cell, f64::from(product as u32))
        };
        for _ in 0..plain / 2 {
            let word = own.next_u64();
            add(0, draw(word));
            add(1, draw(word >> 32));
        }
        if plain % 2 == 1 {
            add(0, draw(own.next_u64() >> 32));
        }
        for _ in 0..special {
            add(1, self.draw_special(&mut own));
        }
        *random = own;
        (sums[0] + sums[1], squares[0] + squares[1])
    }

    /// How many of `count` values fall on special stretches: the sum of the counts for the binary digits of `count`.
    #[inline]
    fn draw_special_count(&self, count: u64, random: &mut Stream) -> u64 {
        let mut left = count;
        let mut special = 0;
        while left >> (COUNT_TABLES + 1) > 0 {
            special += self.special_counts[COUNT_TABLES as usize].draw(random);
            left -= 1 << COUNT_TABLES;
        }
        while left > 0 {
            special += self.special_counts[left.trailing_zeros() as usize].draw(random);
            left &= left - 1;
        }
        special
    }

    /// A value on an outer or bare stretch: one of equally likely slots, the stretches of the finer tables and as short
    /// parts of the bare ones, and a 53-bit place in it.
    #[inline]
    fn draw_special(&self, random: &mut Stream) -> f64 {
        let slots = 2 * CELLS + self.bare.len() * PARTS;
        let product = u128::from(random.next_u64()) * slots as u128;
        let slot = (product >> 64) as usize;
        // Strictly between 0 and 1.
        let place = ((product as u64 >> 11) as f64 + 0.5) / (1u64 << 53) as f64;
        let value = self.outer.get(slot).map_or(f64::NAN, |cell| evaluate(cell, place));
        if value.is_nan() { self.draw_exactly(slot, place) } else { value }
    }

    #[cold]
    fn draw_exactly(&self, slot: usize, place: f64) -> f64 {
        let short = (CELLS * PARTS) as f64;
        if slot < 2 * CELLS {
            let tail = ((slot % CELLS) as f64 + place) / short;
            return if slot < CELLS {
                self.inverse.exactly(tail, 1.0 - tail)
            } else {
                self.inverse.exactly(1.0 - tail, tail)
            };
        }
        let (bare, part) = ((slot - 2 * CELLS) / PARTS, (slot - 2 * CELLS) % PARTS);
        let from_below = (usize::from(self.bare[bare]) * PARTS + part) as f64 + place;
        self.inverse.exactly(from_below / short, (short - from_below) / short)
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
            let without = table.bare.len();
            let step = f64::from(table.plain_count);
            let plain = (OUTER as u16..(CELLS - OUTER) as u16).filter(|index| !table.bare.contains(index));
            for (cell, index) in table.plain.iter().zip(plain) {
                for t in [0.0, 0.02, 0.15, 0.39, 0.61, 0.83, 0.99, 1.0] {
                    let u = (f64::from(index) + t) / CELLS as f64;
                    let y = piece.preimage(evaluate(cell, t * 4_294_967_296.0 - 0.5 * step));
                    assert!(inverse.miss(y, u, 1.0 - u) <= TOLERANCE, "{name} at {u}");
                }
            }
            assert!(without <= 8, "{name}: {without} stretches without a polynomial");
        }
    }

    #[test]
    fn totals_are_those_of_the_law() {
        for (name, piece) in examples() {
            if name == "lomax" {
                // No third moment: the mean of squares says nothing.
                continue;
            }
            let moment = |k: i32| {
                let step = 1.0 / 65_536.0;
                let at = |u: f64| piece.image(piece.conditional_quantile(u)).powi(k);
                (0..65_536).map(|i| at((f64::from(i) + 0.5) * step)).sum::<f64>() * step
            };
            let (first, second, fourth) = (moment(1), moment(2), moment(4));
            let table = TabulatedQuantile::new(&piece, 0.0, 1.0);
            let mut random = block_stream(12, Purpose::Sums, 0);
            let (mut sum, mut squares) = (0.0, 0.0);
            for _ in 0..1000 {
                let totals = table.totals::<true>(301, &mut random);
                sum += totals.0;
                squares += totals.1;
            }
            let count = 301_000.0f64;
            let sd = (second / count).sqrt();
            assert!(
                (sum / count - first).abs() < 6.0 * sd + 1e-3 * first.abs(),
                "{name}: {} {first}",
                sum / count
            );
            let sd = (fourth / count).sqrt();
            assert!(
                (squares / count - second).abs() < 6.0 * sd + 5e-3 * second,
                "{name}: {} {second}",
                squares / count
            );
        }
    }

    #[test]
    fn draws_follow_the_law() {
        for (name, piece) in examples() {
            let table = TabulatedQuantile::new(&piece, 0.5, 2.0);
            let mut random = block_stream(11, Purpose::Sums, 0);
            let draws = 300_001u64;
            let mut values: Vec<f64> =
                (0..draws).map(|_| 0.5 + 2.0 * table.totals::<false>(1, &mut random).0).collect();
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

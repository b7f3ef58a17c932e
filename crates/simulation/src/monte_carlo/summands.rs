//! Drawing n copies of a law at once: their sum, and for studentized statistics their sum of squares.
//!
//! Everything is measured from the mean, so nothing cancels, and in a given unit, so no square overflows. How n copies are drawn:
//! - a law whose sums have a closed form: one draw of the sum;
//! - a mixed law (atoms and continuous pieces): how many copies fall on each part, as binomial counts (one draw
//!   from a table for a mostly-zero law), then each piece's copies;
//! - few atoms and many copies: the count of each atom; many atoms: one alias draw per copy;
//! - continuous pieces: [`super::tabulated`].

use super::alias::{AliasTable, BinomialCount, draw_binomial};
use super::streams::Stream;
use super::tabulated::{DRAW_ERROR, TabulatedQuantile};
use crate::law::{ClosedFamily, ClosedForm, Law, Piece, Sampler};
use rand::Rng;
use rand_distr::Distribution;

/// Drawing counts pays when there are this many copies per part.
const COPIES_PER_COUNT: u64 = 20;
/// At most so many atoms get a count of their own.
const COUNTED_ATOMS: usize = 256;
/// At most so many curved pieces get a table; a law with more is drawn by its own sampler.
const TABLED_PIECES: usize = 24;

/// Totals of a sample, measured from the mean of the law in units.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Totals {
    /// Σ (x − mean).
    pub sum: f64,
    /// Σ (x − mean)².
    pub squares: f64,
    /// Whether all values are one and the same atom.
    pub all_equal: bool,
}

/// Draws n copies of a law.
#[derive(Debug, Clone)]
pub(crate) struct SampleDrawer {
    count: u64,
    parts: Vec<Part>,
    split: Split,
    /// Expected number of elementary draws per sample.
    pub cost: f64,
    /// Bound on the Kolmogorov distance between the drawn law of the sum and the true one.
    pub error: f64,
    /// Size of the values in units, against which rounding is measured.
    pub scale: f64,
}

/// A part of a law that is drawn in one way.
#[derive(Debug, Clone)]
enum Part {
    /// One atom.
    Point(f64),
    /// Atoms in their proportions.
    Points { values: Vec<f64>, table: AliasTable },
    /// Uniform pieces in their proportions, each as its lower end and its length.
    Bars { bars: Vec<(f64, f64)>, table: AliasTable },
    /// A continuous piece.
    Stretch(Box<TabulatedQuantile>),
    /// A law that is not in normal form: its own sampler.
    Whole { sampler: Box<Sampler>, center: f64, unit: f64 },
}

/// How copies are shared among the parts.
#[derive(Debug, Clone)]
enum Split {
    /// There is one part.
    One,
    /// Counts: the first part's, then for each further part its share of what remains.
    Counts { first: BinomialCount, shares: Vec<f64> },
    /// Copy by copy.
    Each(AliasTable),
}

impl SampleDrawer {
    /// Prepares drawing `count` copies of (X − mean)/`unit`, for a law with a finite mean.
    pub(crate) fn new(law: &Law, count: u64, unit: f64) -> Self {
        let center = law.moments.mean.unwrap_or(0.0);
        let (parts, masses) = parts_of(law, center, unit, count);
        let split = match parts.len() {
            0 | 1 => Split::One,
            2 => counts(&masses, count),
            length if count >= COPIES_PER_COUNT * length as u64 => counts(&masses, count),
            _ => Split::Each(AliasTable::new(&masses)),
        };
        let total: f64 = masses.iter().sum();
        let per_copy: f64 = parts.iter().zip(&masses).map(|(part, mass)| part.cost() * mass / total).sum();
        let overhead = match &split {
            Split::One => 0.0,
            Split::Counts { shares, .. } => 2.0 + 15.0 * shares.len().saturating_sub(1) as f64,
            Split::Each(_) => count as f64,
        };
        let continuous = parts.iter().any(|part| matches!(part, Part::Stretch(_)));
        let error = count as f64 * (law.missing_mass + if continuous { DRAW_ERROR } else { 1e-15 });
        let scale =
            law.atoms.iter().map(|atom| (atom.value / unit).abs()).fold((center / unit).abs(), f64::max);
        let cost = (per_copy * count as f64 + overhead).max(1.0);
        Self { count, parts, split, cost, error: error.min(1.0), scale }
    }

    /// Draws the totals. `SQUARES` false leaves `squares` and `all_equal` unset, for speed.
    #[inline]
    pub(crate) fn draw<const SQUARES: bool>(&self, random: &mut Stream) -> Totals {
        let mut totals = Running::default();
        match &self.split {
            Split::One => {
                if let Some(part) = self.parts.first() {
                    part.draw::<SQUARES>(self.count, random, &mut totals);
                }
            }
            Split::Counts { first, shares } => {
                let mut remaining = self.count;
                for (index, (part, share)) in self.parts.iter().zip(shares).enumerate() {
                    if remaining == 0 {
                        break;
                    }
                    let copies = if index == 0 {
                        first.draw(random)
                    } else if index + 1 == self.parts.len() {
                        remaining
                    } else {
                        draw_binomial(remaining, *share, random)
                    };
                    remaining -= copies;
                    part.draw::<SQUARES>(copies, random, &mut totals);
                }
            }
            Split::Each(table) => {
                for _ in 0..self.count {
                    self.parts[table.draw(random)].draw::<SQUARES>(1, random, &mut totals);
                }
            }
        }
        Totals {
            sum: totals.sum,
            squares: totals.squares,
            all_equal: SQUARES && totals.distinct == Distinct::One,
        }
    }
}

/// What has been seen of the values so far.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
enum Distinct {
    #[default]
    Nothing,
    One,
    Several,
}

#[derive(Debug, Clone, Copy, Default)]
struct Running {
    sum: f64,
    squares: f64,
    only: f64,
    distinct: Distinct,
}

impl Running {
    /// Notes that an atom was drawn.
    #[inline]
    fn saw(&mut self, value: f64) {
        match self.distinct {
            Distinct::Nothing => (self.distinct, self.only) = (Distinct::One, value),
            Distinct::One if self.only != value => self.distinct = Distinct::Several,
            _ => {}
        }
    }

    /// Notes draws of a continuous piece: two of them differ with probability 1, and so do one and an atom.
    #[inline]
    fn saw_continuous(&mut self, copies: u64) {
        self.distinct = if copies == 1 && self.distinct == Distinct::Nothing {
            self.only = f64::NAN;
            Distinct::One
        } else {
            Distinct::Several
        };
    }
}

impl Part {
    fn cost(&self) -> f64 {
        match self {
            Self::Point(_) => 0.0,
            Self::Points { .. } | Self::Bars { .. } | Self::Stretch(_) => 1.0,
            Self::Whole { .. } => 20.0,
        }
    }

    #[inline]
    fn draw<const SQUARES: bool>(&self, copies: u64, random: &mut Stream, totals: &mut Running) {
        if copies == 0 {
            return;
        }
        match self {
            Self::Point(value) => {
                totals.sum += copies as f64 * value;
                if SQUARES {
                    totals.squares += copies as f64 * value * value;
                    totals.saw(*value);
                }
            }
            Self::Points { values, table } => {
                let (mut sum, mut squares) = (0.0, 0.0);
                for _ in 0..copies {
                    let value = values[table.draw(random)];
                    sum += value;
                    if SQUARES {
                        squares += value * value;
                        totals.saw(value);
                    }
                }
                totals.sum += sum;
                totals.squares += squares;
            }
            Self::Bars { bars, table } => {
                let (mut sum, mut squares) = (0.0, 0.0);
                for _ in 0..copies {
                    let (start, length) = bars[table.draw(random)];
                    let place = ((random.next_u64() >> 11) as f64 + 0.5) / (1u64 << 53) as f64;
                    let value = start + place * length;
                    sum += value;
                    squares += value * value;
                }
                totals.sum += sum;
                totals.squares += squares;
                totals.saw_continuous(copies);
            }
            Self::Stretch(table) => {
                let (sum, squares) = table.totals::<SQUARES>(copies, random);
                totals.sum += sum;
                totals.squares += squares;
                totals.saw_continuous(copies);
            }
            Self::Whole { sampler, center, unit } => {
                for _ in 0..copies {
                    let value = (sampler.sample(random) - center) / unit;
                    totals.sum += value;
                    if SQUARES {
                        totals.squares += value * value;
                        totals.saw(value);
                    }
                }
            }
        }
    }
}

/// Cuts a law into parts with their masses, heaviest first.
fn parts_of(law: &Law, center: f64, unit: f64, count: u64) -> (Vec<Part>, Vec<f64>) {
    let (uniform, curved): (Vec<&Piece>, Vec<&Piece>) =
        law.pieces.iter().partition(|piece| piece.density.name() == "uniform");
    let empty = law.atoms.is_empty() && law.pieces.is_empty();
    if law.only_simulation.is_some() || empty || curved.len() > TABLED_PIECES {
        return (vec![Part::Whole { sampler: Box::new(law.sampler().clone()), center, unit }], vec![1.0]);
    }
    let mut parts = Vec::new();
    let atoms = &law.atoms;
    if atoms.len() == 1
        || (atoms.len() <= COUNTED_ATOMS && count >= COPIES_PER_COUNT * atoms.len() as u64)
        || (atoms.len() == 2 && law.pieces.is_empty())
    {
        parts.extend(atoms.iter().map(|atom| (Part::Point((atom.value - center) / unit), atom.mass)));
    } else if !atoms.is_empty() {
        let masses: Vec<f64> = atoms.iter().map(|atom| atom.mass).collect();
        let values = atoms.iter().map(|atom| (atom.value - center) / unit).collect();
        parts.push((Part::Points { values, table: AliasTable::new(&masses) }, masses.iter().sum()));
    }
    if !uniform.is_empty() {
        let masses: Vec<f64> = uniform.iter().map(|piece| piece.mass()).collect();
        let bar = |piece: &&Piece| {
            let (low, high) = (piece.image_low(), piece.image_high());
            ((low - center) / unit, (high - low) / unit)
        };
        let bars = uniform.iter().map(bar).collect();
        parts.push((Part::Bars { bars, table: AliasTable::new(&masses) }, masses.iter().sum()));
    }
    for piece in curved {
        let mass = piece.mass();
        if mass > 0.0 {
            parts.push((Part::Stretch(Box::new(TabulatedQuantile::new(piece, center, unit))), mass));
        }
    }
    parts.sort_by(|a, b| b.1.total_cmp(&a.1));
    parts.into_iter().unzip()
}

/// Successive binomial counts.
fn counts(masses: &[f64], count: u64) -> Split {
    // What remains after each part, summed from the light end: no cancellation.
    let mut after = vec![0.0; masses.len() + 1];
    for index in (0..masses.len()).rev() {
        after[index] = after[index + 1] + masses[index];
    }
    let shares: Vec<f64> =
        masses.iter().zip(&after).map(|(mass, rest)| (mass / rest).clamp(0.0, 1.0)).collect();
    let first = BinomialCount::new(count, masses[0] / after[0], after[1] / after[0]);
    Split::Counts { first, shares }
}

/// A unit of the law's own size: its sd, or where that is infinite (or 0) the distance of its deciles.
pub(crate) fn natural_unit(law: &Law) -> f64 {
    let deciles = || law.quantile(0.9) - law.quantile(0.1);
    let unit = law.sd().filter(|sd| *sd > 0.0).unwrap_or_else(deciles);
    if unit > 0.0 && unit.is_finite() { unit } else { 1.0 }
}

/// Draws the sum of n copies of a law with a closed form in one go, measured from its mean.
#[derive(Debug, Clone, Copy)]
pub(crate) struct ClosedSum {
    law: WholeSum,
    multiply: f64,
    mean: f64,
}

#[derive(Debug, Clone, Copy)]
enum WholeSum {
    Normal(f64),
    Gamma(rand_distr::Gamma<f64>, f64),
    Poisson(rand_distr::Poisson<f64>),
    Binomial(rand_distr::Binomial),
    NegativeBinomial(rand_distr::Gamma<f64>, f64),
    InverseGaussian { mean: f64, shape: f64 },
}

impl ClosedSum {
    /// A sampler of the sum of `count` copies; `None` where the parameters of the sum are out of range.
    pub(crate) fn new(form: &ClosedForm, count: u64) -> Option<Self> {
        let n = count as f64;
        let (law, mean) = match form.family {
            ClosedFamily::Normal { sd, .. } => (WholeSum::Normal(sd * n.sqrt()), 0.0),
            ClosedFamily::Gamma { shape, scale } => {
                (WholeSum::Gamma(rand_distr::Gamma::new(n * shape, 1.0).ok()?, scale), n * shape)
            }
            ClosedFamily::Poisson { rate } => {
                (WholeSum::Poisson(rand_distr::Poisson::new(n * rate).ok()?), n * rate)
            }
            ClosedFamily::Binomial { trials, p } => {
                let all = count.checked_mul(trials)?;
                (WholeSum::Binomial(rand_distr::Binomial::new(all, p).ok()?), all as f64 * p)
            }
            ClosedFamily::NegativeBinomial { size, p } => {
                let odds = (1.0 - p) / p;
                (
                    WholeSum::NegativeBinomial(rand_distr::Gamma::new(n * size, 1.0).ok()?, odds),
                    n * size * odds,
                )
            }
            ClosedFamily::InverseGaussian { mean, shape } => {
                (WholeSum::InverseGaussian { mean: n * mean, shape: n * n * shape }, n * mean)
            }
        };
        let usable = mean.is_finite() && form.multiply.is_finite();
        usable.then_some(Self { law, multiply: form.multiply, mean })
    }

    /// One draw of the sum minus its mean.
    #[inline]
    pub(crate) fn draw(&self, random: &mut impl Rng) -> f64 {
        let deviation = match &self.law {
            WholeSum::Normal(sd) => {
                let z: f64 = rand_distr::StandardNormal.sample(random);
                sd * z
            }
            WholeSum::Gamma(gamma, scale) => scale * (gamma.sample(random) - self.mean),
            WholeSum::Poisson(poisson) => poisson.sample(random) - self.mean,
            WholeSum::Binomial(binomial) => binomial.sample(random) as f64 - self.mean,
            WholeSum::NegativeBinomial(gamma, odds) => {
                let rate = odds * gamma.sample(random);
                rand_distr::Poisson::new(rate).map_or(0.0, |poisson| poisson.sample(random)) - self.mean
            }
            WholeSum::InverseGaussian { mean, shape } => inverse_gaussian_deviation(*mean, *shape, random),
        };
        self.multiply * deviation
    }
}

/// X − mean for an inverse Gaussian X (Michael, Schucany and Haas 1976, The American Statistician 30:88), in a form
/// without cancellation: with w = mean·χ²/shape the smaller root is x = mean·2/(2 + w + √(4w + w²)).
fn inverse_gaussian_deviation(mean: f64, shape: f64, random: &mut impl Rng) -> f64 {
    let z: f64 = rand_distr::StandardNormal.sample(random);
    let w = z * z * (mean / shape);
    let root = (w * (4.0 + w)).sqrt();
    let ratio = 2.0 / (2.0 + w + root);
    let u = (random.next_u64() >> 11) as f64 / (1u64 << 53) as f64;
    if u * (1.0 + ratio) <= 1.0 {
        // x − mean = −mean (w + √…)/(2 + w + √…)
        -mean * (w + root) / (2.0 + w + root)
    } else {
        // mean²/x − mean = mean (w + √…)/2
        mean * 0.5 * (w + root)
    }
}

//! Sums of laws on commensurable lattices, by fast Fourier transform.

mod commensurable;
mod convolution;
mod harmonics;
mod plans;
mod power;
mod rounded;
mod shared;
mod summand;
mod tail;

use super::steps::{Cumulative, CumulativeTable, Scale, Steps};
use super::{Distance, Method, Route, StandardizedSum, SumError, SumMoments, SumSpec};
use crate::figure::Figure;
use crate::work::Work;
use commensurable::{CommonLattice, common_lattice};
use harmonics::{Harmonics, Sums, band};
pub use rounded::RoundedSum;
use summand::{Part, center, range, window};
use tail::{SERIES_FROM, Tail};

/// Longest transform: its plan, buffers and tables stay below 100 MB.
const LONGEST: usize = 1 << 20;

/// Sums over at most this many values are convolved directly.
const DIRECT: f64 = 1024.0;

/// Mass outside the window of the plain transform, on each side: e^−46 ≈ 1e-20.
const OUTSIDE: f64 = 46.0;

/// Probabilities below this come from a tilted transform.
const PLAIN_FROM: f64 = 1e-4;

/// The distribution of a standardized sum of lattice laws.
#[derive(Debug)]
pub struct LatticeSum {
    steps: Steps<Transformed>,
}

/// Cumulative probabilities around the centre.
#[derive(Debug)]
enum Bulk {
    /// One by one.
    Table(CumulativeTable),
    /// From a short series: its value at an index is the probability up to there.
    Series(Harmonics),
}

impl Bulk {
    fn at_or_below(&self, k: i64) -> f64 {
        match self {
            Self::Table(table) => table.at_or_below(k),
            Self::Series(series) => series.at(k, Sums::Running).clamp(0.0, 1.0),
        }
    }

    fn at_or_above(&self, k: i64) -> f64 {
        match self {
            Self::Table(table) => table.at_or_above(k),
            Self::Series(_) => 1.0 - self.at_or_below(k - 1),
        }
    }

    /// The smallest index from `first` to `last` at which `holds`, which is false before it and true after.
    fn first_where(first: i64, last: i64, holds: impl Fn(i64) -> bool) -> i64 {
        let (mut low, mut high) = (first - 1, last + 1);
        while high - low > 1 {
            let middle = low + (high - low) / 2;
            if holds(middle) {
                high = middle;
            } else {
                low = middle;
            }
        }
        high
    }
}

/// Cumulative probabilities: a table around the centre, tilted regions in the tails.
#[derive(Debug)]
struct Transformed {
    parts: Vec<Part>,
    bulk: Bulk,
    /// Absolute error of the bulk.
    absolute: f64,
    /// Relative error of the bulk.
    relative: f64,
    range: (i64, i64),
    /// Lower and upper tail; `None` where the table itself has relative accuracy everywhere.
    tails: Option<(Tail, Tail)>,
    /// Bound on the probability that any summand takes a value that was cut off its list.
    missing: f64,
}

fn unavailable(reason: impl Into<String>) -> SumError {
    SumError::NotAvailable { route: Route::Lattice, reason: reason.into() }
}

impl LatticeSum {
    /// Builds the distribution, or says why the sum is not one for this route.
    pub fn build(spec: &SumSpec, _method: &Method, work: &Work) -> Result<Self, SumError> {
        work.check()?;
        let n: u64 = spec.terms.iter().map(|term| term.count).sum();
        Self::of_common(common_lattice(spec).map_err(unavailable)?, n, work)
    }

    /// Builds the distribution of a sum given in lattice units.
    fn of_common(common: CommonLattice, n: u64, work: &Work) -> Result<Self, SumError> {
        let mut parts = common.parts;
        shared::remember(&mut parts);
        let (mut variance, mut third, mut fourth, mut deviation) = (0.0, 0.0, 0.0, 0.0);
        for part in &parts {
            let (two, three, four) = part.central_moments();
            variance += part.count * two;
            third += part.count * three;
            fourth += part.count * (four - 3.0 * two * two);
            deviation += part.count * part.mean_deviation();
        }
        let sd = variance.sqrt();
        if !(sd > 0.0 && sd.is_finite()) {
            return Err(SumError::NoVariance);
        }
        let (least, most) = range(&parts);
        if !(least.abs() < 4e15 && most.abs() < 4e15) {
            return Err(unavailable("the sum has too many lattice points to be told apart"));
        }
        let center = center(&parts);
        let mean = common.base + common.span * center.value();
        let scale = Scale {
            center,
            sd,
            magnitude: (mean.abs() / common.span).max(common.base.abs() / common.span),
            center_error: 2.0 * f64::EPSILON * deviation,
        };
        let moments = SumMoments {
            n,
            mean,
            sd: common.span * sd,
            skewness: Some(third / (variance * sd)),
            excess_kurtosis: Some(fourth / (variance * variance)),
        };
        if !(mean.is_finite() && moments.sd.is_finite() && moments.sd > 0.0) {
            return Err(SumError::NoVariance);
        }
        let whole = (least as i64, most as i64);
        let (cumulative, how) = if most - least < DIRECT {
            let (first, masses) = convolution::masses(&parts);
            let table = CumulativeTable::new(first, &masses);
            let relative = convolution::relative_error(&parts);
            let how = format!("{} values convolved directly", masses.len());
            let direct = Transformed {
                parts,
                bulk: Bulk::Table(table),
                absolute: 0.0,
                relative,
                range: whole,
                tails: None,
                missing: common.missing,
            };
            (direct, how)
        } else {
            let (first, last) = window(&parts, OUTSIDE, sd);
            let size = (last - first) as f64 + 1.0;
            let outside = 2.0 * (-OUTSIDE).exp();
            let narrow = if last - first >= SERIES_FROM { band(&parts, sd) } else { None };
            let (bulk, absolute, how) = if let Some(narrow) = narrow {
                // A cycle that many n have in common.
                let period = ((last - first + 1) as u64).next_power_of_two() as i64;
                let series = Harmonics::new(&parts, first, period, outside, narrow, Sums::Running);
                let absolute = series.error;
                (Bulk::Series(series), absolute, "Fourier series of a narrow band".to_owned())
            } else if size > LONGEST as f64 {
                return Err(unavailable(format!("a transform of {size:.0} lattice points is too long")));
            } else {
                let length = power::transform_length(size as usize);
                let found = power::masses(&parts, first, length, outside, 0.0, work)?;
                let table = CumulativeTable::new(first, &found.values);
                (Bulk::Table(table), found.run_error, format!("real transform of length {length}"))
            };
            let low = Bulk::first_where(first, last, |k| bulk.at_or_below(k) >= PLAIN_FROM) - 1;
            let high = Bulk::first_where(first, last, |k| bulk.at_or_above(k) < PLAIN_FROM);
            let tails = (Tail::new(&parts, false, low, sd), Tail::new(&parts, true, high, sd));
            let transformed = Transformed {
                parts,
                bulk,
                absolute,
                relative: 4.0 * f64::EPSILON,
                range: whole,
                tails: Some(tails),
                missing: common.missing,
            };
            (transformed, how)
        };
        let detail = format!("span {} of the sum; {how}", common.span);
        let steps = Steps { cumulative, scale, moments, route: Route::Lattice, detail, reflected: false };
        Ok(Self { steps })
    }
}

impl Transformed {
    fn plain(&self, value: f64) -> Figure {
        Figure::bound(value, self.absolute + self.relative * value + self.missing)
    }

    /// A tail figure, never above the plain one where that begins, so that the whole stays monotone.
    fn tail(&self, tail: &Tail, k: i64) -> Figure {
        let mut figure = tail.probability(&self.parts, k);
        if figure.value > PLAIN_FROM {
            figure.error += figure.value - PLAIN_FROM;
            figure.value = PLAIN_FROM;
        }
        figure.error += self.missing;
        figure
    }
}

impl Cumulative for Transformed {
    fn at_or_below(&self, k: i64) -> Figure {
        match &self.tails {
            Some((lower, _)) if lower.contains(k) => self.tail(lower, k),
            _ => self.plain(self.bulk.at_or_below(k)),
        }
    }

    fn at_or_above(&self, k: i64) -> Figure {
        match &self.tails {
            Some((_, upper)) if upper.contains(k) => self.tail(upper, k),
            _ => self.plain(self.bulk.at_or_above(k)),
        }
    }

    fn range(&self) -> (i64, i64) {
        self.range
    }

    fn is_smooth(&self) -> bool {
        matches!(self.bulk, Bulk::Series(_))
    }
}

impl StandardizedSum for LatticeSum {
    fn route(&self) -> Route {
        Route::Lattice
    }

    fn detail(&self) -> String {
        self.steps.detail()
    }

    fn moments(&self) -> SumMoments {
        self.steps.moments()
    }

    fn at_or_below(&self, z: f64) -> Figure {
        self.steps.at_or_below(z)
    }

    fn below(&self, z: f64) -> Figure {
        self.steps.below(z)
    }

    fn above(&self, z: f64) -> Figure {
        self.steps.above(z)
    }

    fn at_or_above(&self, z: f64) -> Figure {
        self.steps.at_or_above(z)
    }

    fn kolmogorov(&self) -> Distance {
        self.steps.kolmogorov()
    }

    fn quantile(&self, p: f64) -> Figure {
        self.steps.quantile(p)
    }

    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>> {
        self.steps.jumps(from, to, limit)
    }

    fn lattice_span(&self) -> Option<f64> {
        self.steps.lattice_span()
    }
}

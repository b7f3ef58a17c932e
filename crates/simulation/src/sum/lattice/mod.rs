//! Sums of laws on commensurable lattices, by fast Fourier transform.

mod commensurable;
mod convolution;
mod power;
mod summand;
mod tail;

use super::steps::{Cumulative, CumulativeTable, Scale, Steps};
use super::{Distance, Method, Route, StandardizedSum, SumError, SumMoments, SumSpec};
use crate::figure::Figure;
use crate::work::Work;
use commensurable::common_lattice;
use summand::{Part, center, range, window};
use tail::Tail;

/// Longest transform: two tables and two buffers of this length stay below 150 MB.
const LONGEST: usize = 1 << 22;

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

/// Cumulative probabilities: a table around the centre, tilted regions in the tails.
#[derive(Debug)]
struct Transformed {
    parts: Vec<Part>,
    table: CumulativeTable,
    /// Absolute error of the table.
    absolute: f64,
    /// Relative error of the table.
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
        let common = common_lattice(spec).map_err(unavailable)?;
        let parts = common.parts;
        let n: u64 = spec.terms.iter().map(|term| term.count).sum();
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
                table,
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
            if size > LONGEST as f64 {
                return Err(unavailable(format!("a transform of {size:.0} lattice points is too long")));
            }
            let length = power::transform_length(size as usize);
            let found = power::masses(&parts, first, length, 2.0 * (-OUTSIDE).exp(), 0.0, work)?;
            let table = CumulativeTable::new(first, &found.values);
            let reaching = |values: &[f64]| values.partition_point(|&value| value < PLAIN_FROM) as i64;
            let low = first + reaching(&table.lower) - 1;
            let high = first + table.upper.partition_point(|&value| value >= PLAIN_FROM) as i64;
            let tails = (Tail::new(&parts, false, low, sd), Tail::new(&parts, true, high, sd));
            let how = format!("real transform of length {length}");
            let transformed = Transformed {
                parts,
                table,
                absolute: found.run_error,
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
            _ => self.plain(self.table.at_or_below(k)),
        }
    }

    fn at_or_above(&self, k: i64) -> Figure {
        match &self.tails {
            Some((_, upper)) if upper.contains(k) => self.tail(upper, k),
            _ => self.plain(self.table.at_or_above(k)),
        }
    }

    fn range(&self) -> (i64, i64) {
        self.range
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

//! Laws of counts whose sums stay in the family: binomial, Poisson, negative binomial, without cancellation.
//!
//! Masses come from Loader's saddle-point form (C. Loader, "Fast and accurate computation of binomial
//! probabilities", 2000) at anchors, and from the ratio of neighbours in between.

use super::steps::{Cumulative, CumulativeTable};
use super::twofold::Twofold;
use crate::figure::Figure;
use crate::special::elementary::ln_1p_minus_x;
use crate::special::gamma::stirling_error;
use std::f64::consts::TAU;
use std::sync::OnceLock;

/// The law of a count; `trials`, `rate` and `size` are those of the whole sum.
#[derive(Debug, Clone, Copy, PartialEq)]
#[allow(missing_docs, reason = "the parameters carry their field's usual names")]
pub(crate) enum Counting {
    /// Successes in `trials` trials.
    Binomial { trials: f64, p: f64 },
    /// `rate` = count·each, in twice the precision.
    Poisson { rate: Twofold },
    /// Failures before the `size`-th success.
    NegativeBinomial { size: f64, p: f64 },
}

/// m·[(1 + u) ln(1 + u) − u] with u = d/m: Loader's deviance of x = m + d from the mean m, taking the *exact*
/// deviation d, so that x − m is never formed from two large numbers. Relative error a few units in the last
/// place. With v = −d/x, x·(v − ln(1 + v)) is the same and has no cancellation.
fn deviance(x: f64, m: f64, d: f64) -> f64 {
    if d == 0.0 {
        0.0
    } else if x <= 0.0 {
        m
    } else {
        -x * ln_1p_minus_x(-d / x)
    }
}

impl Counting {
    /// The mean.
    pub fn center(&self) -> Twofold {
        match *self {
            Self::Binomial { trials, p } => Twofold::product(trials, p),
            Self::Poisson { rate } => rate,
            // r(1 − p)/p = r/p − r
            Self::NegativeBinomial { size, p } => {
                if p > 0.5 {
                    Twofold::product(size, 1.0 - p).over(p)
                } else {
                    Twofold::new(size).over(p).plus(-size)
                }
            }
        }
    }

    /// The standard deviation.
    pub fn sd(&self) -> f64 {
        match *self {
            Self::Binomial { trials, p } => (trials * p * (1.0 - p)).sqrt(),
            Self::Poisson { rate } => rate.value().sqrt(),
            Self::NegativeBinomial { size, p } => (size * (1.0 - p)).sqrt() / p,
        }
    }

    /// Smallest and largest value; counts beyond 2⁵² are out of reach.
    pub fn range(&self) -> (i64, i64) {
        match *self {
            Self::Binomial { trials, .. } => (0, trials as i64),
            _ => (0, 1 << 52),
        }
    }

    fn mode(&self) -> i64 {
        let at = match *self {
            Self::Binomial { trials, p } => (trials + 1.0) * p,
            Self::Poisson { rate } => rate.value(),
            Self::NegativeBinomial { size, p } => ((size - 1.0) * (1.0 - p) / p).max(0.0),
        };
        let (first, last) = self.range();
        (at.floor() as i64).clamp(first, last)
    }

    /// P(K = k). With D the deviance and δ the error of Stirling's formula, for instance for the binomial
    /// exp(δ(N) − δ(k) − δ(N−k) − D(k; Np) − D(N−k; Nq))·√(N/(2πk(N−k))).
    ///
    /// The exponent −ln P(K = k) =: E carries a relative error of at most 8 units in the last place, so the
    /// relative error of the mass is ≤ (8·E + 16)·2⁻⁵³.
    pub fn mass(&self, k: f64) -> f64 {
        let d = self.center().distance_to(k);
        match *self {
            Self::Binomial { trials, p } => {
                let q = 1.0 - p;
                if k <= 0.0 {
                    return (trials * libm::log1p(-p)).exp();
                }
                let failures = trials - k;
                if failures <= 0.0 {
                    return if p > 0.5 { (trials * libm::log1p(-q)).exp() } else { (trials * p.ln()).exp() };
                }
                let exponent = stirling_error(trials)
                    - stirling_error(k)
                    - stirling_error(failures)
                    - deviance(k, trials * p, d)
                    - deviance(failures, trials * q, -d);
                exponent.exp() * (trials / (TAU * k * failures)).sqrt()
            }
            Self::Poisson { rate } => {
                if k <= 0.0 {
                    return (-rate.high).exp() * (1.0 - rate.low);
                }
                (-stirling_error(k) - deviance(k, rate.value(), d)).exp() / (TAU * k).sqrt()
            }
            Self::NegativeBinomial { size, p } => {
                let q = 1.0 - p;
                if k <= 0.0 {
                    return if p > 0.5 { (size * libm::log1p(-q)).exp() } else { (size * p.ln()).exp() };
                }
                let total = size + k;
                // size − total·p = −p·(k − center)
                let exponent = stirling_error(total)
                    - stirling_error(size)
                    - stirling_error(k)
                    - deviance(size, total * p, -p * d)
                    - deviance(k, total * q, p * d);
                exponent.exp() * (size / (TAU * k * total)).sqrt()
            }
        }
    }

    /// P(K = k + 1)/P(K = k).
    fn ratio(&self, k: f64) -> f64 {
        match *self {
            Self::Binomial { trials, p } => (trials - k) * (p / (1.0 - p)) / (k + 1.0),
            Self::Poisson { rate } => rate.value() / (k + 1.0),
            Self::NegativeBinomial { size, p } => (k + size) * (1.0 - p) / (k + 1.0),
        }
    }

    /// Cumulative table of every value whose mass matters: outwards from the mode until what is left out on
    /// each side is below `left_out`; `None` if that takes more than `longest` entries.
    ///
    /// What is left out beyond k is at most mass·r/(1 − r), where the ratio r of neighbours falls outwards for
    /// the binomial and Poisson (log-concave) and never exceeds max(r, q) for the negative binomial.
    fn table(&self, left_out: f64, longest: usize) -> Option<CumulativeTable> {
        let (first, last) = self.range();
        let mode = self.mode();
        let ceiling = match *self {
            Self::NegativeBinomial { p, .. } => 1.0 - p,
            _ => 0.0,
        };
        let mut up = Vec::new();
        let mut k = mode;
        let mut mass = self.mass(k as f64);
        loop {
            up.push(mass);
            if k == last {
                break;
            }
            let ratio = self.ratio(k as f64);
            let bound = ratio.max(ceiling);
            if bound < 1.0 && mass * bound <= left_out * (1.0 - bound) {
                break;
            }
            if up.len() > longest {
                return None;
            }
            k += 1;
            mass = if (k - mode) % ANCHOR == 0 { self.mass(k as f64) } else { mass * ratio };
        }
        let mut down = Vec::new();
        k = mode;
        mass = up[0];
        while k > first {
            let ratio = 1.0 / self.ratio((k - 1) as f64);
            if ratio < 1.0 && mass * ratio <= left_out * (1.0 - ratio) {
                break;
            }
            if up.len() + down.len() > longest {
                return None;
            }
            k -= 1;
            mass = if (mode - k) % ANCHOR == 0 { self.mass(k as f64) } else { mass * ratio };
            down.push(mass);
        }
        down.reverse();
        down.extend_from_slice(&up);
        Some(CumulativeTable::new(k, &down))
    }
}

/// Steps between masses computed anew.
const ANCHOR: i64 = 64;

/// What the first table may leave out on each side, and from which probability on it is then used.
const CORE_LEFT_OUT: f64 = 1e-34;
const CORE_TRUSTED: f64 = 1e-19;
/// The same for the table of the far tails.
const FULL_LEFT_OUT: f64 = 1e-305;
/// Relative errors: 64 ratio steps of at most 2 units in the last place (2⁻⁵³) each are 1.5e-14; an anchor adds
/// (8·E + 16) units, where E = −ln mass is at most 53 in the trusted part of the core (5e-14) and 710 in the far
/// table (6.4e-13); what is left out adds 1e-15.
const CORE_RELATIVE: f64 = 1e-13;
const FULL_RELATIVE: f64 = 1e-12;

/// Entries of the longest table.
pub(crate) const LONGEST: usize = 1 << 21;

/// Cumulative probabilities of a count: a table around the mode, and a longer one once far tails are asked for.
#[derive(Debug)]
pub(crate) struct CountTable {
    law: Counting,
    core: CumulativeTable,
    full: OnceLock<Option<CumulativeTable>>,
}

impl CountTable {
    /// `None` if the table would be too long.
    pub fn new(law: Counting) -> Option<Self> {
        let core = law.table(CORE_LEFT_OUT, LONGEST)?;
        Some(Self { law, core, full: OnceLock::new() })
    }

    /// Number of entries computed so far.
    pub fn len(&self) -> usize {
        self.core.lower.len()
    }

    fn figure(&self, read: impl Fn(&CumulativeTable) -> f64) -> Figure {
        let value = read(&self.core);
        if value >= CORE_TRUSTED {
            return Figure::bound(value, CORE_RELATIVE * value);
        }
        match self.full.get_or_init(|| self.law.table(FULL_LEFT_OUT, 4 * LONGEST)) {
            Some(full) => {
                let value = read(full);
                Figure::bound(value, FULL_RELATIVE * value + FULL_LEFT_OUT)
            }
            None => Figure::bound(value, CORE_RELATIVE * value + CORE_LEFT_OUT),
        }
    }
}

impl Cumulative for CountTable {
    fn at_or_below(&self, k: i64) -> Figure {
        self.figure(|table| table.at_or_below(k))
    }

    fn at_or_above(&self, k: i64) -> Figure {
        self.figure(|table| table.at_or_above(k))
    }

    fn range(&self) -> (i64, i64) {
        self.law.range()
    }
}

//! Exact misses of the studentized mean for lattice laws with many values: the joint law of Σx and Σx².
//!
//! With lattice indices k measured from the one nearest the mean, a sample enters T only through S = Σk and
//! J = Σk(k−1)/2, since Σk² = 2J + S. The joint mass function of (k, k(k−1)/2) is transformed in two dimensions,
//! raised to the n-th power, and transformed back; then cells with |T| beyond t are added up.
//!
//! **Error** of each probability, all of it stated:
//! - wrapping around: the probability that S or J leaves its window, by Chernoff's bound, below 4e-16 in all;
//! - rounding: with u = 2⁻⁵³ and M cells each transform value is good to c = 8u·log₂M (masses add up to 1), its n-th
//!   power to c·n·|φ|ⁿ⁻¹ + 4nu|φ|ⁿ; a sum over any set of cells of the inverse transform is then, by Parseval and
//!   Cauchy–Schwarz, off by at most √Σ|δφⁿ|² + c·√Σ|φⁿ|², and that is computed along with the result;
//! - cells whose T agrees with ±t within accuracy: their mass, whichever way they are counted.

use super::enumeration::{Sums, classify};
use super::studentized::{Misses, Outcome, Studentized, StudentizedRequest};
use crate::law::Law;
use crate::special::student;
use crate::sum::{Route, SumError};
use crate::work::Work;
use num_complex::Complex64;

/// Most cells of the transform: 4 million, 64 megabytes.
const MOST_CELLS: usize = 1 << 22;
/// Most values of the law.
const MOST_VALUES: usize = 4096;
/// ln of the reciprocal probability beyond each end of a window.
const LOG_RISK: f64 = 36.8;

/// A stretch of integers.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Window {
    first: i64,
    length: usize,
}

impl Window {
    /// Where integer `value` sits in the cyclic array.
    fn slot(self, value: i64) -> usize {
        value.rem_euclid(self.length as i64) as usize
    }
}

/// Exact misses, if the law is on a lattice and its joint window small enough.
pub(crate) fn misses(request: &StudentizedRequest, work: &Work) -> Result<Option<Misses>, SumError> {
    let Studentized::Mean { law, n } = request.statistic else { return Ok(None) };
    let Some((values, masses, span, offset)) = indices(law) else { return Ok(None) };
    let triangular: Vec<i64> = values.iter().map(|k| k * (k - 1) / 2).collect();
    // Windows are never shorter than this: not worth a closer look otherwise.
    if shortest(&values, &masses, n) * shortest(&triangular, &masses, n) > MOST_CELLS as f64 {
        return Ok(None);
    }
    let (Some(sums), Some(halves)) = (window(&values, &masses, n), window(&triangular, &masses, n)) else {
        return Ok(None);
    };
    if sums.length.saturating_mul(halves.length + 2) > MOST_CELLS {
        return Ok(None);
    }
    let Some(joint) = JointLaw::new(&values, &triangular, &masses, n, sums, halves, work)? else {
        return Ok(None);
    };
    let size = n as f64;
    let shift = request.shift_in_units();
    let t = student::quantile_above(size - 1.0, request.tail_probability);
    let slack = f64::EPSILON * (16.0 * span + 4.0 * (offset.abs() + shift.abs()));
    let mut total = Sums::default();
    for s in sums.first..sums.first + sums.length as i64 {
        work.check()?;
        let mean = offset + s as f64 / size * span;
        let row = sums.slot(s) * halves.length;
        for j in halves.first..halves.first + halves.length as i64 {
            // n Σk² − S², an integer below 2⁵³ in every case that fits the window.
            let scatter = size * (2.0 * j as f64 + s as f64) - (s as f64) * (s as f64);
            if scatter < 0.0 {
                continue;
            }
            let mass = joint.masses[row + halves.slot(j)];
            let margin = t * span * (scatter / (size - 1.0)).sqrt() / size;
            classify(mean + shift, margin, mass, slack, &mut total);
        }
    }
    let error = total.doubtful.abs() + joint.error + 4.0 * (-LOG_RISK).exp() + size * law.missing_mass;
    if error.is_nan() || error >= 1e-8 {
        return Ok(None);
    }
    let outcome = Outcome { low: total.low, high: total.high, error };
    let detail = format!(
        "joint law of the sum and the sum of squares, two-dimensional transform of {} × {} cells",
        sums.length, halves.length
    );
    Ok(Some(outcome.misses(Route::Lattice, detail)))
}

/// Lattice indices about the mean, their masses, the span, and the value of index 0 minus the mean.
fn indices(law: &Law) -> Option<(Vec<i64>, Vec<f64>, f64, f64)> {
    let lattice = law.lattice?;
    let mean = law.moments.mean?;
    if !law.pieces.is_empty() || law.only_simulation.is_some() || law.atoms.len() > MOST_VALUES {
        return None;
    }
    let index = |value: f64| ((value - lattice.offset) / lattice.span).round();
    let center = index(mean);
    let mut values = Vec::with_capacity(law.atoms.len());
    for atom in &law.atoms {
        let k = index(atom.value) - center;
        if k.abs() > 1e6 {
            return None;
        }
        values.push(k as i64);
    }
    let masses = law.atoms.iter().map(|atom| atom.mass).collect();
    Some((values, masses, lattice.span, lattice.offset + center * lattice.span - mean))
}

/// Less than the length of any window that is likely enough: four sd on either side, or the whole range.
fn shortest(values: &[i64], masses: &[f64], n: u64) -> f64 {
    let size = n as f64;
    let (_, variance) = mean_and_variance(values, masses);
    let least = values.iter().copied().min().unwrap_or(0) as f64;
    let most = values.iter().copied().max().unwrap_or(0) as f64;
    (8.0 * (size * variance).sqrt()).min(size * (most - least)) + 1.0
}

fn mean_and_variance(values: &[i64], masses: &[f64]) -> (f64, f64) {
    let total: f64 = masses.iter().sum();
    let mean = values.iter().zip(masses).map(|(&v, mass)| v as f64 * mass).sum::<f64>() / total;
    let squares = values.iter().zip(masses).map(|(&v, mass)| (v as f64 - mean).powi(2) * mass);
    (mean, squares.sum::<f64>() / total)
}

/// A window that the n-fold sum leaves with probability below 2e^{−LOG_RISK}, by Chernoff's bound
/// P(S ≥ x) ≤ e^{n ln M(θ) − θx} at the best of a list of θ, or by the ends of the support.
fn window(values: &[i64], masses: &[f64], n: u64) -> Option<Window> {
    let size = n as f64;
    let total: f64 = masses.iter().sum();
    let (_, variance) = mean_and_variance(values, masses);
    let scale = (size * variance).sqrt().max(1e-300);
    let end = |sign: f64| {
        let largest = values.iter().map(|&v| sign * v as f64).fold(f64::NEG_INFINITY, f64::max);
        let mut best = size * largest;
        for step in 0..120 {
            let theta = 10f64.powf(-1.0 + f64::from(step) / 40.0) / scale;
            let moment: f64 = values
                .iter()
                .zip(masses)
                .map(|(&v, mass)| mass / total * (theta * (sign * v as f64 - largest)).exp())
                .sum();
            best = best.min((size * (moment.ln() + theta * largest) + LOG_RISK) / theta);
        }
        sign * best
    };
    let (low, high) = (end(-1.0).floor(), end(1.0).ceil());
    let length = high - low + 1.0;
    if !(length >= 1.0 && length <= MOST_CELLS as f64 && low.abs() < 1e15) {
        return None;
    }
    Some(Window { first: low as i64, length: smooth_length(length as usize) })
}

/// The smallest even number 2ᵃ3ᵇ5ᶜ not below `least`: lengths with fast transforms.
fn smooth_length(least: usize) -> usize {
    (least.max(2)..)
        .find(|&length| {
            let mut rest = length;
            for prime in [2, 3, 5] {
                while rest % prime == 0 {
                    rest /= prime;
                }
            }
            rest == 1 && length % 2 == 0
        })
        .unwrap_or(least)
}

/// The joint mass function of (S, J), cyclic, row by row of S.
struct JointLaw {
    masses: Vec<f64>,
    error: f64,
}

impl JointLaw {
    #[allow(clippy::too_many_arguments, reason = "two coordinates, each with its values and window")]
    fn new(
        sums: &[i64],
        halves: &[i64],
        masses: &[f64],
        n: u64,
        rows: Window,
        columns: Window,
        work: &Work,
    ) -> Result<Option<Self>, SumError> {
        let (r, c) = (rows.length, columns.length);
        let half = c / 2 + 1;
        let total: f64 = masses.iter().sum();
        let mut real = realfft::RealFftPlanner::<f64>::new();
        let mut planner = rustfft::FftPlanner::<f64>::new();
        let (forward, inverse) = (real.plan_fft_forward(c), real.plan_fft_inverse(c));
        let mut cells = vec![0.0; r * c];
        for ((&s, &j), mass) in sums.iter().zip(halves).zip(masses) {
            cells[rows.slot(s) * c + columns.slot(j)] += mass / total;
        }
        // Column-major half spectrum: the second transform then runs over contiguous columns.
        let mut spectrum = vec![Complex64::default(); r * half];
        let mut line = forward.make_output_vec();
        for (row, cells) in cells.chunks_exact_mut(c).enumerate() {
            if forward.process(cells, &mut line).is_err() {
                return Ok(None);
            }
            for (column, value) in line.iter().enumerate() {
                spectrum[column * r + row] = *value;
            }
        }
        let (down, up) = (planner.plan_fft_forward(r), planner.plan_fft_inverse(r));
        let unit = 0.5 * f64::EPSILON;
        let transform_error = 8.0 * unit * ((r * c) as f64).log2();
        let (mut power_error, mut norm) = (0.0, 0.0);
        for (column, values) in spectrum.chunks_exact_mut(r).enumerate() {
            work.check()?;
            down.process(values);
            // Inner columns stand for themselves and their conjugates.
            let weight = if column == 0 || 2 * column == c { 1.0 } else { 2.0 };
            for value in values.iter_mut() {
                let size = (value.norm() + transform_error).min(1.0);
                let before = size.powf(n as f64 - 1.0);
                let off = n as f64 * before * (transform_error + 4.0 * unit * size);
                power_error += weight * off * off;
                norm += weight * (before * size).powi(2);
                *value = power(*value, n);
            }
            up.process(values);
        }
        let scale = 1.0 / (r * c) as f64;
        for (row, cells) in cells.chunks_exact_mut(c).enumerate() {
            for (column, value) in line.iter_mut().enumerate() {
                *value = spectrum[column * r + row];
            }
            line[0].im = 0.0;
            if c % 2 == 0 {
                line[half - 1].im = 0.0;
            }
            if inverse.process(&mut line, cells).is_err() {
                return Ok(None);
            }
            for cell in cells {
                *cell *= scale;
            }
        }
        Ok(Some(Self { masses: cells, error: power_error.sqrt() + transform_error * norm.sqrt() }))
    }
}

/// zⁿ by repeated squaring; relative error below 4n·2⁻⁵³.
fn power(z: Complex64, n: u64) -> Complex64 {
    let (mut base, mut result, mut left) = (z, Complex64::new(1.0, 0.0), n);
    while left > 0 {
        if left & 1 == 1 {
            result *= base;
        }
        base *= base;
        left >>= 1;
    }
    result
}

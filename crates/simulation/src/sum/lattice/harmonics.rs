//! Lattice sums of so many summands that a few dozen frequencies say everything: cost independent of n.
//!
//! Once the characteristic function of the sum is negligible beyond a narrow band of frequencies, the masses are
//! a short Fourier series in the index, and so are their running sums: no table of masses is needed.

use super::power::{Frequency, product};
use super::shared::{Logarithm, fine_enough};
use super::summand::{Part, center};
use num_complex::Complex64;
use std::f64::consts::TAU;

/// Unit roundoff.
const U: f64 = f64::EPSILON / 2.0;

/// Characteristic functions below e^−46 ≈ 1e-20 count as 0.
const NEGLIGIBLE: f64 = 46.0;

/// Widest band that counts as narrow, in 1/sd: there is no wave shorter than 2π/27 = 0.23 sd in it.
const WIDEST: f64 = 27.0;

/// The frequency beyond which the characteristic function of the sum is below e^−46, proven; `None` if that is not
/// proven or the band is not narrow.
///
/// Far from 0 the bounds of [`super::shared::Squares`] are multiplied. Near 0, cos u ≤ 1 − u²/2 + u⁴/24 gives
/// |φ(t)|² ≤ 1 − σ²t² + m t⁴/24 with m = E(X − X′)⁴ = 2μ₄ + 6σ⁴, which falls up to t* = √(12σ²/m).
pub(crate) fn band(parts: &[Part], sd: f64) -> Option<f64> {
    let varied: Vec<&Part> = parts.iter().filter(|part| part.offsets.len() > 1).collect();
    let length = varied.iter().map(|part| fine_enough(part)).max()?;
    // Too few copies to make anything negligible, or steps too coarse for the law.
    let copies: f64 = varied.iter().map(|part| part.count).sum();
    let step = TAU / length as f64;
    if copies < 8.0 || varied.iter().any(|part| part.central_moments().0 * step * step > 2.0) {
        return None;
    }
    let far = if let [part] = varied[..] {
        let squares = part.squares(length);
        let step = squares.first_below((-2.0 * NEGLIGIBLE / part.count).exp());
        if step >= squares.bounds().len() {
            return None;
        }
        TAU * step as f64 / squares.length as f64
    } else {
        let mut total = vec![0.0; length / 2];
        for part in &varied {
            for (sum, square) in total.iter_mut().zip(part.squares(length).bounds()) {
                *sum += 0.5 * part.count * square.ln();
            }
        }
        let last = total.iter().rposition(|&sum| sum > -NEGLIGIBLE).map_or(0, |j| j + 1);
        if last >= total.len() {
            return None;
        }
        TAU * last as f64 / length as f64
    };
    let moments: Vec<(f64, f64, f64)> = varied
        .iter()
        .map(|part| {
            let (second, _, fourth) = part.central_moments();
            (part.count, second, 2.0 * fourth + 6.0 * second * second)
        })
        .collect();
    let falls = moments.iter().map(|(_, two, four)| (12.0 * two / four).sqrt()).fold(f64::INFINITY, f64::min);
    let near = |t: f64| -> f64 {
        let square = t * t;
        let log = |&(count, two, four): &(f64, f64, f64)| {
            0.5 * count * libm::log1p(-two * square + four * square * square / 24.0)
        };
        moments.iter().map(log).sum()
    };
    let mut edge = far;
    if far < falls && near(falls) < -NEGLIGIBLE {
        let (mut low, mut high) = (0.0, falls);
        for _ in 0..50 {
            let middle = 0.5 * (low + high);
            if near(middle) < -NEGLIGIBLE { high = middle } else { low = middle }
        }
        edge = edge.min(high);
    }
    (edge * sd <= WIDEST).then_some(edge)
}

/// The Fourier series of the masses of a sum on a cycle of indices.
#[derive(Debug)]
pub(crate) struct Harmonics {
    /// Index at which the cycle begins.
    first: i64,
    /// Its length.
    period: i64,
    /// Coefficient j ≥ 1 of the series of the sums asked for, in e^(i j·turn).
    coefficients: Vec<Complex64>,
    /// Its constant part: per index for running sums, as it is for damped ones.
    constant: f64,
    /// Bound on the error of every sum.
    pub error: f64,
}

/// Which sums of masses are asked for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Sums {
    /// Σ_{j ≤ k} mass(j).
    Running,
    /// Σ_{l ≥ 0} e^(−rate·l) mass(k + l).
    DampedUp { rate: f64 },
    /// Σ_{l ≥ 0} e^(−rate·l) mass(k − l).
    DampedDown { rate: f64 },
}

impl Harmonics {
    /// The series on the cycle first, …, first + period − 1, for a sum with at most `outside` of its mass elsewhere
    /// and a characteristic function that is negligible beyond `band`.
    ///
    /// **Error.** As for the transform (see [`super::power::masses`]): aliasing `outside`; each power's own relative
    /// error ε_j, weighted by the modulus of the factor that turns a mass into the sum asked for; frequencies
    /// beyond the band 1e-20·(1 + ln period); and 4j + 16 roundings for the powers of e^(i·turn) and the sum.
    /// A damped sum also runs on into the next cycle; the caller counts that into `outside`.
    pub fn new(parts: &[Part], first: i64, period: i64, outside: f64, band: f64, sums: Sums) -> Self {
        let length = period as f64;
        let from_first = center(parts).plus(-(first as f64));
        let last = ((band * length / TAU).ceil() as i64).min(period / 2);
        let mut coefficients = Vec::with_capacity(last.max(0) as usize);
        let mut error = 0.0;
        let each: Vec<_> = parts.iter().map(|part| part.logarithms(period, last.max(0) as usize)).collect();
        let mut here: Vec<Logarithm> = Vec::with_capacity(parts.len());
        for j in 1..=last {
            here.clear();
            here.extend(each.iter().map(|list| list[j as usize - 1]));
            let Frequency { logarithm, angle, units } = product(parts, &here, from_first, j as f64, length);
            // The two halves of the spectrum are conjugate, except at the middle, which stands alone.
            let halves = if 2 * j == period { 1.0 } else { 2.0 };
            let value = Complex64::from_polar(halves / length * logarithm.exp(), angle);
            let t = TAU * j as f64 / length;
            let factor = match sums {
                Sums::Running => 1.0 / one_minus(0.0, -t),
                Sums::DampedUp { rate } => 1.0 / one_minus(rate, t),
                Sums::DampedDown { rate } => 1.0 / one_minus(rate, -t),
            };
            let coefficient = value * factor;
            error += coefficient.norm() * U * (2.0 * units + 4.0 * j as f64 + 24.0);
            coefficients.push(coefficient);
        }
        let constant = match sums {
            Sums::Running => 1.0 / length,
            Sums::DampedUp { rate } | Sums::DampedDown { rate } => -1.0 / (length * libm::expm1(-rate)),
        };
        error += 2.0 * outside + 1e-19 * (1.0 + length.ln()) + 16.0 * U * constant;
        Self { first, period, coefficients, constant, error }
    }

    /// The sum asked for at the index k, which must lie in the cycle.
    pub fn at(&self, k: i64, sums: Sums) -> f64 {
        let offset = (k - self.first).clamp(0, self.period - 1);
        let turn = Complex64::from_polar(1.0, TAU * offset as f64 / self.period as f64);
        match sums {
            Sums::Running => {
                // Σ_{l ≤ m} w^l = (w^m − w^−1)/(1 − w^−1): the sum from the start of the cycle.
                let back = Complex64::from_polar(1.0, -TAU / self.period as f64);
                let (mut here, mut start) = (turn, back);
                let mut sum = 0.0;
                for coefficient in &self.coefficients {
                    sum += (coefficient * (here - start)).re;
                    here *= turn;
                    start *= back;
                }
                self.constant * (offset + 1) as f64 + sum
            }
            Sums::DampedUp { .. } | Sums::DampedDown { .. } => {
                let mut here = turn;
                let mut sum = 0.0;
                for coefficient in &self.coefficients {
                    sum += (coefficient * here).re;
                    here *= turn;
                }
                self.constant + sum
            }
        }
    }
}

/// 1 − e^(−rate + it), without cancellation.
fn one_minus(rate: f64, t: f64) -> Complex64 {
    // 1 − e^(−rate)cos t = −expm1(−rate) + 2e^(−rate) sin²(t/2)
    let shrink = (-rate).exp();
    let sine = (0.5 * t).sin();
    Complex64::new(-libm::expm1(-rate) + 2.0 * shrink * sine * sine, -shrink * t.sin())
}

#[cfg(test)]
mod tests {
    use super::super::power::{masses, transform_length};
    use super::super::summand::window;
    use super::*;
    use crate::work::Work;

    #[test]
    fn few_frequencies_say_what_the_transform_says() {
        let part = Part::new(20_000.0, &[0, 1, 2, 5], &[0.5, 0.3, 0.15, 0.05]);
        let parts = [part];
        let sd = (20_000.0 * parts[0].central_moments().0).sqrt();
        let (first, last) = window(&parts, 46.0, sd);
        let size = transform_length((last - first + 1) as usize);
        let band = band(&parts, sd).expect("a law of many copies");
        let rate = 4.0 / sd;
        let table = masses(&parts, first, size, 1e-20, rate, &Work::new()).unwrap();
        for sums in [Sums::Running, Sums::DampedUp { rate }, Sums::DampedDown { rate }] {
            let series = Harmonics::new(&parts, first, 2 * size as i64, 1e-20, band, sums);
            let range: Vec<usize> = (0..size).collect();
            let mut twin = vec![0.0; size];
            let mut sum = 0.0;
            let shrink = (-rate).exp();
            let mut step = |i: usize| {
                sum = if sums == Sums::Running { sum } else { sum * shrink } + table.values[i];
                twin[i] = sum;
            };
            if matches!(sums, Sums::DampedUp { .. }) {
                range.iter().rev().for_each(|&i| step(i));
            } else {
                range.iter().for_each(|&i| step(i));
            }
            let allowed = series.error + 2.0 * table.run_error.max(table.damped_error);
            assert!(allowed < 1e-12, "{allowed}");
            for i in (size / 4..3 * size / 4).step_by(11) {
                let found = series.at(first + i as i64, sums);
                assert!(
                    (found - twin[i]).abs() <= allowed,
                    "{sums:?} {i}: {found} {} ± {allowed:e}",
                    twin[i]
                );
            }
        }
    }

    #[test]
    fn lumpy_laws_have_no_narrow_band() {
        // Nearly on a lattice of span 13: the characteristic function comes back to almost 1 at 2π/13.
        let parts = [Part::new(100_000.0, &[0, 1, 13], &[0.8, 1e-9, 0.2])];
        let sd = (100_000.0 * parts[0].central_moments().0).sqrt();
        assert_eq!(band(&parts, sd), None);
    }
}

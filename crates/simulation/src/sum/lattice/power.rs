//! Masses of a lattice sum on a window, by one real transform there and one back.

use super::plans;
use super::shared::Logarithm;
use super::summand::{Part, center};
use crate::sum::twofold::Twofold;
use crate::work::{Cancelled, Work};
use num_complex::Complex64;
use std::f64::consts::{PI, TAU};

/// Unit roundoff.
const U: f64 = f64::EPSILON / 2.0;

/// Powers of the characteristic function below e^−46 ≈ 1e-20 are taken as 0.
const NEGLIGIBLE: f64 = -46.0;

/// Frequencies between two looks at whether to stop.
const CHECKED: usize = 1024;

/// At most this many evaluations of e^(iu) to refine the frequencies that matter.
const REFINEMENTS: usize = 2_000_000;

/// Copies from which the rounding of a transform, multiplied by their number, is worth refining.
const REFINED_FROM: f64 = 32.0;

/// Masses on a window and what is known about their errors.
#[derive(Debug)]
pub(crate) struct Masses {
    /// The masses; where there is none, rounding may leave a tiny negative number.
    pub values: Vec<f64>,
    /// Bound on the error of the sum of any run of neighbouring masses.
    pub run_error: f64,
    /// Bound on the error of Σ_{j≥k} e^(−τ(j−k))·mass(j), or of its mirror image, for the τ asked for.
    pub damped_error: f64,
}

/// A length the transform likes: 2^a·{1, 3, 5}, even, at least `least`.
pub(crate) fn transform_length(least: usize) -> usize {
    let least = least.max(16);
    let two = least.next_power_of_two();
    [two / 8 * 5, two / 4 * 3].into_iter().find(|&length| length >= least && length % 2 == 0).unwrap_or(two)
}

/// ln|φ| and arg φ of one copy about its own mean at the angle t, and by how many units in the last place they may
/// be wrong.
///
/// φ − 1 = −2 Σ p sin²(ty/2) + i Σ p (sin ty − ty), because Σ p y = 0: while ty is small no term is larger than
/// what it adds, and the error is a few units of Σ p (ty)². Where ty is not small, the terms ty cancel and leave
/// an error of a few units of Σ p |ty|, rounding of t itself included.
pub(crate) fn log_characteristic(part: &Part, t: f64) -> Logarithm {
    let (mut re, mut im, mut units) = (0.0, 0.0, 0.0);
    for (y, mass) in part.deviations() {
        let u = t * y;
        let (sine, cosine) = (0.5 * u).sin_cos();
        re -= 2.0 * mass * sine * sine;
        if u.abs() < 0.5 {
            im += mass * sine_minus_angle(u);
            units += 8.0 * mass * u * u;
        } else {
            im += mass * (2.0 * sine * cosine - u);
            units += mass * (8.0 * u.abs() + 8.0);
        }
    }
    let square = (1.0 + re) * (1.0 + re) + im * im;
    (0.5 * libm::log1p(2.0 * re + re * re + im * im), im.atan2(1.0 + re), units / square.sqrt().max(1e-300))
}

/// sin u − u for |u| ≤ ½, relative error a few units in the last place.
fn sine_minus_angle(u: f64) -> f64 {
    let square = u * u;
    let mut sum = 1.0;
    for k in [17.0, 15.0, 13.0, 11.0, 9.0, 7.0, 5.0] {
        sum = 1.0 - sum * square / (k * (k - 1.0));
    }
    -u * square / 6.0 * sum
}

/// Masses of the sum of all parts at first, first + 1, …, `length` of them, of a sum that has at most
/// `outside` of its mass off that window.
///
/// **Method.** The characteristic function φ of each part at t_j = 2πj/N comes from one real transform of its
/// masses, wrapped around the window (which changes nothing at these t_j). The product of the powers, turned by
/// the window's start, is transformed back. Powers below 1e-20 are dropped without a logarithm.
///
/// **Error.** (1) *Aliasing*: mass outside the window appears inside, at most `outside` in all. (2) *The powers*:
/// power j has a relative error ε_j. Where φ came from the transform, ε_j = Σ_parts n·6u·log₂N/|φ| + u·|exponent|;
/// where n is large the few frequencies that matter are evaluated anew about the exact mean
/// ([`log_characteristic`], which counts its own roundings), as long as that is the more accurate of the two. A run of masses sums e^(it_j k) over neighbouring k, at most 1/sin(πj/N) in modulus, so
/// these errors add up to at most Σ_j 2|power_j|ε_j/(N sin(πj/N)); the error at j = 0 is 0 as the masses sum to 1.
/// Damped sums have |1 − e^(−τ+it_j)| in place of 2 sin. (3) *The transform back*: its rounding error is at most
/// 3u·log₂N of the masses in the Euclidean norm (three times the worst seen for this library, which is below the
/// proven bound for its split-radix kernels), hence at most that times √N in a run, by Cauchy and Schwarz, and
/// that times (1 − e^(−2τ))^(−1/2) in a damped sum. (4) Dropped powers: at most 1e-20·ln N.
pub(crate) fn masses(
    parts: &[Part],
    first: i64,
    length: usize,
    outside: f64,
    damping: f64,
    work: &Work,
) -> Result<Masses, Cancelled> {
    let _alone = plans::alone(length);
    let plans::Plan { forward, backward } = plans::plan(length);
    let half = length / 2;
    let log_length = (length as f64).log2();
    let mut scratch = vec![Complex64::default(); forward.get_scratch_len().max(backward.get_scratch_len())];
    let mut masses = vec![0.0; length];
    let mut spectrum = vec![Complex64::default(); half + 1];
    // ln|product|, its phase about the anchors, and the relative error, frequency by frequency.
    let mut magnitude = vec![0.0; half + 1];
    let mut phase = vec![0.0; half + 1];
    let mut relative = vec![0.0; half + 1];
    for part in parts {
        work.check()?;
        masses.fill(0.0);
        for (&offset, &mass) in part.offsets.iter().zip(&part.masses) {
            masses[offset.rem_euclid(length as i64) as usize] += mass;
        }
        // The lengths are the planned ones, so the transform cannot fail.
        let _ = forward.process_with_scratch(
            &mut masses,
            &mut spectrum,
            &mut scratch[..forward.get_scratch_len()],
        );
        let cut = (2.0 * NEGLIGIBLE / part.count).exp();
        for j in 1..=half {
            if j % CHECKED == 0 {
                work.check()?;
            }
            let square = spectrum[j].norm_sqr();
            if magnitude[j] == f64::NEG_INFINITY || square < cut {
                magnitude[j] = f64::NEG_INFINITY;
                continue;
            }
            let argument = spectrum[j].im.atan2(spectrum[j].re);
            magnitude[j] += 0.5 * part.count * square.ln();
            phase[j] += reduced(part.count, argument);
            relative[j] += part.count * U * (6.0 * log_length / square.sqrt() + 2.0 + argument.abs());
        }
    }
    work.check()?;
    // e^(−it·Σ n·anchor) and e^(+it·first) together turn by an integer multiple of 2πj/N.
    let anchors = parts.iter().fold(0i128, |sum, part| sum + part.count as i128 * i128::from(part.anchor));
    let turn = (anchors - i128::from(first)).rem_euclid(length as i128) as u64;
    let from_first = center(parts).plus(-(first as f64));
    let refine = parts.iter().any(|part| part.count >= REFINED_FROM);
    let atoms: usize = parts.iter().map(|part| part.offsets.len()).sum();
    let mut refinements = if refine { REFINEMENTS / atoms.max(1) } else { 0 };
    let scale = 1.0 / length as f64;
    spectrum[0] = Complex64::new(scale, 0.0);
    let mut overtaken = 0;
    let (mut run_error, mut damped_error) = (0.0, 0.0);
    for j in 1..=half {
        if j % CHECKED == 0 {
            work.check()?;
        }
        if magnitude[j] < NEGLIGIBLE {
            spectrum[j] = Complex64::default();
            continue;
        }
        let t = TAU * j as f64 * scale;
        let turned = (j as u128 * u128::from(turn) % length as u128) as f64 * scale;
        let mut logarithm = magnitude[j];
        let mut angle = phase[j] - TAU * turned;
        let mut error = relative[j] + U * (24.0 + 2.0 * logarithm.abs());
        if refinements > 0 {
            refinements -= 1;
            let refined = frequency(parts, from_first, j as f64, length as f64);
            let units = refined.units;
            if U * units < error {
                (logarithm, angle) = (refined.logarithm, refined.angle);
                error = U * units;
                overtaken = 0;
            } else {
                // From some frequency on the transform is the better of the two.
                overtaken += 1;
                if overtaken == 16 {
                    refinements = 0;
                }
            }
        }
        let size = logarithm.exp();
        let (sine, cosine) = angle.sin_cos();
        spectrum[j] = Complex64::new(scale * size * cosine, scale * size * sine);
        let sine_half = (0.5 * t).sin();
        run_error += size * error / sine_half;
        damped_error += size * error / (0.5 * damping_modulus(damping, sine_half)).max(f64::MIN_POSITIVE);
    }
    spectrum[0].im = 0.0;
    spectrum[half].im = 0.0;
    let _ =
        backward.process_with_scratch(&mut spectrum, &mut masses, &mut scratch[..backward.get_scratch_len()]);
    let square: f64 = masses.iter().map(|mass| mass * mass).sum();
    let norm_error = 3.0 * U * log_length * square.sqrt();
    let dropped = outside + 1e-19 * (1.0 + length as f64).ln();
    let run_error = scale * 2.0 * run_error + norm_error * (length as f64).sqrt() + dropped;
    let damped_error = scale * 2.0 * damped_error
        + norm_error / (-libm::expm1(-2.0 * damping)).max(scale).sqrt()
        + 2.0 * dropped;
    Ok(Masses { values: masses, run_error, damped_error: damped_error.min(run_error * 2.0) })
}

/// The transform of a sum at one frequency of a cycle, and by how many units in the last place it may be off.
pub(crate) struct Frequency {
    /// The logarithm of its modulus.
    pub logarithm: f64,
    /// Its argument, about the start of the cycle.
    pub angle: f64,
    /// Relative error in units of 2⁻⁵³.
    pub units: f64,
}

/// Frequency j of the cycle of `length` indices that begins `from_first` below the mean, from the summands
/// directly.
pub(crate) fn frequency(parts: &[Part], from_first: Twofold, j: f64, length: f64) -> Frequency {
    let t = TAU * j / length;
    let each: Vec<Logarithm> = parts.iter().map(|part| log_characteristic(part, t)).collect();
    product(parts, &each, from_first, j, length)
}

/// The same from the logarithms of one copy of each part at that frequency.
pub(crate) fn product(
    parts: &[Part],
    logarithms: &[Logarithm],
    from_first: Twofold,
    j: f64,
    length: f64,
) -> Frequency {
    let (mut logarithm, mut angle, mut units) = (0.0, 0.0, 24.0);
    for (part, &(log, argument, each)) in parts.iter().zip(logarithms) {
        logarithm += part.count * log;
        angle += reduced(part.count, argument);
        units += part.count * (each + 4.0 * (log.abs() + argument.abs()));
    }
    // The transform has e^(−itk): the conjugate, turned by the distance from the start to the mean.
    let turned = fraction(from_first.times(j).over(length));
    Frequency { logarithm, angle: -angle - TAU * turned, units }
}

/// |1 − e^(−τ+it)| from sin(t/2): √((1 − e^−τ)² + 4e^−τ sin²(t/2)).
fn damping_modulus(damping: f64, sine_half: f64) -> f64 {
    let gone = -libm::expm1(-damping);
    (gone * gone + 4.0 * (1.0 - gone) * sine_half * sine_half).sqrt()
}

/// count·angle modulo 2π, the product taken without error.
fn reduced(count: f64, angle: f64) -> f64 {
    TAU * fraction(Twofold::product(count, angle).over(2.0 * PI))
}

/// The fractional part, in [−½, ½].
fn fraction(x: Twofold) -> f64 {
    (x.high - x.high.round()) + x.low
}

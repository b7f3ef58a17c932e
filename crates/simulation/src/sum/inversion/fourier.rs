//! A distribution function from equidistant samples of its transform.
//!
//! With φ(t) = E e^{−itZ}, Δ = 2π/P and t_k = (k + ½)Δ,
//!
//! P(Z ≤ z) = w/2 + Σ_{k≥0} Im[φ(t_k) e^{i t_k z}]/(π(k + ½)) + alias,
//!
//! |alias| ≤ max(P(Z < z − P), P(Z > z + P)) (Davies 1973, Biometrika 60:415), w the total mass. Eight complex
//! transforms give the sum on a grid of ≥ 8 points per shortest wave; between grid points a central polynomial
//! through 16 of them is used. A wave of phase θ per step is interpolated to (θ/2)¹⁶·0.2, and the sum of that
//! over all waves is the stated interpolation error.

use num_complex::Complex64;
use rustfft::FftPlanner;
use std::cell::RefCell;
use std::sync::Mutex;

thread_local! {
    static PLANNER: RefCell<FftPlanner<f64>> = RefCell::new(FftPlanner::new());
}

/// Grid points per shortest wave.
const FINER: usize = 8;
/// Transforms up to this length keep their plans, one set per thread.
const KEPT_UP_TO: usize = 1 << 15;
/// Sums of this many waves or more are made one at a time: their buffers take up to 40 MB.
const ALONE_FROM: usize = 1 << 17;

static ALONE: Mutex<()> = Mutex::new(());

/// Points of the interpolating polynomial.
const POINTS: usize = 16;
/// (−1)^j binomial(15, j).
const WEIGHTS: [f64; POINTS] = [
    1.0, -15.0, 105.0, -455.0, 1365.0, -3003.0, 5005.0, -6435.0, 6435.0, -5005.0, 3003.0, -1365.0, 455.0,
    -105.0, 15.0, -1.0,
];

/// The truncated series and its values on a grid.
#[derive(Debug)]
pub(super) struct FourierPart {
    spacing: f64,
    /// φ(t_k)/(π(k + ½)).
    coefficients: Vec<Complex64>,
    half_mass: f64,
    start: f64,
    step: f64,
    values: Vec<f64>,
    /// Interpolation error.
    pub(super) interpolation: f64,
    /// Rounding of the sum.
    pub(super) rounding: f64,
}

impl FourierPart {
    /// Sums the series on a grid that covers [low, high], an interval shorter than the period 2π/spacing.
    pub(super) fn new(spacing: f64, coefficients: Vec<Complex64>, mass: f64, low: f64, high: f64) -> Self {
        let waves = coefficients.len().next_power_of_two().max(64);
        let length = waves * FINER;
        let _alone =
            (waves >= ALONE_FROM).then(|| ALONE.lock().unwrap_or_else(std::sync::PoisonError::into_inner));
        let period = 2.0 * std::f64::consts::PI / spacing;
        let step = period / length as f64;
        let start = low - step * POINTS as f64;
        let wanted = (((high - low) / step).ceil() as usize + 2 * POINTS + 1).min(length);
        let half_mass = 0.5 * mass;
        let quarter = std::f64::consts::PI / length as f64;
        // Point FINER·q + r of the grid is point q of a transform of the coefficients turned r times: FINER short
        // transforms instead of a long one that is mostly zeros.
        let plan = if waves > KEPT_UP_TO {
            FftPlanner::new().plan_fft_inverse(waves)
        } else {
            PLANNER.with_borrow_mut(|planner| planner.plan_fft_inverse(waves))
        };
        let mut turned: Vec<Complex64> = coefficients
            .iter()
            .enumerate()
            .map(|(k, c)| c * Complex64::from_polar(1.0, (k as f64 + 0.5) * spacing * start))
            .collect();
        let turns: Vec<Complex64> = (0..turned.len())
            .map(|k| Complex64::from_polar(1.0, 2.0 * std::f64::consts::PI * k as f64 / length as f64))
            .collect();
        let mut values = vec![0.0; wanted];
        let mut buffer = vec![Complex64::ZERO; waves];
        let mut scratch = vec![Complex64::ZERO; plan.get_inplace_scratch_len()];
        let ratio = Complex64::from_polar(1.0, quarter * FINER as f64);
        for r in 0..FINER {
            if r > 0 {
                turned.iter_mut().zip(&turns).for_each(|(value, turn)| *value *= turn);
            }
            buffer[..turned.len()].copy_from_slice(&turned);
            buffer[turned.len()..].fill(Complex64::ZERO);
            plan.process_with_scratch(&mut buffer, &mut scratch);
            let mut turn = Complex64::ONE;
            for (q, (value, sum)) in values.iter_mut().skip(r).step_by(FINER).zip(&buffer).enumerate() {
                if q % 16 == 0 {
                    turn = Complex64::from_polar(1.0, quarter * (FINER * q + r) as f64);
                }
                *value = half_mass + (sum * turn).im;
                turn *= ratio;
            }
        }
        let (mut interpolation, mut total) = (0.0, 0.0);
        for (k, c) in coefficients.iter().enumerate() {
            let half_turn = 0.5 * (k as f64 + 0.5) * spacing * step;
            let size = c.norm();
            interpolation += size * half_turn.powi(POINTS as i32);
            total += size;
        }
        Self {
            spacing,
            coefficients,
            half_mass,
            start,
            step,
            values,
            interpolation: 0.2 * interpolation,
            rounding: f64::EPSILON * (0.5 + total) * (24.0 + (length as f64).log2()),
        }
    }

    /// The truncated sum at z.
    pub(super) fn evaluate(&self, z: f64) -> f64 {
        let place = (z - self.start) / self.step;
        let first = place.floor() - (POINTS / 2 - 1) as f64;
        if !(first >= 0.0 && first + (POINTS as f64) < self.values.len() as f64) {
            return self.direct(z);
        }
        let values = &self.values[first as usize..first as usize + POINTS];
        let x = place - first;
        let (mut top, mut bottom) = (0.0, 0.0);
        for (j, (value, weight)) in values.iter().zip(WEIGHTS).enumerate() {
            let distance = x - j as f64;
            if distance == 0.0 {
                return *value;
            }
            let share = weight / distance;
            top += share * value;
            bottom += share;
        }
        top / bottom
    }

    /// The truncated sum at z, term by term.
    pub(super) fn direct(&self, z: f64) -> f64 {
        let ratio = Complex64::from_polar(1.0, self.spacing * z);
        let mut sum = 0.0;
        for (block, chunk) in self.coefficients.chunks(64).enumerate() {
            let mut turn = Complex64::from_polar(1.0, ((block * 64) as f64 + 0.5) * self.spacing * z);
            for c in chunk {
                sum += (c * turn).im;
                turn *= ratio;
            }
        }
        self.half_mass + sum
    }

    /// Distance between grid points.
    pub(super) fn step(&self) -> f64 {
        self.step
    }

    /// Number of frequencies.
    pub(super) fn frequencies(&self) -> usize {
        self.coefficients.len()
    }

    /// Bound on the second derivative of the sum.
    pub(super) fn curvature(&self) -> f64 {
        self.coefficients
            .iter()
            .enumerate()
            .map(|(k, c)| c.norm() * ((k as f64 + 0.5) * self.spacing).powi(2))
            .sum()
    }
}

//! A distribution function from equidistant samples of its transform.
//!
//! With φ(t) = E e^{−itZ}, Δ = 2π/P and t_k = (k + ½)Δ,
//!
//! P(Z ≤ z) = w/2 + Σ_{k≥0} Im[φ(t_k) e^{i t_k z}]/(π(k + ½)) + alias,
//!
//! |alias| ≤ max(P(Z < z − P), P(Z > z + P)) (Davies 1973, Biometrika 60:415), w the total mass. One complex
//! transform gives the sum on a grid of ≥ 8 points per shortest wave; between grid points a central polynomial
//! through 16 of them is used. A wave of phase θ per step is interpolated to (θ/2)¹⁶·0.2, and the sum of that
//! over all waves is the stated interpolation error.

use num_complex::Complex64;
use rustfft::FftPlanner;
use std::cell::RefCell;

thread_local! {
    static PLANNER: RefCell<FftPlanner<f64>> = RefCell::new(FftPlanner::new());
}

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
        let length = (coefficients.len() * 8).next_power_of_two().max(512);
        let period = 2.0 * std::f64::consts::PI / spacing;
        let step = period / length as f64;
        let start = low - step * POINTS as f64;
        let mut buffer = vec![Complex64::ZERO; length];
        for (k, c) in coefficients.iter().enumerate() {
            buffer[k] = c * Complex64::from_polar(1.0, (k as f64 + 0.5) * spacing * start);
        }
        PLANNER.with_borrow_mut(|planner| planner.plan_fft_inverse(length)).process(&mut buffer);
        let wanted = (((high - low) / step).ceil() as usize + 2 * POINTS + 1).min(length);
        let half_mass = 0.5 * mass;
        let quarter = std::f64::consts::PI / length as f64;
        let ratio = Complex64::from_polar(1.0, quarter);
        let mut values = Vec::with_capacity(wanted);
        for (block, chunk) in buffer[..wanted].chunks(32).enumerate() {
            let mut turn = Complex64::from_polar(1.0, quarter * (32 * block) as f64);
            for v in chunk {
                values.push(half_mass + (v * turn).im);
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
            rounding: f64::EPSILON * (0.5 + total) * (2.0 + (length as f64).log2()),
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

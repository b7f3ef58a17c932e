//! The uniform law: density 1/(high − low) between its ends. Standard units: 0 < y < 1.
//!
//! Moments: mean 1/2, variance 1/12, skewness 0, excess kurtosis −6/5.

use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::special::elementary::complex_exp_m1;
use num_complex::Complex64;
use rand::RngExt;
use std::sync::Arc;

/// The uniform density on (0, 1).
#[derive(Debug)]
pub(crate) struct Uniform;

pub(super) fn compile(low: f64, high: f64, checks: &mut Checks) -> Option<Form> {
    if !checks.ordered("low", low, "high", high) {
        return None;
    }
    Some(Form::piece(Piece::whole(Arc::new(Uniform), 1.0, low, high - low)))
}

impl Density for Uniform {
    fn name(&self) -> &'static str {
        "uniform"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, 1.0)
    }
    fn density(&self, x: f64) -> f64 {
        if (0.0..=1.0).contains(&x) { 1.0 } else { 0.0 }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        x.clamp(0.0, 1.0)
    }
    fn above(&self, x: f64) -> f64 {
        (1.0 - x).clamp(0.0, 1.0)
    }
    fn quantile(&self, p: f64) -> f64 {
        p
    }
    fn quantile_above(&self, q: f64) -> f64 {
        1.0 - q
    }
    fn density_complex(&self, _x: Complex64, _near: f64) -> Complex64 {
        Complex64::new(1.0, 0.0)
    }
    /// Constant, hence entire and of its own (zeroth) power everywhere.
    fn rotation_up(&self) -> f64 {
        std::f64::consts::FRAC_PI_2
    }
    fn rotation_down(&self) -> f64 {
        std::f64::consts::FRAC_PI_2
    }
    /// ln((1 − e^{−s})/s).
    fn log_laplace(&self, s: Complex64) -> Option<Complex64> {
        if s.norm() < 1e-300 {
            return Some(Complex64::new(0.0, 0.0));
        }
        // For Re s < 0 take e^{−s} out so that nothing overflows.
        Some(if s.re >= 0.0 { (-complex_exp_m1(-s) / s).ln() } else { -s + (complex_exp_m1(s) / s).ln() })
    }
    fn skeleton(&self) -> Vec<f64> {
        vec![0.0, 1.0]
    }
    fn lower_exponent(&self) -> f64 {
        1.0
    }
    fn upper_exponent(&self) -> f64 {
        1.0
    }
    fn upper_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        Some(StandardMoments::finite(0.5, (1.0f64 / 12.0).sqrt(), 0.0, -1.2))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        random.random()
    }
}

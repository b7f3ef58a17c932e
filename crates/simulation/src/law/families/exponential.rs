//! The exponential law: survival e^{−x/mean}, x ≥ 0. Standard units: mean 1.
//!
//! Moments: sd 1, skewness 2, excess kurtosis 6. Sums are gamma laws.

use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::{ClosedFamily, Piece};
use crate::special::elementary::complex_ln_1p;
use num_complex::Complex64;
use rand_distr::Distribution;
use std::sync::Arc;

/// The exponential density with mean 1.
#[derive(Debug)]
pub(crate) struct Exponential;

pub(super) fn compile(mean: f64, checks: &mut Checks) -> Option<Form> {
    if !checks.positive("mean", mean) {
        return None;
    }
    Some(Form::piece(Piece::whole(Arc::new(Exponential), 1.0, 0.0, mean)).with_closed_form(
        ClosedFamily::Gamma { shape: 1.0, scale: 1.0 },
        0.0,
        mean,
    ))
}

impl Density for Exponential {
    fn name(&self) -> &'static str {
        "exponential"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x < 0.0 { 0.0 } else { (-x).exp() }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { -(-x).exp_m1() }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { (-x).exp() }
    }
    fn quantile(&self, p: f64) -> f64 {
        -(-p).ln_1p()
    }
    fn quantile_above(&self, q: f64) -> f64 {
        -q.ln()
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        (-x).exp()
    }
    /// Entire; e^{−z} decays while Re z grows, that is below π/2.
    fn rotation_up(&self) -> f64 {
        1.4
    }
    /// e^{−z} grows towards −∞.
    fn rotation_down(&self) -> f64 {
        0.0
    }
    /// −ln(1 + s), continued to the plane cut along s ≤ −1.
    fn log_laplace(&self, s: Complex64) -> Option<Complex64> {
        if s.im == 0.0 && s.re <= -1.0 { None } else { Some(-complex_ln_1p(s)) }
    }
    fn skeleton(&self) -> Vec<f64> {
        vec![1e-18, 1.0, 3.0, 6.0, 10.0, 15.0, 21.0, 28.0, 36.0, 45.0, 60.0, 75.0]
    }
    fn lower_exponent(&self) -> f64 {
        1.0
    }
    fn upper_exponent(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponential_rate(&self) -> f64 {
        1.0
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        Some(StandardMoments::finite(1.0, 1.0, 2.0, 6.0))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        rand_distr::Exp1.sample(random)
    }
}

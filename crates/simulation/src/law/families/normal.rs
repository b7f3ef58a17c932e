//! The normal law: density e^{−z²/2}/√(2π), z = (x − mean)/sd.
//!
//! Moments: skewness 0, excess kurtosis 0. References: DLMF §7.2; M. Abramowitz & I. Stegun §26.2.

use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::{ClosedFamily, Piece};
use crate::special;
use num_complex::Complex64;
use rand_distr::Distribution;
use std::sync::Arc;

/// The standard normal density.
#[derive(Debug)]
struct Normal;

/// The standard normal density.
pub(super) fn density() -> Arc<dyn Density> {
    Arc::new(Normal)
}

pub(super) fn compile(mean: f64, sd: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.finite("mean", mean) & checks.positive("sd", sd)) {
        return None;
    }
    Some(Form::piece(Piece::whole(density(), 1.0, mean, sd)).with_closed_form(
        ClosedFamily::Normal { mean: 0.0, sd: 1.0 },
        mean,
        sd,
    ))
}

impl Density for Normal {
    fn name(&self) -> &'static str {
        "normal"
    }
    fn support(&self) -> (f64, f64) {
        (f64::NEG_INFINITY, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        special::normal::density(x)
    }
    fn at_or_below(&self, x: f64) -> f64 {
        special::normal::at_or_below(x)
    }
    fn above(&self, x: f64) -> f64 {
        special::normal::above(x)
    }
    fn quantile(&self, p: f64) -> f64 {
        special::normal::quantile(p)
    }
    fn quantile_above(&self, q: f64) -> f64 {
        special::normal::quantile_above(q)
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        (-0.5 * x * x).exp() * (0.5 * std::f64::consts::FRAC_2_SQRT_PI * std::f64::consts::FRAC_1_SQRT_2)
    }
    /// Entire; e^{−z²/2} decays while |arg z| < π/4. 0.6 keeps the decay brisk.
    fn rotation_up(&self) -> f64 {
        0.6
    }
    fn rotation_down(&self) -> f64 {
        0.6
    }
    fn log_laplace(&self, s: Complex64) -> Option<Complex64> {
        Some(0.5 * s * s)
    }
    fn skeleton(&self) -> Vec<f64> {
        (-12..=12).map(|i| 0.9 * f64::from(i)).collect()
    }
    fn lower_exponent(&self) -> f64 {
        f64::INFINITY
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
        f64::INFINITY
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        Some(StandardMoments::finite(0.0, 1.0, 0.0, 0.0))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        rand_distr::StandardNormal.sample(random)
    }
}

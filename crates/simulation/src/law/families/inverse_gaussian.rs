//! The inverse Gaussian law: density √(λ/(2πx³)) e^{−λ(x−μ)²/(2μ²x)}, mean μ, shape λ. Standard units: mean 1,
//! shape φ = λ/μ.
//!
//! Moments: sd 1/√φ, skewness 3/√φ, excess kurtosis 15/φ. The sum of n copies has mean nμ and shape n²λ.
//! Reference: R. S. Chhikara & J. L. Folks, *The Inverse Gaussian Distribution* (1989), from memory.

use crate::law::checks::{Checks, show};
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::quadrature::{grade_from, quantile_points};
use crate::law::{ClosedFamily, Piece};
use crate::special;
use num_complex::Complex64;
use rand_distr::Distribution;
use std::sync::Arc;

/// The inverse Gaussian density with mean 1.
#[derive(Debug)]
struct InverseGaussian {
    shape: f64,
    sampler: Option<rand_distr::InverseGaussian<f64>>,
}

/// The density of mean 1.
pub(super) fn density(shape: f64) -> Arc<dyn Density> {
    Arc::new(InverseGaussian { shape, sampler: rand_distr::InverseGaussian::new(1.0, shape).ok() })
}

pub(super) fn compile(mean: f64, shape: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.positive("mean", mean) & checks.positive("shape", shape)) {
        return None;
    }
    let ratio = shape / mean;
    if !(1e-6..=1e12).contains(&ratio) {
        checks
            .problem("shape", format!("must be between 1e-6 and 1e12 times the mean (got {})", show(shape)));
        return None;
    }
    Some(Form::piece(Piece::whole(density(ratio), 1.0, 0.0, mean)).with_closed_form(
        ClosedFamily::InverseGaussian { mean: 1.0, shape: ratio },
        0.0,
        mean,
    ))
}

impl Density for InverseGaussian {
    fn name(&self) -> &'static str {
        "inverse-gaussian"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { special::inverse_gaussian::density(1.0, self.shape, x) }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { special::inverse_gaussian::at_or_below(1.0, self.shape, x) }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { special::inverse_gaussian::above(1.0, self.shape, x) }
    }
    fn quantile(&self, p: f64) -> f64 {
        special::inverse_gaussian::quantile(1.0, self.shape, p)
    }
    fn quantile_above(&self, q: f64) -> f64 {
        special::inverse_gaussian::quantile_above(1.0, self.shape, q)
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        if x.norm() < 1e-300 {
            return Complex64::new(0.0, 0.0);
        }
        let d = x - 1.0;
        let exponent = -0.5 * self.shape * d * d / x - 1.5 * x.ln();
        exponent.exp() * (self.shape / (2.0 * std::f64::consts::PI)).sqrt()
    }
    /// Analytic off the negative axis; on |z| = 1 the density is e^{φ(1−cos θ)} times larger than on the axis,
    /// kept to e²; decay at both ends needs θ < π/2.
    fn rotation_up(&self) -> f64 {
        (2.0 / self.shape.sqrt()).min(1.3)
    }
    /// The rays would run into the singularity at 0.
    fn rotation_down(&self) -> f64 {
        0.0
    }
    /// φ(1 − √(1 + 2s/φ)) = −2s/(1 + √(1 + 2s/φ)), continued to the plane cut along s ≤ −φ/2.
    fn log_laplace(&self, s: Complex64) -> Option<Complex64> {
        if s.im == 0.0 && s.re < -0.5 * self.shape {
            return None;
        }
        Some(-2.0 * s / (1.0 + (1.0 + 2.0 * s / self.shape).sqrt()))
    }
    fn skeleton(&self) -> Vec<f64> {
        let mut points = quantile_points(|p| self.quantile(p).max(1e-290), |q| self.quantile_above(q));
        // x⁴ f(x) peaks far out for small shapes: rate φ/2 beyond the last quantile.
        if let Some(&last) = points.last() {
            points.extend([1.0, 2.0, 3.0].map(|i| last + i * 20.0 / self.shape));
        }
        grade_from(&points, 0.0, 2.0)
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
        0.5 * self.shape
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        let root = self.shape.sqrt();
        Some(StandardMoments::finite(1.0, 1.0 / root, 3.0 / root, 15.0 / self.shape))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        match &self.sampler {
            // The library's smaller root cancels for small shapes; inversion is right everywhere.
            Some(sampler) if self.shape > 1e-3 => sampler.sample(random),
            _ => super::by_inversion(self, random),
        }
    }
}

//! The gamma law: density x^{shape−1} e^{−x/scale}/(Γ(shape) scale^shape), x > 0. Standard units: scale 1.
//!
//! Moments: mean shape, sd √shape, skewness 2/√shape, excess kurtosis 6/shape. Sums of copies are gamma laws.
//! References: DLMF §8.2; M. Abramowitz & I. Stegun §26.4 (χ² is shape ν/2, scale 2).

use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::quadrature::{grade_from, quantile_points};
use crate::law::{ClosedFamily, Piece};
use crate::special::{self, elementary::complex_ln_1p};
use num_complex::Complex64;
use rand_distr::Distribution;
use std::sync::Arc;

/// The gamma density with scale 1.
#[derive(Debug)]
struct Gamma {
    shape: f64,
    ln_gamma: f64,
    sampler: Option<rand_distr::Gamma<f64>>,
}

impl Gamma {
    fn new(shape: f64) -> Self {
        Self {
            shape,
            ln_gamma: special::gamma::ln_gamma(shape),
            sampler: rand_distr::Gamma::new(shape, 1.0).ok(),
        }
    }
}

/// The density of the shape with scale 1.
pub(super) fn density(shape: f64) -> Arc<dyn Density> {
    if shape == 1.0 { Arc::new(super::exponential::Exponential) } else { Arc::new(Gamma::new(shape)) }
}

pub(super) fn compile(shape: f64, scale: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.within("shape", shape, 1e-3, 1e12) & checks.positive("scale", scale)) {
        return None;
    }
    Some(Form::piece(Piece::whole(density(shape), 1.0, 0.0, scale)).with_closed_form(
        ClosedFamily::Gamma { shape, scale: 1.0 },
        0.0,
        scale,
    ))
}

impl Density for Gamma {
    fn name(&self) -> &'static str {
        "gamma"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x < 0.0 {
            0.0
        } else if x == 0.0 && self.shape < 1.0 {
            f64::INFINITY
        } else {
            special::gamma::density(self.shape, x)
        }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { special::gamma::below(self.shape, x) }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { special::gamma::above(self.shape, x) }
    }
    fn quantile(&self, p: f64) -> f64 {
        special::gamma::quantile(self.shape, p)
    }
    fn quantile_above(&self, q: f64) -> f64 {
        special::gamma::quantile_above(self.shape, q)
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        if self.shape < 1e4 {
            return ((self.shape - 1.0) * x.ln() - x - self.ln_gamma).exp();
        }
        // About the mode m = shape − 1 the large terms cancel before they are formed:
        // f(z) = f(m) exp(m ln(z/m) − (z − m)).
        let mode = self.shape - 1.0;
        let w = (x - mode) / mode;
        (mode * (complex_ln_1p(w) - w)).exp() * special::gamma::density(self.shape, mode)
    }
    /// Analytic off the negative axis, decays below π/2; z^{shape−1} e^{−z} grows on the ray by about
    /// e^{shape·θ²/2} over its size on the axis, kept to e².
    fn rotation_up(&self) -> f64 {
        (2.0 / self.shape.sqrt()).min(1.4)
    }
    /// e^{−z} grows towards −∞.
    fn rotation_down(&self) -> f64 {
        0.0
    }
    /// −shape·ln(1 + s), continued to the plane cut along s ≤ −1.
    fn log_laplace(&self, s: Complex64) -> Option<Complex64> {
        if s.im == 0.0 && s.re <= -1.0 { None } else { Some(-self.shape * complex_ln_1p(s)) }
    }
    fn skeleton(&self) -> Vec<f64> {
        let points =
            quantile_points(|p| self.quantile(p).max(1e-290), |q| self.quantile_above(q).max(1e-290));
        grade_from(&points, 0.0, 3.0)
    }
    fn lower_exponent(&self) -> f64 {
        self.shape
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
        let root = self.shape.sqrt();
        Some(StandardMoments::finite(self.shape, root, 2.0 / root, 6.0 / self.shape))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        match &self.sampler {
            Some(sampler) => sampler.sample(random),
            None => super::by_inversion(self, random),
        }
    }
}

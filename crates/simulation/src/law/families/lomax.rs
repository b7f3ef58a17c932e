//! The Lomax law: survival (1 + x/scale)^{−shape}, x ≥ 0. Standard units: scale 1. Pareto and heavy
//! generalized-Pareto laws are shifted, scaled images of it.
//!
//! For shape a: mean 1/(a−1), variance a/((a−1)²(a−2)), skewness 2(1+a)/(a−3)·√((a−2)/a), excess kurtosis
//! 6(a³+a²−6a−2)/(a(a−3)(a−4)); the moment of order k exists for a > k.
//! Reference: N. L. Johnson, S. Kotz & N. Balakrishnan, *Continuous Univariate Distributions* 1, ch. 20, from
//! memory; formulas checked by quadrature in the tests.

use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::quadrature::{grade_from, quantile_points};
use crate::special::elementary::complex_ln_1p;
use num_complex::Complex64;
use rand::RngExt;
use std::sync::Arc;

/// The Lomax density with scale 1.
#[derive(Debug)]
pub(crate) struct Lomax {
    pub(crate) shape: f64,
}

pub(super) fn compile(shape: f64, scale: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.within("shape", shape, 1e-2, 1e12) & checks.positive("scale", scale)) {
        return None;
    }
    Some(Form::piece(Piece::whole(Arc::new(Lomax { shape }), 1.0, 0.0, scale)))
}

impl Density for Lomax {
    fn name(&self) -> &'static str {
        "lomax"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x < 0.0 { 0.0 } else { self.shape * (-(self.shape + 1.0) * x.ln_1p()).exp() }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { -(-self.shape * x.ln_1p()).exp_m1() }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { (-self.shape * x.ln_1p()).exp() }
    }
    fn quantile(&self, p: f64) -> f64 {
        (-(-p).ln_1p() / self.shape).exp_m1().min(f64::MAX)
    }
    fn quantile_above(&self, q: f64) -> f64 {
        (-q.ln() / self.shape).exp_m1().min(f64::MAX)
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        (-(self.shape + 1.0) * complex_ln_1p(x)).exp() * self.shape
    }
    /// Analytic off the cut x ≤ −1, falls as a power in every direction of the right half-plane.
    fn rotation_up(&self) -> f64 {
        std::f64::consts::FRAC_PI_2
    }
    /// The rays would run into the cut.
    fn rotation_down(&self) -> f64 {
        0.0
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    fn skeleton(&self) -> Vec<f64> {
        let points = quantile_points(|p| self.quantile(p), |q| self.quantile_above(q).min(1e150));
        grade_from(&points, -1.0, 3.0)
    }
    fn lower_exponent(&self) -> f64 {
        1.0
    }
    fn upper_exponent(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_tail_index(&self) -> f64 {
        self.shape
    }
    fn lower_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponential_rate(&self) -> f64 {
        0.0
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        let a = self.shape;
        let when = |order: f64, value: f64| (a > order).then_some(value);
        Some(StandardMoments {
            mean: when(1.0, 1.0 / (a - 1.0)),
            sd: when(2.0, (a / (a - 2.0)).sqrt() / (a - 1.0)),
            skewness: when(3.0, 2.0 * ((1.0 + a) / (a - 3.0)) * ((a - 2.0) / a).sqrt()),
            excess_kurtosis: when(
                4.0,
                6.0 * (a * a * a + a * a - 6.0 * a - 2.0) / (a * (a - 3.0) * (a - 4.0)),
            ),
        })
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        let u: f64 = random.sample(rand::distr::OpenClosed01);
        self.quantile_above(u)
    }
}

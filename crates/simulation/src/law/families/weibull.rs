//! The Weibull law: survival e^{−(x/scale)^shape}, x > 0. Standard units: scale 1.
//!
//! E X^j = Γ(1 + j/shape) cancels in central moments, so these come from quadrature on the panels below.
//! X^shape is exponential, which gives quantiles and draws.

use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::Density;
use crate::law::form::Form;
use crate::law::quadrature::{grade_from, quantile_points};
use num_complex::Complex64;
use rand_distr::Distribution;
use std::f64::consts::FRAC_PI_2;
use std::sync::Arc;

/// The Weibull density with scale 1.
#[derive(Debug)]
struct Weibull {
    shape: f64,
}

pub(super) fn compile(shape: f64, scale: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.within("shape", shape, 0.05, 1e6) & checks.positive("scale", scale)) {
        return None;
    }
    let density: Arc<dyn Density> =
        if shape == 1.0 { Arc::new(super::exponential::Exponential) } else { Arc::new(Weibull { shape }) };
    let form = Form::piece(Piece::whole(density, 1.0, 0.0, scale));
    Some(if shape == 1.0 {
        let family = crate::law::ClosedFamily::Gamma { shape: 1.0, scale: 1.0 };
        form.with_closed_form(family, 0.0, scale)
    } else {
        form
    })
}

impl Weibull {
    /// x^shape.
    fn power(&self, x: f64) -> f64 {
        x.powf(self.shape)
    }
}

impl Density for Weibull {
    fn name(&self) -> &'static str {
        "weibull"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x < 0.0 {
            0.0
        } else if x == 0.0 {
            if self.shape < 1.0 { f64::INFINITY } else { 0.0 }
        } else {
            // One exponential: x^{shape−1} alone may overflow where the whole does not.
            self.shape * ((self.shape - 1.0) * x.ln() - self.power(x)).exp()
        }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { -(-self.power(x)).exp_m1() }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { (-self.power(x)).exp() }
    }
    fn quantile(&self, p: f64) -> f64 {
        (-(-p).ln_1p()).powf(1.0 / self.shape)
    }
    fn quantile_above(&self, q: f64) -> f64 {
        (-q.ln()).powf(1.0 / self.shape)
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        if x.norm() < 1e-300 {
            return Complex64::new(0.0, 0.0);
        }
        let log = x.ln();
        ((self.shape - 1.0) * log - (self.shape * log).exp()).exp() * self.shape
    }
    /// Analytic off the negative axis; z^shape must keep a positive real part: angle below π/(2·shape).
    fn rotation_up(&self) -> f64 {
        if self.shape < 0.95 { FRAC_PI_2 } else { (0.9 * FRAC_PI_2 / self.shape).min(1.4) }
    }
    /// The rays would run into the cut.
    fn rotation_down(&self) -> f64 {
        0.0
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    /// Quantiles, and beyond them as far as x⁴ f(x) reaches: x^shape to 4/shape and some deviations more.
    fn skeleton(&self) -> Vec<f64> {
        let mut points = quantile_points(|p| self.quantile(p).max(1e-290), |q| self.quantile_above(q));
        let orders = 4.0 / self.shape;
        let far = orders + 10.0 * orders.sqrt() + 60.0;
        let mut exponent: f64 = 60.0;
        while exponent < far {
            points.push(exponent.powf(1.0 / self.shape));
            exponent += 10.0;
        }
        points.push(far.powf(1.0 / self.shape));
        points.sort_by(f64::total_cmp);
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
        if self.shape > 1.0 { f64::INFINITY } else { 0.0 }
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        let exponential: f64 = rand_distr::Exp1.sample(random);
        exponential.powf(1.0 / self.shape)
    }
}

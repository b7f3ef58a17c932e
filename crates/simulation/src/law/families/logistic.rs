//! The logistic law: P(X ≤ x) = 1/(1 + e^{−y}), y = (x − mean)/scale.
//!
//! Moments (standard units): sd π/√3, skewness 0, excess kurtosis 6/5; E e^{−sX} = πs/sin(πs). The density has
//! poles at ±iπ, so rays may only leave from the half-line on their own side: once truncated, the law is kept
//! as its two halves.

use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use num_complex::Complex64;
use std::f64::consts::PI;
use std::sync::Arc;

/// The logistic density with mean 0 and scale 1.
#[derive(Debug)]
struct Logistic;

/// The density of |X| for a logistic X.
#[derive(Debug)]
struct HalfLogistic;

pub(super) fn compile(mean: f64, scale: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.finite("mean", mean) & checks.positive("scale", scale)) {
        return None;
    }
    Some(Form::piece(Piece::whole(Arc::new(Logistic), 1.0, mean, scale)))
}

/// e^{−z}/(1 + e^{−z})² for Re z ≥ 0.
fn bell(z: Complex64) -> Complex64 {
    let fall = (-z).exp();
    let sum = 1.0 + fall;
    fall / (sum * sum)
}

/// Stretches on one side of the centre, short against the distance π to the poles.
const ONE_SIDE: [f64; 14] = [1.0, 2.5, 4.5, 7.0, 10.0, 14.0, 18.0, 23.0, 29.0, 36.0, 44.0, 53.0, 63.0, 75.0];

impl Density for Logistic {
    fn name(&self) -> &'static str {
        "logistic"
    }
    fn support(&self) -> (f64, f64) {
        (f64::NEG_INFINITY, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        let fall = (-x.abs()).exp();
        fall / ((1.0 + fall) * (1.0 + fall))
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x < 0.0 { x.exp() / (1.0 + x.exp()) } else { 1.0 / (1.0 + (-x).exp()) }
    }
    fn above(&self, x: f64) -> f64 {
        self.at_or_below(-x)
    }
    fn quantile(&self, p: f64) -> f64 {
        p.ln() - (-p).ln_1p()
    }
    fn quantile_above(&self, q: f64) -> f64 {
        (-q).ln_1p() - q.ln()
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        // Even, so the side on which nothing overflows answers for both.
        bell(if x.re < 0.0 { -x } else { x })
    }
    /// A ray from far below 0 would pass the pole at iπ at any angle.
    fn rotation_up(&self) -> f64 {
        0.0
    }
    fn rotation_down(&self) -> f64 {
        0.0
    }
    /// ln(πs/sin πs) for |Re s| < 1.
    fn log_laplace(&self, s: Complex64) -> Option<Complex64> {
        if s.re.abs() >= 1.0 {
            return None;
        }
        let x = PI * s;
        if x.norm() < 0.2 {
            // ln(x/sin x) = x²/6 + x⁴/180 + x⁶/2835 + x⁸/37800 + x¹⁰/467775 + …
            let x2 = x * x;
            let inner = 1.0 / 2835.0 + x2 * (1.0 / 37800.0 + x2 / 467775.0);
            return Some(x2 * (1.0 / 6.0 + x2 * (1.0 / 180.0 + x2 * inner)));
        }
        if s.im.abs() < 1.0 {
            return Some((x / x.sin()).ln());
        }
        // Even in s; in the upper half-plane 1/sin x = −2i e^{ix}/(1 − e^{2ix}) does not overflow.
        let x = if s.im < 0.0 { -x } else { x };
        let i = Complex64::i();
        Some((-2.0 * i * x).ln() + i * x - (1.0 - (2.0 * i * x).exp()).ln())
    }
    fn skeleton(&self) -> Vec<f64> {
        let mut points: Vec<f64> = ONE_SIDE.iter().rev().map(|y| -y).collect();
        points.extend(ONE_SIDE);
        points
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
        1.0
    }
    fn lower_exponential_rate(&self) -> f64 {
        1.0
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        Some(StandardMoments::finite(0.0, PI / 3.0f64.sqrt(), 0.0, 1.2))
    }
    fn folded(&self) -> Option<Arc<dyn Density>> {
        Some(Arc::new(HalfLogistic))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        super::by_inversion(self, random)
    }
}

impl Density for HalfLogistic {
    fn name(&self) -> &'static str {
        "half of logistic"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x < 0.0 { 0.0 } else { 2.0 * Logistic.density(x) }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { (0.5 * x).tanh() }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { 2.0 * Logistic.above(x) }
    }
    fn quantile(&self, p: f64) -> f64 {
        p.ln_1p() - (-p).ln_1p()
    }
    fn quantile_above(&self, q: f64) -> f64 {
        (2.0 - q).ln() - q.ln()
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        2.0 * bell(if x.re < 0.0 { -x } else { x })
    }
    /// From 0 upwards the poles at ±iπ, ±3iπ, … lie at angle π/2 or more; decay like e^{−Re z}.
    fn rotation_up(&self) -> f64 {
        1.1
    }
    fn rotation_down(&self) -> f64 {
        0.0
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    fn skeleton(&self) -> Vec<f64> {
        let mut points = vec![1e-18];
        points.extend(ONE_SIDE);
        points
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
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        super::by_inversion(self, random)
    }
}

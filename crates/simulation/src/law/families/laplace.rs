//! The Laplace law: density e^{−|x − mean|/scale}/(2·scale): an even mixture of an exponential law and its
//! mirror image.
//!
//! Moments: sd √2·scale, skewness 0, excess kurtosis 3.

use super::exponential::Exponential;
use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::StandardMoments;
use crate::law::form::Form;
use std::sync::Arc;

pub(super) fn compile(mean: f64, scale: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.finite("mean", mean) & checks.positive("scale", scale)) {
        return None;
    }
    let half = |multiply: f64| Piece::whole(Arc::new(Exponential), 0.5, mean, multiply);
    let moments = StandardMoments::finite(0.0, std::f64::consts::SQRT_2, 0.0, 3.0);
    Some(Form::pieces(vec![half(-scale), half(scale)]).with_moments(moments.image(mean, scale)))
}

//! The generalized Pareto law: survival (1 + ξ(x − threshold)/scale)^{−1/ξ}, e^{−(x − threshold)/scale} for
//! shape ξ = 0; bounded above for ξ < 0.
//!
//! ξ > 0 is a Lomax law of shape 1/ξ and scale `scale`/ξ; ξ = 0 is exponential; for ξ < 0, 1 minus the
//! relative distance to the upper end is a beta law with a = 1, b = −1/ξ.

use super::beta;
use super::exponential::Exponential;
use super::lomax::Lomax;
use crate::law::Piece;
use crate::law::checks::{Checks, show};
use crate::law::form::Form;
use std::sync::Arc;

pub(super) fn compile(threshold: f64, scale: f64, shape: f64, checks: &mut Checks) -> Option<Form> {
    let mut good = checks.finite("threshold", threshold) & checks.positive("scale", scale);
    if !(-20.0..=100.0).contains(&shape) {
        checks.problem("shape", format!("must lie between -20 and 100 (got {})", show(shape)));
        good = false;
    }
    good.then(|| Form::piece(piece(threshold, scale, shape)))
}

/// The law as one piece of probability 1.
pub(super) fn piece(threshold: f64, scale: f64, shape: f64) -> Piece {
    // Shapes this small differ from the exponential law by less than rounding at any probability above 1e-100.
    if shape.abs() < 1e-20 {
        Piece::whole(Arc::new(Exponential), 1.0, threshold, scale)
    } else if shape > 0.0 {
        Piece::whole(Arc::new(Lomax { shape: 1.0 / shape }), 1.0, threshold, scale / shape)
    } else {
        // Seen from the upper end y = (end − x)/(end − threshold) has density b·y^{b−1}: singular, if at all,
        // at y = 0, where doubles are fine.
        let width = scale / -shape;
        Piece::whole(beta::density(-1.0 / shape, 1.0), 1.0, threshold + width, -width)
    }
}

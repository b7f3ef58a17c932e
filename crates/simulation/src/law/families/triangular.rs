//! The triangular law: the density rises linearly from low to mode and falls linearly from there to high.
//!
//! Two pieces, each with density 2y on (0, 1) seen from its outer end. With c = (mode − low)/(high − low):
//! mean (1 + c)/3, variance (1 − c + c²)/18, skewness √2(1 − 2c)(1 + c)(2 − c)/(5(1 − c + c²)^{3/2}), excess
//! kurtosis −3/5.

use super::beta;
use crate::law::Piece;
use crate::law::checks::{Checks, show};
use crate::law::density::StandardMoments;
use crate::law::form::Form;

pub(super) fn compile(low: f64, mode: f64, high: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.ordered("low", low, "high", high) & checks.finite("mode", mode)) {
        return None;
    }
    if mode < low || mode > high {
        let message = format!("must lie between {} and {} (got {})", show(low), show(high), show(mode));
        checks.problem("mode", message);
        return None;
    }
    let width = high - low;
    let (c, rest) = ((mode - low) / width, (high - mode) / width);
    let rising = || beta::density(2.0, 1.0);
    let mut pieces = Vec::new();
    if c > 0.0 {
        pieces.push(Piece::whole(rising(), c, low, mode - low));
    }
    if rest > 0.0 {
        pieces.push(Piece::whole(rising(), rest, high, mode - high));
    }
    // 1 − c + c² = 1 − c(1 − c), symmetric in the two parts.
    let spread = 1.0 - c * rest;
    let moments = StandardMoments::finite(
        (1.0 + c) / 3.0,
        (spread / 18.0).sqrt(),
        std::f64::consts::SQRT_2 * (rest - c) * (1.0 + c) * (1.0 + rest) / (5.0 * spread * spread.sqrt()),
        -0.6,
    );
    Some(Form::pieces(pieces).with_moments(moments.image(low, width)))
}

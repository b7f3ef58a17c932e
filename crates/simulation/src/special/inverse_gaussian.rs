//! The inverse Gaussian law, relative accuracy in both tails.
//!
//! Notation: α = √(shape/x)(x − mean)/mean, β = √(shape/x)(x + mean)/mean. As β² − α² = 4·shape/mean, the factor
//! e^(2·shape/mean) of the classical formula folds into e^(−α²/2), and only scaled error functions are left.

use super::erf::{erfcx, minus_erfcx_slope};
use super::legendre;
use super::solve::{Probe, Tail, on_positive_axis};
use std::f64::consts::{FRAC_1_SQRT_2, PI};

/// α²/2 = shape (x − mean)²/(2 mean² x), with few roundings.
fn exponent(mean: f64, shape: f64, x: f64) -> f64 {
    let distance = (x - mean) / mean;
    0.5 * (shape / x) * distance * distance
}

/// f(x) = √(shape/(2π x³)) exp(−shape (x − mean)²/(2 mean² x)) for x > 0, else 0. Relative error
/// ≈ (4 + 4|ln f|) units in the last place.
pub fn density(mean: f64, shape: f64, x: f64) -> f64 {
    if x <= 0.0 || x == f64::INFINITY {
        return 0.0;
    }
    let fall = exponent(mean, shape, x);
    if fall > 1400.0 {
        return 0.0;
    }
    // The root is split so that a large power of 1/x meets the small exponential in between.
    (-0.5 * fall).exp() * ((shape / (2.0 * PI * x)).sqrt() / x) * (-0.5 * fall).exp()
}

/// P(X ≤ x) = ½ e^(−α²/2) (erfcx(−α/√2) + erfcx(β/√2)) below the mean. shape/mean up to 1e15 and beyond;
/// relative error below 1e-13·(1 + |ln P|/50) down to 1e-300.
pub fn at_or_below(mean: f64, shape: f64, x: f64) -> f64 {
    both(mean, shape, x).0
}

/// P(X > x) = ½ e^(−α²/2) (erfcx(α/√2) − erfcx(β/√2)) above the mean; accuracy as [`at_or_below`].
pub fn above(mean: f64, shape: f64, x: f64) -> f64 {
    both(mean, shape, x).1
}

/// (P, Q), each with full relative accuracy.
fn both(mean: f64, shape: f64, x: f64) -> (f64, f64) {
    if x <= 0.0 {
        return (0.0, 1.0);
    }
    if x == f64::INFINITY {
        return (1.0, 0.0);
    }
    let root = (shape / x).sqrt();
    let (alpha, beta) = (root * ((x - mean) / mean), root * (x / mean + 1.0));
    let fall = exponent(mean, shape, x);
    if fall > 800.0 || !beta.is_finite() {
        return if x < mean { (0.0, 1.0) } else { (1.0, 0.0) };
    }
    let common = 0.5 * (-fall).exp();
    if alpha < -1.0 {
        let lower = common * (erfcx(-alpha * FRAC_1_SQRT_2) + erfcx(beta * FRAC_1_SQRT_2));
        (lower, 1.0 - lower)
    } else {
        let upper = common * erfcx_fall(alpha * FRAC_1_SQRT_2, 2.0 * FRAC_1_SQRT_2 * root);
        // Where x is below the mean the sum keeps a small P; it is large when Q is small.
        let lower = if alpha < 0.0 {
            common * (erfcx(-alpha * FRAC_1_SQRT_2) + erfcx(beta * FRAC_1_SQRT_2))
        } else {
            1.0 - upper
        };
        (lower.min(1.0), upper)
    }
}

/// erfcx(v) − erfcx(v + length): the difference where it is large enough, else the integral of the slope.
fn erfcx_fall(v: f64, length: f64) -> f64 {
    let (near, far) = (erfcx(v), erfcx(v + length));
    if far < 0.5 * near { near - far } else { legendre::integrate(length, |h| minus_erfcx_slope(v + h)) }
}

/// The x with P(X ≤ x) = p, 0 < p < 1 (0 and +∞ outside): a few units in the last place, times the conditioning
/// of the problem.
pub fn quantile(mean: f64, shape: f64, p: f64) -> f64 {
    if p <= 0.0 {
        0.0
    } else if p >= 1.0 {
        f64::INFINITY
    } else if p > 0.6 {
        invert(mean, shape, 1.0 - p, Tail::Upper)
    } else {
        invert(mean, shape, p, Tail::Lower)
    }
}

/// The x with P(X > x) = q; accurate for tiny q.
pub fn quantile_above(mean: f64, shape: f64, q: f64) -> f64 {
    if q <= 0.0 {
        f64::INFINITY
    } else if q >= 1.0 {
        0.0
    } else if q > 0.6 {
        invert(mean, shape, 1.0 - q, Tail::Lower)
    } else {
        invert(mean, shape, q, Tail::Upper)
    }
}

/// Solves for x from the lognormal with the same mean and variance.
fn invert(mean: f64, shape: f64, target: f64, tail: Tail) -> f64 {
    let z = match tail {
        Tail::Lower => super::normal::quantile(target),
        Tail::Upper => super::normal::quantile_above(target),
    };
    let spread = libm::log1p(mean / shape).sqrt();
    // Far tails of a wide law: at most a few doublings from where the exponent is of the right size.
    let start = mean * (spread * (z - 0.5 * spread)).clamp(-300.0, 300.0).exp();
    on_positive_axis(target, start, tail, |x| {
        let (lower, upper) = both(mean, shape, x);
        Probe {
            probability: if tail == Tail::Lower { lower } else { upper },
            density: density(mean, shape, x),
        }
    })
}

//! The standard normal law to the last few bits, far into both tails.

use super::elementary::two_product;
use super::erf::{erf_slope, erfc};
use std::f64::consts::FRAC_1_SQRT_2;

/// 1/√(2π).
const FRAC_1_SQRT_2PI: f64 = 0.398942280401432677940;

/// 1/√2 minus its double.
const FRAC_1_SQRT_2_LOW: f64 = -4.8336466567264565186e-17;

/// φ(z) = e^(−z²/2)/√(2π); relative error about two units in the last place at every z.
pub fn density(z: f64) -> f64 {
    let (square, low) = two_product(z, z);
    if square > 1600.0 {
        return 0.0;
    }
    FRAC_1_SQRT_2PI * (-0.5 * square).exp() * (1.0 - 0.5 * low)
}

/// P(Z > z) = ½ erfc(z/√2); relative error at most 4 units in the last place down to 1e-300.
///
/// The rounding δ of z/√2, which the tail would amplify by z², is put back to first order.
pub fn above(z: f64) -> f64 {
    if z > 40.0 {
        return 0.0;
    }
    if z < -40.0 {
        return 1.0;
    }
    let (x, low) = two_product(z, FRAC_1_SQRT_2);
    let rounding = low + z * FRAC_1_SQRT_2_LOW;
    // d erfc/dx = −(2/√π) e^(−x²)
    0.5 * (erfc(x) - rounding * erf_slope(x))
}

/// Φ(z) = P(Z ≤ z); relative error at most 4 units in the last place down to 1e-300.
pub fn at_or_below(z: f64) -> f64 {
    above(-z)
}

/// The z with Φ(z) = p, for 0 < p < 1 (−∞ at 0 and below, +∞ at 1 and above); accurate to a few units in the
/// last place of z, p as small as 1e-300. For p near 1 use [`quantile_above`].
pub fn quantile(p: f64) -> f64 {
    if p <= 0.0 {
        f64::NEG_INFINITY
    } else if p >= 1.0 {
        f64::INFINITY
    } else if p < 0.25 {
        -upper_tail(p)
    } else if p > 0.75 {
        upper_tail(1.0 - p)
    } else {
        central(p - 0.5)
    }
}

/// The z with P(Z > z) = q: [`quantile`] seen from the other side, accurate for tiny q.
pub fn quantile_above(q: f64) -> f64 {
    -quantile(q)
}

/// z with Φ(z) − ½ = excess, |excess| ≤ ¼: Halley steps on ½ erf(z/√2).
fn central(excess: f64) -> f64 {
    // Truncated series of the inverse, good to 1e-3 on the range.
    let t = excess / FRAC_1_SQRT_2PI;
    let mut z = t * (1.0 + t * t * (1.0 / 6.0 + t * t * (7.0 / 120.0 + t * t * 127.0 / 5040.0)));
    for _ in 0..3 {
        let step = (0.5 * libm::erf(z * FRAC_1_SQRT_2) - excess) / density(z);
        // f″/f′ = −z for f = Φ.
        z -= step / (1.0 + 0.5 * z * step);
        if step.abs() < 1e-6 * z.abs() {
            break;
        }
    }
    z
}

/// z > 0 with P(Z > z) = q, q < ¼.
///
/// Start from the rational approximation 26.2.23 of Abramowitz & Stegun (from memory; only a start), then Halley
/// steps on ln P(Z > z) − ln q, whose derivatives are −h and −h(h − z), h = φ/P(Z > ·).
fn upper_tail(q: f64) -> f64 {
    let t = (-2.0 * q.ln()).sqrt();
    let mut z = t
        - (2.515517 + t * (0.802853 + t * 0.010328)) / (1.0 + t * (1.432788 + t * (0.189269 + t * 0.001308)));
    for _ in 0..4 {
        let tail = above(z);
        if tail < 1e-307 {
            break;
        }
        let hazard = density(z) / tail;
        let excess = libm::log1p((tail - q) / q);
        let step = -excess / hazard;
        // f″/f′ = h − z for f = ln P(Z > ·).
        z -= step / (1.0 - 0.5 * (hazard - z) * step);
        if step.abs() < 1e-6 * z {
            break;
        }
    }
    z
}

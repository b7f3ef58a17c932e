//! The complementary error function: plain, scaled, and complex (Faddeeva's w).

use super::elementary::{complex_exp, exp_minus_square, two_product};
use num_complex::Complex64;
use std::f64::consts::PI;

/// 1/√π.
const FRAC_1_SQRT_PI: f64 = 0.564189583547756286948;

/// erfc(x) = (2/√π) ∫_x^∞ e^(−t²) dt; relative error below about one unit in the last place (libm's FreeBSD
/// kernel) down to the underflow threshold at x ≈ 26.5.
pub fn erfc(x: f64) -> f64 {
    libm::erfc(x)
}

/// erfcx(x) = e^(x²) erfc(x); relative error a few units in the last place. +∞ below x ≈ −26.6.
///
/// Below 8 from [`erfc`], with the rounding of x² put back; above, Laplace's continued fraction
/// √π erfcx(x) = 1/(x + (1/2)/(x + (2/2)/(x + (3/2)/(x + …)))) (DLMF 7.9.1).
pub fn erfcx(x: f64) -> f64 {
    if x < 8.0 {
        if x < -26.7 {
            return f64::INFINITY;
        }
        let (square, low) = two_product(x, x);
        return erfc(x) * square.exp() * (1.0 + low);
    }
    if x > 1e9 {
        return FRAC_1_SQRT_PI / x;
    }
    let mut tail = x;
    for k in (1..=24).rev() {
        tail = x + 0.5 * f64::from(k) / tail;
    }
    FRAC_1_SQRT_PI / tail
}

/// Number of quadrature points in [`faddeeva`].
const NODES: u32 = 11;

/// Faddeeva's function w(z) = e^(−z²) erfc(−iz).
///
/// In the upper half plane the trapezoidal rule (nodes kh) or the midpoint rule (nodes (k + ½)h), h² = π/12, on
/// w(z) = (i/π) ∫ e^(−t²)/(z − t) dt with 11 terms a side and the residue of the pole at t = z where it
/// matters; whichever rule has its nodes away from Re z is taken (Matta & Reichel 1971; Al Azah &
/// Chandler-Wilde 2021, SIAM J. Numer. Anal. 59:2346). Relative error below 1e-14 there. Below the real axis
/// w(z) = 2e^(−z²) − w(−z), relative to the larger term; infinite components, never `NaN`, where e^(−z²)
/// overflows.
pub fn faddeeva(z: Complex64) -> Complex64 {
    if z.im < 0.0 {
        return 2.0 * complex_exp(-z * z) - faddeeva(-z);
    }
    if z.re < 0.0 {
        return faddeeva(Complex64::new(-z.re, z.im)).conj();
    }
    if z.re.max(z.im) > 1e7 {
        // i/(√π z) (1 + 1/(2z²) + …), scaled against overflow of |z|².
        let scale = z.re.max(z.im);
        if scale == f64::INFINITY {
            return Complex64::new(0.0, 0.0);
        }
        return Complex64::new(0.0, FRAC_1_SQRT_PI) / (z / scale) / scale;
    }
    if z.re + z.im < 0.05 {
        return near_origin(z);
    }
    let step = (PI / f64::from(NODES + 1)).sqrt();
    let turn = Complex64::new(0.0, 2.0 * PI / step) * z;
    let square = z * z;
    let far_up = z.im >= z.re.max(PI / step);
    let place = z.re / step;
    let offset = place - place.floor();
    let midpoint = far_up || !(0.25..=0.75).contains(&offset);
    let mut sum = Complex64::new(0.0, 0.0);
    let first = if midpoint { 0.5 } else { 1.0 };
    for k in 0..=NODES {
        let node = (f64::from(k) + first) * step;
        sum += (-node * node).exp() / (square - node * node);
    }
    let mut value = Complex64::new(0.0, 2.0 * step / PI) * z * sum;
    if !midpoint {
        value += Complex64::new(0.0, step / PI) / z;
    }
    if !far_up {
        // Residue 2e^(−z²)/(1 ± e^(−2πiz/h)), written so that nothing overflows.
        let back = complex_exp(turn);
        let sign = if midpoint { 1.0 } else { -1.0 };
        value += 2.0 * complex_exp(turn - square) / (back + sign);
    }
    value
}

/// w(z) = Σ (iz)^k/Γ(k/2 + 1) for small |z| (DLMF 7.6.3), where the quadrature's pole at 0 would cancel.
fn near_origin(z: Complex64) -> Complex64 {
    let rotated = Complex64::new(-z.im, z.re);
    let square = rotated * rotated;
    let (mut even, mut odd) = (Complex64::new(1.0, 0.0), Complex64::new(2.0 * FRAC_1_SQRT_PI, 0.0));
    let mut sum = even + odd * rotated;
    for k in 1..=7 {
        let k = f64::from(k);
        even = even * square / k;
        odd = odd * square / (k + 0.5);
        sum += even + odd * rotated;
    }
    sum
}

/// −d erfc/dx = 2/√π · e^(−x²).
pub(crate) fn erf_slope(x: f64) -> f64 {
    2.0 * FRAC_1_SQRT_PI * exp_minus_square(x)
}

/// −erfcx′(v) = 2/√π − 2v·erfcx(v) > 0, without cancellation for large v, where it is ≈ 1/(√π v²).
///
/// With √π erfcx(v) = 1/(v + r), r the tail of Laplace's fraction, it is (2/√π)·r/(v + r) from v = 2 on.
pub(crate) fn minus_erfcx_slope(v: f64) -> f64 {
    if v < 2.0 {
        return 2.0 * FRAC_1_SQRT_PI - 2.0 * v * erfcx(v);
    }
    // Enough terms for full accuracy: about 200/v².
    let terms = (260.0 / (v * v)).ceil().clamp(4.0, 80.0) as u32 + 8;
    let mut tail = v;
    for k in (2..=terms).rev() {
        tail = v + 0.5 * f64::from(k) / tail;
    }
    let r = 0.5 / tail;
    2.0 * FRAC_1_SQRT_PI * r / (v + r)
}

//! Elementary functions without the cancellation their obvious formulas suffer near zero.

use num_complex::Complex64;

/// ln(1 + x) − x for x > −1, with full relative accuracy near 0 (where it is ≈ −x²/2).
///
/// With r = x/(2 + x): ln(1 + x) = 2 artanh r and 2r − x = −r·x, so the value is −r·x + 2(r³/3 + r⁵/5 + …); for
/// |r| > ½ the two terms of the definition no longer cancel and are used directly. −∞ at x = −1 and below.
/// Relative error a few units in the last place.
pub fn ln_1p_minus_x(x: f64) -> f64 {
    if x <= -1.0 {
        return f64::NEG_INFINITY;
    }
    let r = x / (2.0 + x);
    if r.abs() > 0.5 {
        return if x == f64::INFINITY { f64::NEG_INFINITY } else { libm::log1p(x) - x };
    }
    2.0 * r * artanh_excess(r) - r * x
}

/// artanh(r)/r − 1 = r²/3 + r⁴/5 + … for |r| ≤ ½.
pub(crate) fn artanh_excess(r: f64) -> f64 {
    let square = r * r;
    let mut power = square;
    let mut sum = 0.0;
    let mut divisor = 3.0;
    loop {
        let term = power / divisor;
        sum += term;
        // The next terms fall at least fourfold each.
        if term <= sum * 1e-17 {
            return sum;
        }
        power *= square;
        divisor += 2.0;
    }
}

/// e^x − 1 − x, with full relative accuracy near 0 (where it is ≈ x²/2); +∞ where e^x overflows.
pub fn exp_minus_1_minus_real(x: f64) -> f64 {
    if x.abs() < 0.5 {
        let mut factor = 1.0;
        for k in (3..=16).rev() {
            factor = 1.0 + factor * x / f64::from(k);
        }
        0.5 * x * x * factor
    } else if x == f64::INFINITY {
        x
    } else {
        libm::expm1(x) - x
    }
}

/// e^w with 0 instead of a small argument's underflow noise and infinite components, never `NaN`, on overflow.
pub(crate) fn complex_exp(w: Complex64) -> Complex64 {
    let (sine, cosine) = if w.im.is_finite() { w.im.sin_cos() } else { (0.0, 0.0) };
    if w.re > 709.0 {
        // e^709 is near the largest double: scale in two steps, so that a small cosine keeps its product finite.
        let (half, rest) = (700.0f64.exp(), (w.re - 700.0).exp());
        let times = |c: f64| if c == 0.0 { 0.0 } else { c * half * rest };
        return Complex64::new(times(cosine), times(sine));
    }
    let size = w.re.exp();
    Complex64::new(size * cosine, size * sine)
}

/// e^w − 1 without cancellation for small w.
///
/// Re = (e^a − 1) cos b − 2 sin²(b/2), Im = e^a sin b for w = a + ib. The complex relative error is a few units
/// in the last place; infinite components, never `NaN`, on overflow.
pub fn complex_exp_m1(w: Complex64) -> Complex64 {
    if w.re > 40.0 {
        return complex_exp(w) - 1.0;
    }
    let (sine, cosine) = w.im.sin_cos();
    let half_sine = (0.5 * w.im).sin();
    Complex64::new(libm::expm1(w.re) * cosine - 2.0 * half_sine * half_sine, w.re.exp() * sine)
}

/// e^w − 1 − w: full relative accuracy for small w (where it is ≈ w²/2), infinite components, never `NaN`, on
/// overflow. For |w| ≥ 1 it is accurate relative to 1 + |w| + |e^w|.
pub fn exp_minus_1_minus(w: Complex64) -> Complex64 {
    if w.norm_sqr() < 1.0 {
        let mut factor = Complex64::new(1.0, 0.0);
        for k in (3..=20).rev() {
            factor = factor * w / f64::from(k) + 1.0;
        }
        0.5 * w * w * factor
    } else {
        complex_exp_m1(w) - w
    }
}

/// ln(1 + w), principal branch, without cancellation for small w or near the unit circle |1 + w| = 1.
///
/// With w = a + ib the real part is ½ ln(1 + (2a + a² + b²)), the bracket summed in double-double arithmetic;
/// the imaginary part is atan2(b, 1 + a). Each component has a relative error of a few units in the last place,
/// the real part near |1 + w| = 1 one of 1e-30 absolutely. −∞ (real part) at w = −1.
pub fn complex_ln_1p(w: Complex64) -> Complex64 {
    let (a, b) = (w.re, w.im);
    let argument = libm::atan2(b, 1.0 + a);
    let (size_a, size_b) = (a.abs(), b.abs());
    let real = if size_a.max(size_b) > 1e3 || (1.0 + a).abs().max(size_b) < 0.5 {
        libm::hypot(1.0 + a, b).ln()
    } else {
        let (aa, aa_low) = two_product(a, a);
        let (bb, bb_low) = two_product(b, b);
        let (first, first_low) = two_sum(2.0 * a, aa);
        let (second, second_low) = two_sum(first, bb);
        0.5 * libm::log1p(second + (first_low + second_low + aa_low + bb_low))
    };
    Complex64::new(real, argument)
}

/// a·b as an unevaluated sum of two doubles.
pub(crate) fn two_product(a: f64, b: f64) -> (f64, f64) {
    let product = a * b;
    (product, a.mul_add(b, -product))
}

/// a + b as an unevaluated sum of two doubles.
pub(crate) fn two_sum(a: f64, b: f64) -> (f64, f64) {
    let sum = a + b;
    let from_b = sum - a;
    (sum, (a - (sum - from_b)) + (b - from_b))
}

/// e^(−x²) with the rounding of x² put back: relative error about one unit in the last place at every x.
pub(crate) fn exp_minus_square(x: f64) -> f64 {
    let (square, low) = two_product(x, x);
    if square > 800.0 {
        return 0.0;
    }
    (-square).exp() * (1.0 - low)
}

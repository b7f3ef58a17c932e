//! The gamma law of scale 1 (regularized incomplete gamma functions), relative accuracy in both tails.
//!
//! Notation: a = shape, P(a, x) = P(X ≤ x), Q(a, x) = P(X > x). Every route multiplies a well-conditioned sum by
//! the mass x^a e^(−x)/Γ(a + 1), which Loader's decomposition e^(−δ(a) − D(a, x))/√(2πa) gives without
//! cancellation: δ is the error of Stirling's formula, D the deviance (C. Loader 2000, "Fast and accurate
//! computation of binomial probabilities").

use super::elementary::{artanh_excess, ln_1p_minus_x};
use super::erf::erfcx;
use super::normal;
use super::solve::{Probe, Tail, on_positive_axis};
use std::f64::consts::PI;

/// ½ ln(2π).
const HALF_LN_2PI: f64 = 0.918938533204672741780;

/// Shapes from here on use Temme's uniform expansion where |η| ≤ 1.
const UNIFORM_FROM: f64 = 1000.0;

/// Coefficients f_m of η/(λ − 1) = Σ f_m η^m with λ − 1 − ln λ = η²/2, by series reversion in mpmath 1.3.0 with
/// 60 digits (`references/special.py`, `temme_coefficients`).
const TEMME: [f64; 38] = [
    1.0,
    -0.33333333333333333333,
    0.083333333333333333333,
    -0.014814814814814814815,
    0.0011574074074074074074,
    0.00035273368606701940035,
    -0.0001787551440329218107,
    0.000039192631785224377817,
    -2.1854485106799921615e-6,
    -1.8540622107151599607e-6,
    8.296711340953086005e-7,
    -1.7665952736826079304e-7,
    6.7078535434014985804e-9,
    1.0261809784240308043e-8,
    -4.3820360184533531866e-9,
    9.1476995822367902342e-10,
    -2.5514193994946249767e-11,
    -5.8307721325504250675e-11,
    2.4361948020667416244e-11,
    -5.0276692801141755891e-12,
    1.1004392031956134771e-13,
    3.3717632624009853788e-13,
    -1.3923887224181620659e-13,
    2.8534893807047443204e-14,
    -5.139111834242572619e-16,
    -1.9752288294349442835e-15,
    8.0995211567045613341e-16,
    -1.6522531216398161819e-16,
    2.5305430097478884233e-18,
    1.1686939738559576589e-17,
    -4.7700370498204847582e-18,
    9.6991260590562371242e-19,
    -1.293256553803817501e-20,
    -6.9692302531856933805e-20,
    2.8351454321769365999e-20,
    -5.7509821590070475002e-21,
    6.7929537834889145646e-23,
    4.1821254261113358578e-22,
];

/// ln Γ(x) for x > 0 (libm's FreeBSD kernel: relative error below about one unit in the last place except near
/// the zeros at 1 and 2, where it is accurate absolutely); +∞ at 0.
pub fn ln_gamma(x: f64) -> f64 {
    libm::lgamma(x)
}

/// ln Γ(1 + a) for 0 ≤ a < 1, with full relative accuracy near a = 0.
///
/// Below ½ the series −ln(1 + a) + a(1 − γ) + Σ_{k≥2} (−1)^k (ζ(k) − 1) a^k/k (DLMF 5.7.3).
fn ln_gamma_1p(a: f64) -> f64 {
    if a > 0.5 {
        return libm::lgamma(1.0 + a);
    }
    /// ζ(k) − 1 for k = 2, 3, …, from mpmath 1.3.0.
    const ZETA_LESS_1: [f64; 29] = [
        0.64493406684822643647,
        0.2020569031595942854,
        0.082323233711138191516,
        0.036927755143369926331,
        0.017343061984449139715,
        0.0083492773819228268398,
        0.0040773561979443393787,
        0.0020083928260822144179,
        0.00099457512781808533715,
        0.0004941886041194645587,
        0.00024608655330804829864,
        0.00012271334757848914675,
        0.000061248135058704829259,
        0.000030588236307020493552,
        0.000015282259408651871733,
        7.6371976378997622736e-6,
        3.8172932649998398565e-6,
        1.9082127165539389257e-6,
        9.5396203387279611315e-7,
        4.7693298678780646312e-7,
        2.3845050272773299e-7,
        1.1921992596531107307e-7,
        5.9608189051259479612e-8,
        2.9803503514652280186e-8,
        1.4901554828365041235e-8,
        7.450711789835429492e-9,
        3.7253340247884570548e-9,
        1.8626597235130490064e-9,
        9.3132743241966818287e-10,
    ];
    /// 1 − γ (Euler's constant).
    const ONE_LESS_EULER: f64 = 0.422784335098467139393;
    let mut sum = 0.0;
    for (index, zeta) in ZETA_LESS_1.iter().enumerate().rev() {
        sum = zeta / (index as f64 + 2.0) - a * sum;
    }
    a * (ONE_LESS_EULER + a * sum) - libm::log1p(a)
}

/// δ(x) = ln Γ(x + 1) − [(x + ½) ln x − x + ½ ln 2π], the error of Stirling's formula, for x > 0.
///
/// From 10 on the asymptotic series (DLMF 5.11.1); between ½ and 10 raised to it by
/// δ(x) − δ(x + 1) = (x + ½) ln(1 + 1/x) − 1; below ½ from its definition. Relative error a few units in the
/// last place.
pub fn stirling_error(x: f64) -> f64 {
    if x < 0.5 {
        return ln_gamma_1p(x) - (x + 0.5) * x.ln() + x - HALF_LN_2PI;
    }
    let mut shifted = x;
    let mut steps = 0.0;
    while shifted < 10.0 {
        // (x + ½) ln(1 + 1/x) = artanh(r)/r with r = 1/(2x + 1).
        steps += artanh_excess(1.0 / (2.0 * shifted + 1.0));
        shifted += 1.0;
    }
    let inverse = 1.0 / shifted;
    let square = inverse * inverse;
    const SERIES: [f64; 9] = [
        1.0 / 12.0,
        -1.0 / 360.0,
        1.0 / 1260.0,
        -1.0 / 1680.0,
        1.0 / 1188.0,
        -691.0 / 360360.0,
        1.0 / 156.0,
        -3617.0 / 122400.0,
        43867.0 / 244188.0,
    ];
    steps + inverse * SERIES.iter().rev().fold(0.0, |sum, term| sum * square + term)
}

/// Loader's deviance D(x, mean) = x ln(x/mean) + mean − x ≥ 0 for x ≥ 0, mean > 0; relative error a few units in
/// the last place, also where x ≈ mean. 0 only at x = mean.
pub fn deviance(x: f64, mean: f64) -> f64 {
    if x == mean {
        return 0.0;
    }
    if x <= 0.0 {
        return mean;
    }
    if mean <= 0.0 || mean == f64::INFINITY || x == f64::INFINITY {
        return f64::INFINITY;
    }
    if mean < 0.3 * x || mean > 3.0 * x {
        let ratio = x / mean;
        let ln_ratio = if ratio.is_normal() { ratio.ln() } else { x.ln() - mean.ln() };
        return x * ln_ratio + (mean - x);
    }
    -x * ln_1p_minus_x((mean - x) / x)
}

/// x^a e^(−x)/Γ(a + 1): the Poisson(x) mass at a real a > 0.
pub(crate) fn mass(a: f64, x: f64) -> f64 {
    if a < 1.0 {
        return (a * x.ln() - x - ln_gamma_1p(a)).exp();
    }
    (-deviance(a, x) - stirling_error(a)).exp() / (2.0 * PI * a).sqrt()
}

/// The density x^(a−1) e^(−x)/Γ(a); 0 below 0, +∞ at 0 for a < 1. Relative error ≈ (5 + |ln density|) units in
/// the last place.
pub fn density(shape: f64, x: f64) -> f64 {
    if x < 0.0 || x == f64::INFINITY {
        return 0.0;
    }
    if x == 0.0 {
        return match shape.partial_cmp(&1.0) {
            Some(std::cmp::Ordering::Less) => f64::INFINITY,
            Some(std::cmp::Ordering::Equal) => 1.0,
            _ => 0.0,
        };
    }
    if shape < 1.0 {
        return ((shape - 1.0) * x.ln() - x - ln_gamma(shape)).exp();
    }
    if shape == 1.0 { (-x).exp() } else { mass(shape - 1.0, x) }
}

/// P(X ≤ x), the regularized lower incomplete gamma function P(a, x). Shapes from 1e-6 to 1e12; relative error
/// below 1e-13·(1 + |ln P|/100) down to 1e-300.
pub fn below(shape: f64, x: f64) -> f64 {
    both(shape, x).0
}

/// P(X > x), the regularized upper incomplete gamma function Q(a, x); accuracy as [`below`].
pub fn above(shape: f64, x: f64) -> f64 {
    both(shape, x).1
}

/// (P, Q), the smaller of them (Q always) with full relative accuracy.
pub(crate) fn both(a: f64, x: f64) -> (f64, f64) {
    if x <= 0.0 {
        return (0.0, 1.0);
    }
    if x == f64::INFINITY {
        return (1.0, 0.0);
    }
    if a >= UNIFORM_FROM {
        let deviance = deviance(a, x);
        if 2.0 * deviance <= a {
            return uniform(a, x, deviance);
        }
    }
    if a < 1.0 && x < 1.1 {
        return small_shape(a, x);
    }
    let mass = mass(a, x);
    if mass == 0.0 {
        return if x < a { (0.0, 1.0) } else { (1.0, 0.0) };
    }
    if x < a {
        let lower = (mass * series(a, x)).min(1.0);
        (lower, 1.0 - lower)
    } else {
        let upper = (mass * a * fraction(a, x)).min(1.0);
        (1.0 - upper, upper)
    }
}

/// Σ_{k≥0} x^k/((a+1)…(a+k)), so that P = mass·series (DLMF 8.7.1).
fn series(a: f64, x: f64) -> f64 {
    let (mut sum, mut term, mut divisor) = (1.0, 1.0, a);
    loop {
        divisor += 1.0;
        term *= x / divisor;
        sum += term;
        if term <= sum * 1e-17 {
            return sum;
        }
    }
}

/// 1/(x+1−a − 1(1−a)/(x+3−a − 2(2−a)/(x+5−a − …))), so that Q = mass·a·fraction (DLMF 8.9.2), by the modified
/// Lentz recursion.
fn fraction(a: f64, x: f64) -> f64 {
    let mut b = x + 1.0 - a;
    let mut c = 1e300;
    let mut d = 1.0 / b;
    let mut value = d;
    for k in 1..200_000 {
        let k = f64::from(k);
        let numerator = -k * (k - a);
        b += 2.0;
        d = numerator * d + b;
        if d.abs() < 1e-300 {
            d = 1e-300;
        }
        c = b + numerator / c;
        if c.abs() < 1e-300 {
            c = 1e-300;
        }
        d = 1.0 / d;
        let change = d * c;
        value *= change;
        if (change - 1.0).abs() < 2.3e-16 {
            break;
        }
    }
    value
}

/// (P, Q) for a < 1 and x < 1.1, where Q may be tiny although x is small.
///
/// With u = x^a/Γ(1+a) − 1: P = (1+u)(1 + a Σ_{k≥1} (−x)^k/((a+k) k!)) and Q = −u − (1+u)·a·Σ (DLMF 8.7.1).
fn small_shape(a: f64, x: f64) -> (f64, f64) {
    let (mut sum, mut term, mut k) = (0.0, 1.0, 0.0);
    loop {
        k += 1.0;
        term *= -x / k;
        let addend = term / (a + k);
        sum += addend;
        if addend.abs() <= 1e-18 * f64::abs(sum) {
            break;
        }
    }
    let exponent = a * x.ln() - ln_gamma_1p(a);
    let excess = libm::expm1(exponent);
    let upper = -excess - exponent.exp() * a * sum;
    (exponent.exp() * (1.0 + a * sum), upper.clamp(0.0, 1.0))
}

/// (P, Q) by Temme's uniform expansion for large a (Temme 1979, SIAM J. Math. Anal. 10:757; recursion as in Gil,
/// Segura & Temme 2012, SIAM J. Sci. Comput. 34:A2965).
///
/// Q = ½ erfc(η√(a/2)) + e^(−aη²/2)/√(2πa)·S, where aη²/2 is the deviance D(a, x) and η has the sign of x − a.
/// S·Γ* = Σ b_m η^m solves b_{m−1} = f_m + (m+1) b_{m+1}/a, with Γ* = 1 + b_1/a.
fn uniform(a: f64, x: f64, deviance: f64) -> (f64, f64) {
    let root = deviance.sqrt();
    let size = root * (2.0 / a).sqrt();
    let eta = if x >= a { size } else { -size };
    let last = TEMME.len() - 1;
    let mut b = [0.0; TEMME.len()];
    b[last - 1] = TEMME[last];
    b[last - 2] = TEMME[last - 1];
    for m in (1..last - 1).rev() {
        b[m - 1] = TEMME[m] + (m as f64 + 1.0) * b[m + 1] / a;
    }
    let sum = b[..last].iter().rev().fold(0.0, |sum, term| sum * eta + term) / (1.0 + b[1] / a);
    let common = (-deviance).exp();
    let correction = sum / (2.0 * PI * a).sqrt();
    let smaller_side = 0.5 * erfcx(root);
    if x >= a {
        let upper = common * (smaller_side + correction);
        (1.0 - upper, upper)
    } else {
        let lower = common * (smaller_side - correction);
        (lower, 1.0 - lower)
    }
}

/// The x with P(X ≤ x) = p, 0 < p < 1 (0 at 0, +∞ at 1): a few units in the last place times the conditioning
/// of the problem. 0 where the quantile underflows.
pub fn quantile(shape: f64, p: f64) -> f64 {
    if p <= 0.0 {
        0.0
    } else if p >= 1.0 {
        f64::INFINITY
    } else if p > 0.6 {
        invert(shape, 1.0 - p, Tail::Upper)
    } else {
        invert(shape, p, Tail::Lower)
    }
}

/// The x with P(X > x) = q; accurate for tiny q.
pub fn quantile_above(shape: f64, q: f64) -> f64 {
    if q <= 0.0 {
        f64::INFINITY
    } else if q >= 1.0 {
        0.0
    } else if q > 0.5 {
        // Where nearly all mass is above x, P = 1 − q still carries q's information only absolutely.
        invert(shape, 1.0 - q, Tail::Lower)
    } else {
        invert(shape, q, Tail::Upper)
    }
}

/// Solves for x from the Wilson–Hilferty start, or the leading power law near 0.
fn invert(a: f64, target: f64, tail: Tail) -> f64 {
    let z = if tail == Tail::Lower { normal::quantile(target) } else { normal::quantile_above(target) };
    let cube = 1.0 - 1.0 / (9.0 * a) + z / (3.0 * a.sqrt());
    let hilferty = a * cube * cube * cube;
    let power_law = || {
        let p = if tail == Tail::Lower { target.ln() } else { libm::log1p(-target) };
        ((p + if a < 1.0 { ln_gamma_1p(a) } else { ln_gamma(a + 1.0) }) / a).exp()
    };
    let start = if cube > 0.3 && a > 0.1 {
        hilferty
    } else if tail == Tail::Lower || target > 0.5 {
        power_law()
    } else {
        // Exponential-like tail: Q ≈ a·e^(−x)/x·… is close enough to start a safeguarded iteration.
        (a.min(1.0) / target).ln().max(power_law())
    };
    if start == 0.0 {
        // The power law is exact to first order; the true quantile underflows as well.
        return 0.0;
    }
    on_positive_axis(target, start, tail, |x| {
        let (lower, upper) = both(a, x);
        Probe { probability: if tail == Tail::Lower { lower } else { upper }, density: density(a, x) }
    })
}

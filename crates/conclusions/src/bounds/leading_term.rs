//! The leading term of the distance for large n.
//!
//! Esseen 1945 (Acta Math. 77): Δₙ ≈ (|γ| + 3h)/(6√(2π)) with γ the skewness of the *sum* (γ/√n for like
//! summands) and h its lattice span in standard units (0 off the lattices). From memory, checked numerically.

use gaussgap_simulation::sum::SumSpec;

/// 6√(2π).
const SIX_ROOT_TWO_PI: f64 = 15.039_769_647_786_0;

/// The leading term from the summands and, where the sum was built, its lattice span in standard units. `None`
/// where a third moment does not exist, or where unlike lattice laws are added and the span is not known.
pub(crate) fn leading_term(spec: &SumSpec, known_span: Option<f64>) -> Option<f64> {
    let mut widths = Vec::new();
    for term in &spec.terms {
        let moments = term.law.moments;
        let width = term.multiply * moments.variance?.sqrt();
        moments.third_absolute_central?;
        // A constant has no skewness, and adds none.
        let skewness = if width == 0.0 { 0.0 } else { moments.skewness? };
        widths.push((width, term.count as f64, skewness));
    }
    let widest = widths.iter().map(|(width, _, _)| width.abs()).fold(0.0, f64::max);
    if widest.partial_cmp(&0.0) != Some(std::cmp::Ordering::Greater) {
        return None;
    }
    let variance = widths.iter().map(|(width, count, _)| count * (width / widest).powi(2)).sum::<f64>();
    let third = widths
        .iter()
        .map(|(width, count, skewness)| count * (width / widest).powi(3) * skewness)
        .sum::<f64>();
    let skewness = third / variance.powf(1.5);
    let span = match (known_span, spec.terms.as_slice()) {
        (Some(span), _) => span,
        (None, [term]) => match term.law.lattice {
            Some(lattice) => lattice.span * term.multiply.abs() / (widest * variance.sqrt()),
            None => 0.0,
        },
        // Adding one continuous law smooths every lattice.
        (None, terms) if terms.iter().any(|term| !term.law.pieces.is_empty()) => 0.0,
        (None, _) => return None,
    };
    let value = (skewness.abs() + 3.0 * span) / SIX_ROOT_TWO_PI;
    value.is_finite().then_some(value)
}

//! What a sum costs to compute, estimated beforehand: limits of work that are the same on every machine.
//!
//! A limit of time would make a report depend on the machine and its load. Work is therefore counted in *units*, one
//! unit being about a millisecond of one core where this was measured; only the estimate decides what is computed.
//!
//! | route expected | units |
//! |---|---|
//! | closed form | 0.01 |
//! | lattice, about L = 20 sd/span points | L/20 000, at least 0.01 |
//! | densities, m summands expected from them, m ≤ 30 | 45; mostly atoms beside bounded densities: 2500 |
//! | densities with a power-law tail, m > 30 | 70 |
//! | unbounded densities, m > 30 | 600/m, between 0.1 and 20 |
//! | bounded densities, m > 30 | 0.2 |

use gaussgap_simulation::law::Law;
use gaussgap_simulation::sum::{SumSpec, Term};

/// While no more summands are expected from densities, a deformed contour is used.
const FEW: f64 = 30.0;

/// The estimated cost of one sum with everything that is read off it, in units.
pub(crate) fn of_sum(spec: &SumSpec) -> f64 {
    if spec.terms.len() == 1 && spec.terms.iter().all(|term| term.law.closed_form.is_some()) {
        return 0.01;
    }
    if let Some(points) = lattice_points(&spec.terms) {
        return (points / 20_000.0).max(0.01);
    }
    let density = |law: &Law| 1.0 - law.atoms.iter().map(|atom| atom.mass).sum::<f64>();
    let summands = spec.terms.iter().map(|term| term.count as f64 * density(&term.law)).sum::<f64>();
    let laws = || spec.terms.iter().map(|term| &term.law);
    let bounded = |law: &Law| (law.support.1 - law.support.0).is_finite();
    if summands <= FEW {
        // No contour takes bounded densities, and atoms with few summands beside them leave the transform much to do.
        let total = spec.terms.iter().map(|term| term.count as f64).sum::<f64>();
        if 2.0 * summands < total && laws().all(bounded) { 2500.0 } else { 45.0 }
    } else if laws().any(|law| law.tail_indices().0.min(law.tail_indices().1).is_finite()) {
        70.0
    } else if !laws().all(bounded) {
        (600.0 / summands).clamp(0.1, 20.0)
    } else {
        0.2
    }
}

/// Points of the lattice of a sum within ten standard deviations, where all terms are on lattices.
fn lattice_points(terms: &[Term]) -> Option<f64> {
    let mut span = f64::INFINITY;
    let mut variance = 0.0;
    for term in terms {
        let scale = term.multiply.abs();
        span = span.min(term.law.lattice?.span * scale);
        variance += term.count as f64 * scale * scale * term.law.moments.variance?;
    }
    let points = 20.0 * variance.sqrt() / span;
    points.is_finite().then_some(points)
}

#[cfg(test)]
mod tests {
    use super::*;
    use gaussgap_simulation::law::LawSpec;

    /// The estimate depends on the law and n only, grows with the lattice, and orders the routes.
    #[test]
    fn routes_are_ordered_by_cost() {
        let cost =
            |spec: LawSpec, n| of_sum(&SumSpec::like_summands(spec.compile().expect("a valid law"), n));
        let table = || LawSpec::Table { values: vec![0.0, 1.0, 7.0], weights: vec![1.0, 2.0, 1.0] };
        let closed = cost(LawSpec::Exponential { mean: 2.0 }, 500);
        let lattice = cost(table(), 100_000_000);
        let uniform = cost(LawSpec::Uniform { low: 0.0, high: 1.0 }, 500);
        let heavy = cost(LawSpec::Lomax { shape: 2.5, scale: 1.0 }, 500);
        assert!(closed < uniform && uniform < heavy, "{closed} {uniform} {heavy}");
        assert!(cost(table(), 100) < lattice, "{lattice}");
        assert!(cost(LawSpec::Weibull { shape: 1.5, scale: 75.0 }, 10) > 10.0 * uniform);
    }
}

//! Where a sum can jump: the lattice or the atoms of a sum of independent summands, in standard units.

use crate::sum::{SumMoments, SumSpec};

/// Atoms of a sum are listed only up to this number.
const LISTED_ATOMS: usize = 4096;

/// The jumps of a sum.
#[derive(Debug, Clone, PartialEq)]
pub(crate) enum Jumps {
    /// All mass on origin + k·span, between the ends of the support.
    Lattice { origin: f64, span: f64, low: f64, high: f64 },
    /// Exactly at these places, ascending; none for a continuous sum.
    At(Vec<f64>),
    /// Too many to list.
    Many,
}

/// Finds the jumps of a sum.
pub(crate) fn jumps_of(spec: &SumSpec, moments: &SumMoments, tolerance: f64) -> Jumps {
    let terms: Vec<_> = spec.terms.iter().filter(|term| term.count > 0 && term.multiply != 0.0).collect();
    let continuous = |term: &&crate::sum::Term| term.law.atoms.is_empty() && !term.law.pieces.is_empty();
    if terms.iter().any(|term| term.law.only_simulation.is_some()) {
        // Not in normal form: atoms and pieces are not the whole law.
        return Jumps::Many;
    }
    if terms.iter().any(continuous) {
        return Jumps::At(Vec::new());
    }
    if let Some(lattice) = lattice_of(spec, moments) {
        return lattice;
    }
    let mut places = vec![0.0];
    for term in terms {
        let center = term.law.moments.mean.unwrap_or(0.0);
        let scale = term.multiply / moments.sd;
        let values: Vec<f64> = term.law.atoms.iter().map(|atom| (atom.value - center) * scale).collect();
        if values.is_empty() || term.law.missing_mass > 0.0 {
            return Jumps::Many;
        }
        let Some(own) = compositions(&values, term.count) else { return Jumps::Many };
        if own.len().saturating_mul(places.len()) > LISTED_ATOMS {
            return Jumps::Many;
        }
        places = places.iter().flat_map(|place| own.iter().map(move |value| place + value)).collect();
        places.sort_by(f64::total_cmp);
        places.dedup_by(|next, kept| *next - *kept <= tolerance);
    }
    Jumps::At(places)
}

/// All Σ kᵢ·valueᵢ with Σ kᵢ = count; `None` if there are more than [`LISTED_ATOMS`].
fn compositions(values: &[f64], count: u64) -> Option<Vec<f64>> {
    let mut number = 1.0;
    for index in 1..values.len() {
        number *= (count as f64 + index as f64) / index as f64;
        if number > LISTED_ATOMS as f64 {
            return None;
        }
    }
    let mut sums = Vec::new();
    fn descend(values: &[f64], left: u64, sum: f64, sums: &mut Vec<f64>) {
        match values {
            [] => {}
            [last] => sums.push(sum + left as f64 * last),
            [first, rest @ ..] => {
                for k in 0..=left {
                    descend(rest, left - k, sum + k as f64 * first, sums);
                }
            }
        }
    }
    descend(values, count, 0.0, &mut sums);
    Some(sums)
}

/// The common lattice of all terms, where there is one.
fn lattice_of(spec: &SumSpec, moments: &SumMoments) -> Option<Jumps> {
    let (mut span, mut origin, mut low, mut high) = (0.0f64, 0.0, 0.0, 0.0);
    for term in &spec.terms {
        let center = term.law.moments.mean?;
        let scale = term.multiply / moments.sd;
        let count = term.count as f64;
        let ends = [term.law.support.0, term.law.support.1].map(|end| count * (end - center) * scale);
        low += ends[0].min(ends[1]);
        high += ends[0].max(ends[1]);
        if scale == 0.0 || count == 0.0 || term.law.moments.variance == Some(0.0) {
            continue;
        }
        let lattice = term.law.lattice?;
        origin += count * (lattice.offset - center) * scale;
        span = common_span(span, (lattice.span * scale).abs())?;
    }
    (span > 0.0 && span.is_finite() && origin.is_finite()).then_some(Jumps::Lattice {
        origin,
        span,
        low,
        high,
    })
}

/// The largest g of which both spans are integer multiples, to rounding; at most 2²⁰ times smaller than either.
fn common_span(a: f64, b: f64) -> Option<f64> {
    if a == 0.0 {
        return Some(b);
    }
    let (mut large, mut small) = (a.max(b), a.min(b));
    let floor = large / f64::from(1 << 20);
    let slack = 1e-9 * small;
    for _ in 0..64 {
        let rest = large - (large / small).round() * small;
        if rest.abs() <= slack {
            // Averaging over both spans keeps the rounding of g at that of its multiples.
            let (ka, kb) = ((a / small).round(), (b / small).round());
            return Some(0.5 * (a / ka + b / kb));
        }
        (large, small) = (small, rest.abs());
        if small < floor {
            return None;
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn common_spans() {
        let close = |a: f64, b: f64| (a / b - 1.0).abs() < 1e-12;
        assert!(close(common_span(1.0 / 900.0, 1.0 / 100.0).unwrap(), 1.0 / 900.0));
        assert!(close(common_span(1.0 / 900.0, 1.0 / 700.0).unwrap(), 1.0 / 6300.0));
        assert!(common_span(1.0, std::f64::consts::SQRT_2).is_none());
    }

    #[test]
    fn compositions_of_three_values() {
        let mut sums = compositions(&[0.0, 1.0, 10.0], 2).unwrap();
        sums.sort_by(f64::total_cmp);
        assert_eq!(sums, [0.0, 1.0, 2.0, 10.0, 11.0, 20.0]);
        assert!(compositions(&[0.0; 3], 100).is_none());
    }
}

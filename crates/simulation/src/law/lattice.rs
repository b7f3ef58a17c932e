//! Finding the lattice offset + k·span of finitely many values.

use super::{Atom, Lattice};

/// Largest number of spans between two values.
const MOST_SPANS: f64 = (1u64 << 40) as f64;

/// The coarsest lattice that holds all `atoms` (ascending) up to rounding: an approximate greatest common
/// divisor of their distances. Values count as written decimals: each may be off by an ulp of the largest.
///
/// `None` for a constant, and where only a lattice of more than 2⁴⁰ spans, or none, fits.
pub(crate) fn of_atoms(atoms: &[Atom]) -> Option<Lattice> {
    let (first, last) = (atoms.first()?.value, atoms.last()?.value);
    let range = last - first;
    if !(range > 0.0 && range.is_finite()) {
        return None;
    }
    // Rounding of the values and of their differences.
    let noise = f64::EPSILON * first.abs().max(last.abs());
    let mut span = range;
    for atom in atoms {
        let distance = atom.value - first;
        let spans = (distance / span).round();
        let off = (distance - spans * span).abs();
        if off <= 2.0 * noise + spans * span * f64::EPSILON {
            continue;
        }
        span = refined(divisor(span, off, 2.0 * noise)?, range)?;
    }
    let tolerance = 4.0 * noise;
    let fits = atoms.iter().all(|atom| {
        let distance = atom.value - first;
        let spans = (distance / span).round();
        spans < MOST_SPANS && (distance - spans * span).abs() <= tolerance.max(2.0 * f64::EPSILON * distance)
    });
    // A span close to the noise fits anything and means nothing.
    (fits && span > 16.0 * noise).then_some(Lattice { offset: first, span })
}

/// Euclid's algorithm on two lengths of which the first is exact to `noise` and the second too; the noise of
/// a remainder grows with the quotients that led to it.
fn divisor(span: f64, off: f64, noise: f64) -> Option<f64> {
    let (mut larger, mut smaller) = (span, off);
    for _ in 0..100 {
        let remainder = (larger - (larger / smaller).round() * smaller).abs();
        let tolerance = noise * (4.0 * span / smaller);
        if smaller <= 4.0 * tolerance {
            return None;
        }
        if remainder <= tolerance {
            return Some(smaller);
        }
        (larger, smaller) = (smaller, remainder);
    }
    None
}

/// The divisor of the exact `range` next to `span`.
fn refined(span: f64, range: f64) -> Option<f64> {
    let spans = (range / span).round();
    (spans < MOST_SPANS).then(|| range / spans)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn lattice(values: &[f64]) -> Option<Lattice> {
        let mut values = values.to_vec();
        values.sort_by(f64::total_cmp);
        let atoms: Vec<Atom> = values.iter().map(|&value| Atom { value, mass: 1.0 }).collect();
        of_atoms(&atoms)
    }

    fn span(values: &[f64]) -> f64 {
        lattice(values).map_or(f64::NAN, |l| l.span)
    }

    #[test]
    fn spans_of_written_decimals() {
        for (values, expected) in [
            (&[0.0, 250.0][..], 250.0),
            (&[0.1, 0.25], 0.15),
            (&[0.0, 0.1, 0.25], 0.05),
            (&[0.1, 0.2, 0.30000000000000004, 0.7], 0.1),
            (&[12.37, 15.0, 101.2, 999.99], 0.01),
            (&[-3.0, 3.0, 9.0, 15.0], 6.0),
            (&[1e-300, 3e-300, 7e-300], 2e-300),
            (&[1e300, 4e300, 6e300], 1e300),
            (&[1000.1, 1000.2, 1000.5], 0.1),
            (&[0.0, 1.0 / 3.0, 0.5], 1.0 / 6.0),
            (&[0.0, 1.0, 1e9 + 1.0], 1.0),
        ] {
            let found = span(values);
            assert!((found / expected - 1.0).abs() < 1e-11, "{values:?}: {found} instead of {expected}");
        }
    }

    #[test]
    fn long_decimal_tables() {
        let values: Vec<f64> = (0..5000).map(|k| f64::from(k * k % 7919) * 0.01).collect();
        assert!((span(&values) / 0.01 - 1.0).abs() < 1e-12);
    }

    #[test]
    fn no_lattice() {
        assert_eq!(lattice(&[3.0]), None);
        // Many unrelated values fit no lattice of less than 2^40 spans.
        let values: Vec<f64> = (1..200).map(|k| f64::from(k).sqrt()).collect();
        assert_eq!(lattice(&values), None);
    }
}

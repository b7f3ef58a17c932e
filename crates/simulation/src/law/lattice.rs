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
    // Rounding of the largest value, and of each distance.
    let noise = f64::EPSILON * first.abs().max(last.abs());
    let noise_of = |value: f64| f64::EPSILON * (first.abs() + value.abs());
    let mut span = range;
    for atom in atoms {
        let distance = atom.value - first;
        let spans = (distance / span).round();
        let off = Length {
            value: (distance - spans * span).abs(),
            noise: noise_of(atom.value) + spans * span * f64::EPSILON,
        };
        if off.value <= 2.0 * off.noise {
            continue;
        }
        let whole = Length { value: span, noise: noise_of(last) * (span / range) };
        span = refined(divisor(whole, off)?, range)?;
    }
    let tolerance = 4.0 * noise;
    let fits = atoms.iter().all(|atom| {
        let distance = atom.value - first;
        let spans = (distance / span).round();
        spans < MOST_SPANS && (distance - spans * span).abs() <= tolerance
    });
    // A span close to the noise fits anything and means nothing.
    (fits && span > 16.0 * noise).then_some(Lattice { offset: first, span })
}

/// A length and how far rounding may have moved it.
#[derive(Clone, Copy)]
struct Length {
    value: f64,
    noise: f64,
}

/// Euclid's algorithm on two lengths; a remainder inherits their noise, multiplied by the quotient.
fn divisor(mut larger: Length, mut smaller: Length) -> Option<f64> {
    for _ in 0..100 {
        if smaller.value <= 8.0 * smaller.noise {
            return None;
        }
        let quotient = (larger.value / smaller.value).round();
        let remainder = Length {
            value: (larger.value - quotient * smaller.value).abs(),
            noise: larger.noise + quotient * smaller.noise,
        };
        if remainder.value <= 4.0 * remainder.noise {
            return Some(smaller.value);
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

//! The common lattice of several terms, and their values as integers on it.

use super::summand::Part;
use crate::sum::SumSpec;

/// A sum in lattice units: base + span·(sum of the parts).
pub(crate) struct CommonLattice {
    /// Where index 0 lies, in the sum's unit.
    pub base: f64,
    /// The common span, in the sum's unit.
    pub span: f64,
    /// The terms, in lattice units.
    pub parts: Vec<Part>,
    /// Bound on the probability that any summand takes a value not listed.
    pub missing: f64,
}

/// Largest denominator of a ratio of spans, and how near the ratio must be: a few units in the last place, so
/// that an accidental hit among the denominators is unlikely (1e-5), and harmless: it moves no atom by more than
/// its own rounding.
const LARGEST_DENOMINATOR: f64 = 1e5;
const NEARNESS: f64 = 8.0 * f64::EPSILON;

/// Finds the coarsest common lattice of all terms; the error is a clause saying why there is none.
pub(crate) fn common_lattice(spec: &SumSpec) -> Result<CommonLattice, String> {
    let terms: Vec<_> = spec.terms.iter().filter(|term| term.count > 0 && term.multiply != 0.0).collect();
    let mut spans = Vec::new();
    let mut base = 0.0;
    for term in &terms {
        if !term.law.pieces.is_empty() {
            return Err("the law is not on a lattice".into());
        }
        let lattice = match (term.law.lattice, term.law.atoms.as_slice()) {
            (Some(lattice), _) if lattice.span > 0.0 => lattice,
            (_, [only]) => crate::law::Lattice { offset: only.value, span: 0.0 },
            _ => return Err("the law is not on a lattice".into()),
        };
        base += term.count as f64 * term.multiply * lattice.offset;
        spans.push((lattice, (lattice.span * term.multiply).abs()));
    }
    let widest = spans.iter().map(|(_, span)| *span).fold(0.0, f64::max);
    if !(widest > 0.0 && widest.is_finite() && base.is_finite()) {
        return Err("the sum takes one value only".into());
    }
    // Each span as a fraction of the widest; the common one is widest/(least common multiple of denominators).
    let mut fractions = Vec::new();
    let mut denominator = 1.0;
    for (_, span) in &spans {
        let (p, q) = rational(span / widest).ok_or("the terms have no common lattice")?;
        fractions.push((p, q));
        denominator = denominator / greatest_common_divisor(denominator, q) * q;
        if denominator > 1e9 {
            return Err("the common lattice of the terms is too fine".into());
        }
    }
    let mut missing = 0.0;
    let mut steps: Vec<f64> = fractions.iter().map(|(p, q)| p * (denominator / q)).collect();
    let common = steps.iter().fold(0.0, |divisor, &step| greatest_common_divisor(divisor, step));
    for step in &mut steps {
        *step /= common;
    }
    let mut parts = Vec::new();
    for ((term, (lattice, _)), step) in terms.iter().zip(&spans).zip(&steps) {
        let sign = if term.multiply < 0.0 { -1.0 } else { 1.0 };
        let mut values = Vec::with_capacity(term.law.atoms.len());
        let mut masses = Vec::with_capacity(term.law.atoms.len());
        for atom in term.law.atoms.iter().filter(|atom| atom.mass > 0.0) {
            let index =
                if lattice.span > 0.0 { ((atom.value - lattice.offset) / lattice.span).round() } else { 0.0 };
            let index = index * step * sign;
            if index.abs() > 1e15 {
                return Err("the law has too many lattice points".into());
            }
            values.push(index as i64);
            masses.push(atom.mass);
        }
        if values.is_empty() {
            return Err("the law has no mass".into());
        }
        missing += term.count as f64 * term.law.missing_mass;
        parts.push(Part::new(term.count as f64, &values, &masses));
    }
    Ok(CommonLattice { base, span: widest * common / denominator, parts, missing })
}

/// The simplest fraction p/q near x in [0, 1], by continued fractions.
fn rational(x: f64) -> Option<(f64, f64)> {
    let (mut p, mut q, mut p_before, mut q_before) = (x.floor(), 1.0, 1.0, 0.0);
    let mut rest = x - x.floor();
    loop {
        if (x - p / q).abs() <= NEARNESS * x {
            return Some((p, q));
        }
        if rest <= 0.0 {
            return None;
        }
        let inverse = 1.0 / rest;
        let whole = inverse.floor();
        rest = inverse - whole;
        (p, p_before) = (whole * p + p_before, p);
        (q, q_before) = (whole * q + q_before, q);
        if q > LARGEST_DENOMINATOR {
            return None;
        }
    }
}

fn greatest_common_divisor(a: f64, b: f64) -> f64 {
    let (mut a, mut b) = (a, b);
    while b != 0.0 {
        (a, b) = (b, a % b);
    }
    a
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn finds_simple_fractions_only() {
        assert_eq!(rational(1.0), Some((1.0, 1.0)));
        assert_eq!(rational(0.0), Some((0.0, 1.0)));
        assert_eq!(rational((1.0 / 900.0) / (1.0 / 100.0)), Some((1.0, 9.0)));
        assert_eq!(rational(0.3 / 0.7), Some((3.0, 7.0)));
        assert_eq!(rational(std::f64::consts::FRAC_1_SQRT_2), None);
    }
}

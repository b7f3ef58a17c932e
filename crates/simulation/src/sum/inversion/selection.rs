//! Which summands are continuous and which are atoms: the terms of Π (A_i + C_i)^{n_i} of low degree in C.
//!
//! A selection says how many copies of each term are continuous. Selections with at most two continuous
//! summands have transforms that fall too slowly to be inverted; they are taken out of the transform and added
//! in real space.

use super::tails::ScaledTerm;
use num_complex::Complex64;

/// How many copies of each term are continuous.
#[derive(Debug, Clone)]
pub(super) struct Selection {
    /// One number per term.
    pub(super) counts: Vec<u64>,
    /// Their sum.
    pub(super) degree: u64,
    /// Π binomial(n_i, k_i).
    pub(super) multiplicity: f64,
    /// Probability of the selection.
    pub(super) weight: f64,
}

/// All selections of degree 0, 1, 2 with positive probability.
pub(super) fn selections(terms: &[ScaledTerm]) -> Vec<Selection> {
    let base: Vec<u64> = terms.iter().map(|t| if t.summand.atom_mass > 0.0 { 0 } else { t.count }).collect();
    let forced: u64 = base.iter().sum();
    let mut result = Vec::new();
    if forced > 2 {
        return result;
    }
    let mut add = |counts: Vec<u64>| {
        let mut log_weight = 0.0;
        let mut multiplicity = 1.0;
        for (term, k) in terms.iter().zip(&counts) {
            let (n, k) = (term.count, *k);
            if k > n {
                return;
            }
            multiplicity *= match k {
                _ if k == n => 1.0,
                0 => 1.0,
                1 => n as f64,
                _ => 0.5 * n as f64 * (n as f64 - 1.0),
            };
            if n > k {
                log_weight += (n - k) as f64 * term.summand.atom_mass.ln();
            }
            if k > 0 {
                log_weight += k as f64 * term.summand.continuous_mass.ln();
            }
        }
        let weight = multiplicity * log_weight.exp();
        if weight > 0.0 {
            result.push(Selection { degree: counts.iter().sum(), counts, multiplicity, weight });
        }
    };
    add(base.clone());
    let free: Vec<usize> = (0..terms.len()).filter(|i| terms[*i].summand.atom_mass > 0.0).collect();
    if forced < 2 {
        for &i in &free {
            let mut one = base.clone();
            one[i] += 1;
            add(one.clone());
            if forced == 0 {
                for &j in free.iter().filter(|j| **j >= i) {
                    let mut two = one.clone();
                    two[j] += 1;
                    add(two);
                }
            }
        }
    }
    result
}

/// Atoms and continuous part of each term at one frequency, with the number of copies.
#[derive(Debug, Clone, Copy)]
pub(super) struct TermValue {
    /// Copies.
    pub(super) count: u64,
    /// Atoms; exactly 0 for a term without atoms.
    pub(super) atoms: Complex64,
    /// Continuous part.
    pub(super) continuous: Complex64,
}

/// z^n through the logarithm; exact for n = 0, 1.
pub(super) fn power(z: Complex64, n: u64) -> Complex64 {
    match n {
        0 => Complex64::ONE,
        1 => z,
        _ if z.norm_sqr() == 0.0 => Complex64::ZERO,
        2..=64 => z.powu(n as u32),
        _ => (n as f64 * z.ln()).exp(),
    }
}

/// Π (A_i + C_i)^{n_i} minus all terms of total degree ≤ `degree` in C, or minus the `subtracted` ones.
///
/// Where the rest is small against A the exponential series of Σ n_i ln(1 + λC_i/A_i) is used, so that the rest
/// keeps its relative accuracy; the flag says so.
pub(super) fn remainder(values: &[TermValue], degree: i64, subtracted: &[Selection]) -> (Complex64, bool) {
    if degree < 0 || subtracted.is_empty() {
        return (values.iter().map(|v| power(v.atoms + v.continuous, v.count)).product(), true);
    }
    let with_atoms = |v: &&TermValue| v.atoms.norm_sqr() > 0.0;
    let share: f64 =
        values.iter().filter(with_atoms).map(|v| v.count as f64 * v.continuous.norm() / v.atoms.norm()).sum();
    let forced: i64 = values.iter().filter(|v| !with_atoms(v)).map(|v| v.count as i64).sum();
    if share < 0.3 && forced <= degree {
        const ORDER: usize = 16;
        let mut base = Complex64::ONE;
        let mut logs = [Complex64::ZERO; ORDER + 1];
        for v in values {
            if !with_atoms(&v) {
                base *= power(v.continuous, v.count);
                continue;
            }
            base *= power(v.atoms, v.count);
            let ratio = v.continuous / v.atoms;
            let mut turn = Complex64::ONE;
            for (m, log) in logs.iter_mut().enumerate().skip(1) {
                turn *= ratio;
                let sign = if m % 2 == 1 { 1.0 } else { -1.0 };
                // m × the coefficient of λ^m in n ln(1 + λ ratio)
                *log += sign * v.count as f64 * turn;
            }
        }
        let mut series = [Complex64::ZERO; ORDER + 1];
        series[0] = Complex64::ONE;
        for j in 1..=ORDER {
            let mut sum = Complex64::ZERO;
            for m in 1..=j {
                sum += logs[m] * series[j - m];
            }
            series[j] = sum / j as f64;
        }
        let first = (degree - forced + 1) as usize;
        return (base * series[first.min(ORDER)..].iter().sum::<Complex64>(), true);
    }
    let whole: Complex64 = values.iter().map(|v| power(v.atoms + v.continuous, v.count)).product();
    let low: Complex64 = subtracted
        .iter()
        .map(|s| {
            let product: Complex64 = values
                .iter()
                .zip(&s.counts)
                .map(|(v, k)| power(v.atoms, v.count - k) * power(v.continuous, *k))
                .product();
            s.multiplicity * product
        })
        .sum();
    (whole - low, false)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn remainder_agrees_with_the_binomial_sum() {
        // The series branch and the subtraction branch against the plain sum over j ≥ 3.
        for size in [0.001, 0.004, 0.2, 1.0] {
            let value = TermValue {
                count: 20,
                atoms: Complex64::new(0.5, 0.3),
                continuous: Complex64::new(size * 0.3, -size * 0.2),
            };
            let mut expected = Complex64::ZERO;
            let mut binomial = 1.0;
            for j in 0..=20_u32 {
                if j >= 3 {
                    expected += binomial * value.atoms.powu(20 - j) * value.continuous.powu(j);
                }
                binomial *= f64::from(20 - j) / f64::from(j + 1);
            }
            let subtracted: Vec<Selection> = [(0, 1.0), (1, 20.0), (2, 190.0)]
                .into_iter()
                .map(|(k, m)| Selection { counts: vec![k], degree: k, multiplicity: m, weight: 0.1 })
                .collect();
            let (found, _) = remainder(&[value], 2, &subtracted);
            let whole = (value.atoms + value.continuous).norm().powi(20);
            assert!(
                (found - expected).norm() < 1e-12 * expected.norm() + 1e-15 * whole,
                "{size}: {found} {expected}"
            );
        }
    }
}

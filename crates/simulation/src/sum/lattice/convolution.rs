//! Short lattice sums by direct convolution: only products and sums of probabilities, so relative accuracy
//! everywhere.

use super::summand::Part;

/// First index and masses of the whole sum.
pub(crate) fn masses(parts: &[Part]) -> (i64, Vec<f64>) {
    let mut sum = (0, vec![1.0]);
    for part in parts {
        let (low, high) = part.ends();
        let mut one = vec![0.0; (high - low + 1) as usize];
        for (&offset, &mass) in part.offsets.iter().zip(&part.masses) {
            one[(offset + part.anchor - low) as usize] += mass;
        }
        // Square and multiply.
        let mut square = (low, one);
        let mut count = part.count as u64;
        while count > 0 {
            if count % 2 == 1 {
                sum = convolve(&sum, &square);
            }
            count /= 2;
            if count > 0 {
                square = convolve(&square, &square);
            }
        }
    }
    sum
}

fn convolve(a: &(i64, Vec<f64>), b: &(i64, Vec<f64>)) -> (i64, Vec<f64>) {
    let mut out = vec![0.0; a.1.len() + b.1.len() - 1];
    for (i, &x) in a.1.iter().enumerate() {
        if x > 0.0 {
            for (to, &y) in out[i..].iter_mut().zip(&b.1) {
                *to += x * y;
            }
        }
    }
    (a.0 + b.0, out)
}

/// Bound on the relative error of every mass: each probability of a copy carries one rounding of its
/// normalization, so n of them; a convolution of m positive products adds at most m + 1 roundings, in a
/// tree of 2 log₂ n of them whose lengths double; doubled for safety. Masses that underflow are below 1e-290.
pub(crate) fn relative_error(parts: &[Part]) -> f64 {
    let mut roundings = 8.0;
    for part in parts {
        let (low, high) = part.ends();
        roundings += 2.0 * part.count + 2.0 * part.count * (high - low) as f64;
    }
    roundings * f64::EPSILON
}

//! The cumulant generating function of a law about its mean, ln E e^{t(X − μ)}, for Chernoff's bound and the
//! saddlepoint approximation.

use gaussgap_simulation::law::{Law, Piece};
use num_complex::Complex64;

/// ln E e^{t(X − μ)} for real t; `None` where it is infinite or cannot be computed reliably.
///
/// Atoms are added; whole families use their closed form; the rest is integrated by Gauss–Legendre panels, carried
/// on beyond the panels while the tail still matters. Relative error of the moment some 1e-12. Everything is
/// computed relative to the largest exponent, so that it does not overflow.
pub(crate) fn centred_cumulant(law: &Law, t: f64) -> Option<f64> {
    if t == 0.0 {
        return Some(0.0);
    }
    if law.only_simulation.is_some() || law.missing_mass > 0.0 && law.closed_form.is_none() {
        return None;
    }
    let mean = law.moments.mean?;
    if law.missing_mass > 0.0 {
        return closed_form_cumulant(law, t, mean);
    }
    // Terms as (exponent, weight): Σ weight·e^exponent, the largest exponent taken out.
    let mut terms = law.atoms.iter().map(|atom| (t * (atom.value - mean), atom.mass)).collect::<Vec<_>>();
    for piece in &law.pieces {
        piece_terms(piece, t, mean, &mut terms)?;
    }
    let largest = terms.iter().map(|(exponent, _)| *exponent).fold(f64::NEG_INFINITY, f64::max);
    let total = terms.iter().map(|(exponent, weight)| weight * (exponent - largest).exp()).sum::<f64>();
    let cumulant = largest + total.ln();
    cumulant.is_finite().then_some(cumulant)
}

/// The cumulants of the infinite discrete families, whose far atoms are not listed.
fn closed_form_cumulant(law: &Law, t: f64, mean: f64) -> Option<f64> {
    use gaussgap_simulation::law::ClosedFamily;
    let form = law.closed_form?;
    let u = t * form.multiply;
    let cumulant = match form.family {
        ClosedFamily::Poisson { rate } => rate * u.exp_m1(),
        ClosedFamily::NegativeBinomial { size, p } => {
            let left = -(1.0 - p) * u.exp();
            if left <= -1.0 {
                return None;
            }
            size * (p.ln() - left.ln_1p())
        }
        ClosedFamily::Binomial { trials, p } => trials as f64 * (p * u.exp_m1()).ln_1p(),
        _ => return None,
    };
    let centred = cumulant + t * (form.add - mean);
    centred.is_finite().then_some(centred)
}

/// Adds the terms of one piece.
fn piece_terms(piece: &Piece, t: f64, mean: f64, terms: &mut Vec<(f64, f64)>) -> Option<()> {
    // In the family's own units: e^{t(add + multiply·y − μ)} = e^{t(add − μ)} e^{uy}.
    let u = t * piece.multiply;
    let (rate, unbounded) = if u > 0.0 {
        (piece.density.upper_exponential_rate(), piece.high == f64::INFINITY)
    } else {
        (piece.density.lower_exponential_rate(), piece.low == f64::NEG_INFINITY)
    };
    if unbounded && u.abs() >= rate {
        return None;
    }
    let (support_low, support_high) = piece.density.support();
    let whole = piece.low <= support_low && piece.high >= support_high;
    if whole && let Some(log_moment) = piece.density.log_laplace(Complex64::new(-u, 0.0)) {
        terms.push((log_moment.re + t * (piece.add - mean), piece.factor));
        return log_moment.re.is_finite().then_some(());
    }
    let mut panels = piece.panels();
    if unbounded {
        extend(piece, t, &mut panels)?;
    }
    let rule = gaussgap_simulation::law::gauss_legendre(20);
    for (low, high) in panels {
        let (middle, half) = (0.5 * (low + high), 0.5 * (high - low));
        for (node, weight) in &rule {
            let x = middle + half * node;
            let density = piece.density(x);
            if density > 0.0 && density.is_finite() {
                terms.push((t * (x - mean), half * weight * density));
            }
        }
    }
    Some(())
}

/// Continues the panels of an unbounded piece until e^{tx} f(x) has become negligible; `None` if it does not.
fn extend(piece: &Piece, t: f64, panels: &mut Vec<(f64, f64)>) -> Option<()> {
    let upwards = t > 0.0;
    let end = if upwards { panels.last()?.1 } else { panels.first()?.0 };
    let logs = |x: f64| t * x + piece.density(x).ln();
    let peak = panels.iter().map(|(low, high)| logs(0.5 * (low + high))).fold(f64::NEG_INFINITY, f64::max);
    let spread = panels.iter().map(|(low, high)| high - low).sum::<f64>();
    let (mut from, mut step, mut highest) = (end, spread / 64.0, peak);
    for _ in 0..400 {
        let to = if upwards { from + step } else { from - step };
        panels.push((from.min(to), from.max(to)));
        let here = logs(to);
        if here == f64::NEG_INFINITY || here < highest - 45.0 {
            return Some(());
        }
        highest = highest.max(here);
        from = to;
        step *= 1.02;
    }
    None
}

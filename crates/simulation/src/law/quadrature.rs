//! Gauss–Legendre rules and the grading of stretches on which they are applied.

use std::sync::OnceLock;

/// Nodes of the standard rule used on every stretch.
pub(crate) const NODES: usize = 20;

/// Nodes in (−1, 1) and weights (Σ = 2) of the Gauss–Legendre rule with `count` nodes, ascending.
///
/// Newton's method on the three-term recurrence of P_n from the start cos(π(i + 3/4)/(n + 1/2)); exact to
/// some units in the last place for the small rules used here (Golub & Welsch give the same numbers).
pub fn gauss_legendre(count: usize) -> Vec<(f64, f64)> {
    let n = count as f64;
    let mut rule = vec![(0.0, 0.0); count];
    for i in 0..count.div_ceil(2) {
        let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (n + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..100 {
            let (mut previous, mut value) = (1.0, x);
            for k in 2..=count {
                let k = k as f64;
                (previous, value) = (value, ((2.0 * k - 1.0) * x * value - (k - 1.0) * previous) / k);
            }
            slope = n * (x * value - previous) / (x * x - 1.0);
            let step = value / slope;
            x -= step;
            if step.abs() < 1e-16 {
                break;
            }
        }
        let weight = 2.0 / ((1.0 - x * x) * slope * slope);
        rule[count - 1 - i] = (x, weight);
        rule[i] = (-x, weight);
    }
    if count % 2 == 1 {
        rule[count / 2].0 = 0.0;
    }
    rule
}

/// The standard rule, computed once.
pub(crate) fn standard_rule() -> &'static [(f64, f64)] {
    static RULE: OnceLock<Vec<(f64, f64)>> = OnceLock::new();
    RULE.get_or_init(|| gauss_legendre(NODES))
}

/// ∫_a^b f by the standard rule on one stretch.
pub(crate) fn stretch(a: f64, b: f64, mut f: impl FnMut(f64) -> f64) -> f64 {
    let (half, middle) = (0.5 * (b - a), 0.5 * a + 0.5 * b);
    half * standard_rule().iter().map(|&(node, weight)| weight * f(middle + half * node)).sum::<f64>()
}

/// Inserts points so that distances from `singular` (below all points) grow by at most `ratio` per stretch:
/// a 20-node rule then integrates powers of the distance to ~1e-17 of their size for ratios up to 4.
pub(crate) fn grade_from(points: &[f64], singular: f64, ratio: f64) -> Vec<f64> {
    let mut graded = Vec::with_capacity(2 * points.len());
    for (index, &point) in points.iter().enumerate() {
        if index > 0 {
            let (from, to) = (points[index - 1] - singular, point - singular);
            if from > 0.0 && to > ratio * from {
                // In logarithms: the quotient itself may overflow.
                let pieces = ((to.ln() - from.ln()) / ratio.ln()).ceil().max(1.0);
                let step = (to.ln() - from.ln()) / pieces;
                graded.extend((1..pieces as usize).map(|i| singular + (from.ln() + step * i as f64).exp()));
            }
        }
        graded.push(point);
    }
    tidy(graded)
}

/// Ascending, finite and without repetitions.
pub(crate) fn tidy(mut points: Vec<f64>) -> Vec<f64> {
    points.retain(|point| point.is_finite());
    points.sort_by(f64::total_cmp);
    points.dedup();
    points
}

/// Probabilities at whose quantiles skeletons are laid, lower half; the upper half mirrors them.
pub(crate) const LEVELS: [f64; 16] =
    [1e-26, 1e-22, 1e-18, 1e-15, 1e-12, 1e-10, 1e-8, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 0.05, 0.15, 0.3, 0.5];

/// Quantiles at [`LEVELS`] and their mirror images.
pub(crate) fn quantile_points(lower: impl Fn(f64) -> f64, upper: impl Fn(f64) -> f64) -> Vec<f64> {
    let below = LEVELS.iter().map(|&p| lower(p));
    let above = LEVELS.iter().map(|&q| upper(q));
    tidy(below.chain(above).collect())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rule_is_exact_for_polynomials_of_degree_39() {
        for degree in (0..40).step_by(2) {
            let integral = stretch(0.0, 1.0, |x| x.powi(degree));
            let exact = 1.0 / f64::from(degree + 1);
            assert!((integral - exact).abs() < 4e-16, "degree {degree}: {integral} against {exact}");
        }
    }

    #[test]
    fn graded_stretches_integrate_a_singular_power() {
        // ∫ x^(-1/2) over [1e-12, 1] = 2 − 2e-6.
        let points = grade_from(&[1e-12, 1.0], 0.0, 3.0);
        let sum: f64 = points.windows(2).map(|w| stretch(w[0], w[1], |x| x.sqrt().recip())).sum();
        assert!((sum - (2.0 - 2e-6)).abs() < 1e-15 * 8.0, "{sum}");
    }
}

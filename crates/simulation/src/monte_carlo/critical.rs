//! Student critical values: one for a mean, a function of the estimated degrees of freedom for a difference.

use crate::special::student;

/// Stretches of the table over 1/df.
const STRETCHES: usize = 1024;

/// t with P(T_df > t) = tail, for every df between two ends: ln t by cubic interpolation in 1/df.
#[derive(Debug, Clone)]
pub(crate) struct CriticalValues {
    tail: f64,
    from: f64,
    step: f64,
    logarithms: Vec<f64>,
    /// Bound on the relative error of [`CriticalValues::at`].
    pub error: f64,
}

impl CriticalValues {
    /// A table for df from `least` to `most`, 0 < tail < ½.
    pub(crate) fn new(tail: f64, least: f64, most: f64) -> Self {
        let from = 1.0 / most;
        let step = (1.0 / least - from).max(0.0) / STRETCHES as f64;
        // One node before the first and one behind the last stretch.
        let exact = |u: f64| student::quantile_above(1.0 / u, tail).ln();
        let mut logarithms: Vec<f64> =
            (0..STRETCHES + 3).map(|node| exact(from + (node.max(1) as f64 - 1.0) * step)).collect();
        // The node before the first may lie beyond df = ∞: continued as a cubic.
        let [first, second, third, fourth] = [1, 2, 3, 4].map(|node: usize| logarithms[node]);
        logarithms[0] = 4.0 * first - 6.0 * second + 4.0 * third - fourth;
        let mut table = Self { tail, from, step, logarithms, error: 1e-12 };
        if step > 0.0 {
            for stretch in (0..STRETCHES).step_by(13).chain([STRETCHES - 1]) {
                let u = from + (stretch as f64 + 0.5) * step;
                let miss = (table.at(1.0 / u).ln() - exact(u)).abs();
                table.error = table.error.max(4.0 * miss);
            }
        }
        table
    }

    /// The critical value, from the table.
    #[inline]
    pub(crate) fn at(&self, df: f64) -> f64 {
        let position = if self.step > 0.0 { (1.0 / df - self.from) / self.step } else { 0.0 };
        let stretch = (position.clamp(0.0, STRETCHES as f64 - 1.0)) as usize;
        let t = position - stretch as f64;
        let [a, b, c, d] = [0, 1, 2, 3].map(|offset| self.logarithms[stretch + offset]);
        // Lagrange's cubic through nodes −1, 0, 1, 2.
        let value = -a * t * (t - 1.0) * (t - 2.0) / 6.0 + b * (t + 1.0) * (t - 1.0) * (t - 2.0) / 2.0
            - c * (t + 1.0) * t * (t - 2.0) / 2.0
            + d * (t + 1.0) * t * (t - 1.0) / 6.0;
        value.exp()
    }

    /// The critical value itself, slowly.
    pub(crate) fn exactly(&self, df: f64) -> f64 {
        student::quantile_above(df, self.tail)
    }
}

/// Welch's estimated degrees of freedom (Welch 1947, Satterthwaite 1946): (a + b)²/(a²/(n₁−1) + b²/(n₂−1)) for
/// a = s₁²/n₁, b = s₂²/n₂, not both 0.
#[inline]
pub(crate) fn degrees_of_freedom(a: f64, b: f64, n_first: f64, n_second: f64) -> f64 {
    let total = a + b;
    let (a, b) = (a / total, b / total);
    let df = 1.0 / (a * a / (n_first - 1.0) + b * b / (n_second - 1.0));
    df.clamp(n_first.min(n_second) - 1.0, n_first + n_second - 2.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn table_agrees_with_the_quantile() {
        for tail in [0.025, 0.0005, 0.3] {
            for (least, most) in [(1.0, 2.0), (1.0, 1e6), (9.0, 1998.0), (4.0, 18.0)] {
                let table = CriticalValues::new(tail, least, most);
                assert!(table.error < 1e-8, "{tail}, {least}, {most}: {}", table.error);
                for part in [0.0f64, 0.0003, 0.01, 0.3, 0.77, 0.9999, 1.0] {
                    let df = 1.0 / (1.0 / most + part * (1.0 / least - 1.0 / most));
                    let exact = table.exactly(df);
                    assert!((table.at(df) / exact - 1.0).abs() <= table.error, "{tail}, {df}");
                }
            }
        }
    }

    #[test]
    fn estimated_degrees_of_freedom() {
        // Equal variances and sizes: n₁ + n₂ − 2; one group without spread: that of the other.
        assert!((degrees_of_freedom(2.0, 2.0, 8.0, 8.0) - 14.0).abs() < 1e-12);
        assert!((degrees_of_freedom(0.0, 2.0, 8.0, 5.0) - 4.0).abs() < 1e-12);
        assert!((degrees_of_freedom(1e-300, 1e-300, 8.0, 8.0) - 14.0).abs() < 1e-9);
    }
}

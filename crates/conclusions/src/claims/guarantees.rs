//! Inequalities that bound P(|statistic − its expectation| > ε) for every law that meets their condition.
//!
//! For a sum S = Σ Xᵢ of independent terms with variance s² and x = ε in units of S:
//! - Chebyshev: s²/x²;
//! - Cantelli, doubled for two sides: 2 s²/(s² + x²);
//! - Hoeffding: 2 exp(−2x²/Σ Rᵢ²), Rᵢ the ranges;
//! - Bernstein: 2 exp(−x²/(2s² + 2Mx/3)), |Xᵢ − μᵢ| ≤ M;
//! - Bennett, doubled: 2 exp(−(s²/M²) h(Mx/s²)), h(u) = (1 + u) ln(1 + u) − u;
//! - Chernoff: inf over θ > 0 of e^{Λ(θ) − θx}, added for both sides, Λ the cumulant generating function of S − E S.

use crate::bounds::centred_cumulant;
use crate::prepared::Prepared;
use gaussgap_simulation::law::Law;
use gaussgap_simulation::special::normal;

/// Which inequality.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Kind {
    Chebyshev,
    Cantelli,
    Hoeffding,
    Bernstein,
    Bennett,
    Chernoff,
}

/// An inequality with its condition and source.
pub(super) struct MethodOfBound {
    pub kind: Kind,
    pub name: &'static str,
    pub conditions: &'static str,
    pub source: &'static str,
}

/// All of them, the least demanding first.
pub(super) const METHODS: &[MethodOfBound] = &[
    MethodOfBound {
        kind: Kind::Chebyshev,
        name: "Chebyshev",
        conditions: "finite variance",
        source: "Chebyshev 1867: σ²/(nε²)",
    },
    MethodOfBound {
        kind: Kind::Cantelli,
        name: "Cantelli",
        conditions: "finite variance; a one-sided bound, doubled for two sides",
        source: "Cantelli 1928: σ²/(σ² + nε²) on each side",
    },
    MethodOfBound {
        kind: Kind::Hoeffding,
        name: "Hoeffding",
        conditions: "bounded values",
        source: "Hoeffding 1963: 2 exp(−2nε²/R²)",
    },
    MethodOfBound {
        kind: Kind::Bernstein,
        name: "Bernstein",
        conditions: "bounded values and a known variance",
        source: "Bernstein 1927: 2 exp(−nε²/(2σ² + 2Mε/3))",
    },
    MethodOfBound {
        kind: Kind::Bennett,
        name: "Bennett",
        conditions: "bounded values and a known variance; a one-sided bound, doubled for two sides",
        source: "Bennett 1962: exp(−(nσ²/M²) h(Mε/σ²)) on each side",
    },
    MethodOfBound {
        kind: Kind::Chernoff,
        name: "Chernoff",
        conditions: "the law itself, with exponentially falling tails",
        source: "Chernoff 1952: exp(−n I(μ ± ε)) on each side, I the Legendre transform of the law's own cumulant \
                 generating function",
    },
];

/// P(|Z| > e) for a normal Z.
pub(super) fn normal_probability(e: f64) -> f64 {
    (2.0 * normal::above(e)).min(1.0)
}

/// What the inequalities need to know of a sum and a deviation, in units of the sum's standard deviation.
#[derive(Debug)]
pub(super) struct Sizes<'a> {
    /// The terms: law, copies, factor per copy in units of the sum's sd.
    terms: Vec<(&'a Law, f64, f64)>,
    /// ε in units of the sum's sd.
    e: f64,
}

impl<'a> Sizes<'a> {
    /// Of the statistic of a plan with these counts; `None` without a finite, positive variance.
    pub fn new(prepared: &'a Prepared, counts: &[u64], epsilon: f64) -> Option<Self> {
        use crate::scenario::{Source, Statistic};
        let n = counts.iter().sum::<u64>() as f64;
        let mut terms = Vec::new();
        let mut variance_root = 0.0_f64;
        for (law, count) in prepared.laws.iter().zip(counts) {
            let count = *count as f64;
            let factor = match (&prepared.scenario.source, prepared.scenario.statistic) {
                (Source::Groups { .. }, _) => 1.0 / count,
                (Source::Like { .. }, Statistic::Mean) => 1.0 / n,
                _ => 1.0,
            };
            variance_root = variance_root.hypot(factor * count.sqrt() * law.moments.variance?.sqrt());
            terms.push((law, count, factor));
        }
        if let (crate::scenario::Source::Groups { .. }, Some(first)) =
            (&prepared.scenario.source, terms.first_mut())
        {
            first.2 = -first.2;
        }
        if !(variance_root > 0.0 && variance_root.is_finite()) {
            return None;
        }
        for term in &mut terms {
            term.2 /= variance_root;
        }
        Some(Self { terms, e: epsilon / variance_root })
    }

    /// ε in units of the statistic's sd.
    pub fn standardized(&self) -> f64 {
        self.e
    }

    /// Σ Rᵢ², in units of the sum's variance; `None` for unbounded laws.
    fn squared_ranges(&self) -> Option<f64> {
        self.terms
            .iter()
            .map(|(law, count, factor)| {
                let range = (law.support.1 - law.support.0) * factor;
                range.is_finite().then_some(count * range * range)
            })
            .sum()
    }

    /// max |Xᵢ − μᵢ|, in units of the sum's sd; `None` for unbounded laws.
    fn largest_deviation(&self) -> Option<f64> {
        let mut largest = 0.0_f64;
        for (law, _, factor) in &self.terms {
            let mean = law.moments.mean?;
            let deviation = (law.support.1 - mean).max(mean - law.support.0) * factor.abs();
            largest = deviation.is_finite().then_some(largest.max(deviation))?;
        }
        Some(largest)
    }

    /// The smallest of the bounds e^{Λ(θ) − θe} over θ > 0 on one side (`sign` 1 above, −1 below). Any θ gives a
    /// valid bound, so that an imperfect minimum only makes it less sharp.
    fn chernoff_side(&self, sign: f64) -> Option<f64> {
        let exponent = |theta: f64| -> f64 {
            let cumulants = self.terms.iter().map(|(law, count, factor)| {
                centred_cumulant(law, sign * theta * factor).map(|cumulant| count * cumulant)
            });
            match cumulants.sum::<Option<f64>>() {
                Some(cumulant) if cumulant.is_finite() => cumulant - theta * self.e,
                _ => f64::INFINITY,
            }
        };
        // For a nearly normal sum the best θ is e; search a wide logarithmic range around it, then refine.
        let grid = (-24..=16).map(|step| self.e * 1.5_f64.powi(step)).collect::<Vec<_>>();
        let values = grid.iter().map(|theta| exponent(*theta)).collect::<Vec<_>>();
        let best = (0..grid.len()).min_by(|a, b| values[*a].total_cmp(&values[*b]))?;
        if !values[best].is_finite() {
            return None;
        }
        let mut low = grid[best.saturating_sub(1)];
        let mut high = grid[(best + 1).min(grid.len() - 1)];
        let mut smallest = values[best];
        for _ in 0..60 {
            let (first, second) = (low + 0.381_966 * (high - low), low + 0.618_034 * (high - low));
            let (at_first, at_second) = (exponent(first), exponent(second));
            smallest = smallest.min(at_first).min(at_second);
            if at_first <= at_second { high = second } else { low = first }
        }
        // The cumulant carries quadrature errors of some 1e-12: raise the bound beyond them.
        Some((smallest + 1e-10 * (1.0 + smallest.abs())).exp().min(1.0))
    }
}

/// What an inequality guarantees, at most 1; `None` where its condition is not met.
pub(super) fn guarantee(kind: Kind, sizes: &Sizes) -> Option<f64> {
    let e = sizes.e;
    let value = match kind {
        Kind::Chebyshev => 1.0 / (e * e),
        Kind::Cantelli => 2.0 / (1.0 + e * e),
        Kind::Hoeffding => 2.0 * (-2.0 * e * e / sizes.squared_ranges()?).exp(),
        Kind::Bernstein => 2.0 * (-e * e / (2.0 + 2.0 * sizes.largest_deviation()? * e / 3.0)).exp(),
        Kind::Bennett => {
            let largest = sizes.largest_deviation()?;
            let u = largest * e;
            let h = (1.0 + u) * u.ln_1p() - u;
            // Below this u, h(u) = u²/2 − u³/6 + … ≥ u²/2 − u³/6.
            let h = if u < 1e-4 { u * u / 2.0 - u * u * u / 6.0 } else { h };
            2.0 * (-h / (largest * largest)).exp()
        }
        Kind::Chernoff => sizes.chernoff_side(1.0)? + sizes.chernoff_side(-1.0)?,
    };
    // The printed value must stay a guarantee: rounding goes upwards.
    value.is_finite().then_some((value * (1.0 + 1e-12)).min(1.0))
}

/// The smallest n from `from` to 10⁹ with a property that all larger n have too; `None` if 10⁹ does not have it.
pub(super) fn smallest_n(from: u64, has: impl Fn(u64) -> bool) -> Option<u64> {
    let (mut without, mut with) = (from.saturating_sub(1), from);
    while !has(with) {
        if with >= crate::scenario::LARGEST_N {
            return None;
        }
        without = with;
        with = (2 * with).min(crate::scenario::LARGEST_N);
    }
    while with - without > 1 {
        let middle = without + (with - without) / 2;
        if has(middle) { with = middle } else { without = middle }
    }
    Some(with)
}

//! What a count of simulated successes says about a probability, with a stated confidence.

/// An interval for a probability.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Band {
    /// Lower end.
    pub low: f64,
    /// Upper end.
    pub high: f64,
}

impl Band {
    /// The common part of two bands that hold jointly.
    pub(crate) fn and(self, other: Self) -> Self {
        Self { low: self.low.max(other.low), high: self.high.min(other.high) }
    }

    /// The band made wider by `error` on both sides, inside [0, 1].
    pub(crate) fn widened(self, error: f64) -> Self {
        Self { low: (self.low - error).max(0.0), high: (self.high + error).min(1.0) }
    }

    /// Half-width around `value` that covers the band.
    pub(crate) fn error_about(self, value: f64) -> f64 {
        (value - self.low).max(self.high - value).max(0.0)
    }
}

/// ε with P(sup|F̂ − F| > ε) ≤ `risk`, for the empirical distribution function F̂ of `draws` values:
/// ε = √(ln(2/risk)/(2N)).
///
/// Dvoretzky, Kiefer and Wolfowitz 1956 with Massart's constant, valid for every ε and every law (Massart 1990,
/// Ann. Probab. 18:1269).
pub(crate) fn uniform_band(draws: u64, risk: f64) -> f64 {
    if draws == 0 {
        return 1.0;
    }
    ((2.0 / risk).ln() / (2.0 * draws as f64)).sqrt().min(1.0)
}

/// The Clopper–Pearson interval: contains p with probability at least 1 − `risk` when `count` successes came
/// from Binomial(`draws`, p), for every p (Clopper and Pearson 1934, Biometrika 26:404).
///
/// Ends are the beta quantiles B(risk/2; x, N−x+1) and B(1−risk/2; x+1, N−x). They are found by bisection on the
/// incomplete beta function inside the closed-form interval of [`divergence_interval`], which contains them, and
/// rounded outwards.
pub(crate) fn clopper_pearson(count: u64, draws: u64, risk: f64) -> Band {
    let outer = divergence_interval(count, draws, risk);
    if draws == 0 {
        return outer;
    }
    let (x, n) = (count as f64, draws as f64);
    let share = x / n;
    let half = 0.5 * risk;
    // P(Bin(N, p) ≥ x) = I_p(x, N−x+1) rises in p; the lower end is where it is risk/2.
    let low = if count == 0 {
        0.0
    } else {
        bisect(outer.low, share, |p| crate::special::beta::below(x, n - x + 1.0, p) < half).0
    };
    // P(Bin(N, p) ≤ x) = 1 − I_p(x+1, N−x) falls in p; the upper end is where it is risk/2.
    let high = if count == draws {
        1.0
    } else {
        bisect(share, outer.high, |p| crate::special::beta::above(x + 1.0, n - x, p) > half).1
    };
    // The incomplete beta function is good to 1e-12: so are the ends.
    Band { low: low * (1.0 - 1e-11), high: (high * (1.0 + 1e-11)).min(1.0) }
}

/// Narrows [low, high], `yes` holding below some point and not above, to a relative width of about 1e-6 of its length.
fn bisect(mut low: f64, mut high: f64, yes: impl Fn(f64) -> bool) -> (f64, f64) {
    for _ in 0..20 {
        let middle = 0.5 * (low + high);
        if yes(middle) {
            low = middle;
        } else {
            high = middle;
        }
    }
    (low, high)
}

/// All p with N·D(x/N ‖ p) ≤ ln(2/risk), D(a‖p) = a ln(a/p) + (1−a) ln((1−a)/(1−p)): by Chernoff's bound each
/// side is missed with probability at most risk/2, so this is a (slightly wide) confidence interval in closed form.
pub(crate) fn divergence_interval(count: u64, draws: u64, risk: f64) -> Band {
    if draws == 0 {
        return Band { low: 0.0, high: 1.0 };
    }
    let n = draws as f64;
    let share = count as f64 / n;
    let limit = (2.0 / risk).ln() / n;
    let term = |a: f64, p: f64| if a > 0.0 { a * (a / p).ln() } else { 0.0 };
    let far = |p: f64| term(share, p) + term(1.0 - share, 1.0 - p) > limit;
    let low = if count == 0 { 0.0 } else { halve(0.0, share, |p| p <= 0.0 || far(p)).0 };
    let high = if count == draws { 1.0 } else { halve(share, 1.0, |p| !(p >= 1.0 || far(p))).1 };
    Band { low, high }
}

/// Bisection to the last bits.
fn halve(mut low: f64, mut high: f64, yes: impl Fn(f64) -> bool) -> (f64, f64) {
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if yes(middle) {
            low = middle;
        } else {
            high = middle;
        }
    }
    (low, high)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_success_gives_the_closed_form() {
        // Upper end with x = 0: 1 − (risk/2)^(1/N); the divergence interval has the same.
        let band = divergence_interval(0, 1000, 0.01);
        let exact = 1.0 - 0.005f64.powf(1e-3);
        assert_eq!(band.low, 0.0);
        assert!((band.high / exact - 1.0).abs() < 1e-12);
        let band = clopper_pearson(0, 1000, 0.01);
        assert!((band.high / exact - 1.0).abs() < 1e-4 && band.high >= exact);
    }

    #[test]
    fn clopper_pearson_agrees_with_scipy() {
        // scipy.stats.beta.ppf, SciPy 1.17.1 (see references/monte_carlo.py), 12 digits.
        for (count, draws, risk, low, high) in REFERENCES {
            let band = clopper_pearson(count, draws, risk);
            let width = high - low;
            assert!(
                band.low <= low + 1e-9 * width && band.low > low - 1e-5 * width,
                "{count}/{draws}: {band:?}"
            );
            assert!(
                band.high >= high - 1e-9 * width && band.high < high + 1e-5 * width,
                "{count}/{draws}: {band:?}"
            );
            let outer = divergence_interval(count, draws, risk);
            assert!(outer.low <= low && outer.high >= high && outer.high - outer.low < 1.3 * width);
        }
    }

    const REFERENCES: [(u64, u64, f64, f64, f64); 4] = [
        (3, 50, 1.0e-02, 6.872485332952e-03, 2.027062694686e-01),
        (17, 4_000_000, 1.0e-04, 1.348305233311e-06, 9.844788774284e-06),
        (90_000, 1_000_000, 1.0e-03, 8.906090984410e-02, 9.094528724273e-02),
        (999, 1000, 1.0e-06, 9.827200947388e-01, 9.999999995000e-01),
    ];
}

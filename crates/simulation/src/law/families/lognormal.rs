//! The lognormal law: ln X is normal with mean `log_mean` and sd `log_sd`. Standard units: median 1.
//!
//! With w = e^{log_sd²} and d = w − 1: mean √w, sd √(w d), skewness (w + 2)√d, excess kurtosis
//! 16d + 15d² + 6d³ + d⁴. Given mean m and sd s instead: log_sd² = ln(1 + (s/m)²), log_mean = ln m − log_sd²/2.
//! Reference: J. Aitchison & J. A. C. Brown, *The Lognormal Distribution* (1957), from memory.

use crate::law::Piece;
use crate::law::checks::{Checks, show};
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::quadrature::tidy;
use crate::special;
use num_complex::Complex64;
use rand_distr::Distribution;
use std::sync::Arc;

/// The lognormal density with median 1.
#[derive(Debug)]
struct Lognormal {
    log_sd: f64,
}

pub(super) fn compile(
    log_mean: Option<f64>,
    log_sd: Option<f64>,
    mean: Option<f64>,
    sd: Option<f64>,
    checks: &mut Checks,
) -> Option<Form> {
    let (log_mean, log_sd) = match (log_mean, log_sd, mean, sd) {
        (Some(log_mean), Some(log_sd), None, None) => {
            if !(checks.finite("log_mean", log_mean) & checks.within("log_sd", log_sd, 1e-150, 10.0)) {
                return None;
            }
            if log_mean.abs() > 690.0 {
                checks.problem("log_mean", format!("must lie between -690 and 690 (got {})", show(log_mean)));
                return None;
            }
            (log_mean, log_sd)
        }
        (None, None, Some(mean), Some(sd)) => {
            if !(checks.positive("mean", mean) & checks.positive("sd", sd)) {
                return None;
            }
            let ratio = sd / mean;
            if !(1e-150..=1e21).contains(&ratio) {
                checks.problem(
                    "sd",
                    format!("must be between 1e-150 and 1e21 times the mean (got {})", show(sd)),
                );
                return None;
            }
            let variance = (ratio * ratio).ln_1p();
            // √ of a tiny ratio² keeps its digits: ln(1 + r²) = r² there.
            let log_sd = if ratio < 1e-5 { ratio * (1.0 - 0.25 * ratio * ratio) } else { variance.sqrt() };
            (mean.ln() - 0.5 * variance, log_sd)
        }
        _ => {
            checks.problem("", "must give either `log_mean` and `log_sd` or `mean` and `sd`");
            return None;
        }
    };
    let median = match (mean, sd) {
        // e^{ln m − v/2} without the loss of the logarithm: m/√(1 + (s/m)²).
        (Some(mean), Some(sd)) => mean / (1.0f64).hypot(sd / mean),
        _ => log_mean.exp(),
    };
    Some(Form::piece(Piece::whole(Arc::new(Lognormal { log_sd }), 1.0, 0.0, median)))
}

impl Density for Lognormal {
    fn name(&self) -> &'static str {
        "lognormal"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { special::normal::density(x.ln() / self.log_sd) / (self.log_sd * x) }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 { 0.0 } else { special::normal::at_or_below(x.ln() / self.log_sd) }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { special::normal::above(x.ln() / self.log_sd) }
    }
    fn quantile(&self, p: f64) -> f64 {
        (self.log_sd * special::normal::quantile(p)).exp()
    }
    fn quantile_above(&self, q: f64) -> f64 {
        (self.log_sd * special::normal::quantile_above(q)).exp()
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        if x.norm() < 1e-300 {
            return Complex64::new(0.0, 0.0);
        }
        let log = x.ln();
        let z = log / self.log_sd;
        (-0.5 * z * z - log).exp()
            * (0.5 * std::f64::consts::FRAC_2_SQRT_PI * std::f64::consts::FRAC_1_SQRT_2 / self.log_sd)
    }
    /// Analytic off the negative axis; on the ray of angle θ the density is e^{θ²/(2 log_sd²)} times larger
    /// than on the axis: 2·log_sd keeps that to e².
    fn rotation_up(&self) -> f64 {
        (2.0 * self.log_sd).min(std::f64::consts::FRAC_PI_3)
    }
    /// The rays would run into the cut.
    fn rotation_down(&self) -> f64 {
        0.0
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    /// In ln x: normal stretches, to 4·log_sd beyond the law's own tail because x⁴ f(x) peaks out there; each
    /// at most a factor 3 long in x.
    fn skeleton(&self) -> Vec<f64> {
        let (from, to) = (-10.8, 10.8 + 4.0 * self.log_sd);
        let step = (1.0 / self.log_sd).min(0.9);
        let count = ((to - from) / step).ceil();
        tidy(
            (0..=count as usize)
                .map(|i| self.log_sd * (from + (to - from) * i as f64 / count))
                .filter(|log| log.abs() < 700.0)
                .map(f64::exp)
                .collect(),
        )
    }
    fn lower_exponent(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponent(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponential_rate(&self) -> f64 {
        0.0
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        let variance = self.log_sd * self.log_sd;
        let d = variance.exp_m1();
        let w = variance.exp();
        // √(w d) = √w · √d, and √d ≈ log_sd where the square underflows.
        let root = if self.log_sd < 1e-8 { self.log_sd } else { d.sqrt() };
        Some(StandardMoments::finite(
            (0.5 * variance).exp(),
            (0.5 * variance).exp() * root,
            (w + 2.0) * root,
            d * (16.0 + d * (15.0 + d * (6.0 + d))),
        ))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        let z: f64 = rand_distr::StandardNormal.sample(random);
        (self.log_sd * z).exp()
    }
}

//! Student's t law: density ∝ (1 + y²/df)^{−(df+1)/2}, y = (x − location)/scale.
//!
//! Moments: mean for df > 1, sd √(df/(df−2)) for df > 2, skewness 0 for df > 3, excess kurtosis 6/(df−4) for
//! df > 4. The density has branch points at ±i√df, so rays may only leave from the half-line on their own side:
//! the law is kept as two halves, each the density of |T|. References: M. Abramowitz & I. Stegun §26.7.

use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::quadrature::{grade_from, quantile_points};
use crate::special;
use crate::special::elementary::complex_ln_1p;
use num_complex::Complex64;
use rand_distr::Distribution;
use std::sync::Arc;

/// The density of |T|.
#[derive(Debug)]
struct HalfStudent {
    df: f64,
    /// Density of |T| at 0.
    height: f64,
    sampler: Option<rand_distr::StudentT<f64>>,
}

pub(super) fn compile(
    df: f64,
    location: Option<f64>,
    scale: Option<f64>,
    checks: &mut Checks,
) -> Option<Form> {
    let (location, scale) = (location.unwrap_or(0.0), scale.unwrap_or(1.0));
    if !(checks.within("df", df, 0.5, 1e8)
        & checks.finite("location", location)
        & checks.positive("scale", scale))
    {
        return None;
    }
    let half: Arc<dyn Density> = Arc::new(HalfStudent {
        df,
        height: 2.0 * special::student::density(df, 0.0),
        sampler: rand_distr::StudentT::new(df).ok(),
    });
    let when = |order: f64, value: f64| (df > order).then_some(value);
    let moments = StandardMoments {
        mean: when(1.0, 0.0),
        sd: when(2.0, (df / (df - 2.0)).sqrt()),
        skewness: when(3.0, 0.0),
        excess_kurtosis: when(4.0, 6.0 / (df - 4.0)),
    };
    let pieces =
        vec![Piece::whole(half.clone(), 0.5, location, -scale), Piece::whole(half, 0.5, location, scale)];
    Some(Form::pieces(pieces).with_moments(moments.image(location, scale)))
}

impl Density for HalfStudent {
    fn name(&self) -> &'static str {
        "half of student-t"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, f64::INFINITY)
    }
    fn density(&self, x: f64) -> f64 {
        if x < 0.0 { 0.0 } else { 2.0 * special::student::density(self.df, x) }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 {
            return 0.0;
        }
        let above = self.above(x);
        if above < 0.5 {
            return 1.0 - above;
        }
        // P(|T| ≤ x) = I_w(1/2, df/2), w = x²/(df + x²), keeps relative accuracy near 0.
        let square = x * x;
        special::beta::below(0.5, 0.5 * self.df, square / (self.df + square))
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 { 1.0 } else { (2.0 * special::student::above(self.df, x)).min(1.0) }
    }
    fn quantile(&self, p: f64) -> f64 {
        if p > 0.5 {
            return self.quantile_above(1.0 - p);
        }
        let w = special::beta::quantile(0.5, 0.5 * self.df, p);
        (self.df * (w / (1.0 - w))).sqrt()
    }
    fn quantile_above(&self, q: f64) -> f64 {
        special::student::quantile_above(self.df, 0.5 * q).max(0.0)
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        (-0.5 * (self.df + 1.0) * complex_ln_1p(x * x / self.df)).exp() * self.height
    }
    /// Off the imaginary axis 1 + z²/df avoids the cut; beyond π/4 its modulus falls to sin 2θ, which is kept
    /// from making the density more than e² times larger than on the axis.
    fn rotation_up(&self) -> f64 {
        let least = (-4.0 / (self.df + 1.0)).exp();
        (0.5 * (std::f64::consts::PI - least.asin())).min(1.3)
    }
    fn rotation_down(&self) -> f64 {
        0.0
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    fn skeleton(&self) -> Vec<f64> {
        let points = quantile_points(|p| self.quantile(p), |q| self.quantile_above(q).min(1e150));
        grade_from(&points, -self.df.sqrt(), 1.8)
    }
    fn lower_exponent(&self) -> f64 {
        1.0
    }
    fn upper_exponent(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_tail_index(&self) -> f64 {
        self.df
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
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        match &self.sampler {
            Some(sampler) => sampler.sample(random).abs().min(f64::MAX),
            None => super::by_inversion(self, random),
        }
    }
}

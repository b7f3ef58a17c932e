//! What the engine needs to know of one continuous family, in its own standard units.
//!
//! Families are pure shapes: pieces ([`super::Piece`]) shift, scale, weight and truncate them.

use num_complex::Complex64;
use std::fmt::Debug;

/// Mean, sd, skewness and excess kurtosis of a density; `None` where the moment does not exist.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct StandardMoments {
    /// E X.
    pub mean: Option<f64>,
    /// Standard deviation.
    pub sd: Option<f64>,
    /// E (X − mean)³ / sd³.
    pub skewness: Option<f64>,
    /// E (X − mean)⁴ / sd⁴ − 3.
    pub excess_kurtosis: Option<f64>,
}

impl StandardMoments {
    /// Moments that all exist.
    pub const fn finite(mean: f64, sd: f64, skewness: f64, excess_kurtosis: f64) -> Self {
        Self {
            mean: Some(mean),
            sd: Some(sd),
            skewness: Some(skewness),
            excess_kurtosis: Some(excess_kurtosis),
        }
    }

    /// The moments of add + multiply·X.
    pub fn image(self, add: f64, multiply: f64) -> Self {
        Self {
            mean: self.mean.map(|mean| add + multiply * mean),
            sd: self.sd.map(|sd| multiply.abs() * sd),
            // + 0.0 keeps a skewness of −0 out.
            skewness: self.skewness.map(|skewness| multiply.signum() * skewness + 0.0),
            excess_kurtosis: self.excess_kurtosis,
        }
    }
}

/// One absolutely continuous law whose density is analytic between its breakpoints.
///
/// All methods accept any finite argument, never panic and never return `NaN`.
pub trait Density: Debug + Send + Sync {
    /// The name of the family, as scenarios write it.
    fn name(&self) -> &'static str;

    /// Ends of the support; infinite where unbounded.
    fn support(&self) -> (f64, f64);

    /// f(x); 0 outside the support. May be +∞ only at a support end with an integrable singularity.
    fn density(&self, x: f64) -> f64;

    /// F(x) = P(X ≤ x), with *relative* accuracy ~1e-14 in the lower tail.
    fn at_or_below(&self, x: f64) -> f64;

    /// P(X > x), with *relative* accuracy ~1e-14 in the upper tail.
    fn above(&self, x: f64) -> f64;

    /// The smallest x with F(x) ≥ p, 0 < p < 1.
    fn quantile(&self, p: f64) -> f64;

    /// The x with P(X > x) = q, 0 < q < 1, accurate for tiny q.
    fn quantile_above(&self, q: f64) -> f64;

    /// Analytic continuation of f into the complex plane, from the smooth stretch that contains `near`
    /// (a real point inside the support, between breakpoints): agrees with `density` on that stretch.
    fn density_complex(&self, x: Complex64, near: f64) -> Complex64;

    /// Largest angle θ ≤ π/2 for which ∫ f(e + r e^{±iφ}) e^{−s r e^{±iφ}} dr along the ray of angle φ leaving
    /// a real point e of the support *upwards* (towards +∞) may replace the integral along the real axis, for
    /// all |φ| ≤ θ: f is analytic in that sector and decays at infinity at least as fast as on the axis' own
    /// power. 0 where rotation is not allowed. For entire densities of Gaussian decay this is below π/4.
    fn rotation_up(&self) -> f64;

    /// The same for rays leaving downwards (towards −∞).
    fn rotation_down(&self) -> f64;

    /// ln E e^{−sX} (any branch whose exponential is right) where a closed form exists, for Re s within the
    /// strip of convergence; `None` otherwise.
    fn log_laplace(&self, s: Complex64) -> Option<Complex64>;

    /// Interior points where the density or a derivative of it is not smooth, ascending.
    fn breakpoints(&self) -> Vec<f64> {
        Vec::new()
    }

    /// Points, ascending and inside the support, between which f is smooth at the scale of the stretch: a
    /// Gauss–Legendre rule with 16–24 nodes on each stretch integrates f (times a slowly varying function) to
    /// ~1e-15 of its mass, singular support ends excepted. Typically quantiles from 1e-18 to 1 − 1e-18, denser
    /// where the density turns.
    fn skeleton(&self) -> Vec<f64>;

    /// f(x) ~ C (x − low)^(e − 1) as x falls to a finite lower end: this e (1 for a jump, +∞ where f vanishes
    /// faster than any power, and for an infinite end).
    fn lower_exponent(&self) -> f64;

    /// The same at the upper end.
    fn upper_exponent(&self) -> f64;

    /// sup of r with E max(X, 0)^r < ∞ (+∞ for light tails).
    fn upper_tail_index(&self) -> f64;

    /// sup of r with E max(−X, 0)^r < ∞ (+∞ for light tails).
    fn lower_tail_index(&self) -> f64;

    /// sup of real u ≥ 0 with E e^{uX} < ∞: +∞, 0 for heavy upper tails, or the exponential rate.
    fn upper_exponential_rate(&self) -> f64;

    /// The same for the lower tail: sup of u with E e^{−uX} < ∞.
    fn lower_exponential_rate(&self) -> f64;

    /// ∫_a^b (x − c)^k f(x) dx for k = 0..=4 in closed form, relative error ≤ 1e-13 of ∫|x − c|^k f; `None`
    /// hands over to quadrature. Ends may be infinite; the caller checks that the moment exists.
    fn partial_moment(&self, _k: u32, _center: f64, _a: f64, _b: f64) -> Option<f64> {
        None
    }

    /// Moments of the whole density in closed form (relative error ~1e-14); `None` hands over to quadrature.
    fn standard_moments(&self) -> Option<StandardMoments> {
        None
    }

    /// For a density symmetric about 0 whose halves allow rotation where the whole does not: the density of
    /// |X|, of which the law is an even mixture with its mirror image. Used before truncating.
    fn folded(&self) -> Option<std::sync::Arc<dyn Density>> {
        None
    }

    /// One draw by inverse transform or a library sampler.
    fn sample(&self, random: &mut dyn rand::Rng) -> f64;
}

//! Laplace-type integrals of a density along a ray that leaves the real axis, where the integrand decays
//! instead of oscillating.
//!
//! For a density f analytic in a sector, ∫₀^∞ f(e ± y) e^{−sy} dy may be taken along y = r e^{iφ}. With φ near
//! −arg s the factor e^{−sy} decays without oscillating. The substitution r = r₀ exp(u − e^{−u}) (Takahasi &
//! Mori 1974, the half-line double exponential rule) turns the integral into one over the whole line whose
//! trapezoidal sums converge geometrically, whatever integrable power f has at e and however slowly it decays.

use crate::law::Density;
use num_complex::Complex64;

/// A half-line transform with what is known about its accuracy.
#[derive(Debug, Clone, Copy)]
pub struct RayValue {
    /// The integral.
    pub value: Complex64,
    /// ∫|integrand|: the measure of cancellation.
    pub absolute: f64,
    /// Estimate of the error of `value`, discretisation and rounding together; +∞ where the rule failed.
    pub error: f64,
}

/// A half line of a density: x = from + direction·y, y ≥ 0, in the family's own units.
#[derive(Debug, Clone, Copy)]
pub struct Ray<'a> {
    /// The family.
    pub density: &'a dyn Density,
    /// Where the ray leaves the real axis.
    pub from: f64,
    /// A real point in the smooth stretch whose analytic continuation is meant.
    pub near: f64,
    /// +1 for rays towards +∞, −1 towards −∞.
    pub direction: f64,
    /// f(from + direction·y) ~ y^(exponent − 1) as y falls to 0.
    pub exponent: f64,
    /// A length over which the density changes appreciably.
    pub scale: f64,
}

/// Most nodes of one sum.
const MAX_NODES: usize = 1 << 13;

impl<'a> Ray<'a> {
    /// A ray from `from`, with exponent and scale read off the family.
    pub fn new(density: &'a dyn Density, from: f64, near: f64, direction: f64) -> Self {
        let (low, high) = density.support();
        let exponent = if direction > 0.0 && from == low {
            density.lower_exponent()
        } else if direction < 0.0 && from == high {
            density.upper_exponent()
        } else {
            1.0
        };
        let here = density.density(from);
        let beyond = if direction > 0.0 { density.above(from) } else { density.at_or_below(from) };
        let median = density.quantile(0.5);
        let by_median = (median - from).abs();
        let by_hazard =
            if here > 0.0 && here.is_finite() && beyond > 0.0 { beyond / here } else { f64::INFINITY };
        let mut scale = if by_median > 0.0 { by_median.min(by_hazard) } else { by_hazard };
        if !(scale > 0.0 && scale.is_finite()) {
            scale = (near - from).abs();
        }
        Self { density, from, near, direction, exponent: exponent.clamp(1e-3, 1.0), scale }
    }

    /// The largest angle this ray may be turned by, from the family.
    pub fn rotation(&self) -> f64 {
        let allowed =
            if self.direction > 0.0 { self.density.rotation_up() } else { self.density.rotation_down() };
        allowed.clamp(0.0, std::f64::consts::FRAC_PI_2)
    }

    fn integrand(&self, r: f64, turn: Complex64, s_turned: Complex64) -> Complex64 {
        let exponent = -s_turned * r;
        if exponent.re < -745.0 {
            return Complex64::ZERO;
        }
        let density = self.density.density_complex(self.from + self.direction * turn * r, self.near);
        let value = density * turn * exponent.exp();
        if value.re.is_finite() && value.im.is_finite() { value } else { Complex64::ZERO }
    }

    /// ∫₀^∞ f(from + direction·y) e^{−sy} dy along y = r e^{i·angle}.
    ///
    /// Needs Re(s e^{i·angle}) > 0. The step is halved until two trapezoidal sums agree to 1e-9 of ∫|integrand|;
    /// as the error of the rule is squared by each halving, the finer sum is then good to rounding. An absolute
    /// error of `enough` (0 for the best there is) ends the halving earlier.
    pub fn transform(&self, s: Complex64, angle: f64, enough: f64) -> RayValue {
        let turn = Complex64::from_polar(1.0, angle);
        let s_turned = s * turn;
        let failed = RayValue { value: Complex64::ZERO, absolute: f64::INFINITY, error: f64::INFINITY };
        if !(s_turned.re > 0.0 && self.scale > 0.0) {
            return failed;
        }
        let r0 = self.scale.min(1.0 / s.norm());
        let top = (60.0 / (s_turned.re * r0)).ln().max(2.0) + 0.2;
        let bottom = -(44.0 / self.exponent).ln() - 0.2;
        let term = |u: f64| {
            let e = (-u).exp();
            let r = r0 * (u - e).exp();
            if r == 0.0 { Complex64::ZERO } else { self.integrand(r, turn, s_turned) * (r * (1.0 + e)) }
        };
        let mut step = 0.25;
        let mut low = 0_usize;
        let count = ((top - bottom) / step).ceil() as usize + 1;
        let first: Vec<Complex64> = (0..count).map(|k| term(bottom + step * k as f64)).collect();
        let norms: Vec<f64> = first.iter().map(|v| v.norm()).collect();
        let largest = norms.iter().copied().fold(0.0, f64::max);
        if largest == 0.0 {
            return RayValue { value: Complex64::ZERO, absolute: 0.0, error: 0.0 };
        }
        let mut high = count - 1;
        let floor = largest * 1e-19;
        while low + 1 < high && norms[low + 1] < floor {
            low += 1;
        }
        while high > low + 1 && norms[high - 1] < floor {
            high -= 1;
        }
        let start = bottom + step * low as f64;
        let mut panels = high - low;
        let mut sum: Complex64 = first[low..=high].iter().sum();
        let mut absolute_sum: f64 = norms[low..=high].iter().sum();
        let mut value = sum * step;
        loop {
            let mut extra = Complex64::ZERO;
            let mut extra_absolute = 0.0;
            for k in 0..panels {
                let v = term(start + step * (k as f64 + 0.5));
                extra += v;
                extra_absolute += v.norm();
            }
            sum += extra;
            absolute_sum += extra_absolute;
            step *= 0.5;
            panels *= 2;
            let finer = sum * step;
            let absolute = absolute_sum * step;
            let difference = (finer - value).norm();
            value = finer;
            let relative = difference / absolute;
            let error = absolute * (1e-15 + 10.0 * relative * relative);
            if relative <= 1e-9 || (relative <= 1e-5 && error <= enough) {
                return RayValue { value, absolute, error };
            }
            if panels > MAX_NODES {
                return RayValue { value, absolute, error: difference.max(1e-15 * absolute) };
            }
        }
    }

    /// The transform on the imaginary axis, s = i·frequency with frequency > 0: ∫ f(from ± y) e^{−i·frequency·y} dy,
    /// the ray turned by the angle that gives the smallest error; an absolute error of `enough` ends the search.
    pub fn fourier(&self, frequency: f64, enough: f64) -> RayValue {
        let s = Complex64::new(0.0, frequency);
        let full = self.rotation();
        let mut best = self.transform(s, -full, enough);
        let mut angle = full;
        for _ in 0..4 {
            if best.error <= enough
                || best.absolute <= 3.0 * best.value.norm() && best.error <= 4e-15 * best.value.norm()
            {
                break;
            }
            angle *= 0.5;
            let other = self.transform(s, -angle, enough);
            if other.error < best.error {
                best = other;
            } else if other.error > 3.0 * best.error {
                break;
            }
        }
        best
    }

    /// ∫₀^∞ y f(from + direction·y) dy on the real axis, for unbounded half lines with a first moment.
    pub fn first_moment(&self) -> f64 {
        let f = |u: f64| {
            let y = self.scale * u.exp();
            let value = y * y * self.density.density(self.from + self.direction * y);
            if value.is_finite() { value } else { 0.0 }
        };
        let step = 1.0 / 32.0;
        let mut sum = f(0.0);
        for side in [-1.0, 1.0] {
            let mut k = 1.0;
            while k < 40_000.0 {
                let v = f(side * step * k);
                sum += v;
                if v <= sum * 1e-18 && k > 32.0 {
                    break;
                }
                k += 1.0;
            }
        }
        sum * step
    }
}

//! One-sided summands: Laplace transforms of what a law holds above its smallest value.

use crate::law::{Density, Law, Piece};
use crate::special::elementary::{complex_exp, complex_exp_m1, complex_ln_1p};
use num_complex::Complex64;
use std::sync::Arc;

/// Unit in the last place.
const ULP: f64 = f64::EPSILON;

/// Families whose closed form of ln E e^(−sX) holds in the whole plane cut along the negative axis.
const CONTINUED: [&str; 3] = ["exponential", "gamma", "inverse-gaussian"];

/// A complex number and a bound on its absolute error.
#[derive(Debug, Clone, Copy)]
pub(super) struct Approximate {
    /// The number.
    pub(super) value: Complex64,
    /// Its error.
    pub(super) error: f64,
}

/// One piece, on y ≥ 0 above the smallest value, in standard units of the sum.
#[derive(Debug, Clone)]
struct Branch {
    density: Arc<dyn Density>,
    /// Factor of the density.
    factor: f64,
    /// Lower end in the family's units.
    start: f64,
    /// Standard units of the sum per unit of the family.
    scale: f64,
    /// A point of the smooth stretch.
    near: f64,
    /// f(start + y) ~ y^(exponent − 1).
    exponent: f64,
    /// A length over which the density changes, in the family's units.
    length: f64,
    /// Distance from the start beyond which 1e-32 of the mass lies.
    far: f64,
    /// Whether ln E e^(−sX) has a closed form, and whether that may be continued.
    closed: Option<bool>,
    /// Largest angle of the ray.
    rotation: f64,
}

/// `count` copies of a law whose smallest value has been subtracted.
#[derive(Debug, Clone)]
pub(super) struct OneSided {
    /// How many copies.
    count: u64,
    /// Probability of the smallest value itself.
    atom: f64,
    branches: Vec<Branch>,
    /// E Y in standard units of the sum, for one copy.
    pub(super) mean: f64,
    /// Bound on the error of `mean`.
    pub(super) mean_error: f64,
}

impl OneSided {
    /// `count` copies of multiply·X/sd, X following `law`, seen from the smallest value if `direction` is +1, from
    /// the largest (reflected) if it is −1. The reason if the law is not one-sided in this sense.
    pub(super) fn new(law: &Law, count: u64, multiply: f64, sd: f64, direction: f64) -> Result<Self, String> {
        let orientation = direction * multiply;
        let (low, high) = law.support;
        let end = if orientation > 0.0 { low } else { high };
        if !end.is_finite() {
            return Err("the law is unbounded on the side the contour starts from".into());
        }
        if let Some(reason) = &law.only_simulation {
            return Err(reason.clone());
        }
        if law.pieces.is_empty() {
            return Err("the law has no density".into());
        }
        let close = |x: f64| (x - end).abs() <= 8.0 * ULP * end.abs();
        if law.missing_mass > 0.0 || law.atoms.iter().any(|a| !close(a.value)) {
            return Err("the law has atoms away from its end".into());
        }
        let atom: f64 = law.atoms.iter().map(|a| a.mass).sum();
        let mut branches = Vec::new();
        let (mut mean, mut known) = (0.0, true);
        for piece in &law.pieces {
            let upwards = piece.multiply * orientation;
            if upwards <= 0.0 || piece.high != f64::INFINITY || !piece.low.is_finite() {
                return Err("a part of the law is bounded on both sides".into());
            }
            let piece_end = piece.image(piece.low);
            if !close(piece_end) {
                return Err("a part of the law starts away from its end".into());
            }
            let branch = Branch::new(piece, upwards.abs() / sd)?;
            match piece.density.standard_moments().and_then(|m| m.mean) {
                Some(standard) if piece.is_whole() => {
                    mean += branch.factor * branch.scale * (standard - branch.start);
                }
                _ => known = false,
            }
            branches.push(branch);
        }
        let mut mean_error = 8.0 * ULP * mean.abs();
        if !known {
            let of_law = law.moments.mean.ok_or("the law has no mean")?;
            let factor = orientation.abs() / sd;
            mean = (of_law - end).abs() * factor;
            mean_error = 1e-12 * mean + 8.0 * ULP * (of_law.abs() + end.abs()) * factor;
        }
        Ok(Self { count, atom, branches, mean, mean_error })
    }

    /// Largest angle beyond ±π/2 up to which the transform is analytic and computable.
    fn opening(&self) -> f64 {
        self.branches.iter().map(Branch::opening).fold(f64::INFINITY, f64::min)
    }

    /// Rate of the exponential upper tail in standard units of the sum: the transform is analytic for
    /// Re s > −rate.
    fn rate(&self) -> f64 {
        self.branches
            .iter()
            .map(|b| b.density.upper_exponential_rate() / b.scale)
            .fold(f64::INFINITY, f64::min)
    }

    /// E e^(−sY) 1{Y > 0} for one copy.
    fn continuous(&self, s: Complex64, pivot: f64) -> Approximate {
        let mut sum = Approximate { value: Complex64::ZERO, error: 0.0 };
        for branch in &self.branches {
            let part = branch.transform(s, pivot);
            sum.value += part.value;
            sum.error += part.error;
        }
        sum
    }
}

impl Branch {
    fn new(piece: &Piece, scale: f64) -> Result<Self, String> {
        let density = piece.density.clone();
        let start = piece.low;
        let (low, high) = density.support();
        if high != f64::INFINITY {
            return Err("a part of the law is bounded on both sides".into());
        }
        if density.breakpoints().iter().any(|b| *b > start) {
            return Err("a density has a kink".into());
        }
        let whole = start == low;
        let beyond = density.above(start);
        let median = density.quantile_above(0.5 * beyond);
        let far = density.quantile_above((1e-32 * beyond).max(1e-300)).min(1e100) - start;
        let here = density.density(start);
        let by_hazard = if here > 0.0 && here.is_finite() { beyond / here } else { f64::INFINITY };
        let length = (median - start).min(by_hazard);
        if !(length > 0.0 && length.is_finite() && far.is_finite() && scale > 0.0 && scale.is_finite()) {
            return Err("a density has no scale".into());
        }
        let exponent = if whole { density.lower_exponent().clamp(1e-3, 1.0) } else { 1.0 };
        let closed = (whole && start == 0.0 && density.log_laplace(Complex64::new(1.0, 1.0)).is_some())
            .then(|| CONTINUED.contains(&density.name()));
        let rotation = density.rotation_up().clamp(0.0, std::f64::consts::FRAC_PI_2);
        Ok(Self {
            factor: piece.factor,
            start,
            scale,
            near: median,
            exponent,
            length,
            far,
            closed,
            rotation,
            density,
        })
    }

    fn opening(&self) -> f64 {
        if self.closed == Some(true) { 1.4 } else { 0.75 * self.rotation }
    }

    /// factor·∫₀^∞ f(start + y) e^(−s·scale·y) dy.
    fn transform(&self, s: Complex64, pivot: f64) -> Approximate {
        let s = s * self.scale;
        if let Some(continued) = self.closed
            && (continued || s.re >= 0.0)
            && let Some(log) = self.density.log_laplace(s)
        {
            let value = self.factor * complex_exp(log);
            return Approximate { value, error: value.norm() * ULP * (4.0 + 4.0 * log.norm()) };
        }
        self.along_ray(s, pivot * self.scale)
    }

    /// The integral along y = r e^(−iθ), r = r₀ exp(u − e^(−u)) (the half-line double exponential substitution,
    /// Takahasi & Mori 1974, Publ. RIMS 9:721), by the trapezoidal rule in u.
    ///
    /// θ turns the ray until e^(−sy) decays within 0.6 rad of the fastest way; no further, because the density
    /// may grow with θ (a lognormal one by e^(θ²/(2 log_sd²))). The step is halved until two sums agree to 1e-9 of
    /// ∫|integrand|; as each halving squares the error, the finer sum is then good to rounding.
    fn along_ray(&self, s: Complex64, pivot: f64) -> Approximate {
        let direction = (s - pivot).arg();
        let angle = (direction.abs() - 0.6).clamp(0.0, 0.97 * self.rotation) * direction.signum();
        let turn = Complex64::from_polar(1.0, -angle);
        let turned = s * turn;
        let r0 = self.length.min(1.0 / s.norm().max(1e-300));
        let mut reach = 6.0 * self.far;
        if turned.re > 0.0 {
            reach = reach.min(60.0 / turned.re);
        } else {
            // A light tail against a growing exponential: as far as their product matters.
            let mut steps = 0;
            while steps < 60 && self.density.density(self.start + reach).ln() - turned.re * reach > -80.0 {
                reach *= 1.4;
                steps += 1;
            }
            if -turned.re * reach > 650.0 {
                // Beyond the range of doubles.
                return Approximate { value: Complex64::ZERO, error: f64::INFINITY };
            }
        }
        let top = (reach / r0).ln().max(2.0) + 0.2;
        let bottom = -(44.0 / self.exponent).ln() - 0.2;
        let term = |u: f64| {
            let e = (-u).exp();
            let r = r0 * (u - e).exp();
            let exponent = -turned * r;
            if r == 0.0 || exponent.re < -745.0 {
                return Complex64::ZERO;
            }
            let density = self.density.density_complex(self.start + turn * r, self.near);
            let value = density * turn * complex_exp(exponent) * (r * (1.0 + e));
            if value.re.is_finite() && value.im.is_finite() { value } else { Complex64::ZERO }
        };
        let mut step = 0.25;
        let count = ((top - bottom) / step).ceil() as usize + 1;
        let first: Vec<Complex64> = (0..count).map(|k| term(bottom + step * k as f64)).collect();
        let largest = first.iter().map(|v| v.norm()).fold(0.0, f64::max);
        if largest == 0.0 {
            return Approximate { value: Complex64::ZERO, error: 1e-300 };
        }
        let matters = |v: &Complex64| v.norm() > 1e-19 * largest;
        let low = first.iter().position(matters).unwrap_or(0).saturating_sub(1);
        let high = (first.iter().rposition(matters).unwrap_or(count - 1) + 1).min(count - 1);
        let start = bottom + step * low as f64;
        // What the ends cut off, one step's worth of the last terms.
        let cut = first[low].norm() + first[high].norm();
        let mut panels = high - low;
        let mut sum: Complex64 = first[low..=high].iter().sum();
        let mut absolute: f64 = first[low..=high].iter().map(|v| v.norm()).sum();
        let mut value = sum * step;
        loop {
            for k in 0..panels {
                let v = term(start + step * (k as f64 + 0.5));
                sum += v;
                absolute += v.norm();
            }
            step *= 0.5;
            panels *= 2;
            let finer = sum * step;
            let size = absolute * step;
            let relative = (finer - value).norm() / size;
            value = finer;
            if relative <= 1e-9 || panels > 1 << 13 {
                let discretisation = if relative <= 1e-9 { 10.0 * relative * relative } else { relative };
                let error = size * (6.0 * ULP + discretisation) + 8.0 * cut;
                return Approximate { value: self.factor * value, error: self.factor * error };
            }
        }
    }
}

/// The law of a sum of one-sided summands above its smallest value.
#[derive(Debug, Clone)]
pub(super) struct OneSidedSum {
    summands: Vec<OneSided>,
    /// Probability of the smallest value of the sum.
    pub(super) atom: f64,
    /// E of the sum above its smallest value.
    pub(super) mean: f64,
    /// Bound on the error of `mean`.
    pub(super) mean_error: f64,
    /// Rate of the exponential upper tail; 0 for a heavy tail.
    pub(super) rate: f64,
    /// Largest angle beyond ±π/2 up to which the transform is computable.
    pub(super) opening: f64,
    /// Number of summands.
    pub(super) n: f64,
}

impl OneSidedSum {
    pub(super) fn new(summands: Vec<OneSided>) -> Self {
        let atom = summands.iter().map(|s| s.count as f64 * s.atom.ln()).sum::<f64>().exp();
        Self {
            atom: if atom > 1e-280 { atom } else { 0.0 },
            mean: summands.iter().map(|s| s.count as f64 * s.mean).sum(),
            mean_error: summands.iter().map(|s| s.count as f64 * s.mean_error).sum(),
            rate: summands.iter().map(OneSided::rate).fold(f64::INFINITY, f64::min),
            opening: summands.iter().map(OneSided::opening).fold(f64::INFINITY, f64::min),
            n: summands.iter().map(|s| s.count as f64).sum(),
            summands,
        }
    }

    /// Bound on the relative error of `atom`.
    pub(super) fn atom_error(&self) -> f64 {
        4.0 * ULP * (self.n + 1.0) * (1.0 + self.atom.max(1e-300).ln().abs())
    }

    /// E e^(−sT) 1{T > 0} for the whole sum T: ∏ (p + C(s))^count − ∏ p^count, the difference formed without
    /// cancellation.
    pub(super) fn transform(&self, s: Complex64, pivot: f64) -> Approximate {
        let (mut log, mut relative) = (Complex64::ZERO, 0.0);
        for summand in &self.summands {
            let part = summand.continuous(s, pivot);
            let whole = part.value + summand.atom;
            if whole.norm() < 1e-290 && part.error < 1e-290 {
                return Approximate { value: Complex64::ZERO, error: 1e-290 };
            }
            let count = summand.count as f64;
            let own = if self.atom > 0.0 { complex_ln_1p(part.value / summand.atom) } else { whole.ln() };
            log += count * own;
            relative += count * (part.error / whole.norm() + 2.0 * ULP * (1.0 + own.norm()));
        }
        if relative.is_nan() || relative > 1.0 {
            return Approximate { value: Complex64::ZERO, error: f64::INFINITY };
        }
        if !(log.re.is_finite() && log.im.is_finite()) {
            return Approximate { value: Complex64::ZERO, error: 1e-300 };
        }
        if self.atom > 0.0 {
            let value = self.atom * complex_exp_m1(log);
            // The error of the exponent acts on e^log, that of e^log − 1 on the value.
            let whole = self.atom * log.re.exp();
            return Approximate {
                value,
                error: whole * relative + 4.0 * ULP * value.norm() + value.norm() * self.atom_error(),
            };
        }
        let value = complex_exp(log);
        Approximate { value, error: value.norm() * (relative + 4.0 * ULP) }
    }
}

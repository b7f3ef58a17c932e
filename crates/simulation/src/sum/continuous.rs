//! Continuous laws whose sums stay in the family, in standard units: normal, gamma, inverse Gaussian.

use super::supremum::{crossing, widest};
use super::twofold::Twofold;
use super::{Distance, Route, Side, StandardizedSum, SumMoments};
use crate::figure::Figure;
use crate::special::elementary::ln_1p_minus_x;
use crate::special::erf::erfcx;
use crate::special::{gamma, normal};

/// Unit roundoff.
const U: f64 = f64::EPSILON / 2.0;

/// The shape of a continuous law; location and scale do not matter in standard units.
#[derive(Debug, Clone, Copy, PartialEq)]
#[allow(missing_docs, reason = "the parameters carry their field's usual names")]
pub(crate) enum Family {
    /// The normal law.
    Normal,
    /// x = shape + √shape·z.
    Gamma { shape: f64 },
    /// Mean 1, shape parameter `ratio` = λ/μ: w = 1 + z/√ratio.
    InverseGaussian { ratio: f64 },
}

/// √a in twice the precision.
fn root(a: f64) -> Twofold {
    let high = a.sqrt();
    Twofold { high, low: (-high).mul_add(high, a) / (2.0 * high) }
}

/// The Mills ratio P(Z > b)/φ(b) for b ≥ 0.
fn mills(b: f64) -> f64 {
    (std::f64::consts::PI / 2.0).sqrt() * erfcx(b * std::f64::consts::FRAC_1_SQRT_2)
}

/// The quantities of the inverse Gaussian at z: w = x/mean, a = z/√w and b = √(ratio/w)·(w + 1). They satisfy
/// b² − a² = 4·ratio, so that e^(2·ratio)·φ(b) = φ(a), which keeps the classical
/// F = Φ(a) + e^(2·ratio) Φ(−b) free of overflow. `None` at or below the lower end.
fn inverse_gaussian_at(ratio: f64, z: f64) -> Option<(f64, f64, f64)> {
    let w = root(ratio).plus(z).value() / ratio.sqrt();
    (w > 0.0).then(|| (w, z / w.sqrt(), (ratio / w).sqrt() * (w + 1.0)))
}

impl Family {
    /// The lower end of the support, in standard units.
    fn lower_end(self) -> f64 {
        match self {
            Self::Normal => f64::NEG_INFINITY,
            Self::Gamma { shape } => -shape.sqrt(),
            Self::InverseGaussian { ratio } => -ratio.sqrt(),
        }
    }

    /// x and what its rounding lost, for the gamma law.
    fn gamma_argument(shape: f64, z: f64) -> Twofold {
        let root = root(shape);
        Twofold::product(root.high, z).plus(shape).plus(root.low * z)
    }

    /// P(Z ≤ z).
    fn lower(self, z: f64) -> Figure {
        if z == f64::INFINITY {
            return Figure::bound(1.0, 0.0);
        }
        if z <= self.lower_end() {
            return Figure::bound(0.0, 0.0);
        }
        match self {
            Self::Normal => relative(normal::at_or_below(z), 8.0 * U),
            Self::Gamma { shape } => {
                let x = Self::gamma_argument(shape, z);
                if x.high <= 0.0 {
                    return Figure::bound(0.0, 0.0);
                }
                Self::gamma_figure(gamma::below(shape, x.high) + slope(shape, x))
            }
            Self::InverseGaussian { ratio } => {
                let Some((w, a, b)) = inverse_gaussian_at(ratio, z) else {
                    return Figure::bound(0.0, 0.0);
                };
                let value = normal::at_or_below(a) + normal::density(a) * mills(b);
                relative(value, Self::inverse_gaussian_error(w.min(1.0), a))
            }
        }
    }

    /// P(Z > z).
    fn upper(self, z: f64) -> Figure {
        if z == f64::INFINITY {
            return Figure::bound(0.0, 0.0);
        }
        if z <= self.lower_end() {
            return Figure::bound(1.0, 0.0);
        }
        match self {
            Self::Normal => relative(normal::above(z), 8.0 * U),
            Self::Gamma { shape } => {
                let x = Self::gamma_argument(shape, z);
                if x.high <= 0.0 {
                    return Figure::bound(1.0, 0.0);
                }
                Self::gamma_figure(gamma::above(shape, x.high) - slope(shape, x))
            }
            Self::InverseGaussian { ratio } => {
                let Some((w, a, b)) = inverse_gaussian_at(ratio, z) else {
                    return Figure::bound(1.0, 0.0);
                };
                let value = if a > 0.0 {
                    normal::density(a) * (mills(a) - mills(b))
                } else {
                    normal::above(a) - normal::density(a) * mills(b)
                };
                relative(value, Self::inverse_gaussian_error(w, a))
            }
        }
    }

    /// The incomplete gamma functions are good to 1e-13·(1 + |ln P|/100) (see [`gamma::below`]); the first-order
    /// term puts the rounding of x back, and half as much again is allowed for it.
    fn gamma_figure(value: f64) -> Figure {
        let value = value.clamp(0.0, 1.0);
        let logarithm = if value > 0.0 { value.ln().abs() } else { 0.0 };
        relative(value, 1.5e-13 * (1.0 + 0.01 * logarithm))
    }

    /// a and b carry ≤ 4 roundings, which φ(a) amplifies by a²; the difference of Mills ratios in the upper tail
    /// cancels by the factor (w − 1)/2; each Mills ratio and each normal probability adds a few units.
    fn inverse_gaussian_error(w: f64, a: f64) -> f64 {
        U * (40.0 + 5.0 * a * a + 10.0 * w)
    }

    /// The density of Z.
    fn density(self, z: f64) -> f64 {
        match self {
            Self::Normal => normal::density(z),
            _ if z <= self.lower_end() => 0.0,
            Self::Gamma { shape } => {
                let x = Self::gamma_argument(shape, z);
                gamma::density(shape, x.high.max(0.0)) * shape.sqrt()
            }
            Self::InverseGaussian { ratio } => match inverse_gaussian_at(ratio, z) {
                Some((w, a, _)) => normal::density(a) / (w * w.sqrt()),
                None => 0.0,
            },
        }
    }

    /// The points at which F − Φ can be widest: the lower end and where the densities cross.
    ///
    /// The logarithm g of the ratio of the densities has two stationary points only, hence at most three
    /// crossings, which they separate. Gamma: g = shape·[ln(1+u) − u] + z²/2 − ln(1+u) − δ(shape), u = z/√shape,
    /// with g′ = 0 exactly at z = ±1. Inverse Gaussian: g = −(3/2) ln(1+u) + ratio·u³/(2(1+u)), u = z/√ratio,
    /// with g′ = 0 where 2·ratio·u³ + 3·ratio·u² − 3u − 3 = 0, and a crossing at u = 0.
    fn candidates(self) -> Vec<f64> {
        match self {
            Self::Normal => Vec::new(),
            Self::Gamma { shape } => {
                let end = self.lower_end();
                let stirling = gamma::stirling_error(shape);
                let g = |z: f64| {
                    let u = (z / shape.sqrt()).max(-1.0);
                    if u <= -1.0 {
                        return if shape < 1.0 { f64::INFINITY } else { f64::NEG_INFINITY };
                    }
                    shape * ln_1p_minus_x(u) + 0.5 * z * z - libm::log1p(u) - stirling
                };
                let just_above = end + end.abs() * 4.0 * U;
                let mut points = vec![end];
                if end < -1.0 {
                    points.extend(crossing(g, just_above, -1.0));
                    points.extend(crossing(g, -1.0, 1.0));
                } else {
                    points.extend(crossing(g, just_above, 1.0));
                }
                points.extend(crossing(g, 1.0, beyond(g, 1.0)));
                points
            }
            Self::InverseGaussian { ratio } => {
                let cubic = |u: f64| 2.0 * ratio * u * u * u + 3.0 * ratio * u * u - 3.0 * u - 3.0;
                let scale = ratio.sqrt();
                let g = |z: f64| {
                    let w = root(ratio).plus(z).value() / scale;
                    if w <= 0.0 {
                        return f64::NEG_INFINITY;
                    }
                    let u = z / scale;
                    -1.5 * if w > 0.5 { libm::log1p(u) } else { w.ln() } + ratio * u * u * u / (2.0 * w)
                };
                let mut points = vec![0.0];
                if let Some(turn) = crossing(cubic, -1.0, 0.0) {
                    points.extend(crossing(g, -scale, turn * scale));
                }
                if let Some(turn) = crossing(cubic, 0.0, beyond(cubic, 1.0)) {
                    let turn = turn * scale;
                    points.extend(crossing(g, turn, beyond(g, turn)));
                }
                points
            }
        }
    }

    /// F(z) − Φ(z), from the smaller tails.
    fn gap(self, z: f64) -> Figure {
        let (value, error) = if z <= 0.0 {
            let lower = self.lower(z);
            (lower.value - normal::at_or_below(z), lower.error)
        } else {
            let upper = self.upper(z);
            (normal::above(z) - upper.value, upper.error)
        };
        Figure::bound(value, error + 8.0 * U)
    }
}

/// A figure with a relative error, and the smallest normal number for what underflows.
fn relative(value: f64, error: f64) -> Figure {
    Figure::bound(value, value * error + f64::MIN_POSITIVE)
}

/// f(x)·(what the rounding of x lost).
fn slope(shape: f64, x: Twofold) -> f64 {
    if x.low == 0.0 { 0.0 } else { gamma::density(shape, x.high) * x.low }
}

/// A point above `from` where g is positive.
fn beyond(g: impl Fn(f64) -> f64, from: f64) -> f64 {
    let mut step = 1.0;
    while step < 1e160 && g(from + step) <= 0.0 {
        step *= 2.0;
    }
    from + step
}

/// A standardized sum of one of the continuous families.
#[derive(Debug)]
pub(crate) struct Smooth {
    /// Shape of the law.
    pub family: Family,
    /// The sum decreases where the family's own variable increases.
    pub reflected: bool,
    /// Moments of the sum in its own units.
    pub moments: SumMoments,
    /// How.
    pub detail: String,
}

impl Smooth {
    /// z with P(Z ≤ z) = p (`lower`) or P(Z > z) = p, by bisection on the tail asked for; error: that of the
    /// probability over the density, and the last bracket.
    fn solve(&self, p: f64, lower: bool) -> Figure {
        let family = self.family;
        if family == Family::Normal {
            let z = if lower { normal::quantile(p) } else { normal::quantile_above(p) };
            return Figure::bound(z, 16.0 * U * z.abs().max(1e-3));
        }
        let excess = |z: f64| {
            if lower { family.lower(z).value - p } else { p - family.upper(z).value }
        };
        let low = family.lower_end();
        let high = beyond(excess, low);
        let z = crossing(excess, low, high).unwrap_or(low);
        let density = family.density(z);
        let figure = if lower { family.lower(z) } else { family.upper(z) };
        let spread = if density > 0.0 && density.is_finite() { figure.error / density } else { 0.0 };
        Figure::bound(z, 2.0 * spread + 8.0 * U * (z.abs() + low.abs().min(1.0)))
    }
}

impl StandardizedSum for Smooth {
    fn route(&self) -> Route {
        Route::ClosedForm
    }

    fn detail(&self) -> String {
        self.detail.clone()
    }

    fn moments(&self) -> SumMoments {
        self.moments
    }

    fn at_or_below(&self, z: f64) -> Figure {
        if self.reflected { self.family.upper(-z) } else { self.family.lower(z) }
    }

    fn below(&self, z: f64) -> Figure {
        self.at_or_below(z)
    }

    fn above(&self, z: f64) -> Figure {
        if self.reflected { self.family.lower(-z) } else { self.family.upper(z) }
    }

    fn at_or_above(&self, z: f64) -> Figure {
        self.above(z)
    }

    fn kolmogorov(&self) -> Distance {
        if self.family == Family::Normal {
            return Distance { kolmogorov: Figure::bound(0.0, 0.0), at_z: 0.0, side: Side::At };
        }
        let mut distance = widest(self.family.candidates(), |z| self.family.gap(z));
        if self.reflected {
            distance.at_z = -distance.at_z;
        }
        distance
    }

    fn quantile(&self, p: f64) -> Figure {
        let p = p.clamp(f64::MIN_POSITIVE, 1.0 - U);
        // P(Z ≤ z) = p; the reflected sum's lower tail is the family's upper one.
        let lower_tail = p <= 0.5;
        let tail = if lower_tail { p } else { 1.0 - p };
        let figure = self.solve(tail, lower_tail != self.reflected);
        if self.reflected { figure.map(|z| -z) } else { figure }
    }

    fn jumps(&self, _from: f64, _to: f64, _limit: usize) -> Option<Vec<f64>> {
        Some(Vec::new())
    }

    fn lattice_span(&self) -> Option<f64> {
        None
    }
}

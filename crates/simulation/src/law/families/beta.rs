//! The beta law on (low, high): density y^{a−1}(1 − y)^{b−1}/B(a, b) with y = (x − low)/(high − low).
//!
//! Moments (standard units): mean a/(a+b), variance ab/((a+b)²(a+b+1)), skewness
//! 2(b−a)√(a+b+1)/((a+b+2)√(ab)), excess kurtosis 6[(a−b)²(a+b+1) − ab(a+b+2)]/(ab(a+b+2)(a+b+3)).
//! Reference: DLMF §8.17. An end with exponent below 1 is put at y = 0 in a piece of its own, because only
//! near 0 can doubles resolve the singularity.

use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::density::{Density, StandardMoments};
use crate::law::form::Form;
use crate::law::quadrature::{grade_from, quantile_points, tidy};
use crate::special;
use num_complex::Complex64;
use rand_distr::Distribution;
use std::f64::consts::FRAC_PI_2;
use std::sync::Arc;

/// The beta density on (0, 1).
#[derive(Debug)]
struct Beta {
    a: f64,
    b: f64,
    ln_constant: f64,
    sampler: Option<rand_distr::Beta<f64>>,
}

/// The density with exponents `a` at 0 and `b` at 1.
pub(super) fn density(a: f64, b: f64) -> Arc<dyn Density> {
    if a == 1.0 && b == 1.0 {
        return Arc::new(super::uniform::Uniform);
    }
    let ln_constant =
        special::gamma::ln_gamma(a + b) - special::gamma::ln_gamma(a) - special::gamma::ln_gamma(b);
    Arc::new(Beta { a, b, ln_constant, sampler: rand_distr::Beta::new(a, b).ok() })
}

pub(super) fn compile(
    a: f64,
    b: f64,
    low: Option<f64>,
    high: Option<f64>,
    checks: &mut Checks,
) -> Option<Form> {
    let (low, high) = (low.unwrap_or(0.0), high.unwrap_or(1.0));
    if !(checks.within("a", a, 1e-2, 1e8)
        & checks.within("b", b, 1e-2, 1e8)
        & checks.ordered("low", low, "high", high))
    {
        return None;
    }
    let width = high - low;
    if b >= 1.0 {
        return Some(Form::piece(Piece::whole(density(a, b), 1.0, low, width)));
    }
    if a >= 1.0 {
        return Some(Form::piece(Piece::whole(density(b, a), 1.0, high, -width)));
    }
    let lower = Piece { high: 0.5, ..Piece::whole(density(a, b), 1.0, low, width) };
    let upper = Piece { high: 0.5, ..Piece::whole(density(b, a), 1.0, high, -width) };
    Some(Form::pieces(vec![lower, upper]))
}

impl Density for Beta {
    fn name(&self) -> &'static str {
        "beta"
    }
    fn support(&self) -> (f64, f64) {
        (0.0, 1.0)
    }
    fn density(&self, x: f64) -> f64 {
        if !(0.0..=1.0).contains(&x) {
            0.0
        } else if (x == 0.0 && self.a < 1.0) || (x == 1.0 && self.b < 1.0) {
            f64::INFINITY
        } else if self.b == 1.0 {
            self.a * x.powf(self.a - 1.0)
        } else if self.a == 1.0 {
            self.b * ((self.b - 1.0) * (-x).ln_1p()).exp()
        } else {
            special::beta::density(self.a, self.b, x)
        }
    }
    fn at_or_below(&self, x: f64) -> f64 {
        if x <= 0.0 {
            0.0
        } else if x >= 1.0 {
            1.0
        } else if self.b == 1.0 {
            x.powf(self.a)
        } else if self.a == 1.0 {
            -(self.b * (-x).ln_1p()).exp_m1()
        } else {
            special::beta::below(self.a, self.b, x)
        }
    }
    fn above(&self, x: f64) -> f64 {
        if x <= 0.0 {
            1.0
        } else if x >= 1.0 {
            0.0
        } else if self.b == 1.0 {
            -(self.a * x.ln()).exp_m1()
        } else if self.a == 1.0 {
            (self.b * (-x).ln_1p()).exp()
        } else {
            special::beta::above(self.a, self.b, x)
        }
    }
    fn quantile(&self, p: f64) -> f64 {
        if self.b == 1.0 {
            p.powf(1.0 / self.a)
        } else if self.a == 1.0 {
            -((-p).ln_1p() / self.b).exp_m1()
        } else {
            special::beta::quantile(self.a, self.b, p)
        }
    }
    fn quantile_above(&self, q: f64) -> f64 {
        if self.b == 1.0 {
            ((-q).ln_1p() / self.a).exp()
        } else if self.a == 1.0 {
            -(q.ln() / self.b).exp_m1()
        } else {
            special::beta::quantile_above(self.a, self.b, q)
        }
    }
    fn density_complex(&self, x: Complex64, _near: f64) -> Complex64 {
        let power = |z: Complex64, exponent: f64| {
            if exponent == 0.0 {
                Complex64::new(1.0, 0.0)
            } else if exponent == 1.0 {
                z
            } else if z.norm() < 1e-300 {
                Complex64::new(0.0, 0.0)
            } else {
                (exponent * z.ln()).exp()
            }
        };
        if self.a == 1.0 || self.b == 1.0 {
            // One exponent 1 leaves the other as the constant.
            return power(x, self.a - 1.0) * power(1.0 - x, self.b - 1.0) * (self.a * self.b);
        }
        if x.norm() < 1e-300 || (1.0 - x).norm() < 1e-300 {
            return Complex64::new(0.0, 0.0);
        }
        ((self.a - 1.0) * x.ln() + (self.b - 1.0) * (1.0 - x).ln() + self.ln_constant).exp()
    }
    /// Analytic in the open upper and lower half-planes, grows as a power.
    fn rotation_up(&self) -> f64 {
        FRAC_PI_2
    }
    fn rotation_down(&self) -> f64 {
        FRAC_PI_2
    }
    fn log_laplace(&self, _s: Complex64) -> Option<Complex64> {
        None
    }
    fn skeleton(&self) -> Vec<f64> {
        let mut points =
            quantile_points(|p| self.quantile(p).max(1e-290), |q| self.quantile_above(q).max(1e-290));
        points.retain(|&y| y < 1.0);
        let points = grade_from(&points, 0.0, 3.0);
        // Graded towards 1 as well, by reflection.
        let mirrored: Vec<f64> = points.iter().rev().map(|y| 1.0 - y).filter(|&y| y > 0.0).collect();
        let graded = grade_from(&tidy(mirrored), 0.0, 3.0);
        let mut all = points;
        all.extend(graded.into_iter().map(|y| 1.0 - y).filter(|&y| y > 0.25 && y < 1.0));
        tidy(all)
    }
    fn lower_exponent(&self) -> f64 {
        self.a
    }
    fn upper_exponent(&self) -> f64 {
        self.b
    }
    fn upper_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_tail_index(&self) -> f64 {
        f64::INFINITY
    }
    fn upper_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn lower_exponential_rate(&self) -> f64 {
        f64::INFINITY
    }
    fn standard_moments(&self) -> Option<StandardMoments> {
        let (a, b) = (self.a, self.b);
        let (sum, product) = (a + b, a * b);
        let mean = a / sum;
        let sd = (mean * (b / sum) / (sum + 1.0)).sqrt();
        let skewness = 2.0 * (b - a) * (sum + 1.0).sqrt() / ((sum + 2.0) * product.sqrt());
        let excess = 6.0 * ((a - b) * (a - b) * (sum + 1.0) - product * (sum + 2.0))
            / (product * (sum + 2.0) * (sum + 3.0));
        Some(StandardMoments::finite(mean, sd, skewness, excess))
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        match &self.sampler {
            Some(sampler) if self.a != 1.0 && self.b != 1.0 => sampler.sample(random),
            _ => super::by_inversion(self, random),
        }
    }
}

//! Tables of the infinite (or very long) discrete families, and the same families without a table.

use crate::law::density::StandardMoments;
use crate::law::form::{Form, MOST_ATOMS};
use crate::law::opaque::OpaqueLaw;
use crate::law::{Atom, ClosedFamily};
use crate::special;
use rand::RngExt;
use rand_distr::Distribution;
use std::sync::Arc;

/// Tables this short are carried on to the smallest doubles, longer ones only to 1e-40.
const CHEAP: usize = 1 << 14;

/// How a family is tabulated.
pub(super) struct Recipe<'a> {
    /// The family, in counts.
    pub(super) family: ClosedFamily,
    /// The most probable count.
    pub(super) mode: u64,
    /// The largest count, if there is one.
    pub(super) largest: Option<u64>,
    /// P(X = k), relative error a few units in the last place.
    pub(super) mass: &'a dyn Fn(u64) -> f64,
    /// P(X = k + 1)/P(X = k).
    pub(super) ratio: &'a dyn Fn(u64) -> f64,
    /// An upper bound on every later ratio above the mode.
    pub(super) ratio_bound: &'a dyn Fn(u64) -> f64,
    /// The moments.
    pub(super) moments: StandardMoments,
}

/// The table, from the mode outwards until what is left out is negligible; without a table where that is too
/// long.
pub(super) fn tabulate(recipe: &Recipe) -> Form {
    let form = match table(recipe) {
        Some((atoms, missing_mass)) => Form::atoms(atoms, missing_mass),
        None => Form::opaque(Arc::new(LongTable {
            family: recipe.family,
            moments: recipe.moments,
            largest: recipe.largest,
        })),
    };
    form.with_closed_form(recipe.family, 0.0, 1.0).with_moments(recipe.moments)
}

fn table(recipe: &Recipe) -> Option<(Vec<Atom>, f64)> {
    let negligible = |mass: f64, count: usize| mass < if count < CHEAP { 1e-305 } else { 1e-40 };
    let mut missing_mass = 0.0;
    let mut upper = Vec::new();
    let mut k = recipe.mode;
    let mut mass = (recipe.mass)(k);
    loop {
        if mass > 0.0 {
            upper.push(Atom { value: k as f64, mass });
        }
        if recipe.largest == Some(k) {
            break;
        }
        let bound = (recipe.ratio_bound)(k);
        if negligible(mass, upper.len()) && bound < 1.0 {
            missing_mass += mass * bound / (1.0 - bound);
            break;
        }
        if upper.len() > MOST_ATOMS {
            return None;
        }
        // Ratios are exact to an ulp each; a fresh start now and then keeps their product so.
        let step = (recipe.ratio)(k);
        k += 1;
        mass = if upper.len() % 16 == 0 { (recipe.mass)(k) } else { mass * step };
    }
    let mut lower = Vec::new();
    let mut k = recipe.mode;
    let mut mass = (recipe.mass)(k);
    while k > 0 {
        let step = (recipe.ratio)(k - 1);
        if negligible(mass, lower.len()) && step > 1.0 {
            missing_mass += mass / (step - 1.0);
            break;
        }
        if upper.len() + lower.len() > MOST_ATOMS {
            return None;
        }
        k -= 1;
        mass = if lower.len() % 16 == 15 { (recipe.mass)(k) } else { mass / step };
        if mass > 0.0 {
            lower.push(Atom { value: k as f64, mass });
        }
    }
    lower.reverse();
    lower.extend(upper);
    (missing_mass <= 1e-30).then_some((lower, missing_mass))
}

/// A discrete family whose table would be too long: sums by closed form, draws by the library's samplers.
#[derive(Debug)]
struct LongTable {
    family: ClosedFamily,
    moments: StandardMoments,
    largest: Option<u64>,
}

impl LongTable {
    fn at_or_below_count(&self, k: u64) -> f64 {
        match self.family {
            ClosedFamily::Binomial { trials, p } => special::discrete::binomial_at_or_below(trials, p, k),
            ClosedFamily::Poisson { rate } => special::discrete::poisson_at_or_below(rate, k),
            ClosedFamily::NegativeBinomial { size, p } => {
                special::discrete::negative_binomial_at_or_below(size, p, k)
            }
            _ => 0.0,
        }
    }

    fn above_count(&self, k: u64) -> f64 {
        match self.family {
            ClosedFamily::Binomial { trials, p } => special::discrete::binomial_above(trials, p, k),
            ClosedFamily::Poisson { rate } => special::discrete::poisson_above(rate, k),
            ClosedFamily::NegativeBinomial { size, p } => {
                special::discrete::negative_binomial_above(size, p, k)
            }
            _ => 0.0,
        }
    }

    /// The largest count k with k ≤ x (or k < x), `None` below 0. A count within rounding of x is x.
    fn last_count(x: f64, strictly: bool) -> Option<u64> {
        let nearest = x.round();
        let on_count = (x - nearest).abs() <= 4.0 * f64::EPSILON * x.abs();
        let k = if on_count && strictly {
            nearest - 1.0
        } else if on_count {
            nearest
        } else {
            x.floor()
        };
        (k >= 0.0).then_some(k as u64)
    }
}

impl OpaqueLaw for LongTable {
    fn reason(&self) -> String {
        format!("its table would need more than {MOST_ATOMS} values")
    }
    fn has_closed_form(&self) -> bool {
        true
    }
    fn moments(&self) -> StandardMoments {
        self.moments
    }
    fn support(&self) -> (f64, f64) {
        (0.0, self.largest.map_or(f64::INFINITY, |k| k as f64))
    }
    fn at_or_below(&self, x: f64, strictly: bool) -> f64 {
        Self::last_count(x, strictly).map_or(0.0, |k| self.at_or_below_count(k))
    }
    fn above(&self, x: f64, or_equal: bool) -> f64 {
        Self::last_count(x, or_equal).map_or(1.0, |k| self.above_count(k))
    }
    fn tail_indices(&self) -> (f64, f64) {
        (f64::INFINITY, f64::INFINITY)
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        match self.family {
            ClosedFamily::Binomial { trials, p } => {
                rand_distr::Binomial::new(trials, p).map_or(self.mean(), |law| law.sample(random) as f64)
            }
            ClosedFamily::Poisson { rate } => poisson_draw(rate, random),
            // The number of failures is a Poisson number whose rate is a gamma number.
            ClosedFamily::NegativeBinomial { size, p } if size != 1.0 => {
                rand_distr::Gamma::new(size, (1.0 - p) / p)
                    .map_or(self.mean(), |law| poisson_draw(law.sample(random), random))
            }
            ClosedFamily::NegativeBinomial { p, .. } => {
                let u: f64 = random.sample(rand::distr::OpenClosed01);
                (u.ln() / (-p).ln_1p()).floor()
            }
            _ => self.mean(),
        }
    }
}

impl LongTable {
    fn mean(&self) -> f64 {
        self.moments.mean.unwrap_or(0.0)
    }
}

fn poisson_draw(rate: f64, random: &mut dyn rand::Rng) -> f64 {
    if rate > 1e15 {
        // Beyond the integers a double can hold one by one the normal limit is exact to the last place.
        let z: f64 = rand_distr::StandardNormal.sample(random);
        return (rate + rate.sqrt() * z).round();
    }
    rand_distr::Poisson::new(rate).map_or(0.0, |law| law.sample(random))
}

//! What all sums of one lattice law have in common, whatever their number of summands: computed once, kept.
//!
//! The reports ask for the same law at hundreds of n. Its cumulant generating function at the tilts that bound
//! windows, its characteristic function at the frequencies of common cycles, and the proof that this stays away
//! from 1 do not depend on n.

use super::plans;
use super::power::log_characteristic;
use super::summand::Part;
use num_complex::Complex64;
use std::collections::{HashMap, VecDeque};
use std::f64::consts::TAU;
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

/// The logarithm of |φ|, the argument, and the error in units in the last place, at one frequency.
pub(crate) type Logarithm = (f64, f64, f64);

/// What is kept of one law.
#[derive(Debug, Default)]
pub(crate) struct Shared {
    /// ln E e^(θ(X − E X)) at θ = ±[`RATIO`]^i, by i and sign.
    cumulants: Mutex<HashMap<(i32, bool), f64>>,
    /// The characteristic function at 2πj/period, j = 1, 2, …, by period (powers of two only).
    frequencies: Mutex<HashMap<i64, Arc<Vec<Logarithm>>>>,
    /// Bounds on |φ|².
    squares: OnceLock<Arc<Squares>>,
}

/// Ratio of neighbouring tilts.
const RATIO: f64 = 1.15;

/// Laws remembered, and the atoms they may have in all.
const REMEMBERED: usize = 8;
const MOST_ATOMS: usize = 1 << 21;

static KNOWN: Mutex<VecDeque<Part>> = Mutex::new(VecDeque::new());

/// Gives each part what is known of its law from earlier sums.
pub(crate) fn remember(parts: &mut [Part]) {
    let mut known = KNOWN.lock().unwrap_or_else(PoisonError::into_inner);
    for part in parts {
        let same = |other: &Part| {
            other.anchor == part.anchor && other.offsets == part.offsets && other.masses == part.masses
        };
        let found = match known.iter().position(same) {
            Some(place) => known.remove(place),
            None => Some(part.clone()),
        };
        if let Some(found) = found {
            part.shared = Arc::clone(&found.shared);
            known.push_front(found);
        }
        while known.len() > REMEMBERED
            || known.len() > 1 && known.iter().map(|part| part.offsets.len()).sum::<usize>() > MOST_ATOMS
        {
            known.pop_back();
        }
    }
}

/// The tilt nearest to θ > 0 at which cumulants are kept.
pub(crate) fn nearest_tilt(theta: f64) -> i32 {
    (theta.ln() / RATIO.ln()).round().clamp(-1e6, 1e6) as i32
}

/// Tilt i.
pub(crate) fn tilt(i: i32) -> f64 {
    (f64::from(i) * RATIO.ln()).exp()
}

impl Part {
    /// ln E e^(θ(X − E X)) of one copy at θ = ± tilt i.
    pub fn cumulant_at(&self, i: i32, upper: bool) -> f64 {
        let known = |kept: &Mutex<HashMap<_, f64>>| {
            kept.lock().unwrap_or_else(PoisonError::into_inner).get(&(i, upper)).copied()
        };
        if let Some(value) = known(&self.shared.cumulants) {
            return value;
        }
        let theta = if upper { tilt(i) } else { -tilt(i) };
        let value = self.cumulant(theta);
        self.shared.cumulants.lock().unwrap_or_else(PoisonError::into_inner).insert((i, upper), value);
        value
    }

    /// The characteristic function of one copy about its mean at 2πj/period for j = 1, …, `last` at least.
    pub fn logarithms(&self, period: i64, last: usize) -> Arc<Vec<Logarithm>> {
        let lock = || self.shared.frequencies.lock().unwrap_or_else(PoisonError::into_inner);
        let keep = period.count_ones() == 1;
        let mut list = Vec::new();
        if keep && let Some(found) = lock().get(&period) {
            if found.len() >= last {
                return Arc::clone(found);
            }
            list.clone_from(found);
        }
        // A few more than asked for: the next n asks for a few more.
        let wanted = if keep { last + last / 8 } else { last };
        for j in list.len() + 1..=wanted {
            list.push(log_characteristic(self, TAU * j as f64 / period as f64));
        }
        let list = Arc::new(list);
        if keep {
            lock().insert(period, Arc::clone(&list));
        }
        list
    }

    /// Bounds on |φ|² from a transform of at least `least` points.
    pub fn squares(&self, least: usize) -> Arc<Squares> {
        let own = self.shared.squares.get_or_init(|| Arc::new(Squares::new(self, fine_enough(self))));
        if own.length >= least { Arc::clone(own) } else { Arc::new(Squares::new(self, least)) }
    }
}

/// A length of transform whose steps are short against the wiggles of |φ|².
pub(crate) fn fine_enough(part: &Part) -> usize {
    let sd = part.central_moments().0.sqrt();
    ((STEPS * sd).clamp(1024.0, LONGEST as f64) as usize).next_power_of_two()
}

/// Steps per unit of 1/sd, times 2π: a step of 0.02/sd.
const STEPS: f64 = 314.0;

/// Longest transform spent on bounds.
const LONGEST: usize = 1 << 20;

/// Upper bounds on |φ(t)|² for all t.
///
/// |φ(t)|² = E cos(t(X − X′)), X′ a copy of X. Its second derivative is at most E(X − X′)² = 2σ², so between
/// two points a step Δ apart it exceeds the larger of the two values by at most 2σ²Δ²/8.
#[derive(Debug)]
pub(crate) struct Squares {
    /// Points of the transform: the step is 2π/length.
    pub length: usize,
    /// For each step j from 2πj/length on, a bound on |φ|² in it.
    steps: Vec<f64>,
    /// For each step, the largest bound from there on up to π.
    from_here: Vec<f64>,
}

impl Squares {
    fn new(part: &Part, length: usize) -> Self {
        let _alone = plans::alone(length);
        let forward = plans::plan(length).forward;
        let mut masses = vec![0.0; length];
        for (&offset, &mass) in part.offsets.iter().zip(&part.masses) {
            masses[offset.rem_euclid(length as i64) as usize] += mass;
        }
        let mut spectrum = vec![Complex64::default(); length / 2 + 1];
        // The lengths are the planned ones, so the transform cannot fail.
        let _ = forward.process(&mut masses, &mut spectrum);
        let step = TAU / length as f64;
        let slack = 0.25 * part.central_moments().0 * step * step + 1e-12;
        let steps: Vec<f64> = spectrum
            .windows(2)
            .map(|ends| (ends[0].norm_sqr().max(ends[1].norm_sqr()) + slack).min(1.0))
            .collect();
        let mut from_here = steps.clone();
        for j in (0..from_here.len() - 1).rev() {
            from_here[j] = from_here[j].max(from_here[j + 1]);
        }
        Self { length, steps, from_here }
    }

    /// The first step from which on, up to π, all bounds lie below `limit`; the number of steps if there is none.
    pub fn first_below(&self, limit: f64) -> usize {
        self.from_here.partition_point(|&bound| bound > limit)
    }

    /// The bound in step j of a grid of `length` points, a multiple of the own one or a divisor of it.
    pub fn bounds(&self) -> &[f64] {
        &self.steps
    }
}

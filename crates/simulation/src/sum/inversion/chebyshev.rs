//! Piecewise Chebyshev interpolation of functions that are dear to evaluate, refined where needed.

use num_complex::Complex64;
use rayon::prelude::*;
use std::sync::OnceLock;

/// Nodes per panel.
const NODES: usize = 24;
/// Halvings of an octave before its error is accepted as it is.
const OCTAVE_DEPTH: u32 = 12;

/// What is interpolated: a value and a bound on its error.
pub(super) type Function<'a> = dyn Fn(f64) -> (Complex64, f64) + Sync + 'a;

/// When the last coefficients of a panel are small enough.
#[derive(Debug, Clone, Copy)]
struct Wanted {
    /// Relative to the largest value on the panel.
    tolerance: f64,
    /// Absolute.
    floor: f64,
}

/// A Chebyshev series on one interval of its variable.
#[derive(Debug, Clone)]
struct Panel {
    high: f64,
    middle: f64,
    half: f64,
    coefficients: Vec<Complex64>,
}

impl Panel {
    fn evaluate(&self, x: f64) -> Complex64 {
        let u = ((x - self.middle) / self.half).clamp(-1.0, 1.0);
        let (mut b1, mut b2) = (Complex64::ZERO, Complex64::ZERO);
        for c in self.coefficients[1..].iter().rev() {
            let b0 = c + 2.0 * u * b1 - b2;
            b2 = b1;
            b1 = b0;
        }
        self.coefficients[0] + u * b1 - b2
    }
}

/// The interpolant on one interval: panels in ascending order, and the largest error met.
#[derive(Debug, Clone)]
pub(super) struct Interpolant {
    panels: Vec<Panel>,
    /// Estimated absolute error of interpolation and function together.
    pub(super) error: f64,
}

impl Interpolant {
    /// Interpolates f on [low, high]: panels are halved until the last coefficients fall below
    /// `tolerance` × the largest value on the panel, `floor` or the function's own error, whichever is largest.
    pub(super) fn build(
        f: &Function,
        low: f64,
        high: f64,
        tolerance: f64,
        floor: f64,
        halvings: u32,
    ) -> Self {
        let mut result = Self { panels: Vec::new(), error: 0.0 };
        result.extend(f, low, high, Wanted { tolerance, floor }, halvings, f64::INFINITY);
        result
    }

    /// `before` is the size of the last coefficients on the panel that was halved: on a smooth function they
    /// fall by many digits, so where they hardly fall they are the function's own noise, and more panels would
    /// only follow it.
    fn extend(&mut self, f: &Function, low: f64, high: f64, goal: Wanted, halvings: u32, before: f64) {
        let (middle, half) = (0.5 * (low + high), 0.5 * (high - low));
        let evaluated: Vec<(Complex64, f64)> = (0..NODES)
            .map(|j| f(middle + half * (std::f64::consts::PI * (j as f64 + 0.5) / NODES as f64).cos()))
            .collect();
        let noise = evaluated.iter().map(|v| v.1).fold(0.0, f64::max);
        let values: Vec<Complex64> = evaluated.into_iter().map(|v| v.0).collect();
        let mut coefficients: Vec<Complex64> = (0..NODES)
            .map(|k| {
                let sum: Complex64 = values
                    .iter()
                    .enumerate()
                    .map(|(j, v)| {
                        let turn = (k * (2 * j + 1)) % (4 * NODES);
                        v * (std::f64::consts::PI * turn as f64 / (2 * NODES) as f64).cos()
                    })
                    .sum();
                sum * (2.0 / NODES as f64)
            })
            .collect();
        coefficients[0] *= 0.5;
        let largest = values.iter().map(|v| v.norm()).fold(0.0, f64::max);
        let tail = coefficients[NODES - 3..].iter().map(|c| c.norm()).fold(0.0, f64::max);
        let wanted = (goal.tolerance * largest).max(goal.floor).max(noise);
        let too_small = half <= 1e-13 * middle.abs();
        let is_noise = tail > 0.1 * before && tail < 1e-11 * largest;
        if tail > wanted && halvings > 0 && !too_small && !is_noise {
            self.extend(f, low, middle, goal, halvings - 1, tail);
            self.extend(f, middle, high, goal, halvings - 1, tail);
            return;
        }
        self.error = self.error.max(4.0 * tail + 2.0 * f64::EPSILON * largest + 2.0 * noise);
        let needed = coefficients.iter().rposition(|c| c.norm() > 0.05 * wanted).map_or(1, |k| k + 1);
        coefficients.truncate(needed.max(1));
        self.panels.push(Panel { high, middle, half, coefficients });
    }

    /// Appends an interpolant of the adjoining interval above.
    pub(super) fn append(&mut self, above: Self) {
        self.panels.extend(above.panels);
        self.error = self.error.max(above.error);
    }

    /// The interpolated value; x outside the interval is taken at its end.
    pub(super) fn evaluate(&self, x: f64) -> Complex64 {
        let k = self.panels.partition_point(|p| p.high < x).min(self.panels.len() - 1);
        self.panels[k].evaluate(x)
    }
}

/// A function of t > 0, interpolated in ln t, octave by octave, each octave when it is first asked for.
#[derive(Debug)]
pub(super) struct Octaves {
    lowest: i32,
    octaves: Vec<OnceLock<Interpolant>>,
}

impl Octaves {
    /// Octaves [2^k, 2^(k+1)] for k from `lowest` to `highest`.
    pub(super) fn new(lowest: i32, highest: i32) -> Self {
        let count = (highest - lowest + 1).max(1) as usize;
        Self { lowest, octaves: (0..count).map(|_| OnceLock::new()).collect() }
    }

    /// Fills the octaves that meet [low, high], side by side. Filling one octave runs on one thread only, so
    /// that a thread which waits for it never has to help with it.
    pub(super) fn prepare(&self, f: &Function, low: f64, high: f64, tolerance: f64) {
        let (first, last) = (low.log2().floor() as i32, high.log2().floor() as i32);
        (first..=last).into_par_iter().for_each(|k| {
            self.evaluate(f, f64::from(k).exp2() * 1.5, tolerance);
        });
    }

    /// The value at t and the error of its octave; f is called where the octave is new.
    pub(super) fn evaluate(&self, f: &Function, t: f64, tolerance: f64) -> (Complex64, f64) {
        let index = (t.log2().floor() as i32 - self.lowest).clamp(0, self.octaves.len() as i32 - 1);
        let table = self.octaves[index as usize].get_or_init(|| {
            let k = f64::from(index + self.lowest);
            let low = k * std::f64::consts::LN_2;
            Interpolant::build(
                &|x: f64| f(x.exp()),
                low,
                low + std::f64::consts::LN_2,
                tolerance,
                0.0,
                OCTAVE_DEPTH,
            )
        });
        (table.evaluate(t.ln()), table.error)
    }
}

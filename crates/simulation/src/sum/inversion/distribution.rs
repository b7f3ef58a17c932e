//! The distribution function put together from its parts, with its error and its supremum.

use super::atoms::{PointMasses, snap};
use super::direct::{ContinuousPart, PairSum};
use super::fourier::FourierPart;
use crate::special::normal;
use std::sync::Arc;

/// A step function.
#[derive(Debug)]
pub(super) struct Steps {
    points: Vec<f64>,
    /// `running[k]` is the mass of the first k points.
    running: Vec<f64>,
}

impl Steps {
    /// From point masses in ascending order.
    pub(super) fn new(masses: PointMasses) -> Self {
        let mut running = Vec::with_capacity(masses.points.len() + 1);
        let mut sum = 0.0;
        running.push(0.0);
        for m in &masses.masses {
            sum += m;
            running.push(sum);
        }
        Self { points: masses.points, running }
    }

    fn at_or_below(&self, z: f64) -> f64 {
        self.running[self.points.partition_point(|p| *p <= z + snap(z))]
    }

    fn below(&self, z: f64) -> f64 {
        self.running[self.points.partition_point(|p| *p < z - snap(z))]
    }

    /// Points inside [from, to].
    pub(super) fn inside(&self, from: f64, to: f64) -> &[f64] {
        let a = self.points.partition_point(|p| *p < from);
        let b = self.points.partition_point(|p| *p <= to);
        &self.points[a..b.max(a)]
    }
}

/// One continuous summand beside atoms, or two.
#[derive(Debug)]
pub(super) enum Few {
    /// One.
    One(ContinuousPart),
    /// Two.
    Two(Arc<PairSum>),
}

/// All parts of a distribution function.
#[derive(Debug)]
pub(super) struct Distribution {
    /// All summands on atoms.
    pub(super) steps: Option<Steps>,
    /// One or two summands continuous; the point masses carry the probability of the rest.
    pub(super) few: Vec<(PointMasses, Few)>,
    /// The rest.
    pub(super) fourier: Option<FourierPart>,
    /// Window.
    pub(super) low: f64,
    /// Its upper end.
    pub(super) high: f64,
    /// Error inside the window.
    pub(super) error: f64,
}

impl Distribution {
    fn smooth(&self, z: f64) -> f64 {
        let mut sum = self.fourier.as_ref().map_or(0.0, |f| f.evaluate(z));
        for (masses, few) in &self.few {
            for (point, mass) in masses.points.iter().zip(&masses.masses) {
                sum += mass
                    * match few {
                        Few::One(part) => part.at_or_below(z - point),
                        Few::Two(pair) => pair.at_or_below(z - point),
                    };
            }
        }
        sum
    }

    /// P(Z ≤ z), not clamped.
    pub(super) fn at_or_below(&self, z: f64) -> f64 {
        self.smooth(z) + self.steps.as_ref().map_or(0.0, |s| s.at_or_below(z))
    }

    /// P(Z < z), not clamped.
    pub(super) fn below(&self, z: f64) -> f64 {
        self.smooth(z) + self.steps.as_ref().map_or(0.0, |s| s.below(z))
    }

    /// Jumps and corners inside the window, ascending; at most `limit` of each kind.
    fn special_points(&self, limit: usize) -> Vec<f64> {
        let mut points: Vec<f64> = Vec::new();
        if let Some(steps) = &self.steps {
            points.extend(steps.inside(self.low, self.high));
        }
        for (masses, few) in &self.few {
            let corners = match few {
                Few::One(part) => part.corners(),
                Few::Two(pair) => pair.corners.clone(),
            };
            if masses.points.len() * corners.len() > limit {
                continue;
            }
            for point in &masses.points {
                points.extend(corners.iter().map(|c| point + c).filter(|z| *z > self.low && *z < self.high));
            }
        }
        points
    }

    /// sup|F − Φ|: (value, where, whether just below).
    ///
    /// F − Φ is scanned on both sides of every jump and corner and on a grid between them; every local extreme
    /// that could exceed the best value found is refined by golden section.
    pub(super) fn supremum(&self) -> (f64, f64, bool) {
        let step = match &self.fourier {
            Some(f) => f.step().max((self.high - self.low) / 40_000.0),
            None => (self.high - self.low) / 4_000.0,
        }
        .min(0.02);
        let count = ((self.high - self.low) / step).ceil() as usize;
        let mut points: Vec<f64> = (0..=count).map(|k| (self.low + step * k as f64).min(self.high)).collect();
        points.extend(self.special_points(50_000));
        points.sort_by(f64::total_cmp);
        points.dedup();
        // Two values per point: just below, and at.
        let gaps: Vec<(f64, f64)> = points
            .iter()
            .map(|z| {
                let smooth = self.smooth(*z) - normal::at_or_below(*z);
                match &self.steps {
                    Some(s) => (smooth + s.below(*z), smooth + s.at_or_below(*z)),
                    None => (smooth, smooth),
                }
            })
            .collect();
        let (mut best, mut at, mut before) = (-1.0, 0.0, false);
        for (z, (below, here)) in points.iter().zip(&gaps) {
            for (value, side) in [(here.abs(), false), (below.abs(), true)] {
                if value > best {
                    (best, at, before) = (value, *z, side);
                }
            }
        }
        // Local extremes of the grid, by how promising they are.
        let curvature = self.fourier.as_ref().map_or(1.0, FourierPart::curvature) + 0.25;
        let slack = (0.5 * curvature * step * step).min(0.05);
        let mut brackets: Vec<(f64, usize, f64)> = Vec::new();
        for k in 0..points.len() {
            for sign in [1.0, -1.0] {
                let (below, here) = (sign * gaps[k].0, sign * gaps[k].1);
                let left = if k > 0 { sign * gaps[k - 1].1 } else { f64::NEG_INFINITY };
                let right = if k + 1 < points.len() { sign * gaps[k + 1].0 } else { f64::NEG_INFINITY };
                let top = here.max(below);
                if top >= left && top >= right && top + slack > best {
                    brackets.push((top, k, sign));
                }
            }
        }
        brackets.sort_by(|a, b| b.0.total_cmp(&a.0));
        for (_, k, sign) in brackets.into_iter().take(48) {
            let (left, right) = (k.saturating_sub(1), (k + 1).min(points.len() - 1));
            let smooth_here = gaps[k].0 == gaps[k].1;
            let intervals =
                if smooth_here { [Some((left, right)), None] } else { [Some((left, k)), Some((k, right))] };
            for (a, b) in intervals.into_iter().flatten().filter(|(a, b)| a < b) {
                // Strictly inside there is no jump, and no other grid point but a smooth one.
                let steps = self.steps.as_ref().map_or(0.0, |s| s.at_or_below(points[a]));
                let gap = |z: f64| sign * (self.smooth(z) + steps - normal::at_or_below(z));
                let (z, value) = golden(&gap, points[a], points[b]);
                if value > best {
                    (best, at, before) = (value, z, false);
                }
            }
        }
        (best, at, before)
    }
}

/// The largest value of a unimodal function on [low, high].
fn golden(f: &dyn Fn(f64) -> f64, low: f64, high: f64) -> (f64, f64) {
    const RATIO: f64 = 0.618_033_988_749_894_9;
    let (mut a, mut b) = (low, high);
    let (mut x, mut y) = (b - RATIO * (b - a), a + RATIO * (b - a));
    let (mut fx, mut fy) = (f(x), f(y));
    for _ in 0..60 {
        if (b - a).abs() < 1e-7 {
            break;
        }
        if fx >= fy {
            b = y;
            (y, fy) = (x, fx);
            x = b - RATIO * (b - a);
            fx = f(x);
        } else {
            a = x;
            (x, fx) = (y, fy);
            y = a + RATIO * (b - a);
            fy = f(y);
        }
    }
    if fx >= fy { (x, fx) } else { (y, fy) }
}

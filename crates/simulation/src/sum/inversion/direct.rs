//! The parts of a sum in which one or two summands are continuous, in real space.
//!
//! Their transforms fall too slowly to be inverted, but the distributions are known: one continuous summand has
//! its own distribution function; two have ∫ F_V(z − y) dF_U(y), integrated by Gauss–Legendre between all edges
//! of U's panels and all mirrored edges of V's, and interpolated between the corners of the result.

use super::chebyshev::Interpolant;
use super::stretch::gauss_legendre;
use super::tails::interval_mass;
use super::transform::SummandTransform;
use num_complex::Complex64;
use rayon::prelude::*;
use std::sync::Arc;
use std::sync::atomic::{AtomicUsize, Ordering};

/// Most evaluations of a density for one table.
const BUDGET: usize = 4_000_000;

/// The continuous part of one summand, times a scale.
#[derive(Debug, Clone)]
pub(super) struct ContinuousPart {
    summand: Arc<SummandTransform>,
    scale: f64,
}

impl ContinuousPart {
    /// scale · (standardized summand), its atoms left out.
    pub(super) fn new(summand: Arc<SummandTransform>, scale: f64) -> Self {
        Self { summand, scale }
    }

    /// Total mass.
    pub(super) fn mass(&self) -> f64 {
        self.summand.continuous_mass
    }

    /// P(scale·X ≤ z, X not on an atom).
    pub(super) fn at_or_below(&self, z: f64) -> f64 {
        let standard = self.summand.standard;
        let x = standard.mean + z / self.scale * standard.sd;
        self.summand
            .law
            .pieces
            .iter()
            .map(|p| {
                let y = (x - p.add) / p.multiply;
                if (p.multiply > 0.0) == (self.scale > 0.0) {
                    interval_mass(p, p.low, y.min(p.high))
                } else {
                    interval_mass(p, y.max(p.low), p.high)
                }
            })
            .sum()
    }

    fn density(&self, z: f64) -> f64 {
        let standard = self.summand.standard;
        let x = standard.mean + z / self.scale * standard.sd;
        self.summand
            .law
            .pieces
            .iter()
            .map(|p| {
                let y = (x - p.add) / p.multiply;
                if y < p.low || y > p.high {
                    return 0.0;
                }
                let f = p.density.density(y) * (p.factor / p.multiply * standard.sd / self.scale).abs();
                if f.is_finite() { f } else { 0.0 }
            })
            .sum()
    }

    fn scaled(&self, mut points: Vec<f64>) -> Vec<f64> {
        points.iter_mut().for_each(|p| *p *= self.scale);
        points.sort_by(f64::total_cmp);
        points
    }

    /// Where the density or a derivative of it jumps.
    pub(super) fn corners(&self) -> Vec<f64> {
        self.scaled(self.summand.corners())
    }

    fn edges(&self) -> Vec<f64> {
        self.scaled(self.summand.edges())
    }
}

/// The distribution of the sum of two continuous parts.
#[derive(Debug)]
pub(super) struct PairSum {
    first: ContinuousPart,
    second: ContinuousPart,
    first_edges: Vec<f64>,
    second_edges: Vec<f64>,
    low: f64,
    high: f64,
    table: Option<Interpolant>,
    /// Error of the values, per unit of mass.
    pub(super) error: f64,
    /// Where the density of the sum or a derivative of it jumps.
    pub(super) corners: Vec<f64>,
}

impl PairSum {
    /// Prepares the sum and tabulates it on [low, high].
    pub(super) fn new(first: ContinuousPart, second: ContinuousPart, low: f64, high: f64) -> Self {
        let mut corners: Vec<f64> = Vec::new();
        for a in first.corners() {
            for b in second.corners() {
                corners.push(a + b);
            }
        }
        corners.sort_by(f64::total_cmp);
        corners.dedup_by(|a, b| (*a - *b).abs() <= 1e-13 * (1.0 + a.abs()));
        let (first_edges, second_edges) = (first.edges(), second.edges());
        let mut result =
            Self { first, second, first_edges, second_edges, low, high, table: None, error: 0.0, corners };
        let mut cuts = vec![low];
        cuts.extend(result.corners.iter().copied().filter(|c| *c > low && *c < high));
        cuts.push(high);
        let intervals: Vec<(f64, f64)> = cuts
            .windows(2)
            .flat_map(|w| {
                let parts = if w[1] - w[0] > 1.0 { 8 } else { 2 };
                let width = (w[1] - w[0]) / f64::from(parts);
                (0..parts).map(move |k| {
                    let from = w[0] + width * f64::from(k);
                    (from, if k + 1 == parts { w[1] } else { from + width })
                })
            })
            .collect();
        let spent = AtomicUsize::new(0);
        let cost = 24 * (result.first_edges.len() + result.second_edges.len());
        let value = |z: f64| {
            // Out of budget: an error too large to be accepted ends the refinement.
            if spent.fetch_add(cost, Ordering::Relaxed) > BUDGET {
                return (Complex64::ZERO, 1.0);
            }
            (Complex64::new(result.integral(z, 24), 0.0), 0.0)
        };
        let tables: Vec<Interpolant> =
            intervals.par_iter().map(|(a, b)| Interpolant::build(&value, *a, *b, 1e-14, 1e-14, 44)).collect();
        let mut disagreement: f64 = 0.0;
        for k in 1..16 {
            let z = low + (high - low) * (f64::from(k) / 16.0);
            disagreement = disagreement.max((result.integral(z, 24) - result.integral(z, 18)).abs());
        }
        let mut tables = tables.into_iter();
        if let Some(mut table) = tables.next() {
            tables.for_each(|t| table.append(t));
            result.error = table.error;
            result.table = Some(table);
        }
        // Mass beyond the outermost panels is below 1e-17 for each part.
        result.error += disagreement + 1e-14;
        result
    }

    fn integral(&self, z: f64, order: usize) -> f64 {
        let (Some(&low), Some(&high)) = (self.first_edges.first(), self.first_edges.last()) else {
            return 0.0;
        };
        let mut cuts = self.first_edges.clone();
        cuts.extend(self.second_edges.iter().map(|e| z - e).filter(|c| *c > low && *c < high));
        cuts.sort_by(f64::total_cmp);
        let rule = rule(order);
        let (Some(&lowest), Some(&highest)) = (self.second_edges.first(), self.second_edges.last()) else {
            return 0.0;
        };
        let mut sum = 0.0;
        for w in cuts.windows(2) {
            let (a, b) = (w[0], w[1]);
            if b <= a {
                continue;
            }
            let middle = 0.5 * (a + b);
            if z - middle < lowest {
                continue;
            }
            if z - middle > highest {
                sum += (self.first.at_or_below(b) - self.first.at_or_below(a)) * self.second.mass();
                continue;
            }
            let half = 0.5 * (b - a);
            let part: f64 = rule
                .iter()
                .map(|(u, weight)| {
                    let y = middle + half * u;
                    weight * self.first.density(y) * self.second.at_or_below(z - y)
                })
                .sum();
            sum += half * part;
        }
        sum
    }

    /// P(U + V ≤ z, both continuous).
    pub(super) fn at_or_below(&self, z: f64) -> f64 {
        match &self.table {
            Some(table) if z >= self.low && z <= self.high => table.evaluate(z).re,
            _ => self.integral(z, 24),
        }
    }
}

fn rule(order: usize) -> &'static [(f64, f64)] {
    use std::sync::OnceLock;
    static FINE: OnceLock<Vec<(f64, f64)>> = OnceLock::new();
    static COARSE: OnceLock<Vec<(f64, f64)>> = OnceLock::new();
    if order >= 24 {
        FINE.get_or_init(|| gauss_legendre(24))
    } else {
        COARSE.get_or_init(|| gauss_legendre(18))
    }
}

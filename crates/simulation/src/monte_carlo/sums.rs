//! Simulated distribution of a standardized sum, with bands that hold jointly at the stated confidence.
//!
//! **Bands.** Of the risk α = 1 − confidence one half goes to the Dvoretzky–Kiefer–Wolfowitz–Massart band, which
//! holds for all z at once and so for the Kolmogorov distance and all quantiles; a quarter to Clopper–Pearson
//! intervals at the `probes` (two per probe: P(Z < z) and P(Z ≤ z)); a quarter to Chernoff intervals (a little wider,
//! but in closed form) at all edges of the grid, all lattice points and all listed jumps, shared among them by
//! Bonferroni's inequality like those at the probes. Each number gets the common part of the
//! bands that apply. All are exact statements about binomial counts, none relies on a normal approximation. The
//! error of drawing by table (`tabulated`) is added to each.
//!
//! **Grid.** Only counts in the cells of a fixed grid (one per point for lattice sums) are kept. At a z inside a
//! cell the distribution function lies between its values at the edges, and the stated error includes that; at
//! probes and listed jumps both sides are counted exactly.

use super::bands::{Band, clopper_pearson, divergence_interval, uniform_band};
use super::jumps::{Jumps, jumps_of};
use super::streams::{Purpose, block_stream, for_blocks};
use super::summands::{ClosedSum, SampleDrawer, natural_unit};
use super::tally::{Cells, Layout, Tally};
use crate::figure::Figure;
use crate::special::normal;
use crate::sum::{Distance, Method, Route, Side, StandardizedSum, SumError, SumMoments, SumSpec};
use crate::work::Work;
use std::sync::Arc;

/// Simulations stop after about so many elementary draws, whatever `method.draws` says: half a minute.
pub const SUMMAND_CAP: f64 = 1e9;
/// Fewer sums than this say nothing worth stating; a plan that cannot have them is refused.
pub const FEWEST_SUMS: u64 = 400;
/// Elementary draws per block, about.
const BLOCK_COST: f64 = 65_536.0;
/// Longest window of lattice points counted one by one.
const LATTICE_POINTS: f64 = 131_072.0;

/// The simulated distribution of a standardized sum.
#[derive(Debug, Clone)]
pub struct SimulatedSum {
    plan: Arc<Plan>,
    tally: Tally,
    blocks: u64,
    draws: u64,
    cumulative: Vec<u64>,
    places: Vec<(u64, u64)>,
    distance: Distance,
}

/// Everything that does not depend on the draws.
#[derive(Debug)]
struct Plan {
    terms: Vec<(TermDrawer, f64)>,
    moments: SumMoments,
    layout: Layout,
    jumps: Jumps,
    probes: Vec<f64>,
    seed: u64,
    risk: f64,
    error: f64,
    per_block: u64,
    most: u64,
    why: String,
}

/// Draws the deviation of one term from its mean.
#[derive(Debug, Clone)]
enum TermDrawer {
    Closed(ClosedSum),
    Copies(Box<SampleDrawer>),
}

/// Which share of the risk a number may use.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Class {
    Probe,
    Edge,
}

impl SimulatedSum {
    /// Simulates the sum. `probes` are the z for which probabilities are to be as sharp as possible; `why` says why
    /// the simulation was taken, as a clause, and enters [`StandardizedSum::detail`].
    ///
    /// Draws `method.draws` sums rounded up to whole blocks, but no more than about [`SUMMAND_CAP`] summands in
    /// all; [`SumError::NotAvailable`] if that would leave fewer than [`FEWEST_SUMS`] sums. The result depends on
    /// the sum, the method and the probes only, not on the number of threads.
    pub fn build(
        spec: &SumSpec,
        method: &Method,
        probes: &[f64],
        why: &str,
        work: &Work,
    ) -> Result<Self, SumError> {
        work.check()?;
        let plan = Arc::new(Plan::new(spec, method, probes, why)?);
        let tally = Tally::new(&plan.layout);
        Self::from_tally(plan, tally, 0).extended(method.draws, work)
    }

    /// The same simulation carried on to `draws` sums in all: equal to building it with that number at once.
    ///
    /// The bands hold at the stated confidence for the final one only, unless the number of draws was chosen
    /// without looking at the results.
    pub fn extended(&self, draws: u64, work: &Work) -> Result<Self, SumError> {
        let plan = &self.plan;
        let blocks = draws.min(plan.most).div_ceil(plan.per_block).max(1);
        if blocks <= self.blocks {
            return Ok(self.clone());
        }
        let added = for_blocks(
            self.blocks,
            blocks,
            work,
            |done| done as f64 / blocks as f64,
            || Tally::new(&plan.layout),
            |block, tally| plan.draw_block(block, tally),
            |one, other| one.merge(&other),
        )?;
        Ok(Self::from_tally(Arc::clone(plan), added.merge(&self.tally), blocks))
    }

    fn from_tally(plan: Arc<Plan>, tally: Tally, blocks: u64) -> Self {
        let cumulative = tally.cumulative();
        let places = tally.place_counts(&plan.layout, &cumulative);
        let nowhere = Distance { kolmogorov: Figure::confidence(0.5, 0.5), at_z: 0.0, side: Side::At };
        let draws = tally.total();
        let mut sum = Self { plan, tally, blocks, draws, cumulative, places, distance: nowhere };
        if draws > 0 {
            sum.distance = sum.find_distance();
        }
        sum
    }

    /// The band of a probability of which `count` of the draws are successes.
    fn band(&self, count: u64, class: Class) -> Band {
        let plan = &self.plan;
        let share = count as f64 / self.draws.max(1) as f64;
        let half = uniform_band(self.draws, 0.5 * plan.risk);
        let everywhere = Band { low: share - half, high: share + half };
        let share_of_risk = |slots: usize| 0.25 * plan.risk / slots as f64;
        let pointwise = match class {
            Class::Probe => clopper_pearson(count, self.draws, share_of_risk(2 * plan.probes.len().max(1))),
            Class::Edge => {
                let slots = 2 * (plan.layout.length + plan.layout.places.len() + 1);
                divergence_interval(count, self.draws, share_of_risk(slots))
            }
        };
        everywhere.and(pointwise).widened(plan.error)
    }

    fn class_of(&self, z: f64) -> Class {
        let tolerance = self.plan.layout.tolerance;
        let start = self.plan.probes.partition_point(|probe| *probe < z - tolerance);
        match self.plan.probes.get(start) {
            Some(probe) if *probe <= z + tolerance => Class::Probe,
            _ => Class::Edge,
        }
    }

    /// Counts known to bracket the number of sums below z (`closed`: at or below z): equal where it is known exactly,
    /// with the interpolated share.
    fn counts_at(&self, z: f64, closed: bool) -> (u64, u64, f64) {
        let layout = &self.plan.layout;
        let exact = |count: u64| (count, count, count as f64 / self.draws.max(1) as f64);
        let last = self.cumulative.len() - 1;
        match layout.cells {
            Cells::Lattice { first, span } => {
                let position = (z - first) / span;
                let nearest = position.round();
                let snap = (layout.tolerance / span).max(8.0 * f64::EPSILON * nearest.abs());
                let at_point = (position - nearest).abs() <= snap;
                // Number of lattice points of the window that count as below.
                let below = if at_point { nearest + if closed { 1.0 } else { 0.0 } } else { position.ceil() };
                if below < 0.0 {
                    return (
                        0,
                        self.cumulative[0],
                        0.5 * self.cumulative[0] as f64 / self.draws.max(1) as f64,
                    );
                }
                if below > last as f64 {
                    return self.beyond_window();
                }
                exact(self.cumulative[below as usize])
            }
            Cells::Grid { from, width } => {
                let start = layout.places.partition_point(|place| *place < z - layout.tolerance);
                if layout.places.get(start).is_some_and(|place| *place <= z + layout.tolerance) {
                    let (below, at_or_below) = self.places[start];
                    return exact(if closed { at_or_below } else { below });
                }
                let position = (z - from) / width;
                if position < 0.0 {
                    return (
                        0,
                        self.cumulative[0],
                        0.5 * self.cumulative[0] as f64 / self.draws.max(1) as f64,
                    );
                }
                if position >= last as f64 {
                    return self.beyond_window();
                }
                let slack = layout.tolerance / width;
                let left = ((position - slack).floor().max(0.0) as usize).min(last);
                let right = ((position + slack).floor() as usize + 1).min(last);
                let (low, high) = (self.cumulative[left], self.cumulative[right]);
                let part = ((position - left as f64) / (right - left).max(1) as f64).clamp(0.0, 1.0);
                (low, high, (low as f64 + part * (high - low) as f64) / self.draws.max(1) as f64)
            }
        }
    }

    /// What is known above the window.
    fn beyond_window(&self) -> (u64, u64, f64) {
        let inside = self.cumulative.last().copied().unwrap_or(0);
        let share = 1.0 - 0.5 * (self.draws - inside) as f64 / self.draws.max(1) as f64;
        (inside, self.draws, share)
    }

    fn probability(&self, z: f64, closed: bool) -> Figure {
        if z.is_infinite() {
            return Figure::bound(if z > 0.0 { 1.0 } else { 0.0 }, 0.0);
        }
        let (low, high, value) = self.counts_at(z, closed);
        let class = if low == high { self.class_of(z) } else { Class::Edge };
        let mut band = self.band(low, class);
        if high != low {
            band.high = self.band(high, class).high;
        }
        // Outside the window a count of nothing has no lower end, one of everything no upper end, to look at.
        Figure::confidence(value, band.error_about(value))
    }

    fn complement(&self, z: f64, closed: bool) -> Figure {
        let below = self.probability(z, closed);
        if z.is_infinite() {
            return below.map(|value| 1.0 - value);
        }
        // From the counts above, so that a rare tail keeps its digits.
        let (low, high, _) = self.counts_at(z, closed);
        let value = if low == high {
            (self.draws - low) as f64 / self.draws.max(1) as f64
        } else {
            (1.0 - below.value).max(0.0)
        };
        Figure::confidence(value, below.error)
    }

    /// The distance of the empirical distribution function to Φ is bracketed cell by cell: over a cell it is at
    /// least its value at an edge and at most max(F̂(right) − Φ(left), Φ(right) − F̂(left)).
    fn find_distance(&self) -> Distance {
        let layout = &self.plan.layout;
        let n = self.draws as f64;
        let share = |index: usize| self.cumulative[index] as f64 / n;
        let last = self.cumulative.len() - 1;
        let mut best = (0.0, 0.0, Side::At);
        let mut seen = |gap: f64, z: f64, side: Side| {
            if gap > best.0 {
                best = (gap, z, side);
            }
        };
        let mut most = 0.0f64;
        match layout.cells {
            Cells::Lattice { first, span } => {
                for index in 0..last {
                    let z = first + span * index as f64;
                    let phi = normal::at_or_below(z);
                    seen((share(index) - phi).abs(), z, Side::JustBelow);
                    seen((share(index + 1) - phi).abs(), z, Side::At);
                }
                // Below the first point and above the last one, F̂ is between the window's end and 0 or 1.
                most = most.max(share(0)).max(1.0 - share(last));
                most = most.max(normal::at_or_below(first - span).min(normal::at_or_below(first)));
                most = most.max(normal::above(first + span * last as f64));
            }
            Cells::Grid { from, width } => {
                let mut left = normal::at_or_below(from);
                most = most.max(share(0)).max(left).max(1.0 - share(last));
                for index in 0..=last {
                    let z = from + width * index as f64;
                    seen((share(index) - left).abs(), z, Side::At);
                    if index == last {
                        most = most.max(normal::above(z));
                        break;
                    }
                    let right = normal::at_or_below(z + width);
                    most = most.max(share(index + 1) - left).max(right - share(index));
                    left = right;
                }
                for (place, &(below, at)) in layout.places.iter().zip(&self.places) {
                    let phi = normal::at_or_below(*place);
                    seen((below as f64 / n - phi).abs(), *place, Side::JustBelow);
                    seen((at as f64 / n - phi).abs(), *place, Side::At);
                }
            }
        }
        let (least, at_z, side) = best;
        let most = most.max(least);
        let middle = 0.5 * (least + most);
        let half = uniform_band(self.draws, 0.5 * self.plan.risk) + self.plan.error;
        let error = (0.5 * (most - least) + half).min(middle.max(1.0 - middle));
        Distance { kolmogorov: Figure::confidence(middle, error), at_z, side }
    }

    /// Edge or lattice point number `index`, and the counts there: below it for an edge, at or below it for a point.
    fn step(&self, index: usize) -> f64 {
        match self.plan.layout.cells {
            Cells::Lattice { first, span } => first + span * index as f64,
            Cells::Grid { from, width } => from + width * index as f64,
        }
    }

    /// The first step whose band, seen through `end`, has reached p; `None` beyond the window.
    fn first_step(&self, p: f64, end: impl Fn(Band) -> f64) -> Option<usize> {
        let offset = usize::from(matches!(self.plan.layout.cells, Cells::Lattice { .. }));
        let (mut low, mut high) = (0, self.cumulative.len() - offset);
        while low < high {
            let middle = (low + high) / 2;
            if end(self.band(self.cumulative[middle + offset], Class::Edge)) >= p {
                high = middle;
            } else {
                low = middle + 1;
            }
        }
        (low + offset < self.cumulative.len()).then_some(low)
    }
}

impl StandardizedSum for SimulatedSum {
    fn route(&self) -> Route {
        Route::Simulation
    }

    fn detail(&self) -> String {
        let plan = &self.plan;
        let short =
            if plan.most <= self.draws && plan.most < u64::MAX { ", as many as the cap allows" } else { "" };
        format!(
            "simulation of {} sums{short} (seed {}, joint confidence {}), because {}",
            self.draws,
            plan.seed,
            1.0 - plan.risk,
            plan.why
        )
    }

    fn moments(&self) -> SumMoments {
        self.plan.moments
    }

    fn at_or_below(&self, z: f64) -> Figure {
        self.probability(z, true)
    }

    fn below(&self, z: f64) -> Figure {
        self.probability(z, false)
    }

    fn above(&self, z: f64) -> Figure {
        self.complement(z, true)
    }

    fn at_or_above(&self, z: f64) -> Figure {
        self.complement(z, false)
    }

    fn kolmogorov(&self) -> Distance {
        self.distance
    }

    fn quantile(&self, p: f64) -> Figure {
        let p = p.clamp(f64::MIN_POSITIVE, 1.0 - f64::EPSILON);
        // Cantelli's inequality holds for every law with unit variance.
        let (mut low, mut high) = (-((1.0 - p) / p).sqrt(), (p / (1.0 - p)).sqrt());
        let lattice = matches!(self.plan.layout.cells, Cells::Lattice { .. });
        if let Some(index) = self.first_step(p, |band| band.high) {
            // At the step before, F < p for certain.
            if index > 0 {
                low = low.max(self.step(if lattice { index } else { index - 1 }));
            }
        } else {
            low = low.max(self.step(self.cumulative.len() - 1));
        }
        if let Some(index) = self.first_step(p, |band| band.low) {
            high = high.min(self.step(index));
        }
        let target = p * self.draws as f64;
        let offset = usize::from(lattice);
        let index = self.cumulative[offset..].partition_point(|&count| (count as f64) < target);
        let value = if lattice || index == 0 {
            self.step(index)
        } else {
            match (self.cumulative.get(index - 1), self.cumulative.get(index)) {
                (Some(&before), Some(&after)) if after > before => {
                    let part = (target - before as f64) / (after - before) as f64;
                    self.step(index - 1) + part * (self.step(index) - self.step(index - 1))
                }
                _ => self.step(index),
            }
        };
        let high = high.max(low);
        let value = value.clamp(low, high);
        Figure::confidence(value, (high - value).max(value - low))
    }

    fn jumps(&self, from: f64, to: f64, limit: usize) -> Option<Vec<f64>> {
        let found: Vec<f64> = match &self.plan.jumps {
            Jumps::Many => return None,
            Jumps::At(places) => places.iter().copied().filter(|place| (from..=to).contains(place)).collect(),
            Jumps::Lattice { origin, span, low, high } => {
                let slack = self.plan.layout.tolerance;
                let first = ((from.max(low - slack) - origin) / span).ceil();
                let last = ((to.min(high + slack) - origin) / span).floor();
                if last - first >= limit as f64 {
                    return None;
                }
                if last < first || !first.is_finite() || !last.is_finite() {
                    return Some(Vec::new());
                }
                (0..=(last - first) as usize).map(|k| origin + span * (first + k as f64)).collect()
            }
        };
        (found.len() <= limit).then_some(found)
    }

    fn lattice_span(&self) -> Option<f64> {
        match self.plan.jumps {
            Jumps::Lattice { span, .. } => Some(span),
            _ => None,
        }
    }

    fn draws(&self) -> Option<u64> {
        Some(self.draws)
    }
}

impl Plan {
    fn new(spec: &SumSpec, method: &Method, probes: &[f64], why: &str) -> Result<Self, SumError> {
        let moments = moments_of(spec)?;
        let terms: Vec<(TermDrawer, f64)> = spec
            .terms
            .iter()
            .filter(|term| term.count > 0 && term.multiply != 0.0)
            .map(|term| {
                let closed = term.law.closed_form.as_ref().and_then(|form| ClosedSum::new(form, term.count));
                match closed {
                    Some(closed) => (TermDrawer::Closed(closed), term.multiply / moments.sd),
                    None => {
                        let unit = natural_unit(&term.law);
                        let copies = SampleDrawer::new(&term.law, term.count, unit);
                        (TermDrawer::Copies(Box::new(copies)), term.multiply * (unit / moments.sd))
                    }
                }
            })
            .collect();
        let cost: f64 = terms.iter().map(|(drawer, _)| drawer.cost()).sum::<f64>().max(1.0);
        let error: f64 = terms.iter().map(|(drawer, _)| drawer.error()).sum::<f64>().min(1.0);
        let most = if cost * FEWEST_SUMS as f64 > SUMMAND_CAP {
            return Err(SumError::NotAvailable {
                route: Route::Simulation,
                reason: format!(
                    "one simulated sum takes about {cost:.0} draws, too many for {FEWEST_SUMS} sums within reach"
                ),
            });
        } else {
            (SUMMAND_CAP / cost) as u64
        };
        let n = moments.n as f64;
        let tolerance = 1e-13 * n.sqrt() + 8.0 * f64::EPSILON * (moments.mean / moments.sd).abs().min(1e12);
        let reach = if method.reach_z.is_finite() { method.reach_z.clamp(1.0, 60.0) } else { 60.0 };
        let mut probes: Vec<f64> = probes.iter().copied().filter(|probe| probe.is_finite()).collect();
        probes.sort_by(f64::total_cmp);
        probes.dedup();
        let jumps = jumps_of(spec, &moments, tolerance);
        let layout = layout_of(&jumps, &probes, reach, tolerance);
        Ok(Self {
            terms,
            moments,
            layout,
            jumps,
            probes,
            seed: method.seed,
            risk: (1.0 - method.confidence).clamp(1e-15, 1.0),
            error,
            per_block: ((BLOCK_COST / cost) as u64).clamp(1, 1024),
            most,
            why: why.to_owned(),
        })
    }

    fn draw_block(&self, block: u64, tally: &mut Tally) {
        let mut random = block_stream(self.seed, Purpose::Sums, block);
        for _ in 0..self.per_block {
            let mut z = 0.0;
            for (drawer, scale) in &self.terms {
                z += scale * drawer.draw(&mut random);
            }
            tally.add(&self.layout, z);
        }
    }
}

/// The cells to count in.
fn layout_of(jumps: &Jumps, probes: &[f64], reach: f64, tolerance: f64) -> Layout {
    let mut places = probes.to_vec();
    match jumps {
        Jumps::Lattice { origin, span, low, high } => {
            let first = ((low.max(-reach) - origin) / span - 0.25).ceil();
            let last = ((high.min(reach) - origin) / span + 0.25).floor();
            let points = last - first + 1.0;
            if (1.0..=LATTICE_POINTS).contains(&points) && *span > 1e4 * tolerance {
                return Layout::lattice(origin + span * first, *span, points as usize, tolerance);
            }
        }
        Jumps::At(jumps) => places.extend(jumps),
        Jumps::Many => {}
    }
    Layout::grid(reach, places, tolerance)
}

impl TermDrawer {
    #[inline]
    fn draw(&self, random: &mut super::streams::Stream) -> f64 {
        match self {
            Self::Closed(closed) => closed.draw(random),
            Self::Copies(copies) => copies.draw::<false>(random).sum,
        }
    }

    fn cost(&self) -> f64 {
        match self {
            Self::Closed(_) => 10.0,
            Self::Copies(copies) => copies.cost,
        }
    }

    fn error(&self) -> f64 {
        match self {
            // The library's Poisson and binomial samplers use constants with ten digits.
            Self::Closed(_) => 1e-8,
            Self::Copies(copies) => copies.error,
        }
    }
}

/// Moments of a sum from those of its terms: cumulants add.
fn moments_of(spec: &SumSpec) -> Result<SumMoments, SumError> {
    let mut n = 0u64;
    let (mut mean, mut largest) = (0.0, 0.0f64);
    let mut scales = Vec::new();
    for term in &spec.terms {
        let (Some(law_mean), Some(sd)) = (term.law.mean(), term.law.sd()) else {
            return Err(SumError::NoVariance);
        };
        n = n.saturating_add(term.count);
        mean += term.count as f64 * term.multiply * law_mean;
        let scale = term.multiply * sd;
        largest = largest.max(scale.abs());
        scales.push(scale);
    }
    let counts = spec.terms.iter().map(|term| term.count as f64);
    let squares: f64 = counts.zip(&scales).map(|(count, scale)| count * (scale / largest).powi(2)).sum();
    let sd = largest * squares.sqrt();
    if !(sd > 0.0 && sd.is_finite() && mean.is_finite()) {
        return Err(SumError::NoVariance);
    }
    let cumulant = |order: i32, of: fn(&crate::law::Moments) -> Option<f64>| {
        spec.terms.iter().zip(&scales).try_fold(0.0, |sum, (term, scale)| {
            let weight = term.count as f64 * (scale / sd).powi(order);
            if weight == 0.0 { Some(sum) } else { of(&term.law.moments).map(|value| sum + weight * value) }
        })
    };
    Ok(SumMoments {
        n,
        mean,
        sd,
        skewness: cumulant(3, |moments| moments.skewness),
        excess_kurtosis: cumulant(4, |moments| moments.excess_kurtosis),
    })
}

#[cfg(test)]
#[path = "sums_tests.rs"]
mod tests;

//! A scenario made ready for computing: its laws compiled, its size as counts per law, its scales.

use crate::Problem;
use crate::scenario::{Scenario, Source, Statistic};
use gaussgap_simulation::law::{Law, LawSpec};
use gaussgap_simulation::sum::{Method, SumMoments, SumSpec, Term};

/// The farthest |z| a distribution is asked to cover.
const FARTHEST_Z: f64 = 40.0;

/// A scenario with its laws compiled.
#[derive(Debug)]
pub(crate) struct Prepared<'a> {
    /// The scenario.
    pub scenario: &'a Scenario,
    /// The laws: one, one per part, or one per group.
    pub laws: Vec<Law>,
    /// How many copies of each law the plan has.
    pub planned: Vec<u64>,
}

impl<'a> Prepared<'a> {
    /// Compiles the laws; every problem with its pointer in the scenario.
    pub fn new(scenario: &'a Scenario) -> Result<Self, Vec<Problem>> {
        scenario.check()?;
        let specs = match &scenario.source {
            Source::Like { law, n, .. } => vec![("/law".to_owned(), law, *n)],
            Source::Parts { parts } => parts
                .iter()
                .enumerate()
                .map(|(index, part)| (format!("/parts/{index}/law"), &part.law, part.count))
                .collect(),
            Source::Groups { groups } => groups
                .iter()
                .enumerate()
                .map(|(index, group)| (format!("/groups/{index}/law"), &group.law, group.n))
                .collect(),
        };
        let mut problems = Vec::new();
        if matches!(scenario.source, Source::Like { dependence: Some(_), .. }) {
            problems.push(Problem {
                pointer: "/dependence".to_owned(),
                message: "sums of dependent summands cannot be computed by this version".to_owned(),
            });
        }
        for request in scenario.data_requests() {
            problems.push(Problem {
                pointer: request.pointer,
                message: format!(
                    "the values of column {} of {} have not been loaded",
                    request.column, request.path
                ),
            });
        }
        let mut laws = Vec::new();
        let mut planned = Vec::new();
        if problems.is_empty() {
            for (pointer, spec, count) in &specs {
                match compile(spec, pointer) {
                    Ok(law) => laws.push(law),
                    Err(found) => problems.extend(found),
                }
                planned.push(*count);
            }
        }
        if problems.is_empty() && laws.iter().all(|law| law.moments.variance == Some(0.0)) {
            let pointer = match scenario.source {
                Source::Like { .. } => "/law",
                Source::Parts { .. } => "/parts",
                Source::Groups { .. } => "/groups",
            };
            problems.push(Problem {
                pointer: pointer.to_owned(),
                message: "must have some spread: every value is the same, so there is nothing to approximate"
                    .to_owned(),
            });
        }
        if problems.is_empty() { Ok(Self { scenario, laws, planned }) } else { Err(problems) }
    }

    /// Whether every law has a finite variance.
    pub fn has_variance(&self) -> bool {
        self.laws.iter().all(|law| law.moments.variance.is_some() && law.moments.mean.is_some())
    }

    /// The planned number of summands in all.
    pub fn total(&self) -> u64 {
        self.planned.iter().sum()
    }

    /// The smallest n at which every law occurs.
    pub fn smallest_n(&self) -> u64 {
        self.laws.len() as u64
    }

    /// How many copies of each law make n in all, in the plan's proportions (largest remainders, at least one of
    /// each); `None` if n is smaller than the number of laws. At the planned total this is the plan itself.
    pub fn counts_at(&self, n: u64) -> Option<Vec<u64>> {
        if n < self.smallest_n() {
            return None;
        }
        let total = u128::from(self.total());
        let shares = self.planned.iter().map(|count| u128::from(*count) * u128::from(n)).collect::<Vec<_>>();
        let mut counts = shares.iter().map(|share| ((share / total) as u64).max(1)).collect::<Vec<_>>();
        let mut order = (0..counts.len()).collect::<Vec<_>>();
        order.sort_by_key(|index| std::cmp::Reverse(shares[*index] % total));
        let mut next = order.iter().cycle();
        while counts.iter().sum::<u64>() < n {
            if let Some(index) = next.next() {
                counts[*index] += 1;
            }
        }
        while counts.iter().sum::<u64>() > n {
            if let Some(largest) = counts.iter_mut().max() {
                *largest -= 1;
            }
        }
        Some(counts)
    }

    /// Which independent quantities are added with these counts. For groups: second mean minus first.
    pub fn sum_spec(&self, counts: &[u64]) -> SumSpec {
        let terms = self
            .laws
            .iter()
            .zip(counts)
            .enumerate()
            .map(|(index, (law, count))| {
                let multiply = match (&self.scenario.source, index) {
                    (Source::Groups { .. }, 0) => -1.0 / *count as f64,
                    (Source::Groups { .. }, _) => 1.0 / *count as f64,
                    _ => 1.0,
                };
                Term { law: law.clone(), count: *count, multiply }
            })
            .collect();
        SumSpec { terms }
    }

    /// How the statistic relates to the standardized sum with these moments.
    pub fn scale(&self, moments: &SumMoments) -> Scale {
        let divisor = match (&self.scenario.source, self.scenario.statistic) {
            (Source::Like { .. }, Statistic::Mean) => moments.n as f64,
            _ => 1.0,
        };
        Scale { mean: moments.mean, sd: moments.sd, divisor }
    }

    /// How to compute the distribution: the scenario's method, reaching every z the report will ask for.
    pub fn method(&self, reach_z: f64) -> Method {
        let method = self.scenario.method;
        Method {
            route: method.route,
            draws: method.draws,
            seed: method.seed,
            confidence: share_of_confidence(method.confidence, MAIN_SHARE),
            reach_z: self
                .scenario
                .probe_z
                .iter()
                .fold(reach_z, |reach, z| reach.max(z.abs() + 1.0))
                .clamp(8.0, FARTHEST_Z),
        }
    }
}

/// Share of the allowed probability of a wrong band that the distribution of the sum spends. The rest belongs to
/// studentized figures (the planned n, the remedies, the search), so that all bands hold jointly.
pub(crate) const MAIN_SHARE: f64 = 0.4;

/// The confidence left to a use that may spend this share of the allowed probability of error.
pub(crate) fn share_of_confidence(confidence: f64, share: f64) -> f64 {
    1.0 - (1.0 - confidence) * share
}

/// Compiles a law, its problems placed in the scenario.
fn compile(spec: &LawSpec, pointer: &str) -> Result<Law, Vec<Problem>> {
    spec.compile().map_err(|problems| {
        problems
            .into_iter()
            .map(|problem| Problem {
                pointer: format!("{pointer}{}", problem.pointer),
                message: problem.message,
            })
            .collect()
    })
}

/// How the reported statistic relates to the standardized sum: statistic = (mean + sd·z)/divisor.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Scale {
    mean: f64,
    sd: f64,
    divisor: f64,
}

impl Scale {
    /// The standardized value of a value of the statistic, and a bound on its rounding error.
    pub fn z_of(&self, value: f64) -> (f64, f64) {
        let total = value * self.divisor;
        let z = (total - self.mean) / self.sd;
        let rounding = 4.0 * f64::EPSILON * ((total.abs() + self.mean.abs()) / self.sd + z.abs());
        (z, rounding)
    }

    /// The value of the statistic at a standardized value.
    pub fn value_of(&self, z: f64) -> f64 {
        (self.mean + self.sd * z) / self.divisor
    }

    /// sd of the statistic.
    pub fn sd(&self) -> f64 {
        self.sd / self.divisor
    }

    /// Bound on the rounding error of [`Scale::value_of`].
    pub fn value_rounding(&self, z: f64) -> f64 {
        4.0 * f64::EPSILON * (self.mean.abs() + self.sd * z.abs()) / self.divisor
    }
}

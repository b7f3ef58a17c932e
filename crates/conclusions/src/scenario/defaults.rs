//! What a scenario says where its author said nothing, and which of its parts contradict each other.

use super::{
    Claim, Dependence, MethodSpec, SCENARIO_FORMAT, Scenario, Search, Sides, Source, Spread, Statistic,
    Tolerance,
};
use crate::Problem;
use gaussgap_simulation::sum::{Method, RouteChoice};

/// Where tail probabilities are reported unless a scenario says otherwise.
pub const DEFAULT_PROBE_Z: [f64; 9] = [-4.0, -3.0, -2.0, -1.0, 0.0, 1.0, 2.0, 3.0, 4.0];

impl Default for MethodSpec {
    fn default() -> Self {
        let method = Method::default();
        Self {
            route: RouteChoice::Auto,
            draws: method.draws,
            seed: method.seed,
            confidence: method.confidence,
        }
    }
}

impl Default for Tolerance {
    fn default() -> Self {
        Self::Absolute(0.01)
    }
}

impl Default for Search {
    fn default() -> Self {
        Self { up_to: 10_000 }
    }
}

impl Tolerance {
    /// The largest |difference| allowed from a nominal number.
    pub fn allowed(&self, nominal: f64) -> f64 {
        match self {
            Self::Absolute(size) => *size,
            Self::Relative(share) => share * nominal.abs(),
        }
    }
}

impl Claim {
    /// The kind, as scenarios write it.
    pub fn kind(&self) -> &'static str {
        match self {
            Self::Curve => "curve",
            Self::Interval { .. } => "interval",
            Self::Test { .. } => "test",
            Self::Threshold { .. } => "threshold",
            Self::Quantile { .. } => "quantile",
            Self::Deviation { .. } => "deviation",
        }
    }

    /// The spread an interval or a test uses; `None` for the other kinds.
    pub fn spread(&self) -> Option<Spread> {
        match self {
            Self::Interval { spread, .. } | Self::Test { spread, .. } => Some(*spread),
            _ => None,
        }
    }

    /// The usual interval: 95 %, two-sided, spread estimated from the data.
    pub fn usual_interval() -> Self {
        Self::Interval { level: 0.95, sides: Sides::Two, spread: Spread::Estimated }
    }

    /// The usual test: 5 %, two-sided, spread estimated from the data, no planned shift.
    pub fn usual_test() -> Self {
        Self::Test { significance: 0.05, sides: Sides::Two, spread: Spread::Estimated, shift: None }
    }
}

impl Source {
    /// How many summands there are in all.
    pub fn total(&self) -> u64 {
        match self {
            Self::Like { n, .. } => *n,
            Self::Parts { parts } => parts.iter().map(|part| part.count).sum(),
            Self::Groups { groups } => groups[0].n + groups[1].n,
        }
    }
}

impl Scenario {
    /// A scenario with every default filled in. The statistic is the mean (the difference of means for groups),
    /// or the sum for unlike parts.
    pub fn new(source: Source) -> Self {
        let statistic = match source {
            Source::Parts { .. } => Statistic::Sum,
            _ => Statistic::Mean,
        };
        Self {
            format: SCENARIO_FORMAT.to_owned(),
            title: None,
            notes: None,
            quantity: None,
            source,
            statistic,
            claim: Claim::default(),
            tolerance: Tolerance::default(),
            method: MethodSpec::default(),
            probe_z: DEFAULT_PROBE_Z.to_vec(),
            search: Search::default(),
        }
    }

    /// Whether the scenario, however it was made, would be accepted if it were read from a file: every problem.
    /// (The ranges of law parameters are judged when the laws are compiled.)
    pub fn check(&self) -> Result<(), Vec<Problem>> {
        let value = serde_json::to_value(self)
            .map_err(|error| vec![Problem { pointer: String::new(), message: error.to_string() }])?;
        Self::from_value(&value).map(drop)
    }

    /// Fields that are fine alone but not together.
    pub(super) fn contradictions(&self) -> Vec<Problem> {
        let mut problems = Vec::new();
        let mut push = |pointer: &str, message: String| {
            problems.push(Problem { pointer: pointer.to_owned(), message });
        };
        if matches!((self.claim, self.tolerance), (Claim::Curve, Tolerance::Relative(_))) {
            push(
                "/tolerance",
                "must be absolute for the claim \"curve\", whose nominal distance is 0".to_owned(),
            );
        }
        match (&self.source, self.statistic) {
            (Source::Parts { .. }, Statistic::Mean) => {
                push("/statistic", "must be \"sum\" for unlike \"parts\" (got \"mean\")".to_owned());
            }
            (Source::Groups { .. }, Statistic::Sum) => {
                push(
                    "/statistic",
                    "must be \"mean\" for \"groups\", whose means are compared (got \"sum\")".to_owned(),
                );
            }
            _ => {}
        }
        if matches!(self.source, Source::Parts { .. }) && self.claim.spread() == Some(Spread::Estimated) {
            push("/claim/spread", "must be \"known\" for unlike \"parts\" (got \"estimated\")".to_owned());
        }
        // With an estimated spread the critical value must be positive: a one-sided limit above the middle.
        match self.claim {
            Claim::Interval { level, sides, spread: Spread::Estimated }
                if sides != Sides::Two && level <= 0.5 =>
            {
                push("/claim/level", format!("must be greater than 0.5 for a one-sided limit (got {level})"));
            }
            Claim::Test { significance, sides, spread: Spread::Estimated, .. }
                if sides != Sides::Two && significance >= 0.5 =>
            {
                push(
                    "/claim/significance",
                    format!("must be less than 0.5 for a one-sided test (got {significance})"),
                );
            }
            _ => {}
        }
        if let Source::Like { n, dependence: Some(Dependence::WithoutReplacement { population }), .. } =
            &self.source
            && population <= n
        {
            push("/dependence/population", format!("must be greater than n = {n} (got {population})"));
        }
        problems
    }
}

//! The finding: the verdict in one sentence that names the use, the size, and what is wrong.

use super::nouns::{plural, singular, size, statistic, target, text_with_unit, with_unit};
use super::numbers::{about_points, chance, exact, number_to, percent, percent_decimals, points, times};
use super::plan::tolerance;
use crate::report::{ClaimFacts, State};
use crate::scenario::{Claim, Direction, Scenario, Sides, Source, Statistic};
use gaussgap_simulation::figure::{Basis, Figure};

/// Why a claim has no actual figure at all.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum NoFigure {
    /// A summand has no finite variance.
    InfiniteVariance,
    /// Too few observations to estimate a spread.
    NoSpread,
}

/// The verdict as one sentence: "Not safe at n = 40: the 95 % interval really covers 92.1 % (± 0.02 points) and
/// misses high (lies above the true mean) five times as often as low."
pub fn because(scenario: &Scenario, facts: &ClaimFacts, state: State) -> String {
    let opening = match state {
        State::Holds => "Safe",
        State::Fails => "Not safe",
        State::Undecided => "Undecided",
    };
    let Some(actual) = facts.actual else {
        return without_figure(scenario, NoFigure::InfiniteVariance);
    };
    let view = View { scenario, facts, state, actual };
    let clause = match scenario.claim {
        Claim::Curve => view.curve(),
        Claim::Interval { level, sides, .. } => view.interval(level, sides),
        Claim::Test { significance, sides, shift, .. } => view.test(significance, sides, shift),
        Claim::Threshold { at, direction } => view.threshold(at, direction),
        Claim::Quantile { p } => view.quantile(p),
        Claim::Deviation { epsilon, .. } => view.deviation(epsilon),
    };
    format!("{opening} at {}: {clause}.", size(scenario))
}

/// What a changed plan or a corrected method gives, as a clause: `the interval then covers 94.7 % (± 0.5 points)`.
/// Nothing for the whole curve without a figure.
pub(crate) fn outcome(scenario: &Scenario, facts: &ClaimFacts, state: State) -> Option<String> {
    let view = View { scenario, facts, state, actual: facts.actual? };
    let (chance, often) = (view.actual_chance(), view.how_often());
    let clause = match scenario.claim {
        Claim::Curve => format!(
            "the largest gap is then {} of probability{}",
            about_points(view.actual.value),
            view.error_words(1)
        ),
        Claim::Interval { sides: Sides::Two, .. } => format!("the interval then covers {chance}"),
        Claim::Interval { .. } => format!("the limit then keeps its promise {often}"),
        Claim::Test { shift: None, .. } => format!("the test then raises a false alarm {often}"),
        Claim::Test { .. } => format!("the test then detects the planned shift {often}"),
        Claim::Threshold { .. } | Claim::Deviation { .. } => {
            format!("the chance itself is then {chance} and the normal curve gives {}", view.normal_chance())
        }
        Claim::Quantile { p } => format!(
            "the {} quantile is then at {} standard deviations and the normal curve gives {}",
            percent(p),
            number_to(view.actual.value, 4),
            number_to(facts.nominal, 4)
        ),
    };
    let doubt = if state == State::Undecided { ", too uncertain to tell whether that is enough" } else { "" };
    Some(format!("{clause}{doubt}"))
}

/// How many more simulated samples would probably decide an undecided claim, as a clause.
///
/// The error falls with the root of the number of samples; it must become smaller than the distance from the value
/// to the edge of the tolerance. Where that distance vanishes, no number of samples can be promised.
pub(crate) fn more_draws(facts: &ClaimFacts, draws: u64) -> Option<String> {
    let (actual, difference) = (facts.actual?, facts.difference?);
    if actual.basis != Basis::Confidence || actual.error <= 0.0 {
        return None;
    }
    let margin = (difference.abs() - facts.allowed).abs();
    let needed = draws as f64 * (actual.error / margin).powi(2);
    let more = needed - draws as f64;
    Some(if margin > 0.0 && needed <= 1e12 {
        format!("about {} more draws would probably tell", draws_in_words(more.max(1.0)))
    } else {
        "no practical number of draws would tell".to_owned()
    })
}

/// `640`, `12,000`, `3.1 million`, two significant digits, rounded up.
fn draws_in_words(draws: f64) -> String {
    let unit = 10_f64.powf(draws.log10().floor() - 1.0).max(1.0);
    let rounded = (draws / unit).ceil() * unit;
    match rounded {
        size if size < 1e6 => number_to(size, 6),
        size if size < 1e9 => format!("{} million", number_to(size / 1e6, 3)),
        size => format!("{} billion", number_to(size / 1e9, 3)),
    }
}

/// The sentence where there is no figure to judge.
pub fn without_figure(scenario: &Scenario, reason: NoFigure) -> String {
    match reason {
        NoFigure::InfiniteVariance => format!(
            "Not safe at any n: the {} has no finite variance, so its {} has no normal limit.",
            singular(scenario),
            if matches!((&scenario.source, scenario.statistic), (Source::Like { .. }, Statistic::Mean)) {
                "standardized mean"
            } else {
                "standardized sum"
            }
        ),
        NoFigure::NoSpread => format!(
            "Not safe at {}: a single {} gives no estimate of its spread, so there is no {}.",
            size(scenario),
            singular(scenario),
            if matches!(scenario.claim, Claim::Test { .. }) { "test" } else { "interval" }
        ),
    }
}

/// Everything a clause needs.
struct View<'a> {
    scenario: &'a Scenario,
    facts: &'a ClaimFacts,
    state: State,
    actual: Figure,
}

impl View<'_> {
    /// Decimals for percentages of this claim.
    fn decimals(&self) -> usize {
        percent_decimals(self.actual.value - self.facts.nominal, self.actual.error, self.facts.allowed)
    }

    /// ` (± 0.02 points)` where the error would show beside the printed digits, else nothing.
    fn error_words(&self, decimals: usize) -> String {
        let error = 100.0 * self.actual.error;
        if self.actual.basis == Basis::Confidence || error > 0.5 * 10_f64.powi(-(decimals as i32)) {
            format!(" (± {} points)", number_to(error, 2))
        } else {
            String::new()
        }
    }

    /// How often something happens, with the error: `7.9 % of the time (± 0.02 points)`.
    fn how_often(&self) -> String {
        let decimals = self.decimals();
        format!("{} of the time{}", chance(self.actual.value, decimals), self.error_words(decimals))
    }

    /// The actual probability with its error.
    fn actual_chance(&self) -> String {
        let decimals = self.decimals();
        format!("{}{}", chance(self.actual.value, decimals), self.error_words(decimals))
    }

    /// The normal curve's probability, to the same digits.
    fn normal_chance(&self) -> String {
        chance(self.facts.nominal, self.decimals())
    }

    /// How an actual rate compares with the nominal one, as the end of a clause.
    fn against_allowed(&self, promised: &str) -> String {
        let (nominal, allowed) = (self.facts.nominal, self.facts.allowed);
        match self.state {
            State::Holds => format!(", within {} of the {promised}", points(allowed)),
            State::Undecided => {
                format!(", too close to the allowed limit of {} to tell", self.nearest_limit())
            }
            State::Fails if self.actual.value < nominal => {
                format!(", less than the {} that would be allowed", percent(nominal - allowed))
            }
            State::Fails => format!(", more than the {} that would be allowed", percent(nominal + allowed)),
        }
    }

    /// The edge of the tolerance band nearer to the actual value.
    fn nearest_limit(&self) -> String {
        let (nominal, allowed) = (self.facts.nominal, self.facts.allowed);
        percent(if self.actual.value < nominal { nominal - allowed } else { nominal + allowed })
    }

    fn curve(&self) -> String {
        let decimals = percent_decimals(self.actual.value, self.actual.error, self.facts.allowed).min(3);
        let error = self.error_words(decimals);
        let distance = match number_to(100.0 * self.actual.value, 3).as_str() {
            "1" => "1 point".to_owned(),
            text => format!("{text} points"),
        };
        let allowed = points(self.facts.allowed);
        match self.state {
            State::Holds => format!(
                "the normal curve is nowhere off by more than {distance} of probability{error}, within the allowed \
                 {allowed}"
            ),
            State::Fails => format!(
                "the normal curve is off by up to {distance} of probability{error}, more than the allowed {allowed}"
            ),
            State::Undecided => format!(
                "the normal curve is off by about {distance} of probability{error}, too close to the allowed \
                 {allowed} to tell"
            ),
        }
    }

    fn interval(&self, level: f64, sides: Sides) -> String {
        let level = percent(level);
        let actual = self.actual_chance();
        let ending = self.against_allowed(&format!("promised {level}"));
        match sides {
            Sides::Two => {
                let balance = self.balance();
                let covers = format!("the {level} interval really covers {actual}");
                match (self.state, balance) {
                    (State::Fails, Some(balance)) if self.actual.value < self.facts.nominal => {
                        format!("{covers} and {balance}")
                    }
                    (_, Some(balance)) => format!("{covers}{ending}, and {balance}"),
                    (_, None) => format!("{covers}{ending}"),
                }
            }
            Sides::Lower => format!(
                "the {level} lower limit really stays at or below {} {}{ending}",
                target(self.scenario),
                self.how_often()
            ),
            Sides::Upper => format!(
                "the {level} upper limit really stays at or above {} {}{ending}",
                target(self.scenario),
                self.how_often()
            ),
        }
    }

    /// `misses high (lies above the true mean) five times as often as low`, where the two sides differ clearly.
    fn balance(&self) -> Option<String> {
        let (low, high) = (self.facts.miss_low?, self.facts.miss_high?);
        let (many, few, more, less) =
            if high.value >= low.value { (high, low, "high", "low") } else { (low, high, "low", "high") };
        // Said only where the errors leave no doubt that the sides differ by a third at least.
        if many.value - many.error <= 4.0 / 3.0 * (few.value + few.error) {
            return None;
        }
        let place = if more == "low" { "below" } else { "above" };
        let more = format!("{more} (lies {place} {})", target(self.scenario));
        if few.value <= 0.0 && few.error <= 1e-9 * many.value {
            return Some(format!("misses only {more}"));
        }
        if few.value <= 3.0 * few.error || many.value / few.value > 200.0 {
            return Some(format!("misses almost only {more}"));
        }
        Some(format!("misses {more} {} as often as {less}", times(many.value / few.value)))
    }

    fn test(&self, significance: f64, sides: Sides, shift: Option<f64>) -> String {
        let sides = match sides {
            Sides::Two => "two-sided",
            Sides::Lower => "low-side",
            Sides::Upper => "high-side",
        };
        let level = percent(significance);
        let article = if level.starts_with('8') || level.starts_with("11 ") || level.starts_with("18 ") {
            "an"
        } else {
            "a"
        };
        let actual = self.how_often();
        match shift {
            None => {
                let ending = self.against_allowed(&format!("promised {level}"));
                format!("{article} {level} {sides} test really raises a false alarm {actual}{ending}")
            }
            Some(_) => {
                let planned = chance(self.facts.nominal, self.decimals());
                let ending = self.against_allowed(&format!("planned {planned}"));
                format!("{article} {level} {sides} test really detects the planned shift {actual}{ending}")
            }
        }
    }

    /// "E is A, not the B the normal curve gives" and its two sisters.
    fn event(&self, event: &str) -> String {
        let decimals = self.decimals();
        let actual = format!("{}{}", chance(self.actual.value, decimals), self.error_words(decimals));
        let normal = chance(self.facts.nominal, decimals);
        let allowed = tolerance(self.scenario);
        match self.state {
            State::Fails => format!("{event} is {actual}, not the {normal} that the normal curve gives"),
            State::Holds if actual == normal => format!("{event} is {actual}, as the normal curve says"),
            State::Holds => {
                format!(
                    "{event} is {actual} and the normal curve gives {normal}, within the allowed {allowed}"
                )
            }
            State::Undecided => format!(
                "{event} is {actual} and the normal curve gives {normal}, too close to the allowed {allowed} to tell"
            ),
        }
    }

    fn threshold(&self, at: f64, direction: Direction) -> String {
        let direction = match direction {
            Direction::AtMost => "at most",
            Direction::AtLeast => "at least",
        };
        let at = text_with_unit(self.scenario, &exact(at));
        self.event(&format!("the chance that {} is {direction} {at}", statistic(self.scenario)))
    }

    fn deviation(&self, epsilon: f64) -> String {
        let epsilon = text_with_unit(self.scenario, &exact(epsilon));
        self.event(&format!(
            "the chance that {} strays more than {epsilon} from its expectation",
            statistic(self.scenario)
        ))
    }

    fn quantile(&self, p: f64) -> String {
        let difference = (self.actual.value - self.facts.nominal).abs();
        let apart = format!("{} standard deviations", number_to(difference, 2));
        let (Some(actual), Some(normal)) = (self.facts.actual_quantile, self.facts.normal_quantile) else {
            return format!("the {} quantile of the {} is unknown", percent(p), plural(self.scenario));
        };
        // Enough digits to tell the two apart.
        let scale = actual.value.abs().max(normal.abs());
        let gap = (actual.value - normal).abs();
        let digits =
            if gap > 0.0 { ((scale / gap).log10().ceil() + 2.0).clamp(3.0, 8.0) as usize } else { 4 };
        let show = |value: f64| text_with_unit(self.scenario, &number_to(value, digits));
        let error = if actual.basis == Basis::Confidence {
            format!(" (± {})", with_unit(self.scenario, actual.error))
        } else {
            String::new()
        };
        let start = format!(
            "the {} quantile of {} is {}{error}",
            percent(p),
            statistic(self.scenario),
            show(actual.value)
        );
        let normal = show(normal);
        let allowed = tolerance(self.scenario);
        match self.state {
            State::Fails => format!("{start}, not the {normal} that the normal curve gives, {apart} away"),
            State::Holds => {
                format!("{start} and the normal curve gives {normal}, within the allowed {allowed}")
            }
            State::Undecided => {
                format!(
                    "{start} and the normal curve gives {normal}, too close to the allowed {allowed} to tell"
                )
            }
        }
    }
}

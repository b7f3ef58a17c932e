//! The plan sentence: what is going to be reported, how, and how far it may be off.

use super::nouns::{counted, sized_statistic, text_with_unit};
use super::numbers::{exact, number, percent, points};
use crate::scenario::{Claim, Dependence, Direction, Scenario, Sides, Source, Spread, Tolerance};

/// The plan as one sentence: "I will report the mean of 40 boarding times, with a 95 % two-sided interval, spread
/// estimated from the data; coverage may be off by 1 point."
pub fn plan_sentence(scenario: &Scenario) -> String {
    let what = sized_statistic(scenario);
    let off = |subject: &str| format!("{subject} may be off by {}", tolerance(scenario));
    let main = match scenario.claim {
        Claim::Curve => {
            format!("I will treat {what} as normally distributed; {}", off("the whole curve"))
        }
        Claim::Interval { level, sides, spread } => {
            let (level, spread) = (percent(level), spread_words(spread));
            let article = article(&level);
            let interval = match sides {
                Sides::Two => format!("{article} {level} two-sided interval"),
                Sides::Lower => format!("{article} {level} lower limit"),
                Sides::Upper => format!("{article} {level} upper limit"),
            };
            format!("I will report {what}, with {interval}, {spread}; {}", off("coverage"))
        }
        Claim::Test { significance, sides, spread, shift } => {
            let sides = match sides {
                Sides::Two => "on both sides",
                Sides::Lower => "on the low side",
                Sides::Upper => "on the high side",
            };
            let test = format!(
                "I will test {what} at the {} level, {sides}, {}",
                percent(significance),
                spread_words(spread)
            );
            match shift {
                None => format!("{test}; {}", off("the false-alarm rate")),
                Some(shift) => format!(
                    "{test}, to detect a shift of {} {}; {}",
                    exact(shift),
                    if shift.abs() == 1.0 { "standard deviation" } else { "standard deviations" },
                    off("the power")
                ),
            }
        }
        Claim::Threshold { at, direction } => {
            let direction = match direction {
                Direction::AtMost => "at most",
                Direction::AtLeast => "at least",
            };
            let at = text_with_unit(scenario, &exact(at));
            format!("I will state the chance that {what} is {direction} {at}; {}", off("it"))
        }
        Claim::Quantile { p } => {
            format!("I will report the {} quantile of {what}; {}", percent(p), off("it"))
        }
        Claim::Deviation { epsilon, probability } => {
            let epsilon = text_with_unit(scenario, &exact(epsilon));
            let limit = probability
                .map(|probability| format!(", which is to stay at or below {}", percent(probability)))
                .unwrap_or_default();
            format!(
                "I will state the chance that {what} strays more than {epsilon} from its expectation{limit}; {}",
                off("it")
            )
        }
    };
    format!("{main}{}.", dependence(scenario))
}

/// `estimated from the data` or `known beforehand`.
fn spread_words(spread: Spread) -> &'static str {
    match spread {
        Spread::Known => "spread known beforehand",
        Spread::Estimated => "spread estimated from the data",
    }
}

/// The tolerance in the claim's own terms: `1 point`, `0.1 standard deviations`, `10 % of its value`.
pub(crate) fn tolerance(scenario: &Scenario) -> String {
    match (scenario.tolerance, scenario.claim) {
        (Tolerance::Absolute(size), Claim::Quantile { .. }) => {
            let text = number(size);
            if text == "1" {
                "1 standard deviation".to_owned()
            } else {
                format!("{text} standard deviations")
            }
        }
        (Tolerance::Absolute(size), _) => points(size),
        (Tolerance::Relative(share), _) => format!("{} of its value", percent(share)),
    }
}

/// `a` or `an` before a percentage that is read aloud: an 80 % interval, an 8 %, an 11 %, an 18 %.
fn article(text: &str) -> &'static str {
    let integer = text.split(['.', ' ']).next().unwrap_or_default();
    if integer.starts_with('8') || integer == "11" || integer == "18" { "an" } else { "a" }
}

fn dependence(scenario: &Scenario) -> String {
    let Source::Like { dependence: Some(dependence), .. } = &scenario.source else { return String::new() };
    match dependence {
        Dependence::MovingAverage { weights } => {
            format!(". Neighbouring values share a moving average of {} terms", weights.len())
        }
        Dependence::Autoregressive { correlation } => {
            format!(". Neighbouring values have correlation {}", exact(*correlation))
        }
        Dependence::WithoutReplacement { population } => {
            format!(". They are drawn without replacement from {}", counted(scenario, *population))
        }
    }
}

//! The quantity's name and unit in running text: singular, plural, with a number.

use super::numbers::{number, whole};
use crate::scenario::{Scenario, Source, Statistic};

/// The quantity's name in the singular; `value` where the scenario gives none.
pub fn singular(scenario: &Scenario) -> String {
    let name = scenario.quantity.as_ref().and_then(|quantity| quantity.name.as_deref()).map(str::trim);
    name.filter(|name| !name.is_empty()).unwrap_or("value").to_owned()
}

/// Whether a name is a mass noun, which takes no plural: `on-board spending`.
fn is_mass(name: &str) -> bool {
    const MASS: [&str; 12] = [
        "spending", "waiting", "handling", "rainfall", "weather", "revenue", "income", "traffic", "money",
        "wear", "damage", "noise",
    ];
    name.rsplit([' ', '-']).next().is_some_and(|last| MASS.contains(&last.to_lowercase().as_str()))
}

/// The English plural of a name, by the regular rules.
pub fn plural_of(name: &str) -> String {
    let lower = name.to_lowercase();
    let ends = |endings: &[&str]| endings.iter().any(|ending| lower.ends_with(ending));
    if ends(&["ss", "x", "z", "ch", "sh", "us"]) {
        format!("{name}es")
    } else if lower.ends_with('s') {
        name.to_owned()
    } else if lower.ends_with('y') && !ends(&["ay", "ey", "oy", "uy"]) {
        format!("{}ies", &name[..name.len() - 1])
    } else {
        format!("{name}s")
    }
}

/// `40 boarding times`, `1 boarding time`, `300 amounts of on-board spending`.
pub fn counted(scenario: &Scenario, n: u64) -> String {
    let name = singular(scenario);
    match (n, is_mass(&name)) {
        (1, true) => format!("1 amount of {name}"),
        (n, true) => format!("{} amounts of {name}", whole(n)),
        (1, false) => format!("1 {name}"),
        (n, false) => format!("{} {}", whole(n), plural_of(&name)),
    }
}

/// The plural without a number.
pub fn plural(scenario: &Scenario) -> String {
    let name = singular(scenario);
    if is_mass(&name) { format!("amounts of {name}") } else { plural_of(&name) }
}

/// A value in the quantity's unit: `55 s`.
pub fn with_unit(scenario: &Scenario, value: f64) -> String {
    text_with_unit(scenario, &number(value))
}

/// A number already put in words, with the quantity's unit.
pub fn text_with_unit(scenario: &Scenario, value: &str) -> String {
    match scenario.quantity.as_ref().and_then(|quantity| quantity.unit.as_deref()) {
        Some(unit) if !unit.trim().is_empty() => format!("{value} {}", unit.trim()),
        _ => value.to_owned(),
    }
}

/// What is reported, without its size: `the mean boarding time`, `the total of the boarding times`.
pub fn statistic(scenario: &Scenario) -> String {
    match (&scenario.source, scenario.statistic) {
        (Source::Groups { .. }, _) => "the difference of means".to_owned(),
        (Source::Parts { .. }, _) | (_, Statistic::Sum) => format!("the total of the {}", plural(scenario)),
        (_, Statistic::Mean) => format!("the mean {}", singular(scenario)),
    }
}

/// What is reported, with its size: `the mean of 40 boarding times`.
pub fn sized_statistic(scenario: &Scenario) -> String {
    match &scenario.source {
        Source::Groups { groups } => format!(
            "the difference between the means of two groups of {} and {}",
            whole(groups[0].n),
            counted(scenario, groups[1].n)
        ),
        Source::Parts { parts } => {
            let total = counted(scenario, scenario.source.total());
            let counts = parts.iter().map(|part| whole(part.count)).collect::<Vec<_>>();
            match counts.as_slice() {
                [_] => format!("the total of {total}"),
                [first, second] => format!("the total of {total} of two kinds ({first} and {second})"),
                many => format!("the total of {total} of {} kinds", many.len()),
            }
        }
        Source::Like { n, .. } => {
            let word = if scenario.statistic == Statistic::Sum { "total" } else { "mean" };
            format!("the {word} of {}", counted(scenario, *n))
        }
    }
}

/// The true value an interval is about: `the true mean`, `the expected total`, `the true difference`.
pub fn target(scenario: &Scenario) -> &'static str {
    match (&scenario.source, scenario.statistic) {
        (Source::Groups { .. }, _) => "the true difference",
        (Source::Parts { .. }, _) | (_, Statistic::Sum) => "the expected total",
        (_, Statistic::Mean) => "the true mean",
    }
}

/// The planned size: `n = 40`, `n = 900 and 100`.
pub fn size(scenario: &Scenario) -> String {
    match &scenario.source {
        Source::Like { n, .. } => format!("n = {}", whole(*n)),
        Source::Groups { groups } => format!("n = {} and {}", whole(groups[0].n), whole(groups[1].n)),
        Source::Parts { .. } => format!("n = {} in all", whole(scenario.source.total())),
    }
}

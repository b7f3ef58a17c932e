//! What a reader must keep in mind beside the numbers: a model is not the world.

use crate::prepared::Prepared;
use crate::remedies::asks_a_total;
use crate::report::ClaimFacts;
use crate::scenario::{Claim, Scenario, Sides, Source};
use crate::words::numbers::{about_points, chance, percent};
use gaussgap_simulation::law::LawSpec;

/// Every caution for a scenario, the gravest first; `searched` says whether *safe from* was looked for.
pub(crate) fn cautions(prepared: &Prepared, claim: &ClaimFacts, searched: bool) -> Vec<String> {
    let scenario = prepared.scenario;
    let mut cautions = Vec::new();
    if concerns_safety(scenario) {
        cautions.push(
            "Where people can be hurt, this does not replace the applicable code or a licensed professional."
                .to_owned(),
        );
    }
    if !prepared.has_variance() {
        cautions.push(
            "A law without a finite variance has no normal limit: cap it at a stated value, restrict it, or use \
             another model; no interval of the form mean ± a multiple of the standard error is valid."
                .to_owned(),
        );
    } else if prepared.laws.iter().any(|law| law.moments.third_absolute_central.is_none()) {
        cautions.push(
            "A law without a third moment converges more slowly than 1/√n, and no Berry–Esseen bound applies; a few \
             very large values decide the result."
                .to_owned(),
        );
    } else if prepared.laws.iter().any(|law| law.moments.excess_kurtosis.is_none()) {
        cautions.push(
            "The tails are heavy (no fourth moment): a spread estimated from data is unreliable.".to_owned(),
        );
    }
    cautions.extend(lopsided(scenario, claim));
    if searched && asks_a_total(prepared) {
        cautions.push(
            "Here safe-from compares other plans, not better ones: the total changes with n while the stated value \
             stays, so from some n on both chances are all but 0 or 1 and agree for that reason alone."
                .to_owned(),
        );
    }
    if uses_data(scenario) {
        cautions.push(
            "The law is a pilot file: values rarer than about one in its number of rows are missing from it, and the \
             true tail may be longer."
                .to_owned(),
        );
    }
    cautions.push(
        "The summands are taken to be independent and to follow the stated law throughout; dependence or drift can \
         matter more than any gap shown here."
            .to_owned(),
    );
    cautions
}

/// A two-sided interval can cover as promised and still miss on one side too often.
fn lopsided(scenario: &Scenario, claim: &ClaimFacts) -> Option<String> {
    if !matches!(scenario.claim, Claim::Interval { sides: Sides::Two, .. }) {
        return None;
    }
    let (low, high) = (claim.miss_low?, claim.miss_high?);
    let nominal = claim.nominal_miss_low?;
    let (side, worse) = if high.value > low.value { ("high", high) } else { ("low", low) };
    if worse.value - worse.error - nominal <= claim.allowed {
        return None;
    }
    Some(format!(
        "One side alone is off by more than {}: the interval misses {side} {} of the time, not {}.",
        about_points(claim.allowed),
        chance(worse.value, 1),
        percent(nominal)
    ))
}

/// Whether a data law is anywhere in the scenario.
fn uses_data(scenario: &Scenario) -> bool {
    let mut found = false;
    scenario.source.visit_laws(&mut |_, law| found |= matches!(law, LawSpec::Data { .. }));
    found
}

/// Whether words of the scenario suggest that people can be hurt: loads, doses, pressures, strengths.
fn concerns_safety(scenario: &Scenario) -> bool {
    const WORDS: [&str; 26] = [
        "load",
        "loads",
        "loading",
        "weight",
        "weights",
        "dose",
        "doses",
        "dosage",
        "dosing",
        "pressure",
        "pressures",
        "strength",
        "strengths",
        "stress",
        "stresses",
        "force",
        "forces",
        "torque",
        "toxic",
        "toxicity",
        "radiation",
        "safety",
        "stability",
        "bearing",
        "voltage",
        "ballast",
    ];
    let quantity = scenario.quantity.as_ref();
    let texts = [
        scenario.title.as_deref(),
        scenario.notes.as_deref(),
        quantity.and_then(|quantity| quantity.name.as_deref()),
    ];
    let named = texts.into_iter().flatten().any(|text| {
        text.to_lowercase().split(|letter: char| !letter.is_alphabetic()).any(|word| WORDS.contains(&word))
    });
    const UNITS: [&str; 16] = [
        "t", "kg", "tonne", "tonnes", "N", "kN", "MN", "Pa", "kPa", "MPa", "bar", "mg", "Gy", "mGy", "Sv",
        "mSv",
    ];
    let unit = quantity.and_then(|quantity| quantity.unit.as_deref());
    // A total of weights is a load; the mean of parcels weighed in kg is not by itself.
    let total = matches!(scenario.source, Source::Parts { .. })
        || scenario.statistic == crate::scenario::Statistic::Sum;
    named || (total && unit.is_some_and(|unit| UNITS.contains(&unit.trim())))
}

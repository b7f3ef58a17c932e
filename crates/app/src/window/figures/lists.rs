//! Remedies, rules of thumb and cautions: the figures that are lists of words.

use super::View;
use super::table::Table;
use crate::window::numbers::{thousands, with_error};

const LATER: &str = "Computed after the planned n.";

fn list(columns: &[&str], empty: &str) -> Table {
    Table { empty: empty.to_owned(), wraps: true, ..Table::new(columns) }
}

fn verdict(holds: bool) -> &'static str {
    if holds { "✓\u{a0}holds" } else { "✗\u{a0}fails" }
}

/// What else could be done at the planned n, each with its actual figure.
pub fn remedies(view: &View<'_>) -> Table {
    let current = view.full.filter(|_| view.full_is_current);
    let empty = if current.is_some() { "No remedy applies to this claim." } else { LATER };
    let mut table = list(&["remedy", "holds", "actual", "note"], empty);
    for remedy in current.iter().flat_map(|full| &full.report.remedies) {
        let actual = remedy.actual.map_or_else(String::new, |a| with_error(a.value, a.error));
        table.rows.push(vec![
            remedy.name.clone(),
            verdict(remedy.holds).to_owned(),
            actual,
            remedy.note.clone(),
        ]);
    }
    table
}

/// Rules of thumb with what they say and whether the computed verdict agrees.
pub fn rules(view: &View<'_>) -> Table {
    let current = view.full.filter(|_| view.full_is_current);
    let empty = if current.is_some() { "No rule of thumb applies to this claim." } else { LATER };
    let mut table = list(&["rule", "says", "agrees", "asks for", "source"], empty);
    for rule in current.iter().flat_map(|full| &full.report.rules_of_thumb) {
        let agrees = match rule.agrees {
            Some(true) => "✓\u{a0}agrees",
            Some(false) => "✗\u{a0}disagrees",
            None => "undecided",
        };
        let asks = rule.n.map_or_else(String::new, |n| format!("n ≥ {}", thousands(n as f64)));
        table.rows.push(vec![
            rule.rule.clone(),
            format!("says {}", rule.says),
            agrees.to_owned(),
            asks,
            rule.source.clone(),
        ]);
    }
    table
}

/// Warnings about the law and cautions about the plan.
pub fn cautions(view: &View<'_>) -> Table {
    let mut table = list(&["caution"], "None.");
    let report = &view.shown.report;
    let summands = report.summands.iter().chain([&report.summand]);
    let mut lines: Vec<&String> =
        summands.flat_map(|summand| &summand.warnings).chain(&report.cautions).collect();
    let mut seen = std::collections::HashSet::new();
    lines.retain(|line| seen.insert(line.as_str()));
    table.rows = lines.into_iter().map(|line| vec![line.clone()]).collect();
    table
}

//! The finding, always in the same place: the verdict in one sentence, safe from, the cheapest remedy that holds.

use super::Asks;
use crate::window::command::Command;
use crate::window::figures::View;
use crate::window::numbers::{shown, thousands, with_error};
use crate::window::tokens::{self, Palette};
use crate::window::work::{Progress, Stage};
use egui::{Color32, RichText, Ui};
use gaussgap_conclusions::report::{State, Verdict};

/// What the panel knows besides the report.
#[derive(Debug, Clone, Copy)]
pub struct Circumstances {
    /// Whether the shown report belongs to the present input.
    pub is_current: bool,
    /// Whether the present input cannot be assessed, or a field cannot be read.
    pub has_problem: bool,
    /// What the worker is doing.
    pub progress: Option<Progress>,
    /// The user stopped the work on the present input.
    pub stopped: bool,
}

/// A mistake, marked by a word and colour.
pub fn mistake(ui: &mut Ui, text: &str) {
    let palette = tokens::palette(ui);
    ui.label(RichText::new(format!("✗ {text}")).color(palette.fails).size(12.0));
}

fn state(state: State, palette: &Palette) -> (&'static str, Color32) {
    match state {
        State::Holds => ("✓ HOLDS", palette.holds),
        State::Fails => ("✗ FAILS", palette.fails),
        State::Undecided => ("? UNDECIDED", palette.undecided),
    }
}

/// Draws the finding of a report.
pub fn show(ui: &mut Ui, view: &View<'_>, now: Circumstances, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    let report = &view.shown.report;
    let (word, color) = state(report.verdict.state, palette);
    ui.spacing_mut().item_spacing.y = 3.0;
    ui.horizontal_top(|ui| {
        let badge = egui::Frame::new().stroke(egui::Stroke::new(2.0, color)).corner_radius(tokens::CORNER);
        badge.inner_margin(egui::Margin::symmetric(8, 3)).show(ui, |ui| {
            ui.label(RichText::new(word).font(tokens::bold(tokens::BODY)).color(color));
        });
        let because = RichText::new(&report.verdict.because).font(tokens::bold(tokens::FINDING));
        ui.add(egui::Label::new(if now.is_current { because } else { because.color(palette.muted) }).wrap());
    });
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 14.0;
        ui.label(RichText::new(safe_from(view)).color(palette.ink));
        if let Some(remedy) = cheapest(view) {
            ui.label(remedy);
        }
        status(ui, now, palette, asks);
    });
    for caution in report.cautions.iter().filter(|caution| caution.contains("licensed professional")) {
        ui.label(RichText::new(format!("⚠ {caution}")).color(palette.undecided).size(12.0));
    }
}

/// Draws what there is to say before the first answer.
pub fn waiting(ui: &mut Ui, now: Circumstances, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 14.0;
        let words =
            if now.has_problem { "No finding: this plan cannot be assessed." } else { "Computing …" };
        ui.label(RichText::new(words).font(tokens::bold(tokens::FINDING)));
        status(ui, Circumstances { has_problem: false, ..now }, palette, asks);
    });
}

/// Where the work stands, or why the finding is an old one.
fn status(ui: &mut Ui, now: Circumstances, palette: &Palette, asks: &mut Asks) {
    if now.has_problem {
        let text = "The figures belong to the previous input.";
        ui.label(RichText::new(text).color(palette.undecided).font(tokens::bold(12.0)));
    }
    match now.progress {
        Some(progress) if progress.elapsed.as_millis() > 250 => {
            let doing = if progress.stage == Stage::Planned { "computing" } else { "looking at other n" };
            ui.label(
                RichText::new(format!("{doing} … {:.0} %", progress.fraction * 100.0)).color(palette.muted),
            );
            if ui.small_button("Stop").clicked() {
                asks.command(Command::Stop);
            }
        }
        _ if now.stopped => {
            ui.label(RichText::new("stopped").color(palette.undecided));
            if ui.small_button("Go on").clicked() {
                asks.command(Command::GoOn);
            }
        }
        _ => {}
    }
}

/// "Safe from n = 312 on (every n up to 10,000 checked)."
fn safe_from(view: &View<'_>) -> String {
    let Some(full) = view.full.filter(|_| view.full_is_current) else {
        return "Safe from n = …".to_owned();
    };
    safe_from_words(&full.report.verdict)
}

fn safe_from_words(verdict: &Verdict) -> String {
    let Some(checked) = &verdict.checked else { return "Safe from: not searched.".to_owned() };
    let to = thousands(checked.to as f64);
    let how = if checked.every_n {
        format!("every n up to {to} checked")
    } else {
        format!("some n up to {to} checked")
    };
    match verdict.safe_from {
        Some(n) => format!("Safe from n = {} on ({how}).", thousands(n as f64)),
        None => format!("Not safe from any n up to {to} on ({how})."),
    }
}

/// "Cheapest remedy that holds: …"
fn cheapest(view: &View<'_>) -> Option<String> {
    let full = view.full.filter(|_| view.full_is_current)?;
    if full.report.verdict.state == State::Holds {
        return None;
    }
    let remedies = &full.report.remedies;
    match remedies.iter().find(|remedy| remedy.holds) {
        Some(remedy) => {
            let actual = remedy
                .actual
                .filter(|a| a.value != 0.0)
                .map_or_else(String::new, |a| format!(" ({})", with_error(a.value, a.error)));
            Some(format!("Cheapest that holds: {}{actual}.", remedy.name))
        }
        None if remedies.is_empty() => None,
        None => Some("No remedy looked at holds.".to_owned()),
    }
}

/// How the figures were computed: one short line, and everything there is to say.
pub fn method(view: &View<'_>) -> (String, String) {
    let report = &view.shown.report;
    let mut rest = Vec::new();
    if let Some(distance) = report.distance.kolmogorov {
        rest.push(format!("error of the distance ≤ {}", shown(distance.error, 1)));
    }
    if let Some(draws) = report.method.draws {
        rest.push(format!("{} draws", thousands(draws as f64)));
    }
    rest.push(format!("{} s", shown(report.method.seconds, 2)));
    let detail = &report.method.detail;
    let first = detail.split("; ").next().unwrap_or("");
    if !first.is_empty() {
        rest.insert(0, first.to_owned());
    }
    (rest.join(" · "), detail.replace("; ", "\n"))
}

#[cfg(test)]
mod tests {
    use super::*;
    use gaussgap_conclusions::report::Checked;

    #[test]
    fn safe_from_says_what_was_checked() {
        let mut verdict = Verdict {
            state: State::Fails,
            because: String::new(),
            safe_from: Some(1312),
            last_failing: Some(1311),
            checked: Some(Checked { from: 1, to: 10_000, every_n: true, which: None }),
        };
        assert_eq!(safe_from_words(&verdict), "Safe from n = 1,312 on (every n up to 10,000 checked).");
        verdict.safe_from = None;
        assert_eq!(
            safe_from_words(&verdict),
            "Not safe from any n up to 10,000 on (every n up to 10,000 checked)."
        );
        verdict.checked = None;
        assert_eq!(safe_from_words(&verdict), "Safe from: not searched.");
    }
}

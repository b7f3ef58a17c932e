//! The comparison of pinned plans with the present one.

use super::board::sample;
use super::cards::small;
use super::fields::{self, Field, Fields};
use super::{Ask, Asks};
use crate::window::figures::View;
use crate::window::model::prepared::Prepared;
use crate::window::numbers::{shown, thousands};
use crate::window::tokens::{self, dash};
use egui::{Grid, Id, RichText, ScrollArea, Ui};
use gaussgap_conclusions::report::State;

/// Draws one row per pin and one for the present plan.
pub fn show(ui: &mut Ui, fields: &mut Fields, view: &View<'_>, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    ScrollArea::horizontal().id_salt("pins").show(ui, |ui| {
        Grid::new("comparison").num_columns(9).spacing([12.0, 3.0]).striped(true).show(ui, |ui| {
            for heading in ["", "plan", "n", "distance", "actual", "difference", "verdict", "safe from", ""] {
                ui.label(RichText::new(heading).font(tokens::bold(tokens::SMALL)).color(palette.muted));
            }
            ui.end_row();
            sample(ui, palette.accent, dash::ACTUAL);
            ui.label("present plan");
            figures(ui, view.shown, view.full.filter(|_| view.full_is_current).map(|full| &**full));
            ui.label("");
            ui.end_row();
            for (index, pin) in view.pins.iter().enumerate() {
                sample(ui, palette.ghosts[index % 4], dash::GHOSTS[index % 4]);
                let label = format!("Name of pin {}", index + 1);
                let spec = Field::card(Id::unique(("pin", index)), &label, 170.0);
                if let Some(name) = fields::text(ui, fields, &spec, &pin.name) {
                    asks.list.push(Ask::RenamePin(index, name));
                }
                figures(ui, &pin.found, Some(&pin.found));
                ui.horizontal(|ui| {
                    if small(ui, "Restore", &format!("Go back to the plan of pin {}", index + 1)) {
                        asks.list.push(Ask::RestorePin(index));
                    }
                    if index > 0 && small(ui, "↑", &format!("Move pin {} up", index + 1)) {
                        asks.list.push(Ask::PinEarlier(index));
                    }
                    if small(ui, "×", &format!("Remove pin {}", index + 1)) {
                        asks.list.push(Ask::Unpin(index));
                    }
                });
                ui.end_row();
            }
        });
    });
}

fn figures(ui: &mut Ui, found: &Prepared, full: Option<&Prepared>) {
    let report = &found.report;
    let number = |value: Option<f64>| value.map_or_else(|| "–".to_owned(), |value| shown(value, 4));
    ui.label(thousands(report.scenario.source.total() as f64));
    ui.label(number(report.distance.kolmogorov.map(|distance| distance.value)));
    ui.label(number(report.claim.actual.map(|actual| actual.value)));
    ui.label(number(report.claim.difference));
    ui.label(match report.verdict.state {
        State::Holds => "✓ holds",
        State::Fails => "✗ fails",
        State::Undecided => "? undecided",
    });
    let searched = full.filter(|full| full.report.verdict.checked.is_some());
    ui.label(match searched.map(|full| full.report.verdict.safe_from) {
        Some(Some(n)) => thousands(n as f64),
        Some(None) => "none found".to_owned(),
        None => "…".to_owned(),
    });
}

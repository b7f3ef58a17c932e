//! The bar at the very top: the scenario's title and the commands.

use super::Asks;
use super::fields::{self, Field, Fields};
use crate::window::command::Command;
use crate::window::model::document::Document;
use crate::window::model::edit::Edit;
use crate::window::tokens;
use egui::{Button, Id, Response, RichText, Ui};

/// What the bar shows besides the document.
#[derive(Debug, Clone, Copy)]
pub struct Bar {
    /// Whether a plan can be pinned now.
    pub can_pin: bool,
    /// Whether there is a report to export.
    pub can_export: bool,
    /// Whether the start page is shown.
    pub start_page: bool,
}

/// Draws the bar.
pub fn show(ui: &mut Ui, fields: &mut Fields, document: &Document, bar: Bar, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 4.0;
        mark(ui);
        ui.label(RichText::new("Gaussgap").font(tokens::bold(15.0)).color(palette.accent));
        ui.add_space(6.0);
        if !bar.start_page {
            let title = document.scenario().title.clone().unwrap_or_default();
            let spec = Field { hint: "untitled plan", ..Field::card(Id::unique("title"), "Title", 250.0) };
            if let Some(title) = fields::text(ui, fields, &spec, &title) {
                asks.edit(Edit::Title(title));
            }
            let file = document
                .path()
                .and_then(|path| path.file_name())
                .map(|name| name.to_string_lossy().into_owned());
            let (state, tip) = match (file, document.is_changed()) {
                (Some(file), true) => ("● changed", format!("{file} has unsaved changes")),
                (Some(file), false) => ("saved", file),
                (None, true) => ("● unsaved", "in no file yet".to_owned()),
                (None, false) => ("", String::new()),
            };
            if !state.is_empty() {
                ui.label(RichText::new(state).size(tokens::SMALL).color(palette.muted)).on_hover_text(tip);
            }
            ui.add_space(6.0);
        }
        let mut button = |text: &str, command: Command, enabled: bool| {
            let response: Response = ui.add_enabled(enabled, Button::new(text)).on_hover_text(command.tip());
            if response.clicked() {
                asks.command(command);
            }
        };
        if !bar.start_page {
            button("Scenarios", Command::StartPage, true);
        }
        button("Open", Command::Open, true);
        if !bar.start_page {
            button("Save", Command::Save, true);
            button("Export", Command::Export, bar.can_export);
            button("Undo", Command::Undo, document.can_undo());
            button("Redo", Command::Redo, document.can_redo());
            button("Pin", Command::Pin, bar.can_pin);
        }
        let dark = ui.visuals().dark_mode;
        let mut button = |text: &str, command: Command| {
            if ui.button(text).on_hover_text(command.tip()).clicked() {
                asks.command(command);
            }
        };
        button(if dark { "Light" } else { "Dark" }, Command::Brightness);
        button("Keys", Command::Shortcuts);
    });
}

/// The mark of the program: a step curve crossing a smooth one.
fn mark(ui: &mut Ui) {
    let palette = tokens::palette(ui);
    let (rect, _) = ui.allocate_exact_size(egui::vec2(20.0, 20.0), egui::Sense::hover());
    let at = |x: f32, y: f32| rect.left_top() + egui::vec2(x, y);
    let steps = vec![
        at(1.0, 18.0),
        at(6.0, 18.0),
        at(6.0, 13.0),
        at(11.0, 13.0),
        at(11.0, 5.0),
        at(16.0, 5.0),
        at(16.0, 2.0),
        at(20.0, 2.0),
    ];
    let smooth =
        vec![at(0.0, 17.0), at(4.0, 15.5), at(8.0, 12.0), at(11.0, 8.5), at(15.0, 4.5), at(20.0, 2.8)];
    ui.painter().line(smooth, egui::Stroke::new(1.5, palette.normal));
    ui.painter().line(steps, egui::Stroke::new(2.0, palette.accent));
}

//! The start page: bundled scenarios, recent files, a new plan.

use super::{Ask, Asks};
use crate::window::command::Command;
use crate::window::tokens;
use egui::{Button, RichText, ScrollArea, Sense, Ui, UiBuilder, WidgetInfo, vec2};
use std::path::PathBuf;

/// A bundled scenario as the start page shows it.
#[derive(Debug, Clone)]
pub struct Sample {
    /// Its title.
    pub title: String,
    /// The plan sentence.
    pub plan: String,
}

/// Draws the page.
pub fn show(ui: &mut Ui, samples: &[Sample], recent: &[PathBuf], can_return: bool, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    ScrollArea::vertical().id_salt("start").auto_shrink(false).show(ui, |ui| {
        ui.add_space(tokens::SPACE);
        ui.label(RichText::new("Is the normal approximation safe for this law, at this n, for this use?").font(tokens::bold(20.0)));
        let words = "State the plan, build the law of one measurement, read the finding. Every number carries an error that can be relied on.";
        ui.label(RichText::new(words).color(palette.muted));
        ui.add_space(tokens::SPACE);
        ui.horizontal_wrapped(|ui| {
            let mut button = |text: &str, command: Command| {
                if ui.button(text).on_hover_text(command.tip()).clicked() {
                    asks.command(command);
                }
            };
            button("New plan", Command::New);
            button("Open a scenario file …", Command::Open);
            if can_return {
                button("Back to the plan", Command::Back);
            }
        });
        if !recent.is_empty() {
            heading(ui, "Recent files");
            for path in recent {
                let name = path.display().to_string();
                if ui.add(Button::new(&name).frame_when_inactive(false).truncate()).clicked() {
                    asks.list.push(Ask::Open(path.clone()));
                }
            }
        }
        heading(ui, "From the Quillmere Ferry Line");
        let columns = ((ui.available_width() / 330.0).floor() as usize).clamp(1, 4);
        let width = (ui.available_width() - 6.0 - tokens::GAP * (columns - 1) as f32) / columns as f32;
        for (row, samples) in samples.chunks(columns).enumerate() {
            ui.horizontal(|ui| {
                for (column, sample) in samples.iter().enumerate() {
                    if card(ui, width, sample) {
                        asks.list.push(Ask::Example(row * columns + column));
                    }
                }
            });
        }
        ui.add_space(tokens::SPACE);
        ui.label(RichText::new("Invented data of an invented ferry line.").size(tokens::SMALL).color(palette.muted));
    });
}

fn heading(ui: &mut Ui, words: &str) {
    ui.add_space(tokens::SPACE);
    ui.label(RichText::new(words).font(tokens::bold(14.0)));
}

/// A card that can be pressed.
fn card(ui: &mut Ui, width: f32, sample: &Sample) -> bool {
    let palette = tokens::palette(ui);
    let (rect, response) = ui.allocate_exact_size(vec2(width, 112.0), Sense::click());
    response.widget_info(|| WidgetInfo::labeled(egui::accesskit::Role::Button, true, &sample.title));
    if response.gained_focus() {
        response.scroll_to_me(None);
    }
    let held = response.hovered() || response.has_focus();
    let line = if held { palette.accent } else { palette.line };
    let stroke = egui::Stroke::new(if response.has_focus() { 2.0 } else { 1.0 }, line);
    let ground = if held { palette.well } else { palette.card };
    ui.painter().rect(rect.shrink(1.0), tokens::CORNER, ground, stroke, egui::StrokeKind::Inside);
    let mut child = ui.new_child(
        UiBuilder::new()
            .layout(egui::Layout::top_down(egui::Align::Min))
            .id_salt(&sample.title)
            .max_rect(rect.shrink2(vec2(12.0, 9.0))),
    );
    child.set_clip_rect(rect.intersect(ui.clip_rect()));
    child.spacing_mut().item_spacing.y = 3.0;
    let title = RichText::new(&sample.title).font(tokens::bold(13.5)).color(palette.accent);
    child.add(egui::Label::new(title).selectable(false).truncate());
    let plan = RichText::new(&sample.plan).size(12.0).color(palette.ink);
    child.add(egui::Label::new(plan).selectable(false).wrap());
    response.clicked()
}

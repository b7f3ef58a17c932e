//! The board of figures: tiles in a grid, one of them enlarged on request, each also as a table.

use super::{Ask, Asks};
use crate::window::command::Command;
use crate::window::figures::{self, Figure, View, fit, table};
use crate::window::tokens::{self, dash};
use egui::{
    Frame, Id, Margin, Rect, RichText, ScrollArea, Sense, Stroke, Ui, UiBuilder, Vec2, WidgetInfo, pos2, vec2,
};
use std::collections::HashSet;

/// What the board remembers.
#[derive(Debug, Default)]
pub struct Board {
    /// The figure that fills the board.
    pub enlarged: Option<Figure>,
    /// Figures shown as tables.
    pub tables: HashSet<Figure>,
    /// The part of the horizontal axis that is shown; the whole where there is none.
    pub range: Option<(f64, f64)>,
}

impl Board {
    /// Enlarges a figure, or brings the board back where it is enlarged already.
    pub fn toggle(&mut self, figure: Figure) {
        self.enlarged = if self.enlarged == Some(figure) { None } else { Some(figure) };
    }

    /// The part of the horizontal axis that is shown.
    pub fn shown_range(&self) -> (f64, f64) {
        self.range.unwrap_or(fit::WHOLE)
    }

    /// Shows another part of the horizontal axis.
    pub fn show_range(&mut self, range: (f64, f64)) {
        let range = fit::kept(range);
        self.range = (range != fit::WHOLE).then_some(range);
    }

    /// Moves the shown part by a share of its width.
    pub fn pan(&mut self, share: f64) {
        let (from, to) = self.shown_range();
        let by = share * (to - from);
        self.show_range((from + by, to + by));
    }

    /// Narrows the shown part about its middle, or about the cursor where it is inside.
    pub fn zoom(&mut self, factor: f64, cursor: Option<f64>) {
        let (from, to) = self.shown_range();
        let about = cursor.filter(|z| (from..=to).contains(z)).unwrap_or((from + to) / 2.0);
        self.show_range(fit::zoomed((from, to), factor, about));
    }

    /// All drawings as tables, or back.
    pub fn toggle_tables(&mut self) {
        if self.tables.is_empty() {
            self.tables = figures::ALL.into_iter().filter(|figure| figure.is_drawing()).collect();
        } else {
            self.tables.clear();
        }
    }
}

/// Draws the board.
pub fn show(ui: &mut Ui, board: &mut Board, view: &View<'_>, asks: &mut Asks) {
    legend(ui, view, asks);
    let space = ui.available_size();
    if let Some(figure) = board.enlarged.filter(|figure| figure.applies(view)) {
        tile(ui, space, figure, board, view, asks);
        return;
    }
    let shown: Vec<Figure> = figures::ALL.into_iter().filter(|figure| figure.applies(view)).collect();
    let bar = 14.0;
    let columns =
        (((space.x - bar) / tokens::FIGURE_WIDTH).floor() as usize).clamp(1, 3).min(shown.len().max(1));
    let rows = shown.len().div_ceil(columns);
    let visible_rows = ((space.y / tokens::FIGURE_HEIGHT).floor() as usize).clamp(1, rows.max(1));
    let gap = tokens::GAP;
    let height =
        ((space.y - gap * (visible_rows - 1) as f32) / visible_rows as f32).max(tokens::FIGURE_HEIGHT - 12.0);
    let scrolls = rows > visible_rows;
    let width = (space.x - if scrolls { bar } else { 0.0 } - gap * (columns - 1) as f32) / columns as f32;
    ScrollArea::vertical().id_salt("board").auto_shrink(false).show(ui, |ui| {
        ui.spacing_mut().item_spacing = Vec2::splat(gap);
        for row in shown.chunks(columns) {
            ui.horizontal(|ui| {
                for figure in row {
                    tile(ui, vec2(width, height), *figure, board, view, asks);
                }
            });
        }
    });
}

/// What the line patterns mean, once for all figures, and the axis switch.
fn legend(ui: &mut Ui, view: &View<'_>, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 5.0;
        let mut line = |words: &str, color, dash: &'static [f32]| {
            sample(ui, color, dash);
            ui.label(RichText::new(words).size(tokens::SMALL).color(palette.ink));
            ui.add_space(6.0);
        };
        line("actual", palette.accent, dash::ACTUAL);
        line("normal", palette.normal, dash::NORMAL);
        line("expansion", palette.expansion, dash::EXPANSION);
        line("Berry–Esseen bound", palette.bound, dash::BOUND);
        for (index, pin) in view.pins.iter().enumerate() {
            line(&format!("pin: {}", pin.name), palette.ghosts[index % 4], dash::GHOSTS[index % 4]);
        }
        if view.shown.own_units.is_some() {
            let own = view.own_units().is_some();
            let words = if own { "axis: own units" } else { "axis: standard units" };
            if ui.small_button(words).on_hover_text(Command::SwitchAxis.tip()).clicked() {
                asks.command(Command::SwitchAxis);
            }
        }
        let mut small = |words: &str, name: &str, command: Command| {
            let response = ui.small_button(words).on_hover_text(command.tip());
            response.widget_info(|| WidgetInfo::labeled(egui::accesskit::Role::Button, true, name));
            if response.clicked() {
                asks.command(command);
            }
        };
        small("+", "Zoom in", Command::ZoomIn);
        if view.range != fit::WHOLE {
            small("−", "Zoom out", Command::ZoomOut);
            small("whole axis", "Whole axis", Command::WholeAxis);
        }
    });
}

/// A short piece of a line pattern.
pub fn sample(ui: &mut Ui, color: egui::Color32, pattern: &'static [f32]) {
    let (rect, _) = ui.allocate_exact_size(vec2(26.0, 12.0), Sense::hover());
    let line = [rect.left_center(), rect.right_center()];
    let stroke = Stroke::new(tokens::LINE, color);
    if pattern.is_empty() {
        ui.painter().line_segment(line, stroke);
    } else {
        let dashes: Vec<f32> = pattern.iter().copied().step_by(2).collect();
        let gaps: Vec<f32> = pattern.iter().copied().skip(1).step_by(2).collect();
        ui.painter().extend(egui::Shape::dashed_line_with_offset(&line, stroke, &dashes, &gaps, 0.0));
    }
}

/// One tile: heading, drawing or table, a line of words.
fn tile(ui: &mut Ui, size: Vec2, figure: Figure, board: &mut Board, view: &View<'_>, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    let (outer, _) = ui.allocate_exact_size(size, Sense::hover());
    if !ui.is_rect_visible(outer) {
        return;
    }
    let frame =
        Frame::new().fill(palette.card).stroke(Stroke::new(1.0, palette.line)).corner_radius(tokens::CORNER);
    ui.painter().add(frame.paint(outer.shrink(1.0)));
    let inner = outer.shrink2(vec2(10.0, 7.0));
    let builder = UiBuilder::new()
        .layout(egui::Layout::top_down(egui::Align::Min))
        .id_salt(("tile", figure))
        .max_rect(inner);
    let mut child = ui.new_child(builder);
    let ui = &mut child;
    ui.set_clip_rect(outer.intersect(ui.clip_rect()));
    ui.spacing_mut().item_spacing.y = 2.0;
    let as_table = !figure.is_drawing() || board.tables.contains(&figure);
    heading(ui, figure, as_table, board, view, asks);
    let footer_height = if figure.is_drawing() { 17.0 } else { 0.0 };
    let body = Rect::from_min_max(
        pos2(inner.left(), ui.cursor().top() + 2.0),
        pos2(inner.right(), inner.bottom() - footer_height),
    );
    if body.height() < 20.0 {
        return;
    }
    let mut content = ui.new_child(
        UiBuilder::new().layout(egui::Layout::top_down(egui::Align::Min)).id_salt("body").max_rect(body),
    );
    if as_table {
        table::show(&mut content, Id::unique(("table", figure)), &figure.table(view));
    } else {
        let id = content.scope_id().with("figure");
        let response = content.interact(body, id, Sense::hover());
        let name = format!("{}: {}", figure.title(), figure.readout(&View { cursor: None, ..*view }));
        response.widget_info(|| WidgetInfo::labeled(egui::accesskit::Role::Image, true, &name));
        let asked = figure.draw(&mut content, body, view);
        if asked.cursor.is_some() {
            asks.cursor = asked.cursor;
        }
        if let Some(range) = asked.range {
            board.show_range(range);
        }
        if let Some(edit) = asked.edit {
            asks.edit(edit);
        }
    }
    if figure.is_drawing() {
        let words = RichText::new(figure.readout(view)).size(tokens::SMALL).color(palette.muted);
        let rect = Rect::from_min_max(pos2(inner.left(), inner.bottom() - 15.0), inner.max);
        let mut footer = ui.new_child(
            UiBuilder::new()
                .layout(egui::Layout::top_down(egui::Align::Min))
                .id_salt("footer")
                .max_rect(rect),
        );
        footer.add(egui::Label::new(words).truncate());
    }
}

fn heading(ui: &mut Ui, figure: Figure, as_table: bool, board: &mut Board, view: &View<'_>, asks: &mut Asks) {
    let palette = tokens::palette(ui);
    ui.horizontal(|ui| {
        ui.label(RichText::new(figure.title()).font(tokens::bold(14.0)));
        ui.with_layout(egui::Layout::right_to_left(egui::Align::Center), |ui| {
            ui.spacing_mut().button_padding = vec2(5.0, 1.0);
            let enlarged = board.enlarged == Some(figure);
            let words = if enlarged { "Back" } else { "Enlarge" };
            if button(ui, words, &format!("{words}: {}", figure.title()), &Command::Enlarge(figure).tip()) {
                board.toggle(figure);
            }
            if figure.is_drawing() {
                let words = if as_table { "Drawing" } else { "Table" };
                if button(ui, words, &format!("{}: {words}", figure.title()), &Command::AsTable.tip()) {
                    if as_table {
                        board.tables.remove(&figure);
                    } else {
                        board.tables.insert(figure);
                    }
                }
            }
            if (as_table || enlarged)
                && button(ui, "Copy", &format!("Copy the table of {}", figure.title()), "Copy as text")
            {
                asks.list.push(Ask::Copy(figure.table(view).to_text()));
            }
            ui.with_layout(egui::Layout::left_to_right(egui::Align::Center), |ui| {
                let words = RichText::new(figure.subtitle(view)).size(tokens::SMALL).color(palette.muted);
                ui.add(egui::Label::new(words).truncate());
            });
        });
    });
}

fn button(ui: &mut Ui, text: &str, name: &str, tip: &str) -> bool {
    let palette = tokens::palette(ui);
    let words = RichText::new(text).size(tokens::SMALL).color(palette.muted);
    let response = ui.add(egui::Button::new(words).frame_when_inactive(false));
    response.widget_info(|| WidgetInfo::labeled(egui::accesskit::Role::Button, true, name));
    let response = if tip.is_empty() { response } else { response.on_hover_text(tip) };
    response.clicked()
}

/// A frame around the board where there is nothing to show yet.
pub fn empty(ui: &mut Ui, words: &str) {
    let palette = tokens::palette(ui);
    let frame =
        Frame::new().fill(palette.card).stroke(Stroke::new(1.0, palette.line)).inner_margin(Margin::same(24));
    frame.corner_radius(tokens::CORNER).show(ui, |ui| {
        ui.set_min_size(ui.available_size());
        ui.label(RichText::new(words).color(palette.muted));
    });
}

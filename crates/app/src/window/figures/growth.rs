//! Growth: the distance over n, with bound, leading term and tolerance; the planned n as a handle.

use super::plot::{Axis, Ink, Marker, Plot, extent, paint_marker};
use super::table::Table;
use super::ticks::Scale;
use super::{Asked, View};
use crate::window::model::edit::{Edit, LARGEST_N, planned_n};
use crate::window::numbers::{shown, thousands};
use crate::window::tokens::{self, dash};
use egui::{CursorIcon, EventFilter, Key, Rect, Sense, Ui, WidgetInfo, pos2, vec2};
use gaussgap_conclusions::scenario::{Claim, Source};

/// Draws the figure.
pub fn draw(ui: &mut Ui, rect: Rect, view: &View<'_>) -> Asked {
    let palette = tokens::palette(ui);
    let n = planned_n(&view.scenario.source).max(1) as f64;
    let found = view.full.filter(|full| !full.growth.is_empty());
    let allowed = matches!(view.scenario.claim, Claim::Curve)
        .then_some(view.shown.report.claim.allowed)
        .filter(|allowed| *allowed > 0.0);
    let now = view.shown.report.distance.kolmogorov.map(|k| k.value).filter(|k| *k > 0.0);
    let lines = found.into_iter().chain(view.pins.iter().map(|pin| &pin.found)).map(|p| p.growth.as_slice());
    let ends = extent(lines.clone(), 1);
    let spare = allowed.or(now).map_or(-2.0, f64::log10);
    let (low, high) = ends.unwrap_or((spare, spare));
    let low = low.min(spare).min(now.map_or(0.0, f64::log10));
    let farthest = extent(lines, 0).map_or(0.0, |(_, high)| high);
    let x_to = (view.scenario.search.up_to.max(10) as f64).log10().max(farthest).max(n.log10() + 0.1);
    let y = Axis::new(low - 0.15, high.max(-0.25) + 0.1, Scale::Log, "");
    let plot = Plot::new(ui, rect, Axis::new(0.0, x_to, Scale::Log, "n"), y);
    if let Some(allowed) = allowed {
        plot.band(low - 1.0, allowed.log10(), palette.tolerance);
        plot.across(allowed.log10(), Ink::new(palette.tolerance_edge, dash::TOLERANCE));
        plot.note(0.0, allowed.log10(), "tolerance", palette.tolerance_edge);
    }
    for (index, pin) in view.pins.iter().enumerate() {
        plot.line(&pin.found.growth, Ink::new(palette.ghosts[index % 4], dash::GHOSTS[index % 4]).thin());
    }
    match found {
        Some(found) => {
            let fade = if view.growth_is_current { 1.0 } else { 0.35 };
            let ink = |color: egui::Color32, dash| Ink::new(color.gamma_multiply(fade), dash);
            plot.line(&found.growth_bound, ink(palette.bound, dash::BOUND));
            plot.line(&found.growth_leading, ink(palette.expansion, dash::EXPANSION));
            plot.line(&found.growth, ink(palette.accent, dash::ACTUAL));
            if let Some(safe) = found.report.verdict.safe_from.filter(|_| view.full_is_current) {
                let x = (safe.max(1) as f64).log10();
                plot.upright(x, Ink::new(palette.holds, dash::NORMAL).thin());
                plot.note(x, low - 0.1, &format!("safe from {}", thousands(safe as f64)), palette.holds);
            }
        }
        None => plot.says("Growth is computed after the planned n."),
    }
    if let Some(now) = now {
        plot.marker(n.log10(), now.log10(), Marker::Disc, palette.accent);
    }
    handle(ui, &plot, view, n)
}

/// The planned n as a handle: dragged by the pointer, stepped by the arrow keys.
fn handle(ui: &mut Ui, plot: &Plot, view: &View<'_>, n: f64) -> Asked {
    let palette = tokens::palette(ui);
    let x = plot.x_to_screen(n.log10());
    plot.upright(n.log10(), Ink { color: palette.ink, width: 1.0, dash: &[] });
    if !matches!(view.scenario.source, Source::Like { .. }) {
        return Asked::default();
    }
    let grip = Rect::from_center_size(pos2(x, plot.area.top() + 5.0), vec2(20.0, 18.0));
    let whole =
        grip.union(Rect::from_center_size(pos2(x, plot.area.center().y), vec2(9.0, plot.area.height())));
    let id = ui.scope_id().with("planned n");
    let response =
        ui.interact(whole, id, Sense::click_and_drag()).on_hover_cursor(CursorIcon::ResizeHorizontal);
    response.widget_info(|| WidgetInfo::slider(true, n, "Planned n (handle in Growth)"));
    let held = response.hovered() || response.dragged() || response.has_focus();
    let color = if held { palette.accent } else { palette.ink };
    paint_marker(ui.painter(), pos2(x, plot.area.top() + 4.0), Marker::Triangle, color, palette.card);
    if response.has_focus() {
        ui.painter().rect_stroke(
            grip,
            2.0,
            egui::Stroke::new(2.0, palette.accent),
            egui::StrokeKind::Outside,
        );
        let filter = EventFilter { horizontal_arrows: true, ..EventFilter::default() };
        ui.memory_mut(|memory| memory.set_focus_lock_filter(id, filter));
    }
    let mut wanted = None;
    if let Some(at) = response.interact_pointer_pos().filter(|_| response.dragged()) {
        wanted = Some(10f64.powf(plot.x_from_screen(at.x)));
    }
    if response.has_focus() {
        let (left, right, far) = ui.input(|i| {
            (
                i.num_presses(Key::ArrowLeft),
                i.num_presses(Key::ArrowRight),
                i.modifiers.shift || i.modifiers.ctrl,
            )
        });
        let step = if far { (n * 0.1).max(1.0).round() } else { 1.0 };
        if left + right > 0 {
            wanted = Some(n + step * (right as f64 - left as f64));
        }
    }
    let n_wanted = wanted.map(|wanted| wanted.round().clamp(1.0, LARGEST_N as f64) as u64);
    Asked { edit: n_wanted.map(|n| Edit::N { slot: 0, n }), ..Asked::default() }
}

/// The line under the figure.
pub fn readout(view: &View<'_>) -> String {
    let facts = &view.shown.report.distance;
    let n = planned_n(&view.shown.report.scenario.source);
    let mut text = format!("n = {}", thousands(n as f64));
    if let Some(distance) = facts.kolmogorov {
        text.push_str(&format!(": {}", shown(distance.value, 3)));
    }
    if let Some(leading) = facts.leading_term {
        text.push_str(&format!(", first term {}", shown(leading, 3)));
    }
    if let Some(bound) = &facts.berry_esseen {
        text.push_str(&format!(", bound {}", shown(bound.value, 3)));
    }
    text
}

/// The figure as a table.
pub fn table(view: &View<'_>) -> Table {
    let mut table = Table::new(&["n", "distance", "leading term", "Berry–Esseen"]);
    table.empty = "Growth is computed after the planned n.".to_owned();
    let Some(full) = view.full else { return table };
    let growth = &full.report.growth;
    let cell = |values: &[Option<f64>], i: usize| {
        values.get(i).copied().flatten().map_or_else(|| "not available".to_owned(), |value| shown(value, 5))
    };
    for (i, n) in growth.n.iter().enumerate() {
        table.rows.push(vec![
            thousands(*n as f64),
            cell(&growth.kolmogorov, i),
            cell(&growth.leading_term, i),
            cell(&growth.berry_esseen, i),
        ]);
    }
    table
}

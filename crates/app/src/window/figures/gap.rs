//! Gap: actual minus normal, with the tolerance band and the one-term expansion.

use super::fit::{self, both_sides, places, z_axis};
use super::plot::{Axis, Ink, Marker, Plot, extent};
use super::table::Table;
use super::ticks::Scale;
use super::{Asked, View};
use crate::window::numbers::shown;
use crate::window::tokens::{self, dash};
use egui::{Rect, Ui};
use gaussgap_conclusions::scenario::Claim;

/// The tolerance where it is about the whole curve.
fn band(view: &View<'_>) -> Option<f64> {
    matches!(view.scenario.claim, Claim::Curve)
        .then_some(view.shown.report.claim.allowed)
        .filter(|a| a.is_finite())
}

/// Draws the figure.
pub fn draw(ui: &mut Ui, rect: Rect, view: &View<'_>) -> Asked {
    let palette = tokens::palette(ui);
    let lines = view.pins.iter().map(|pin| pin.found.gap.as_slice()).chain([view.shown.gap.as_slice()]);
    let (low, high) = extent(lines.map(|line| fit::within(line, view.range)), 1).unwrap_or((-0.1, 0.1));
    let reach = low.abs().max(high.abs()).max(band(view).unwrap_or(0.0)).max(1e-12) * 1.12;
    let y = Axis::new(-reach, reach, Scale::Linear, "");
    let plot = Plot::new(ui, rect, z_axis(view), y);
    if let Some(allowed) = band(view) {
        plot.band(-allowed, allowed, palette.tolerance);
        for edge in [-allowed, allowed] {
            plot.across(edge, Ink::new(palette.tolerance_edge, dash::TOLERANCE).thin());
        }
        plot.note(view.range.0, allowed, "tolerance", palette.tolerance_edge);
    }
    plot.across(0.0, Ink { color: palette.muted, width: 1.0, dash: &[] });
    fit::ghosts(&plot, ui, view, |pin| &pin.gap);
    plot.line(&view.shown.expansion, Ink::new(palette.expansion, dash::EXPANSION));
    plot.line(&view.shown.gap, Ink::new(palette.accent, dash::ACTUAL));
    let facts = &view.shown.report.distance;
    if let Some((z, (actual, normal))) =
        facts.at_z.and_then(|z| Some((z, fit::at(view.shown, z, facts.side)?)))
    {
        plot.marker(z, actual - normal, Marker::Disc, palette.fails);
    }
    fit::cursor(&plot, ui, view, "gap")
}

/// The line under the figure.
pub fn readout(view: &View<'_>) -> String {
    if let Some((z, (at, below, normal))) = view.cursor.and_then(|z| Some((z, both_sides(view.shown, z)?))) {
        let (at, below) = (at - normal, below - normal);
        let gap = if (at - below).abs() > 1e-12 {
            format!("{} to {}", shown(below, 3), shown(at, 3))
        } else {
            shown(at, 3)
        };
        return format!("{}: actual − normal = {gap}", view.place(z));
    }
    let ends = extent([view.shown.gap.as_slice()], 1);
    ends.map_or_else(String::new, |(low, high)| format!("between {} and {}", shown(low, 3), shown(high, 3)))
}

/// The figure as a table.
pub fn table(view: &View<'_>) -> Table {
    let mut table = Table::new(&["place", "gap below", "gap at", "one-term expansion"]);
    for z in places(view) {
        if let Some((at, below, normal)) = both_sides(view.shown, z) {
            let term = view
                .shown
                .report
                .sum
                .skewness
                .map(|skewness| super::super::model::prepared::first_term(z, skewness));
            let term = term.map_or_else(|| "not defined".to_owned(), |term| shown(term, 4));
            table.rows.push(vec![view.place(z), shown(below - normal, 4), shown(at - normal, 4), term]);
        }
    }
    table
}

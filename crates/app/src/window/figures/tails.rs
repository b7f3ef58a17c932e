//! Tails: both tails on a log scale against the normal's, and their ratio at the probes.

use super::fit::{self, z_axis};
use super::plot::{Axis, Ink, Marker, Plot, extent};
use super::table::Table;
use super::ticks::Scale;
use super::{Asked, View};
use crate::window::numbers::{shown, with_error};
use crate::window::tokens::{self, dash};
use egui::{Rect, Ui};
use gaussgap_conclusions::report::TailRow;
use gaussgap_simulation::figure::Figure;

/// The tail beyond a probe: below it on the left, above it on the right, with the normal's.
fn tail(row: &TailRow) -> (Option<Figure>, f64) {
    if row.z <= 0.0 { (row.at_or_below, row.normal_at_or_below) } else { (row.above, row.normal_above) }
}

/// Draws the figure.
pub fn draw(ui: &mut Ui, rect: Rect, view: &View<'_>) -> Asked {
    let palette = tokens::palette(ui);
    let shown = view.shown;
    let probes: Vec<[f64; 2]> = shown
        .report
        .tails
        .iter()
        .filter_map(|row| {
            let value = tail(row).0?.value;
            (value > 0.0).then(|| [row.z, value.log10()])
        })
        .collect();
    let inside = |points: &[[f64; 2]]| -> Option<f64> { extent([points], 1).map(|(low, _)| low) };
    let lowest = [&shown.normal_low, &shown.normal_high]
        .into_iter()
        .filter_map(|line| line.iter().filter(|p| p[0].abs() <= fit::REACH).map(|p| p[1]).reduce(f64::min))
        .chain(inside(&probes))
        .fold(-4.0, f64::min);
    let floor = lowest.max(-12.0) - 0.3;
    let plot = Plot::new(ui, rect, z_axis(view), Axis::new(floor, 0.0, Scale::Log, ""));
    fit::ghosts(&plot, ui, view, |pin| &pin.tail_low);
    fit::ghosts(&plot, ui, view, |pin| &pin.tail_high);
    for line in [&shown.normal_low, &shown.normal_high] {
        plot.line(line, Ink::new(palette.normal, dash::NORMAL));
    }
    for line in [&shown.tail_low, &shown.tail_high] {
        plot.line(line, Ink::new(palette.accent, dash::ACTUAL));
    }
    for [z, y] in probes {
        plot.marker(z, y, Marker::Ring, palette.accent);
    }
    fit::cursor(&plot, ui, view, "tails")
}

/// The line under the figure.
pub fn readout(view: &View<'_>) -> String {
    if let Some((z, (at, below, normal))) =
        view.cursor.and_then(|z| Some((z, fit::both_sides(view.shown, z)?)))
    {
        let (actual, normal) = if z <= 0.0 { (at, normal) } else { (1.0 - below, 1.0 - normal) };
        if actual > 1e-10 && normal > 1e-10 {
            return format!(
                "beyond {}: actual {}, normal {}, ratio {}",
                view.place(z),
                shown(actual, 3),
                shown(normal, 3),
                shown(actual / normal, 3)
            );
        }
        return format!("beyond {}: too small to read off the curve; see the table", view.place(z));
    }
    let farthest = view.shown.report.tails.iter().max_by(|a, b| a.z.total_cmp(&b.z));
    match farthest.map(|row| (row.z, tail(row))) {
        Some((z, (Some(actual), normal))) if normal > 0.0 => {
            format!("above {}: {} times the normal's", view.place(z), shown(actual.value / normal, 3))
        }
        _ => String::new(),
    }
}

/// The figure as a table: the probes with their errors.
pub fn table(view: &View<'_>) -> Table {
    let mut table = Table::new(&["place", "tail", "actual", "normal", "ratio"]);
    for row in &view.shown.report.tails {
        let (actual, normal) = tail(row);
        let ratio = actual.filter(|_| normal > 0.0).map_or_else(String::new, |a| shown(a.value / normal, 4));
        table.rows.push(vec![
            view.place(row.z),
            (if row.z <= 0.0 { "at or below" } else { "above" }).to_owned(),
            actual.map_or_else(|| "not defined".to_owned(), |a| with_error(a.value, a.error)),
            shown(normal, 6),
            ratio,
        ]);
    }
    table
}

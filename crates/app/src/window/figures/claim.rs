//! Coverage: the claim's own numbers, actual against nominal, each on a scale of its own.

use super::plot::{Marker, paint_marker};
use super::table::Table;
use super::{Asked, View};
use crate::window::numbers::{shown, with_error};
use crate::window::tokens::{self, Palette};
use egui::{Align2, Painter, Rect, Stroke, Ui, pos2};
use gaussgap_simulation::figure::Figure;

/// One comparison of an actual with a nominal number.
struct Row {
    name: String,
    nominal: f64,
    actual: Option<Figure>,
    /// Largest difference allowed, where the tolerance is about this number.
    allowed: Option<f64>,
    /// Whether it is a share of misses on one side.
    miss: bool,
}

/// What the compared number is called.
fn name(kind: &str) -> &'static str {
    match kind {
        "interval" => "covers the mean",
        "test" => "size or power",
        "threshold" => "probability",
        "quantile" => "quantile (sd of the sum)",
        "deviation" => "probability of deviating",
        _ => "compared number",
    }
}

fn rows(view: &View<'_>) -> Vec<Row> {
    let claim = &view.shown.report.claim;
    let mut rows = vec![Row {
        name: name(&claim.kind).to_owned(),
        nominal: claim.nominal,
        actual: claim.actual,
        allowed: Some(claim.allowed),
        miss: false,
    }];
    let mut another = |name: &str, nominal: Option<f64>, actual: Option<Figure>, miss| {
        if let Some(nominal) = nominal {
            rows.push(Row { name: name.to_owned(), nominal, actual, allowed: None, miss });
        }
    };
    if claim.miss_low.is_some() || claim.miss_high.is_some() {
        another("lies below the mean", claim.nominal_miss_low, claim.miss_low, true);
        another("lies above the mean", claim.nominal_miss_high, claim.miss_high, true);
    }
    if let (Some(normal), actual) = (claim.normal_quantile, claim.actual_quantile) {
        let unit = view
            .scenario
            .quantity
            .as_ref()
            .and_then(|q| q.unit.as_deref())
            .map_or_else(String::new, |u| format!(", {u}"));
        another(&format!("quantile{unit}"), Some(normal), actual, false);
    }
    rows
}

/// Draws the figure: the claim's number on a track with its tolerance, the misses as bars on one scale, and
/// below, where there is room, what holds for certain.
pub fn draw(ui: &mut Ui, rect: Rect, view: &View<'_>) -> Asked {
    let palette = tokens::palette(ui);
    let painter = ui.painter().with_clip_rect(rect.intersect(ui.clip_rect()));
    let rows = rows(view);
    let most = rows.iter().filter(|row| row.miss);
    let most = most.map(|row| row.nominal.max(row.actual.map_or(0.0, |a| a.value))).fold(1e-300, f64::max);
    let height = (rect.height() / rows.len().max(1) as f32).clamp(30.0, 84.0);
    for (index, row) in rows.iter().enumerate() {
        let top = rect.top() + height * index as f32;
        let cell = Rect::from_min_max(pos2(rect.left(), top), pos2(rect.right(), top + height));
        words(&painter, cell, row, palette);
        let body = Rect::from_min_max(pos2(cell.left(), top + 16.0), pos2(cell.right(), cell.bottom() - 4.0));
        if row.miss { bar(&painter, body, row, most, palette) } else { track(&painter, body, row, palette) }
    }
    let mut top = rect.top() + height * rows.len() as f32;
    let known = view.shown.report.claim.guarantees.iter().flatten();
    for (name, value) in known.filter_map(|g| Some((&g.name, g.value?))) {
        let text = format!("{name}: ≤ {}", shown(value, 3));
        let galley = painter.layout(text, tokens::regular(tokens::SMALL), palette.muted, rect.width());
        if top + galley.size().y > rect.bottom() {
            break;
        }
        let place = pos2(rect.left(), top);
        top += galley.size().y + 2.0;
        painter.galley(place, galley, palette.muted);
    }
    Asked::default()
}

/// The name of a row on the left, its numbers on the right, with as many digits as there is room for.
fn words(painter: &Painter, cell: Rect, row: &Row, palette: &Palette) {
    let name = painter.layout_no_wrap(row.name.clone(), tokens::bold(11.5), palette.ink);
    let room = cell.width() - name.size().x - 14.0;
    let nominal = shown(row.nominal, 4);
    let choices = match row.actual {
        Some(actual) => vec![
            format!("{}, nominal {nominal}", with_error(actual.value, actual.error)),
            format!("{}, nominal {nominal}", shown(actual.value, 4)),
            format!("{} / {nominal}", shown(actual.value, 3)),
        ],
        None => vec![format!("not defined, nominal {nominal}"), "not defined".to_owned()],
    };
    let mut galleys = choices
        .into_iter()
        .map(|text| painter.layout_no_wrap(text, tokens::regular(tokens::SMALL), palette.ink))
        .collect::<Vec<_>>();
    let fits = galleys.iter().position(|galley| galley.size().x <= room).unwrap_or(galleys.len() - 1);
    let numbers = galleys.swap_remove(fits);
    painter.galley(cell.left_top(), name, palette.ink);
    let left = cell.right() - numbers.size().x;
    painter.galley(pos2(left, cell.top()), numbers, palette.ink);
}

/// Actual against nominal, with the tolerance around the nominal number and the ends of the tolerance named.
fn track(painter: &Painter, body: Rect, row: &Row, palette: &Palette) {
    let (left, right) = (body.left() + 14.0, body.right() - 14.0);
    let labelled = body.height() > 34.0;
    let y = body.top() + 9.0 + if labelled { (body.height() - 34.0) * 0.4 } else { 0.0 };
    let distance = row.actual.map_or(0.0, |actual| (actual.value - row.nominal).abs());
    let error = row.actual.map_or(0.0, |a| a.error);
    let least = (row.nominal.abs() * 1e-6).max(1e-12);
    let reach = (distance + error).max(row.allowed.unwrap_or(0.0)).max(least) * 1.35;
    let place = |value: f64| {
        let share = ((value - row.nominal) / reach).clamp(-1.0, 1.0) as f32;
        (left + right) / 2.0 + share * (right - left) / 2.0
    };
    if let Some(allowed) = row.allowed {
        let (low, high) = (row.nominal - allowed, row.nominal + allowed);
        let band = Rect::from_min_max(pos2(place(low), y - 8.0), pos2(place(high), y + 8.0));
        painter.rect_filled(band, 2.0, palette.tolerance);
        for x in [band.left(), band.right()] {
            painter.vline(x, band.y_range(), Stroke::new(1.0, palette.tolerance_edge));
        }
        if labelled && band.width() > 90.0 {
            let font = tokens::regular(tokens::SMALL);
            for value in [low, high] {
                let at = pos2(place(value), y + 10.0);
                painter.text(at, Align2::CENTER_TOP, shown(value, 4), font.clone(), palette.tolerance_edge);
            }
        } else if labelled {
            let text = format!("allowed ± {}", shown(allowed, 3));
            let font = tokens::regular(tokens::SMALL);
            let at = pos2(place(row.nominal), y + 10.0);
            painter.text(at, Align2::CENTER_TOP, text, font, palette.tolerance_edge);
        }
    }
    painter.hline(left..=right, y, Stroke::new(1.0, palette.muted));
    paint_marker(painter, pos2(place(row.nominal), y), Marker::Diamond, palette.normal, palette.card);
    if let Some(actual) = row.actual {
        let (from, to) = (place(actual.value - actual.error), place(actual.value + actual.error));
        painter.hline(from..=to, y, Stroke::new(3.0, palette.accent.gamma_multiply(0.5)));
        paint_marker(painter, pos2(place(actual.value), y), Marker::Disc, palette.accent, palette.card);
    }
}

/// A share of misses as a bar from 0, the nominal share as a mark across it.
fn bar(painter: &Painter, body: Rect, row: &Row, most: f64, palette: &Palette) {
    let (left, right) = (body.left() + 14.0, body.right() - 14.0);
    let y = body.top() + 9.0;
    let place = |value: f64| left + (value / most).clamp(0.0, 1.0) as f32 * (right - left);
    painter.hline(left..=right, y + 7.0, Stroke::new(1.0, palette.line));
    if let Some(actual) = row.actual {
        let filled = Rect::from_min_max(pos2(left, y - 6.0), pos2(place(actual.value), y + 7.0));
        painter.rect_filled(filled, 1.0, palette.accent.gamma_multiply(0.75));
    }
    let x = place(row.nominal);
    painter.vline(x, y - 8.0..=y + 8.0, Stroke::new(1.5, palette.normal));
    paint_marker(painter, pos2(x, y), Marker::Diamond, palette.normal, palette.card);
}

/// The line under the figure.
pub fn readout(view: &View<'_>) -> String {
    let claim = &view.shown.report.claim;
    match claim.difference {
        Some(difference) => {
            format!("actual − nominal = {}; allowed ± {}", shown(difference, 4), shown(claim.allowed, 3))
        }
        None => "not defined for this law".to_owned(),
    }
}

/// The figure as a table.
pub fn table(view: &View<'_>) -> Table {
    let mut table = Table::new(&["number", "nominal", "actual", "actual − nominal", "allowed"]);
    for row in rows(view) {
        table.rows.push(vec![
            row.name,
            shown(row.nominal, 6),
            row.actual.map_or_else(|| "not defined".to_owned(), |a| with_error(a.value, a.error)),
            row.actual.map_or_else(String::new, |a| shown(a.value - row.nominal, 4)),
            row.allowed.map_or_else(String::new, |allowed| format!("± {}", shown(allowed, 4))),
        ]);
    }
    for guarantee in view.shown.report.claim.guarantees.iter().flatten() {
        let value = guarantee
            .value
            .map_or_else(|| "not available".to_owned(), |value| format!("≤ {}", shown(value, 5)));
        table.rows.push(vec![
            guarantee.name.clone(),
            String::new(),
            value,
            String::new(),
            guarantee.conditions.clone(),
        ]);
    }
    table
}

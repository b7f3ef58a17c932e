//! Coverage: the claim's own numbers, actual against nominal, each on a scale of its own.

use super::plot::{Marker, paint_marker};
use super::table::Table;
use super::{Asked, View};
use crate::window::numbers::{shown, with_error};
use crate::window::tokens;
use egui::{Align2, Rect, Stroke, Ui, pos2};
use gaussgap_simulation::figure::Figure;

/// One comparison of an actual with a nominal number.
struct Row {
    name: String,
    nominal: f64,
    actual: Option<Figure>,
    /// Largest difference allowed, where the tolerance is about this number.
    allowed: Option<f64>,
}

/// What the compared number is called.
fn name(kind: &str) -> &'static str {
    match kind {
        "interval" => "covers the mean",
        "test" => "size or power",
        "threshold" => "probability",
        "quantile" => "quantile, in sd of the sum",
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
    }];
    let mut miss = |name: &str, nominal: Option<f64>, actual: Option<Figure>| {
        if let Some(nominal) = nominal {
            rows.push(Row { name: name.to_owned(), nominal, actual, allowed: None });
        }
    };
    if claim.miss_low.is_some() || claim.miss_high.is_some() {
        miss("lies below the mean", claim.nominal_miss_low, claim.miss_low);
        miss("lies above the mean", claim.nominal_miss_high, claim.miss_high);
    }
    if let (Some(normal), actual) = (claim.normal_quantile, claim.actual_quantile) {
        let unit = view
            .scenario
            .quantity
            .as_ref()
            .and_then(|q| q.unit.as_deref())
            .map_or_else(String::new, |u| format!(", {u}"));
        miss(&format!("quantile{unit}"), Some(normal), actual);
    }
    rows
}

/// Draws the figure.
pub fn draw(ui: &mut Ui, rect: Rect, view: &View<'_>) -> Asked {
    let palette = tokens::palette(ui);
    let painter = ui.painter().with_clip_rect(rect.intersect(ui.clip_rect()));
    let rows = rows(view);
    let height = (rect.height() / rows.len().max(1) as f32).min(72.0);
    for (index, row) in rows.iter().enumerate() {
        let top = rect.top() + height * index as f32;
        let (left, right) = (rect.left() + 14.0, rect.right() - 14.0);
        let actual = row.actual.map(|a| a.value);
        let words = match row.actual {
            Some(actual) => {
                format!(
                    "{}: {}, nominal {}",
                    row.name,
                    with_error(actual.value, actual.error),
                    shown(row.nominal, 4)
                )
            }
            None => format!("{}: not defined, nominal {}", row.name, shown(row.nominal, 4)),
        };
        painter.text(pos2(rect.left(), top), Align2::LEFT_TOP, words, tokens::bold(11.5), palette.ink);
        let y = top + 14.0 + (height - 14.0) * 0.5;
        let distance = actual.map_or(0.0, |actual| (actual - row.nominal).abs());
        let error = row.actual.map_or(0.0, |a| a.error);
        let reach =
            (distance + error).max(row.allowed.unwrap_or(0.0)).max(row.nominal.abs() * 1e-6).max(1e-12)
                * 1.35;
        let place = |value: f64| {
            let share = ((value - row.nominal) / reach).clamp(-1.0, 1.0) as f32;
            (left + right) / 2.0 + share * (right - left) / 2.0
        };
        if let Some(allowed) = row.allowed {
            let band = Rect::from_min_max(
                pos2(place(row.nominal - allowed), y - 7.0),
                pos2(place(row.nominal + allowed), y + 7.0),
            );
            painter.rect_filled(band, 2.0, palette.tolerance);
            for x in [band.left(), band.right()] {
                painter.vline(x, band.y_range(), Stroke::new(1.0, palette.tolerance_edge));
            }
        }
        painter.hline(left..=right, y, Stroke::new(1.0, palette.muted));
        let x = place(row.nominal);
        paint_marker(&painter, pos2(x, y), Marker::Diamond, palette.normal, palette.card);
        if let Some(actual) = row.actual {
            let (from, to) = (place(actual.value - actual.error), place(actual.value + actual.error));
            painter.hline(from..=to, y, Stroke::new(3.0, palette.accent.gamma_multiply(0.5)));
            paint_marker(&painter, pos2(place(actual.value), y), Marker::Disc, palette.accent, palette.card);
        }
    }
    Asked::default()
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

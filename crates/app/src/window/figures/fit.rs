//! Fit: the law of the standardized sum against the normal, steps drawn as steps, the widest gap marked.

use super::plot::{Axis, Ink, Marker, Plot, extent};
use super::table::Table;
use super::ticks::Scale;
use super::{Asked, View};
use crate::window::model::prepared::Prepared;
use crate::window::numbers::{shown, with_error};
use crate::window::tokens::{self, dash};
use egui::{Rect, Sense, Ui};
use gaussgap_simulation::sum::Side;

/// How far the distribution figures reach, in standard units.
pub const REACH: f64 = 4.2;
/// The whole horizontal axis of the distribution figures.
pub const WHOLE: (f64, f64) = (-REACH, REACH);
/// The narrowest part of it that can be shown.
pub const NARROWEST: f64 = 0.2;

/// A part of the axis, kept inside the whole and not too narrow.
pub fn kept((from, to): (f64, f64)) -> (f64, f64) {
    let whole = 2.0 * REACH;
    let width = if (to - from).is_finite() { (to - from).clamp(NARROWEST, whole) } else { whole };
    let middle = if (from + to).is_finite() { (from + to) / 2.0 } else { 0.0 };
    let from = (middle - width / 2.0).clamp(-REACH, REACH - width);
    if width >= whole { WHOLE } else { (from, from + width) }
}

/// A part of the axis made narrower (`factor` > 1) or wider about a place that stays where it is.
pub fn zoomed((from, to): (f64, f64), factor: f64, about: f64) -> (f64, f64) {
    kept((about - (about - from) / factor, about + (to - about) / factor))
}

/// The points of a line inside a part of the axis, with one neighbour on each side; points are in order.
pub fn within(line: &[[f64; 2]], (from, to): (f64, f64)) -> &[[f64; 2]] {
    let first = line.partition_point(|point| point[0] < from).saturating_sub(1);
    let last = (line.partition_point(|point| point[0] <= to) + 1).min(line.len());
    line.get(first..last).unwrap_or(line)
}

/// The horizontal axis shared by the distribution figures.
pub fn z_axis(view: &View<'_>) -> Axis {
    let (from, to) = view.range;
    match view.own_units() {
        Some(own) => {
            let unit = view.scenario.quantity.as_ref().and_then(|q| q.unit.clone()).unwrap_or_default();
            Axis::new(from, to, Scale::Own(own), unit)
        }
        None => Axis::new(from, to, Scale::Linear, "z"),
    }
}

/// Where a pin's z lies on the axis of the shown plan: the same z in standard units, the same value in own units.
pub fn pin_to_view(view: &View<'_>, pin: &Prepared) -> impl Fn(&[f64; 2]) -> [f64; 2] {
    let own = view.own_units().zip(pin.own_units);
    move |&[z, y]| match own {
        Some((mine, theirs)) => [(theirs.center + z * theirs.unit - mine.center) / mine.unit, y],
        None => [z, y],
    }
}

/// Draws one line of every pin.
pub fn ghosts(plot: &Plot, ui: &Ui, view: &View<'_>, line: impl Fn(&Prepared) -> &[[f64; 2]]) {
    let palette = tokens::palette(ui);
    for (index, pin) in view.pins.iter().enumerate() {
        let ink = Ink::new(palette.ghosts[index % 4], dash::GHOSTS[index % 4]).thin();
        let move_to = pin_to_view(view, &pin.found);
        if view.own_units().is_some() {
            let moved: Vec<[f64; 2]> = line(&pin.found).iter().map(move_to).collect();
            plot.line(&moved, ink);
        } else {
            plot.line(line(&pin.found), ink);
        }
    }
}

/// The shared cursor, drawn and moved by the pointer; dragging pans, Ctrl with the wheel zooms, two clicks
/// bring the whole axis back.
pub fn cursor(plot: &Plot, ui: &mut Ui, view: &View<'_>, name: &str) -> Asked {
    let palette = tokens::palette(ui);
    let id = ui.scope_id().with((name, "pointer"));
    let response = ui.interact(plot.area, id, Sense::CLICK | Sense::DRAG);
    if let Some(z) = view.cursor {
        plot.upright(z, Ink { color: palette.muted, width: 1.0, dash: &[] });
    }
    let place = response.hover_pos().map(|at| plot.x_from_screen(at.x));
    let mut range = None;
    if response.double_clicked() {
        range = Some(WHOLE);
    } else if response.dragged() && response.drag_delta().x != 0.0 {
        let (from, to) = view.range;
        let by = f64::from(response.drag_delta().x / plot.area.width().max(1.0)) * (to - from);
        range = Some(kept((from - by, to - by)));
    } else if let Some(about) = place {
        let factor = f64::from(ui.input(|input| input.zoom_delta()));
        if factor != 1.0 && factor > 0.0 {
            range = Some(zoomed(view.range, factor, about));
        }
    }
    Asked { cursor: place, edit: None, range }
}

/// Draws the figure.
pub fn draw(ui: &mut Ui, rect: Rect, view: &View<'_>) -> Asked {
    let palette = tokens::palette(ui);
    let seen = [&view.shown.fit, &view.shown.normal].map(|line| within(line, view.range));
    let (low, high) = match extent(seen, 1) {
        Some((low, high)) if view.range != WHOLE && high > low => (low, high),
        _ => (0.0, 1.0),
    };
    let plot = Plot::new(ui, rect, z_axis(view), Axis::new(low, high, Scale::Linear, ""));
    ghosts(&plot, ui, view, |pin| &pin.fit);
    plot.line(&view.shown.normal, Ink::new(palette.normal, dash::NORMAL));
    plot.line(&view.shown.fit, Ink::new(palette.accent, dash::ACTUAL));
    let facts = &view.shown.report.distance;
    if let (Some(z), Some(distance)) = (facts.at_z, facts.kolmogorov)
        && let Some((actual, normal)) = at(view.shown, z, facts.side)
    {
        let ink = Ink { color: palette.fails, width: 2.4, dash: &[] };
        plot.line(&[[z, actual], [z, normal]], ink);
        plot.marker(z, actual, Marker::Disc, palette.fails);
        plot.note(z, actual.min(normal), &format!("widest gap {}", shown(distance.value, 3)), palette.fails);
    }
    cursor(&plot, ui, view, "fit")
}

/// P(Z ≤ z) (or P(Z < z)) and Φ(z) read off the curve: on both sides of the nearest grid points.
pub fn at(prepared: &Prepared, z: f64, side: Option<Side>) -> Option<(f64, f64)> {
    let (at, below, normal) = both_sides(prepared, z)?;
    Some((if side == Some(Side::JustBelow) { below } else { at }, normal))
}

/// P(Z ≤ z), P(Z < z) and Φ(z), read off the curve.
pub fn both_sides(prepared: &Prepared, z: f64) -> Option<(f64, f64, f64)> {
    let curve = &prepared.report.curve;
    let right = curve.z.partition_point(|&known| known < z);
    let near = |i: usize| curve.z.get(i).is_some_and(|known| (known - z).abs() <= 1e-9);
    if let Some(i) = [right, right.wrapping_sub(1)].into_iter().find(|&i| near(i)) {
        return Some((*curve.at_or_below.get(i)?, *curve.below.get(i)?, *curve.normal.get(i)?));
    }
    if right == 0 || right >= curve.z.len() {
        return None;
    }
    let left = right - 1;
    let share = (z - curve.z[left]) / (curve.z[right] - curve.z[left]);
    let between = |a: f64, b: f64| a + share * (b - a);
    let value = between(*curve.at_or_below.get(left)?, *curve.below.get(right)?);
    Some((value, value, between(*curve.normal.get(left)?, *curve.normal.get(right)?)))
}

/// The line under the figure.
pub fn readout(view: &View<'_>) -> String {
    if let Some((z, (at, below, normal))) = view.cursor.and_then(|z| Some((z, both_sides(view.shown, z)?))) {
        let actual = if (at - below).abs() > 1e-12 {
            format!("actual {} to {}", shown(below, 4), shown(at, 4))
        } else {
            format!("actual {}", shown(at, 5))
        };
        return format!("{}: {actual}, normal {}", view.place(z), shown(normal, 4));
    }
    let facts = &view.shown.report.distance;
    match (facts.kolmogorov, facts.at_z) {
        (Some(distance), Some(z)) => {
            let side = if facts.side == Some(Side::JustBelow) { "just below " } else { "" };
            format!(
                "Kolmogorov distance {} {side}{}",
                with_error(distance.value, distance.error),
                at_words(view, z)
            )
        }
        _ => "no normal limit: there is nothing to compare".to_owned(),
    }
}

fn at_words(view: &View<'_>, z: f64) -> String {
    format!("at {}", view.place(z))
}

/// The figure as a table: a readable number of places.
pub fn table(view: &View<'_>) -> Table {
    let mut table = Table::new(&["place", "P(Z < z)", "P(Z ≤ z)", "normal"]);
    for z in places(view) {
        if let Some((at, below, normal)) = both_sides(view.shown, z) {
            table.rows.push(vec![view.place(z), shown(below, 6), shown(at, 6), shown(normal, 6)]);
        }
    }
    table
}

/// Places at every quarter of a standard unit.
pub fn places(_view: &View<'_>) -> impl Iterator<Item = f64> {
    (-16..=16).map(|i| f64::from(i) / 4.0)
}

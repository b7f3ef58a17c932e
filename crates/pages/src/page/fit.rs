//! The Fit figure: the distribution function of the standardized sum against Φ, steps as steps, the widest gap
//! marked.

use super::axis::Axis;
use super::canvas::{Anchor, Canvas, Rect};
use super::frame::{Frame, FrameSpec, Sample, empty};
use super::style::Stroke;
use crate::numbers::{figure, number};
use gaussgap_conclusions::report::{Curve, Report};
use gaussgap_simulation::sum::Side;

const HEADING: &str = "Fit: actual and normal distribution";

/// The range of z the figures over z show.
pub(super) const SHOWN_Z: f64 = 4.0;

/// Whether the report has a curve to draw.
pub(super) fn has_curve(report: &Report) -> bool {
    points(&report.curve) >= 2
}

/// Why there is no curve.
pub(super) fn no_curve(report: &Report) -> &'static str {
    if report.summand.sd.is_none() {
        "Nothing to draw: without a finite variance the standardized sum has no normal limit."
    } else {
        "Nothing to draw: the distribution of the standardized sum was not computed."
    }
}

pub(super) fn points(curve: &Curve) -> usize {
    curve.z.len().min(curve.at_or_below.len()).min(curve.below.len()).min(curve.normal.len())
}

/// The corners of the step function `value(index, at or just below)` over z.
pub(super) fn step_corners(curve: &Curve, value: impl Fn(usize, Side) -> f64) -> Vec<(f64, f64)> {
    let mut corners = Vec::with_capacity(points(curve) + 64);
    for index in 0..points(curve) {
        let z = curve.z[index];
        if curve.below[index] != curve.at_or_below[index] {
            corners.push((z, value(index, Side::JustBelow)));
        }
        corners.push((z, value(index, Side::At)));
    }
    corners
}

/// A value of the curve at any z, by straight lines between its points; `normal` and `side` choose the column.
pub(super) fn between(z: &[f64], values: &[f64], at: f64) -> f64 {
    let above = z
        .partition_point(|&point| point < at)
        .min(z.len().saturating_sub(1))
        .min(values.len().saturating_sub(1));
    let below = above.saturating_sub(1);
    let (Some(&x0), Some(&x1), Some(&y0), Some(&y1)) =
        (z.get(below), z.get(above), values.get(below), values.get(above))
    else {
        return 0.0;
    };
    if x1 > x0 { y0 + (y1 - y0) * ((at - x0) / (x1 - x0)).clamp(0.0, 1.0) } else { y1 }
}

/// Draws the figure.
pub(super) fn draw(canvas: &mut Canvas, outer: Rect, report: &Report) {
    if !has_curve(report) {
        empty(canvas, outer, HEADING, no_curve(report));
        return;
    }
    let palette = canvas.palette;
    let legend = [
        (Sample::Line(palette.actual_line()), "actual".to_owned()),
        (Sample::Line(palette.normal_line()), "normal Φ".to_owned()),
    ];
    let spec = FrameSpec {
        heading: HEADING,
        x_caption: "z, standard deviations of the sum from its mean",
        y_caption: "probability of z or less",
        legend: &legend,
    };
    let frame =
        Frame::draw(canvas, outer, &spec, Axis::straight(-SHOWN_Z, SHOWN_Z), Axis::straight(0.0, 1.0));
    let curve = &report.curve;
    let actual: Vec<(f64, f64)> = step_corners(curve, |index, side| match side {
        Side::At => curve.at_or_below[index],
        Side::JustBelow => curve.below[index],
    })
    .into_iter()
    .map(|(x, y)| frame.place(x, y))
    .collect();
    let normal: Vec<(f64, f64)> =
        curve.z.iter().zip(&curve.normal).map(|(&x, &y)| frame.place(x, y)).collect();
    canvas.clipped(frame.plot.shrunk(-1.0), |canvas| {
        canvas.polyline(&actual, palette.actual_line());
        canvas.polyline(&normal, palette.normal_line());
    });
    widest_gap(canvas, &frame, report);
}

/// Two arrowheads that point at the widest gap from above and from below, and its size in words.
fn widest_gap(canvas: &mut Canvas, frame: &Frame, report: &Report) {
    let (Some(distance), Some(at_z)) = (report.distance.kolmogorov, report.distance.at_z) else { return };
    let curve = &report.curve;
    let normal = between(&curve.z, &curve.normal, at_z);
    let side = report.distance.side.unwrap_or(Side::At);
    let actual = match side {
        Side::At => between(&curve.z, &curve.at_or_below, at_z),
        Side::JustBelow => between(&curve.z, &curve.below, at_z),
    };
    let other = if actual >= normal { normal + distance.value } else { normal - distance.value };
    let mark = canvas.palette.mark;
    if at_z.abs() <= SHOWN_Z {
        let x = frame.x_place(at_z);
        let (top, bottom) = (frame.y_place(normal.max(other)), frame.y_place(normal.min(other)));
        canvas.line((x, top), (x, bottom), Stroke { colour: mark, width: 3.0, dash: "" });
        canvas.polygon(&[(x, top - 1.0), (x - 5.5, top - 11.0), (x + 5.5, top - 11.0)], mark);
        canvas.polygon(&[(x, bottom + 1.0), (x - 5.5, bottom + 11.0), (x + 5.5, bottom + 11.0)], mark);
    }
    let side =
        if side == Side::JustBelow && curve.below != curve.at_or_below { "just below " } else { "at " };
    let left = frame.plot.left + 9.0;
    frame.note(
        canvas,
        left,
        frame.plot.top + 18.0,
        &format!("widest gap {}", figure(&distance)),
        mark,
        Anchor::Start,
    );
    frame.note(
        canvas,
        left,
        frame.plot.top + 35.0,
        &format!("{side}z = {}", number(at_z, 4)),
        mark,
        Anchor::Start,
    );
}

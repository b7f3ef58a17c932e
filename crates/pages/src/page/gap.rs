//! The Gap figure: actual minus normal over z, with the tolerance band and the one-term expansion.

use super::axis::Axis;
use super::canvas::{Canvas, Rect};
use super::fit::{SHOWN_Z, has_curve, no_curve, points, step_corners};
use super::frame::{Frame, FrameSpec, Sample, empty};
use crate::numbers::number;
use gaussgap_conclusions::report::Report;
use gaussgap_simulation::sum::Side;

const HEADING: &str = "Gap: actual minus normal";

/// Draws the figure.
pub(super) fn draw(canvas: &mut Canvas, outer: Rect, report: &Report) {
    if !has_curve(report) {
        empty(canvas, outer, HEADING, no_curve(report));
        return;
    }
    let palette = canvas.palette;
    let curve = &report.curve;
    let gap = step_corners(curve, |index, side| {
        let actual = match side {
            Side::At => curve.at_or_below[index],
            Side::JustBelow => curve.below[index],
        };
        actual - curve.normal[index]
    });
    let expansion = one_term(report);
    let largest = gap.iter().chain(&expansion).map(|point| point.1.abs()).fold(0.0, f64::max).max(1e-15);
    let allowed = allowed(report);
    // A band much wider than the gap would press the curves flat: it then goes on beyond the frame.
    let reach =
        allowed.filter(|&allowed| allowed <= 4.0 * largest).map_or(largest, |allowed| largest.max(allowed))
            * 1.12;

    let mut legend = vec![(Sample::Line(palette.actual_line()), "actual − normal".to_owned())];
    if !expansion.is_empty() {
        legend.push((Sample::Line(palette.expansion_line()), "one-term expansion".to_owned()));
    }
    if let Some(allowed) = allowed {
        let beyond = if allowed > reach { ", beyond the frame" } else { "" };
        legend.push((Sample::Band, format!("allowed ±{}{beyond}", number(allowed, 3))));
    }
    let spec = FrameSpec {
        heading: HEADING,
        x_caption: "z, standard deviations of the sum from its mean",
        y_caption: "difference of probabilities",
        legend: &legend,
    };
    let frame =
        Frame::draw(canvas, outer, &spec, Axis::straight(-SHOWN_Z, SHOWN_Z), Axis::straight(-reach, reach));
    canvas.clipped(frame.plot.shrunk(-1.0), |canvas| {
        if let Some(allowed) = allowed {
            let (top, bottom) = (frame.y_place(allowed), frame.y_place(-allowed));
            let plot = frame.plot;
            canvas.rect(
                Rect::new(plot.left, top.max(plot.top), plot.right, bottom.min(plot.bottom)),
                palette.band,
            );
            for edge in [top, bottom] {
                canvas.line((plot.left, edge), (plot.right, edge), palette.allowed_line());
            }
        }
        let zero = frame.y_place(0.0);
        canvas.line((frame.plot.left, zero), (frame.plot.right, zero), palette.axis_line());
        let placed: Vec<(f64, f64)> = gap.iter().map(|&(x, y)| frame.place(x, y)).collect();
        canvas.polyline(&placed, palette.actual_line());
        let placed: Vec<(f64, f64)> = expansion.iter().map(|&(x, y)| frame.place(x, y)).collect();
        canvas.polyline(&placed, palette.expansion_line());
    });
    canvas.outline(frame.plot, palette.axis_line());
}

/// The tolerance where it is one on a probability, which is what the figure shows: not for quantiles.
fn allowed(report: &Report) -> Option<f64> {
    (report.claim.kind != "quantile" && report.claim.allowed.is_finite() && report.claim.allowed > 0.0)
        .then_some(report.claim.allowed)
}

/// −φ(z) γ (z² − 1)/6 with γ the skewness of the sum (Esseen 1945; Edgeworth's first term), where it exists.
fn one_term(report: &Report) -> Vec<(f64, f64)> {
    let Some(skewness) = report.sum.skewness.filter(|skewness| skewness.is_finite()) else {
        return Vec::new();
    };
    if points(&report.curve) < 2 {
        return Vec::new();
    }
    (0..=200)
        .map(|k| {
            let z = -SHOWN_Z + f64::from(k) * SHOWN_Z / 100.0;
            let density = (-z * z / 2.0).exp() / (2.0 * std::f64::consts::PI).sqrt();
            (z, -density * skewness * (z * z - 1.0) / 6.0)
        })
        .collect()
}

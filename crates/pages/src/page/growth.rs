//! The Growth figure: the Kolmogorov distance against n on logarithmic axes, with the Berry–Esseen bound, the
//! leading term, the tolerance, the planned n and the n from which the claim is safe.

use super::axis::Axis;
use super::canvas::{Anchor, Canvas, Rect};
use super::frame::{Frame, FrameSpec, Sample, empty};
use crate::numbers::{number, whole};
use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::Source;

const HEADING: &str = "Growth: distance over n";

/// Draws the figure.
pub(super) fn draw(canvas: &mut Canvas, outer: Rect, report: &Report) {
    let distance = series(report, &report.growth.kolmogorov);
    let bound = series(report, &report.growth.berry_esseen);
    let leading = series(report, &report.growth.leading_term);
    if distance.len() + bound.len() + leading.len() < 2 {
        empty(canvas, outer, HEADING, reason(report));
        return;
    }
    let palette = canvas.palette;
    let allowed =
        (report.claim.kind == "curve" && report.claim.allowed > 0.0).then_some(report.claim.allowed);
    let planned = match &report.scenario.source {
        Source::Like { n, .. } => Some(*n as f64),
        Source::Parts { .. } | Source::Groups { .. } => None,
    };
    let safe_from = report.verdict.safe_from.map(|n| n as f64);

    let mut legend = Vec::new();
    let named = [
        (&distance, Sample::Marked(palette.actual_line()), "Kolmogorov distance"),
        (&leading, Sample::Line(palette.expansion_line()), "leading term"),
        (&bound, Sample::Line(palette.bound_line()), "Berry–Esseen bound"),
    ];
    legend.extend(named.iter().filter(|row| row.0.len() > 1).map(|row| (row.1, row.2.to_owned())));
    if let Some(allowed) = allowed {
        legend.push((Sample::Line(palette.allowed_line()), format!("allowed {}", number(allowed, 3))));
    }
    let spec = FrameSpec {
        heading: HEADING,
        x_caption: "n",
        y_caption: "distance to the normal law",
        legend: &legend,
    };
    let all = || distance.iter().chain(&bound).chain(&leading);
    let lowest_n = all().map(|point| point.0).chain(planned).fold(f64::INFINITY, f64::min);
    let highest_n = all().map(|point| point.0).chain(planned).chain(safe_from).fold(1.0, f64::max);
    let highest = all().map(|point| point.1).chain(allowed).fold(1e-300, f64::max);
    let lowest = all().map(|point| point.1).chain(allowed).fold(highest, f64::min).max(highest * 1e-12);
    let x = Axis::logarithmic(lowest_n, highest_n);
    let y = Axis::logarithmic(lowest / 1.6, highest * 1.3);
    let frame = Frame::draw(canvas, outer, &spec, x, y);
    let placed = |points: &[(f64, f64)]| points.iter().map(|&(x, y)| frame.place(x, y)).collect::<Vec<_>>();
    canvas.clipped(frame.plot.shrunk(-1.0), |canvas| {
        if let Some(allowed) = allowed {
            let y = frame.y_place(allowed);
            canvas.line((frame.plot.left, y), (frame.plot.right, y), palette.allowed_line());
        }
        for (n, stroke) in [(safe_from, palette.safe_line()), (planned, palette.planned_line())] {
            if let Some(n) = n {
                canvas.line(
                    (frame.x_place(n), frame.plot.top),
                    (frame.x_place(n), frame.plot.bottom),
                    stroke,
                );
            }
        }
        canvas.polyline(&placed(&bound), palette.bound_line());
        canvas.polyline(&placed(&leading), palette.expansion_line());
        canvas.polyline(&placed(&distance), palette.actual_line());
        for (x, y) in placed(&distance) {
            canvas.circle(x, y, 2.4, palette.actual);
        }
    });
    // Two rows at the foot of the plot, where falling curves leave most room; they never meet.
    let mut row = |n: f64, y: f64, text: String, colour: &str| {
        let x = frame.x_place(n);
        let (x, anchor) =
            if frame.has_room(x + 7.0, &text) { (x + 7.0, Anchor::Start) } else { (x - 7.0, Anchor::End) };
        frame.note(canvas, x, y, &text, colour, anchor);
    };
    if let Some(n) = planned {
        row(n, frame.plot.bottom - 26.0, format!("planned n = {}", whole(n as u64)), palette.mark);
    }
    if let Some(n) = safe_from {
        row(n, frame.plot.bottom - 9.0, format!("safe from n = {}", whole(n as u64)), palette.holds);
    }
}

/// Positive, finite points of a series.
fn series(report: &Report, values: &[Option<f64>]) -> Vec<(f64, f64)> {
    report
        .growth
        .n
        .iter()
        .zip(values)
        .filter_map(|(&n, value)| {
            value.filter(|value| value.is_finite() && *value > 0.0).map(|value| (n as f64, value))
        })
        .filter(|point| point.0 > 0.0)
        .collect()
}

fn reason(report: &Report) -> &'static str {
    if report.summand.sd.is_none() {
        "Nothing to draw: without a finite variance the distance does not go to 0, whatever n is."
    } else if matches!(report.scenario.source, Source::Parts { .. }) {
        "Nothing to draw: the counts of unlike parts are fixed, there is no single n that grows."
    } else if report.growth.n.is_empty() {
        "Nothing to draw: the distance over n was not computed."
    } else {
        "Nothing to draw: the distance is 0 at every n, or none could be computed by an exact route."
    }
}

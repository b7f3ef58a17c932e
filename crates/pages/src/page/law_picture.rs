//! A small picture of the law of one summand: the probability of each of some equal bins, steps and densities alike.

use super::axis::Axis;
use super::canvas::{Anchor, Canvas, Rect};
use super::style::Stroke;
use super::text::{Font, width};
use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::Source;
use gaussgap_simulation::law::Law;

/// The least height worth drawing.
pub(super) const LEAST: f64 = 62.0;
/// More height helps nobody.
pub(super) const MOST: f64 = 118.0;
const BINS: usize = 56;
const SMALL: Font = Font::regular(11.0);

/// Bars: from, to, probability.
type Bar = (f64, f64, f64);

/// The picture's data, or `None` where the law cannot be computed here (data without their values).
pub(super) fn bars(report: &Report) -> Option<Vec<Bar>> {
    let spec = match &report.scenario.source {
        Source::Like { law, .. } => law,
        Source::Parts { parts } => &parts.first()?.law,
        Source::Groups { groups } => &groups[0].law,
    };
    let law = spec.compile().ok()?;
    if law.only_simulation.is_some() {
        return None;
    }
    let bars = match law.lattice {
        Some(lattice) => lattice_bars(&law, lattice.offset, lattice.span),
        None => None,
    };
    let bars = bars.or_else(|| equal_bars(&law))?;
    let usable = |bar: &Bar| bar.0.is_finite() && bar.1.is_finite() && bar.1 > bar.0 && bar.2.is_finite();
    (bars.iter().all(usable) && bars.iter().any(|bar| bar.2 > 0.0)).then_some(bars)
}

/// One bar for each lattice point, where they are few.
fn lattice_bars(law: &Law, offset: f64, span: f64) -> Option<Vec<Bar>> {
    let (low, high) = (law.quantile(0.002), law.quantile(0.998));
    let (first, last) = (((low - offset) / span).round(), ((high - offset) / span).round());
    if !(last - first).is_finite() || last - first > BINS as f64 {
        return None;
    }
    let count = (last - first).max(0.0) as usize;
    Some(
        (0..=count)
            .map(|k| {
                let value = offset + (first + k as f64) * span;
                let (from, to) = (value - 0.5 * span, value + 0.5 * span);
                (from, to, (law.at_or_below(to) - law.at_or_below(from)).max(0.0))
            })
            .collect(),
    )
}

fn equal_bars(law: &Law) -> Option<Vec<Bar>> {
    let (low, high) = (law.quantile(0.001), law.quantile(0.985));
    let step = (high - low) / BINS as f64;
    if !(step.is_finite() && step > 0.0) {
        return None;
    }
    // One bin beyond each end, so that probability on the ends themselves is seen.
    Some(
        (0..BINS + 2)
            .map(|k| {
                let from = low + (k as f64 - 1.0) * step;
                (from, from + step, (law.at_or_below(from + step) - law.at_or_below(from)).max(0.0))
            })
            .collect(),
    )
}

/// Draws the bars with an axis below; returns the bottom.
pub(super) fn draw(canvas: &mut Canvas, area: Rect, bars: &[Bar], unit: Option<&str>) -> f64 {
    let palette = canvas.palette;
    let (Some(first), Some(last)) = (bars.first(), bars.last()) else { return area.top };
    let axis = Axis::straight(first.0, last.1);
    let plot = Rect::new(area.left, area.top, area.right, area.bottom - 18.0);
    canvas.rect(plot, palette.panel);
    let highest = bars.iter().map(|bar| bar.2).fold(0.0, f64::max);
    let place = |x: f64| plot.left + axis.fraction(x) * plot.width();
    for &(from, to, probability) in bars {
        let top = plot.bottom - probability / highest * (plot.height() - 5.0);
        let (left, right) = (place(from), place(to));
        let inset = ((right - left) * 0.12).min(1.5);
        canvas.rect(Rect::new(left + inset, top, right - inset, plot.bottom), palette.actual);
    }
    canvas.line(
        (plot.left, plot.bottom),
        (plot.right, plot.bottom),
        Stroke { width: 1.2, ..palette.axis_line() },
    );
    let (ticks, factor) = axis.ticks(6);
    let unit = [factor.as_deref(), unit].into_iter().flatten().collect::<Vec<_>>().join(" ");
    let unit_room = if unit.is_empty() { 0.0 } else { width(&unit, SMALL) + 10.0 };
    let unit_fits = unit_room < 0.3 * plot.width();
    if unit_fits && !unit.is_empty() {
        canvas.text(plot.right, plot.bottom + 14.0, &unit, SMALL, palette.muted, Anchor::End);
    }
    let end = plot.right - if unit_fits { unit_room } else { 0.0 };
    let mut taken = plot.left;
    for tick in ticks {
        let half = width(&tick.label, SMALL) / 2.0;
        let middle = place(tick.value);
        if middle - half >= taken && middle + half <= end {
            canvas.text(middle, plot.bottom + 14.0, &tick.label, SMALL, palette.muted, Anchor::Middle);
            taken = middle + half + 8.0;
        }
    }
    area.bottom
}

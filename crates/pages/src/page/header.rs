//! The head of the page: title, plan sentence, finding, and a strip of the figures the finding rests on.

use super::canvas::{Anchor, Canvas, Rect};
use super::style::Stroke;
use super::text::{Font, fitted, shortened, width};
use crate::numbers::{figure, number, optional, whole};
use gaussgap_conclusions::report::{Report, State};
use gaussgap_conclusions::words::plan_sentence;

const BADGE: Font = Font::bold(17.0);
const LABEL: Font = Font::regular(11.5);
const CELL_GAP: f64 = 26.0;

/// Draws the head and returns its bottom.
pub(super) fn draw(canvas: &mut Canvas, area: Rect, report: &Report) -> f64 {
    let palette = canvas.palette;
    let title = report.scenario.title.as_deref().map(str::trim).filter(|title| !title.is_empty());
    let title = title.unwrap_or("Normal approximation of a sum");
    let (lines, font) = fitted(title, &[27.0, 24.0, 21.0, 18.0, 16.0], true, area.width(), 2);
    let y = canvas.lines(area.left, area.top + font.size, &lines, font, palette.ink);
    let (lines, font) =
        fitted(&plan_sentence(&report.scenario), &[16.0, 15.0, 14.0, 13.0], false, area.width(), 3);
    let y = canvas.lines(area.left, y - 4.0, &lines, font, palette.muted);
    let y = finding(canvas, Rect { top: y - 2.0, ..area }, report);
    strip(canvas, Rect { top: y + 6.0, ..area }, report)
}

/// The verdict as a word in a box, its sentence beside it, and from which n on the claim is safe.
fn finding(canvas: &mut Canvas, area: Rect, report: &Report) -> f64 {
    let palette = canvas.palette;
    let (word, colour) = match report.verdict.state {
        State::Holds => ("✓ HOLDS", palette.holds),
        State::Fails => ("✗ FAILS", palette.fails),
        State::Undecided => ("? UNDECIDED", palette.undecided),
    };
    let badge = Rect::new(area.left, area.top, area.left + width(word, BADGE) + 26.0, area.top + 34.0);
    canvas.outline(badge.shrunk(1.0), Stroke { colour, width: 2.0, dash: "" });
    canvas.text((badge.left + badge.right) / 2.0, badge.top + 23.0, word, BADGE, colour, Anchor::Middle);
    let left = badge.right + 16.0;
    let (lines, font) =
        fitted(&report.verdict.because, &[17.0, 16.0, 15.0, 14.0, 13.0], true, area.right - left, 3);
    let mut y = canvas.lines(left, area.top + 8.0 + font.size * 0.9, &lines, font, palette.ink);
    if let Some(safe) = safe_sentence(report) {
        let font = Font::regular(14.0);
        let safe = shortened(&safe, font, area.right - left, false);
        canvas.text(left, y, &safe, font, palette.ink, Anchor::Start);
        y += font.line_height();
    }
    badge.bottom.max(y - 8.0)
}

fn safe_sentence(report: &Report) -> Option<String> {
    let verdict = &report.verdict;
    let checked = verdict.checked.as_ref()?;
    let which = if checked.every_n { "every n" } else { "not every n" };
    let range = format!("{which} from {} to {} was checked", whole(checked.from), whole(checked.to));
    Some(match (verdict.safe_from, verdict.last_failing) {
        (Some(safe), Some(failing)) => {
            format!("Safe from n = {}; the last n that fails is {} ({range}).", whole(safe), whole(failing))
        }
        (Some(safe), None) => format!("Safe from n = {} ({range}).", whole(safe)),
        (None, _) => {
            format!("Not safe from any n up to {0}: the claim still fails at {0}.", whole(checked.to))
        }
    })
}

/// Label and value pairs in one or two rows.
fn strip(canvas: &mut Canvas, area: Rect, report: &Report) -> f64 {
    let palette = canvas.palette;
    let cells = cells(report);
    let value_font = Font::bold(14.5);
    let rows = rows_needed(&cells, value_font, area.width() - 28.0);
    let bottom = area.top + 12.0 + 40.0 * rows as f64;
    canvas.rect(Rect { bottom, ..area }, palette.panel);
    let (mut x, mut y) = (area.left + 14.0, area.top);
    for (label, value) in &cells {
        let label = shortened(label, LABEL, area.width() - 28.0, false);
        let value = shortened(value, value_font, area.width() - 28.0, false);
        let wide = width(&label, LABEL).max(width(&value, value_font));
        if x > area.left + 14.0 && x + wide > area.right - 14.0 {
            x = area.left + 14.0;
            y += 40.0;
        }
        canvas.text(x, y + 18.0, &label, LABEL, palette.muted, Anchor::Start);
        canvas.text(x, y + 38.0, &value, value_font, palette.ink, Anchor::Start);
        x += wide + CELL_GAP;
    }
    bottom
}

fn rows_needed(cells: &[(String, String)], value_font: Font, room: f64) -> usize {
    let (mut rows, mut used) = (1, 0.0);
    for (label, value) in cells {
        let wide = width(label, LABEL).max(width(value, value_font)).min(room);
        if used > 0.0 && used + wide > room {
            rows += 1;
            used = 0.0;
        }
        used += wide + CELL_GAP;
    }
    rows
}

fn cells(report: &Report) -> Vec<(String, String)> {
    let claim = &report.claim;
    let mut cells: Vec<(String, String)> = Vec::new();
    let mut add = |label: &str, value: String| cells.push((label.to_owned(), value));
    let shown = |value: &Option<_>| value.as_ref().map_or_else(|| "–".to_owned(), figure);
    if claim.kind != "curve" {
        add("nominal", number(claim.nominal, 6));
        add("actual", shown(&claim.actual));
        add("difference", optional(claim.difference, 4));
    }
    add("allowed difference", format!("±{}", number(claim.allowed, 4)));
    let nominal = |value: Option<f64>| {
        value.map_or_else(String::new, |value| format!(" (nominal {})", number(value, 4)))
    };
    if claim.miss_low.is_some() {
        add(&format!("interval too low{}", nominal(claim.nominal_miss_low)), shown(&claim.miss_low));
    }
    if claim.miss_high.is_some() {
        add(&format!("interval too high{}", nominal(claim.nominal_miss_high)), shown(&claim.miss_high));
    }
    if let Some(quantile) = claim.normal_quantile {
        add("normal quantile", number(quantile, 6));
    }
    if claim.actual_quantile.is_some() {
        add("actual quantile", shown(&claim.actual_quantile));
    }
    add("Kolmogorov distance", shown(&report.distance.kolmogorov));
    add("leading term", optional(report.distance.leading_term, 3));
    match &report.distance.berry_esseen {
        Some(bound) => add("Berry–Esseen bound", format!("≤ {}", number(bound.value, 3))),
        None => add("Berry–Esseen bound", "not available".to_owned()),
    }
    add("skewness of the sum", optional(report.sum.skewness, 3));
    cells
}

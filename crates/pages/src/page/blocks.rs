//! The blocks of text below the figures: tails, remedies and rules of thumb, the law's facts, cautions.

use super::canvas::{Anchor, Canvas, Rect};
use super::law_picture;
use super::table::{Column, HEADING_ROOM, Table, heading};
use super::text::{Font, wrapped};
use crate::numbers::{error_only, figure_in, number, optional, whole};
use gaussgap_conclusions::report::{Guarantee, Remedy, Report, RuleOfThumb, Summand, TailRow};
use gaussgap_simulation::figure::Figure;

const BODY: Font = Font::regular(13.0);

const fn text(title: &'static str) -> Column {
    Column { title, numeric: false }
}

const fn numeric(title: &'static str) -> Column {
    Column { title, numeric: true }
}

/// Tail probabilities: the lower tail for z < 0, the upper one from 0 on.
pub(super) fn tails(canvas: &mut Canvas, area: Rect, report: &Report) {
    let rest = heading(canvas, area, "Tails");
    let table = Table {
        columns: vec![
            numeric("z"),
            numeric("probability"),
            numeric("actual"),
            numeric("± error"),
            numeric("normal"),
            numeric("actual/normal"),
        ],
        rows: chosen(&report.tails, 15).into_iter().map(tail_row).collect(),
        lines: 1,
    };
    table.draw(canvas, rest);
}

/// All rows, or at most `most` spread over them evenly, first and last included.
fn chosen(rows: &[TailRow], most: usize) -> Vec<&TailRow> {
    if rows.len() <= most {
        return rows.iter().collect();
    }
    (0..most).map(|k| &rows[k * (rows.len() - 1) / (most - 1)]).collect()
}

fn tail_row(row: &TailRow) -> Vec<String> {
    let lower = row.z < 0.0;
    let (actual, normal) =
        if lower { (row.at_or_below, row.normal_at_or_below) } else { (row.above, row.normal_above) };
    let ratio = actual.filter(|_| normal > 0.0).map(|actual| Figure {
        value: actual.value / normal,
        error: actual.error / normal,
        basis: actual.basis,
    });
    vec![
        number(row.z, 4),
        if lower { "Z ≤ z" } else { "Z > z" }.to_owned(),
        within_error(actual, 5),
        actual.map_or_else(|| "–".to_owned(), |actual| error_only(actual.error)),
        number(normal, 5),
        within_error(ratio, 4),
    ]
}

/// A positive number with no more digits than its error leaves right (at most `most`); where the error is as large
/// as the number, only its upper limit.
fn within_error(figure: Option<Figure>, most: usize) -> String {
    let Some(Figure { value, error, .. }) = figure else { return "–".to_owned() };
    if error > 0.0 && error >= value {
        return format!("≤ {}", error_only(value.max(0.0) + error));
    }
    let right = if error > 0.0 { (value / error).log10().floor().clamp(1.0, 17.0) as usize } else { most };
    number(value, right.min(most))
}

/// Remedies, then what is guaranteed (deviation claims), then the rules of thumb.
pub(super) fn remedies(canvas: &mut Canvas, area: Rect, report: &Report) {
    let rest = heading(canvas, area, "Remedies at the planned n");
    let below: Vec<Table> = [guarantees(report), rules(report)].into_iter().flatten().collect();
    let mut top = if report.remedies.is_empty() {
        paragraph(canvas, rest, "None was computed.") + 6.0
    } else {
        let share = [1.0, 0.62, 0.45][below.len().min(2)];
        remedy_table(report).draw(canvas, Rect { bottom: rest.top + share * rest.height(), ..rest }) + 12.0
    };
    let count = below.len();
    for (index, table) in below.into_iter().enumerate() {
        let bottom = top + (area.bottom - top) / (count - index) as f64;
        if bottom - top >= 44.0 {
            top = table.draw(canvas, Rect { top, bottom, ..area }) + 12.0;
        }
    }
}

fn remedy_table(report: &Report) -> Table {
    let row = |remedy: &Remedy| {
        let note = remedy.note.trim();
        vec![
            if note.is_empty() { remedy.name.clone() } else { format!("{}: {note}", remedy.name) },
            remedy.actual.map_or_else(|| "–".to_owned(), |actual| figure_in(&actual, 5)),
            if remedy.holds { "✓ yes" } else { "✗ no" }.to_owned(),
        ]
    };
    Table {
        columns: vec![text("remedy"), numeric("actual"), numeric("holds")],
        rows: report.remedies.iter().map(row).collect(),
        lines: 2,
    }
}

fn guarantees(report: &Report) -> Option<Table> {
    let guarantees = report.claim.guarantees.as_ref().filter(|list| !list.is_empty())?;
    let needed = |name: &str| match report.claim.needed_n.as_ref().and_then(|needed| needed.get(name)) {
        Some(Some(n)) => whole(*n),
        Some(None) => "none".to_owned(),
        None => "–".to_owned(),
    };
    let row = |guarantee: &Guarantee| {
        vec![guarantee.name.clone(), optional(guarantee.value, 4), needed(&guarantee.name)]
    };
    Some(Table {
        columns: vec![text("guarantee"), numeric("at most"), numeric("needed n")],
        rows: guarantees.iter().map(row).collect(),
        lines: 1,
    })
}

fn rules(report: &Report) -> Option<Table> {
    let row = |rule: &RuleOfThumb| {
        let agrees = match rule.agrees {
            Some(true) => "✓ yes",
            Some(false) => "✗ no",
            None => "–",
        };
        vec![rule.rule.clone(), rule.says.clone(), agrees.to_owned()]
    };
    (!report.rules_of_thumb.is_empty()).then(|| Table {
        columns: vec![text("rule of thumb"), numeric("says"), numeric("agrees")],
        rows: report.rules_of_thumb.iter().map(row).collect(),
        lines: 1,
    })
}

/// The law's facts, its picture where there is room, and the cautions.
pub(super) fn law_and_cautions(canvas: &mut Canvas, area: Rect, report: &Report) {
    let mut bottom = law(canvas, area, report);
    let notes = notes(report);
    let needed = HEADING_ROOM + 14.0 + cautions_height(&notes, area.width(), Font::regular(12.0)).max(20.0);
    let room = (area.bottom - bottom - 8.0 - needed).min(law_picture::MOST);
    if room >= law_picture::LEAST
        && let Some(bars) = law_picture::bars(report)
    {
        let picture = Rect { top: bottom + 8.0, bottom: bottom + 8.0 + room, ..area };
        let unit = report.scenario.quantity.as_ref().and_then(|quantity| quantity.unit.as_deref());
        bottom = law_picture::draw(canvas, picture, &bars, unit);
    }
    cautions(canvas, Rect { top: bottom + 14.0, ..area }, &notes);
}

/// What is known of the law of one summand.
fn law(canvas: &mut Canvas, area: Rect, report: &Report) -> f64 {
    let several = !report.summands.is_empty();
    let rest =
        heading(canvas, area, if several { "The laws of the summands" } else { "The law of one summand" });
    let laws: Vec<&Summand> = if several { report.summands.iter().collect() } else { vec![&report.summand] };
    let rows = laws
        .iter()
        .enumerate()
        .map(|(index, law)| {
            let mut row = vec![
                optional(law.mean, 5),
                optional(law.sd, 5),
                optional(law.skewness, 4),
                optional(law.excess_kurtosis, 4),
                support(law),
            ];
            if several {
                row.insert(0, (index + 1).to_string());
            }
            row
        })
        .collect();
    let mut columns = vec![
        numeric("mean"),
        numeric("sd"),
        numeric("skewness"),
        numeric("excess kurtosis"),
        numeric("support"),
    ];
    if several {
        columns.insert(0, numeric("law"));
    }
    let bottom = Table { columns, rows, lines: 1 }
        .draw(canvas, Rect { bottom: rest.bottom.min(rest.top + 120.0), ..rest });
    let rest = Rect { top: bottom + 6.0, ..rest };
    paragraph(canvas, rest, &shape(&report.summand, several)) - 6.0
}

fn support(law: &Summand) -> String {
    let [low, high] = law.support;
    let end = |value: Option<f64>, unbounded: &str| {
        value.map_or_else(|| unbounded.to_owned(), |value| number(value, 4))
    };
    format!("{} to {}", end(low, "−∞"), end(high, "∞"))
}

/// Lattice, steps and atoms in words.
fn shape(law: &Summand, several: bool) -> String {
    let whose = if several { "First law. " } else { "" };
    let heaviest = law.atoms.iter().max_by(|a, b| a.mass.total_cmp(&b.mass));
    let atoms = match (law.atoms.len(), heaviest) {
        (0, _) | (_, None) => "No single value has positive probability".to_owned(),
        (1, Some(atom)) => {
            format!("The value {} has probability {}", number(atom.value, 5), number(atom.mass, 4))
        }
        (count, Some(atom)) => format!(
            "{}{count} values have positive probability, most of all {} ({})",
            if count >= 200 { "At least " } else { "" },
            number(atom.value, 5),
            number(atom.mass, 4)
        ),
    };
    let lattice = law.lattice.map_or_else(String::new, |lattice| {
        format!("; all values lie in steps of {}", number(lattice.span, 5))
    });
    format!("{whose}{atoms}{lattice}.")
}

/// Cautions, then what the laws warn of, each once.
fn notes(report: &Report) -> Vec<&str> {
    let mut notes: Vec<&str> = Vec::new();
    let warnings = report.summands.iter().chain([&report.summand]).flat_map(|law| &law.warnings);
    for note in report.cautions.iter().chain(warnings) {
        if !notes.contains(&note.as_str()) {
            notes.push(note);
        }
    }
    notes
}

fn cautions_height(notes: &[&str], wide: f64, font: Font) -> f64 {
    let high =
        |note: &&str| wrapped(note, font, wide - 16.0, usize::MAX).len() as f64 * font.line_height() + 4.0;
    notes.iter().map(high).sum()
}

/// Cautions and warnings, as many as there is room for.
fn cautions(canvas: &mut Canvas, area: Rect, notes: &[&str]) {
    let rest = heading(canvas, area, "Cautions");
    if notes.is_empty() {
        paragraph(canvas, rest, "None beyond the usual one: a model is not the world.");
        return;
    }
    let palette = canvas.palette;
    // The largest font with which everything fits; with the smallest, what is left over is counted.
    let blocks = |font: Font| -> Vec<Vec<String>> {
        notes.iter().map(|note| wrapped(note, font, rest.width() - 16.0, usize::MAX)).collect()
    };
    let font = [13.0, 12.5, 12.0, 11.5, 11.0, 10.5]
        .into_iter()
        .map(Font::regular)
        .find(|&font| cautions_height(notes, rest.width(), font) <= rest.height())
        .unwrap_or(Font::regular(10.5));
    let all = blocks(font);
    let mut y = rest.top + font.size;
    for (index, lines) in all.iter().enumerate() {
        let high = lines.len() as f64 * font.line_height() + 4.0;
        let last = index + 1 == all.len();
        let reserved = if last { 0.0 } else { font.line_height() };
        if y - font.size + high + reserved > rest.bottom + 2.0 {
            let more = all.len() - index;
            let more = if more == 1 {
                "… and one more in the report".to_owned()
            } else {
                format!("… and {more} more in the report")
            };
            canvas.text(rest.left, y, &more, font, palette.muted, Anchor::Start);
            return;
        }
        canvas.text(rest.left, y, "–", font, palette.mark, Anchor::Start);
        y = canvas.lines(rest.left + 16.0, y, lines, font, palette.ink) + 4.0;
    }
}

/// Lines of plain text; returns the bottom.
fn paragraph(canvas: &mut Canvas, area: Rect, text: &str) -> f64 {
    let ink = canvas.palette.ink;
    let most = ((area.height() / BODY.line_height()) as usize).max(1);
    let lines = wrapped(text, BODY, area.width(), most);
    canvas.lines(area.left, area.top + BODY.size, &lines, BODY, ink)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_digit_is_shown_that_the_error_does_not_support() {
        let shown = |value, error| within_error(Some(Figure::bound(value, error)), 5);
        assert_eq!(shown(0.123_456_789, 1e-13), "0.12346");
        assert_eq!(shown(5.469_3e-6, 4e-8), "5.5×10⁻⁶");
        assert_eq!(shown(4.39e-16, 4e-14), "≤ 5×10⁻¹⁴");
        assert_eq!(shown(0.0, 4e-14), "≤ 4×10⁻¹⁴");
        assert_eq!(shown(0.0, 0.0), "0");
        assert_eq!(within_error(None, 5), "–");
    }
}

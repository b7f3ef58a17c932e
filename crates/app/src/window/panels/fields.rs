//! Text fields that read numbers as people type them and keep what was typed while it cannot be read.

use super::super::numbers;
use super::super::tokens;
use egui::{Color32, Frame, Id, Margin, Response, RichText, Stroke, TextEdit, Ui};
use std::collections::HashMap;

/// What a field remembers between frames.
#[derive(Debug, Clone, Default)]
struct Entry {
    text: String,
    /// The value of the document the text stands for.
    stands_for: String,
    problem: Option<String>,
}

/// The texts of all fields.
#[derive(Debug, Default)]
pub struct Fields {
    entries: HashMap<Id, Entry>,
    /// A field was left: the step of undo ends.
    pub left: bool,
    /// What cannot be read, by the label of the field, collected while drawing.
    pub problems: Vec<(String, String)>,
}

impl Fields {
    /// Forgets texts that could not be read (another document was opened).
    pub fn clear(&mut self) {
        self.entries.clear();
    }

    /// Whether some field holds what cannot be read.
    pub fn has_problem(&self) -> bool {
        self.entries.values().any(|entry| entry.problem.is_some())
    }

    /// Starts a frame.
    pub fn begin(&mut self) {
        self.left = false;
        self.problems.clear();
    }
}

/// How a field looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Look {
    /// Inside running text: underlined, as wide as its text.
    Word,
    /// On a card: framed, this wide.
    Card(f32),
    /// Framed, this wide, this many rows.
    Lines(f32, usize),
}

/// A field: who it is, what it is called, how it looks.
#[derive(Debug, Clone)]
pub struct Field<'a> {
    /// Identity, stable between frames.
    pub id: Id,
    /// Name in the accessibility tree and in messages.
    pub label: &'a str,
    /// Look.
    pub look: Look,
    /// What an empty field stands for.
    pub hint: &'a str,
}

impl<'a> Field<'a> {
    /// A field on a card.
    pub fn card(id: Id, label: &'a str, width: f32) -> Self {
        Self { id, label, look: Look::Card(width), hint: "" }
    }

    /// A word of the plan sentence.
    pub fn word(id: Id, label: &'a str) -> Self {
        Self { id, label, look: Look::Word, hint: "" }
    }
}

/// A field for a value of any type: `value` as text, read back by `read`. Returns a newly typed, readable value.
pub fn field<T>(
    ui: &mut Ui,
    fields: &mut Fields,
    spec: &Field<'_>,
    value: &str,
    read: impl Fn(&str) -> Result<T, String>,
    write: impl Fn(&T) -> String,
) -> (Response, Option<T>) {
    let mut entry = fields.entries.remove(&spec.id).unwrap_or_default();
    if entry.stands_for != value {
        entry = Entry { text: value.to_owned(), stands_for: value.to_owned(), problem: None };
    }
    let response = edit_text(ui, spec, &mut entry);
    let mut typed = None;
    if response.changed() {
        match read(&entry.text) {
            Ok(value) => {
                entry.problem = None;
                entry.stands_for = write(&value);
                typed = Some(value);
            }
            Err(problem) => entry.problem = Some(problem),
        }
    }
    if response.lost_focus() {
        fields.left = true;
    }
    if let Some(problem) = &entry.problem {
        fields.problems.push((spec.label.to_owned(), problem.clone()));
    }
    fields.entries.insert(spec.id, entry);
    (response, typed)
}

fn edit_text(ui: &mut Ui, spec: &Field<'_>, entry: &mut Entry) -> Response {
    let palette = tokens::palette(ui);
    let wrong = entry.problem.is_some();
    let line = if wrong { palette.fails } else { palette.line };
    let frame = Frame::new().fill(palette.card).stroke(Stroke::new(1.0, line)).corner_radius(tokens::CORNER);
    let edit = match spec.look {
        Look::Word => {
            let font = tokens::bold(tokens::SENTENCE);
            let shown = if entry.text.is_empty() { spec.hint } else { &entry.text };
            let width = ui.painter().layout_no_wrap(shown.to_owned(), font.clone(), palette.ink).size().x;
            TextEdit::singleline(&mut entry.text)
                .font(font)
                .text_color(if wrong { palette.fails } else { palette.accent })
                .desired_width((width + 4.0).max(16.0))
                .clip_text(false)
                .margin(Margin::symmetric(1, 0))
                .frame(Frame::NONE)
        }
        Look::Card(width) => TextEdit::singleline(&mut entry.text)
            .desired_width(width - 12.0)
            .min_size(egui::vec2(width - 12.0, 0.0))
            .margin(Margin::symmetric(6, 3))
            .frame(frame.inner_margin(Margin::symmetric(6, 3))),
        Look::Lines(width, rows) => TextEdit::multiline(&mut entry.text)
            .desired_width(width - 12.0)
            .desired_rows(rows)
            .frame(frame.inner_margin(Margin::symmetric(6, 3))),
    };
    let hint = RichText::new(spec.hint).color(palette.muted);
    let response = ui.add(edit.id(spec.id).hint_text(hint));
    name(ui, &response, spec.label);
    if spec.look == Look::Word {
        let color = match (wrong, response.has_focus() || response.hovered()) {
            (true, _) => palette.fails,
            (false, true) => palette.accent,
            (false, false) => palette.accent.gamma_multiply(0.6),
        };
        underline(ui, &response, color);
    } else if response.has_focus() {
        let stroke = Stroke::new(1.5, if wrong { palette.fails } else { palette.accent });
        ui.painter().rect_stroke(response.rect, tokens::CORNER, stroke, egui::StrokeKind::Inside);
    }
    response
}

/// Names an input in the accessibility tree.
pub fn name(ui: &Ui, response: &Response, label: &str) {
    ui.ctx().accesskit_node_builder(response.id, |node| node.set_label(label));
}

/// Underlines a control of the plan sentence.
pub fn underline(ui: &Ui, response: &Response, color: Color32) {
    let y = response.rect.bottom() - 1.0;
    let width = if response.has_focus() { 2.5 } else { 1.5 };
    ui.painter().hline(response.rect.x_range(), y, Stroke::new(width, color));
}

/// A field for a real number.
pub fn real(ui: &mut Ui, fields: &mut Fields, spec: &Field<'_>, value: f64) -> Option<f64> {
    field(ui, fields, spec, &numbers::plain(value), numbers::read_real, |v| numbers::plain(*v)).1
}

/// A field for a real number that may be absent.
pub fn optional_real(
    ui: &mut Ui,
    fields: &mut Fields,
    spec: &Field<'_>,
    value: Option<f64>,
) -> Option<Option<f64>> {
    let write = |value: &Option<f64>| value.map_or_else(String::new, numbers::plain);
    let read =
        |text: &str| if text.trim().is_empty() { Ok(None) } else { numbers::read_real(text).map(Some) };
    field(ui, fields, spec, &write(&value), read, write).1
}

/// A field for a share shown in per cent.
pub fn percent(ui: &mut Ui, fields: &mut Fields, spec: &Field<'_>, value: f64) -> Option<f64> {
    let write = |share: &f64| format!("{} %", percent_digits(*share));
    field(ui, fields, spec, &write(&value), numbers::read_percent, write).1
}

/// A share times a hundred without the noise of binary multiplication.
pub fn percent_digits(share: f64) -> String {
    let rounded = super::super::model::law_kinds::round_to(share * 100.0, 14);
    numbers::plain(rounded)
}

/// A field for a whole number.
pub fn whole(
    ui: &mut Ui,
    fields: &mut Fields,
    spec: &Field<'_>,
    value: i64,
    ends: (i64, i64),
) -> Option<i64> {
    let write = |value: &i64| numbers::thousands(*value as f64).replace('−', "-");
    field(ui, fields, spec, &write(&value), |text| numbers::read_whole(text, ends.0, ends.1), write).1
}

/// A field for running text.
pub fn text(ui: &mut Ui, fields: &mut Fields, spec: &Field<'_>, value: &str) -> Option<String> {
    field(ui, fields, spec, value, |text| Ok(text.to_owned()), Clone::clone).1
}

//! Dialogs: paths with completion, unsaved changes, export, problems of a file, the overview of keys.

use crate::window::command;
use crate::window::model::law_tree::Place;
use crate::window::tokens;
use egui::{Button, Context, Id, Key, Modal, RichText, ScrollArea, TextEdit, Ui};
use std::path::{Path, PathBuf};

/// Names offered below a path.
const OFFERED: usize = 12;

/// What a path is wanted for.
#[derive(Debug, Clone, PartialEq)]
pub enum Purpose {
    /// Open a scenario.
    Open,
    /// Save the scenario.
    Save,
    /// Write an export.
    Export(Export),
    /// Take a column of a CSV file as the law at a place.
    Data(Place),
}

/// What can be exported.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Export {
    /// The page as a picture.
    Png,
    /// The page as vectors.
    Svg,
    /// The report.
    Json,
    /// The curves.
    Csv,
}

/// The kinds of export: what, the file name's ending, in words.
pub const EXPORTS: [(Export, &str, &str); 4] = [
    (Export::Png, "png", "Page as a picture (PNG)"),
    (Export::Svg, "svg", "Page as vectors (SVG)"),
    (Export::Json, "json", "Report (JSON)"),
    (Export::Csv, "csv", "Curves (CSV)"),
];

/// What the unsaved changes stand in the way of.
#[derive(Debug, Clone, PartialEq)]
pub enum Next {
    /// Closing the window.
    Close,
    /// Opening a file.
    Open(PathBuf),
    /// Opening a bundled scenario.
    Example(usize),
    /// A new plan.
    New,
}

/// The dialog that is open.
#[derive(Debug, Clone, PartialEq)]
pub enum Dialog {
    /// A path is wanted.
    Path(PathDialog),
    /// There are unsaved changes.
    Unsaved(Next),
    /// What went wrong with a file, line by line.
    Problems(String, Vec<String>),
    /// The overview of keys.
    Shortcuts,
}

/// A path being typed.
#[derive(Debug, Clone, PartialEq)]
pub struct PathDialog {
    /// What for.
    pub purpose: Purpose,
    /// What is typed.
    pub text: String,
    /// Names that complete it, with a trailing separator for folders.
    pub offers: Vec<String>,
    /// Whether an existing file would be replaced, as far as is known.
    pub replaces: bool,
    /// The column, for data.
    pub column: String,
    /// The columns of the file, for data.
    pub columns: Vec<String>,
    /// The text the offers belong to.
    looked_at: Option<String>,
}

/// What a dialog was answered with.
#[derive(Debug, Clone, PartialEq)]
pub enum Answer {
    /// Close it, do nothing.
    Cancel,
    /// Use this path.
    Path(Purpose, PathBuf, String),
    /// Save first, then go on.
    SaveThen(Next),
    /// Go on without saving.
    Discard(Next),
    /// Turn to another kind of export.
    Kind(Export),
}

impl PathDialog {
    /// A dialog that starts with a path.
    pub fn new(purpose: Purpose, text: String) -> Self {
        Self {
            purpose,
            text,
            offers: Vec::new(),
            replaces: false,
            column: String::new(),
            columns: Vec::new(),
            looked_at: None,
        }
    }

    /// Looks at the file system where the text has changed. Called outside drawing.
    pub fn look(&mut self) {
        if self.looked_at.as_deref() == Some(&self.text) {
            return;
        }
        self.looked_at = Some(self.text.clone());
        self.offers = completions(&self.text, &self.wanted_endings());
        let path = Path::new(self.text.trim());
        self.replaces = matches!(self.purpose, Purpose::Save | Purpose::Export(_)) && path.is_file();
        if matches!(self.purpose, Purpose::Data(_)) {
            self.columns = if path.is_file() {
                crate::files::column::header_names(path).ok().flatten().unwrap_or_default()
            } else {
                Vec::new()
            };
            if !self.columns.is_empty() && !self.columns.contains(&self.column) {
                self.column = self.columns[0].clone();
            }
        }
    }

    fn wanted_endings(&self) -> Vec<&'static str> {
        match &self.purpose {
            Purpose::Open | Purpose::Save => vec!["json"],
            Purpose::Data(_) => vec!["csv", "txt", "tsv"],
            Purpose::Export(kind) => {
                EXPORTS.iter().filter(|(k, ..)| k == kind).map(|(_, ending, _)| *ending).collect()
            }
        }
    }

    fn title(&self) -> &'static str {
        match self.purpose {
            Purpose::Open => "Open a scenario",
            Purpose::Save => "Save the scenario as",
            Purpose::Export(_) => "Export",
            Purpose::Data(_) => "Take pilot data from a CSV file",
        }
    }
}

/// Names in the folder of a path that begin like its last part: folders, and files with the wanted endings.
pub fn completions(text: &str, endings: &[&str]) -> Vec<String> {
    let (folder, start) = match text.rfind(std::path::MAIN_SEPARATOR) {
        Some(end) => text.split_at(end + 1),
        None => ("", text),
    };
    let place = if folder.is_empty() { Path::new(".") } else { Path::new(folder) };
    let Ok(entries) = std::fs::read_dir(place) else { return Vec::new() };
    let mut names: Vec<String> = entries
        .flatten()
        .filter_map(|entry| {
            let name = entry.file_name().into_string().ok()?;
            let is_folder = entry.path().is_dir();
            let ending =
                Path::new(&name).extension().and_then(|e| e.to_str()).unwrap_or("").to_ascii_lowercase();
            let wanted = is_folder || endings.contains(&ending.as_str());
            let hidden = name.starts_with('.') && !start.starts_with('.');
            (wanted && !hidden && name.starts_with(start) && name != start).then(|| {
                format!("{folder}{name}{}", if is_folder { std::path::MAIN_SEPARATOR_STR } else { "" })
            })
        })
        .collect();
    names.sort();
    names.truncate(OFFERED);
    names
}

/// Draws the open dialog; answers at most once.
pub fn show(ctx: &Context, dialog: &mut Dialog) -> Option<Answer> {
    let shown = Modal::new(Id::unique("dialog")).show(ctx, |ui| {
        ui.set_width((ctx.content_rect().width() - 64.0).min(560.0));
        match dialog {
            Dialog::Path(dialog) => path(ui, dialog),
            Dialog::Unsaved(next) => unsaved(ui, next),
            Dialog::Problems(title, lines) => problems(ui, title, lines),
            Dialog::Shortcuts => shortcuts(ui),
        }
    });
    let escape = ctx.input_mut(|input| input.consume_key(egui::Modifiers::NONE, Key::Escape));
    let left = escape || shown.should_close();
    shown.inner.or(left.then_some(Answer::Cancel))
}

fn title(ui: &mut Ui, words: &str) {
    ui.label(RichText::new(words).font(tokens::bold(16.0)));
    ui.add_space(tokens::GAP);
}

fn path(ui: &mut Ui, dialog: &mut PathDialog) -> Option<Answer> {
    let mut answer = None;
    title(ui, dialog.title());
    if let Purpose::Export(now) = dialog.purpose {
        ui.horizontal_wrapped(|ui| {
            for (kind, _, words) in EXPORTS {
                if ui.selectable_label(kind == now, words).clicked() && kind != now {
                    answer = Some(Answer::Kind(kind));
                }
            }
        });
    }
    let id = Id::unique("path");
    let edit = TextEdit::singleline(&mut dialog.text)
        .id(id)
        .desired_width(f32::INFINITY)
        .hint_text("path of the file");
    let response = ui.add(edit);
    // Before the focus is taken back, which would hide that Enter gave it up.
    let entered = response.lost_focus() && ui.input(|input| input.key_pressed(Key::Enter));
    super::fields::name(ui, &response, "Path");
    if ui.memory(|memory| memory.focused().is_none()) {
        response.request_focus();
    }
    if response.has_focus() {
        let filter = egui::EventFilter { tab: true, ..Default::default() };
        ui.memory_mut(|memory| memory.set_focus_lock_filter(id, filter));
        if ui.input(|input| input.key_pressed(Key::Tab) && !input.modifiers.shift) {
            complete(ui, dialog, id);
        }
    }
    if !dialog.offers.is_empty() {
        let hint = "Tab completes the path; or choose:";
        ui.label(RichText::new(hint).size(tokens::SMALL).color(tokens::palette(ui).muted));
        let offers = dialog.offers.clone();
        ScrollArea::vertical().max_height(190.0).show(ui, |ui| {
            for offer in offers {
                let name = offer.trim_end_matches(std::path::MAIN_SEPARATOR);
                let name = name.rsplit(std::path::MAIN_SEPARATOR).next().unwrap_or(name);
                let shown = if offer.ends_with(std::path::MAIN_SEPARATOR) {
                    format!("{name}/")
                } else {
                    name.to_owned()
                };
                if ui.add(Button::new(shown).frame_when_inactive(false)).clicked() {
                    take(ui, dialog, id, offer);
                }
            }
        });
    }
    if let Purpose::Data(_) = dialog.purpose {
        ui.horizontal_wrapped(|ui| {
            ui.label("column");
            let edit =
                TextEdit::singleline(&mut dialog.column).desired_width(120.0).hint_text("name or number");
            let response = ui.add(edit);
            super::fields::name(ui, &response, "Column");
            for column in dialog.columns.clone() {
                if ui.selectable_label(column == dialog.column, &column).clicked() {
                    dialog.column = column;
                }
            }
        });
    }
    if dialog.replaces {
        ui.label(
            RichText::new("⚠ This file exists and will be replaced.").color(tokens::palette(ui).undecided),
        );
    }
    ui.add_space(tokens::GAP);
    ui.horizontal(|ui| {
        let usable = !dialog.text.trim().is_empty() && !dialog.text.ends_with(std::path::MAIN_SEPARATOR);
        let words = match dialog.purpose {
            Purpose::Open => "Open the file",
            Purpose::Save => "Save the file",
            Purpose::Export(_) => "Write the file",
            Purpose::Data(_) => "Take the column",
        };
        if ui.add_enabled(usable, Button::new(words)).clicked() || (entered && usable) {
            let path = PathBuf::from(dialog.text.trim());
            answer = Some(Answer::Path(dialog.purpose.clone(), path, dialog.column.clone()));
        }
        if ui.button("Cancel").clicked() {
            answer = Some(Answer::Cancel);
        }
    });
    answer
}

/// Completes to the longest common beginning of all offers.
fn complete(ui: &Ui, dialog: &mut PathDialog, id: Id) {
    let Some(first) = dialog.offers.first() else { return };
    let common = dialog.offers.iter().skip(1).fold(first.clone(), |common, offer| {
        common.chars().zip(offer.chars()).take_while(|(a, b)| a == b).map(|(a, _)| a).collect()
    });
    if common.len() > dialog.text.len() {
        take(ui, dialog, id, common);
    }
}

/// Takes a text over into the field, the cursor behind it.
fn take(ui: &Ui, dialog: &mut PathDialog, id: Id, text: String) {
    dialog.text = text;
    let end = egui::text::CCursor::new(dialog.text.chars().count());
    let mut state = TextEdit::load_state(ui.ctx(), id).unwrap_or_default();
    state.cursor.set_char_range(Some(egui::text::CCursorRange::one(end)));
    TextEdit::store_state(ui.ctx(), id, state);
    ui.memory_mut(|memory| memory.request_focus(id));
}

fn unsaved(ui: &mut Ui, next: &Next) -> Option<Answer> {
    title(ui, "Save the changes to this plan?");
    ui.label("They are in no file yet.");
    ui.add_space(tokens::GAP);
    ui.horizontal(|ui| {
        if ui.button("Save").clicked() {
            return Some(Answer::SaveThen(next.clone()));
        }
        if ui.button("Do not save").clicked() {
            return Some(Answer::Discard(next.clone()));
        }
        ui.button("Cancel").clicked().then_some(Answer::Cancel)
    })
    .inner
}

fn problems(ui: &mut Ui, heading: &str, lines: &[String]) -> Option<Answer> {
    title(ui, heading);
    ScrollArea::vertical().max_height(300.0).show(ui, |ui| {
        for line in lines {
            ui.label(line);
        }
    });
    ui.add_space(tokens::GAP);
    ui.button("Close").clicked().then_some(Answer::Cancel)
}

fn shortcuts(ui: &mut Ui) -> Option<Answer> {
    title(ui, "Keys");
    let height = (ui.ctx().content_rect().height() - 170.0).max(120.0);
    ScrollArea::vertical().max_height(height).show(ui, |ui| {
        egui::Grid::new("keys").num_columns(2).spacing([18.0, 3.0]).striped(true).show(ui, |ui| {
            for (_, keys, does) in command::ALL {
                let text: Vec<String> = keys.iter().map(|keys| command::keys_text(*keys)).collect();
                ui.label(RichText::new(text.join(", ")).font(tokens::bold(12.0)));
                ui.label(*does);
                ui.end_row();
            }
            ui.label(RichText::new("Tab, Enter").font(tokens::bold(12.0)));
            ui.label("Go through all controls; press one");
            ui.end_row();
        });
    });
    ui.add_space(tokens::GAP);
    ui.button("Close").clicked().then_some(Answer::Cancel)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn completes_names_of_the_wanted_kind() {
        let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/../../scenarios/");
        let offers = completions(&format!("{folder}boarding"), &["json"]);
        assert_eq!(offers, [format!("{folder}boarding-time.json")]);
        assert!(completions(&format!("{folder}on-board"), &["csv"])[0].ends_with("on-board-spending.csv"));
        assert!(completions("/no/such/folder/x", &["json"]).is_empty());
    }
}

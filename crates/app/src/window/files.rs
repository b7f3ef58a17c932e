//! Files of the window: opening, saving, exporting, data, drag and drop.

use super::model::edit::Edit;
use super::model::examples;
use super::model::law_tree::Place;
use super::panels::dialogs::{Dialog, EXPORTS, Export, Next, PathDialog, Purpose};
use super::workbench::{Notice, Workbench};
use crate::files::scenario::ScenarioFileError;
use crate::files::write::write_whole;
use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::Scenario;
use gaussgap_pages::page::{self, PageStyle};
use gaussgap_simulation::law::LawSpec;
use std::path::{Path, PathBuf};
use std::sync::Arc;

impl Workbench {
    /// Opens a scenario file; what is wrong with it is shown line by line and nothing else changes.
    pub fn open_file(&mut self, path: &Path) {
        match read(path) {
            Ok(scenario) => {
                let path = std::path::absolute(path).unwrap_or_else(|_| path.to_owned());
                self.settings.remember(&path);
                self.start_with(scenario, Some(path));
            }
            Err(lines) => {
                self.dialog = Some(Dialog::Problems("This file cannot be opened".to_owned(), lines));
            }
        }
    }

    /// The folder dialogs start in, as text with a separator behind it.
    pub(super) fn folder_text(&self) -> String {
        let folder = self.document.path().and_then(Path::parent).map(Path::to_owned);
        let folder = folder.or_else(|| std::env::current_dir().ok()).unwrap_or_default();
        let mut text = folder.display().to_string();
        if !text.ends_with(std::path::MAIN_SEPARATOR) {
            text.push(std::path::MAIN_SEPARATOR);
        }
        text
    }

    /// A file name made of the scenario's title.
    fn file_stem(&self) -> String {
        if let Some(stem) = self.document.path().and_then(|path| path.file_stem()) {
            return stem.to_string_lossy().into_owned();
        }
        let title = self.document.scenario().title.clone().unwrap_or_else(|| "plan".to_owned());
        let plain: String =
            title.to_lowercase().chars().map(|c| if c.is_alphanumeric() { c } else { '-' }).collect();
        let stem: Vec<&str> = plain.split('-').filter(|part| !part.is_empty()).take(6).collect();
        if stem.is_empty() { "plan".to_owned() } else { stem.join("-") }
    }

    /// Saves to the scenario's file, or asks where to; then goes on with `next`.
    pub(super) fn save(&mut self, next: Option<Next>) {
        self.after_save = next;
        match self.document.path().map(Path::to_owned) {
            Some(path) => self.save_to(path),
            None => self.ask_where_to_save(),
        }
    }

    /// Opens the dialog for saving.
    pub(super) fn ask_where_to_save(&mut self) {
        let text = format!("{}{}.json", self.folder_text(), self.file_stem());
        self.dialog = Some(Dialog::Path(PathDialog::new(Purpose::Save, text)));
    }

    /// Saves the scenario to a file; bundled pilot data go with it.
    pub(super) fn save_to(&mut self, path: PathBuf) {
        let path = std::path::absolute(&path).unwrap_or(path);
        let moved = self.document.path().map(Path::to_owned);
        let text = self.document.scenario().to_json();
        match write_whole(&path, text.as_bytes()) {
            Ok(()) => {
                if moved.is_none() {
                    write_bundled_data(self.document.scenario(), &path);
                }
                self.settings.remember(&path);
                self.document.mark_saved(path.clone());
                self.say(&format!("Saved {}.", path.display()));
                self.saved();
            }
            Err(error) => self.fail(&error.to_string()),
        }
    }

    /// Opens the dialog for exporting.
    pub(super) fn ask_export(&mut self, kind: Export) {
        let ending = EXPORTS.iter().find(|(known, ..)| *known == kind).map_or("png", |(_, ending, _)| ending);
        let addition = if kind == Export::Json { "-report" } else { "" };
        let text = format!("{}{}{addition}.{ending}", self.folder_text(), self.file_stem());
        self.dialog = Some(Dialog::Path(PathDialog::new(Purpose::Export(kind), text)));
    }

    /// Writes an export beside the window and says so when it is done.
    pub(super) fn export(&mut self, kind: Export, path: PathBuf) {
        let Some((found, current, _)) = self.latest() else { return };
        if !current {
            self.fail("The figures do not belong to the present input yet; nothing was written.");
            return;
        }
        let full =
            self.findings.full.as_ref().filter(|(_, full)| full.report.scenario == found.report.scenario);
        let report = Arc::clone(&full.map_or(found, |(_, full)| full).report);
        let complete = full.is_some();
        let (sender, context) = (self.jobs.0.clone(), self.context.clone());
        let write = move || {
            let written =
                bytes(kind, &report).and_then(|bytes| write_whole(&path, &bytes).map_err(|e| e.to_string()));
            let notice = match written {
                Ok(()) => {
                    let note =
                        if complete { "" } else { " (growth, remedies and safe-from were not computed yet)" };
                    Notice { text: format!("Wrote {}{note}.", path.display()), failed: false }
                }
                Err(text) => Notice { text, failed: true },
            };
            // The window may have closed meanwhile; then there is nobody to tell.
            let _ = sender.send(notice);
            if let Some(context) = context {
                context.request_repaint();
            }
        };
        if std::thread::Builder::new().name("export".to_owned()).spawn(write).is_err() {
            self.fail("The export could not be started.");
        }
    }

    /// Draws the page beside the window and puts it on the clipboard when it is done.
    pub(super) fn copy_picture(&mut self) {
        let Some((found, true, _)) = self.latest() else {
            return self.fail("The figures do not belong to the present input yet; nothing was copied.");
        };
        let full =
            self.findings.full.as_ref().filter(|(_, full)| full.report.scenario == found.report.scenario);
        let report = Arc::clone(&full.map_or(found, |(_, full)| full).report);
        let (sender, context) = (self.pictures.0.clone(), self.context.clone());
        let draw = move || {
            let pixels = page::to_pixels(&report, &PageStyle::default());
            let size = [pixels.width as usize, pixels.height as usize];
            // The window may have closed meanwhile; then there is nobody to tell.
            let _ = sender.send(egui::ColorImage::from_rgba_unmultiplied(size, &pixels.rgba));
            if let Some(context) = context {
                context.request_repaint();
            }
        };
        if std::thread::Builder::new().name("picture".to_owned()).spawn(draw).is_err() {
            self.fail("The picture could not be drawn.");
        }
    }

    /// Takes a column of a CSV file as the law at a place.
    pub(super) fn take_data(&mut self, place: &Place, path: &Path, column: String) {
        let full = std::path::absolute(path).unwrap_or_else(|_| path.to_owned());
        let folder = self.document.path().and_then(Path::parent);
        let relative = folder.and_then(|folder| full.strip_prefix(folder).ok()).unwrap_or(&full);
        let column = if column.trim().is_empty() { "1".to_owned() } else { column.trim().to_owned() };
        let law = LawSpec::Data {
            values: None,
            path: Some(relative.display().to_string()),
            column: Some(column),
            tail: None,
        };
        self.edit(&Edit::Law(place.clone(), law));
    }

    /// Files dropped on the window: scenarios are opened, CSV files become the law.
    pub(super) fn dropped(&mut self, ctx: &egui::Context) {
        let paths: Vec<PathBuf> =
            ctx.input(|input| input.raw.dropped_files.iter().map(|file| file.path().to_owned()).collect());
        let Some(path) = paths.first() else { return };
        let ending = path.extension().and_then(|e| e.to_str()).unwrap_or("").to_ascii_lowercase();
        match ending.as_str() {
            "json" => self.guarded(Next::Open(path.clone())),
            "csv" | "tsv" | "txt" if self.has_plan => {
                self.start_page = false;
                let text = path.display().to_string();
                self.dialog = Some(Dialog::Path(PathDialog::new(Purpose::Data(Place::top(0)), text)));
            }
            _ => self.fail(&format!("{}: expected a scenario (.json) or pilot data (.csv)", path.display())),
        }
    }
}

/// Reads a scenario; its data files are read by the worker.
fn read(path: &Path) -> Result<Scenario, Vec<String>> {
    let bytes =
        std::fs::read(path).map_err(|error| vec![format!("{}: cannot be read: {error}", path.display())])?;
    let text = String::from_utf8(bytes).map_err(|error| {
        vec![format!("{}: is not UTF-8 text (byte {})", path.display(), error.utf8_error().valid_up_to())]
    })?;
    Scenario::parse(&text).map_err(|problems| ScenarioFileError::in_document(path, &problems).lines)
}

/// Writes bundled pilot data that a scenario names beside it, where it is not there already.
fn write_bundled_data(scenario: &Scenario, path: &Path) {
    for request in scenario.data_requests() {
        let bundled = examples::DATA.iter().find(|(name, _)| *name == request.path);
        if let (Some((name, text)), Some(folder)) = (bundled, path.parent()) {
            let target = folder.join(name);
            if !target.exists() {
                // The next assessment names the file if it is missing.
                let _ = write_whole(&target, text.as_bytes());
            }
        }
    }
}

/// An export as bytes.
fn bytes(kind: Export, report: &Report) -> Result<Vec<u8>, String> {
    match kind {
        Export::Png => Ok(page::to_png(report, &PageStyle { scale: 2.0, ..PageStyle::default() })),
        Export::Svg => Ok(page::to_svg(report, &PageStyle::default()).into_bytes()),
        Export::Json => {
            gaussgap_pages::report::to_json(report).map(String::into_bytes).map_err(|e| e.to_string())
        }
        Export::Csv => Ok(gaussgap_pages::curves::to_csv(report)),
    }
}

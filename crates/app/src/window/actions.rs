//! What was asked for is carried out here and nowhere else: edits, commands, pins, answers of dialogs.

use super::command::Command;
use super::model::document::Document;
use super::model::edit::{Edit, planned_n};
use super::model::examples;
use super::model::law_tree::{self, Place};
use super::model::settings::Axis;
use super::panels::dialogs::{Answer, Dialog, Export, Next, PathDialog, Purpose};
use super::panels::{Ask, Asks};
use super::workbench::{Notice, Workbench};
use egui::{Context, Id, ViewportCommand};
use gaussgap_conclusions::scenario::Scenario;
use gaussgap_conclusions::words::{describe_law, summary_paragraph};
use gaussgap_simulation::law::LawSpec;
use std::path::PathBuf;
use std::sync::Arc;

impl Workbench {
    /// Carries out what a frame asked for.
    pub(super) fn carry_out(&mut self, ctx: &Context, asks: Asks) {
        let had_asks = !asks.list.is_empty();
        for ask in asks.list {
            self.carry_out_one(ctx, ask);
        }
        if asks.end_step {
            self.document.end_step();
        }
        // A cursor put by the pointer goes with it; one put by the keyboard stays.
        if asks.cursor.is_some() || self.cursor_by_pointer {
            self.cursor_by_pointer = asks.cursor.is_some();
            if asks.cursor != self.cursor {
                self.cursor = asks.cursor;
                ctx.request_repaint();
            }
        }
        if had_asks {
            ctx.request_repaint();
        }
    }

    fn carry_out_one(&mut self, ctx: &Context, ask: Ask) {
        match ask {
            Ask::Edit(edit) => {
                self.playing = None;
                self.edit(&edit);
            }
            Ask::Do(command) => self.command(ctx, command),
            Ask::Example(index) => self.guarded(Next::Example(index)),
            Ask::Open(path) => self.guarded(Next::Open(path)),
            Ask::Unpin(index) => self.pins.remove(index),
            Ask::RenamePin(index, name) => self.pins.rename(index, name),
            Ask::PinEarlier(index) => self.pins.earlier(index),
            Ask::RestorePin(index) => {
                if let Some(pin) = self.pins.all().get(index) {
                    let scenario = pin.asked.clone();
                    self.edit(&Edit::Replace(Box::new((*scenario).clone())));
                    self.document.end_step();
                }
            }
            Ask::ChooseData(place) => self.choose_data(place),
            Ask::Copy(text) => {
                ctx.copy_text(text);
                self.say("Copied.");
            }
            Ask::DismissNotice => self.notice = None,
        }
    }

    /// Applies an edit to the document.
    pub fn edit(&mut self, edit: &Edit) {
        self.document.apply(edit, self.seconds);
    }

    fn command(&mut self, ctx: &Context, command: Command) {
        match command {
            Command::StartPage => self.start_page = true,
            Command::New => self.guarded(Next::New),
            Command::Open => {
                let text = self.folder_text();
                self.dialog = Some(Dialog::Path(PathDialog::new(Purpose::Open, text)));
            }
            Command::Save => self.save(None),
            Command::SaveAs => self.ask_where_to_save(),
            Command::Export => self.ask_export(Export::Png),
            Command::CopySummary => {
                if let Some((found, ..)) = self.latest() {
                    let full = self
                        .findings
                        .full
                        .as_ref()
                        .filter(|(_, full)| full.report.scenario == found.report.scenario);
                    let report = full.map_or(&found.report, |(_, full)| &full.report);
                    ctx.copy_text(summary_paragraph(report));
                    self.say("The summary is on the clipboard.");
                }
            }
            Command::CopyPlan => {
                ctx.copy_text(gaussgap_conclusions::words::plan_sentence(self.document.scenario()))
            }
            Command::CopyPicture => self.copy_picture(),
            Command::ZoomIn => self.board.zoom(1.5, self.cursor),
            Command::ZoomOut => self.board.zoom(1.0 / 1.5, self.cursor),
            Command::WholeAxis => self.board.range = None,
            Command::PanLeft => self.board.pan(-0.1),
            Command::PanRight => self.board.pan(0.1),
            Command::Play if self.playing.is_some() => self.playing = None,
            Command::Play => self.play(),
            Command::Undo => {
                self.playing = None;
                self.document.undo();
            }
            Command::Redo => {
                self.playing = None;
                self.document.redo();
            }
            Command::Pin => self.pin(),
            Command::Stop => {
                self.playing = None;
                if let Some(worker) = &mut self.worker {
                    worker.stop();
                    self.findings.stopped = Some(worker.generation());
                }
            }
            Command::GoOn => self.asked = None,
            Command::GoToN => self.go_to_n(ctx),
            Command::MoreN | Command::FewerN | Command::ManyMoreN | Command::ManyFewerN => {
                if let Some(n) = self.stepped_n(command) {
                    self.edit(&Edit::N { slot: 0, n });
                }
            }
            Command::SwitchAxis => {
                self.settings.axis = if self.settings.axis == Axis::Own { Axis::Standard } else { Axis::Own };
            }
            Command::CursorLeft => self.put_cursor((self.cursor.unwrap_or(0.0) - 0.05).max(-4.2)),
            Command::CursorRight => self.put_cursor((self.cursor.unwrap_or(0.0) + 0.05).min(4.2)),
            Command::NoCursor => self.cursor = None,
            Command::Brightness => {
                let dark = ctx.theme() == egui::Theme::Dark;
                self.settings.turn_brightness(dark);
            }
            Command::LargerText => self.settings.change_text_size(1),
            Command::SmallerText => self.settings.change_text_size(-1),
            Command::UsualText => self.settings.text_size = 1.0,
            Command::Shortcuts => self.dialog = Some(Dialog::Shortcuts),
            Command::Enlarge(figure) => self.board.toggle(figure),
            Command::AsTable => self.board.toggle_tables(),
            Command::Back => {
                if self.board.enlarged.take().is_none() {
                    self.cursor = None;
                    if self.has_plan {
                        self.start_page = false;
                    }
                }
            }
        }
    }

    fn put_cursor(&mut self, z: f64) {
        self.cursor = Some(z);
        self.cursor_by_pointer = false;
    }

    fn go_to_n(&mut self, ctx: &Context) {
        self.start_page = false;
        let id = Id::unique(("n", 0usize));
        ctx.memory_mut(|memory| memory.request_focus(id));
        if let Some(mut state) = egui::TextEdit::load_state(ctx, id) {
            let all =
                egui::text::CCursorRange::two(egui::text::CCursor::new(0), egui::text::CCursor::new(40));
            state.cursor.set_char_range(Some(all));
            egui::TextEdit::store_state(ctx, id, state);
        }
    }

    fn pin(&mut self) {
        let Some((found, ..)) = self.latest() else { return };
        let scenario = &found.report.scenario;
        let law = law_tree::law_at(&scenario.source, &Place::top(0)).map(describe_law).unwrap_or_default();
        let name = format!("{law}, n = {}", planned_n(&scenario.source));
        let full = self.findings.full.as_ref().map(|(_, full)| full);
        let found = full.filter(|full| full.report.scenario == *scenario).unwrap_or(found);
        let (found, asked) = (Arc::clone(found), Arc::clone(self.document.scenario()));
        if self.pins.keep(name, found, asked) {
            self.say("Pinned: it stays behind as a ghost.");
        } else {
            self.fail("Four plans are pinned already; remove one first.");
        }
    }

    /// A message that something was done.
    pub(super) fn say(&mut self, text: &str) {
        self.notice = Some(Notice { text: text.to_owned(), failed: false });
    }

    /// A message that something failed.
    pub(super) fn fail(&mut self, text: &str) {
        self.notice = Some(Notice { text: text.to_owned(), failed: true });
    }

    /// Goes on, unless that would lose changes: then asks first.
    pub(super) fn guarded(&mut self, next: Next) {
        if self.has_unsaved() {
            self.dialog = Some(Dialog::Unsaved(next));
        } else {
            self.go_on(next);
        }
    }

    fn go_on(&mut self, next: Next) {
        match next {
            Next::Close => {
                self.may_close = true;
                if let Some(ctx) = &self.context {
                    ctx.send_viewport_cmd(ViewportCommand::Close);
                }
            }
            Next::Open(path) => self.open_file(&path),
            Next::Example(index) => {
                if let Some(Ok(scenario)) = examples::EXAMPLES.get(index).map(|e| Scenario::parse(e.text)) {
                    self.start_with(scenario, None);
                }
            }
            Next::New => self.start_with(examples::blank(), None),
        }
    }

    /// Starts with a scenario; pins stay.
    pub(super) fn start_with(&mut self, scenario: Scenario, path: Option<PathBuf>) {
        let revision = self.document.revision();
        self.playing = None;
        self.board.range = None;
        self.document = Document::new(scenario, path);
        self.document.start_after(revision);
        self.asked = None;
        self.fields.clear();
        self.findings.problems.clear();
        self.findings.broken = None;
        self.findings.shown = None;
        self.findings.full = None;
        self.board.enlarged = None;
        self.cursor = None;
        self.start_page = false;
        self.has_plan = true;
        self.dialog = None;
    }

    /// Carries out the answer of a dialog.
    pub(super) fn answered(&mut self, answer: Answer) {
        self.dialog = None;
        match answer {
            Answer::Cancel => self.after_save = None,
            Answer::Discard(next) => {
                self.document.discard_changes();
                self.go_on(next);
            }
            Answer::SaveThen(next) => self.save(Some(next)),
            Answer::Kind(kind) => self.ask_export(kind),
            Answer::Path(purpose, path, column) => match purpose {
                Purpose::Open => self.guarded(Next::Open(path)),
                Purpose::Save => self.save_to(path),
                Purpose::Export(kind) => self.export(kind, path),
                Purpose::Data(place) => self.take_data(&place, &path, column),
            },
        }
    }

    /// Goes on after the scenario was saved.
    pub(super) fn saved(&mut self) {
        if let Some(next) = self.after_save.take() {
            self.go_on(next);
        }
    }

    /// Opens the dialog for a data file.
    fn choose_data(&mut self, place: Place) {
        let text = match law_tree::law_at(&self.document.scenario().source, &place) {
            Some(LawSpec::Data { path: Some(path), .. }) => {
                let folder = self.document.path().and_then(|file| file.parent());
                folder.map_or_else(|| PathBuf::from(path), |folder| folder.join(path)).display().to_string()
            }
            _ => self.folder_text(),
        };
        self.dialog = Some(Dialog::Path(PathDialog::new(Purpose::Data(place), text)));
    }
}

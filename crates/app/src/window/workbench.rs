//! The workbench: the whole interface as one object, ignorant of what draws it.

use super::command::{self, Command};
use super::figures::View;
use super::model::document::Document;
use super::model::edit::planned_n;
use super::model::examples;
use super::model::pins::Pins;
use super::model::prepared::Prepared;
use super::model::settings::{Brightness, Settings};
use super::panels::bar::Bar;
use super::panels::board::{self, Board};
use super::panels::cards::Cards;
use super::panels::dialogs::{self, Dialog, Next};
use super::panels::fields::Fields;
use super::panels::finding::{self, Circumstances};
use super::panels::start::Sample;
use super::panels::{Asks, bar, pins, plan, start};
use super::session::{self, Session};
use super::tokens;
use super::work::{Answer, Engine, Failure, Stage, Worker};
use egui::{CentralPanel, Frame, Margin, Panel, RichText, ScrollArea, Ui, ViewportCommand};
use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::{Scenario, Source};
use gaussgap_conclusions::words::plan_sentence;
use std::sync::Arc;
use std::sync::mpsc::{Receiver, Sender, channel};
use std::time::Duration;

/// A short message at the bottom of the window.
#[derive(Debug, Clone, PartialEq)]
pub struct Notice {
    /// What happened.
    pub text: String,
    /// Whether something failed.
    pub failed: bool,
}

/// What has been computed.
#[derive(Debug, Default)]
pub(super) struct Findings {
    /// The latest answer and its request.
    pub shown: Option<(u64, Arc<Prepared>)>,
    /// The latest full answer and its request.
    pub full: Option<(u64, Arc<Prepared>)>,
    /// What is wrong with the present input.
    pub problems: Vec<Problem>,
    /// The computation itself failed.
    pub broken: Option<String>,
    /// The user stopped the work on this request.
    pub stopped: Option<u64>,
    /// Whether the growth of the full answer belongs to the present laws.
    pub growth_is_current: bool,
}

/// The whole interface.
pub struct Workbench {
    pub(super) document: Document,
    pub(super) settings: Settings,
    pub(super) engine: Engine,
    pub(super) worker: Option<Worker>,
    pub(super) asked: Option<u64>,
    pub(super) findings: Findings,
    pub(super) pins: Pins,
    pub(super) fields: Fields,
    pub(super) board: Board,
    pub(super) cursor: Option<f64>,
    pub(super) cursor_by_pointer: bool,
    pub(super) dialog: Option<Dialog>,
    pub(super) notice: Option<Notice>,
    pub(super) start_page: bool,
    pub(super) has_plan: bool,
    pub(super) show_cards: bool,
    pub(super) samples: Vec<Sample>,
    pub(super) jobs: (Sender<Notice>, Receiver<Notice>),
    pub(super) context: Option<egui::Context>,
    pub(super) seconds: f64,
    /// When n was last stepped, while n is being played through.
    pub(super) playing: Option<f64>,
    pub(super) pictures: (Sender<egui::ColorImage>, Receiver<egui::ColorImage>),
    pub(super) may_close: bool,
    pub(super) after_save: Option<Next>,
    keeps_session: bool,
    window_title: String,
    applied: Option<(Brightness, f32)>,
}

impl Workbench {
    /// A workbench that goes on where a session ended and assesses with `engine`.
    pub fn new(session: Session, engine: Engine) -> Self {
        let restored = session.scenarios();
        let has_plan = restored.is_some();
        let (scenario, saved) = restored.unwrap_or_else(|| (examples::blank(), examples::blank()));
        let mut document = Document::new(scenario, session.path);
        document.mark_saved_as(saved);
        Self {
            document,
            settings: session.settings,
            engine,
            worker: None,
            asked: None,
            findings: Findings::default(),
            pins: Pins::default(),
            fields: Fields::default(),
            board: Board::default(),
            cursor: None,
            cursor_by_pointer: false,
            dialog: None,
            notice: None,
            start_page: !has_plan,
            has_plan,
            show_cards: false,
            samples: samples(),
            jobs: channel(),
            context: None,
            seconds: 0.0,
            playing: None,
            pictures: channel(),
            may_close: false,
            after_save: None,
            keeps_session: false,
            window_title: String::new(),
            applied: None,
        }
    }

    /// Gives a drawing context the faces and styles of the window; needed once, before the first frame.
    pub fn prepare(ctx: &egui::Context) {
        tokens::install(ctx);
        ctx.options_mut(|options| options.zoom_with_keyboard = false);
    }

    /// Keeps the session in its file when the window closes.
    pub fn keep_session(&mut self) {
        self.keeps_session = true;
    }

    /// The session as it is now.
    pub fn session(&self) -> Session {
        Session {
            settings: self.settings.clone(),
            scenario: self.has_plan.then(|| self.document.scenario().to_json()),
            saved: self.has_plan.then(|| self.document.saved().to_json()),
            path: self.document.path().map(Into::into),
        }
    }

    /// Called once when the window has closed.
    pub fn closed(&mut self) {
        if self.keeps_session {
            session::store(&self.session());
        }
        self.worker = None;
    }

    /// The scenario being edited.
    pub fn scenario(&self) -> &Arc<Scenario> {
        self.document.scenario()
    }

    /// The latest report, whether it belongs to the present input, and whether it is complete.
    pub fn latest(&self) -> Option<(&Arc<Prepared>, bool, bool)> {
        let generation = self.worker.as_ref().map_or(0, Worker::generation);
        let (at, shown) = self.findings.shown.as_ref()?;
        let complete = self.findings.full.as_ref().is_some_and(|(full, _)| full == at);
        Some((shown, *at == generation && self.asked == Some(self.document.revision()), complete))
    }

    /// Takes in finished work and sends new; called before every frame and while the window is hidden.
    pub fn logic(&mut self, ctx: &egui::Context) {
        if self.worker.is_none() {
            let context = ctx.clone();
            self.worker =
                Some(Worker::new(Arc::clone(&self.engine), Arc::new(move || context.request_repaint())));
            self.context = Some(ctx.clone());
        }
        self.appearance(ctx);
        self.seconds = ctx.input(|input| input.time);
        let answers = self.worker.as_mut().map(Worker::answers).unwrap_or_default();
        for answer in answers {
            self.take(answer);
        }
        if let Ok(notice) = self.jobs.1.try_recv() {
            self.notice = Some(notice);
        }
        if let Ok(picture) = self.pictures.1.try_recv() {
            ctx.copy_image(picture);
            self.say("The page is on the clipboard as a picture.");
        }
        self.play_on(ctx);
        self.ask_worker();
        if let Some(Dialog::Path(dialog)) = &mut self.dialog {
            dialog.look();
        }
        if ctx.input(|input| input.viewport().close_requested()) && !self.may_close && self.has_unsaved() {
            ctx.send_viewport_cmd(ViewportCommand::CancelClose);
            self.dialog = Some(Dialog::Unsaved(Next::Close));
        }
        self.dropped(ctx);
        if self.worker.as_ref().is_some_and(Worker::is_busy) {
            ctx.request_repaint_after(Duration::from_millis(60));
        }
    }

    /// Whether closing would lose changes.
    pub(super) fn has_unsaved(&self) -> bool {
        self.has_plan && self.document.is_changed()
    }

    fn appearance(&mut self, ctx: &egui::Context) {
        let wanted = (self.settings.brightness, self.settings.text_size);
        if self.applied != Some(wanted) {
            ctx.set_theme(match wanted.0 {
                Brightness::System => egui::ThemePreference::System,
                Brightness::Light => egui::ThemePreference::Light,
                Brightness::Dark => egui::ThemePreference::Dark,
            });
            ctx.set_zoom_factor(wanted.1.clamp(0.5, 3.0));
            self.applied = Some(wanted);
        }
        let mark = if self.has_unsaved() { "● " } else { "" };
        let title = match (self.start_page, &self.document.scenario().title) {
            (false, Some(title)) => format!("{mark}{title} – Gaussgap"),
            _ => format!("{mark}Gaussgap"),
        };
        if self.window_title != title {
            ctx.send_viewport_cmd(ViewportCommand::Title(title.clone()));
            self.window_title = title;
        }
    }

    /// Sends the scenario to the worker where it has changed.
    fn ask_worker(&mut self) {
        if self.start_page || self.asked == Some(self.document.revision()) {
            return;
        }
        let folder = self.document.path().map(|path| path.parent().unwrap_or(path).to_owned());
        if let Some(worker) = &mut self.worker {
            worker.ask(Arc::clone(self.document.scenario()), folder);
            self.asked = Some(self.document.revision());
            self.findings.stopped = None;
            let now = self.document.scenario();
            self.findings.growth_is_current =
                self.findings.full.as_ref().is_some_and(|(_, full)| same_growth(&full.report.scenario, now));
        }
    }

    /// Takes an answer of the worker in, unless a newer one is shown already.
    fn take(&mut self, answer: Answer) {
        let newest = self.worker.as_ref().is_some_and(|worker| worker.generation() == answer.generation);
        match answer.outcome {
            Ok(found) => {
                if newest {
                    self.findings.problems.clear();
                    self.findings.broken = None;
                }
                if self.findings.shown.as_ref().is_some_and(|(shown, _)| *shown > answer.generation) {
                    return;
                }
                self.pins.complete(&found);
                if answer.stage == Stage::Full {
                    self.findings.full = Some((answer.generation, Arc::clone(&found)));
                    self.findings.growth_is_current =
                        same_growth(&found.report.scenario, self.document.scenario());
                }
                self.findings.shown = Some((answer.generation, found));
            }
            Err(Failure::Scenario(problems)) if newest => self.findings.problems = problems,
            Err(Failure::Broken(message)) if newest => self.findings.broken = Some(message),
            Err(_) => {}
        }
    }

    /// Draws one frame.
    pub fn ui(&mut self, ui: &mut Ui) {
        let mut asks = Asks::default();
        self.fields.begin();
        if self.dialog.is_none() {
            for command in command::typed(ui.ctx()) {
                asks.command(command);
            }
        }
        self.panels(ui, &mut asks);
        asks.end_step |= self.fields.left;
        if let Some(dialog) = &mut self.dialog
            && let Some(answer) = dialogs::show(ui.ctx(), dialog)
        {
            self.answered(answer);
        }
        self.carry_out(ui.ctx(), asks);
    }

    fn panels(&mut self, ui: &mut Ui, asks: &mut Asks) {
        let palette = tokens::palette(ui);
        let generation = self.worker.as_ref().map_or(0, Worker::generation);
        let shown = self.findings.shown.clone();
        let full = self.findings.full.clone();
        let pins = self.pins.clone();
        let scenario = Arc::clone(self.document.scenario());
        let view = shown.as_ref().map(|(_, shown)| View {
            scenario: &scenario,
            shown,
            full: full.as_ref().map(|(_, full)| full),
            full_is_current: full.as_ref().is_some_and(|(at, _)| *at == generation),
            growth_is_current: self.findings.growth_is_current,
            pins: pins.all(),
            cursor: self.cursor,
            axis: self.settings.axis,
            range: self.board.shown_range(),
        });
        let margin = |top, bottom| Margin { left: 12, right: 12, top, bottom };
        let strip = |top, bottom| Frame::new().fill(palette.paper).inner_margin(margin(top, bottom));
        let facts = Bar {
            can_pin: view.is_some() && self.pins.all().len() < super::model::pins::MOST,
            can_export: view.is_some(),
            start_page: self.start_page,
        };
        Panel::top("bar").frame(strip(6, 5)).show(ui, |ui| {
            bar::show(ui, &mut self.fields, &self.document, facts, asks);
        });
        self.status(ui, view.as_ref(), asks);
        if self.start_page {
            CentralPanel::default().frame(strip(4, 8)).show(ui, |ui| {
                start::show(ui, &self.samples, &self.settings.recent, self.has_plan, asks);
            });
            return;
        }
        let size = ui.available_size();
        if size.x < tokens::NARROW || size.y < 520.0 {
            CentralPanel::default().frame(strip(4, 8)).show(ui, |ui| {
                ScrollArea::vertical().id_salt("narrow").auto_shrink(false).show(ui, |ui| {
                    self.plan_and_finding(ui, view.as_ref(), asks);
                    ui.horizontal(|ui| {
                        ui.selectable_value(&mut self.show_cards, true, "Law cards");
                        ui.selectable_value(&mut self.show_cards, false, "Figures");
                    });
                    if self.show_cards {
                        self.cards(ui, view.as_ref(), asks);
                    } else {
                        let height =
                            (ui.ctx().content_rect().height() - 90.0).max(tokens::FIGURE_HEIGHT * 1.2);
                        let size = egui::vec2(ui.available_width(), height);
                        ui.allocate_ui(size, |ui| {
                            ui.set_min_size(size);
                            self.board_panel(ui, view.as_ref(), asks);
                        });
                    }
                });
            });
            return;
        }
        Panel::top("plan").frame(strip(2, 6)).show(ui, |ui| self.plan_and_finding(ui, view.as_ref(), asks));
        Panel::left("cards").frame(strip(8, 6)).resizable(false).exact_size(tokens::CARDS_WIDTH).show(
            ui,
            |ui| {
                ScrollArea::vertical().id_salt("cards").auto_shrink(false).show(ui, |ui| {
                    self.cards(ui, view.as_ref(), asks);
                });
            },
        );
        CentralPanel::default().frame(strip(6, 8)).show(ui, |ui| self.board_panel(ui, view.as_ref(), asks));
    }

    fn plan_and_finding(&mut self, ui: &mut Ui, view: Option<&View<'_>>, asks: &mut Asks) {
        let near = view.and_then(|view| view.shown.own_units);
        plan::show(
            ui,
            &mut self.fields,
            &Arc::clone(self.document.scenario()),
            plan::Surroundings { near, problems: &self.findings.problems, playing: self.playing.is_some() },
            asks,
        );
        ui.add_space(2.0);
        let now = self.circumstances();
        match view {
            Some(view) => finding::show(ui, view, now, asks),
            None => finding::waiting(ui, now, asks),
        }
        if let Some(message) = &self.findings.broken {
            finding::mistake(ui, message);
        }
    }

    fn circumstances(&self) -> Circumstances {
        let generation = self.worker.as_ref().map_or(0, Worker::generation);
        let answered = self.findings.shown.as_ref().is_some_and(|(at, _)| *at == generation);
        Circumstances {
            is_current: answered,
            has_problem: !self.findings.problems.is_empty()
                || self.fields.has_problem()
                || self.findings.broken.is_some(),
            progress: self.worker.as_ref().and_then(Worker::progress),
            stopped: self.findings.stopped == Some(generation),
        }
    }

    fn cards(&mut self, ui: &mut Ui, view: Option<&View<'_>>, asks: &mut Asks) {
        let scenario = Arc::clone(self.document.scenario());
        let problems = &self.findings.problems;
        Cards { fields: &mut self.fields, scenario: &scenario, problems, view, asks }.show(ui);
    }

    fn board_panel(&mut self, ui: &mut Ui, view: Option<&View<'_>>, asks: &mut Asks) {
        let Some(view) = view else {
            board::empty(ui, "The figures appear with the first answer.");
            return;
        };
        if !view.pins.is_empty() {
            pins::show(ui, &mut self.fields, view, asks);
            ui.add_space(tokens::GAP);
        }
        board::show(ui, &mut self.board, view, asks);
    }

    fn status(&mut self, ui: &mut Ui, view: Option<&View<'_>>, asks: &mut Asks) {
        let palette = tokens::palette(ui);
        let frame = Frame::new().fill(palette.well).inner_margin(Margin::symmetric(12, 3));
        Panel::bottom("status").frame(frame).show(ui, |ui| {
            ui.horizontal(|ui| {
                if let Some(notice) = &self.notice {
                    let color = if notice.failed { palette.fails } else { palette.holds };
                    let mark = if notice.failed { "✗" } else { "✓" };
                    let words = RichText::new(format!("{mark} {}", notice.text)).size(12.0).color(color);
                    ui.add(egui::Label::new(words).truncate());
                    if super::panels::cards::small(ui, "×", "Take the message away") {
                        asks.list.push(super::panels::Ask::DismissNotice);
                    }
                } else {
                    let (words, all) = match view.filter(|_| !self.start_page) {
                        Some(view) => finding::method(view),
                        None => (format!("gaussgap {}", env!("CARGO_PKG_VERSION")), String::new()),
                    };
                    let words = RichText::new(words).size(tokens::SMALL).color(palette.muted);
                    let label = ui.add(egui::Label::new(words).truncate());
                    if !all.is_empty() {
                        label.on_hover_text(all);
                    }
                }
            });
        });
    }

    /// Steps the planned n by a command.
    pub(super) fn stepped_n(&self, command: Command) -> Option<u64> {
        let Source::Like { n, .. } = &self.document.scenario().source else { return None };
        let n = *n;
        Some(match command {
            Command::MoreN => n.saturating_add(1),
            Command::FewerN => n.saturating_sub(1).max(1),
            Command::ManyMoreN => n.saturating_add((n / 4).max(1)),
            Command::ManyFewerN => n.saturating_sub((n / 5).max(1)).max(1),
            _ => planned_n(&self.document.scenario().source),
        })
    }
}

/// Whether the growth curve of one scenario is that of another: the same laws, whatever n and claim.
fn same_growth(a: &Scenario, b: &Scenario) -> bool {
    let same_source = match (&a.source, &b.source) {
        (Source::Like { law: a, dependence: c, .. }, Source::Like { law: b, dependence: d, .. }) => {
            same_law(a, b) && c == d
        }
        (a, b) => a == b,
    };
    same_source && a.search == b.search && a.method == b.method
}

/// Whether two laws are the same; a data law with a file is known by it, not by the values read from it.
fn same_law(a: &gaussgap_simulation::law::LawSpec, b: &gaussgap_simulation::law::LawSpec) -> bool {
    a == b || serde_json::to_value(a).ok() == serde_json::to_value(b).ok()
}

/// The bundled scenarios as the start page shows them.
fn samples() -> Vec<Sample> {
    examples::EXAMPLES
        .iter()
        .map(|example| match Scenario::parse(example.text) {
            Ok(scenario) => Sample {
                title: scenario.title.clone().unwrap_or_else(|| example.file.to_owned()),
                plan: plan_sentence(&scenario),
            },
            Err(_) => Sample { title: example.file.to_owned(), plan: String::new() },
        })
        .collect()
}

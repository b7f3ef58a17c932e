//! Work beside the window: one worker thread, requests with generation numbers, the newest wins.
//!
//! The worker knows nothing of the window: it gets scenarios, a way to assess them and a plain closure to call
//! after an answer was sent. A request is answered twice: first for the planned n alone, then in full.

pub mod data;

use super::model::prepared::Prepared;
use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::Scenario;
use gaussgap_conclusions::{AssessError, Effort, Problem};
use gaussgap_simulation::work::Work;
use std::path::PathBuf;
use std::sync::mpsc::{Receiver, Sender, channel};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

/// How a scenario is assessed; the program passes [`gaussgap_conclusions::assess`], tests may pass another.
pub type Engine = Arc<dyn Fn(&Scenario, Effort, &Work) -> Result<Report, AssessError> + Send + Sync>;

/// Called after an answer was sent.
pub type Wake = Arc<dyn Fn() + Send + Sync>;

/// A first answer that takes longer than this gives way to a newer request; a shorter one is finished, so that
/// a drag shows every figure it passes instead of none.
const PATIENCE: Duration = Duration::from_millis(600);

/// What is asked for.
#[derive(Debug, Clone)]
struct Request {
    generation: u64,
    scenario: Arc<Scenario>,
    folder: Option<PathBuf>,
}

/// How complete an answer is.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Stage {
    /// The planned n alone.
    Planned,
    /// With growth, safe-from, remedies and rules.
    Full,
}

/// Why there is no report.
#[derive(Debug, Clone, PartialEq)]
pub enum Failure {
    /// The scenario is not usable.
    Scenario(Vec<Problem>),
    /// The computation itself broke down.
    Broken(String),
}

/// An answer of the worker.
#[derive(Debug, Clone)]
pub struct Answer {
    /// Which request it answers.
    pub generation: u64,
    /// The scenario that was asked about.
    pub scenario: Arc<Scenario>,
    /// How complete it is.
    pub stage: Stage,
    /// The report with everything the figures draw, or why there is none.
    pub outcome: Result<Arc<Prepared>, Failure>,
}

#[derive(Debug)]
struct Running {
    generation: u64,
    stage: Stage,
    started: Instant,
    work: Work,
}

#[derive(Debug, Default)]
struct Slot {
    pending: Option<Request>,
    running: Option<Running>,
    closing: bool,
}

#[derive(Debug, Default)]
struct Shared {
    slot: Mutex<Slot>,
    changed: Condvar,
}

impl Shared {
    fn lock(&self) -> MutexGuard<'_, Slot> {
        self.slot.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

/// What the worker is doing.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Progress {
    /// Which request.
    pub generation: u64,
    /// Which stage of it.
    pub stage: Stage,
    /// How much of the stage is done, from 0 to 1.
    pub fraction: f64,
    /// For how long.
    pub elapsed: Duration,
}

/// The window's side of the worker.
pub struct Worker {
    shared: Arc<Shared>,
    answers: Receiver<Answer>,
    sender: Sender<Answer>,
    thread: Option<JoinHandle<()>>,
    engine: Engine,
    wake: Wake,
    generation: u64,
    last: Option<Request>,
}

impl std::fmt::Debug for Worker {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Worker").field("generation", &self.generation).finish_non_exhaustive()
    }
}

impl Worker {
    /// A worker that assesses with `engine` and calls `wake` after every answer.
    pub fn new(engine: Engine, wake: Wake) -> Self {
        let (sender, answers) = channel();
        Self {
            shared: Arc::default(),
            answers,
            sender,
            thread: None,
            engine,
            wake,
            generation: 0,
            last: None,
        }
    }

    /// Asks about a scenario; older requests give way. `folder` is where its data files are.
    pub fn ask(&mut self, scenario: Arc<Scenario>, folder: Option<PathBuf>) -> u64 {
        self.generation += 1;
        let request = Request { generation: self.generation, scenario, folder };
        self.last = Some(request.clone());
        {
            let mut slot = self.shared.lock();
            slot.pending = Some(request);
            give_way(&slot);
        }
        self.shared.changed.notify_one();
        if self.thread.as_ref().is_none_or(JoinHandle::is_finished) {
            self.start();
        }
        self.generation
    }

    fn start(&mut self) {
        let shared = Arc::clone(&self.shared);
        let (sender, engine, wake) = (self.sender.clone(), Arc::clone(&self.engine), Arc::clone(&self.wake));
        let thread = std::thread::Builder::new()
            .name("assess".to_owned())
            .spawn(move || serve(&shared, &sender, &engine, &wake));
        self.thread = thread.ok();
    }

    /// The number of the latest request.
    pub fn generation(&self) -> u64 {
        self.generation
    }

    /// Answers that have arrived since the last call; never waits.
    pub fn answers(&mut self) -> Vec<Answer> {
        give_way(&self.shared.lock());
        let mut answers: Vec<Answer> = self.answers.try_iter().collect();
        if self.thread.as_ref().is_some_and(JoinHandle::is_finished) {
            answers.extend(self.broken());
        }
        answers
    }

    /// The answer to a request on which the thread died; the thread is started anew with the next request.
    fn broken(&mut self) -> Option<Answer> {
        self.thread = None;
        let dropped = self.shared.lock().running.take()?;
        let request = self.last.clone()?;
        let message = "the computation broke down unexpectedly; please report this scenario".to_owned();
        (dropped.generation == request.generation).then_some(Answer {
            generation: request.generation,
            scenario: request.scenario,
            stage: dropped.stage,
            outcome: Err(Failure::Broken(message)),
        })
    }

    /// What is being done now.
    pub fn progress(&self) -> Option<Progress> {
        let slot = self.shared.lock();
        slot.running.as_ref().map(|running| Progress {
            generation: running.generation,
            stage: running.stage,
            fraction: running.work.fraction(),
            elapsed: running.started.elapsed(),
        })
    }

    /// Whether anything is being done or waits to be done.
    pub fn is_busy(&self) -> bool {
        let slot = self.shared.lock();
        slot.running.is_some() || slot.pending.is_some()
    }

    /// Stops what is being done; answers already sent stay.
    pub fn stop(&mut self) {
        let mut slot = self.shared.lock();
        slot.pending = None;
        if let Some(running) = &slot.running {
            running.work.cancel();
        }
    }
}

impl Drop for Worker {
    fn drop(&mut self) {
        let mut slot = self.shared.lock();
        slot.closing = true;
        slot.pending = None;
        if let Some(running) = &slot.running {
            running.work.cancel();
        }
        drop(slot);
        self.shared.changed.notify_all();
    }
}

/// Cancels what is running if a newer request waits and it may not be finished first.
fn give_way(slot: &Slot) {
    if let (Some(_), Some(running)) = (&slot.pending, &slot.running)
        && (running.stage == Stage::Full || running.started.elapsed() > PATIENCE)
    {
        running.work.cancel();
    }
}

/// The loop of the worker thread.
fn serve(shared: &Shared, sender: &Sender<Answer>, engine: &Engine, wake: &Wake) {
    let mut files = data::Cache::default();
    while let Some((request, work)) = next(shared) {
        for stage in [Stage::Planned, Stage::Full] {
            let work = if stage == Stage::Planned { work.clone() } else { Work::new() };
            if stage == Stage::Full && !enter_full(shared, &request, &work) {
                break;
            }
            let outcome = match answer(&request, stage, engine, &work, &mut files) {
                Some(outcome) => outcome,
                None => break,
            };
            let failed = outcome.is_err();
            let answer = Answer {
                generation: request.generation,
                scenario: Arc::clone(&request.scenario),
                stage,
                outcome,
            };
            if stage == Stage::Full || failed {
                shared.lock().running = None;
            }
            if sender.send(answer).is_err() {
                return;
            }
            wake();
            if failed {
                break;
            }
        }
        shared.lock().running = None;
        wake();
    }
}

/// Waits for a request and marks it as running.
fn next(shared: &Shared) -> Option<(Request, Work)> {
    let mut slot = shared.lock();
    loop {
        if slot.closing {
            return None;
        }
        if let Some(request) = slot.pending.take() {
            let work = Work::new();
            slot.running = Some(Running {
                generation: request.generation,
                stage: Stage::Planned,
                started: Instant::now(),
                work: work.clone(),
            });
            return Some((request, work));
        }
        slot = shared.changed.wait(slot).unwrap_or_else(PoisonError::into_inner);
    }
}

/// Marks the second stage as running, unless it was stopped or something newer waits.
fn enter_full(shared: &Shared, request: &Request, work: &Work) -> bool {
    let mut slot = shared.lock();
    let stopped = slot.running.as_ref().is_none_or(|running| running.work.is_cancelled());
    if slot.closing || slot.pending.is_some() || stopped {
        return false;
    }
    slot.running = Some(Running {
        generation: request.generation,
        stage: Stage::Full,
        started: Instant::now(),
        work: work.clone(),
    });
    true
}

/// One stage of one request; `None` where it was cancelled.
fn answer(
    request: &Request,
    stage: Stage,
    engine: &Engine,
    work: &Work,
    files: &mut data::Cache,
) -> Option<Result<Arc<Prepared>, Failure>> {
    let effort = if stage == Stage::Full { Effort::FULL } else { Effort::PLANNED_N };
    let filled = match files.filled(&request.scenario, request.folder.as_deref()) {
        Ok(filled) => filled,
        Err(problems) => return Some(Err(Failure::Scenario(problems))),
    };
    match engine(&filled, effort, work) {
        Ok(report) => Some(Ok(Arc::new(Prepared::new(report, &filled)))),
        Err(AssessError::Cancelled(_)) => None,
        Err(AssessError::Scenario(problems)) => Some(Err(Failure::Scenario(problems))),
        Err(other) => Some(Err(Failure::Broken(other.to_string()))),
    }
}

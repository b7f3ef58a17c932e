//! `gaussgap assess`: scenarios in, reports, pages, curves and summaries out.

use super::arguments::AssessArguments;
use super::batch::{Width, in_order};
use super::outputs::{self, Format, Outputs, Place};
use super::progress::Progress;
use super::status::Status;
use super::summary::summary;
use crate::files::scenario::{ScenarioFileError, read_scenario};
use crate::files::write::{WholeFile, write_whole};
use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::parse_override;
use gaussgap_conclusions::{AssessError, Effort, assess};
use gaussgap_pages::page::{PageStyle, to_png, to_svg};
use gaussgap_pages::{curves, report};
use gaussgap_simulation::work::Work;
use serde_json::Value;
use std::io::{self, Write};
use std::ops::ControlFlow;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};

/// Does what the arguments ask for.
pub fn run(arguments: &AssessArguments) -> Status {
    match prepare(arguments) {
        Ok(job) => job.run(),
        Err((status, lines)) => {
            Progress::watch(Vec::new()).complain(&lines);
            status
        }
    }
}

/// Everything decided before the work begins.
struct Job {
    scenarios: Vec<PathBuf>,
    overrides: Vec<(String, Value)>,
    outputs: Outputs,
    text: bool,
}

fn prepare(arguments: &AssessArguments) -> Result<Job, (Status, Vec<String>)> {
    let mut lines = Vec::new();
    let mut overrides = Vec::new();
    for text in &arguments.set {
        match parse_override(text) {
            Ok(parsed) => overrides.push(parsed),
            Err(problem) => lines.push(format!("gaussgap: --set: {}", problem.message)),
        }
    }
    let mut scenarios = Vec::new();
    for argument in &arguments.scenarios {
        match expanded(argument) {
            Ok(paths) => scenarios.extend(paths),
            Err(line) => lines.push(line),
        }
    }
    if !lines.is_empty() {
        return Err((Status::BadInput, lines));
    }
    let outputs =
        outputs::plan(arguments, &scenarios).map_err(|refusal| (refusal.status, vec![refusal.line]))?;
    let text = !arguments.quiet && !outputs.use_standard_output();
    Ok(Job { scenarios, overrides, outputs, text })
}

/// The files an argument stands for: itself, or what a pattern the shell did not expand matches, in order of name.
fn expanded(argument: &Path) -> Result<Vec<PathBuf>, String> {
    let Some(pattern) = argument.to_str() else { return Ok(vec![argument.to_owned()]) };
    if argument.exists() || !pattern.contains(['*', '?', '[']) {
        return Ok(vec![argument.to_owned()]);
    }
    let matches =
        glob::glob(pattern).map_err(|error| format!("{pattern}: is not a usable pattern: {}", error.msg))?;
    let paths: Vec<PathBuf> = matches.filter_map(Result::ok).filter(|path| path.is_file()).collect();
    if paths.is_empty() { Err(format!("{pattern}: matches no file")) } else { Ok(paths) }
}

/// What became of one scenario.
struct Outcome {
    status: Status,
    complaints: Vec<String>,
    summary: Option<String>,
    line: Option<String>,
    artifacts: Vec<(Place, Vec<u8>)>,
}

impl Outcome {
    fn failed(status: Status, complaints: Vec<String>) -> Self {
        Self { status, complaints, summary: None, line: None, artifacts: Vec::new() }
    }
}

impl Job {
    fn run(&self) -> Status {
        let works: Vec<Work> = self.scenarios.iter().map(|_| Work::new()).collect();
        let progress = Progress::watch(works.clone());
        let mut delivery = match Delivery::open(&self.outputs) {
            Ok(delivery) => delivery,
            Err(line) => {
                progress.complain(&[line]);
                return Status::Failure;
            }
        };
        // A panic is a defect, but one scenario's defect must not take the others' results away, and its message
        // belongs on one line.
        std::panic::set_hook(Box::new(|panic| {
            let place = panic.location().map_or_else(String::new, |place| format!(" at {place}"));
            let _ = writeln!(io::stderr(), "gaussgap: internal error{place}");
        }));
        let workers = std::thread::available_parallelism().map_or(2, usize::from);
        in_order(
            self.scenarios.len(),
            Width { workers, ahead: 2 * workers },
            |index| self.one(index, &works[index]),
            |index, outcome| {
                works[index].set_fraction(1.0);
                progress.one_done();
                let flow = delivery.take(outcome, &progress);
                if flow.is_break() {
                    works.iter().for_each(Work::cancel);
                }
                flow
            },
        );
        delivery.close(&progress)
    }

    fn one(&self, index: usize, work: &Work) -> Outcome {
        let path = &self.scenarios[index];
        catch_unwind(AssertUnwindSafe(|| self.assess(index, work))).unwrap_or_else(|payload| {
            let message = payload
                .downcast_ref::<String>()
                .map(String::as_str)
                .or_else(|| payload.downcast_ref::<&str>().copied())
                .unwrap_or("no message");
            let line = format!(
                "{}: internal error, please report it: {}",
                path.display(),
                message.replace('\n', " ")
            );
            Outcome::failed(Status::Failure, vec![line])
        })
    }

    fn assess(&self, index: usize, work: &Work) -> Outcome {
        let path = &self.scenarios[index];
        let scenario = match read_scenario(path, &self.overrides) {
            Ok(scenario) => scenario,
            Err(error) => return Outcome::failed(Status::BadInput, error.lines),
        };
        let found = match assess(&scenario, Effort::FULL, work) {
            Ok(found) => found,
            Err(AssessError::Scenario(problems)) => {
                let error = ScenarioFileError::in_document(path, &problems);
                return Outcome::failed(Status::BadInput, error.lines);
            }
            Err(error) => {
                return Outcome::failed(Status::Failure, vec![format!("{}: {error}", path.display())]);
            }
        };
        match self.rendered(index, &found) {
            Ok((line, artifacts)) => Outcome {
                status: found.verdict.state.into(),
                complaints: Vec::new(),
                summary: self.text.then(|| summary(path, &found)),
                line,
                artifacts,
            },
            Err(message) => Outcome::failed(Status::Failure, vec![format!("{}: {message}", path.display())]),
        }
    }

    /// The bytes of everything asked for.
    fn rendered(&self, index: usize, found: &Report) -> Result<Rendered, String> {
        let line = match &self.outputs.lines {
            Some(_) => Some(report::to_json_line(found).map_err(|error| error.to_string())?),
            None => None,
        };
        let style = PageStyle::default();
        let mut artifacts = Vec::new();
        for (format, place) in &self.outputs.each[index] {
            let bytes = match format {
                Format::Json => report::to_json(found).map_err(|error| error.to_string())?.into_bytes(),
                Format::Png => to_png(found, &style),
                Format::Svg => to_svg(found, &style).into_bytes(),
                Format::Csv => curves::to_csv(found),
            };
            artifacts.push((place.clone(), bytes));
        }
        Ok((line, artifacts))
    }
}

/// The report as a line, and the files.
type Rendered = (Option<String>, Vec<(Place, Vec<u8>)>);

/// Takes outcomes in order and puts everything where it belongs.
struct Delivery {
    lines: Option<Box<dyn LineSink>>,
    any_line: bool,
    worst: Status,
    first: bool,
}

/// Where the lines of several reports go.
trait LineSink {
    fn write(&mut self, line: &str) -> io::Result<()>;
    fn close(self: Box<Self>) -> Result<(), String>;
}

struct StandardOutput;

impl LineSink for StandardOutput {
    fn write(&mut self, line: &str) -> io::Result<()> {
        to_standard_output(line.as_bytes())
    }
    fn close(self: Box<Self>) -> Result<(), String> {
        Ok(())
    }
}

impl LineSink for WholeFile {
    fn write(&mut self, line: &str) -> io::Result<()> {
        self.write_all(line.as_bytes())
    }
    fn close(self: Box<Self>) -> Result<(), String> {
        self.commit().map_err(|error| error.to_string())
    }
}

fn to_standard_output(bytes: &[u8]) -> io::Result<()> {
    let mut stdout = io::stdout().lock();
    stdout.write_all(bytes)?;
    stdout.flush()
}

impl Delivery {
    fn open(outputs: &Outputs) -> Result<Self, String> {
        let lines: Option<Box<dyn LineSink>> = match &outputs.lines {
            None => None,
            Some(Place::StandardOutput) => Some(Box::new(StandardOutput)),
            Some(Place::File(path)) => {
                Some(Box::new(WholeFile::create(path).map_err(|error| error.to_string())?))
            }
        };
        Ok(Self { lines, any_line: false, worst: Status::Holds, first: true })
    }

    fn take(&mut self, outcome: Outcome, progress: &Progress) -> ControlFlow<()> {
        self.worst = self.worst.max(outcome.status);
        progress.complain(&outcome.complaints);
        if let (Some(sink), Some(line)) = (&mut self.lines, &outcome.line) {
            self.any_line = true;
            if let Err(error) = sink.write(line) {
                // The lines of the other scenarios would be lost as well.
                self.lines = None;
                return self.standard_output_or_lines_failed(&error, progress);
            }
        }
        for (place, bytes) in &outcome.artifacts {
            match place {
                Place::File(path) => {
                    if let Err(error) = write_whole(path, bytes) {
                        self.worst = Status::Failure;
                        progress.complain(&[error.to_string()]);
                    }
                }
                Place::StandardOutput => {
                    if let Err(error) = to_standard_output(bytes) {
                        return self.standard_output_or_lines_failed(&error, progress);
                    }
                }
            }
        }
        if let Some(summary) = &outcome.summary {
            progress.clear();
            let gap = if self.first { "" } else { "\n" };
            self.first = false;
            if let Err(error) = to_standard_output(format!("{gap}{summary}").as_bytes()) {
                return self.standard_output_or_lines_failed(&error, progress);
            }
        }
        ControlFlow::Continue(())
    }

    /// A reader that has gone away (`| head`) is told nothing; anything else is reported. Both end the run.
    fn standard_output_or_lines_failed(&mut self, error: &io::Error, progress: &Progress) -> ControlFlow<()> {
        self.worst = Status::Failure;
        if error.kind() != io::ErrorKind::BrokenPipe {
            progress.complain(&[format!("gaussgap: the output cannot be written: {error}")]);
        }
        ControlFlow::Break(())
    }

    fn close(mut self, progress: &Progress) -> Status {
        // Bad input writes nothing: a file without a single report in it is not put in its place.
        let sink = self.lines.take().filter(|_| self.any_line);
        if let Some(Err(line)) = sink.map(LineSink::close) {
            self.worst = Status::Failure;
            progress.complain(&[line]);
        }
        self.worst
    }
}

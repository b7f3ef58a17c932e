//! Measures the window in the CPU shell, on a real display: the first frame, the frames while n is dragged over every
//! bundled scenario, how soon the figures show the new n, and what an idle window costs.
//!
//! `cargo run --release -p gaussgap --example window_timing [WIDTH HEIGHT]`; needs a display (Xvfb will do).

use gaussgap_app::shell::{self, Interface, Renderer};
use gaussgap_app::window::Workbench;
use gaussgap_app::window::model::edit::{Edit, planned_n};
use gaussgap_app::window::model::examples;
use gaussgap_app::window::session::Session;
use gaussgap_conclusions::scenario::{Scenario, Source};
use std::sync::Arc;
use std::time::{Duration, Instant};

/// Frames of one drag.
const DRAG: usize = 120;
/// For how long the idle window is watched.
const IDLE: Duration = Duration::from_secs(4);

enum Phase {
    /// Waits for the first answer about a scenario.
    Opening,
    /// Changes n every frame.
    Dragging {
        frame: usize,
        start: u64,
    },
    /// Waits for the last answer, then watches an idle window.
    Settling,
    Idle {
        since: Instant,
        cpu: Option<f64>,
    },
}

struct Timing {
    workbench: Workbench,
    started: Instant,
    first_frame: Option<Duration>,
    scenario: usize,
    opened: Instant,
    last_frame: Option<Instant>,
    /// When each n not shown yet was set.
    waiting: Vec<(u64, Instant)>,
    shown: Option<u64>,
    frames: Vec<f64>,
    delays: Vec<f64>,
    phase: Phase,
}

impl Timing {
    fn open(&mut self) -> bool {
        let Some(example) = examples::EXAMPLES.get(self.scenario) else { return false };
        let Ok(scenario) = Scenario::parse(example.text) else { return false };
        // Without a file of its own a scenario finds the bundled pilot data.
        self.workbench.edit(&Edit::Replace(Box::new(scenario)));
        self.opened = Instant::now();
        self.phase = Phase::Opening;
        self.frames.clear();
        self.delays.clear();
        self.waiting.clear();
        true
    }

    fn n(&self) -> u64 {
        planned_n(&self.workbench.scenario().source)
    }

    /// Takes note of the n the figures show now.
    fn look(&mut self, now: Instant) {
        let Some((found, ..)) = self.workbench.latest() else { return };
        let n = planned_n(&found.report.scenario.source);
        if self.shown != Some(n) {
            self.shown = Some(n);
            if let Some(at) = self.waiting.iter().position(|(set, _)| *set == n) {
                self.delays.push((now - self.waiting[at].1).as_secs_f64() * 1e3);
                self.waiting.drain(..=at);
            }
        }
    }

    fn report(&mut self) {
        let file = examples::EXAMPLES.get(self.scenario).map_or("", |example| example.file);
        let late = self.frames.iter().filter(|ms| **ms > 20.0).count();
        println!(
            "{file:28} frames ms: median {:5.1}, 95 % {:5.1}, over 20 ms {late:3} of {}; shown after ms: median {:6.1}, 95 % {:6.1} ({} of {DRAG} n shown)",
            quantile(&mut self.frames, 0.5),
            quantile(&mut self.frames, 0.95),
            self.frames.len(),
            quantile(&mut self.delays, 0.5),
            quantile(&mut self.delays, 0.95),
            self.delays.len(),
        );
    }
}

fn quantile(values: &mut [f64], p: f64) -> f64 {
    values.sort_by(f64::total_cmp);
    let index = (p * values.len() as f64).ceil() as usize;
    values.get(index.saturating_sub(1)).copied().unwrap_or(f64::NAN)
}

/// Processor time of this process in seconds, where the system tells.
fn cpu_seconds() -> Option<f64> {
    let text = std::fs::read_to_string("/proc/self/stat").ok()?;
    let fields: Vec<&str> = text.rsplit_once(')')?.1.split_whitespace().collect();
    let ticks = |index: usize| fields.get(index)?.parse::<f64>().ok();
    Some((ticks(11)? + ticks(12)?) / 100.0)
}

/// Largest resident memory in MB, where the system tells.
fn peak_memory() -> Option<f64> {
    let text = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = text.lines().find(|line| line.starts_with("VmHWM"))?;
    line.split_whitespace().nth(1)?.parse::<f64>().ok().map(|kib| kib / 1024.0)
}

impl Interface for Timing {
    fn logic(&mut self, context: &egui::Context) {
        let now = Instant::now();
        if self.first_frame.is_none() && self.last_frame.is_some() {
            let first = now - self.started;
            self.first_frame = Some(first);
            println!("first frame {:.0} ms after the start", first.as_secs_f64() * 1e3);
            self.open();
        }
        let frame = self.last_frame.replace(now).map_or(0.0, |last| (now - last).as_secs_f64() * 1e3);
        self.workbench.logic(context);
        self.look(now);
        let current = self.workbench.latest().is_some_and(|(_, current, _)| current);
        match &mut self.phase {
            _ if self.first_frame.is_none() => context.request_repaint(),
            Phase::Opening => {
                let like = matches!(self.workbench.scenario().source, Source::Like { .. });
                if current && like {
                    let start = self.n();
                    self.phase = Phase::Dragging { frame: 0, start };
                } else if !like || self.opened.elapsed() > Duration::from_secs(20) {
                    println!("scenario {}: not dragged", self.scenario);
                    self.phase = Phase::Dragging { frame: DRAG, start: 1 };
                }
                context.request_repaint_after(Duration::from_millis(10));
            }
            Phase::Dragging { frame: count, start } => {
                if *count > 1 {
                    self.frames.push(frame);
                }
                *count += 1;
                let (count, start) = (*count, *start);
                if count <= DRAG {
                    let n = start + count as u64;
                    self.workbench.edit(&Edit::N { slot: 0, n });
                    self.waiting.push((n, now));
                    context.request_repaint();
                } else {
                    if !self.frames.is_empty() {
                        self.report();
                    }
                    self.scenario += 1;
                    if !self.open() {
                        self.phase = Phase::Settling;
                    }
                    context.request_repaint();
                }
            }
            Phase::Settling => {
                let complete = self.workbench.latest().is_some_and(|(_, current, full)| current && full);
                if complete || self.opened.elapsed() > Duration::from_secs(30) {
                    self.phase = Phase::Idle { since: now, cpu: cpu_seconds() };
                    context.request_repaint_after(IDLE);
                } else {
                    context.request_repaint_after(Duration::from_millis(50));
                }
            }
            Phase::Idle { since, cpu } => {
                if since.elapsed() >= IDLE {
                    let used = cpu.zip(cpu_seconds()).map(|(before, after)| after - before);
                    match used {
                        Some(used) => {
                            println!("idle: {:.1} % of a core", 100.0 * used / since.elapsed().as_secs_f64())
                        }
                        None => println!("idle: this system does not tell"),
                    }
                    if let Some(memory) = peak_memory() {
                        println!("largest memory {memory:.0} MB");
                    }
                    context.send_viewport_cmd(egui::ViewportCommand::Close);
                }
            }
        }
    }

    fn ui(&mut self, ui: &mut egui::Ui) {
        self.workbench.ui(ui);
    }

    fn closed(&mut self) {
        self.workbench.closed();
    }
}

fn main() -> Result<(), String> {
    let started = Instant::now();
    let mut sizes = std::env::args().skip(1).filter_map(|text| text.parse::<f32>().ok());
    let size = [sizes.next().unwrap_or(1400.0), sizes.next().unwrap_or(900.0)];
    let builder = egui::ViewportBuilder::default().with_title("Gaussgap timing").with_inner_size(size);
    let make: shell::MakeInterface = Box::new(move |context| {
        Workbench::prepare(context);
        let first = examples::EXAMPLES.first().and_then(|example| Scenario::parse(example.text).ok());
        let session = Session { scenario: first.map(|first| first.to_json()), ..Session::default() };
        Box::new(Timing {
            workbench: Workbench::new(session, Arc::new(gaussgap_conclusions::assess)),
            started,
            first_frame: None,
            scenario: 0,
            opened: started,
            last_frame: None,
            waiting: Vec::new(),
            shown: None,
            frames: Vec::new(),
            delays: Vec::new(),
            phase: Phase::Opening,
        })
    });
    shell::show(Renderer::Cpu, builder, make)
}

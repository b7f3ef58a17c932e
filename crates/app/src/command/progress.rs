//! A progress bar on standard error, only where that is a terminal and the work is long.

use gaussgap_simulation::work::Work;
use std::io::{IsTerminal, Write};
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::{Arc, Mutex, PoisonError};
use std::thread::JoinHandle;
use std::time::Duration;

/// Nothing is shown before this much time has passed.
const PATIENCE: Duration = Duration::from_millis(400);
/// Time between two looks at the work.
const PACE: Duration = Duration::from_millis(100);
const WIDTH: usize = 30;

/// The bar, and the way around it for messages.
pub struct Progress {
    shared: Arc<Shared>,
    drawing: Option<JoinHandle<()>>,
}

struct Shared {
    works: Vec<Work>,
    done: AtomicUsize,
    finished: AtomicBool,
    shown: Mutex<bool>,
}

impl Progress {
    /// Watches the work on every scenario.
    pub fn watch(works: Vec<Work>) -> Self {
        let shared = Arc::new(Shared {
            works,
            done: AtomicUsize::new(0),
            finished: AtomicBool::new(false),
            shown: Mutex::new(false),
        });
        let drawing = std::io::stderr().is_terminal().then(|| {
            let shared = Arc::clone(&shared);
            std::thread::spawn(move || {
                std::thread::park_timeout(PATIENCE);
                while !shared.finished.load(Ordering::Relaxed) {
                    shared.draw();
                    std::thread::park_timeout(PACE);
                }
            })
        });
        Self { shared, drawing }
    }

    /// One more scenario is finished.
    pub fn one_done(&self) {
        self.shared.done.fetch_add(1, Ordering::Relaxed);
    }

    /// Writes lines to standard error without mixing them with the bar.
    pub fn complain(&self, lines: &[String]) {
        let mut shown = self.shared.shown.lock().unwrap_or_else(PoisonError::into_inner);
        let mut stderr = std::io::stderr().lock();
        clear(&mut stderr, &mut shown);
        for line in lines {
            // Standard error itself failing leaves nobody to tell.
            let _ = writeln!(stderr, "{line}");
        }
    }

    /// Takes the bar away, so that text on standard output starts on a clean line.
    pub fn clear(&self) {
        let mut shown = self.shared.shown.lock().unwrap_or_else(PoisonError::into_inner);
        clear(&mut std::io::stderr().lock(), &mut shown);
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        self.shared.finished.store(true, Ordering::Relaxed);
        if let Some(drawing) = self.drawing.take() {
            drawing.thread().unpark();
            let _ = drawing.join();
        }
        self.clear();
    }
}

impl Shared {
    fn draw(&self) {
        let total = self.works.len().max(1);
        let fraction = self.works.iter().map(Work::fraction).sum::<f64>() / total as f64;
        let line = bar(fraction, self.done.load(Ordering::Relaxed), self.works.len());
        let mut shown = self.shown.lock().unwrap_or_else(PoisonError::into_inner);
        let mut stderr = std::io::stderr().lock();
        let _ = write!(stderr, "\r\x1b[2K{line}");
        let _ = stderr.flush();
        *shown = true;
    }
}

fn clear(stderr: &mut impl Write, shown: &mut bool) {
    if *shown {
        let _ = write!(stderr, "\r\x1b[2K");
        let _ = stderr.flush();
        *shown = false;
    }
}

fn bar(fraction: f64, done: usize, total: usize) -> String {
    let fraction = fraction.clamp(0.0, 1.0);
    let full = (fraction * WIDTH as f64) as usize;
    let percent = (fraction * 100.0) as u32;
    let count = if total > 1 { format!("  {done} of {total} scenarios") } else { String::new() };
    format!("[{}{}] {percent:>3} %{count}", "=".repeat(full), " ".repeat(WIDTH - full))
}

#[cfg(test)]
mod tests {
    use super::bar;

    #[test]
    fn the_bar_fills_from_the_left() {
        assert_eq!(bar(0.0, 0, 1), format!("[{}]   0 %", " ".repeat(30)));
        assert_eq!(bar(0.5, 3, 7), format!("[{}{}]  50 %  3 of 7 scenarios", "=".repeat(15), " ".repeat(15)));
        assert_eq!(bar(7.0, 1, 1), format!("[{}] 100 %", "=".repeat(30)));
    }
}

//! Telling long work to stop, and hearing how far it is.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicU32, Ordering};

/// A handle shared by the side that asks for work and the side that does it. Cloning shares the state.
#[derive(Debug, Clone, Default)]
pub struct Work {
    cancelled: Arc<AtomicBool>,
    permille: Arc<AtomicU32>,
}

/// The work was cancelled before it was finished.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("stopped before the work was finished")]
pub struct Cancelled;

impl Work {
    /// A handle for work that has not started.
    pub fn new() -> Self {
        Self::default()
    }

    /// Asks the work to stop; it does so at the next convenient place.
    pub fn cancel(&self) {
        self.cancelled.store(true, Ordering::Relaxed);
    }

    /// Whether [`Work::cancel`] was called.
    pub fn is_cancelled(&self) -> bool {
        self.cancelled.load(Ordering::Relaxed)
    }

    /// An error once the work was cancelled: put `work.check()?` into loops.
    pub fn check(&self) -> Result<(), Cancelled> {
        if self.is_cancelled() { Err(Cancelled) } else { Ok(()) }
    }

    /// States how much is done, from 0 to 1.
    pub fn set_fraction(&self, fraction: f64) {
        self.permille.store((fraction.clamp(0.0, 1.0) * 1000.0) as u32, Ordering::Relaxed);
    }

    /// How much is done, from 0 to 1.
    pub fn fraction(&self) -> f64 {
        f64::from(self.permille.load(Ordering::Relaxed)) / 1000.0
    }
}

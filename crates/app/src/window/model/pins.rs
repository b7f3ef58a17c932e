//! Pins: finished assessments kept for comparison.

use super::prepared::Prepared;
use gaussgap_conclusions::scenario::Scenario;
use std::sync::Arc;

/// How many pins there can be.
pub const MOST: usize = 4;

/// A plan kept as a ghost in every figure and a row of the comparison.
#[derive(Debug, Clone)]
pub struct Pin {
    /// Its name, as the user wrote it.
    pub name: String,
    /// What was found, ready for drawing.
    pub found: Arc<Prepared>,
    /// The scenario as it was being edited.
    pub asked: Arc<Scenario>,
}

/// The pins in their order.
#[derive(Debug, Clone, Default)]
pub struct Pins {
    pins: Vec<Pin>,
}

impl Pins {
    /// All pins in order.
    pub fn all(&self) -> &[Pin] {
        &self.pins
    }

    /// Keeps a report; refused when four are kept already.
    pub fn keep(&mut self, name: String, found: Arc<Prepared>, asked: Arc<Scenario>) -> bool {
        if self.pins.len() >= MOST {
            return false;
        }
        self.pins.push(Pin { name, found, asked });
        true
    }

    /// Removes a pin.
    pub fn remove(&mut self, index: usize) {
        if index < self.pins.len() {
            self.pins.remove(index);
        }
    }

    /// Renames a pin.
    pub fn rename(&mut self, index: usize, name: String) {
        if let Some(pin) = self.pins.get_mut(index) {
            pin.name = name;
        }
    }

    /// Moves a pin one place towards the first.
    pub fn earlier(&mut self, index: usize) {
        if index > 0 && index < self.pins.len() {
            self.pins.swap(index, index - 1);
        }
    }

    /// Replaces what a pin shows by a more complete answer for the same scenario.
    pub fn complete(&mut self, found: &Arc<Prepared>) {
        for pin in &mut self.pins {
            let (old, new) = (&pin.found.report, &found.report);
            if old.growth.n.is_empty() && !new.growth.n.is_empty() && old.scenario == new.scenario {
                pin.found = Arc::clone(found);
            }
        }
    }
}

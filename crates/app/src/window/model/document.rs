//! The document: one scenario, where it is kept, and its history of edits.

use super::edit::{Edit, Kind};
use gaussgap_conclusions::scenario::Scenario;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Edits of the same kind that follow each other within this time are one step of undo.
const COALESCE_SECONDS: f64 = 1.2;
/// Steps of undo kept.
const DEPTH: usize = 500;

/// A scenario being edited.
#[derive(Debug)]
pub struct Document {
    scenario: Arc<Scenario>,
    saved: Arc<Scenario>,
    path: Option<PathBuf>,
    undo: Vec<Arc<Scenario>>,
    redo: Vec<Arc<Scenario>>,
    last: Option<(Kind, f64)>,
    revision: u64,
}

impl Document {
    /// A document that has just been opened (or made) and counts as saved.
    pub fn new(scenario: Scenario, path: Option<PathBuf>) -> Self {
        let scenario = Arc::new(scenario);
        Self {
            saved: Arc::clone(&scenario),
            scenario,
            path,
            undo: Vec::new(),
            redo: Vec::new(),
            last: None,
            revision: 0,
        }
    }

    /// The scenario as it is now.
    pub fn scenario(&self) -> &Arc<Scenario> {
        &self.scenario
    }

    /// The file it belongs to.
    pub fn path(&self) -> Option<&Path> {
        self.path.as_deref()
    }

    /// Counts up with every change of the scenario.
    pub fn revision(&self) -> u64 {
        self.revision
    }

    /// The scenario as it was last opened or saved.
    pub fn saved(&self) -> &Arc<Scenario> {
        &self.saved
    }

    /// Whether there are changes that are in no file.
    pub fn is_changed(&self) -> bool {
        !Arc::ptr_eq(&self.scenario, &self.saved) && self.scenario != self.saved
    }

    /// Counts revisions on from those of the document before, so that no answer is mistaken.
    pub fn start_after(&mut self, revision: u64) {
        self.revision = revision + 1;
    }

    /// Gives the changes up: they no longer stand in the way of anything.
    pub fn discard_changes(&mut self) {
        self.saved = Arc::clone(&self.scenario);
    }

    /// Marks the scenario as saved in a file.
    pub fn mark_saved(&mut self, path: PathBuf) {
        self.saved = Arc::clone(&self.scenario);
        self.path = Some(path);
        self.last = None;
    }

    /// Marks the scenario as differing from its file (a restored session).
    pub fn mark_saved_as(&mut self, saved: Scenario) {
        self.saved = Arc::new(saved);
    }

    /// Applies an edit at a time (seconds of any clock). Edits that change nothing leave no trace.
    pub fn apply(&mut self, edit: &Edit, seconds: f64) -> bool {
        let mut changed = (*self.scenario).clone();
        edit.apply(&mut changed);
        if changed == *self.scenario {
            return false;
        }
        let kind = edit.kind();
        let continues =
            self.last.as_ref().is_some_and(|(last, at)| *last == kind && seconds - at <= COALESCE_SECONDS);
        if !continues || self.undo.is_empty() {
            if self.undo.len() == DEPTH {
                self.undo.remove(0);
            }
            self.undo.push(Arc::clone(&self.scenario));
        }
        self.redo.clear();
        self.last = Some((kind, seconds));
        self.scenario = Arc::new(changed);
        self.revision += 1;
        true
    }

    /// Keeps the step of undo open at a time: what follows of the same kind belongs to it.
    pub fn hold_step(&mut self, seconds: f64) {
        if let Some((_, at)) = &mut self.last {
            *at = seconds;
        }
    }

    /// Ends the step of undo being typed or dragged.
    pub fn end_step(&mut self) {
        self.last = None;
    }

    /// Whether there is something to undo.
    pub fn can_undo(&self) -> bool {
        !self.undo.is_empty()
    }

    /// Whether there is something to redo.
    pub fn can_redo(&self) -> bool {
        !self.redo.is_empty()
    }

    /// Takes the last step back.
    pub fn undo(&mut self) -> bool {
        let Some(before) = self.undo.pop() else { return false };
        self.redo.push(std::mem::replace(&mut self.scenario, before));
        self.last = None;
        self.revision += 1;
        true
    }

    /// Does the step taken back again.
    pub fn redo(&mut self) -> bool {
        let Some(after) = self.redo.pop() else { return false };
        self.undo.push(std::mem::replace(&mut self.scenario, after));
        self.last = None;
        self.revision += 1;
        true
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::model::edit::planned_n;
    use crate::window::model::examples;

    fn document() -> Document {
        Document::new(examples::blank(), None)
    }

    #[test]
    fn a_drag_is_one_step_and_undo_restores_exactly() {
        let mut document = document();
        let before = document.scenario().clone();
        for (i, n) in (41..60).enumerate() {
            assert!(document.apply(&Edit::N { slot: 0, n }, i as f64 * 0.05));
        }
        assert!(document.is_changed());
        assert!(document.undo());
        assert_eq!(*document.scenario(), before);
        assert!(!document.is_changed() && !document.can_undo());
        assert!(document.redo());
        assert_eq!(planned_n(&document.scenario().source), 59);
    }

    #[test]
    fn slow_or_unlike_edits_are_steps_of_their_own() {
        let mut document = document();
        document.apply(&Edit::N { slot: 0, n: 50 }, 0.0);
        document.apply(&Edit::N { slot: 0, n: 51 }, 10.0);
        document.apply(&Edit::Title("x".to_owned()), 10.1);
        assert!(document.undo() && document.undo() && document.undo());
        assert!(!document.undo());
    }

    #[test]
    fn an_edit_that_changes_nothing_leaves_no_trace() {
        let mut document = document();
        let n = planned_n(&document.scenario().source);
        assert!(!document.apply(&Edit::N { slot: 0, n }, 0.0));
        assert!(!document.apply(&Edit::N { slot: 7, n: 3 }, 0.0) && !document.can_undo());
    }

    #[test]
    fn a_new_edit_forgets_what_was_taken_back() {
        let mut document = document();
        document.apply(&Edit::N { slot: 0, n: 50 }, 0.0);
        document.undo();
        document.apply(&Edit::N { slot: 0, n: 60 }, 0.1);
        assert!(!document.can_redo());
    }
}

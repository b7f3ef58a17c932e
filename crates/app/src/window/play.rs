//! Playing through n: n grows by about a seventh, a little more than once a second, each step after the answer to
//! the one before it, so that every figure is seen; one step of undo in all.

use super::model::edit::Edit;
use super::workbench::Workbench;
use gaussgap_conclusions::scenario::Source;
use std::time::Duration;

/// Seconds between two steps.
const PAUSE: f64 = 0.7;

/// The n after this one, or none where the end of the search is reached.
pub fn next_n(n: u64, up_to: u64) -> Option<u64> {
    let next = n.saturating_add((n / 7).max(1));
    (n < up_to).then_some(next.min(up_to))
}

impl Workbench {
    /// Starts to play through n, from 1 where n is at the end already.
    pub(super) fn play(&mut self) {
        let Source::Like { n, .. } = self.scenario().source else {
            return self.fail("Playing through n needs one kind of summand.");
        };
        self.document.end_step();
        self.playing = Some(self.seconds);
        if n >= self.scenario().search.up_to {
            self.edit(&Edit::N { slot: 0, n: 1 });
        }
    }

    /// Whether n is being played through.
    pub fn is_playing(&self) -> bool {
        self.playing.is_some()
    }

    /// Steps n where it is time to and the answer to the step before is shown.
    pub(super) fn play_on(&mut self, ctx: &egui::Context) {
        let Some(last) = self.playing else { return };
        ctx.request_repaint_after(Duration::from_millis(100));
        self.document.hold_step(self.seconds);
        let stuck = !self.findings.problems.is_empty() || self.findings.broken.is_some();
        if stuck || self.start_page || self.dialog.is_some() {
            self.playing = None;
            return;
        }
        let answered = self.latest().is_some_and(|(_, current, _)| current);
        if !answered || self.seconds - last < PAUSE {
            return;
        }
        let Source::Like { n, .. } = self.scenario().source else { return };
        match next_n(n, self.scenario().search.up_to) {
            Some(n) => {
                self.playing = Some(self.seconds);
                self.edit(&Edit::N { slot: 0, n });
            }
            None => {
                self.playing = None;
                self.document.end_step();
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::next_n;

    #[test]
    fn n_grows_to_the_end_and_no_further() {
        assert_eq!((next_n(1, 100), next_n(40, 100), next_n(99, 100)), (Some(2), Some(45), Some(100)));
        assert_eq!((next_n(100, 100), next_n(101, 100)), (None, None));
        let steps = std::iter::successors(Some(1), |&n| next_n(n, 10_000)).count();
        assert!((50..90).contains(&steps), "{steps}");
    }
}

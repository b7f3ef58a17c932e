//! Working on many items side by side and handing the results over in the order of the items.
//!
//! Memory stays bounded: no item is started that is more than `ahead` places before the first one still waiting to
//! be handed over.

use std::collections::BTreeMap;
use std::ops::ControlFlow;
use std::sync::{Condvar, Mutex, MutexGuard, PoisonError};

/// How many items may be worked on at once, and how far ahead of the oldest unfinished one.
#[derive(Debug, Clone, Copy)]
pub struct Width {
    /// Threads.
    pub workers: usize,
    /// Places; at least `workers` is useful.
    pub ahead: usize,
}

struct State<R> {
    next: usize,
    handed_over: usize,
    finished: BTreeMap<usize, R>,
    stopped: bool,
}

struct Shared<R> {
    state: Mutex<State<R>>,
    changed: Condvar,
}

impl<R> Shared<R> {
    fn lock(&self) -> MutexGuard<'_, State<R>> {
        self.state.lock().unwrap_or_else(PoisonError::into_inner)
    }

    fn wait<'a>(&self, guard: MutexGuard<'a, State<R>>) -> MutexGuard<'a, State<R>> {
        self.changed.wait(guard).unwrap_or_else(PoisonError::into_inner)
    }
}

/// Calls `work` for every index below `count` on several threads, and `take` on this thread with the results in
/// order. Once `take` breaks, no new item is started; those already begun are finished and dropped.
///
/// `work` must not panic: a panic ends the process side of this call with it.
pub fn in_order<R: Send>(
    count: usize,
    width: Width,
    work: impl Fn(usize) -> R + Sync,
    mut take: impl FnMut(usize, R) -> ControlFlow<()>,
) {
    let shared = Shared {
        state: Mutex::new(State { next: 0, handed_over: 0, finished: BTreeMap::new(), stopped: false }),
        changed: Condvar::new(),
    };
    std::thread::scope(|scope| {
        for _ in 0..width.workers.clamp(1, count.max(1)) {
            scope.spawn(|| {
                while let Some(index) = claim(&shared, count, width.ahead.max(1)) {
                    let result = work(index);
                    shared.lock().finished.insert(index, result);
                    shared.changed.notify_all();
                }
            });
        }
        for index in 0..count {
            let mut state = shared.lock();
            let result = loop {
                match state.finished.remove(&index) {
                    Some(result) => break result,
                    None => state = shared.wait(state),
                }
            };
            state.handed_over = index + 1;
            drop(state);
            shared.changed.notify_all();
            if take(index, result).is_break() {
                shared.lock().stopped = true;
                shared.changed.notify_all();
                break;
            }
        }
    });
}

/// The next item to work on, when there is room for it.
fn claim<R>(shared: &Shared<R>, count: usize, ahead: usize) -> Option<usize> {
    let mut state = shared.lock();
    loop {
        if state.stopped || state.next >= count {
            return None;
        }
        if state.next < state.handed_over + ahead {
            state.next += 1;
            return Some(state.next - 1);
        }
        state = shared.wait(state);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::sync::atomic::{AtomicUsize, Ordering};
    use std::time::Duration;

    #[test]
    fn results_come_in_order_and_never_run_far_ahead() {
        let handed_over = AtomicUsize::new(0);
        let mut order = Vec::new();
        in_order(
            60,
            Width { workers: 4, ahead: 6 },
            |index| {
                assert!(index < handed_over.load(Ordering::SeqCst) + 6 + 1);
                std::thread::sleep(Duration::from_micros(if index % 7 == 0 { 3000 } else { 100 }));
                index * index
            },
            |index, result| {
                assert_eq!(result, index * index);
                order.push(index);
                handed_over.store(index + 1, Ordering::SeqCst);
                ControlFlow::Continue(())
            },
        );
        assert_eq!(order, (0..60).collect::<Vec<_>>());
    }

    #[test]
    fn breaking_starts_nothing_new() {
        let started = AtomicUsize::new(0);
        in_order(
            1000,
            Width { workers: 2, ahead: 4 },
            |_| started.fetch_add(1, Ordering::SeqCst),
            |index, _| if index == 3 { ControlFlow::Break(()) } else { ControlFlow::Continue(()) },
        );
        assert!(started.load(Ordering::SeqCst) <= 3 + 1 + 4);
        in_order(0, Width { workers: 2, ahead: 4 }, |_| 0, |_, _| ControlFlow::Continue(()));
    }
}

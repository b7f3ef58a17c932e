//! Plans of real transforms, with a bound on what is kept of them.
//!
//! Making a plan costs as much as several transforms, so plans are kept: all short ones, and the long ones used
//! last. A long plan takes some 24 bytes per point. Long transforms also run one at a time, so that their buffers
//! do not add up when several numbers of summands are computed side by side.

use realfft::{ComplexToReal, RealFftPlanner, RealToComplex};
use std::collections::VecDeque;
use std::sync::{Arc, LazyLock, Mutex, MutexGuard, PoisonError};

/// Transforms up to this length count as short.
const SHORT: usize = 1 << 14;

/// Transforms from this length on run one at a time.
const ALONE_FROM: usize = 1 << 18;

/// Long plans remembered.
const REMEMBERED: usize = 2;

/// A transform and its inverse.
#[derive(Clone)]
pub(crate) struct Plan {
    /// Real to complex.
    pub forward: Arc<dyn RealToComplex<f64>>,
    /// Complex to real.
    pub backward: Arc<dyn ComplexToReal<f64>>,
}

static SHORT_PLANS: LazyLock<Mutex<RealFftPlanner<f64>>> =
    LazyLock::new(|| Mutex::new(RealFftPlanner::new()));

static LONG_PLANS: Mutex<VecDeque<(usize, Plan)>> = Mutex::new(VecDeque::new());

static ALONE: Mutex<()> = Mutex::new(());

/// Plans transforms of this length.
pub(crate) fn plan(length: usize) -> Plan {
    let make = |planner: &mut RealFftPlanner<f64>| Plan {
        forward: planner.plan_fft_forward(length),
        backward: planner.plan_fft_inverse(length),
    };
    if length <= SHORT {
        return make(&mut SHORT_PLANS.lock().unwrap_or_else(PoisonError::into_inner));
    }
    let mut kept = LONG_PLANS.lock().unwrap_or_else(PoisonError::into_inner);
    if let Some(place) = kept.iter().position(|(long, _)| *long == length)
        && let Some(found) = kept.remove(place)
    {
        kept.push_front(found.clone());
        return found.1;
    }
    // A planner of its own, as a planner never forgets.
    let plan = make(&mut RealFftPlanner::new());
    kept.push_front((length, plan.clone()));
    kept.truncate(REMEMBERED);
    plan
}

/// Held while a long transform and its buffers are in use; nothing for a short one.
pub(crate) fn alone(length: usize) -> Option<MutexGuard<'static, ()>> {
    (length >= ALONE_FROM).then(|| ALONE.lock().unwrap_or_else(PoisonError::into_inner))
}

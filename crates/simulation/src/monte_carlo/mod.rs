//! Monte Carlo: standardized sums and studentized statistics.
//!
//! [`sums`] simulates the distribution of a standardized sum, [`studentized`] answers how often intervals with an
//! estimated spread miss (exactly where possible). All random numbers come from numbered blocks (`streams`), so
//! results do not depend on the number of threads; all stated errors are confidence statements about counts
//! (`bands`) that rely on no normal approximation.

mod alias;
mod bands;
mod critical;
mod enumeration;
mod jumps;
mod normal_samples;
mod pairs;
mod streams;
pub mod studentized;
mod summands;
pub mod sums;
mod tabulated;
mod tally;

pub use studentized::{Misses, Studentized, StudentizedRequest, misses};
pub use sums::SimulatedSum;

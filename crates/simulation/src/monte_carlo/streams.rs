//! Random streams: one independent stream per block of work, whoever does the block.
//!
//! Work is cut into numbered blocks whose size depends on the request alone. Block b of purpose p under seed s
//! always draws from the same xoshiro256++ generator, whose 256-bit state is the output of SplitMix64 started
//! at a mix of (s, p, b). So results are the same for any number of threads and any order of the blocks, and
//! a run can be continued where it stopped. Two of B blocks of L draws overlap with probability below
//! B²·L/2²⁵⁶, which is nil.

use crate::work::{Cancelled, Work};
use rand::SeedableRng;
use rand::rngs::Xoshiro256PlusPlus;
use std::sync::atomic::{AtomicU64, Ordering};

/// The generator of one block.
pub(crate) type Stream = Xoshiro256PlusPlus;

/// What a stream is for, so that two simulations under one seed do not share draws.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[repr(u64)]
pub(crate) enum Purpose {
    /// Standardized sums.
    Sums = 1,
    /// Studentized statistics.
    Studentized = 2,
}

/// One step of SplitMix64's output function (Steele, Lea and Flood 2014): a bijection that scatters bits.
fn scatter(mut state: u64) -> u64 {
    state = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
    state = (state ^ (state >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    state = (state ^ (state >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    state ^ (state >> 31)
}

/// The stream of a block.
pub(crate) fn block_stream(seed: u64, purpose: Purpose, block: u64) -> Stream {
    let mut state = [0u8; 32];
    let start = scatter(scatter(scatter(seed) ^ purpose as u64) ^ block);
    for (index, bytes) in state.chunks_exact_mut(8).enumerate() {
        // The block number enters each word once more: no two blocks share a state even where `start` collides.
        let word = scatter(start.wrapping_add(scatter(block.wrapping_add((index as u64) << 56))));
        bytes.copy_from_slice(&word.to_le_bytes());
    }
    Stream::from_seed(state)
}

/// Does the blocks `from..to` on all threads of the current pool, each thread into an accumulator of its own, and
/// merges these. `merge` must not depend on the order (counts do not).
///
/// `fraction` maps the number of finished blocks to the progress stated to `work`.
pub(crate) fn for_blocks<A: Send>(
    from: u64,
    to: u64,
    work: &Work,
    fraction: impl Fn(u64) -> f64 + Sync,
    empty: impl Fn() -> A + Sync,
    draw: impl Fn(u64, &mut A) + Sync,
    merge: impl Fn(A, A) -> A + Sync + Send,
) -> Result<A, Cancelled> {
    use rayon::prelude::*;
    work.check()?;
    let next = AtomicU64::new(from);
    let finished = AtomicU64::new(0);
    let threads = rayon::current_num_threads().max(1) as u64;
    let workers = threads.min(to.saturating_sub(from)).max(1) as usize;
    let merged = (0..workers)
        .into_par_iter()
        .with_max_len(1)
        .map(|_| {
            let mut own = empty();
            loop {
                let block = next.fetch_add(1, Ordering::Relaxed);
                if block >= to || work.is_cancelled() {
                    return own;
                }
                draw(block, &mut own);
                let done = finished.fetch_add(1, Ordering::Relaxed) + 1;
                work.set_fraction(fraction(from + done));
            }
        })
        .reduce_with(&merge)
        .unwrap_or_else(&empty);
    work.check()?;
    Ok(merged)
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::Rng;

    #[test]
    fn blocks_purposes_and_seeds_give_different_streams() {
        let mut seen = std::collections::HashSet::new();
        for seed in 0..8 {
            for purpose in [Purpose::Sums, Purpose::Studentized] {
                for block in 0..200 {
                    assert!(seen.insert(block_stream(seed, purpose, block).next_u64()));
                }
            }
        }
    }

    #[test]
    fn cancelling_ends_the_work() {
        let work = Work::new();
        let done = for_blocks(
            0,
            u64::MAX,
            &work,
            |_| 0.0,
            || 0u64,
            |block, count| {
                *count += 1;
                if block == 1000 {
                    work.cancel();
                }
            },
            |a, b| a + b,
        );
        assert_eq!(done, Err(Cancelled));
    }
}

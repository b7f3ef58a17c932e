//! The invented pilot data of the on-board spending scenario, written by a seeded generator.
//!
//! `cargo run -p gaussgap-tests --example write-pilot-data` writes the file anew; a test compares it with the
//! committed one. The generator is SplitMix64 (Steele, Lea & Flood 2014) with the Box–Muller transform, so that
//! it gives the same rows on every machine and with every version of every library.

use std::fmt::Write as _;

/// Rows in the pilot file.
pub const ROWS: usize = 2400;

const SEED: u64 = 0x51ab_11ed_2026;

struct SplitMix64(u64);

impl SplitMix64 {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        (((z ^ (z >> 31)) >> 11) as f64 + 0.5) / 9_007_199_254_740_992.0
    }

    fn normal(&mut self) -> f64 {
        let radius = (-2.0 * libm::log(self.uniform())).sqrt();
        radius * libm::cos(2.0 * std::f64::consts::PI * self.uniform())
    }
}

/// The CSV text: passenger, sailing and what the passenger spent on board, in quarter-marks (qm).
///
/// Two passengers in five buy nothing; the others spend a lognormal amount, families a multiple of it,
/// rounded to 0.05.
pub fn on_board_spending_csv() -> String {
    let mut random = SplitMix64(SEED);
    let mut text = String::from("passenger,sailing,spending\n");
    for passenger in 1..=ROWS {
        let sailing = 1 + (passenger - 1) / 60;
        let buys = random.uniform() >= 0.4;
        let family = random.uniform() < 0.12;
        let amount = libm::exp(2.05 + 0.85 * random.normal()) * if family { 2.6 } else { 1.0 };
        let spending = if buys { (amount * 20.0).round().max(1.0) / 20.0 } else { 0.0 };
        let _ = writeln!(text, "{passenger},{sailing},{spending:.2}");
    }
    text
}

//! Special functions at full double accuracy, tails included.

pub mod elementary;
pub mod erf;
pub mod gamma;
pub mod normal;
#[cfg(test)]
mod reference_tests;
mod solve;

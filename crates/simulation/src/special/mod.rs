//! Special functions at full double accuracy, tails included.

pub mod beta;
pub mod discrete;
pub mod elementary;
pub mod erf;
pub mod gamma;
pub mod inverse_gaussian;
mod legendre;
pub mod normal;
#[cfg(test)]
mod reference_tests;
mod solve;
pub mod student;

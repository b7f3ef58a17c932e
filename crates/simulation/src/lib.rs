//! Distributions of standardized sums of independent quantities: exact where possible, simulated otherwise.
//!
//! A [`law::LawSpec`] says what one summand is; [`law::Law`] is that law made ready for computing; a
//! [`sum::SumSpec`] says which independent copies are added; [`sum::StandardizedSum`] is the distribution of
//! (S − E S)/sd(S), with an error beside every number. The crate reads no files and knows no window.

pub mod figure;
pub mod law;
pub mod monte_carlo;
pub mod special;
pub mod sum;
pub mod work;

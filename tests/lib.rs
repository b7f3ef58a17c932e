//! Checks against published and independent sources, and what they share.

pub mod pilot_data;
pub mod random;

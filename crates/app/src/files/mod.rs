//! Files on their way in and out: scenarios, pilot data beside them, and outputs written whole or not at all.

pub mod column;
pub mod duplicates;
mod records;
pub mod scenario;
pub mod write;

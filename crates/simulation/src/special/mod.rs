//! Special functions at full double accuracy, tails included.

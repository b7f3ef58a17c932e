//! The `gaussgap` binary.

fn main() {}

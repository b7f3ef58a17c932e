//! Laws are tested as laws: one harness over one list of cases, which has to cover every kind.

mod cases;
mod harness;
mod operations;

//! Laws are tested as laws: one harness over a list of cases.

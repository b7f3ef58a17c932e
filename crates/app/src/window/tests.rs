//! Tests of the window through its accessibility tree.

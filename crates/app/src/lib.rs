//! The program: window and command.

pub mod window;

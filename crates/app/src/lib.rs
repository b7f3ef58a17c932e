//! The program: window and command.

pub mod command;
pub mod files;
pub mod shell;
pub mod window;

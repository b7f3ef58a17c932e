//! The program: window and command.

pub mod command;
pub mod files;

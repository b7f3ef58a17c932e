//! The program: window and command.

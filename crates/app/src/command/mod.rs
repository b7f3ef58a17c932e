//! The command: what `gaussgap` does when it is given arguments.

mod arguments;
mod assess;
mod batch;
mod outputs;
mod progress;
mod status;
mod summary;

use crate::shell::Renderer;
use crate::window::{self, WindowRequest};
use arguments::{Arguments, Command, Document};
use clap::Parser;
use status::Status;
use std::io::Write;
use std::path::PathBuf;
use std::process::ExitCode;

/// Runs the program with the arguments it was started with.
pub fn run() -> ExitCode {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version are "errors" of clap that go to standard output; a closed pipe is no reason to panic.
            let _ = error.print();
            return if error.use_stderr() { Status::BadInput.into() } else { Status::Holds.into() };
        }
    };
    match arguments.command {
        Some(Command::Assess(request)) => assess::run(&request).into(),
        Some(Command::Schema { document }) => print_schema(document).into(),
        Some(Command::Open { scenario, renderer }) => {
            // The option may stand before or after `open`.
            let renderer = if renderer == Renderer::Auto { arguments.renderer } else { renderer };
            open_window(Some(scenario), renderer).into()
        }
        None => open_window(None, arguments.renderer).into(),
    }
}

fn print_schema(document: Document) -> Status {
    let schema = match document {
        Document::Scenario => gaussgap_pages::schema::scenario_schema(),
        Document::Report => gaussgap_pages::schema::report_schema(),
    };
    let written = writeln!(std::io::stdout().lock(), "{schema:#}");
    if written.is_ok() { Status::Holds } else { Status::Failure }
}

fn open_window(scenario: Option<PathBuf>, renderer: Renderer) -> Status {
    match window::run(WindowRequest { scenario, renderer }) {
        Ok(()) => Status::Holds,
        Err(reason) => {
            let line = format!("gaussgap: {reason}; without a window: gaussgap assess SCENARIO.json");
            let _ = writeln!(std::io::stderr(), "{line}");
            Status::Failure
        }
    }
}

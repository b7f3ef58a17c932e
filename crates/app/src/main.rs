//! The `gaussgap` binary.

use std::process::ExitCode;

fn main() -> ExitCode {
    gaussgap_app::command::run()
}

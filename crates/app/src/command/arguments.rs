//! The arguments `gaussgap` understands.

use crate::shell::Renderer;
use clap::{Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

const EXIT_STATUSES: &str = "\
Exit status: 0 every claim holds; 1 at least one claim fails; 2 bad input (nothing is written for that scenario); \
3 undecided within the budget; 4 an output could not be written, or another failure. Of several, the worst counts: \
4, then 2, 1, 3, 0.

Several scenarios: they are assessed side by side, a bad one does not stop the others, and everything comes out in \
the order given. --json then writes one object per line. --png, --svg and --csv make one file per scenario: PATH \
must be an existing folder or contain {}, which stands for the scenario's file name without its ending \
(pages/{}.png); with such a PATH --json writes one file per scenario, too. - is standard output, for one of the \
outputs; the text summary is left out then.";

/// Is the normal approximation safe for this law, at this n, for this use?
///
/// Without a command the window opens, with the last session restored.
#[derive(Debug, Parser)]
#[command(name = "gaussgap", version, max_term_width = 100)]
pub struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub command: Option<Command>,
    /// How the window is drawn.
    #[arg(long, value_enum, default_value_t = Renderer::Auto)]
    pub renderer: Renderer,
}

/// The commands.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Open the window on a scenario.
    Open {
        /// The scenario file.
        #[arg(value_name = "SCENARIO.json")]
        scenario: PathBuf,
        /// How the window is drawn.
        #[arg(long, value_enum, default_value_t = Renderer::Auto)]
        renderer: Renderer,
    },
    /// Assess scenarios without a window and print a short summary of each.
    Assess(AssessArguments),
    /// Print the JSON Schema of a document.
    Schema {
        /// Which document.
        #[arg(value_enum)]
        document: Document,
    },
}

/// What `assess` is asked for.
#[derive(Debug, clap::Args)]
#[command(after_help = EXIT_STATUSES)]
pub struct AssessArguments {
    /// Scenario files; patterns such as scenarios/*.json are expanded where the shell did not.
    #[arg(value_name = "SCENARIO.json", required = true)]
    pub scenarios: Vec<PathBuf>,
    /// Write the report: one scenario an object, several one object per line.
    #[arg(long, value_name = "PATH|-")]
    pub json: Option<PathBuf>,
    /// Write the page as a picture.
    #[arg(long, value_name = "PATH")]
    pub png: Option<PathBuf>,
    /// Write the same page as vectors.
    #[arg(long, value_name = "PATH")]
    pub svg: Option<PathBuf>,
    /// Write the curves as columns.
    #[arg(long, value_name = "PATH")]
    pub csv: Option<PathBuf>,
    /// Override one field of every scenario, such as /n=200 (repeatable); a VALUE that is not JSON is a text.
    #[arg(long, value_name = "POINTER=VALUE")]
    pub set: Vec<String>,
    /// No text summary.
    #[arg(long)]
    pub quiet: bool,
}

/// Documents that have a schema.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub enum Document {
    /// What `assess` reads.
    Scenario,
    /// What `assess` writes.
    Report,
}

#[cfg(test)]
mod tests {
    use super::*;
    use clap::CommandFactory;

    #[test]
    fn the_command_line_is_consistent() {
        Arguments::command().debug_assert();
    }
}

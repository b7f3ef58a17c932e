//! The panels of the window, one file each: they draw and return edits and commands, and change nothing else.

pub mod bar;
pub mod board;
pub mod cards;
pub mod dialogs;
pub mod fields;
pub mod finding;
pub mod law_picture;
pub mod pins;
pub mod plan;
pub mod start;

use super::command::Command;
use super::model::edit::Edit;

/// What a panel asks for; applied after drawing.
#[derive(Debug, Clone)]
pub enum Ask {
    /// Change the scenario.
    Edit(Edit),
    /// Do a command.
    Do(Command),
    /// Open a bundled scenario.
    Example(usize),
    /// Open a file.
    Open(std::path::PathBuf),
    /// Remove a pin.
    Unpin(usize),
    /// Rename a pin.
    RenamePin(usize, String),
    /// Move a pin one place forward.
    PinEarlier(usize),
    /// Make a pin's scenario the one being edited.
    RestorePin(usize),
    /// Choose a data file for the law at a place.
    ChooseData(super::model::law_tree::Place),
    /// Put a text on the clipboard.
    Copy(String),
    /// Take the notice away.
    DismissNotice,
}

/// What a frame's drawing asked for.
#[derive(Debug, Default)]
pub struct Asks {
    /// In order.
    pub list: Vec<Ask>,
    /// The step of undo being typed has ended.
    pub end_step: bool,
    /// Where the shared cursor was put.
    pub cursor: Option<f64>,
}

impl Asks {
    /// Asks for an edit.
    pub fn edit(&mut self, edit: Edit) {
        self.list.push(Ask::Edit(edit));
    }

    /// Asks for a command.
    pub fn command(&mut self, command: Command) {
        self.list.push(Ask::Do(command));
    }
}

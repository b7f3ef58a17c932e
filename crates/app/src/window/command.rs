//! Commands: everything that can be done from the keyboard, with its label, what it does and its keys.

use super::figures::Figure;
use egui::{Key, KeyboardShortcut, Modifiers};

/// Something to do.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[allow(missing_docs, reason = "described by `label` and `does`")]
pub enum Command {
    StartPage,
    New,
    Open,
    Save,
    SaveAs,
    Export,
    CopySummary,
    CopyPlan,
    Undo,
    Redo,
    Pin,
    Stop,
    GoOn,
    GoToN,
    MoreN,
    FewerN,
    ManyMoreN,
    ManyFewerN,
    SwitchAxis,
    CursorLeft,
    CursorRight,
    NoCursor,
    ZoomIn,
    ZoomOut,
    WholeAxis,
    PanLeft,
    PanRight,
    Play,
    CopyPicture,
    Brightness,
    LargerText,
    SmallerText,
    UsualText,
    Shortcuts,
    Enlarge(Figure),
    AsTable,
    Back,
}

use Command as C;

/// Keys of a command.
#[derive(Debug, Clone, Copy)]
pub struct Keys(pub Modifiers, pub Key);

const CTRL: Modifiers = Modifiers::COMMAND;
const CTRL_SHIFT: Modifiers = Modifiers { shift: true, ..Modifiers::COMMAND };
const ALT: Modifiers = Modifiers::ALT;
const ALT_SHIFT: Modifiers = Modifiers { shift: true, ..Modifiers::ALT };

/// Every command with its keys, what it does, and whether it may be done while a dialog is open.
pub const ALL: &[(Command, &[Keys], &str)] = &[
    (C::GoToN, &[Keys(CTRL, Key::G)], "Go to the planned n"),
    (C::MoreN, &[Keys(ALT, Key::ArrowUp)], "Planned n one more"),
    (C::FewerN, &[Keys(ALT, Key::ArrowDown)], "Planned n one less"),
    (C::ManyMoreN, &[Keys(ALT, Key::PageUp)], "Planned n a quarter more"),
    (C::ManyFewerN, &[Keys(ALT, Key::PageDown)], "Planned n a fifth less"),
    (C::Undo, &[Keys(CTRL, Key::Z)], "Undo the last edit"),
    (C::Redo, &[Keys(CTRL_SHIFT, Key::Z), Keys(CTRL, Key::Y)], "Redo it"),
    (C::Pin, &[Keys(CTRL, Key::P)], "Pin the present plan for comparison"),
    (C::Stop, &[Keys(CTRL, Key::Period)], "Stop the computation"),
    (C::CursorLeft, &[Keys(ALT, Key::ArrowLeft)], "Shared cursor to the left"),
    (C::CursorRight, &[Keys(ALT, Key::ArrowRight)], "Shared cursor to the right"),
    (C::ZoomIn, &[Keys(ALT, Key::Plus), Keys(ALT, Key::Equals)], "Zoom into the figures (Ctrl+wheel)"),
    (C::ZoomOut, &[Keys(ALT, Key::Minus)], "Zoom out of the figures"),
    (C::WholeAxis, &[Keys(ALT, Key::Num0)], "The whole axis again (two clicks in a figure)"),
    (C::PanLeft, &[Keys(ALT_SHIFT, Key::ArrowLeft)], "Shown part of the axis to the left (drag a figure)"),
    (C::PanRight, &[Keys(ALT_SHIFT, Key::ArrowRight)], "Shown part of the axis to the right"),
    (C::Play, &[Keys(Modifiers::NONE, Key::F6)], "Play through n, or stop"),
    (C::SwitchAxis, &[Keys(CTRL, Key::U)], "Standard units or the quantity’s own"),
    (C::Enlarge(Figure::Fit), &[Keys(CTRL, Key::Num1)], "Enlarge Fit"),
    (C::Enlarge(Figure::Gap), &[Keys(CTRL, Key::Num2)], "Enlarge Gap"),
    (C::Enlarge(Figure::Growth), &[Keys(CTRL, Key::Num3)], "Enlarge Growth"),
    (C::Enlarge(Figure::Tails), &[Keys(CTRL, Key::Num4)], "Enlarge Tails"),
    (C::Enlarge(Figure::Coverage), &[Keys(CTRL, Key::Num5)], "Enlarge Coverage"),
    (C::Enlarge(Figure::Remedies), &[Keys(CTRL, Key::Num6)], "Enlarge Remedies"),
    (C::Enlarge(Figure::Rules), &[Keys(CTRL, Key::Num7)], "Enlarge Rules of thumb"),
    (C::AsTable, &[Keys(CTRL, Key::T)], "Figures as tables or drawings"),
    (C::Back, &[Keys(Modifiers::NONE, Key::Escape)], "Back to the board; close a dialog"),
    (C::StartPage, &[Keys(CTRL, Key::B)], "Scenarios: bundled and recent ones"),
    (C::New, &[Keys(CTRL, Key::N)], "A new plan"),
    (C::Open, &[Keys(CTRL, Key::O)], "Open a scenario"),
    (C::Save, &[Keys(CTRL, Key::S)], "Save the scenario"),
    (C::SaveAs, &[Keys(CTRL_SHIFT, Key::S)], "Save the scenario under another name"),
    (C::Export, &[Keys(CTRL, Key::E)], "Export the page, the report or the curves"),
    (C::CopySummary, &[Keys(CTRL_SHIFT, Key::C)], "Copy the summary as text"),
    (C::CopyPicture, &[Keys(CTRL_SHIFT, Key::P)], "Copy the page as a picture"),
    (C::Brightness, &[Keys(CTRL, Key::D)], "Light or dark"),
    (C::LargerText, &[Keys(CTRL, Key::Plus), Keys(CTRL, Key::Equals)], "Larger text"),
    (C::SmallerText, &[Keys(CTRL, Key::Minus)], "Smaller text"),
    (C::UsualText, &[Keys(CTRL, Key::Num0)], "Usual text size"),
    (C::Shortcuts, &[Keys(Modifiers::NONE, Key::F1)], "This overview"),
];

impl Command {
    /// The command's first keys as text.
    pub fn keys(self) -> Option<String> {
        let keys = ALL.iter().find(|(command, ..)| *command == self)?.1.first()?;
        Some(keys_text(*keys))
    }

    /// What it does, with its keys: a tooltip.
    pub fn tip(self) -> String {
        let found = ALL.iter().find(|(command, ..)| *command == self);
        match found {
            Some((_, keys, does)) => {
                keys.first().map_or_else(|| (*does).to_owned(), |k| format!("{does} ({})", keys_text(*k)))
            }
            None => String::new(),
        }
    }
}

/// Keys as text: `Ctrl+Shift+S`.
pub fn keys_text(keys: Keys) -> String {
    let Keys(modifiers, key) = keys;
    let mut text = String::new();
    for (held, name) in
        [(modifiers.command || modifiers.ctrl, "Ctrl+"), (modifiers.alt, "Alt+"), (modifiers.shift, "Shift+")]
    {
        if held {
            text.push_str(name);
        }
    }
    let name = match key {
        Key::Period => ".",
        Key::ArrowUp => "Up",
        Key::ArrowDown => "Down",
        Key::ArrowLeft => "Left",
        Key::ArrowRight => "Right",
        Key::PageUp => "Page Up",
        Key::PageDown => "Page Down",
        other => other.name(),
    };
    text.push_str(name);
    text
}

/// Takes the commands typed since the last frame out of the input, before any field sees them.
pub fn typed(ctx: &egui::Context) -> Vec<Command> {
    // Shortcuts with more modifiers come first: Ctrl+Shift+Z is not Ctrl+Z.
    let mut list: Vec<(Command, Keys)> =
        ALL.iter().flat_map(|(command, keys, _)| keys.iter().map(|keys| (*command, *keys))).collect();
    list.sort_by_key(|(_, Keys(modifiers, _))| {
        std::cmp::Reverse(u8::from(modifiers.shift) + u8::from(modifiers.command))
    });
    ctx.input_mut(|input| {
        list.into_iter()
            .filter(|(_, Keys(modifiers, key))| {
                input.consume_shortcut(&KeyboardShortcut::new(*modifiers, *key))
            })
            .map(|(command, _)| command)
            .collect()
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_two_commands_share_keys() {
        let mut seen = std::collections::HashSet::new();
        for (_, keys, _) in ALL {
            for keys in *keys {
                assert!(seen.insert(keys_text(*keys)), "{}", keys_text(*keys));
            }
        }
    }

    #[test]
    fn every_figure_but_the_cautions_has_keys() {
        for figure in crate::window::figures::ALL.into_iter().filter(|figure| *figure != Figure::Cautions) {
            assert!(Command::Enlarge(figure).keys().is_some(), "{}", figure.title());
        }
    }
}

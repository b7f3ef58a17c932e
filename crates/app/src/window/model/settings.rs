//! What a user chose about the window itself, kept between sessions.

use serde::{Deserialize, Serialize};
use std::path::{Path, PathBuf};

/// Files remembered on the start page.
const RECENT: usize = 8;

/// Light or dark.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Brightness {
    /// As the system says.
    #[default]
    System,
    /// Dark ink on light paper.
    Light,
    /// Light ink on dark paper.
    Dark,
}

/// The horizontal axis of the distribution figures.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Axis {
    /// Standard units z.
    #[default]
    Standard,
    /// The quantity's own unit.
    Own,
}

/// Settings of the window.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct Settings {
    /// Light or dark.
    pub brightness: Brightness,
    /// Magnification of everything; 1 is the system's size.
    pub text_size: f32,
    /// Horizontal axis of the distribution figures.
    pub axis: Axis,
    /// Files opened or saved lately, the latest first.
    pub recent: Vec<PathBuf>,
}

impl Default for Settings {
    fn default() -> Self {
        Self { brightness: Brightness::System, text_size: 1.0, axis: Axis::Standard, recent: Vec::new() }
    }
}

impl Settings {
    /// Puts a file at the head of the recent ones.
    pub fn remember(&mut self, path: &Path) {
        self.recent.retain(|known| known != path);
        self.recent.insert(0, path.to_owned());
        self.recent.truncate(RECENT);
    }

    /// The next brightness in turn.
    pub fn turn_brightness(&mut self, dark_now: bool) {
        self.brightness = if dark_now { Brightness::Light } else { Brightness::Dark };
    }

    /// Changes the text size by steps of a tenth, from 0.7 to 2.
    pub fn change_text_size(&mut self, steps: i32) {
        let tenths = (self.text_size * 10.0).round() as i32 + steps;
        self.text_size = tenths.clamp(7, 20) as f32 / 10.0;
    }
}

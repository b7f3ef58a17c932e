//! The last session: what is kept between two starts of the window, in one small file.

use super::model::settings::Settings;
use gaussgap_conclusions::scenario::Scenario;
use serde::{Deserialize, Serialize};
use std::path::PathBuf;

/// What is kept.
#[derive(Debug, Clone, Default, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct Session {
    /// Settings of the window.
    pub settings: Settings,
    /// The scenario that was being edited, as a scenario document.
    pub scenario: Option<String>,
    /// The scenario as it is in its file.
    pub saved: Option<String>,
    /// Its file.
    pub path: Option<PathBuf>,
}

impl Session {
    /// The scenarios of the session, where they can still be read.
    pub fn scenarios(&self) -> Option<(Scenario, Scenario)> {
        let scenario = Scenario::parse(self.scenario.as_deref()?).ok()?;
        let saved = self.saved.as_deref().and_then(|text| Scenario::parse(text).ok());
        Some((scenario.clone(), saved.unwrap_or(scenario)))
    }
}

/// The file of the session: in `$XDG_STATE_HOME`, else `~/.local/state`; on other systems in the user's
/// application data. `None` where no such folder is known.
pub fn file() -> Option<PathBuf> {
    let absolute = |name: &str| std::env::var_os(name).map(PathBuf::from).filter(|path| path.is_absolute());
    let folder = absolute("XDG_STATE_HOME")
        .or_else(|| if cfg!(windows) { absolute("APPDATA") } else { None })
        .or_else(|| absolute("HOME").map(|home| home.join(".local/state")))?;
    Some(folder.join("gaussgap").join("session.json"))
}

/// Reads the last session; a missing or damaged file is a fresh start.
pub fn load() -> Session {
    let text = file().and_then(|path| std::fs::read_to_string(path).ok());
    text.and_then(|text| serde_json::from_str(&text).ok()).unwrap_or_default()
}

/// Writes the session. Failure is not worth a message when the window closes.
pub fn store(session: &Session) {
    let Some(path) = file() else { return };
    let Ok(text) = serde_json::to_string_pretty(session) else { return };
    if let Some(folder) = path.parent()
        && std::fs::create_dir_all(folder).is_ok()
    {
        let _ = crate::files::write::write_whole(&path, text.as_bytes());
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::model::examples;

    #[test]
    fn a_session_comes_back_as_it_was() {
        let scenario = examples::blank();
        let session = Session { scenario: Some(scenario.to_json()), ..Session::default() };
        let text = serde_json::to_string(&session).expect("a session is plain data");
        let read: Session = serde_json::from_str(&text).expect("what was written");
        assert_eq!(read, session);
        assert_eq!(read.scenarios().map(|(now, _)| now), Some(scenario));
    }

    #[test]
    fn a_damaged_session_is_a_fresh_start() {
        let session = Session { scenario: Some("{".to_owned()), ..Session::default() };
        assert_eq!(session.scenarios(), None);
    }
}

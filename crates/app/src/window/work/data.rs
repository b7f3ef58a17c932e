//! Pilot data of a scenario: read beside the window, kept as long as the file does not change.

use super::super::model::examples;
use crate::files::column;
use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::Scenario;
use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::time::SystemTime;

/// A file, a column and when the file was last changed.
type Key = (PathBuf, String, Option<SystemTime>);

/// Columns already read.
#[derive(Debug, Default)]
pub struct Cache {
    columns: HashMap<Key, Result<Arc<Vec<f64>>, String>>,
}

impl Cache {
    /// The scenario with the values of every `data` law filled in; problems name the place.
    pub fn filled(&mut self, scenario: &Scenario, folder: Option<&Path>) -> Result<Scenario, Vec<Problem>> {
        let mut filled = scenario.clone();
        let mut problems = Vec::new();
        for request in scenario.data_requests() {
            match self.column(&request.path, &request.column, folder) {
                Ok(values) => {
                    if let Err(problem) = filled.fill_data(&request.pointer, (*values).clone()) {
                        problems.push(problem);
                    }
                }
                Err(message) => {
                    problems.push(Problem { pointer: format!("{}/path", request.pointer), message })
                }
            }
        }
        if problems.is_empty() { Ok(filled) } else { Err(problems) }
    }

    fn column(&mut self, path: &str, column: &str, folder: Option<&Path>) -> Result<Arc<Vec<f64>>, String> {
        let full = folder.map_or_else(|| PathBuf::from(path), |folder| folder.join(path));
        let changed = std::fs::metadata(&full).and_then(|facts| facts.modified()).ok();
        let key = (full.clone(), column.to_owned(), changed);
        if let Some(known) = self.columns.get(&key) {
            return known.clone();
        }
        let bundled = examples::DATA.iter().find(|(name, _)| folder.is_none() && *name == path);
        let read = match bundled {
            Some((name, text)) => column::read_column_from(text.as_bytes(), Path::new(name), Some(column)),
            None => column::read_column(&full, Some(column)),
        };
        let read = read.map(Arc::new).map_err(|error| error.lines().join("\n"));
        self.columns.retain(|(known, _, _), _| known != &full);
        self.columns.insert(key, read.clone());
        read
    }
}

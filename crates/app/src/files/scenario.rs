//! Reading a scenario file and the pilot data beside it, naming every mistake with its file and place.

use super::column::read_column;
use super::duplicates::duplicates;
use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::{Scenario, apply_overrides};
use serde_json::Value;
use std::path::{Path, PathBuf};

/// A scenario file could not be used: one line per problem, each beginning with a file.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{}", .lines.join("\n"))]
pub struct ScenarioFileError {
    /// The messages.
    pub lines: Vec<String>,
}

impl ScenarioFileError {
    /// Problems inside the document, each with the file in front.
    pub fn in_document(path: &Path, problems: &[Problem]) -> Self {
        Self { lines: problems.iter().map(|problem| placed(path, problem)).collect() }
    }

    fn one(line: String) -> Self {
        Self { lines: vec![line] }
    }
}

/// `plan.json: /n: must be …`; without a pointer `plan.json: line 3, column 7: …`.
pub fn placed(path: &Path, problem: &Problem) -> String {
    let file = path.display();
    let message = problem.message.replace(['\n', '\r'], " ");
    if problem.pointer.is_empty() {
        format!("{file}: {message}")
    } else {
        format!("{file}: {}: {message}", problem.pointer)
    }
}

/// Reads a scenario file, overrides single fields (`--set`), and fills its `data` laws from the files they name.
pub fn read_scenario(path: &Path, overrides: &[(String, Value)]) -> Result<Scenario, ScenarioFileError> {
    let text = read_text(path)?;
    let in_document = |problems: Vec<Problem>| ScenarioFileError::in_document(path, &problems);
    let mut document = Scenario::parse_json(&text).map_err(in_document)?;
    let repeated = duplicates(text.trim_start_matches('\u{feff}'));
    if !repeated.is_empty() {
        return Err(in_document(repeated));
    }
    apply_overrides(&mut document, overrides).map_err(in_document)?;
    let mut scenario = Scenario::from_value(&document).map_err(in_document)?;
    fill_data(&mut scenario, path)?;
    Ok(scenario)
}

/// Fills the `data` laws that name a file. Paths are relative to the folder of the scenario file.
pub fn fill_data(scenario: &mut Scenario, scenario_path: &Path) -> Result<(), ScenarioFileError> {
    let mut lines = Vec::new();
    for request in scenario.data_requests() {
        let data_path = beside(scenario_path, &request.path);
        let file = scenario_path.display();
        let place = format!("{file}: {}", request.pointer);
        match read_column(&data_path, Some(&request.column)) {
            Ok(values) if values.len() < 2 => lines.push(format!(
                "{place}: needs at least two values, {} has {}",
                data_path.display(),
                values.len()
            )),
            Ok(values) => {
                if let Err(problem) = scenario.fill_data(&request.pointer, values) {
                    lines.push(placed(scenario_path, &problem));
                }
            }
            Err(error) => lines.extend(error.lines().iter().map(|line| format!("{place}: {line}"))),
        }
    }
    if lines.is_empty() { Ok(()) } else { Err(ScenarioFileError { lines }) }
}

/// A data path as the scenario means it: relative to the scenario's folder.
fn beside(scenario_path: &Path, data_path: &str) -> PathBuf {
    scenario_path.parent().unwrap_or(Path::new("")).join(data_path)
}

/// The text of a file, which must be UTF-8.
fn read_text(path: &Path) -> Result<String, ScenarioFileError> {
    let file = path.display();
    let bytes = std::fs::read(path)
        .map_err(|error| ScenarioFileError::one(format!("{file}: cannot be read: {error}")))?;
    String::from_utf8(bytes).map_err(|error| {
        let good = &error.as_bytes()[..error.utf8_error().valid_up_to()];
        let line = 1 + good.iter().filter(|&&byte| byte == b'\n').count();
        let start = good.iter().rposition(|&byte| byte == b'\n').map_or(0, |place| place + 1);
        let column = 1 + String::from_utf8_lossy(&good[start..]).chars().count();
        ScenarioFileError::one(format!("{file}: line {line}, column {column}: is not UTF-8 text"))
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use gaussgap_conclusions::scenario::Source;
    use gaussgap_simulation::law::LawSpec;

    fn write(folder: &Path, name: &str, bytes: &[u8]) -> PathBuf {
        let path = folder.join(name);
        std::fs::write(&path, bytes).unwrap();
        path
    }

    const WITH_DATA: &str = r#"{"format": "gaussgap-scenario/1", "n": 40,
        "law": {"kind": "cap", "high": 9, "law": {"kind": "data", "path": "pilot.csv", "column": "delay"}}}"#;

    #[test]
    fn pilot_data_come_from_the_folder_of_the_scenario() {
        let folder = tempfile::tempdir().unwrap();
        let path = write(folder.path(), "plan.json", WITH_DATA.as_bytes());
        write(folder.path(), "pilot.csv", b"day,delay\n1,2\n2,3.5\n");
        let scenario = read_scenario(&path, &[("/n".to_owned(), Value::from(7))]).unwrap();
        let Source::Like { law: LawSpec::Cap { law, .. }, n: 7, .. } = scenario.source else {
            panic!("unexpected source {:?}", scenario.source)
        };
        let LawSpec::Data { values, .. } = *law else { panic!("unexpected law") };
        assert_eq!(values.unwrap(), [2.0, 3.5]);
    }

    #[test]
    fn bad_cells_are_named_with_both_files() {
        let folder = tempfile::tempdir().unwrap();
        let path = write(folder.path(), "plan.json", WITH_DATA.as_bytes());
        write(folder.path(), "pilot.csv", b"day,delay\n1,2\n2,late\n");
        let error = read_scenario(&path, &[]).unwrap_err().to_string();
        assert!(error.contains("plan.json: /law/law: "), "{error}");
        assert!(
            error.ends_with("pilot.csv: line 3, column \"delay\": found \"late\", expected a number"),
            "{error}"
        );
    }

    #[test]
    fn missing_files_and_text_that_is_not_utf8_are_named() {
        let folder = tempfile::tempdir().unwrap();
        let error = read_scenario(&folder.path().join("none.json"), &[]).unwrap_err().to_string();
        assert!(error.contains("none.json: cannot be read: "), "{error}");
        let path = write(folder.path(), "latin.json", b"{\n \"title\": \"\xfc\"}");
        let error = read_scenario(&path, &[]).unwrap_err().to_string();
        assert!(error.ends_with("latin.json: line 2, column 12: is not UTF-8 text"), "{error}");
        let path = write(folder.path(), "plan.json", WITH_DATA.as_bytes());
        let error = read_scenario(&path, &[]).unwrap_err().to_string();
        assert!(
            error.contains("plan.json: /law/law: ") && error.contains("pilot.csv: cannot be read"),
            "{error}"
        );
    }
}

//! Overriding single fields of a scenario before it is read: `POINTER=VALUE`.

use crate::Problem;
use serde_json::{Map, Value};

/// Splits `POINTER=VALUE` at the first `=`. The value is read as JSON; what is no JSON is a text, so that
/// `/statistic=sum` needs no quotes.
pub fn parse_override(text: &str) -> Result<(String, Value), Problem> {
    let problem = |message: String| Problem { pointer: String::new(), message };
    let (pointer, value) = text
        .split_once('=')
        .ok_or_else(|| problem(format!("\"{text}\" must have the form POINTER=VALUE, such as /n=200")))?;
    if !pointer.starts_with('/') {
        return Err(problem(format!("\"{pointer}\" must be a JSON pointer, such as /n or /claim/level")));
    }
    let value = serde_json::from_str(value).unwrap_or_else(|_| Value::String(value.to_owned()));
    Ok((pointer.to_owned(), value))
}

/// Sets fields of a scenario document, in order. Missing members of objects are created (reading the scenario
/// afterwards names a misspelt one); an entry of a list must exist already. Every problem is listed, and the
/// overrides without a problem are applied.
pub fn apply_overrides(document: &mut Value, overrides: &[(String, Value)]) -> Result<(), Vec<Problem>> {
    let problems = overrides
        .iter()
        .filter_map(|(pointer, value)| {
            let message = set(document, pointer, value.clone()).err()?;
            Some(Problem { pointer: pointer.clone(), message })
        })
        .collect::<Vec<_>>();
    if problems.is_empty() { Ok(()) } else { Err(problems) }
}

fn set(document: &mut Value, pointer: &str, value: Value) -> Result<(), String> {
    let Some(steps) = pointer.strip_prefix('/') else {
        return Err("must be a JSON pointer that starts with \"/\"".to_owned());
    };
    let mut place = document;
    for step in steps.split('/') {
        let step = step.replace("~1", "/").replace("~0", "~");
        place = match place {
            Value::Object(members) => members.entry(step).or_insert_with(|| Value::Object(Map::new())),
            Value::Array(entries) => {
                let length = entries.len();
                step.parse::<usize>()
                    .ok()
                    .and_then(|index| entries.get_mut(index))
                    .ok_or_else(|| format!("there is no entry \"{step}\" in a list of {length}"))?
            }
            _ => {
                return Err(format!(
                    "cannot set \"{step}\" inside a value that is neither an object nor a list"
                ));
            }
        };
    }
    *place = value;
    Ok(())
}

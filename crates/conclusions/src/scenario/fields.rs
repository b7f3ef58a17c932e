//! Reading the members of one JSON object, collecting every problem on the way.

use crate::Problem;
use serde_json::{Map, Value};
use std::cell::RefCell;

/// Every problem found so far, shared by all readers of one document.
#[derive(Debug, Default)]
pub(super) struct Problems {
    found: RefCell<Vec<Problem>>,
}

impl Problems {
    /// Notes one problem.
    pub fn push(&self, pointer: impl Into<String>, message: impl Into<String>) {
        self.found.borrow_mut().push(Problem { pointer: pointer.into(), message: message.into() });
    }

    /// How many were found so far.
    pub fn count(&self) -> usize {
        self.found.borrow().len()
    }

    /// All of them, in the order found.
    pub fn into_vec(self) -> Vec<Problem> {
        self.found.into_inner()
    }
}

/// One JSON object being read: its place, its members, and where problems go.
pub(super) struct Fields<'a> {
    members: &'a Map<String, Value>,
    pointer: String,
    problems: &'a Problems,
}

impl<'a> Fields<'a> {
    /// Opens an object; a value of another type is a problem and gives `None`.
    pub fn open(value: &'a Value, pointer: &str, problems: &'a Problems) -> Option<Self> {
        match value {
            Value::Object(members) => Some(Self { members, pointer: pointer.to_owned(), problems }),
            other => {
                problems.push(pointer, format!("must be an object, {{…}} (found {})", describe(other)));
                None
            }
        }
    }

    /// Reports every member whose name is not in `known`.
    pub fn only(&self, known: &[&str]) {
        for name in self.members.keys() {
            if !known.contains(&name.as_str()) {
                self.problems.push(
                    self.at(name),
                    format!("unknown field \"{name}\" (expected one of {})", known.join(", ")),
                );
            }
        }
    }

    /// The pointer of a member.
    pub fn at(&self, name: &str) -> String {
        format!("{}/{}", self.pointer, name.replace('~', "~0").replace('/', "~1"))
    }

    /// The pointer of the object itself.
    pub fn pointer(&self) -> &str {
        &self.pointer
    }

    /// Where problems go.
    pub fn problems(&self) -> &'a Problems {
        self.problems
    }

    /// Whether a member is there at all.
    pub fn has(&self, name: &str) -> bool {
        self.members.contains_key(name)
    }

    /// The raw member, if there.
    pub fn get(&self, name: &str) -> Option<&'a Value> {
        self.members.get(name)
    }

    /// Notes a problem with a member.
    pub fn complain(&self, name: &str, message: impl Into<String>) {
        self.problems.push(self.at(name), message);
    }

    /// The raw member; its absence is a problem.
    pub fn required(&self, name: &str, expected: &str) -> Option<&'a Value> {
        let found = self.members.get(name);
        if found.is_none() {
            self.complain(name, format!("missing: expected {expected}"));
        }
        found
    }

    fn wrong<T>(&self, name: &str, expected: &str, value: &Value) -> Option<T> {
        self.complain(name, format!("must be {expected} (found {})", describe(value)));
        None
    }

    /// A finite number that must be there.
    pub fn number(&self, name: &str) -> Option<f64> {
        let value = self.required(name, "a number")?;
        finite(value).or_else(|| self.wrong(name, "a number", value))
    }

    /// A finite number that may be absent.
    pub fn optional_number(&self, name: &str) -> Option<f64> {
        let value = self.get(name)?;
        finite(value).or_else(|| self.wrong(name, "a number", value))
    }

    /// A number that must satisfy a condition, stated in words after "must".
    pub fn number_where(&self, name: &str, condition: impl Fn(f64) -> bool, must: &str) -> Option<f64> {
        self.checked(name, self.number(name)?, condition, must)
    }

    /// An optional number that must satisfy a condition.
    pub fn optional_number_where(
        &self,
        name: &str,
        condition: impl Fn(f64) -> bool,
        must: &str,
    ) -> Option<f64> {
        self.checked(name, self.optional_number(name)?, condition, must)
    }

    fn checked(&self, name: &str, number: f64, condition: impl Fn(f64) -> bool, must: &str) -> Option<f64> {
        if condition(number) {
            return Some(number);
        }
        self.complain(name, format!("must {must} (got {number})"));
        None
    }

    /// A probability strictly between 0 and 1.
    pub fn probability(&self, name: &str) -> Option<f64> {
        self.number_where(name, |p| p > 0.0 && p < 1.0, "lie strictly between 0 and 1")
    }

    /// A whole number within a range that must be there; `40.0` is one too.
    pub fn count(&self, name: &str, low: u64, high: u64) -> Option<u64> {
        self.required(name, "a whole number")?;
        self.optional_count(name, low, high)
    }

    /// A whole number within a range that may be absent.
    pub fn optional_count(&self, name: &str, low: u64, high: u64) -> Option<u64> {
        let value = self.get(name)?;
        let Some(number) = finite(value) else { return self.wrong(name, "a whole number", value) };
        let whole = value.as_u64().or_else(|| {
            (number.fract() == 0.0 && (0.0..=9_007_199_254_740_992.0).contains(&number))
                .then_some(number as u64)
        });
        match whole {
            Some(count) if (low..=high).contains(&count) => Some(count),
            _ if number.fract() != 0.0 => {
                self.complain(name, format!("must be a whole number (got {value})"));
                None
            }
            _ if high == u64::MAX => {
                self.complain(name, format!("must be a whole number, at least {low} (got {value})"));
                None
            }
            _ => {
                self.complain(name, format!("must lie between {low} and {high} (got {value})"));
                None
            }
        }
    }

    /// A whole number, negative ones included.
    pub fn integer(&self, name: &str) -> Option<i64> {
        let value = self.required(name, "a whole number")?;
        let Some(number) = finite(value) else { return self.wrong(name, "a whole number", value) };
        if let Some(whole) = value.as_i64() {
            return Some(whole);
        }
        if number.fract() == 0.0 && number.abs() <= 9_007_199_254_740_992.0 {
            return Some(number as i64);
        }
        self.complain(name, format!("must be a whole number of at most 15 digits (got {value})"));
        None
    }

    /// A text that must be there.
    pub fn text(&self, name: &str) -> Option<String> {
        self.required(name, "a text")?;
        self.optional_text(name)
    }

    /// A text that may be absent.
    pub fn optional_text(&self, name: &str) -> Option<String> {
        let value = self.get(name)?;
        match value.as_str() {
            Some(text) => Some(text.to_owned()),
            None => self.wrong(name, "a text", value),
        }
    }

    /// One of several words.
    pub fn word<T: Copy>(&self, name: &str, words: &[(&str, T)]) -> Option<T> {
        let expected = words.iter().map(|(word, _)| format!("\"{word}\"")).collect::<Vec<_>>().join(", ");
        let value = self.required(name, &format!("one of {expected}"))?;
        let found = value.as_str().and_then(|text| words.iter().find(|(word, _)| *word == text));
        match found {
            Some((_, meaning)) => Some(*meaning),
            None => self.wrong(name, &format!("one of {expected}"), value),
        }
    }

    /// A list that must be there; `None` if it is missing or no list.
    pub fn list(&self, name: &str, expected: &str) -> Option<&'a Vec<Value>> {
        let value = self.required(name, expected)?;
        match value.as_array() {
            Some(list) => Some(list),
            None => self.wrong(name, expected, value),
        }
    }

    /// A list of finite numbers that must be there.
    pub fn numbers(&self, name: &str) -> Option<Vec<f64>> {
        let list = self.list(name, "a list of numbers")?;
        let before = self.problems.count();
        let mut unreported = 0_usize;
        let numbers = list
            .iter()
            .enumerate()
            .filter_map(|(index, value)| {
                let number = finite(value);
                if number.is_none() {
                    if self.problems.count() - before < 10 {
                        self.problems.push(
                            format!("{}/{index}", self.at(name)),
                            format!("must be a number (found {})", describe(value)),
                        );
                    } else {
                        unreported += 1;
                    }
                }
                number
            })
            .collect::<Vec<_>>();
        if unreported > 0 {
            self.complain(name, format!("and {unreported} more entries that are not numbers"));
        }
        (numbers.len() == list.len()).then_some(numbers)
    }
}

/// The finite number a JSON value holds.
fn finite(value: &Value) -> Option<f64> {
    value.as_f64().filter(|number| number.is_finite())
}

/// What a JSON value is, for a message.
pub(super) fn describe(value: &Value) -> String {
    match value {
        Value::Null => "null".to_owned(),
        Value::Bool(truth) => truth.to_string(),
        Value::Number(number) => number.to_string(),
        Value::String(text) if text.chars().count() <= 40 => format!("the text \"{text}\""),
        Value::String(_) => "a long text".to_owned(),
        Value::Array(list) => format!("a list of {}", list.len()),
        Value::Object(_) => "an object".to_owned(),
    }
}

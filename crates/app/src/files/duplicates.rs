//! Finding members that an object of a JSON document has twice, which a plain reader would let pass silently.

use gaussgap_conclusions::Problem;
use serde::de::{DeserializeSeed, IgnoredAny};
use serde::de::{Deserializer, MapAccess, SeqAccess, Visitor};
use std::cell::RefCell;
use std::collections::BTreeSet;
use std::fmt;

/// One problem for each repeated member. Text that is no JSON gives none: the reader proper reports that.
pub fn duplicates(text: &str) -> Vec<Problem> {
    let found = RefCell::new(Vec::new());
    let mut deserializer = serde_json::Deserializer::from_str(text);
    let walk = Walk { pointer: String::new(), found: &found };
    // Only the repeated members matter here, also those before the place where the text stops being JSON.
    let _ = walk.deserialize(&mut deserializer);
    found.into_inner()
}

struct Walk<'a> {
    pointer: String,
    found: &'a RefCell<Vec<Problem>>,
}

impl Walk<'_> {
    fn inside(&self, step: &str) -> Self {
        let step = step.replace('~', "~0").replace('/', "~1");
        Self { pointer: format!("{}/{step}", self.pointer), found: self.found }
    }
}

impl<'de> DeserializeSeed<'de> for Walk<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_any(self)
    }
}

impl<'de> Visitor<'de> for Walk<'_> {
    type Value = ();

    fn expecting(&self, out: &mut fmt::Formatter) -> fmt::Result {
        out.write_str("any JSON value")
    }

    fn visit_map<A: MapAccess<'de>>(self, mut members: A) -> Result<(), A::Error> {
        let mut seen = BTreeSet::new();
        while let Some(name) = members.next_key::<String>()? {
            let inside = self.inside(&name);
            if seen.insert(name) {
                members.next_value_seed(inside)?;
            } else {
                let message = "is there twice: expected it once".to_owned();
                self.found.borrow_mut().push(Problem { pointer: inside.pointer, message });
                members.next_value::<IgnoredAny>()?;
            }
        }
        Ok(())
    }

    fn visit_seq<A: SeqAccess<'de>>(self, mut entries: A) -> Result<(), A::Error> {
        let mut index = 0_usize;
        while entries.next_element_seed(self.inside(&index.to_string()))?.is_some() {
            index += 1;
        }
        Ok(())
    }

    fn visit_bool<E>(self, _: bool) -> Result<(), E> {
        Ok(())
    }
    fn visit_i64<E>(self, _: i64) -> Result<(), E> {
        Ok(())
    }
    fn visit_u64<E>(self, _: u64) -> Result<(), E> {
        Ok(())
    }
    fn visit_f64<E>(self, _: f64) -> Result<(), E> {
        Ok(())
    }
    fn visit_str<E>(self, _: &str) -> Result<(), E> {
        Ok(())
    }
    fn visit_unit<E>(self) -> Result<(), E> {
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::duplicates;

    #[test]
    fn repeated_members_are_found_with_their_place() {
        let found = duplicates(r#"{"n": 1, "law": {"parts": [1, {"p": 0, "q": 2, "p": {"p": 1}}]}, "n": 2}"#);
        let places: Vec<&str> = found.iter().map(|problem| problem.pointer.as_str()).collect();
        assert_eq!(places, ["/law/parts/1/p", "/n"]);
        assert!(duplicates(r#"{"a": [null, true, -1, 2.5, "x"], "b": {"a": 1}}"#).is_empty());
        assert!(duplicates("{\"a\": ").is_empty());
    }
}

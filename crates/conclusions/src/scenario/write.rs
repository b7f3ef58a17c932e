//! Writing a scenario document: fields in the order of the contract, numbers that read back the same.

use super::{Scenario, Source};
use gaussgap_simulation::law::LawSpec;
use serde::{Serialize, Serializer};
use serde_json::ser::Formatter;
use std::io::{self, Write};

impl Scenario {
    /// The scenario as JSON text with every default filled in, one member per line, lists on one line. Reading it
    /// back gives an equal scenario; a `data` law loaded from a file is written as path and column.
    pub fn to_json(&self) -> String {
        let mut bytes = Vec::new();
        let mut serializer = serde_json::Serializer::with_formatter(&mut bytes, Layout::default());
        self.serialize(&mut serializer).expect("plain data with text keys always serializes into memory");
        bytes.push(b'\n');
        String::from_utf8(bytes).expect("serde_json writes UTF-8")
    }
}

/// Serializes a source without the values that were loaded from data files.
pub(super) fn source_without_loaded_values<S: Serializer>(
    source: &Source,
    serializer: S,
) -> Result<S::Ok, S::Error> {
    if !has_loaded_values(source) {
        return source.serialize(serializer);
    }
    let mut saved = source.clone();
    saved.visit_laws_mut(&mut |_, law| {
        if let LawSpec::Data { values, path: Some(_), .. } = law {
            *values = None;
        }
    });
    saved.serialize(serializer)
}

fn has_loaded_values(source: &Source) -> bool {
    let mut found = false;
    source.visit_laws(&mut |_, law| {
        found |= matches!(law, LawSpec::Data { values: Some(_), path: Some(_), .. });
    });
    found
}

/// Indents objects, keeps lists on one line, and writes whole numbers without `.0`.
#[derive(Default)]
struct Layout {
    depth: usize,
    filled: bool,
}

impl Layout {
    fn line<W: ?Sized + Write>(&self, writer: &mut W) -> io::Result<()> {
        writer.write_all(b"\n")?;
        (0..self.depth).try_for_each(|_| writer.write_all(b"  "))
    }
}

impl Formatter for Layout {
    fn write_f64<W: ?Sized + Write>(&mut self, writer: &mut W, value: f64) -> io::Result<()> {
        if value.fract() == 0.0 && value.abs() < 1e15 && (value != 0.0 || value.is_sign_positive()) {
            return write!(writer, "{}", value as i64);
        }
        write!(writer, "{value:?}")
    }

    fn begin_array_value<W: ?Sized + Write>(&mut self, writer: &mut W, first: bool) -> io::Result<()> {
        if first { Ok(()) } else { writer.write_all(b", ") }
    }

    fn begin_object<W: ?Sized + Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.depth += 1;
        self.filled = false;
        writer.write_all(b"{")
    }

    fn end_object<W: ?Sized + Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.depth -= 1;
        if self.filled {
            self.line(writer)?;
        }
        self.filled = true;
        writer.write_all(b"}")
    }

    fn begin_object_key<W: ?Sized + Write>(&mut self, writer: &mut W, first: bool) -> io::Result<()> {
        if !first {
            writer.write_all(b",")?;
        }
        self.line(writer)
    }

    fn begin_object_value<W: ?Sized + Write>(&mut self, writer: &mut W) -> io::Result<()> {
        writer.write_all(b": ")
    }

    fn end_object_value<W: ?Sized + Write>(&mut self, _writer: &mut W) -> io::Result<()> {
        self.filled = true;
        Ok(())
    }
}

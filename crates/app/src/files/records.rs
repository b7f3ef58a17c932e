//! The records of a CSV file one by one, each with the line it begins on, blank lines included.
//!
//! (The CSV reader of the library passes over blank lines without a word, and with them over missing values.)

use std::borrow::Cow;
use std::io::{self, BufRead};

/// Reads records from text with the given delimiter. Quoted cells may span lines.
pub struct Records<R> {
    source: R,
    delimiter: u8,
    bytes: Vec<u8>,
    line: u64,
    next_line: u64,
}

impl<R: BufRead> Records<R> {
    /// Begins at line 1. A byte order mark must have been taken off.
    pub fn new(source: R, delimiter: u8) -> Self {
        Self { source, delimiter, bytes: Vec::new(), line: 0, next_line: 1 }
    }

    /// Goes to the next record; false at the end.
    pub fn advance(&mut self) -> io::Result<bool> {
        self.bytes.clear();
        self.line = self.next_line;
        if self.source.read_until(b'\n', &mut self.bytes)? == 0 {
            return Ok(false);
        }
        self.next_line += 1;
        while self.bytes.contains(&b'"') && ends_inside_quotes(&self.bytes, self.delimiter) {
            if self.source.read_until(b'\n', &mut self.bytes)? == 0 {
                break;
            }
            self.next_line += 1;
        }
        if self.bytes.ends_with(b"\n") {
            self.bytes.pop();
        }
        if self.bytes.ends_with(b"\r") {
            self.bytes.pop();
        }
        Ok(true)
    }

    /// The line the record begins on, from 1.
    pub fn line(&self) -> u64 {
        self.line
    }

    /// Whether the record is a blank line.
    pub fn is_blank(&self) -> bool {
        self.bytes.iter().all(u8::is_ascii_whitespace)
    }

    /// One cell, from 0, without its quotes.
    pub fn cell(&self, index: usize) -> Option<Cow<'_, [u8]>> {
        if self.bytes.contains(&b'"') {
            return self.cells().into_iter().nth(index).map(Cow::Owned);
        }
        self.bytes.split(|&byte| byte == self.delimiter).nth(index).map(Cow::Borrowed)
    }

    /// All cells, without their quotes.
    pub fn cells(&self) -> Vec<Vec<u8>> {
        let mut reader = csv::ReaderBuilder::new()
            .delimiter(self.delimiter)
            .has_headers(false)
            .flexible(true)
            .from_reader(self.bytes.as_slice());
        let mut record = csv::ByteRecord::new();
        match reader.read_byte_record(&mut record) {
            Ok(true) => record.iter().map(<[u8]>::to_vec).collect(),
            // Reading from memory cannot fail; a blank record has one blank cell.
            _ => vec![Vec::new()],
        }
    }
}

/// Whether a quoted cell is still open at the end. Quotes count only where a cell begins, and double quotes inside
/// a quoted cell are a quote.
fn ends_inside_quotes(bytes: &[u8], delimiter: u8) -> bool {
    let (mut inside, mut at_start) = (false, true);
    let mut bytes = bytes.iter().peekable();
    while let Some(&byte) = bytes.next() {
        if inside {
            if byte == b'"' && bytes.next_if(|&&next| next == b'"').is_none() {
                inside = false;
            }
        } else if byte == b'"' && at_start {
            inside = true;
            at_start = false;
        } else {
            at_start = byte == delimiter;
        }
    }
    inside
}

#[cfg(test)]
mod tests {
    use super::*;

    fn all(text: &str) -> Vec<(u64, Vec<String>)> {
        let mut records = Records::new(text.as_bytes(), b',');
        let mut found = Vec::new();
        while records.advance().unwrap() {
            let cells =
                records.cells().iter().map(|cell| String::from_utf8_lossy(cell).into_owned()).collect();
            found.push((records.line(), cells));
        }
        found
    }

    #[test]
    fn lines_are_counted_over_blank_lines_and_quoted_breaks() {
        let text = "a,b\r\n\r\n\"x\ny, \"\"z\"\"\",2\r\n5\" pipe,3\n";
        let expected =
            [(1, vec!["a", "b"]), (2, vec![""]), (3, vec!["x\ny, \"z\"", "2"]), (5, vec!["5\" pipe", "3"])];
        let found = all(text);
        assert_eq!(found.len(), expected.len());
        for ((line, cells), (expected_line, expected_cells)) in found.iter().zip(&expected) {
            assert_eq!(line, expected_line);
            assert_eq!(cells, expected_cells);
        }
    }

    #[test]
    fn a_quote_that_is_never_closed_ends_with_the_file() {
        assert_eq!(all("a\n\"b\nc").len(), 2);
    }
}

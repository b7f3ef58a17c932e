//! Reading one column of numbers from a CSV file.
//!
//! Tolerated: a byte order mark, CRLF, quotes, and `,`, `;` or tab between the cells (whichever the first line has
//! most of); with `;` or tab a decimal comma is read as such. A first line whose cell in the column is not a number
//! is a header. Blank or non-numeric cells are never skipped: each is an error that names line, column, what was
//! found and what was expected. Rows are streamed; only the column is kept.

use super::records::Records;
use std::fmt;
use std::fs::File;
use std::io::{self, BufRead, BufReader, Read};
use std::path::{Path, PathBuf};

/// How many bad cells are listed one by one.
const LISTED: usize = 10;

/// A column could not be read.
#[derive(Debug)]
#[non_exhaustive]
pub enum ColumnError {
    /// The file could not be opened or read.
    Unreadable {
        /// The file.
        path: PathBuf,
        /// Why not.
        source: io::Error,
    },
    /// The column asked for is not there, or none was named and there are several.
    NoColumn {
        /// The file.
        path: PathBuf,
        /// What is wrong, as a clause.
        reason: String,
    },
    /// Cells that are not finite numbers.
    BadCells {
        /// The file.
        path: PathBuf,
        /// The first ones, each as a clause.
        listed: Vec<String>,
        /// How many more there are.
        more: usize,
    },
}

impl fmt::Display for ColumnError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&self.lines().join("\n"))
    }
}

impl std::error::Error for ColumnError {}

impl ColumnError {
    /// The message, one line per problem, each naming the file.
    pub fn lines(&self) -> Vec<String> {
        match self {
            Self::Unreadable { path, source } => {
                vec![format!("{}: cannot be read: {source}", path.display())]
            }
            Self::NoColumn { path, reason } => vec![format!("{}: {reason}", path.display())],
            Self::BadCells { path, listed, more } => {
                let name = path.display();
                let mut lines: Vec<String> = listed.iter().map(|cell| format!("{name}: {cell}")).collect();
                if *more > 0 {
                    lines.push(format!("{name}: and {more} more"));
                }
                lines
            }
        }
    }
}

/// Reads the numbers of one column: `column` is a header name, or a number counted from 1. Without it the file must
/// have one column only.
pub fn read_column(path: &Path, column: Option<&str>) -> Result<Vec<f64>, ColumnError> {
    let unreadable = |source| ColumnError::Unreadable { path: path.to_owned(), source };
    let file = File::open(path).map_err(unreadable)?;
    read_column_from(file, path, column)
}

/// [`read_column`] from any source; `path` is only used in messages.
pub fn read_column_from(
    source: impl Read,
    path: &Path,
    column: Option<&str>,
) -> Result<Vec<f64>, ColumnError> {
    let unreadable = |source| ColumnError::Unreadable { path: path.to_owned(), source };
    let no_column = |reason| ColumnError::NoColumn { path: path.to_owned(), reason };
    let (mut records, delimiter) = records(source).map_err(unreadable)?;
    // Blank lines before the first record hold nothing.
    while records.advance().map_err(unreadable)? && records.is_blank() {}
    let first = records.cells();
    if records.is_blank() {
        return Err(no_column("is empty, expected rows of numbers".to_owned()));
    }
    let (index, header) = find_column(&first, column, delimiter).map_err(no_column)?;
    let label = match &header {
        Some(name) if !name.is_empty() => format!("\"{name}\""),
        _ => (index + 1).to_string(),
    };

    let mut cells = Cells { delimiter, label, values: Vec::new(), listed: Vec::new(), more: 0 };
    if header.is_none() {
        cells.take(records.line(), first.get(index).map(Vec::as_slice));
    }
    let mut blank_lines = Vec::new();
    while records.advance().map_err(unreadable)? {
        if records.is_blank() {
            // In a file with one column a blank line is a blank cell, unless nothing follows it.
            if first.len() == 1 {
                blank_lines.push(records.line());
            }
            continue;
        }
        for line in blank_lines.drain(..) {
            cells.take(line, Some(b""));
        }
        cells.take(records.line(), records.cell(index).as_deref());
    }
    if cells.listed.is_empty() {
        Ok(cells.values)
    } else {
        Err(ColumnError::BadCells { path: path.to_owned(), listed: cells.listed, more: cells.more })
    }
}

/// The names in the first line of a CSV file, or `None` if its first line holds numbers only.
pub fn header_names(path: &Path) -> Result<Option<Vec<String>>, ColumnError> {
    let unreadable = |source| ColumnError::Unreadable { path: path.to_owned(), source };
    let (mut records, delimiter) = records(File::open(path).map_err(unreadable)?).map_err(unreadable)?;
    while records.advance().map_err(unreadable)? && records.is_blank() {}
    let cells = records.cells();
    let numbers_only = cells.iter().all(|cell| number(cell, delimiter).is_some());
    Ok((!numbers_only).then(|| cells.iter().map(|cell| text(cell)).collect()))
}

/// The records after a byte order mark, if there is one, and the delimiter between their cells.
fn records<R: Read>(source: R) -> io::Result<(Records<BufReader<R>>, u8)> {
    let mut source = BufReader::with_capacity(1 << 16, source);
    let start = source.fill_buf()?;
    let mark = if start.starts_with(b"\xef\xbb\xbf") { 3 } else { 0 };
    let delimiter = delimiter(&start[mark..]);
    source.consume(mark);
    Ok((Records::new(source, delimiter), delimiter))
}

/// The numbers and the bad cells met so far.
struct Cells {
    delimiter: u8,
    label: String,
    values: Vec<f64>,
    listed: Vec<String>,
    more: usize,
}

impl Cells {
    fn take(&mut self, line: u64, cell: Option<&[u8]>) {
        match cell.and_then(|cell| number(cell, self.delimiter)) {
            Some(value) if self.listed.is_empty() => self.values.push(value),
            Some(_) => {}
            None if self.listed.len() == LISTED => self.more += 1,
            None => {
                let found = match cell.map(text) {
                    None => "no cell".to_owned(),
                    Some(cell) if cell.is_empty() => "a blank cell".to_owned(),
                    Some(cell) => format!("\"{}\"", shortened(&cell)),
                };
                self.listed
                    .push(format!("line {line}, column {}: found {found}, expected a number", self.label));
            }
        }
    }
}

/// Which column is meant, and its header if the first line is one.
fn find_column(
    first: &[Vec<u8>],
    column: Option<&str>,
    delimiter: u8,
) -> Result<(usize, Option<String>), String> {
    let names: Vec<String> = first.iter().map(|cell| text(cell)).collect();
    let is_number = |index: usize| first.get(index).is_some_and(|cell| number(cell, delimiter).is_some());
    let listed = || {
        let shown: Vec<String> =
            names.iter().take(20).map(|name| format!("\"{}\"", shortened(name))).collect();
        format!("{}{}", shown.join(", "), if names.len() > 20 { ", …" } else { "" })
    };
    let Some(column) = column else {
        if names.len() > 1 {
            return Err(format!(
                "has {} columns: say which one in \"column\" (there are {})",
                names.len(),
                listed()
            ));
        }
        return Ok((0, (!is_number(0)).then(|| names[0].clone())));
    };
    let wanted = column.trim();
    let matching: Vec<usize> = (0..names.len()).filter(|&index| names[index] == wanted).collect();
    match matching[..] {
        [index] if !is_number(index) => return Ok((index, Some(names[index].clone()))),
        [_, _, ..] if !is_number(matching[0]) => {
            return Err(format!(
                "has {} columns named \"{wanted}\": say which one by its number",
                matching.len()
            ));
        }
        _ => {}
    }
    match wanted.parse::<usize>() {
        Ok(position) if (1..=names.len()).contains(&position) => {
            let index = position - 1;
            Ok((index, (!is_number(index)).then(|| names[index].clone())))
        }
        Ok(position) => {
            Err(format!("has no column {position}: it has {} (there are {})", names.len(), listed()))
        }
        Err(_) => Err(format!("has no column \"{wanted}\" (there are {})", listed())),
    }
}

/// Whichever of `,`, `;` and tab the first line has most of, outside quotes.
fn delimiter(start: &[u8]) -> u8 {
    let mut counts = [(b',', 0_usize), (b';', 0), (b'\t', 0)];
    let mut quoted = false;
    for &byte in start {
        match byte {
            b'"' => quoted = !quoted,
            b'\n' | b'\r' if !quoted => break,
            _ if !quoted => {
                if let Some(entry) = counts.iter_mut().find(|entry| entry.0 == byte) {
                    entry.1 += 1;
                }
            }
            _ => {}
        }
    }
    // A `;` or tab decides against commas: with those, commas are decimal signs.
    let [comma, semicolon, tab] = counts;
    if semicolon.1 > 0 && semicolon.1 >= tab.1 {
        b';'
    } else if tab.1 > 0 {
        b'\t'
    } else {
        comma.0
    }
}

/// The finite number in a cell, if it is one.
fn number(cell: &[u8], delimiter: u8) -> Option<f64> {
    let cell = std::str::from_utf8(cell).ok()?.trim();
    if !cell.bytes().any(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let parsed = if delimiter != b',' && cell.contains(',') && !cell.contains('.') {
        cell.replacen(',', ".", 1).parse::<f64>()
    } else {
        cell.parse::<f64>()
    };
    parsed.ok().filter(|value| value.is_finite())
}

fn text(cell: &[u8]) -> String {
    String::from_utf8_lossy(cell).trim().to_owned()
}

/// At most 40 characters, on one line.
fn shortened(cell: &str) -> String {
    let mut short: String = cell.chars().map(|c| if c.is_control() { ' ' } else { c }).take(40).collect();
    if cell.chars().count() > 40 {
        short.push('…');
    }
    short
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str, column: Option<&str>) -> Result<Vec<f64>, String> {
        read_column_from(text.as_bytes(), Path::new("pilot.csv"), column).map_err(|error| error.to_string())
    }

    #[test]
    fn columns_by_name_by_number_and_alone() {
        assert_eq!(read("day,delay\n1,2.5\n2,-3e1\n", Some("delay")).unwrap(), [2.5, -30.0]);
        assert_eq!(read("day,delay\n1,2.5\n2,-3e1\n", Some("1")).unwrap(), [1.0, 2.0]);
        assert_eq!(read("1,2.5\n2,3\n", Some("2")).unwrap(), [2.5, 3.0]);
        assert_eq!(read("delay\n4\n5", None).unwrap(), [4.0, 5.0]);
        assert_eq!(read("4\n5\n", None).unwrap(), [4.0, 5.0]);
    }

    #[test]
    fn byte_order_mark_crlf_semicolons_decimal_commas_and_quotes() {
        assert_eq!(read("\u{feff}day;delay\r\n1;2,5\r\n2;3\r\n", Some("delay")).unwrap(), [2.5, 3.0]);
        assert_eq!(read("\"day, local\",delay\n\"x\ny\", 7 \n", Some("delay")).unwrap(), [7.0]);
        assert_eq!(read("day\tdelay\n1\t9\n", Some("delay")).unwrap(), [9.0]);
    }

    #[test]
    fn bad_cells_name_line_column_found_and_expected() {
        let error = read("day,delay\n1,2.5\n2,n/a\n3,\n4\n5,inf\n6,7", Some("delay")).unwrap_err();
        assert_eq!(
            error,
            "pilot.csv: line 3, column \"delay\": found \"n/a\", expected a number\n\
             pilot.csv: line 4, column \"delay\": found a blank cell, expected a number\n\
             pilot.csv: line 5, column \"delay\": found no cell, expected a number\n\
             pilot.csv: line 6, column \"delay\": found \"inf\", expected a number"
        );
    }

    #[test]
    fn a_blank_line_in_a_single_column_is_a_blank_cell_but_not_at_the_end() {
        let error = read("delay\n1\n\n2\n", None).unwrap_err();
        assert_eq!(error, "pilot.csv: line 3, column \"delay\": found a blank cell, expected a number");
        assert_eq!(read("delay\n1\n2\n\n\n", None).unwrap(), [1.0, 2.0]);
        let error = read("\r\nday,delay\r\n\r\n1,2\r\n3,x\r\n", Some("delay")).unwrap_err();
        assert_eq!(error, "pilot.csv: line 5, column \"delay\": found \"x\", expected a number");
    }

    #[test]
    fn at_most_ten_bad_cells_are_listed() {
        let text = format!("delay\n{}", "x\n".repeat(47));
        let error = read(&text, None).unwrap_err();
        assert_eq!(error.lines().count(), 11);
        assert!(error.ends_with("pilot.csv: and 37 more"), "{error}");
    }

    #[test]
    fn missing_columns_are_explained_with_what_there_is() {
        let error = read("day,delay\n1,2\n", Some("dealy")).unwrap_err();
        assert_eq!(error, "pilot.csv: has no column \"dealy\" (there are \"day\", \"delay\")");
        let error = read("day,delay\n1,2\n", None).unwrap_err();
        assert_eq!(
            error,
            "pilot.csv: has 2 columns: say which one in \"column\" (there are \"day\", \"delay\")"
        );
        let error = read("day,delay\n1,2\n", Some("3")).unwrap_err();
        assert_eq!(error, "pilot.csv: has no column 3: it has 2 (there are \"day\", \"delay\")");
        let error = read("", Some("delay")).unwrap_err();
        assert_eq!(error, "pilot.csv: is empty, expected rows of numbers");
    }
}

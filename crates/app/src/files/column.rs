//! Reading one column of numbers from a CSV file.
//!
//! Tolerated: a byte order mark, CRLF, quotes, and `,`, `;` or tab between the cells (whichever the first line has
//! most of); with `;` or tab a decimal comma is read as such. A first line whose cell in the column is not a number
//! is a header. Blank or non-numeric cells are never skipped: each is an error that names line, column, what was
//! found and what was expected. Rows are streamed; only the column is kept.

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
    let mut source = BufReader::with_capacity(1 << 16, source);
    let start = source.fill_buf().map_err(unreadable)?;
    let mark = if start.starts_with(b"\xef\xbb\xbf") { 3 } else { 0 };
    let delimiter = delimiter(&start[mark..]);
    source.consume(mark);
    let mut reader =
        csv::ReaderBuilder::new().delimiter(delimiter).has_headers(false).flexible(true).from_reader(source);

    let mut record = csv::ByteRecord::new();
    if !next(&mut reader, &mut record).map_err(unreadable)? {
        return Err(no_column("is empty, expected rows of numbers".to_owned()));
    }
    let columns = record.len();
    let (index, header) = find_column(&record, column, delimiter).map_err(no_column)?;
    let label = match (&header, column) {
        (Some(name), _) if !name.is_empty() => format!("\"{name}\""),
        _ => (index + 1).to_string(),
    };

    let mut cells = Cells { delimiter, label, values: Vec::new(), listed: Vec::new(), more: 0 };
    let mut line = 1;
    if header.is_none() {
        cells.take(line, record.get(index));
    }
    let mut next_line = line + line_breaks(&record);
    while next(&mut reader, &mut record).map_err(unreadable)? {
        line = record.position().map_or(next_line, csv::Position::line);
        if columns == 1 {
            // The CSV reader passes over empty lines; in a file with one column they are blank cells.
            for blank in next_line..line {
                cells.take(blank, Some(b""));
            }
        }
        cells.take(line, record.get(index));
        next_line = line + line_breaks(&record);
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
    let mut source = BufReader::with_capacity(1 << 16, File::open(path).map_err(unreadable)?);
    let start = source.fill_buf().map_err(unreadable)?;
    let mark = if start.starts_with(b"\xef\xbb\xbf") { 3 } else { 0 };
    let delimiter = delimiter(&start[mark..]);
    source.consume(mark);
    let mut reader =
        csv::ReaderBuilder::new().delimiter(delimiter).has_headers(false).flexible(true).from_reader(source);
    let mut record = csv::ByteRecord::new();
    next(&mut reader, &mut record).map_err(unreadable)?;
    let numbers_only = record.iter().all(|cell| number(cell, delimiter).is_some());
    Ok((!numbers_only).then(|| record.iter().map(text).collect()))
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

/// The next record; false at the end.
fn next(reader: &mut csv::Reader<impl Read>, record: &mut csv::ByteRecord) -> io::Result<bool> {
    reader.read_byte_record(record).map_err(io::Error::other)
}

/// Which column is meant, and its header if the first line is one.
fn find_column(
    first: &csv::ByteRecord,
    column: Option<&str>,
    delimiter: u8,
) -> Result<(usize, Option<String>), String> {
    let names: Vec<String> = first.iter().map(text).collect();
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

/// Lines a record spans.
fn line_breaks(record: &csv::ByteRecord) -> u64 {
    1 + record.iter().flatten().filter(|&&byte| byte == b'\n').count() as u64
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

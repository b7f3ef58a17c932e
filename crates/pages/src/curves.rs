//! The distribution curves as CSV columns, for a spreadsheet or a plotting script.
//!
//! One header row, one table. Columns: `z_sd` (standard units: (S − E S)/sd(S)), `statistic_<unit>` (the same
//! place in the quantity's own unit, for the statistic the scenario reports; left out where the moments do not
//! exist), `at_or_below` P(Z ≤ z), `below` P(Z < z), `normal` Φ(z), and the two gaps. A row where `below` and
//! `at_or_below` differ is a jump. Numbers read back as the same double; what is not finite is an empty cell.

use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::{Source, Statistic};

/// The curves as comma-separated text (UTF-8, line feed, decimal point).
pub fn to_csv(report: &Report) -> Vec<u8> {
    let own_units = own_units(report);
    let mut header = vec!["z_sd".to_owned()];
    if let Some(own) = &own_units {
        header.push(own.column.clone());
    }
    header.extend(
        ["at_or_below", "below", "normal", "gap_at_or_below", "gap_below"]
            .map(|name| format!("{name}_probability")),
    );
    let mut text = row(header.iter().map(|name| quoted(name)));
    let curve = &report.curve;
    let points = curve.z.len().min(curve.at_or_below.len()).min(curve.below.len()).min(curve.normal.len());
    for index in 0..points {
        let (z, at, below, normal) =
            (curve.z[index], curve.at_or_below[index], curve.below[index], curve.normal[index]);
        let mut cells = vec![cell(z)];
        if let Some(own) = &own_units {
            cells.push(cell(own.mean + z * own.sd));
        }
        cells.extend([at, below, normal, at - normal, below - normal].map(cell));
        text.push_str(&row(cells));
    }
    text.into_bytes()
}

/// How standard units map to the statistic's own.
struct OwnUnits {
    column: String,
    mean: f64,
    sd: f64,
}

/// The statistic's mean and sd, with the column's name; `None` where they do not exist.
fn own_units(report: &Report) -> Option<OwnUnits> {
    let scenario = &report.scenario;
    let (name, divisor) = match (&scenario.source, scenario.statistic) {
        (Source::Like { n, .. }, Statistic::Mean) => ("mean", *n as f64),
        (Source::Groups { .. }, _) => ("difference", 1.0),
        (Source::Like { .. } | Source::Parts { .. }, _) => ("sum", 1.0),
    };
    let (mean, sd) = (report.sum.mean? / divisor, report.sum.sd? / divisor);
    let unit = scenario.quantity.as_ref().and_then(|quantity| quantity.unit.as_deref()).unwrap_or("units");
    let column = if unit.trim().is_empty() { name.to_owned() } else { format!("{name}_{}", unit.trim()) };
    Some(OwnUnits { column, mean, sd })
}

fn row(cells: impl IntoIterator<Item = String>) -> String {
    let mut line = cells.into_iter().collect::<Vec<_>>().join(",");
    line.push('\n');
    line
}

/// The shortest decimal text that reads back as the same double.
fn cell(value: f64) -> String {
    if !value.is_finite() {
        return String::new();
    }
    let magnitude = value.abs();
    if magnitude != 0.0 && !(1e-5..1e16).contains(&magnitude) {
        format!("{value:e}")
    } else {
        format!("{value}")
    }
}

/// A header cell, quoted where commas, quotes or line breaks demand it.
fn quoted(name: &str) -> String {
    if name.contains([',', '"', '\n', '\r', ';']) {
        format!("\"{}\"", name.replace('"', "\"\""))
    } else {
        name.to_owned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture;

    #[test]
    fn the_table_reads_back_bit_for_bit() {
        let mut report = fixture::exponential();
        report.curve.below[3] = 1.25e-300;
        let bytes = to_csv(&report);
        let mut reader = csv::Reader::from_reader(bytes.as_slice());
        let header: Vec<String> = reader.headers().unwrap().iter().map(str::to_owned).collect();
        assert_eq!(header[0], "z_sd");
        assert_eq!(header[1], "mean_s");
        assert_eq!(header[2], "at_or_below_probability");
        let rows: Vec<csv::StringRecord> = reader.records().map(Result::unwrap).collect();
        assert_eq!(rows.len(), report.curve.z.len());
        for (index, record) in rows.iter().enumerate() {
            for (column, expected) in [
                (0, &report.curve.z),
                (2, &report.curve.at_or_below),
                (3, &report.curve.below),
                (4, &report.curve.normal),
            ] {
                let read: f64 = record[column].parse().unwrap();
                assert_eq!(read.to_bits(), expected[index].to_bits(), "row {index} column {column}");
            }
        }
    }

    #[test]
    fn a_unit_with_a_comma_is_quoted_and_a_missing_moment_drops_the_column() {
        let mut report = fixture::exponential();
        report.scenario.quantity.as_mut().unwrap().unit = Some("kg, wet".to_owned());
        let text = String::from_utf8(to_csv(&report)).unwrap();
        assert!(text.starts_with("z_sd,\"mean_kg, wet\",at_or_below_probability"));
        report.sum.sd = None;
        let text = String::from_utf8(to_csv(&report)).unwrap();
        assert!(text.starts_with("z_sd,at_or_below_probability"));
    }

    #[test]
    fn what_is_not_finite_is_an_empty_cell() {
        assert_eq!(cell(f64::NAN), "");
        assert_eq!(cell(0.1), "0.1");
        assert_eq!(cell(1e-300), "1e-300");
        assert_eq!(cell(0.0), "0");
    }
}

//! The report as JSON text (`gaussgap-report/1`).
//!
//! Numbers are written in the shortest form that reads back as the same double. There is no `NaN` and no
//! infinity in JSON: a number that is not finite is written as null.

use gaussgap_conclusions::report::Report;

/// Why a report could not be written as JSON.
#[derive(Debug, thiserror::Error)]
#[error("the report cannot be written as JSON: {0}")]
pub struct ReportJsonError(#[from] serde_json::Error);

/// The report as an indented JSON object, for one scenario. Ends with a line break.
pub fn to_json(report: &Report) -> Result<String, ReportJsonError> {
    let mut text = serde_json::to_string_pretty(report)?;
    text.push('\n');
    Ok(text)
}

/// The report as a JSON object on one line, for several scenarios (one line each). Ends with a line break.
pub fn to_json_line(report: &Report) -> Result<String, ReportJsonError> {
    let mut text = serde_json::to_string(report)?;
    text.push('\n');
    Ok(text)
}

/// The JSON Schema of the report; see [`crate::schema`].
pub fn schema() -> serde_json::Value {
    crate::schema::report_schema()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture;

    #[test]
    fn numbers_read_back_as_the_same_double() {
        let mut report = fixture::exponential();
        report.sum.mean = Some(0.1 + 0.2);
        report.sum.sd = Some(5e-324);
        report.sum.skewness = Some(-1.797_693_134_862_315_7e308);
        let value: serde_json::Value = serde_json::from_str(&to_json(&report).unwrap()).unwrap();
        for (name, expected) in [("mean", 0.1 + 0.2), ("sd", 5e-324), ("skewness", -f64::MAX)] {
            let read = value["sum"][name].as_f64().unwrap();
            assert_eq!(read.to_bits(), f64::to_bits(expected), "{name}");
        }
        for (read, written) in
            value["curve"]["at_or_below"].as_array().unwrap().iter().zip(&report.curve.at_or_below)
        {
            assert_eq!(read.as_f64().unwrap().to_bits(), written.to_bits());
        }
    }

    #[test]
    fn what_is_not_finite_becomes_null() {
        let mut report = fixture::exponential();
        report.method.seconds = f64::NAN;
        report.sum.excess_kurtosis = Some(f64::INFINITY);
        let text = to_json(&report).unwrap();
        let value: serde_json::Value = serde_json::from_str(&text).unwrap();
        assert!(value["method"]["seconds"].is_null());
        assert!(value["sum"]["excess_kurtosis"].is_null());
    }

    #[test]
    fn several_reports_are_one_line_each() {
        let line = to_json_line(&fixture::exponential()).unwrap();
        assert_eq!(line.matches('\n').count(), 1);
        assert!(line.ends_with("}\n"));
    }
}

//! Pages (SVG, PNG), reports (JSON), curves (CSV) and schemas of an assessment. Everything here turns a
//! [`gaussgap_conclusions::report::Report`] into bytes or text; nothing here reads or writes a file.

pub mod curves;
pub mod numbers;
pub mod page;
pub mod report;
pub mod schema;

#[cfg(test)]
mod fixture;

//! The JSON Schemas of the scenario and of the report, generated from the types that read and write them.

use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::Scenario;
use serde_json::Value;

/// The JSON Schema of a report.
pub fn report_schema() -> Value {
    schemars::schema_for!(Report).to_value()
}

/// The JSON Schema of a scenario as people write it.
pub fn scenario_schema() -> Value {
    schemars::schema_for!(Scenario).to_value()
}

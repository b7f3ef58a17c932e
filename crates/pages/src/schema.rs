//! The JSON Schemas of the scenario and of the report, generated from the types that hold them.
//!
//! The types describe a scenario with every default filled in, as it stands in a report. What people write may leave
//! most of it out, but may not misspell anything: [`scenario_schema`] says that.

use gaussgap_conclusions::report::{REPORT_FORMAT, Report};
use gaussgap_conclusions::scenario::{LARGEST_N, SCENARIO_FORMAT, Scenario};
use schemars::generate::SchemaSettings;
use serde_json::{Map, Value, json};

/// The JSON Schema (draft 2020-12) of a report.
pub fn report_schema() -> Value {
    let generator = SchemaSettings::draft2020_12().for_serialize().into_generator();
    let mut schema = generator.into_root_schema_for::<Report>().to_value();
    schema["title"] = json!("Gaussgap report");
    schema["properties"]["format"] = json!({"const": REPORT_FORMAT});
    // A data law read from a file is written as path and column; otherwise the scenario in a report is whole.
    schema["$defs"]["Scenario"]["properties"]["format"] = json!({"const": SCENARIO_FORMAT});
    schema
}

/// The JSON Schema (draft 2020-12) of a scenario as people write it: only the format and a summand source are
/// required, no unknown fields.
pub fn scenario_schema() -> Value {
    let generator = SchemaSettings::draft2020_12().into_generator();
    let mut schema = generator.into_root_schema_for::<Scenario>().to_value();
    schema["title"] = json!("Gaussgap scenario");
    schema["description"] =
        json!("A planned sum or mean, and what the normal approximation is to be used for.");
    schema["required"] = json!(["format"]);
    schema["unevaluatedProperties"] = json!(false);
    if let Some(sources) = schema.as_object_mut().and_then(|object| object.remove("anyOf")) {
        // Exactly one summand source: two at once are a mistake.
        schema["oneOf"] = sources;
    }
    if let Some(method) = schema.pointer_mut("/$defs/MethodSpec").and_then(Value::as_object_mut) {
        method.remove("required");
    }
    without_null(&mut schema);
    let unit = json!({"type": "number", "exclusiveMinimum": 0, "exclusiveMaximum": 1});
    let properties = [
        ("format", json!({"const": SCENARIO_FORMAT})),
        (
            "probe_z",
            json!({"type": "array", "items": {"type": "number"}, "maxItems": 1000, "default": [-4, -3, -2, -1, 0, 1, 2, 3, 4]}),
        ),
        ("statistic", json!({"$ref": "#/$defs/Statistic", "default": "mean"})),
        ("claim", json!({"$ref": "#/$defs/Claim", "default": {"kind": "curve"}})),
        ("tolerance", json!({"$ref": "#/$defs/Tolerance", "default": {"absolute": 0.01}})),
        ("search", json!({"$ref": "#/$defs/Search", "default": {"up_to": 10_000}})),
    ];
    for (name, property) in properties {
        schema["properties"][name] = property;
    }
    restrict(&mut schema, &|name, property| match name {
        "n" | "count" | "up_to" if property["type"] == "integer" => {
            property.insert("minimum".to_owned(), json!(1));
            property.insert("maximum".to_owned(), json!(LARGEST_N));
        }
        "level" | "significance" | "probability" => {
            property.extend(unit.as_object().cloned().unwrap_or_default())
        }
        "absolute" | "relative" | "epsilon" if property["type"] == "number" => {
            property.insert("exclusiveMinimum".to_owned(), json!(0));
        }
        _ => {}
    });
    schema
}

/// A missing value is left out of a scenario, never written as null.
fn without_null(schema: &mut Value) {
    match schema {
        Value::Object(object) => {
            if let Some(Value::Array(types)) = object.get_mut("type") {
                types.retain(|kind| kind != "null");
                if let [only] = types.as_slice() {
                    let only = only.clone();
                    object.insert("type".to_owned(), only);
                }
            }
            if let Some(Value::Array(choices)) = object.get_mut("anyOf") {
                choices.retain(|choice| choice["type"] != "null");
                if let [only] = choices.as_slice() {
                    let only = only.clone();
                    object.remove("anyOf");
                    object.extend(only.as_object().cloned().unwrap_or_default());
                }
            }
            if object.get("default").is_some_and(Value::is_null) {
                object.remove("default");
            }
            object.values_mut().for_each(without_null);
        }
        Value::Array(entries) => entries.iter_mut().for_each(without_null),
        _ => {}
    }
}

/// Calls `change` for every property of every object in the schema, with its name.
fn restrict(schema: &mut Value, change: &dyn Fn(&str, &mut Map<String, Value>)) {
    match schema {
        Value::Object(object) => {
            if let Some(Value::Object(properties)) = object.get_mut("properties") {
                for (name, property) in properties.iter_mut() {
                    if let Value::Object(property) = property
                        && property.contains_key("type")
                    {
                        change(name, property);
                    }
                }
            }
            object.values_mut().for_each(|value| restrict(value, change));
        }
        Value::Array(entries) => entries.iter_mut().for_each(|value| restrict(value, change)),
        _ => {}
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_format_and_source_are_required_of_a_scenario() {
        let schema = scenario_schema();
        assert_eq!(schema["required"], json!(["format"]));
        assert_eq!(schema["unevaluatedProperties"], json!(false));
        let sources = schema["oneOf"].as_array().unwrap();
        let required: Vec<&Value> = sources.iter().map(|source| &source["required"]).collect();
        assert_eq!(required, [&json!(["law", "n"]), &json!(["parts"]), &json!(["groups"])]);
        assert_eq!(sources[0]["properties"]["n"]["maximum"], json!(1_000_000_000));
        assert!(schema["$defs"]["MethodSpec"].get("required").is_none());
        assert!(!schema.to_string().contains("\"null\""), "{schema:#}");
    }

    #[test]
    fn every_field_of_a_written_report_is_in_the_schema() {
        let schema = report_schema();
        let report = serde_json::to_value(crate::fixture::exponential()).unwrap();
        for name in report.as_object().unwrap().keys() {
            assert!(schema["properties"][name].is_object(), "{name}");
        }
        for name in schema["required"].as_array().unwrap() {
            assert!(report.get(name.as_str().unwrap()).is_some(), "{name}");
        }
        assert_eq!(schema["properties"]["format"], json!({"const": "gaussgap-report/1"}));
    }
}

//! Reading, overriding and writing scenarios: every mistake is named at its place, and nothing is lost.

use gaussgap_conclusions::Problem;
use gaussgap_conclusions::scenario::{Claim, Scenario, Source, Tolerance, apply_overrides, parse_override};
use gaussgap_simulation::law::LawSpec;
use serde_json::json;

fn problems(text: &str) -> String {
    match Scenario::parse(text) {
        Ok(_) => "accepted\n".to_owned(),
        Err(problems) => problems.iter().map(|problem| format!("{problem}\n")).collect(),
    }
}

#[test]
fn every_mistake_is_named_at_its_place() {
    let documents = [
        ("text that is no JSON", "{\n  \"format\": \"gaussgap-scenario/1\",\n  \"n\": 4O\n}"),
        ("cut off", "{\"format\": "),
        ("number out of range", "{\"format\": \"gaussgap-scenario/1\", \"n\": 1e999}"),
        ("a list", "[1, 2]"),
        ("nothing", "{}"),
        (
            "misspelt and mistyped",
            r#"{"format": "gaussgap-scenario/1", "law": {"kind": "lognormal", "mean": "48", "sd": 31, "skew": 2},
                "n": 40.5, "statistic": "median", "titel": "x", "tolerance": {"absolute": 0},
                "claim": {"kind": "interval", "levle": 0.95, "sides": "both", "spread": "known"},
                "probe_z": [0, "1", null], "search": {"up_to": 0}, "method": {"route": "exact", "draws": 10}}"#,
        ),
        (
            "nested",
            r#"{"format": "gaussgap-scenario/2", "n": 3, "law": {"kind": "mixture", "parts": [
                {"weight": 1, "law": {"kind": "cap", "law": {"kind": "gama", "shape": 1, "scale": 2}, "high": 3}},
                {"law": {"kind": "constant"}}, 7]}}"#,
        ),
        (
            "two sources",
            r#"{"format": "gaussgap-scenario/1", "law": {"kind": "poisson", "rate": 1}, "n": 3, "parts": []}"#,
        ),
        (
            "parts with a mean and an estimated spread",
            r#"{"format": "gaussgap-scenario/1", "parts": [{"law": {"kind": "poisson", "rate": 1}, "count": 3}],
                "statistic": "mean", "claim": {"kind": "interval", "level": 0.9, "sides": "two", "spread": "estimated"}}"#,
        ),
        (
            "groups",
            r#"{"format": "gaussgap-scenario/1", "groups": [{"law": {"kind": "poisson", "rate": 1}, "n": 0}], "n": 3}"#,
        ),
        (
            "data",
            r#"{"format": "gaussgap-scenario/1", "n": 3, "law": {"kind": "data", "values": [1], "tail": {"kind": "gpd"}}}"#,
        ),
        (
            "data without a column",
            r#"{"format": "gaussgap-scenario/1", "n": 3, "law": {"kind": "data", "path": "a.csv"}}"#,
        ),
        (
            "relative tolerance of a curve",
            r#"{"format": "gaussgap-scenario/1", "n": 3, "law": {"kind": "poisson", "rate": 1}, "tolerance": {"relative": 0.1}}"#,
        ),
        (
            "dependence",
            r#"{"format": "gaussgap-scenario/1", "n": 30, "law": {"kind": "poisson", "rate": 1},
                "dependence": {"kind": "without-replacement", "population": 30}}"#,
        ),
    ];
    let page = documents
        .iter()
        .map(|(name, text)| format!("-- {name}\n{}", problems(text)))
        .collect::<Vec<_>>()
        .join("\n");
    insta::assert_snapshot!(page);
}

fn smallest() -> serde_json::Value {
    json!({"format": "gaussgap-scenario/1", "law": {"kind": "exponential", "mean": 2}, "n": 40.0})
}

#[test]
fn defaults_are_filled_in_and_written() {
    let scenario = Scenario::from_value(&smallest()).expect("a valid scenario");
    assert_eq!(scenario.claim, Claim::Curve);
    assert_eq!(scenario.tolerance, Tolerance::Absolute(0.01));
    insta::assert_snapshot!(scenario.to_json());
}

#[test]
fn every_kind_of_law_round_trips() {
    let laws = json!([
        {"kind": "constant", "value": -1.5}, {"kind": "bernoulli", "p": 0.1}, {"kind": "binomial", "trials": 3, "p": 0.1},
        {"kind": "poisson", "rate": 1e-300}, {"kind": "geometric", "p": 0.3}, {"kind": "negative-binomial", "size": 2.5, "p": 0.3},
        {"kind": "discrete-uniform", "low": -3, "high": 3}, {"kind": "table", "values": [0, 0.1], "weights": [1, 2]},
        {"kind": "data", "values": [1, 2], "tail": {"kind": "generalized-pareto", "above_quantile": 0.95}},
        {"kind": "data", "path": "a.csv", "column": "b"}, {"kind": "histogram", "edges": [0, 1], "weights": [1]},
        {"kind": "normal", "mean": 0.1, "sd": 1e300}, {"kind": "uniform", "low": 0, "high": 1},
        {"kind": "exponential", "mean": 1}, {"kind": "gamma", "shape": 1, "scale": 1},
        {"kind": "weibull", "shape": 1, "scale": 1}, {"kind": "lognormal", "log_mean": 0, "log_sd": 1},
        {"kind": "lognormal", "mean": 1, "sd": 1}, {"kind": "lomax", "shape": 1, "scale": 1},
        {"kind": "pareto", "shape": 1, "minimum": 1}, {"kind": "generalized-pareto", "threshold": 0, "scale": 1, "shape": 0.1},
        {"kind": "beta", "a": 1, "b": 2, "high": 3}, {"kind": "triangular", "low": 0, "mode": 1, "high": 2},
        {"kind": "laplace", "mean": 0, "scale": 1}, {"kind": "logistic", "mean": 0, "scale": 1},
        {"kind": "student-t", "df": 3}, {"kind": "inverse-gaussian", "mean": 1, "shape": 2},
        {"kind": "formula", "density": "x^2", "low": 0, "high": 1},
        {"kind": "mixture", "parts": [{"weight": 1, "law": {"kind": "constant", "value": 0}}]},
        {"kind": "affine", "law": {"kind": "bernoulli", "p": 0.1}, "add": 1, "multiply": -2},
        {"kind": "cap", "law": {"kind": "bernoulli", "p": 0.1}, "low": 0.5},
        {"kind": "restrict", "law": {"kind": "normal", "mean": 0, "sd": 1}, "low": -1, "high": 1},
        {"kind": "round", "law": {"kind": "normal", "mean": 0, "sd": 1}, "step": 0.25},
        {"kind": "compound", "count": {"kind": "poisson", "rate": 1}, "each": {"kind": "exponential", "mean": 1}},
    ]);
    for law in laws.as_array().expect("a list") {
        let mut document = smallest();
        document["law"] = law.clone();
        let scenario =
            Scenario::from_value(&document).unwrap_or_else(|problems| panic!("{law}: {problems:?}"));
        let again =
            Scenario::parse(&scenario.to_json()).unwrap_or_else(|problems| panic!("{law}: {problems:?}"));
        assert_eq!(again, scenario, "{law}");
        // One unknown field is one problem, whatever the kind.
        document["law"]["surprise"] = json!(1);
        let problems = Scenario::from_value(&document).expect_err("an unknown field");
        assert_eq!(problems.len(), 1, "{law}: {problems:?}");
        assert_eq!(problems[0].pointer, "/law/surprise");
    }
}

#[test]
fn doubles_survive_writing_and_reading() {
    for mean in
        [0.1, 1.0 / 3.0, 5e-324, 1.7976931348623157e308, 123456789.12345679, 1e15, 1e22, 9007199254740993.0]
    {
        let mut scenario = Scenario::from_value(&smallest()).expect("a valid scenario");
        scenario.source = Source::Like { law: LawSpec::Exponential { mean }, n: 3, dependence: None };
        assert_eq!(Scenario::parse(&scenario.to_json()).expect("round trip"), scenario, "{mean}");
    }
}

#[test]
fn overrides_set_create_and_complain() {
    let mut document = smallest();
    let overrides =
        ["/n=200", "/claim/kind=quantile", "/claim/p=0.99", "/tolerance/relative=0.1", "/title=Two words"]
            .map(|text| parse_override(text).expect("well-formed"));
    apply_overrides(&mut document, &overrides).expect("settable");
    let scenario = Scenario::from_value(&document).expect("a valid scenario");
    assert_eq!(scenario.source.total(), 200);
    assert_eq!(scenario.claim, Claim::Quantile { p: 0.99 });
    assert_eq!(scenario.title.as_deref(), Some("Two words"));

    let misspelt = [("/claim/levle".to_owned(), json!(0.9))];
    apply_overrides(&mut document, &misspelt).expect("created");
    let problems = Scenario::from_value(&document).expect_err("a misspelt field");
    assert!(problems.iter().any(|problem| problem.pointer == "/claim/levle"), "{problems:?}");

    let mut document = json!({"parts": [1]});
    let impossible = [("/parts/3/law".to_owned(), json!(1)), ("/parts/0/law".to_owned(), json!(1))];
    let problems = apply_overrides(&mut document, &impossible).expect_err("no such place");
    assert_eq!(problems.len(), 2);
    assert!(parse_override("n=3").is_err() && parse_override("/n").is_err());
}

#[test]
fn loaded_data_is_not_written() {
    let mut document = smallest();
    document["law"] = json!({"kind": "affine", "add": 0, "multiply": 2,
        "law": {"kind": "data", "path": "pilot.csv", "column": "time"}});
    let mut scenario = Scenario::from_value(&document).expect("a valid scenario");
    let requests = scenario.data_requests();
    assert_eq!(requests.len(), 1);
    assert_eq!(requests[0].pointer, "/law/law");
    scenario.fill_data("/law/law", vec![1.0, 2.0, 4.0]).expect("the place exists");
    assert!(scenario.data_requests().is_empty());
    assert_eq!(scenario.check(), Ok(()));
    assert!(!scenario.to_json().contains("values"), "{}", scenario.to_json());
    let problem = scenario.fill_data("/law", vec![1.0]).expect_err("not a data law");
    assert_eq!(
        problem,
        Problem { pointer: "/law".to_owned(), message: "there is no data law at this place".to_owned() }
    );
}

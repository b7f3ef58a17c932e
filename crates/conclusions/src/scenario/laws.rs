//! Reading a summand law: which fields each kind has and of which type. Their ranges are the law's own
//! business ([`LawSpec::compile`]).

use super::fields::{Fields, Problems, describe};
use gaussgap_simulation::law::{DataTail, LawSpec, MixturePart};
use serde_json::Value;

/// Every kind of law, in the order of the documentation.
pub(super) const KINDS: &[&str] = &[
    "constant",
    "bernoulli",
    "binomial",
    "poisson",
    "geometric",
    "negative-binomial",
    "discrete-uniform",
    "table",
    "data",
    "histogram",
    "normal",
    "uniform",
    "exponential",
    "gamma",
    "weibull",
    "lognormal",
    "lomax",
    "pareto",
    "generalized-pareto",
    "beta",
    "triangular",
    "laplace",
    "logistic",
    "student-t",
    "inverse-gaussian",
    "formula",
    "mixture",
    "affine",
    "cap",
    "restrict",
    "round",
    "compound",
];

/// Laws nested deeper than this are refused, so that no document can exhaust the stack.
const DEEPEST: usize = 64;

/// Reads one law; `None` after at least one problem was noted.
pub(super) fn read_law(value: &Value, pointer: &str, problems: &Problems, depth: usize) -> Option<LawSpec> {
    if depth > DEEPEST {
        problems.push(pointer, format!("laws may be nested at most {DEEPEST} deep"));
        return None;
    }
    let fields = Fields::open(value, pointer, problems)?;
    let expected = "a kind of law, such as \"lognormal\"";
    let kind = fields.required("kind", expected)?;
    let Some(name) = kind.as_str() else {
        fields.complain("kind", format!("must be {expected} (found {})", describe(kind)));
        return None;
    };
    let before = problems.count();
    let law = read_kind(name, &fields, depth)?;
    (problems.count() == before).then_some(law)
}

/// Opens the known fields of a kind: `kind` itself and the ones named.
macro_rules! known {
    ($fields:ident, $($name:literal),*) => { $fields.only(&["kind", $($name),*]) };
}

fn read_kind(name: &str, fields: &Fields, depth: usize) -> Option<LawSpec> {
    let number = |field: &str| fields.number(field);
    let whole = |field: &str| fields.count(field, 0, u64::MAX);
    let inner = |field: &str| {
        let value = fields.required(field, "a law")?;
        read_law(value, &fields.at(field), fields.problems(), depth + 1).map(Box::new)
    };
    match name {
        "constant" => {
            known!(fields, "value");
            Some(LawSpec::Constant { value: number("value")? })
        }
        "bernoulli" => {
            known!(fields, "p");
            Some(LawSpec::Bernoulli { p: number("p")? })
        }
        "binomial" => {
            known!(fields, "trials", "p");
            let (trials, p) = (whole("trials"), number("p"));
            Some(LawSpec::Binomial { trials: trials?, p: p? })
        }
        "poisson" => {
            known!(fields, "rate");
            Some(LawSpec::Poisson { rate: number("rate")? })
        }
        "geometric" => {
            known!(fields, "p");
            Some(LawSpec::Geometric { p: number("p")? })
        }
        "negative-binomial" => {
            let (size, p) = two(fields, "size", "p");
            Some(LawSpec::NegativeBinomial { size: size?, p: p? })
        }
        "discrete-uniform" => {
            known!(fields, "low", "high");
            let (low, high) = (fields.integer("low"), fields.integer("high"));
            Some(LawSpec::DiscreteUniform { low: low?, high: high? })
        }
        "table" => {
            known!(fields, "values", "weights");
            let (values, weights) = (fields.numbers("values"), fields.numbers("weights"));
            Some(LawSpec::Table { values: values?, weights: weights? })
        }
        "data" => read_data(fields),
        "histogram" => {
            known!(fields, "edges", "weights");
            let (edges, weights) = (fields.numbers("edges"), fields.numbers("weights"));
            Some(LawSpec::Histogram { edges: edges?, weights: weights? })
        }
        "normal" => {
            let (mean, sd) = two(fields, "mean", "sd");
            Some(LawSpec::Normal { mean: mean?, sd: sd? })
        }
        "uniform" => {
            let (low, high) = two(fields, "low", "high");
            Some(LawSpec::Uniform { low: low?, high: high? })
        }
        "exponential" => {
            known!(fields, "mean");
            Some(LawSpec::Exponential { mean: number("mean")? })
        }
        "gamma" => {
            let (shape, scale) = two(fields, "shape", "scale");
            Some(LawSpec::Gamma { shape: shape?, scale: scale? })
        }
        "weibull" => {
            let (shape, scale) = two(fields, "shape", "scale");
            Some(LawSpec::Weibull { shape: shape?, scale: scale? })
        }
        "lognormal" => read_lognormal(fields),
        "lomax" => {
            let (shape, scale) = two(fields, "shape", "scale");
            Some(LawSpec::Lomax { shape: shape?, scale: scale? })
        }
        "pareto" => {
            let (shape, minimum) = two(fields, "shape", "minimum");
            Some(LawSpec::Pareto { shape: shape?, minimum: minimum? })
        }
        "generalized-pareto" => {
            known!(fields, "threshold", "scale", "shape");
            let (threshold, scale, shape) = (number("threshold"), number("scale"), number("shape"));
            Some(LawSpec::GeneralizedPareto { threshold: threshold?, scale: scale?, shape: shape? })
        }
        "beta" => {
            known!(fields, "a", "b", "low", "high");
            let (a, b) = (number("a"), number("b"));
            let (low, high) = (fields.optional_number("low"), fields.optional_number("high"));
            Some(LawSpec::Beta { a: a?, b: b?, low, high })
        }
        "triangular" => {
            known!(fields, "low", "mode", "high");
            let (low, mode, high) = (number("low"), number("mode"), number("high"));
            Some(LawSpec::Triangular { low: low?, mode: mode?, high: high? })
        }
        "laplace" => {
            let (mean, scale) = two(fields, "mean", "scale");
            Some(LawSpec::Laplace { mean: mean?, scale: scale? })
        }
        "logistic" => {
            let (mean, scale) = two(fields, "mean", "scale");
            Some(LawSpec::Logistic { mean: mean?, scale: scale? })
        }
        "student-t" => {
            known!(fields, "df", "location", "scale");
            let (location, scale) = (fields.optional_number("location"), fields.optional_number("scale"));
            Some(LawSpec::StudentT { df: number("df")?, location, scale })
        }
        "inverse-gaussian" => {
            let (mean, shape) = two(fields, "mean", "shape");
            Some(LawSpec::InverseGaussian { mean: mean?, shape: shape? })
        }
        "formula" => {
            known!(fields, "density", "low", "high");
            let density = fields.text("density");
            let (low, high) = (number("low"), number("high"));
            Some(LawSpec::Formula { density: density?, low: low?, high: high? })
        }
        "mixture" => {
            known!(fields, "parts");
            read_mixture(fields, depth)
        }
        "affine" => {
            known!(fields, "law", "add", "multiply");
            let law = inner("law");
            let (add, multiply) = (number("add"), number("multiply"));
            Some(LawSpec::Affine { law: law?, add: add?, multiply: multiply? })
        }
        "cap" => {
            let law = inner("law");
            let (low, high) = limits(fields);
            Some(LawSpec::Cap { law: law?, low, high })
        }
        "restrict" => {
            let law = inner("law");
            let (low, high) = limits(fields);
            Some(LawSpec::Restrict { law: law?, low, high })
        }
        "round" => {
            known!(fields, "law", "step");
            let law = inner("law");
            let step = number("step");
            Some(LawSpec::Round { law: law?, step: step? })
        }
        "compound" => {
            known!(fields, "count", "each");
            let (count, each) = (inner("count"), inner("each"));
            Some(LawSpec::Compound { count: count?, each: each? })
        }
        unknown => {
            fields.complain(
                "kind",
                format!("unknown law \"{unknown}\" (expected one of {})", KINDS.join(", ")),
            );
            None
        }
    }
}

/// The two numbers of a two-parameter kind.
fn two(fields: &Fields, first: &'static str, second: &'static str) -> (Option<f64>, Option<f64>) {
    fields.only(&["kind", first, second]);
    (fields.number(first), fields.number(second))
}

/// The limits of `cap` and `restrict`: at least one.
fn limits(fields: &Fields) -> (Option<f64>, Option<f64>) {
    known!(fields, "law", "low", "high");
    if !fields.has("low") && !fields.has("high") {
        fields.problems().push(fields.pointer(), "needs a limit: \"low\", \"high\" or both");
    }
    (fields.optional_number("low"), fields.optional_number("high"))
}

fn read_lognormal(fields: &Fields) -> Option<LawSpec> {
    known!(fields, "log_mean", "log_sd", "mean", "sd");
    let logs = fields.has("log_mean") || fields.has("log_sd");
    let plain = fields.has("mean") || fields.has("sd");
    if logs && plain {
        fields.problems().push(
            fields.pointer(),
            "give either \"log_mean\" and \"log_sd\" or \"mean\" and \"sd\", not both",
        );
        return None;
    }
    if logs {
        let (log_mean, log_sd) = (fields.number("log_mean"), fields.number("log_sd"));
        return Some(LawSpec::Lognormal {
            log_mean: Some(log_mean?),
            log_sd: Some(log_sd?),
            mean: None,
            sd: None,
        });
    }
    let (mean, sd) = (fields.number("mean"), fields.number("sd"));
    Some(LawSpec::Lognormal { log_mean: None, log_sd: None, mean: Some(mean?), sd: Some(sd?) })
}

fn read_mixture(fields: &Fields, depth: usize) -> Option<LawSpec> {
    let list = fields.list("parts", "a list of parts, each {\"weight\", \"law\"}")?;
    if list.is_empty() {
        fields.complain("parts", "must hold at least one part (found none)");
        return None;
    }
    let parts = list
        .iter()
        .enumerate()
        .map(|(index, value)| {
            let part = Fields::open(value, &format!("{}/{index}", fields.at("parts")), fields.problems())?;
            part.only(&["weight", "law"]);
            let weight = part.number("weight");
            let law = part.required("law", "a law");
            let law = law.and_then(|law| read_law(law, &part.at("law"), fields.problems(), depth + 1));
            Some(MixturePart { weight: weight?, law: law? })
        })
        .collect::<Vec<_>>();
    Some(LawSpec::Mixture { parts: parts.into_iter().collect::<Option<_>>()? })
}

fn read_data(fields: &Fields) -> Option<LawSpec> {
    known!(fields, "values", "path", "column", "tail");
    let tail = fields.get("tail").and_then(|value| read_tail(value, fields));
    match (fields.has("values"), fields.has("path") || fields.has("column")) {
        (true, true) => {
            fields
                .problems()
                .push(fields.pointer(), "give either \"values\" or \"path\" and \"column\", not both");
            None
        }
        (false, false) => {
            fields.problems().push(fields.pointer(), "needs \"values\", or \"path\" and \"column\"");
            None
        }
        (true, false) => {
            let values = fields.numbers("values")?;
            if values.len() < 2 {
                fields.complain("values", format!("must hold at least two values (found {})", values.len()));
            }
            Some(LawSpec::Data { values: Some(values), path: None, column: None, tail })
        }
        (false, true) => {
            let path = fields.text("path");
            let column = match fields.get("column") {
                Some(Value::Number(number)) if number.is_u64() => Some(number.to_string()),
                _ => fields.text("column"),
            };
            Some(LawSpec::Data { values: None, path: Some(path?), column: Some(column?), tail })
        }
    }
}

fn read_tail(value: &Value, fields: &Fields) -> Option<DataTail> {
    let tail = Fields::open(value, &fields.at("tail"), fields.problems())?;
    tail.only(&["kind", "above_quantile"]);
    let kind = tail.word("kind", &[("generalized-pareto", ())]);
    let above_quantile = tail.probability("above_quantile");
    kind?;
    Some(DataTail::GeneralizedPareto { above_quantile: above_quantile? })
}

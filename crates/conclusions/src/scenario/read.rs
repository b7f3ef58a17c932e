//! Reading a scenario document, naming every mistake in it with its place.

use super::fields::{Fields, Problems, describe};
use super::laws::read_law;
use super::{
    Claim, Dependence, Direction, Group, MethodSpec, Part, Quantity, SCENARIO_FORMAT, Scenario, Search,
    Sides, Source, Spread, Statistic, Tolerance,
};
use crate::Problem;
use gaussgap_simulation::sum::RouteChoice;
use serde_json::Value;

/// The largest number of summands.
pub const LARGEST_N: u64 = 1_000_000_000;

/// The most probe points of a scenario.
const MOST_PROBES: usize = 1000;

const MEMBERS: &[&str] = &[
    "format",
    "title",
    "notes",
    "quantity",
    "law",
    "n",
    "parts",
    "groups",
    "dependence",
    "statistic",
    "claim",
    "tolerance",
    "method",
    "probe_z",
    "search",
];

impl Scenario {
    /// Reads a scenario from JSON text. Text that is no JSON at all is one problem with an empty pointer and the
    /// line and column in its message; otherwise every problem found is listed, each with its JSON pointer.
    pub fn parse(text: &str) -> Result<Self, Vec<Problem>> {
        Self::from_value(&Self::parse_json(text)?)
    }

    /// Reads JSON text without judging what is in it, for callers that override fields before
    /// [`Scenario::from_value`]. A byte-order mark is tolerated.
    pub fn parse_json(text: &str) -> Result<Value, Vec<Problem>> {
        let text = text.strip_prefix('\u{feff}').unwrap_or(text);
        serde_json::from_str(text).map_err(|error| {
            let said = error.to_string();
            let what = said.split(" at line ").next().unwrap_or(&said);
            vec![Problem {
                pointer: String::new(),
                message: format!("line {}, column {}: {what}", error.line(), error.column()),
            }]
        })
    }

    /// Reads a scenario from a JSON value. Numbers must be finite; whole numbers may be written `40.0`.
    pub fn from_value(value: &Value) -> Result<Self, Vec<Problem>> {
        let problems = Problems::default();
        let scenario = read_scenario(value, &problems);
        match scenario {
            Some(scenario) if problems.count() == 0 => Ok(scenario),
            _ => {
                debug_assert!(problems.count() > 0, "a scenario was refused without a reason");
                Err(problems.into_vec())
            }
        }
    }
}

fn read_scenario(value: &Value, problems: &Problems) -> Option<Scenario> {
    let fields = Fields::open(value, "", problems)?;
    fields.only(MEMBERS);
    if let Some(format) = fields.text("format")
        && format != SCENARIO_FORMAT
    {
        fields.complain("format", format!("must be \"{SCENARIO_FORMAT}\" (found \"{format}\")"));
    }
    let source = read_source(&fields);
    let title = fields.optional_text("title");
    let notes = fields.optional_text("notes");
    let quantity = fields.get("quantity").and_then(|value| read_quantity(value, &fields));
    let statistic = if fields.has("statistic") {
        fields.word("statistic", &[("mean", Statistic::Mean), ("sum", Statistic::Sum)])
    } else {
        None
    };
    let claim = fields.get("claim").and_then(|value| read_claim(value, &fields));
    let tolerance = fields.get("tolerance").and_then(|value| read_tolerance(value, &fields));
    let method = fields.get("method").and_then(|value| read_method(value, &fields));
    let probe_z = if fields.has("probe_z") { fields.numbers("probe_z") } else { None };
    if let Some(probes) = &probe_z
        && probes.len() > MOST_PROBES
    {
        fields
            .complain("probe_z", format!("must hold at most {MOST_PROBES} values (found {})", probes.len()));
    }
    let search = fields.get("search").and_then(|value| {
        let search = Fields::open(value, &fields.at("search"), problems)?;
        search.only(&["up_to"]);
        search.count("up_to", 1, LARGEST_N).map(|up_to| Search { up_to })
    });

    let mut scenario = Scenario::new(source?);
    scenario.title = title;
    scenario.notes = notes;
    scenario.quantity = quantity;
    scenario.statistic = statistic.unwrap_or(scenario.statistic);
    scenario.claim = claim.unwrap_or(scenario.claim);
    scenario.tolerance = tolerance.unwrap_or(scenario.tolerance);
    scenario.method = method.unwrap_or(scenario.method);
    scenario.probe_z = probe_z.unwrap_or(scenario.probe_z);
    scenario.search = search.unwrap_or(scenario.search);
    for problem in scenario.contradictions() {
        problems.push(problem.pointer, problem.message);
    }
    Some(scenario)
}

fn read_source(fields: &Fields) -> Option<Source> {
    let given = ["law", "parts", "groups"].into_iter().filter(|name| fields.has(name)).collect::<Vec<_>>();
    match given.as_slice() {
        ["law"] => read_like(fields),
        ["parts"] => {
            refuse_beside(fields, "parts", &["n", "dependence"]);
            read_parts(fields)
        }
        ["groups"] => {
            refuse_beside(fields, "groups", &["n", "dependence"]);
            read_groups(fields)
        }
        [] => {
            fields.problems().push("", "needs summands: \"law\" and \"n\", or \"parts\", or \"groups\"");
            None
        }
        several => {
            let names = several.iter().map(|name| format!("\"{name}\"")).collect::<Vec<_>>().join(" and ");
            fields
                .problems()
                .push("", format!("give exactly one of \"law\", \"parts\", \"groups\" (found {names})"));
            None
        }
    }
}

fn refuse_beside(fields: &Fields, source: &str, names: &[&str]) {
    for name in names.iter().filter(|name| fields.has(name)) {
        fields.complain(name, format!("belongs to \"law\", not to \"{source}\""));
    }
}

fn read_like(fields: &Fields) -> Option<Source> {
    let law = fields.get("law").and_then(|value| read_law(value, "/law", fields.problems(), 0));
    let n = fields.count("n", 1, LARGEST_N);
    let dependence = fields.get("dependence").map(|value| read_dependence(value, fields));
    let (law, n) = (law?, n?);
    match dependence {
        None => Some(Source::Like { law, n, dependence: None }),
        Some(dependence) => Some(Source::Like { law, n, dependence: Some(dependence?) }),
    }
}

fn read_parts(fields: &Fields) -> Option<Source> {
    let list = fields.list("parts", "a list of parts, each {\"law\", \"count\"}")?;
    if list.is_empty() {
        fields.complain("parts", "must hold at least one part (found none)");
        return None;
    }
    let parts = list.iter().enumerate().map(|(index, value)| {
        let part = Fields::open(value, &format!("/parts/{index}"), fields.problems())?;
        part.only(&["law", "count"]);
        let law = part.required("law", "a law");
        let law = law.and_then(|law| read_law(law, &part.at("law"), fields.problems(), 0));
        let count = part.count("count", 1, LARGEST_N);
        Some(Part { law: law?, count: count? })
    });
    let parts = parts.collect::<Vec<_>>().into_iter().collect::<Option<Vec<_>>>()?;
    let total = parts.iter().map(|part| part.count).sum::<u64>();
    if total > LARGEST_N {
        fields.complain("parts", format!("the counts together must be at most {LARGEST_N} (got {total})"));
    }
    Some(Source::Parts { parts })
}

fn read_groups(fields: &Fields) -> Option<Source> {
    let list = fields.list("groups", "a list of two groups, each {\"law\", \"n\"}")?;
    if list.len() != 2 {
        fields.complain("groups", format!("must hold exactly two groups (found {})", list.len()));
        return None;
    }
    let groups = list.iter().enumerate().map(|(index, value)| {
        let group = Fields::open(value, &format!("/groups/{index}"), fields.problems())?;
        group.only(&["law", "n"]);
        let law = group.required("law", "a law");
        let law = law.and_then(|law| read_law(law, &group.at("law"), fields.problems(), 0));
        let n = group.count("n", 1, LARGEST_N);
        Some(Group { law: law?, n: n? })
    });
    let groups = groups.collect::<Vec<_>>().into_iter().collect::<Option<Vec<_>>>()?;
    let groups: [Group; 2] = groups.try_into().ok()?;
    if groups[0].n + groups[1].n > LARGEST_N {
        let total = groups[0].n + groups[1].n;
        fields.complain("groups", format!("the two n together must be at most {LARGEST_N} (got {total})"));
    }
    Some(Source::Groups { groups })
}

fn read_dependence(value: &Value, fields: &Fields) -> Option<Dependence> {
    #[derive(Clone, Copy)]
    enum Kind {
        MovingAverage,
        Autoregressive,
        WithoutReplacement,
    }
    let dependence = Fields::open(value, "/dependence", fields.problems())?;
    let kinds = [
        ("moving-average", Kind::MovingAverage),
        ("autoregressive", Kind::Autoregressive),
        ("without-replacement", Kind::WithoutReplacement),
    ];
    match dependence.word("kind", &kinds)? {
        Kind::MovingAverage => {
            dependence.only(&["kind", "weights"]);
            let weights = dependence.numbers("weights")?;
            if weights.iter().all(|weight| *weight == 0.0) {
                dependence.complain("weights", "must hold at least one weight other than 0");
            }
            Some(Dependence::MovingAverage { weights })
        }
        Kind::Autoregressive => {
            dependence.only(&["kind", "correlation"]);
            let correlation =
                dependence.number_where("correlation", |r| r.abs() < 1.0, "lie strictly between -1 and 1")?;
            Some(Dependence::Autoregressive { correlation })
        }
        Kind::WithoutReplacement => {
            dependence.only(&["kind", "population"]);
            Some(Dependence::WithoutReplacement { population: dependence.count("population", 2, LARGEST_N)? })
        }
    }
}

fn read_quantity(value: &Value, fields: &Fields) -> Option<Quantity> {
    let quantity = Fields::open(value, "/quantity", fields.problems())?;
    quantity.only(&["name", "unit"]);
    Some(Quantity { name: quantity.optional_text("name"), unit: quantity.optional_text("unit") })
}

fn read_claim(value: &Value, fields: &Fields) -> Option<Claim> {
    let claim = Fields::open(value, "/claim", fields.problems())?;
    let expected = "one of \"curve\", \"interval\", \"test\", \"threshold\", \"quantile\", \"deviation\"";
    let kind = claim.required("kind", expected)?;
    match kind.as_str() {
        Some("curve") => {
            claim.only(&["kind"]);
            Some(Claim::Curve)
        }
        Some("interval") => {
            claim.only(&["kind", "level", "sides", "spread"]);
            let (level, sides, spread) =
                (claim.probability("level"), read_sides(&claim), read_spread(&claim));
            Some(Claim::Interval { level: level?, sides: sides?, spread: spread? })
        }
        Some("test") => {
            claim.only(&["kind", "significance", "sides", "spread", "shift"]);
            let significance = claim.probability("significance");
            let (sides, spread) = (read_sides(&claim), read_spread(&claim));
            let shift = claim.optional_number("shift");
            Some(Claim::Test { significance: significance?, sides: sides?, spread: spread?, shift })
        }
        Some("threshold") => {
            claim.only(&["kind", "at", "direction"]);
            let at = claim.number("at");
            let words = [("at-most", Direction::AtMost), ("at-least", Direction::AtLeast)];
            let direction = claim.word("direction", &words);
            Some(Claim::Threshold { at: at?, direction: direction? })
        }
        Some("quantile") => {
            claim.only(&["kind", "p"]);
            Some(Claim::Quantile { p: claim.probability("p")? })
        }
        Some("deviation") => {
            claim.only(&["kind", "epsilon", "probability"]);
            let epsilon = claim.number_where("epsilon", |epsilon| epsilon > 0.0, "be greater than 0");
            let probability = claim.optional_number_where(
                "probability",
                |p| p > 0.0 && p < 1.0,
                "lie strictly between 0 and 1",
            );
            Some(Claim::Deviation { epsilon: epsilon?, probability })
        }
        _ => {
            claim.complain("kind", format!("must be {expected} (found {})", describe(kind)));
            None
        }
    }
}

fn read_sides(claim: &Fields) -> Option<Sides> {
    claim.word("sides", &[("two", Sides::Two), ("lower", Sides::Lower), ("upper", Sides::Upper)])
}

fn read_spread(claim: &Fields) -> Option<Spread> {
    claim.word("spread", &[("known", Spread::Known), ("estimated", Spread::Estimated)])
}

fn read_tolerance(value: &Value, fields: &Fields) -> Option<Tolerance> {
    let tolerance = Fields::open(value, "/tolerance", fields.problems())?;
    tolerance.only(&["absolute", "relative"]);
    let positive = |name| tolerance.number_where(name, |size: f64| size > 0.0, "be greater than 0");
    match (tolerance.has("absolute"), tolerance.has("relative")) {
        (true, false) => positive("absolute").map(Tolerance::Absolute),
        (false, true) => positive("relative").map(Tolerance::Relative),
        (both, _) => {
            let found = if both { "both" } else { "neither" };
            let message = format!("must hold exactly one of \"absolute\" and \"relative\" (found {found})");
            fields.problems().push("/tolerance", message);
            None
        }
    }
}

fn read_method(value: &Value, fields: &Fields) -> Option<MethodSpec> {
    let method = Fields::open(value, "/method", fields.problems())?;
    method.only(&["route", "draws", "seed", "confidence"]);
    let default = MethodSpec::default();
    let routes = [
        ("auto", RouteChoice::Auto),
        ("closed-form", RouteChoice::ClosedForm),
        ("lattice", RouteChoice::Lattice),
        ("inversion", RouteChoice::Inversion),
        ("simulation", RouteChoice::Simulation),
    ];
    let route = if method.has("route") { method.word("route", &routes) } else { None };
    let draws = method.optional_count("draws", 1000, 1_000_000_000_000);
    let seed = method.optional_count("seed", 0, u64::MAX);
    let confidence = method.optional_number_where(
        "confidence",
        |c| (0.5..1.0).contains(&c),
        "be at least 0.5 and less than 1",
    );
    Some(MethodSpec {
        route: route.unwrap_or(default.route),
        draws: draws.unwrap_or(default.draws),
        seed: seed.unwrap_or(default.seed),
        confidence: confidence.unwrap_or(default.confidence),
    })
}

//! A summand law in a few words.

use super::numbers::{exact, percent, whole};
use gaussgap_simulation::law::{DataTail, LawSpec};

/// A law in a few words: `lognormal (mean 48, sd 31), capped at 300`. Numbers carry no unit.
pub fn describe_law(law: &LawSpec) -> String {
    match law {
        LawSpec::Constant { value } => format!("constant {}", exact(*value)),
        LawSpec::Bernoulli { p } => format!("Bernoulli (p {})", exact(*p)),
        LawSpec::Binomial { trials, p } => format!("binomial ({} trials, p {})", whole(*trials), exact(*p)),
        LawSpec::Poisson { rate } => format!("Poisson (rate {})", exact(*rate)),
        LawSpec::Geometric { p } => format!("geometric (p {})", exact(*p)),
        LawSpec::NegativeBinomial { size, p } => with("negative binomial", &[("size", *size), ("p", *p)]),
        LawSpec::DiscreteUniform { low, high } => {
            format!("whole numbers from {low} to {high}, equally likely")
        }
        LawSpec::Table { values, .. } => format!("table of {} values", whole(values.len() as u64)),
        LawSpec::Data { values, path, column, tail } => {
            data(values.as_deref(), path.as_deref(), column.as_deref(), tail)
        }
        LawSpec::Histogram { weights, .. } => format!("histogram of {} bins", whole(weights.len() as u64)),
        LawSpec::Normal { mean, sd } => with("normal", &[("mean", *mean), ("sd", *sd)]),
        LawSpec::Uniform { low, high } => format!("uniform from {} to {}", exact(*low), exact(*high)),
        LawSpec::Exponential { mean } => with("exponential", &[("mean", *mean)]),
        LawSpec::Gamma { shape, scale } => with("gamma", &[("shape", *shape), ("scale", *scale)]),
        LawSpec::Weibull { shape, scale } => with("Weibull", &[("shape", *shape), ("scale", *scale)]),
        LawSpec::Lognormal { log_mean, log_sd, mean, sd } => {
            let given = [("log mean", log_mean), ("log sd", log_sd), ("mean", mean), ("sd", sd)];
            let given = given.iter().filter_map(|(name, value)| value.map(|value| (*name, value)));
            with("lognormal", &given.collect::<Vec<_>>())
        }
        LawSpec::Lomax { shape, scale } => with("Lomax", &[("shape", *shape), ("scale", *scale)]),
        LawSpec::Pareto { shape, minimum } => with("Pareto", &[("shape", *shape), ("minimum", *minimum)]),
        LawSpec::GeneralizedPareto { threshold, scale, shape } => {
            with("generalized Pareto", &[("threshold", *threshold), ("scale", *scale), ("shape", *shape)])
        }
        LawSpec::Beta { a, b, low, high } => {
            let law = with("beta", &[("a", *a), ("b", *b)]);
            match (low, high) {
                (None, None) => law,
                _ => format!("{law} from {} to {}", exact(low.unwrap_or(0.0)), exact(high.unwrap_or(1.0))),
            }
        }
        LawSpec::Triangular { low, mode, high } => {
            with("triangular", &[("low", *low), ("mode", *mode), ("high", *high)])
        }
        LawSpec::Laplace { mean, scale } => with("Laplace", &[("mean", *mean), ("scale", *scale)]),
        LawSpec::Logistic { mean, scale } => with("logistic", &[("mean", *mean), ("scale", *scale)]),
        LawSpec::StudentT { df, location, scale } => {
            let mut given = vec![("df", *df)];
            given.extend(location.map(|location| ("location", location)));
            given.extend(scale.map(|scale| ("scale", scale)));
            with("Student t", &given)
        }
        LawSpec::InverseGaussian { mean, shape } => {
            with("inverse Gaussian", &[("mean", *mean), ("shape", *shape)])
        }
        LawSpec::Formula { density, low, high } => {
            format!("density {} from {} to {}", shortened(density, 40), exact(*low), exact(*high))
        }
        LawSpec::Mixture { parts } => {
            let total = parts.iter().map(|part| part.weight).sum::<f64>();
            let described = parts
                .iter()
                .map(|part| {
                    format!("{} {}", percent(round_share(part.weight / total)), describe_law(&part.law))
                })
                .collect::<Vec<_>>();
            match described.as_slice() {
                [one] => one.clone(),
                _ => format!("mixture of {}", joined(&described)),
            }
        }
        LawSpec::Affine { law, add, multiply } => match (*add == 0.0, *multiply == 1.0) {
            (true, true) => describe_law(law),
            (true, false) => format!("{} times {}", exact(*multiply), grouped(law)),
            (false, true) if *add < 0.0 => format!("{} less {}", grouped(law), exact(-add)),
            (false, true) => format!("{} plus {}", grouped(law), exact(*add)),
            (false, false) => format!("{} plus {} times {}", exact(*add), exact(*multiply), grouped(law)),
        },
        LawSpec::Cap { law, low, high } => {
            format!("{}, capped {}", describe_law(law), limits(*low, *high, "at"))
        }
        LawSpec::Restrict { law, low, high } => {
            format!("{}, restricted to {}", describe_law(law), bounds(*low, *high))
        }
        LawSpec::Round { law, step } => format!("{}, rounded to {}", describe_law(law), exact(*step)),
        LawSpec::Compound { count, each } => {
            format!("sum of a random number ({}) of {}", describe_law(count), grouped(each))
        }
    }
}

fn with(name: &str, parameters: &[(&str, f64)]) -> String {
    let listed =
        parameters.iter().map(|(name, value)| format!("{name} {}", exact(*value))).collect::<Vec<_>>();
    format!("{name} ({})", listed.join(", "))
}

fn data(values: Option<&[f64]>, path: Option<&str>, column: Option<&str>, tail: &Option<DataTail>) -> String {
    let count = values.map(|values| format!("{} values", whole(values.len() as u64)));
    let place = path.map(|path| match column {
        Some(column) => format!("{path}, column {column}"),
        None => path.to_owned(),
    });
    let inside = [count, place].into_iter().flatten().collect::<Vec<_>>().join(" from ");
    let fitted = if tail.is_some() { " with a fitted tail" } else { "" };
    format!("pilot data ({inside}){fitted}")
}

fn grouped(law: &LawSpec) -> String {
    match law {
        LawSpec::Mixture { .. } | LawSpec::Affine { .. } | LawSpec::Cap { .. } | LawSpec::Restrict { .. } => {
            format!("[{}]", describe_law(law))
        }
        _ => describe_law(law),
    }
}

fn limits(low: Option<f64>, high: Option<f64>, word: &str) -> String {
    match (low, high) {
        (Some(low), Some(high)) => format!("{word} {} and {}", exact(low), exact(high)),
        (Some(low), None) => format!("below {word} {}", exact(low)),
        (None, Some(high)) => format!("{word} {}", exact(high)),
        (None, None) => "nowhere".to_owned(),
    }
}

fn bounds(low: Option<f64>, high: Option<f64>) -> String {
    match (low, high) {
        (Some(low), Some(high)) => format!("{} to {}", exact(low), exact(high)),
        (Some(low), None) => format!("at least {}", exact(low)),
        (None, Some(high)) => format!("at most {}", exact(high)),
        (None, None) => "everything".to_owned(),
    }
}

/// A share rounded to three significant digits, so that thirds read well.
fn round_share(share: f64) -> f64 {
    format!("{share:.2e}").parse().unwrap_or(share)
}

fn joined(parts: &[String]) -> String {
    match parts {
        [] => String::new(),
        [one] => one.clone(),
        [most @ .., last] => format!("{} and {last}", most.join(", ")),
    }
}

fn shortened(text: &str, limit: usize) -> String {
    if text.chars().count() <= limit {
        return text.to_owned();
    }
    text.chars().take(limit - 1).chain(['…']).collect()
}

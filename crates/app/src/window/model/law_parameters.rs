//! The parameters of each law as a list of named, typed fields: what a card shows and an edit changes.

use gaussgap_simulation::law::{DataTail, LawSpec};

/// A parameter inside a law, to read or to change.
#[derive(Debug)]
pub enum Parameter<'a> {
    /// A real number in the quantity's unit.
    Amount(&'a mut f64),
    /// A real number in the quantity's unit, or none.
    Limit(&'a mut Option<f64>),
    /// A real number without a unit (a shape).
    Shape(&'a mut f64),
    /// A probability.
    Share(&'a mut f64),
    /// A whole number from 1.
    Count(&'a mut u64),
    /// A whole number.
    Whole(&'a mut i64),
    /// A list of numbers.
    Numbers(&'a mut Vec<f64>),
    /// A text.
    Text(&'a mut String),
}

/// The value of a parameter, as read or to be set.
#[derive(Debug, Clone, PartialEq)]
pub enum Value {
    /// Any real parameter.
    Real(f64),
    /// A limit that may be absent.
    Limit(Option<f64>),
    /// A whole number.
    Whole(i64),
    /// A list.
    Numbers(Vec<f64>),
    /// A text.
    Text(String),
}

/// How a parameter is edited.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Style {
    /// A real number in the quantity's unit.
    Amount,
    /// The same, may be empty.
    Limit,
    /// A real number without a unit.
    Shape,
    /// A probability; `2.5%` is welcome.
    Share,
    /// A whole number within these ends.
    Whole(i64, i64),
    /// A list of numbers.
    Numbers,
    /// A text.
    Text,
}

/// The parameters of a law, by their scenario names, in the order of the contract. Nested laws are not parameters.
pub fn parameters(law: &mut LawSpec) -> Vec<(&'static str, Parameter<'_>)> {
    use Parameter::{Amount, Count, Limit, Numbers, Shape, Share, Text, Whole};
    match law {
        LawSpec::Constant { value } => vec![("value", Amount(value))],
        LawSpec::Bernoulli { p } | LawSpec::Geometric { p } => vec![("p", Share(p))],
        LawSpec::Binomial { trials, p } => vec![("trials", Count(trials)), ("p", Share(p))],
        LawSpec::Poisson { rate } => vec![("rate", Shape(rate))],
        LawSpec::NegativeBinomial { size, p } => vec![("size", Shape(size)), ("p", Share(p))],
        LawSpec::DiscreteUniform { low, high } => vec![("low", Whole(low)), ("high", Whole(high))],
        LawSpec::Table { values, weights } => {
            vec![("values", Numbers(values)), ("weights", Numbers(weights))]
        }
        LawSpec::Data { tail, .. } => match tail {
            Some(DataTail::GeneralizedPareto { above_quantile }) => {
                vec![("tail/above_quantile", Share(above_quantile))]
            }
            None => Vec::new(),
        },
        LawSpec::Histogram { edges, weights } => {
            vec![("edges", Numbers(edges)), ("weights", Numbers(weights))]
        }
        LawSpec::Normal { mean, sd } => vec![("mean", Amount(mean)), ("sd", Amount(sd))],
        LawSpec::Uniform { low, high } => vec![("low", Amount(low)), ("high", Amount(high))],
        LawSpec::Exponential { mean } => vec![("mean", Amount(mean))],
        LawSpec::Gamma { shape, scale }
        | LawSpec::Weibull { shape, scale }
        | LawSpec::Lomax { shape, scale } => {
            vec![("shape", Shape(shape)), ("scale", Amount(scale))]
        }
        LawSpec::Lognormal { log_mean: Some(log_mean), log_sd: Some(log_sd), .. } => {
            vec![("log_mean", Shape(log_mean)), ("log_sd", Shape(log_sd))]
        }
        LawSpec::Lognormal { mean: Some(mean), sd: Some(sd), .. } => {
            vec![("mean", Amount(mean)), ("sd", Amount(sd))]
        }
        LawSpec::Lognormal { .. } => Vec::new(),
        LawSpec::Pareto { shape, minimum } => vec![("shape", Shape(shape)), ("minimum", Amount(minimum))],
        LawSpec::GeneralizedPareto { threshold, scale, shape } => {
            vec![("threshold", Amount(threshold)), ("scale", Amount(scale)), ("shape", Shape(shape))]
        }
        LawSpec::Beta { a, b, low, high } => {
            vec![("a", Shape(a)), ("b", Shape(b)), ("low", Limit(low)), ("high", Limit(high))]
        }
        LawSpec::Triangular { low, mode, high } => {
            vec![("low", Amount(low)), ("mode", Amount(mode)), ("high", Amount(high))]
        }
        LawSpec::Laplace { mean, scale } | LawSpec::Logistic { mean, scale } => {
            vec![("mean", Amount(mean)), ("scale", Amount(scale))]
        }
        LawSpec::StudentT { df, location, scale } => {
            vec![("df", Shape(df)), ("location", Limit(location)), ("scale", Limit(scale))]
        }
        LawSpec::InverseGaussian { mean, shape } => vec![("mean", Amount(mean)), ("shape", Amount(shape))],
        LawSpec::Formula { density, low, high } => {
            vec![("density", Text(density)), ("low", Amount(low)), ("high", Amount(high))]
        }
        LawSpec::Mixture { .. } | LawSpec::Compound { .. } => Vec::new(),
        LawSpec::Affine { add, multiply, .. } => vec![("multiply", Shape(multiply)), ("add", Amount(add))],
        LawSpec::Cap { low, high, .. } | LawSpec::Restrict { low, high, .. } => {
            vec![("low", Limit(low)), ("high", Limit(high))]
        }
        LawSpec::Round { step, .. } => vec![("step", Amount(step))],
    }
}

impl Parameter<'_> {
    /// The present value and how it is edited.
    pub fn read(&self) -> (Value, Style) {
        match self {
            Self::Amount(value) => (Value::Real(**value), Style::Amount),
            Self::Shape(value) => (Value::Real(**value), Style::Shape),
            Self::Share(value) => (Value::Real(**value), Style::Share),
            Self::Limit(value) => (Value::Limit(**value), Style::Limit),
            Self::Count(value) => {
                (Value::Whole(i64::try_from(**value).unwrap_or(i64::MAX)), Style::Whole(1, 1_000_000_000))
            }
            Self::Whole(value) => (Value::Whole(**value), Style::Whole(-1_000_000_000, 1_000_000_000)),
            Self::Numbers(values) => (Value::Numbers((*values).clone()), Style::Numbers),
            Self::Text(text) => (Value::Text((*text).clone()), Style::Text),
        }
    }

    /// Sets the value; a value of another type changes nothing.
    fn set(self, to: &Value) {
        match (self, to) {
            (Self::Amount(value) | Self::Shape(value) | Self::Share(value), Value::Real(to)) => *value = *to,
            (Self::Limit(value), Value::Limit(to)) => *value = *to,
            (Self::Count(value), Value::Whole(to)) => *value = u64::try_from(*to).unwrap_or(1),
            (Self::Whole(value), Value::Whole(to)) => *value = *to,
            (Self::Numbers(values), Value::Numbers(to)) => values.clone_from(to),
            (Self::Text(text), Value::Text(to)) => text.clone_from(to),
            _ => {}
        }
    }
}

/// The same law with one parameter changed.
pub fn with_parameter(law: &LawSpec, name: &str, value: &Value) -> LawSpec {
    let mut law = law.clone();
    if let Some((_, parameter)) = parameters(&mut law).into_iter().find(|(key, _)| *key == name) {
        parameter.set(value);
    }
    law
}

/// The name of a parameter in words.
pub fn words(law: &LawSpec, name: &str) -> String {
    let special = match (law, name) {
        (LawSpec::Cap { .. }, "low") => "not below",
        (LawSpec::Cap { .. }, "high") => "not above",
        (LawSpec::Restrict { .. }, "low") => "from",
        (LawSpec::Restrict { .. }, "high") => "to",
        (LawSpec::Affine { .. }, "multiply") => "multiply by",
        (LawSpec::Round { .. }, "step") => "to multiples of",
        (_, "p") => "probability p",
        (_, "df") => "degrees of freedom",
        (_, "log_mean") => "mean of the logarithm",
        (_, "log_sd") => "sd of the logarithm",
        (_, "tail/above_quantile") => "tail from quantile",
        (_, "density") => "density in x",
        _ => return name.replace('_', " "),
    };
    special.to_owned()
}

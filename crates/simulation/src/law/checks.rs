//! Parameter checks with messages that say what was expected and what was found.

use super::LawProblem;

/// Largest size of a parameter: leaves room for sums of many summands below the largest double.
const LARGEST: f64 = 1e304;
/// Smallest positive scale: leaves room for ratios above the smallest normal double.
const SMALLEST: f64 = 1e-304;

/// Collects problems of the parameters below one JSON pointer.
pub(crate) struct Checks<'a> {
    pointer: String,
    problems: &'a mut Vec<LawProblem>,
}

impl<'a> Checks<'a> {
    /// Checks for the law at `pointer` (empty for the outermost law).
    pub(crate) fn new(pointer: &str, problems: &'a mut Vec<LawProblem>) -> Self {
        Self { pointer: pointer.to_owned(), problems }
    }

    /// Reports a problem of the parameter `name` (of the law itself if `name` is empty).
    pub(crate) fn problem(&mut self, name: &str, message: impl Into<String>) {
        let pointer = if name.is_empty() { self.pointer.clone() } else { format!("{}/{name}", self.pointer) };
        self.problems.push(LawProblem { pointer, message: message.into() });
    }

    /// Whether `value` is an ordinary number of sensible size.
    pub(crate) fn finite(&mut self, name: &str, value: f64) -> bool {
        if !value.is_finite() {
            self.problem(name, format!("must be a finite number (got {})", show(value)));
            false
        } else if value.abs() > LARGEST {
            self.problem(name, format!("must be at most {LARGEST:e} in size (got {})", show(value)));
            false
        } else {
            true
        }
    }

    /// Whether `value` is a finite number above 0.
    pub(crate) fn positive(&mut self, name: &str, value: f64) -> bool {
        if value.is_nan() || value <= 0.0 {
            self.problem(name, format!("must be greater than 0 (got {})", show(value)));
            false
        } else if value < SMALLEST {
            self.problem(name, format!("must be at least {SMALLEST:e} (got {})", show(value)));
            false
        } else {
            self.finite(name, value)
        }
    }

    /// Whether `value` is positive and at most `largest`; `at_least` bounds it from below.
    pub(crate) fn within(&mut self, name: &str, value: f64, at_least: f64, at_most: f64) -> bool {
        if !self.positive(name, value) {
            false
        } else if value < at_least || value > at_most {
            self.problem(
                name,
                format!("must lie between {} and {} (got {})", show(at_least), show(at_most), show(value)),
            );
            false
        } else {
            true
        }
    }

    /// Whether `value` is a probability, 0 and 1 included.
    pub(crate) fn probability(&mut self, name: &str, value: f64) -> bool {
        if (0.0..=1.0).contains(&value) {
            true
        } else {
            self.problem(name, format!("must lie between 0 and 1 (got {})", show(value)));
            false
        }
    }

    /// Whether `value` is a probability above 0.
    pub(crate) fn positive_probability(&mut self, name: &str, value: f64) -> bool {
        if value > 0.0 && value <= 1.0 {
            true
        } else {
            self.problem(name, format!("must be greater than 0 and at most 1 (got {})", show(value)));
            false
        }
    }

    /// Whether `low` < `high`, both finite; the problem is put at `name_high`.
    pub(crate) fn ordered(&mut self, name_low: &str, low: f64, name_high: &str, high: f64) -> bool {
        let finite = self.finite(name_low, low) & self.finite(name_high, high);
        if finite && low >= high {
            self.problem(
                name_high,
                format!("must be greater than `{name_low}` = {} (got {})", show(low), show(high)),
            );
            return false;
        }
        finite
    }

    /// Whether the positive `weights` can be normalised.
    pub(crate) fn weights(&mut self, name: &str, weights: &[f64]) -> bool {
        let mut good = true;
        for (index, &weight) in weights.iter().enumerate() {
            let place = format!("{name}/{index}");
            if weight.is_nan() || weight < 0.0 {
                self.problem(&place, format!("must be 0 or greater (got {})", show(weight)));
                good = false;
            } else {
                good &= self.finite(&place, weight);
            }
        }
        if good && weights.iter().all(|&weight| weight == 0.0) {
            self.problem(name, "must hold at least one weight greater than 0");
            good = false;
        }
        good
    }
}

/// A number as a person would write it.
pub(crate) fn show(value: f64) -> String {
    if value.is_nan() {
        return "not a number".to_owned();
    }
    let size = value.abs();
    if value != 0.0 && value.is_finite() && !(1e-4..1e7).contains(&size) {
        format!("{value:e}")
    } else {
        format!("{value}")
    }
}

/// Shares of the total for weights on any positive scale, without overflow.
pub(crate) fn shares(weights: &[f64]) -> Vec<f64> {
    let largest = weights.iter().copied().fold(0.0, f64::max);
    let total = compensated_sum(weights.iter().map(|weight| weight / largest));
    weights.iter().map(|weight| (weight / largest) / total).collect()
}

/// A sum with Neumaier's compensation: error of a few units in the last place of Σ|terms|, any length.
pub(crate) fn compensated_sum(terms: impl Iterator<Item = f64>) -> f64 {
    let (mut sum, mut lost) = (0.0f64, 0.0f64);
    for term in terms {
        let next = sum + term;
        lost += if sum.abs() >= term.abs() { (sum - next) + term } else { (term - next) + sum };
        sum = next;
    }
    sum + lost
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn messages_name_the_place_and_both_numbers() {
        let mut problems = Vec::new();
        let mut checks = Checks::new("/parts/1", &mut problems);
        assert!(!checks.positive("weight", -0.2));
        assert!(!checks.finite("mean", f64::NAN));
        assert!(!checks.ordered("low", 3.0, "high", 2.0));
        let texts: Vec<String> = problems.iter().map(ToString::to_string).collect();
        assert_eq!(texts[0], "/parts/1/weight: must be greater than 0 (got -0.2)");
        assert_eq!(texts[1], "/parts/1/mean: must be a finite number (got not a number)");
        assert_eq!(texts[2], "/parts/1/high: must be greater than `low` = 3 (got 2)");
    }

    #[test]
    fn shares_survive_extreme_scales() {
        assert_eq!(shares(&[1e300, 3e300]), [0.25, 0.75]);
        assert_eq!(shares(&[1e-300, 3e-300]), [0.25, 0.75]);
    }
}

//! Numbers in running text: rounded to what matters, thousands separated by commas.

/// A number with at most `digits` significant digits, no trailing zeros, thousands separated by commas, and an
/// exponent only beyond a billion or below a ten-thousandth. Not a finite number: `unknown`.
pub fn number_to(x: f64, digits: usize) -> String {
    if !x.is_finite() {
        return "unknown".to_owned();
    }
    if x == 0.0 {
        return "0".to_owned();
    }
    let digits = digits.max(1);
    let rounded = format!("{:.*e}", digits - 1, x);
    let (mantissa, exponent) = rounded.split_once('e').unwrap_or((&rounded, "0"));
    let exponent = exponent.parse::<i32>().unwrap_or(0);
    if !(-4..9).contains(&exponent) {
        return format!("{}e{exponent}", trimmed(mantissa));
    }
    let decimals = (digits as i32 - 1 - exponent).max(0) as usize;
    // Rounding first to the significant digits, then printing, keeps 12347 at four digits as 12,350.
    let value = rounded.parse::<f64>().unwrap_or(x);
    with_commas(trimmed(&format!("{value:.decimals$}")))
}

/// A number with at most four significant digits.
pub fn number(x: f64) -> String {
    number_to(x, 4)
}

/// A parameter as its author typed it: up to ten significant digits.
pub fn exact(x: f64) -> String {
    number_to(x, 10)
}

/// A whole number with commas: `12,000`.
pub fn whole(n: u64) -> String {
    with_commas(&n.to_string())
}

/// A probability typed by the user, as a percentage: `95 %`, `99.9 %`.
pub fn percent(p: f64) -> String {
    format!("{} %", exact(100.0 * p))
}

/// A difference of probabilities: `1 point`, `0.5 points`.
pub fn points(difference: f64) -> String {
    let text = exact(100.0 * difference);
    if text == "1" { "1 point".to_owned() } else { format!("{text} points") }
}

/// The same, for a computed difference: two significant digits.
pub fn about_points(difference: f64) -> String {
    let text = number_to(100.0 * difference, 2);
    if text == "1" { "1 point".to_owned() } else { format!("{text} points") }
}

/// Decimals of a percentage that show a difference with two significant digits, but no more than an error allows
/// and than a tolerance makes worth telling.
pub fn percent_decimals(difference: f64, error: f64, allowed: f64) -> usize {
    let places = |size: f64| {
        if size > 0.0 && size.is_finite() {
            (1.0 - (100.0 * size).log10().floor()).clamp(0.0, 9.0)
        } else {
            9.0
        }
    };
    places(difference.abs()).min(places(error)).min(places(allowed) + 1.0).clamp(1.0, 4.0) as usize
}

/// A computed probability as a percentage with the given decimals; small ones as `1 in 3.1 million`.
pub fn chance(p: f64, decimals: usize) -> String {
    if !p.is_finite() {
        return "unknown".to_owned();
    }
    if p > 0.0 && p < 1e-4 {
        return one_in(1.0 / p);
    }
    if p < 1.0 && p > 1.0 - 1e-4 {
        // Enough decimals to keep a near certainty apart from certainty.
        let decimals = (1.0 - (100.0 * (1.0 - p)).log10().floor()).clamp(1.0, 12.0) as usize;
        return format!("{:.decimals$} %", 100.0 * p);
    }
    format!("{:.decimals$} %", 100.0 * p)
}

/// `1 in 3.1 million`.
fn one_in(odds: f64) -> String {
    let (size, word) = match odds {
        odds if odds < 1e6 => (odds, ""),
        odds if odds < 1e9 => (odds / 1e6, " million"),
        odds if odds < 1e12 => (odds / 1e9, " billion"),
        _ => return number_to(1.0 / odds, 2),
    };
    format!("1 in {}{word}", number_to(size, 2))
}

/// How many times as often: `twice`, `three times`, `2.6 times`, `14 times`.
pub fn times(ratio: f64) -> String {
    const WORDS: [&str; 8] = [
        "twice",
        "three times",
        "four times",
        "five times",
        "six times",
        "seven times",
        "eight times",
        "nine times",
    ];
    let near = ratio.round();
    if (2.0..=9.0).contains(&near) && (ratio - near).abs() < 0.25 {
        return WORDS[near as usize - 2].to_owned();
    }
    if ratio < 9.5 {
        format!("{} times", number_to(ratio, 2))
    } else {
        format!("{} times", number_to(ratio.round(), 2))
    }
}

/// Drops trailing zeros behind a decimal point.
fn trimmed(text: &str) -> &str {
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { text }
}

fn with_commas(text: &str) -> String {
    let (sign, rest) = text.strip_prefix('-').map_or(("", text), |rest| ("-", rest));
    let (integer, fraction) =
        rest.split_once('.').map_or((rest, None), |(integer, fraction)| (integer, Some(fraction)));
    let mut grouped = String::new();
    for (index, digit) in integer.chars().enumerate() {
        if index > 0 && (integer.len() - index).is_multiple_of(3) {
            grouped.push(',');
        }
        grouped.push(digit);
    }
    match fraction {
        Some(fraction) => format!("{sign}{grouped}.{fraction}"),
        None => format!("{sign}{grouped}"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_read_well() {
        assert_eq!(number(12347.0), "12,350");
        assert_eq!(number(0.5), "0.5");
        assert_eq!(number(-1234567.0), "-1,235,000");
        assert_eq!(number(999.96), "1,000");
        assert_eq!(number(1e300), "1e300");
        assert_eq!(number(0.00012344), "0.0001234");
        assert_eq!(number(1.2e-7), "1.2e-7");
        assert_eq!(percent(0.07), "7 %");
        assert_eq!(percent(0.999), "99.9 %");
        assert_eq!(points(0.01), "1 point");
        assert_eq!(points(0.005), "0.5 points");
        assert_eq!(chance(2.0e-7, 2), "1 in 5 million");
        assert_eq!(chance(0.92134, 1), "92.1 %");
        assert_eq!(times(4.9), "five times");
        assert_eq!(times(1.6), "1.6 times");
        assert_eq!(times(2.0), "twice");
        assert_eq!(times(14.2), "14 times");
        assert_eq!(percent_decimals(0.029, 1e-12, 0.01), 1);
        assert_eq!(percent_decimals(0.0029, 1e-12, 0.01), 2);
    }
}

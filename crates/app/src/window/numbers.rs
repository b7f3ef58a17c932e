//! Numbers as people type them, and numbers as the window shows them.

/// Reads a real number: `0.25`, `1e-4`, `2.5%`, `12,000`, `12 000`, `−3`.
///
/// The message of an error names what was expected and what was found.
pub fn read_real(text: &str) -> Result<f64, String> {
    let mut compact: String = text.trim().replace(['\u{2212}', '\u{2013}'], "-");
    let percent = compact.ends_with('%');
    if percent {
        compact = compact.trim_end_matches('%').trim_end().to_owned();
    }
    if compact.is_empty() {
        return Err("expected a number (nothing typed)".to_owned());
    }
    let digits = without_thousands_marks(&compact).ok_or_else(|| unreadable(text))?;
    // 99.9 % is the double nearest 0.999, not a hundredth of the double nearest 99.9.
    let shifted =
        if percent && !digits.contains(['e', 'E']) { format!("{digits}e-2") } else { digits.clone() };
    let scale = if percent && shifted == digits { 100.0 } else { 1.0 };
    let value: f64 = match shifted.parse::<f64>() {
        Ok(value) if digits.chars().any(|c| c.is_ascii_digit()) => value / scale,
        _ => return Err(unreadable(text)),
    };
    if !value.is_finite() {
        return Err(format!("too large for a number (found “{}”)", text.trim()));
    }
    Ok(value)
}

fn unreadable(text: &str) -> String {
    let text = text.trim();
    if text.matches(',').count() == 1 && text.replace(',', ".").parse::<f64>().is_ok() {
        return format!("write decimals with a point: {} (found “{text}”)", text.replace(',', "."));
    }
    format!("expected a number such as 0.25, 1e-4, 2.5% or 12,000 (found “{text}”)")
}

/// Removes `,`, `_`, `'` and spaces that separate groups of three digits; `None` where they separate anything else.
fn without_thousands_marks(text: &str) -> Option<String> {
    let is_mark = |c: char| matches!(c, ',' | '_' | '\'' | ' ' | '\u{202f}' | '\u{a0}' | '\u{2009}');
    if !text.contains(is_mark) {
        return Some(text.to_owned());
    }
    let end = text.find(['.', 'e', 'E']).unwrap_or(text.len());
    let (whole, rest) = text.split_at(end);
    if rest.contains(is_mark) {
        return None;
    }
    let (sign, whole) = match whole.strip_prefix(['-', '+']) {
        Some(unsigned) => (&text[..1], unsigned),
        None => ("", whole),
    };
    let groups: Vec<&str> = whole.split(is_mark).collect();
    let good = |(i, group): (usize, &&str)| {
        group.chars().all(|c| c.is_ascii_digit())
            && if i == 0 { (1..=3).contains(&group.len()) } else { group.len() == 3 }
    };
    groups.iter().enumerate().all(good).then(|| format!("{sign}{}{rest}", groups.concat()))
}

/// Reads a share that is usually spoken of in per cent: `95`, `95 %` and `0.95` all mean 0.95.
///
/// Without a per cent sign, numbers below 1 are shares and numbers from 1 on are per cent.
pub fn read_percent(text: &str) -> Result<f64, String> {
    let value = read_real(text)?;
    if text.contains('%') || value < 1.0 { Ok(value) } else { read_real(&format!("{text}%")) }
}

/// Reads a whole number from `low` to `high`.
pub fn read_whole(text: &str, low: i64, high: i64) -> Result<i64, String> {
    let value = read_real(text)?;
    if value.fract() != 0.0 {
        return Err(format!("must be a whole number (got {})", plain(value)));
    }
    if value < low as f64 || value > high as f64 {
        return Err(format!(
            "must be from {} to {} (got {})",
            thousands(low as f64),
            thousands(high as f64),
            plain(value)
        ));
    }
    Ok(value as i64)
}

/// Reads a list of numbers separated by commas, semicolons, blanks or line ends (as pasted from a spreadsheet).
pub fn read_list(text: &str) -> Result<Vec<f64>, String> {
    text.split(|c: char| matches!(c, ',' | ';') || c.is_whitespace())
        .filter(|word| !word.is_empty())
        .enumerate()
        .map(|(i, word)| read_real(word).map_err(|problem| format!("number {}: {problem}", i + 1)))
        .collect()
}

/// A number as a field shows it for editing: the shortest text that reads back to the same double.
pub fn plain(value: f64) -> String {
    let size = value.abs();
    if size != 0.0 && !(1e-4..1e15).contains(&size) { format!("{value:e}") } else { format!("{value}") }
}

/// A whole number with thousands marks where it is long: `12,000`.
pub fn thousands(value: f64) -> String {
    if value.fract() != 0.0 || value.abs() >= 1e15 || value.abs() < 1e3 {
        return plain(value);
    }
    let digits = format!("{}", value.abs());
    let mut text = String::new();
    for (i, digit) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            text.push(',');
        }
        text.push(digit);
    }
    if value < 0.0 { format!("−{text}") } else { text }
}

/// A number for reading: at most `digits` significant digits, a real minus sign, powers of ten written out.
pub fn shown(value: f64, digits: usize) -> String {
    if value.is_nan() {
        return "not defined".to_owned();
    }
    if value.is_infinite() {
        return if value > 0.0 { "∞".to_owned() } else { "−∞".to_owned() };
    }
    if value == 0.0 {
        return "0".to_owned();
    }
    let digits = digits.max(1);
    let scientific = format!("{value:.*e}", digits - 1);
    let (mantissa, exponent) = scientific.split_once('e').unwrap_or((&scientific, "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    let text = if (-4..6.max(digits as i32)).contains(&exponent) {
        let decimals = (digits as i32 - 1 - exponent).max(0) as usize;
        let rounded = format!("{value:.decimals$}");
        trim_zeros(&rounded).to_owned()
    } else {
        format!("{}·10{}", trim_zeros(mantissa), superscript(exponent))
    };
    text.replace('-', "−")
}

fn trim_zeros(text: &str) -> &str {
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { text }
}

/// A whole number in superscript characters.
pub fn superscript(number: i32) -> String {
    number
        .to_string()
        .chars()
        .map(|c| match c {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            c => char::from_u32(0x2070 + c.to_digit(10).unwrap_or(0)).unwrap_or(c),
        })
        .collect()
}

/// A figure with its error, rounded to what the error allows: `92.13 % ± 0.02` is left to the caller's unit.
pub fn with_error(value: f64, error: f64) -> String {
    if !value.is_finite() || !error.is_finite() {
        return shown(value, 6);
    }
    let digits = significant_digits(value, error);
    if error < value.abs() * 1e-6 || error < 1e-9 {
        return shown(value, digits.min(6));
    }
    format!("{} ± {}", shown(value, digits), shown_up(error))
}

/// How many digits of `value` the error leaves, one uncertain digit included, from 2 to 8.
fn significant_digits(value: f64, error: f64) -> usize {
    if value == 0.0 || error <= 0.0 {
        return 6;
    }
    ((value.abs() / error).log10().floor() + 2.0).clamp(2.0, 8.0) as usize
}

/// An error to two digits, rounded up so that it is never understated.
fn shown_up(error: f64) -> String {
    if error <= 0.0 {
        return "0".to_owned();
    }
    let unit = 10f64.powi(error.log10().floor() as i32 - 1);
    shown((error / unit).ceil() * unit, 2)
}

/// A share as per cent: `92.1 %`.
pub fn percent(share: f64, digits: usize) -> String {
    format!("{} %", shown(share * 100.0, digits))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reads_what_people_type() {
        for (text, value) in [
            ("1e-4", 1e-4),
            ("2.5%", 0.025),
            ("12,000", 12_000.0),
            (" 12 000 ", 12_000.0),
            ("1,234,567.5", 1_234_567.5),
            ("−3", -3.0),
            ("-1,000", -1000.0),
            (".5", 0.5),
            ("95 %", 0.95),
        ] {
            assert_eq!(read_real(text), Ok(value), "{text}");
        }
    }

    #[test]
    fn names_the_mistake() {
        for (text, part) in [
            ("", "nothing typed"),
            ("abc", "expected a number"),
            ("1,5", "write decimals with a point: 1.5"),
            ("1,23,4", "expected a number"),
            ("1e999", "too large"),
            ("inf", "expected a number"),
            ("NaN", "expected a number"),
        ] {
            let message = read_real(text).expect_err(text);
            assert!(message.contains(part), "{text}: {message}");
        }
        assert!(read_whole("2.5", 1, 10).expect_err("fraction").contains("whole number"));
        assert!(read_whole("11", 1, 10).expect_err("range").contains("from 1 to 10"));
        assert!(read_list("1 2 x").expect_err("third").starts_with("number 3"));
    }

    #[test]
    fn percent_fields_take_shares_and_per_cent() {
        assert_eq!(read_percent("95"), Ok(0.95));
        assert_eq!(read_percent("0.95"), Ok(0.95));
        assert_eq!(read_percent("99.9%"), Ok(0.999));
        assert_eq!(read_percent("0.1 %"), Ok(0.001));
    }

    #[test]
    fn shows_numbers_for_reading() {
        for (value, digits, text) in [
            (0.9213, 4, "0.9213"),
            (-0.5, 3, "−0.5"),
            (1.2345e-9, 3, "1.23·10⁻⁹"),
            (123_456.0, 3, "123456"),
            (0.0, 3, "0"),
            (9.9999, 3, "10"),
            (f64::NAN, 3, "not defined"),
        ] {
            assert_eq!(shown(value, digits), text);
        }
        assert_eq!(thousands(1_234_567.0), "1,234,567");
        // One digit more than the error has, so that rounding adds nothing to it.
        assert_eq!(with_error(0.921_344, 0.0002), "0.92134 ± 0.0002");
        assert_eq!(with_error(0.5, 1e-13), "0.5");
    }

    #[test]
    fn plain_numbers_read_back() {
        for value in [0.1, 1e-300, 1e300, 12_345.678_9, 1.0 / 3.0, 1e15, 4e-5] {
            assert_eq!(read_real(&plain(value)), Ok(value));
        }
    }
}

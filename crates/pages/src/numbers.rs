//! Numbers as a reader wants them: rounded to their error, powers of ten as superscripts, a true minus sign.

use gaussgap_simulation::figure::Figure;

/// A finite number with `digits` significant digits: `0.9213`, `−12.5`, `1.2×10⁻³⁰`; `–` for what is not finite.
pub fn number(value: f64, digits: usize) -> String {
    if !value.is_finite() {
        return "–".to_owned();
    }
    if value == 0.0 {
        return "0".to_owned();
    }
    let digits = digits.clamp(1, 17);
    let scientific = format!("{:.*e}", digits - 1, value.abs());
    let (mantissa, exponent) = scientific.split_once('e').unwrap_or((&scientific, "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    let sign = if value < 0.0 { "−" } else { "" };
    if (-4..6).contains(&exponent) {
        let decimals = usize::try_from(digits as i32 - 1 - exponent).unwrap_or(0);
        let rounded = scientific.parse::<f64>().unwrap_or(value.abs());
        format!("{sign}{}", without_trailing_zeros(&format!("{rounded:.decimals$}")))
    } else {
        let mantissa = without_trailing_zeros(mantissa);
        let factor = if mantissa == "1" { String::new() } else { format!("{mantissa}×") };
        format!("{sign}{factor}10{}", superscript(exponent))
    }
}

/// A number or a dash.
pub fn optional(value: Option<f64>, digits: usize) -> String {
    value.map_or_else(|| "–".to_owned(), |value| number(value, digits))
}

/// A whole number with its thousands set apart: `12 000` (narrow no-break spaces), from 10 000 on.
pub fn whole(value: u64) -> String {
    let plain = value.to_string();
    if plain.len() < 5 {
        return plain;
    }
    let mut text = String::new();
    for (place, digit) in plain.chars().enumerate() {
        if place > 0 && (plain.len() - place).is_multiple_of(3) {
            text.push('\u{202f}');
        }
        text.push(digit);
    }
    text
}

/// A value with its error, rounded so that the interval shown contains the interval meant: `0.9213 ± 0.0003`,
/// `(1.20 ± 0.02)×10⁻¹⁰`. An error too small to show in six digits is left out.
pub fn figure(figure: &Figure) -> String {
    figure_in(figure, 6)
}

/// [`figure`] for tight places: the error is left out where it is below a tenth of a unit in the last of `digits`
/// digits.
pub fn figure_in(figure: &Figure, digits: usize) -> String {
    let Figure { value, error, .. } = *figure;
    if !value.is_finite() || !error.is_finite() {
        return "–".to_owned();
    }
    if error <= 10_f64.powi(-(digits as i32) - 1) * value.abs() || error == 0.0 {
        return number(value, digits);
    }
    let largest = value.abs().max(error);
    let exponent = largest.log10().floor() as i32;
    if (-4..6).contains(&exponent) {
        let (value, error) = rounded(value, error);
        return format!("{value} ± {error}");
    }
    let scale = 10_f64.powi(-exponent / 2);
    let scaled = |x: f64| x * scale * 10_f64.powi(-exponent - (-exponent / 2));
    let (value, error) = rounded(scaled(value), scaled(error));
    format!("({value} ± {error})×10{}", superscript(exponent))
}

/// The error alone, one digit, rounded up: `2×10⁻¹²`.
pub fn error_only(error: f64) -> String {
    if !error.is_finite() {
        return "–".to_owned();
    }
    if error == 0.0 {
        return "0".to_owned();
    }
    let exponent = error.abs().log10().floor();
    let unit = 10_f64.powi(exponent as i32);
    if unit == 0.0 {
        return number(error, 1);
    }
    number((error.abs() / unit * (1.0 - 1e-12)).ceil() * unit, 1)
}

/// Value and error with the same decimals; the error has two digits, rounded up, and takes in the rounding of the value.
fn rounded(value: f64, error: f64) -> (String, String) {
    let decimals = (1 - (error * (1.0 + 1e-9)).log10().floor() as i32).clamp(0, 12) as usize;
    let unit = 10_f64.powi(-(decimals as i32));
    let value_text = format!("{value:.decimals$}");
    let shown: f64 = value_text.parse().unwrap_or(value);
    let error = ((error + (shown - value).abs()) / unit * (1.0 - 1e-9)).ceil() * unit;
    (value_text.replace('-', "−"), format!("{error:.decimals$}"))
}

fn without_trailing_zeros(text: &str) -> String {
    if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        text.to_owned()
    }
}

/// A whole exponent in superscript digits.
pub fn superscript(exponent: i32) -> String {
    const DIGITS: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    exponent.to_string().chars().map(|c| c.to_digit(10).map_or('⁻', |digit| DIGITS[digit as usize])).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn significant_digits_and_powers() {
        assert_eq!(number(0.921_34, 3), "0.921");
        assert_eq!(number(0.95, 4), "0.95");
        assert_eq!(number(-12.456, 3), "−12.5");
        assert_eq!(number(1234.6, 3), "1230");
        assert_eq!(number(99_999.9, 3), "100000");
        assert_eq!(number(1e-300, 3), "10⁻³⁰⁰");
        assert_eq!(number(-1.234e300, 3), "−1.23×10³⁰⁰");
        assert_eq!(number(0.0, 3), "0");
        assert_eq!(number(f64::NAN, 3), "–");
        assert_eq!(number(5e-324, 2), "4.9×10⁻³²⁴");
    }

    #[test]
    fn whole_numbers_in_threes() {
        assert_eq!(whole(9999), "9999");
        assert_eq!(whole(12_000), "12\u{202f}000");
        assert_eq!(whole(1_000_000_000), "1\u{202f}000\u{202f}000\u{202f}000");
    }

    #[test]
    fn the_interval_shown_contains_the_interval_meant() {
        assert_eq!(figure(&Figure::bound(0.921_34, 0.000_21)), "0.92134 ± 0.00021");
        assert_eq!(figure(&Figure::bound(0.921_344_9, 0.000_210_1)), "0.92134 ± 0.00022");
        assert_eq!(figure(&Figure::bound(1.2e-10, 2e-12)), "(1.200 ± 0.020)×10⁻¹⁰");
        assert_eq!(figure(&Figure::bound(0.024_291_234_567, 1e-13)), "0.0242912");
        assert_eq!(figure(&Figure::bound(-3.0e7, 1e3)), "(−3.00000 ± 0.00010)×10⁷");
        assert_eq!(figure(&Figure::bound(1e300, 1e298)), "(1.000 ± 0.010)×10³⁰⁰");
        assert_eq!(figure(&Figure::bound(1e-300, 1e-302)), "(1.000 ± 0.010)×10⁻³⁰⁰");
        let mut seed = 1_u64;
        for _ in 0..2000 {
            seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            let value = (seed >> 11) as f64 / (1_u64 << 53) as f64;
            let error = value * 10_f64.powi(-((seed % 9) as i32)) * 0.37;
            let text = figure(&Figure::bound(value, error));
            let Some((shown, half)) = text.split_once(" ± ") else { continue };
            let (Ok(shown), Ok(half)) = (shown.parse::<f64>(), half.parse::<f64>()) else { continue };
            assert!(
                shown - half <= value - error + 1e-13 && shown + half >= value + error - 1e-13,
                "{text}: {value} {error}"
            );
        }
    }

    #[test]
    fn an_error_alone_is_never_rounded_down() {
        assert_eq!(error_only(2.1e-12), "3×10⁻¹²");
        assert_eq!(error_only(1e-13), "10⁻¹³");
        assert_eq!(error_only(0.05), "0.05");
        assert_eq!(error_only(9.5e-9), "10⁻⁸");
    }
}

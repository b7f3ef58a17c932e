//! Every special function against the 25-digit table of `references/special.py` (mpmath 1.3.0, 60 digits).

use super::{elementary, erf, gamma, normal};
use num_complex::Complex64;

const TABLE: &str = include_str!("../../references/special.txt");

/// Rows of one function: (arguments and value).
fn rows(function: &str) -> Vec<Vec<f64>> {
    let rows: Vec<Vec<f64>> = TABLE
        .lines()
        .filter_map(|line| {
            let mut words = line.split_whitespace();
            (words.next() == Some(function)).then(|| words.map(|w| w.parse().expect("a number")).collect())
        })
        .collect();
    assert!(!rows.is_empty(), "no reference rows for {function}");
    rows
}

/// Asserts relative errors within `allowed(row)` and reports the worst row of each function.
fn check(name: &str, function: impl Fn(&[f64]) -> f64, allowed: impl Fn(f64) -> f64) {
    let mut worst = (0.0, String::new());
    let mut failures = Vec::new();
    for row in rows(name) {
        let (arguments, expected) = (&row[..row.len() - 1], row[row.len() - 1]);
        let actual = function(arguments);
        let error = if expected == 0.0 { actual.abs() } else { ((actual - expected) / expected).abs() };
        let ratio = error / allowed(expected);
        if ratio > worst.0 || ratio.is_nan() {
            worst = (ratio, format!("{name}{arguments:?}: {actual:e} against {expected:e}, {error:.2e}"));
        }
        if ratio.is_nan() || ratio > 1.0 {
            failures.push(format!("{name}{arguments:?}: {actual:e} against {expected:e}, {error:.2e}"));
        }
    }
    println!("worst {:.3} of the allowed error: {}", worst.0, worst.1);
    assert!(failures.is_empty(), "{}", failures.join("\n"));
}

/// The same for complex functions of one complex argument, by the error of the complex number.
fn check_complex(name: &str, function: impl Fn(Complex64) -> Complex64, allowed: f64) {
    let mut worst = 0.0f64;
    for row in rows(name) {
        let argument = Complex64::new(row[0], row[1]);
        let expected = Complex64::new(row[2], row[3]);
        let actual = function(argument);
        let error = (actual - expected).norm() / expected.norm();
        assert!(error <= allowed, "{name}({argument}): {actual} against {expected}, {error:.2e}");
        worst = worst.max(error);
    }
    println!("{name}: worst {worst:.2e}");
}

const ULP: f64 = f64::EPSILON;

/// Far tails amplify the last bit of the exponent: a few ulp, plus |ln value| ulp.
fn tail(value: f64) -> f64 {
    8.0 * ULP + 2.0 * ULP * value.ln().abs()
}

#[test]
fn normal_law() {
    check("normal_density", |v| normal::density(v[0]), |_| 4.0 * ULP);
    check("normal_above", |v| normal::above(v[0]), |_| 4.0 * ULP);
    check("normal_above", |v| normal::at_or_below(-v[0]), |_| 4.0 * ULP);
    check("normal_quantile_above", |v| normal::quantile_above(v[0]), |_| 4.0 * ULP);
    check("normal_quantile_above", |v| -normal::quantile(v[0]), |_| 4.0 * ULP);
}

#[test]
fn error_functions() {
    check("erfcx", |v| erf::erfcx(v[0]), |_| 6.0 * ULP);
    check_complex("faddeeva", erf::faddeeva, 1e-14);
}

#[test]
fn elementary_functions() {
    check("ln_1p_minus_x", |v| elementary::ln_1p_minus_x(v[0]), |_| 6.0 * ULP);
    check("exp_minus_1_minus_real", |v| elementary::exp_minus_1_minus_real(v[0]), |_| 6.0 * ULP);
    check_complex("complex_exp_m1", elementary::complex_exp_m1, 4.0 * ULP);
    check_complex("exp_minus_1_minus", elementary::exp_minus_1_minus, 8.0 * ULP);
    check_complex("complex_ln_1p", elementary::complex_ln_1p, 4.0 * ULP);
}

#[test]
fn gamma_law() {
    check("stirling_error", |v| gamma::stirling_error(v[0]), |_| 8.0 * ULP);
    check("deviance", |v| gamma::deviance(v[0], v[1]), |_| 8.0 * ULP);
    check("gamma_density", |v| gamma::density(v[0], v[1]), tail);
    check("gamma_below", |v| gamma::below(v[0], v[1]), tail);
    check("gamma_above", |v| gamma::above(v[0], v[1]), tail);
    for row in rows("gamma_below") {
        let (shape, x, p) = (row[0], row[1], row[2]);
        if p < 0.6 {
            let back = gamma::quantile(shape, p);
            let conditioning = p / (x * gamma::density(shape, x));
            let error = ((back - x) / x).abs();
            assert!(
                error <= 4.0 * ULP + tail(p) * conditioning,
                "quantile({shape}, {p:e}): {back:e}, {x:e}, {error:.1e}"
            );
        }
    }
    for row in rows("gamma_above") {
        let (shape, x, q) = (row[0], row[1], row[2]);
        if q < 0.6 {
            let back = gamma::quantile_above(shape, q);
            let conditioning = q / (x * gamma::density(shape, x));
            let error = ((back - x) / x).abs();
            assert!(
                error <= 4.0 * ULP + tail(q) * conditioning,
                "quantile_above({shape}, {q:e}): {back:e}, {x:e}, {error:.1e}"
            );
        }
    }
}

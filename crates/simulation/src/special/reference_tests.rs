//! Every special function against the 25-digit table of `references/special.py` (mpmath 1.3.0, 60 digits).

use super::{beta, discrete, elementary, erf, gamma, inverse_gaussian, normal, student};
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

/// Beta functions combine three Stirling errors and a fraction or a quadrature.
fn beta_tail(value: f64) -> f64 {
    24.0 * ULP + tail(value)
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
    check_quantile("gamma_below", "gamma_density", |v, p| gamma::quantile(v[0], p));
    check_quantile("gamma_above", "gamma_density", |v, q| gamma::quantile_above(v[0], q));
}

/// Quantiles at the table's probabilities give back the table's arguments (the last one of each row), within the
/// accuracy of the probability times the conditioning d ln x/d ln p.
fn check_quantile(name: &str, density: &str, quantile: impl Fn(&[f64], f64) -> f64) {
    let densities = rows(density);
    let (mut worst, mut count) = (0.0f64, 0);
    for row in rows(name) {
        let (arguments, p) = (&row[..row.len() - 1], row[row.len() - 1]);
        let x = arguments[arguments.len() - 1];
        let Some(f) = densities.iter().find(|d| d[..d.len() - 1] == *arguments) else { continue };
        if p > 0.55 {
            continue;
        }
        let back = quantile(arguments, p);
        let conditioning = p / (x.abs() * f[f.len() - 1]);
        let allowed = 4.0 * ULP + tail(p) * conditioning;
        let error = ((back - x) / x).abs();
        assert!(
            error <= allowed,
            "{name} {arguments:?} at {p:e}: {back:e}, {error:.1e} allowed {allowed:.1e}"
        );
        worst = worst.max(error / allowed);
        count += 1;
    }
    println!("{name}: {count} quantiles, worst {worst:.3} of the allowed error");
    assert!(count > 10);
}

#[test]
fn beta_law() {
    check("beta_density", |v| beta::density(v[0], v[1], v[2]), beta_tail);
    check("beta_below", |v| beta::below(v[0], v[1], v[2]), beta_tail);
    check("beta_above", |v| beta::above(v[0], v[1], v[2]), beta_tail);
    check_quantile("beta_below", "beta_density", |v, p| beta::quantile(v[0], v[1], p));
    check_quantile("beta_above", "beta_density", |v, q| beta::quantile_above(v[0], v[1], q));
}

#[test]
fn student_law() {
    check("student_density", |v| student::density(v[0], v[1]), beta_tail);
    check("student_above", |v| student::above(v[0], v[1]), beta_tail);
    check("student_above", |v| student::at_or_below(v[0], -v[1]), beta_tail);
    check_quantile("student_above", "student_density", |v, q| student::quantile_above(v[0], q));
    check_quantile("student_above", "student_density", |v, q| -student::quantile(v[0], q));
}

#[test]
fn discrete_laws() {
    let n = |v: f64| v as u64;
    check("binomial_mass", |v| discrete::binomial_mass(n(v[0]), v[1], n(v[2])), beta_tail);
    check("binomial_at_or_below", |v| discrete::binomial_at_or_below(n(v[0]), v[1], n(v[2])), beta_tail);
    check("binomial_above", |v| discrete::binomial_above(n(v[0]), v[1], n(v[2])), beta_tail);
    check("poisson_mass", |v| discrete::poisson_mass(v[0], n(v[1])), beta_tail);
    check("poisson_at_or_below", |v| discrete::poisson_at_or_below(v[0], n(v[1])), beta_tail);
    check("poisson_above", |v| discrete::poisson_above(v[0], n(v[1])), beta_tail);
    check("negative_binomial_mass", |v| discrete::negative_binomial_mass(v[0], v[1], n(v[2])), beta_tail);
    check(
        "negative_binomial_at_or_below",
        |v| discrete::negative_binomial_at_or_below(v[0], v[1], n(v[2])),
        tail,
    );
    check("negative_binomial_above", |v| discrete::negative_binomial_above(v[0], v[1], n(v[2])), beta_tail);
}

#[test]
fn inverse_gaussian_law() {
    check("inverse_gaussian_density", |v| inverse_gaussian::density(v[0], v[1], v[2]), tail);
    check("inverse_gaussian_at_or_below", |v| inverse_gaussian::at_or_below(v[0], v[1], v[2]), tail);
    check("inverse_gaussian_above", |v| inverse_gaussian::above(v[0], v[1], v[2]), tail);
    check_quantile("inverse_gaussian_at_or_below", "inverse_gaussian_density", |v, p| {
        inverse_gaussian::quantile(v[0], v[1], p)
    });
    check_quantile("inverse_gaussian_above", "inverse_gaussian_density", |v, q| {
        inverse_gaussian::quantile_above(v[0], v[1], q)
    });
}

/// Extreme but valid arguments give numbers in [0, 1], complements, and an end of the work.
#[test]
fn extreme_arguments_stay_probabilities() {
    let sizes = [1e-6, 1e-3, 0.5, 1.0, 1.5, 99.0, 999.5, 1e4, 1e9, 1e12, 1e15];
    let points = [0.0, 5e-324, 1e-300, 1e-20, 1e-9, 1e-3, 0.3, 0.5, 0.7, 0.9999, 1.0 - 1e-15, 1.0];
    let proper = |p: f64, q: f64, what: &str| {
        assert!((0.0..=1.0).contains(&p) && (0.0..=1.0).contains(&q), "{what}: {p} {q}");
        assert!((p + q - 1.0).abs() < 1e-11, "{what}: {p} + {q}");
    };
    let started = std::time::Instant::now();
    for a in sizes {
        for b in sizes {
            for x in points.into_iter().chain([a / (a + b)]) {
                proper(beta::below(a, b, x), beta::above(a, b, x), &format!("beta {a} {b} {x}"));
                assert!(!beta::density(a, b, x).is_nan(), "{a} {b} {x}");
            }
            for x in [1e-300, 1e-6 * b, 0.9 * b, b, 1.0001 * b, 3.0 * b, 1e300] {
                let (p, q) = (inverse_gaussian::at_or_below(b, a, x), inverse_gaussian::above(b, a, x));
                proper(p, q, &format!("inverse gaussian {b} {a} {x}"));
                assert!(!inverse_gaussian::density(b, a, x).is_nan());
            }
        }
        for x in [0.0, 1e-320, 1e-9, 0.5, 0.999 * a, a, 1.001 * a, 2.4 * a, 1e9, 1e300, f64::INFINITY] {
            proper(gamma::below(a, x), gamma::above(a, x), &format!("gamma {a} {x}"));
            assert!(!gamma::density(a, x).is_nan());
            if a >= 0.5 {
                proper(student::at_or_below(a, x), student::above(a, x), &format!("student {a} {x}"));
                assert!(!student::density(a, x).is_nan());
            }
        }
        for p in [1e-320, 1e-300, 1e-9, 0.2, 0.5, 0.6, 0.9999999, 1.0 - 1e-16] {
            for x in [
                gamma::quantile(a, p),
                gamma::quantile_above(a, p),
                beta::quantile(a, 3.0, p),
                beta::quantile_above(0.01, a, p),
            ] {
                assert!(x >= 0.0, "{a} {p}");
            }
            assert!(
                inverse_gaussian::quantile(1.0, a, p) >= 0.0
                    && inverse_gaussian::quantile_above(1.0, a, p) >= 0.0
            );
            if a >= 0.5 {
                assert!(!student::quantile(a, p).is_nan() && !student::quantile_above(a, p).is_nan());
            }
        }
    }
    for z in [f64::NEG_INFINITY, -1e300, -38.0, 0.0, 38.5, 1e300, f64::INFINITY] {
        proper(normal::at_or_below(z), normal::above(z), &format!("normal {z}"));
        assert!(
            !normal::density(z).is_nan()
                && !erf::erfcx(z).is_nan()
                && !erf::faddeeva(Complex64::new(z, 0.5)).is_nan()
        );
        assert!(!erf::faddeeva(Complex64::new(0.5, z)).is_nan(), "{z}");
    }
    println!("{:?}", started.elapsed());
}

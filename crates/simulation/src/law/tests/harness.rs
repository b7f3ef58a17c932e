//! What must hold for every law, whatever its family.

use super::cases;
use crate::law::moments;
use crate::law::quadrature::{gauss_legendre, stretch};
use crate::law::{Law, LawSpec, Piece};
use num_complex::Complex64;
use rand::SeedableRng;
use std::collections::HashMap;
use std::sync::OnceLock;

/// The compiled cases.
fn laws() -> Vec<(&'static str, Law)> {
    static LAWS: OnceLock<Vec<(&str, Law)>> = OnceLock::new();
    let compile = |(name, spec): (&'static str, LawSpec)| {
        (name, spec.compile().unwrap_or_else(|problems| panic!("{name}: {problems:?}")))
    };
    LAWS.get_or_init(|| cases::all().into_iter().map(compile).collect()).clone()
}

/// The pieces of all cases, untruncated and not, with names.
fn pieces() -> Vec<(String, Piece)> {
    laws()
        .into_iter()
        .flat_map(|(name, law)| {
            let pieces: Vec<Piece> = law.pieces.iter().take(4).cloned().collect();
            pieces.into_iter().enumerate().map(move |(i, piece)| (format!("{name}/{i}"), piece))
        })
        .collect()
}

fn assert_close(what: &str, value: f64, expected: f64, tolerance: f64) {
    assert!(
        (value - expected).abs() <= tolerance * expected.abs() || value == expected,
        "{what}: {value:e} instead of {expected:e} (relative {:e})",
        (value - expected) / expected
    );
}

#[test]
fn masses_add_up_to_one() {
    for (name, law) in laws() {
        assert!(law.only_simulation.is_none(), "{name}: {:?}", law.only_simulation);
        let atoms: f64 = law.atoms.iter().map(|a| a.mass).sum();
        let pieces: f64 = law.pieces.iter().map(Piece::mass).sum();
        assert_close(name, atoms + pieces, 1.0, 2e-13);
        assert!(law.missing_mass <= 1e-30, "{name}: {:e} missing", law.missing_mass);
        assert!(law.atoms.windows(2).all(|pair| pair[0].value < pair[1].value), "{name}");
    }
}

#[test]
fn distribution_function_is_the_integral_of_the_density() {
    for (name, piece) in pieces() {
        let points = piece.panel_points();
        for pair in points.windows(2) {
            let integral = stretch(pair[0], pair[1], |y| piece.density.density(y));
            let (a, b) = (piece.density.at_or_below(pair[0]), piece.density.at_or_below(pair[1]));
            let (c, d) = (piece.density.above(pair[0]), piece.density.above(pair[1]));
            let difference = if b < 0.5 { b - a } else { c - d };
            // Where a difference cancels, the quadrature is the better of the two.
            let rounding = 4e-15 * if b < 0.5 { b } else { c };
            // A typed formula is integrated to 1e-15 of its mass.
            let least = if name.starts_with("formula") { 2e-16 } else { 1e-26 };
            let place = format!("{name}: on [{:e}, {:e}]", pair[0], pair[1]);
            assert!(
                (integral - difference).abs() <= 2e-12 * difference.abs() + rounding + least,
                "{place}: {integral:e} instead of {difference:e}"
            );
        }
    }
}

#[test]
fn both_tails_add_up_to_one() {
    for (name, law) in laws() {
        for level in [1e-6, 0.01, 0.2, 0.5, 0.77, 0.99, 1.0 - 1e-6] {
            let x = law.quantile(level);
            assert_close(name, law.at_or_below(x) + law.above(x), 1.0, 2e-13);
            assert_close(name, law.below(x) + law.at_or_above(x), 1.0, 2e-13);
            assert!(law.below(x) <= law.at_or_below(x) && law.above(x) <= law.at_or_above(x), "{name}");
        }
    }
}

#[test]
fn quantiles_invert_in_both_tails() {
    for (name, piece) in pieces() {
        for level in [1e-200, 1e-100, 1e-30, 1e-12, 1e-4, 0.1, 0.4, 0.6, 0.95] {
            // A typed formula is integrated to 1e-15 of its mass, not of its tails.
            if name.starts_with("formula") && level < 1e-4 {
                continue;
            }
            for (upper, y) in
                [(false, piece.conditional_quantile(level)), (true, piece.conditional_quantile_above(level))]
            {
                let whole = piece.between(piece.low, piece.high);
                let got =
                    if upper { piece.between(y, piece.high) } else { piece.between(piece.low, y) } / whole;
                // A relative rounding of y moves the probability by ε·y·f/F.
                let slope = (y.abs() + 1e-300) * piece.density.density(y).min(1e300) / whole / level;
                let rounding = 1e-11 + 1e-14 * slope;
                // Where neighbouring doubles jump over the level (or the end is met) only monotony can hold.
                if rounding < 1e-2 && y > piece.low && y < piece.high && y.abs() > 1e-280 {
                    assert_close(
                        &format!("{name}: level {level:e}, upper {upper}, y {y:e}"),
                        got,
                        level,
                        rounding,
                    );
                }
            }
        }
    }
}

#[test]
fn law_quantiles_are_the_smallest_values_reaching_the_level() {
    for (name, law) in laws() {
        for level in [1e-12, 1e-3, 0.1, 0.5, 0.8, 0.999] {
            let x = law.quantile(level);
            // A rounding of x moves the probability by ε·x·f.
            let slack = 4e-16 * x.abs() * law.density(x).min(1e300);
            assert!(law.at_or_below(x) >= level * (1.0 - 1e-11) - slack, "{name} {level}: {x}");
            let before = x - 1e-9 * (law.sd().unwrap_or(1.0) + x.abs());
            assert!(
                law.at_or_below(before) <= level * (1.0 + 1e-6) || law.is_constant(),
                "{name} {level}: {x}"
            );
            let x = law.quantile_above(level);
            let slack = 4e-16 * x.abs() * law.density(x).min(1e300);
            assert!(law.above(x) <= level * (1.0 + 1e-11) + slack, "{name} {level}: {x}");
        }
    }
}

#[test]
fn closed_moments_agree_with_quadrature() {
    for (name, piece) in pieces() {
        let (Some(closed), true) = (piece.density.standard_moments(), piece.is_whole()) else { continue };
        let (upper, lower) = piece.tail_indices();
        // Right above an existing order the tail's own error shows; orders well inside are enough here.
        let exists = |order: f64| upper.min(lower) > order + 0.15;
        let plain = Piece { factor: 1.0, add: 0.0, multiply: 1.0, ..piece };
        let found = moments::by_quadrature(&plain);
        if let (Some(a), Some(b), true) = (found.mean, closed.mean, exists(1.0)) {
            assert!((a - b).abs() <= 1e-12 * (b.abs() + closed.sd.unwrap_or(0.0)), "{name}: mean {a} {b}");
        }
        if let (Some(a), Some(b), true) = (found.sd, closed.sd, exists(2.0)) {
            assert_close(&format!("{name}: sd"), a, b, 1e-12);
        }
        if let (Some(a), Some(b), true) = (found.skewness, closed.skewness, exists(3.0)) {
            assert!((a - b).abs() <= 3e-12 * (1.0 + b.abs()), "{name}: skewness {a} {b}");
        }
        if let (Some(a), Some(b), true) = (found.excess_kurtosis, closed.excess_kurtosis, exists(4.0)) {
            assert!((a - b).abs() <= 3e-12 * (3.0 + b.abs()), "{name}: excess kurtosis {a} {b}");
        }
    }
}

#[test]
fn moments_agree_with_the_references() {
    // mpmath 1.3.0, 30 digits, references/laws.py.
    let text = include_str!("../../../references/laws.txt");
    let laws: HashMap<_, _> = laws().into_iter().collect();
    let mut seen = 0;
    for line in text.lines() {
        let mut words = line.split_whitespace();
        let name = words.next().unwrap();
        let law = laws.get(name).unwrap_or_else(|| panic!("no case {name}"));
        let found = [
            law.mean(),
            law.sd(),
            law.skewness(),
            law.excess_kurtosis(),
            law.third_absolute_central_moment().map(|third| third / law.sd().unwrap().powi(3)),
        ];
        for (order, (word, value)) in words.zip(found).enumerate() {
            let expected: Option<f64> = word.parse().ok();
            assert_eq!(value.is_some(), expected.is_some(), "{name}: order {order}");
            if let (Some(value), Some(expected)) = (value, expected) {
                // Odd moments cancel: relative to the scale of their terms.
                let scale = match order {
                    0 => expected.abs().max(law.sd().unwrap_or(0.0)),
                    2 => expected.abs().max(1.0),
                    3 => expected.abs().max(3.0),
                    _ => expected.abs(),
                };
                assert!(
                    (value - expected).abs() <= 1e-12 * scale,
                    "{name}: order {order}: {value:e} instead of {expected:e}, off {:e}",
                    (value - expected) / scale
                );
            }
        }
        seen += 1;
    }
    assert!(seen > 25);
}

#[test]
fn complex_density_continues_the_real_one() {
    for (name, piece) in pieces() {
        for level in [0.03, 0.35, 0.8, 0.99] {
            let y = piece.conditional_quantile(level);
            let f = |z| piece.density.density_complex(z, y);
            let real = piece.density.density(y);
            let there = f(Complex64::new(y, 0.0));
            // The exponent of a narrow density has large terms that cancel.
            let tolerance = if name.starts_with("gamma-large") { 1e-9 } else { 2e-12 };
            assert!((there - real).norm() <= tolerance * real, "{name} at {y}: {there} instead of {real}");
            // Cauchy–Riemann inside the sector: ∂f/∂(im) = i ∂f/∂(re).
            let (up, down) = (piece.density.rotation_up(), piece.density.rotation_down());
            let low = piece.density.support().0;
            for angle in [0.3 * up, 0.8 * up, -0.8 * up, std::f64::consts::PI - 0.7 * down] {
                let distance = if low.is_finite() { y - low } else { 0.5 };
                let z = y + Complex64::from_polar(0.4 * distance, angle);
                let h = 1e-4 * distance * (1.0 / (1.0 + piece.density.density(y) * distance)).min(1.0);
                let along = (f(z + h) - f(z - h)) / (2.0 * h);
                let i = Complex64::i();
                let upwards = (f(z + i * h) - f(z - i * h)) / (2.0 * h);
                let size = f(z).norm() / (100.0 * h) + along.norm();
                assert!(
                    (upwards - i * along).norm() <= 1e-4 * size + 1e-290,
                    "{name}: not analytic at {z}: {upwards} against i·{along}"
                );
            }
        }
    }
}

#[test]
fn rotated_integral_equals_the_real_one() {
    for (name, piece) in pieces() {
        let f = &piece.density;
        let (a, b) = (piece.conditional_quantile(0.2), piece.conditional_quantile(0.9));
        let fine = 40;
        let s = 6.0 / (b - a);
        let real: f64 = (0..fine)
            .map(|i| {
                let at = |i: i32| a + (b - a) * f64::from(i) / f64::from(fine);
                stretch(at(i), at(i + 1), |y| f.density(y) * (-s * (y - a)).exp())
            })
            .sum();
        // ∫_a^b = ray from a − ray from b; downwards with the mirrored exponential.
        for (limit, direction) in [(f.rotation_up(), 1.0), (f.rotation_down(), -1.0)] {
            if limit == 0.0 {
                continue;
            }
            for angle in [0.95 * limit, -0.6 * limit] {
                let angle = angle.clamp(-1.25, 1.25);
                let turn = direction * Complex64::from_polar(1.0, angle);
                // Trapezoid rule in ln r.
                let step = 0.02;
                let ray = |from: f64| {
                    (-2200..700)
                        .map(|k| {
                            let r = (step * f64::from(k)).exp() / s;
                            let z = from + turn * r;
                            f.density_complex(z, from) * (-(z - a) * direction * s).exp() * turn * r * step
                        })
                        .sum::<Complex64>()
                };
                let expected = if direction > 0.0 {
                    real
                } else {
                    (0..fine)
                        .map(|i| {
                            let at = |i: i32| a + (b - a) * f64::from(i) / f64::from(fine);
                            stretch(at(i), at(i + 1), |y| f.density(y) * (s * (y - a)).exp())
                        })
                        .sum()
                };
                let rotated = if direction > 0.0 { ray(a) - ray(b) } else { ray(b) - ray(a) };
                let rotated = rotated * direction;
                assert!(
                    (rotated - expected).norm()
                        <= 1e-9 * expected.abs() * if direction > 0.0 { 1.0 } else { 10.0 },
                    "{name}: angle {angle}, direction {direction}: {rotated} instead of {expected}"
                );
            }
        }
    }
}

#[test]
fn laplace_transform_agrees_with_quadrature() {
    for (name, piece) in pieces() {
        let f = &piece.density;
        if !piece.is_whole() || name.starts_with("gamma-0.3") {
            continue;
        }
        let spread = piece.conditional_quantile(0.8) - piece.conditional_quantile(0.2);
        for unit in [Complex64::new(0.7, 0.0), Complex64::new(0.4, 2.0), Complex64::new(-0.2, -5.0)] {
            let s = unit / spread;
            if -s.re > 0.5 * f.upper_exponential_rate() || s.re > 0.5 * f.lower_exponential_rate() {
                continue;
            }
            let Some(log) = f.log_laplace(s) else { continue };
            let points = piece.panel_points();
            let middle = piece.conditional_quantile(0.5);
            let mut sum = Complex64::new(0.0, 0.0);
            for pair in points.windows(2) {
                for part in 0..8 {
                    let at = |i: f64| pair[0] + (pair[1] - pair[0]) * i / 8.0;
                    let (from, to) = (at(f64::from(part)), at(f64::from(part + 1)));
                    for &(node, weight) in &gauss_legendre(20) {
                        let y = 0.5 * (from + to) + 0.5 * (to - from) * node;
                        sum += 0.5 * (to - from) * weight * f.density(y) * (-s * (y - middle)).exp();
                    }
                }
            }
            let closed = (log + s * middle).exp();
            let tolerance = if name.starts_with("gamma-large") { 3e-10 } else { 1e-12 };
            assert!((closed - sum).norm() <= tolerance, "{name} at {s}: {closed} against {sum}");
        }
    }
}

#[test]
fn draws_follow_the_distribution_function() {
    let mut random = rand::rngs::SmallRng::seed_from_u64(20_260_101);
    for (name, law) in laws() {
        let count = 4_000;
        let mut draws: Vec<f64> = (0..count).map(|_| law.sample(&mut random)).collect();
        draws.sort_by(f64::total_cmp);
        let mut worst: f64 = 0.0;
        for (index, pair) in draws.chunk_by(|a, b| a == b).scan(0, |seen, same| {
            let before = *seen;
            *seen += same.len();
            Some((before, (same[0], *seen)))
        }) {
            let (x, through) = pair;
            worst = worst
                .max((law.at_or_below(x) - through as f64 / f64::from(count)).abs())
                .max((law.below(x) - index as f64 / f64::from(count)).abs());
        }
        // Kolmogorov's limit law: 2.2/√n is passed with probability 1.2e-4 per law.
        assert!(worst < 2.2 / f64::from(count).sqrt(), "{name}: {worst}");
    }
}

#[test]
fn reflection_mirrors_everything() {
    for (name, law) in laws() {
        let mirror = law.reflected();
        for level in [0.01, 0.3, 0.9] {
            let x = law.quantile(level);
            assert_eq!(law.at_or_below(x), mirror.at_or_above(-x), "{name}");
            assert_eq!(law.above(x), mirror.below(-x), "{name}");
        }
        assert_eq!(law.skewness().map(|g| 0.0 - g), mirror.skewness(), "{name}");
        assert_eq!(law.support, (-mirror.support.1, -mirror.support.0), "{name}");
    }
}

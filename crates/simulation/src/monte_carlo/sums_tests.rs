//! Simulated sums against laws known exactly, and properties of the simulation itself.

use super::*;
use crate::law::{Law, LawSpec, MixturePart};
use crate::special::{discrete, gamma};
use crate::sum::Term;

const PROBES: [f64; 9] = [-4.0, -3.0, -2.0, -1.0, 0.0, 1.0, 2.0, 3.0, 4.0];

fn law(spec: LawSpec) -> Law {
    spec.compile().expect("a valid law")
}

fn exponential() -> LawSpec {
    LawSpec::Exponential { mean: 1.0 }
}

fn method(draws: u64) -> Method {
    Method { draws, ..Method::default() }
}

fn build(spec: &SumSpec, draws: u64) -> SimulatedSum {
    SimulatedSum::build(spec, &method(draws), &PROBES, "a test asked for it", &Work::new())
        .expect("buildable")
}

fn assert_near(figure: Figure, expected: f64, largest_error: f64) {
    assert!((figure.value - expected).abs() <= figure.error, "{figure:?} but {expected}");
    assert!(figure.error <= largest_error, "{figure:?}");
}

#[test]
fn exponential_sums_have_the_gamma_law() {
    // Distances: facts from the gamma law, recomputed with SciPy, five digits.
    for (n, distance) in [(1u64, 0.158655), (5, 0.059629), (30, 0.024291)] {
        // As a mixture of two equal parts the law has no closed form: its copies are drawn from tables.
        let part = || MixturePart { weight: 1.0, law: exponential() };
        let spec = LawSpec::Mixture { parts: vec![part(), part()] };
        for spec in [exponential(), spec] {
            let sum = build(&SumSpec::like_summands(law(spec), n), 200_000);
            let root = (n as f64).sqrt();
            for z in [-1.7, -0.93, 0.0, 0.111, 1.0, 2.0, 3.0, 4.0] {
                let exact = gamma::below(n as f64, (n as f64 + z * root).max(0.0));
                let tail = gamma::above(n as f64, (n as f64 + z * root).max(0.0));
                assert_near(sum.at_or_below(z), exact, 0.0047);
                assert_near(sum.above(z), tail, 0.0047);
            }
            // Clopper–Pearson makes the tails sharper than the uniform band.
            assert!(sum.above(4.0).error < 0.001);
            let found = sum.kolmogorov();
            assert_near(found.kolmogorov, distance, 0.0048);
            for p in [0.001, 0.1, 0.5, 0.9, 0.999] {
                let exact = (gamma::quantile(n as f64, p) - n as f64) / root;
                assert_near(sum.quantile(p), exact, if p > 0.99 { 0.7 } else { 0.1 });
            }
            assert_eq!(sum.jumps(-9.0, 9.0, 10), Some(vec![]));
            let moments = sum.moments();
            assert!((moments.skewness.unwrap() - 2.0 / root).abs() < 1e-10);
            assert!((moments.excess_kurtosis.unwrap() - 6.0 / n as f64).abs() < 1e-9);
        }
    }
}

#[test]
fn lattice_sums_are_counted_point_by_point() {
    // facts: distance of Bernoulli sums with p = 0.1: .2361 at n = 10, .08316 at n = 100.
    for (n, distance) in [(10u64, 0.2361), (100, 0.08316)] {
        // Three atoms, one of them far too rare to matter, so that no closed form is found.
        let spec = LawSpec::Table { values: vec![0.0, 1.0, 2.0], weights: vec![0.9, 0.1, 1e-300] };
        for spec in [LawSpec::Bernoulli { p: 0.1 }, spec] {
            let sum = build(&SumSpec::like_summands(law(spec), n), 100_000);
            let sd = (n as f64 * 0.09).sqrt();
            assert!((sum.lattice_span().unwrap() * sd - 1.0).abs() < 1e-12);
            for k in 0..5u64 {
                let z = (k as f64 - 0.1 * n as f64) / sd;
                assert_near(sum.at_or_below(z), discrete::binomial_at_or_below(n, 0.1, k), 0.0067);
                let below = if k == 0 { 0.0 } else { discrete::binomial_at_or_below(n, 0.1, k - 1) };
                assert_near(sum.below(z), below, 0.0067);
                assert_near(sum.at_or_above(z), 1.0 - below, 0.0067);
                // Between two points both sides agree.
                assert_eq!(sum.below(z + 0.3 / sd), sum.at_or_below(z + 0.3 / sd));
            }
            assert_near(sum.kolmogorov().kolmogorov, distance, 0.0068);
            assert!(sum.jumps(-8.0, 8.0, 3).is_none());
            let jumps = sum.jumps(-1.5, 0.5 / sd, 100).unwrap();
            assert!(jumps.iter().all(|z| ((z * sd + 0.1 * n as f64).fract().abs() + 1e-9).fract() < 1e-8));
            assert!(!jumps.is_empty());
        }
    }
}

#[test]
fn mostly_zero_sums_jump_where_all_are_zero() {
    let spec = LawSpec::Mixture {
        parts: vec![
            MixturePart { weight: 0.7, law: LawSpec::Constant { value: 0.0 } },
            MixturePart { weight: 0.3, law: exponential() },
        ],
    };
    let sum = build(&SumSpec::like_summands(law(spec), 3), 200_000);
    let moments = sum.moments();
    let at_zero = -moments.mean / moments.sd;
    assert_near(sum.at_or_below(at_zero), 0.343, 0.0047);
    assert_near(sum.below(at_zero), 0.0, 0.0002);
    let jumps = sum.jumps(-8.0, 8.0, 10).unwrap();
    assert!(jumps.len() == 1 && (jumps[0] - at_zero).abs() < 1e-12);
    // P(S ≤ x) = Σ_k C(3,k) 0.3^k 0.7^(3−k) P(Gamma(k) ≤ x).
    let exact = |x: f64| {
        let masses = [0.343, 0.441, 0.189, 0.027];
        masses[0] + (1..4).map(|k| masses[k] * gamma::below(k as f64, x)).sum::<f64>()
    };
    for z in [-0.5, 0.0, 0.77, 2.0, 4.0] {
        assert_near(sum.at_or_below(z), exact(moments.mean + z * moments.sd), 0.0048);
    }
}

#[test]
fn sums_of_incommensurable_atoms_list_their_jumps() {
    let values = vec![0.0, 1.0, std::f64::consts::SQRT_2];
    let sum = build(
        &SumSpec::like_summands(law(LawSpec::Table { values, weights: vec![0.25, 0.25, 0.5] }), 2),
        50_000,
    );
    let jumps = sum.jumps(-8.0, 8.0, 10).unwrap();
    assert_eq!(jumps.len(), 6);
    let masses = [0.0625, 0.125, 0.25, 0.0625, 0.25, 0.25];
    // Ascending: 0, 1, √2, 2, 1 + √2, 2√2.
    let mut total = 0.0;
    for (z, mass) in jumps.iter().zip(masses) {
        assert_near(sum.below(*z), total, 0.0096);
        total += mass;
        assert_near(sum.at_or_below(*z), total, 0.0096);
    }
}

#[test]
fn histograms_are_drawn_bar_by_bar() {
    // n = 1: the distribution function of the histogram itself, linear on each bar.
    let (edges, weights) = (vec![0.0, 1.0, 1.5, 4.0], vec![2.0, 5.0, 3.0]);
    let sum = build(&SumSpec::like_summands(law(LawSpec::Histogram { edges, weights }), 1), 100_000);
    let moments = sum.moments();
    for (x, p) in [(0.5, 0.1), (1.0, 0.2), (1.25, 0.45), (1.5, 0.7), (2.75, 0.85), (4.0, 1.0)] {
        assert_near(sum.at_or_below((x - moments.mean) / moments.sd), p, 0.0068);
    }
    assert_eq!(sum.jumps(-8.0, 8.0, 10), Some(vec![]));
}

#[test]
fn differences_of_two_groups_share_a_lattice() {
    let (one, two) = (law(LawSpec::Bernoulli { p: 0.3 }), law(LawSpec::Bernoulli { p: 0.5 }));
    let (n1, n2) = (6u64, 4u64);
    let terms = vec![
        Term { law: one, count: n1, multiply: -1.0 / n1 as f64 },
        Term { law: two, count: n2, multiply: 1.0 / n2 as f64 },
    ];
    let sum = build(&SumSpec { terms }, 100_000);
    let moments = sum.moments();
    assert!((sum.lattice_span().unwrap() * moments.sd - 1.0 / 12.0).abs() < 1e-12);
    assert!((moments.mean - 0.2).abs() < 1e-12);
    for point in [-5.0, 0.0, 1.0, 6.0] {
        let x = point / 12.0;
        let mut exact = 0.0;
        for i in 0..=n1 {
            for j in 0..=n2 {
                if j as f64 / n2 as f64 - i as f64 / n1 as f64 <= x + 1e-9 {
                    exact += discrete::binomial_mass(n1, 0.3, i) * discrete::binomial_mass(n2, 0.5, j);
                }
            }
        }
        assert_near(sum.at_or_below((x - moments.mean) / moments.sd), exact, 0.0068);
    }
}

#[test]
fn threads_and_interruptions_do_not_matter() {
    let spec = SumSpec::like_summands(law(LawSpec::Lomax { shape: 4.5, scale: 1.0 }), 7);
    let run = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| build(&spec, 60_000))
    };
    let (one, two) = (run(1), run(2));
    assert_eq!(one.tally, two.tally);
    assert_eq!(one.kolmogorov(), two.kolmogorov());
    let continued = build(&spec, 10_000).extended(60_000, &Work::new()).unwrap();
    assert_eq!(one.tally, continued.tally);
    let other = Method { seed: 1, ..method(60_000) };
    let other = SimulatedSum::build(&spec, &other, &PROBES, "", &Work::new()).unwrap();
    assert_ne!(one.tally, other.tally);
}

#[test]
fn cancelled_work_returns() {
    let spec = SumSpec::like_summands(law(LawSpec::Lomax { shape: 4.5, scale: 1.0 }), 1_000_000);
    let work = Work::new();
    std::thread::scope(|scope| {
        scope.spawn(|| {
            std::thread::sleep(std::time::Duration::from_millis(30));
            work.cancel();
        });
        let result = SimulatedSum::build(&spec, &method(4_000_000), &PROBES, "", &work);
        assert!(matches!(result, Err(SumError::Cancelled(_))));
    });
}

#[test]
fn large_n_is_bounded_or_refused() {
    let lomax = law(LawSpec::Lomax { shape: 4.5, scale: 1.0 });
    let refused = SimulatedSum::build(
        &SumSpec::like_summands(lomax, 1_000_000_000),
        &method(1000),
        &[],
        "",
        &Work::new(),
    );
    assert!(matches!(refused, Err(SumError::NotAvailable { route: Route::Simulation, .. })));
    // Counts do not care about n.
    let spec = LawSpec::Table { values: vec![0.0, 1.0, 7.0], weights: vec![5.0, 4.0, 1.0] };
    let sum = build(&SumSpec::like_summands(law(spec), 1_000_000_000), 50_000);
    assert_near(sum.at_or_below(0.0), 0.5, 0.0095);
    assert_near(sum.at_or_below(1.0), 0.841_345, 0.0095);
}

#[test]
fn size_and_scale_change_nothing() {
    let scaled = |mean: f64| {
        build(
            &SumSpec::like_summands(
                law(LawSpec::Affine {
                    law: Box::new(LawSpec::Lomax { shape: 4.5, scale: 1.0 }),
                    add: 0.0,
                    multiply: mean,
                }),
                4,
            ),
            20_000,
        )
    };
    let one = scaled(1.0);
    for factor in [1e-280, 1e280, -3.0] {
        let other = scaled(factor);
        let sign = factor.signum();
        for z in PROBES {
            let (a, b) = if sign > 0.0 {
                (one.at_or_below(z), other.at_or_below(z))
            } else {
                (one.at_or_below(z), other.at_or_above(-z))
            };
            assert!((a.value - b.value).abs() < 2e-3, "{factor}, {z}: {a:?} {b:?}");
        }
    }
}

#[test]
fn every_argument_is_answered() {
    let sum = build(&SumSpec::like_summands(law(LawSpec::Lomax { shape: 2.3, scale: 1.0 }), 2), 5_000);
    for z in [f64::NEG_INFINITY, -1e300, -9.0, -8.0, 8.0, 9.0, 1e300, f64::INFINITY] {
        for figure in [sum.at_or_below(z), sum.below(z), sum.above(z), sum.at_or_above(z)] {
            assert!(figure.value >= 0.0 && figure.value <= 1.0 && figure.error >= 0.0 && figure.error <= 1.0);
        }
        let exact = if z < 0.0 { 0.0 } else { 1.0 };
        if z.abs() > 1e10 {
            assert_near(sum.at_or_below(z), exact, 1.0);
        }
    }
    for p in [1e-300, 1e-9, 0.5, 1.0 - 1e-9] {
        let figure = sum.quantile(p);
        assert!(figure.value.is_finite() && figure.error.is_finite());
    }
}

/// Two hundred seeds at joint confidence 0.9: all probes, both extremes of a quantile and the distance at once. The sum of two
/// uniforms has the triangular law, F(s) = s²/2 for 0 ≤ s ≤ 1; its distance to Φ is 0.01643 (facts, Irwin–Hall). The
/// bands are conservative, so at least 180 − 3√18 = 167 must cover.
#[test]
fn bands_cover_jointly_at_the_stated_confidence() {
    let spec = SumSpec::like_summands(law(LawSpec::Uniform { low: 0.0, high: 1.0 }), 2);
    let sd = (1.0f64 / 6.0).sqrt();
    let exact = |z: f64| {
        let s = (1.0 + z * sd).clamp(0.0, 2.0);
        if s <= 1.0 { 0.5 * s * s } else { 1.0 - 0.5 * (2.0 - s) * (2.0 - s) }
    };
    let mut covers = 0;
    for seed in 0..200 {
        let method = Method { seed, confidence: 0.9, ..method(2_000) };
        let sum = SimulatedSum::build(&spec, &method, &PROBES, "", &Work::new()).unwrap();
        let within = |figure: Figure, value: f64| (figure.value - value).abs() <= figure.error;
        let median = sum.quantile(0.5);
        let all = PROBES.iter().chain(&[-2.2, -0.7, 0.1, 1.9]).all(|&z| within(sum.at_or_below(z), exact(z)))
            && within(median, 0.0)
            && within(sum.kolmogorov().kolmogorov, 0.016_43);
        covers += u32::from(all);
    }
    assert!(covers >= 167, "{covers} of 200");
}

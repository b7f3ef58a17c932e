//! Operations on laws, extreme parameters, lattices, closed forms, refusals.

use super::cases::{lognormal, mixture};
use crate::law::{ClosedFamily, DataTail, Law, LawSpec};

fn boxed(spec: LawSpec) -> Box<LawSpec> {
    Box::new(spec)
}

fn compiled(spec: LawSpec) -> Law {
    spec.compile().unwrap_or_else(|problems| panic!("{spec:?}: {problems:?}"))
}

fn problems(spec: LawSpec) -> Vec<String> {
    spec.compile().expect_err("must be refused").iter().map(ToString::to_string).collect()
}

#[test]
fn problems_are_placed_and_say_what_was_found() {
    let spec = LawSpec::Mixture {
        parts: vec![
            crate::law::MixturePart { weight: 1.0, law: LawSpec::Normal { mean: 0.0, sd: f64::NAN } },
            crate::law::MixturePart {
                weight: -0.2,
                law: LawSpec::Cap {
                    law: boxed(LawSpec::Bernoulli { p: 1.5 }),
                    low: Some(2.0),
                    high: Some(1.0),
                },
            },
        ],
    };
    assert_eq!(
        problems(spec),
        [
            "/parts/1/weight: must be greater than 0 (got -0.2)",
            "/parts/0/law/sd: must be greater than 0 (got not a number)",
            "/parts/1/law/high: must be at least `low` = 2 (got 1)",
            "/parts/1/law/law/p: must lie between 0 and 1 (got 1.5)",
        ]
    );
    for (spec, expected) in [
        (
            LawSpec::Formula { density: "1/x".into(), low: 0.0, high: 1.0 },
            "/density: has infinite mass, or a singular end that cannot be resolved there (move a singular end to x = 0)",
        ),
        (
            LawSpec::Formula { density: "0*x".into(), low: 0.0, high: 1.0 },
            "/density: is too large or too small to be normalised",
        ),
        (
            LawSpec::Restrict { law: boxed(LawSpec::Exponential { mean: 1.0 }), low: None, high: Some(-1.0) },
            ": nothing of the law lies inside the limits (probability 0e0)",
        ),
        (
            LawSpec::Compound {
                count: boxed(LawSpec::Normal { mean: 3.0, sd: 1.0 }),
                each: boxed(LawSpec::Bernoulli { p: 0.5 }),
            },
            "/count: must be a discrete law on 0, 1, 2, … (got a continuous one)",
        ),
        (
            LawSpec::Lognormal { log_mean: Some(0.0), log_sd: None, mean: None, sd: Some(1.0) },
            ": must give either `log_mean` and `log_sd` or `mean` and `sd`",
        ),
        (
            LawSpec::Affine { law: boxed(LawSpec::Constant { value: 1e200 }), add: 0.0, multiply: 1e200 },
            "/multiply: makes values too large or too small (got 1e200)",
        ),
    ] {
        assert_eq!(problems(spec), [expected]);
    }
    let negative = problems(LawSpec::Formula { density: "x-1".into(), low: 0.0, high: 2.0 });
    assert!(negative[0].starts_with("/density: must not be negative (got -"), "{negative:?}");
    let mut deep = LawSpec::Bernoulli { p: 0.5 };
    for _ in 0..80 {
        deep = LawSpec::Affine { law: boxed(deep), add: 0.0, multiply: 1.0 };
    }
    assert!(problems(deep)[0].ends_with("must not be nested more than 64 operations deep"));
}

#[test]
fn closed_forms_are_kept_by_affine_images_and_found_on_two_values() {
    let affine =
        compiled(LawSpec::Affine { law: boxed(LawSpec::Poisson { rate: 4.0 }), add: 1.0, multiply: -0.5 });
    let closed = affine.closed_form.unwrap();
    assert_eq!(
        (closed.family, closed.add, closed.multiply),
        (ClosedFamily::Poisson { rate: 4.0 }, 1.0, -0.5)
    );
    assert_eq!(affine.lattice.unwrap().span, 0.5);
    assert_eq!((affine.mean(), affine.skewness()), (Some(-1.0), Some(-0.5)));
    let table = compiled(LawSpec::Table { values: vec![250.0, 0.0], weights: vec![1.0, 3.0] });
    let closed = table.closed_form.unwrap();
    assert_eq!(
        (closed.family, closed.add, closed.multiply),
        (ClosedFamily::Binomial { trials: 1, p: 0.25 }, 0.0, 250.0)
    );
    let capped = compiled(LawSpec::Cap {
        law: boxed(LawSpec::Normal { mean: 0.0, sd: 1.0 }),
        low: None,
        high: Some(2.0),
    });
    assert!(capped.closed_form.is_none());
    let untouched =
        LawSpec::Cap { law: boxed(LawSpec::Exponential { mean: 1.0 }), low: Some(0.0), high: None };
    assert!(compiled(untouched).closed_form.is_some());
}

#[test]
fn extreme_scales_work() {
    for scale in [1e-300, 1e-160, 1.0, 1e160, 1e300] {
        let plain = compiled(LawSpec::Gamma { shape: 2.5, scale: 1.0 });
        for law in [
            compiled(LawSpec::Gamma { shape: 2.5, scale }),
            compiled(LawSpec::Affine {
                law: boxed(LawSpec::Gamma { shape: 2.5, scale: 1.0 }),
                add: 0.0,
                multiply: scale,
            }),
        ] {
            let sd = law.sd().unwrap();
            assert!((sd / scale / plain.sd().unwrap() - 1.0).abs() < 1e-13);
            assert_eq!(law.skewness(), plain.skewness());
            let ratio = law.third_absolute_ratio().unwrap() / plain.third_absolute_ratio().unwrap();
            assert!((ratio - 1.0).abs() < 1e-13, "{scale:e}: {ratio}");
            assert!(law.variance().unwrap() > 0.0 && law.variance().unwrap().is_finite());
            assert!((law.quantile(0.7) / scale / plain.quantile(0.7) - 1.0).abs() < 1e-13);
        }
        let zeros = compiled(mixture(
            1.0,
            LawSpec::Constant { value: 0.0 },
            1.0,
            LawSpec::Normal { mean: 0.0, sd: scale },
        ));
        assert!((zeros.excess_kurtosis().unwrap() - 3.0).abs() < 1e-13, "{scale:e}");
        assert_eq!(zeros.share_of_zeros(), 0.5);
    }
    let normal = compiled(LawSpec::Normal { mean: 1e10, sd: 1e-300 });
    assert_eq!(normal.sd(), Some(1e-300));
    for p in [1e-12, 1.0 - 1e-12] {
        let law = compiled(LawSpec::Geometric { p });
        assert!(law.only_simulation.is_none() && law.closed_form.is_some());
        assert!((law.mean().unwrap() / ((1.0 - p) / p) - 1.0).abs() < 1e-12);
        assert!((law.at_or_below(0.0) / p - 1.0).abs() < 1e-12);
    }
}

#[test]
fn a_law_written_two_ways_is_the_same_law() {
    let pairs = [
        (LawSpec::Gamma { shape: 1.0, scale: 3.0 }, LawSpec::Exponential { mean: 3.0 }),
        (
            LawSpec::Beta { a: 1.0, b: 1.0, low: Some(2.0), high: Some(4.0) },
            LawSpec::Uniform { low: 2.0, high: 4.0 },
        ),
        (
            mixture(0.7, LawSpec::Constant { value: 0.0 }, 0.3, LawSpec::Constant { value: 1.0 }),
            LawSpec::Bernoulli { p: 0.3 },
        ),
        (LawSpec::NegativeBinomial { size: 1.0, p: 0.2 }, LawSpec::Geometric { p: 0.2 }),
        (
            LawSpec::Pareto { shape: 2.5, minimum: 2.0 },
            LawSpec::GeneralizedPareto { threshold: 2.0, scale: 0.8, shape: 0.4 },
        ),
        (
            LawSpec::Formula { density: "exp(-x^2/2)".into(), low: -12.0, high: 12.0 },
            LawSpec::Normal { mean: 0.0, sd: 1.0 },
        ),
        (
            LawSpec::Compound {
                count: boxed(LawSpec::Binomial { trials: 5, p: 0.5 }),
                each: boxed(LawSpec::Bernoulli { p: 0.4 }),
            },
            LawSpec::Binomial { trials: 5, p: 0.2 },
        ),
        (
            // A geometric number of failures, each worth a unit, thinned: Poisson–logarithmic sums are negative
            // binomial; here a Poisson number of constants.
            LawSpec::Compound {
                count: boxed(LawSpec::Poisson { rate: 3.0 }),
                each: boxed(LawSpec::Constant { value: 2.0 }),
            },
            LawSpec::Affine { law: boxed(LawSpec::Poisson { rate: 3.0 }), add: 0.0, multiply: 2.0 },
        ),
        (
            // Geometric sums of exponentials (from 1) are exponential; from 0 an atom stays.
            LawSpec::Compound {
                count: boxed(LawSpec::Geometric { p: 0.25 }),
                each: boxed(LawSpec::Exponential { mean: 1.0 }),
            },
            mixture(0.25, LawSpec::Constant { value: 0.0 }, 0.75, LawSpec::Exponential { mean: 4.0 }),
        ),
    ];
    for (one, other) in pairs {
        let (a, b) = (compiled(one.clone()), compiled(other));
        for level in [0.02, 0.3, 0.5, 0.9, 0.9999] {
            let x = b.quantile(level) + 1e-3;
            assert!((a.at_or_below(x) - b.at_or_below(x)).abs() < 1e-13, "{one:?} at {x}");
            assert!((a.above(x) / b.above(x) - 1.0).abs() < 1e-11 || b.above(x) == 0.0, "{one:?} at {x}");
        }
        assert!((a.sd().unwrap() / b.sd().unwrap() - 1.0).abs() < 1e-12, "{one:?}");
        assert!((a.skewness().unwrap_or(0.0) - b.skewness().unwrap_or(0.0)).abs() < 1e-11, "{one:?}");
    }
}

#[test]
fn compound_tails_keep_relative_accuracy() {
    // Poisson(3) many ones: P(N = 120) from the Poisson formula.
    let law = compiled(LawSpec::Compound {
        count: boxed(LawSpec::Poisson { rate: 6.0 }),
        each: boxed(LawSpec::Bernoulli { p: 0.5 }),
    });
    let expected = compiled(LawSpec::Poisson { rate: 3.0 });
    for k in [0.0, 3.0, 20.0] {
        let (a, b) = (law.at_or_above(k), expected.at_or_above(k));
        assert!((a / b - 1.0).abs() < 1e-12, "{k}: {a:e} {b:e}");
    }
}

#[test]
fn compound_of_lognormals_can_be_drawn_from_and_has_moments() {
    use rand::SeedableRng;
    let law = compiled(LawSpec::Compound {
        count: boxed(LawSpec::Poisson { rate: 4.0 }),
        each: boxed(lognormal(0.0, 0.5)),
    });
    assert!(law.only_simulation.is_some());
    // Cumulants of a compound Poisson law are rate·E X^k, E X^k = e^{k²/8} here.
    let moment = |k: f64| 4.0 * (k * k / 8.0).exp();
    assert!((law.mean().unwrap() / moment(1.0) - 1.0).abs() < 1e-13);
    assert!((law.sd().unwrap() / moment(2.0).sqrt() - 1.0).abs() < 1e-13);
    assert!((law.skewness().unwrap() / (moment(3.0) / moment(2.0).powf(1.5)) - 1.0).abs() < 1e-12);
    assert!((law.excess_kurtosis().unwrap() / (moment(4.0) / moment(2.0).powi(2)) - 1.0).abs() < 1e-12);
    let mut random = rand::rngs::SmallRng::seed_from_u64(1);
    let count = 40_000;
    let mean = (0..count).map(|_| law.sample(&mut random)).sum::<f64>() / f64::from(count);
    let error = law.sd().unwrap() / f64::from(count).sqrt();
    assert!((mean - law.mean().unwrap()).abs() < 4.0 * error);
    assert!((law.share_of_zeros() - (-4.0f64).exp()).abs() < 0.01);
    let capped = LawSpec::Cap {
        law: boxed(LawSpec::Compound {
            count: boxed(LawSpec::Poisson { rate: 4.0 }),
            each: boxed(lognormal(0.0, 0.5)),
        }),
        low: None,
        high: Some(3.0),
    };
    assert!(problems(capped)[0].contains("can only be simulated"));
}

#[test]
fn warnings_name_what_is_missing() {
    let warned = |spec: LawSpec, words: &str| {
        let law = compiled(spec);
        assert!(law.warnings.iter().any(|w| w.contains(words)), "{:?}", law.warnings);
    };
    warned(LawSpec::Lomax { shape: 2.3, scale: 1.0 }, "no third moment: convergence is slower than 1/√n");
    warned(LawSpec::Lomax { shape: 1.7, scale: 1.0 }, "infinite variance");
    warned(LawSpec::StudentT { df: 1.0, location: None, scale: None }, "no mean");
    warned(LawSpec::Lomax { shape: 3.5, scale: 1.0 }, "no fourth moment");
    let data = |values| LawSpec::Data { values: Some(values), path: None, column: None, tail: None };
    warned(data(vec![2.0, 2.0]), "all 2 pilot values are equal");
    warned(data(vec![1.0, 2.0, 4.0]), "3 pilot values");
    assert!(compiled(LawSpec::Exponential { mean: 1.0 }).warnings.is_empty());
    let infinite = compiled(LawSpec::Lomax { shape: 1.7, scale: 1.0 });
    assert!(infinite.mean().is_some() && infinite.variance().is_none() && infinite.skewness().is_none());
}

#[test]
fn fitted_tail_continues_the_data() {
    let values: Vec<f64> = (0..2000).map(|i| -(1.0 - (f64::from(i) + 0.5) / 2000.0).ln()).collect();
    let law = compiled(LawSpec::Data {
        values: Some(values),
        path: None,
        column: None,
        tail: Some(DataTail::GeneralizedPareto { above_quantile: 0.9 }),
    });
    // Quantiles of the exponential law are continued by an (almost) exponential tail.
    assert!((law.above(-(1e-4f64).ln()) / 1e-4 - 1.0).abs() < 0.1);
    assert!((law.at_or_below(1.0) - (1.0 - (-1.0f64).exp())).abs() < 1e-3);
    assert_eq!(law.atoms.len(), 1800);
    assert!((law.mean().unwrap() - 1.0).abs() < 0.01);
}

#[test]
fn atoms_are_merged_and_met_up_to_rounding() {
    let law = compiled(LawSpec::Table { values: vec![0.1 + 0.2, 0.3, 1.0], weights: vec![1.0, 1.0, 2.0] });
    assert_eq!(law.atoms.len(), 2);
    assert_eq!(law.at_or_below(0.3), 0.5);
    assert_eq!(law.below(0.30000000000000004), 0.0);
    assert_eq!(law.at_or_above(0.9999999999999999), 0.5);
    assert_eq!(law.quantile(0.5), law.atoms[0].value);
    assert_eq!(law.quantile(0.500001), 1.0);
}

#[test]
fn rounding_ties_go_to_even() {
    let law = compiled(LawSpec::Round {
        law: boxed(LawSpec::Table { values: vec![0.5, 1.5, 2.5, -0.5], weights: vec![1.0; 4] }),
        step: 1.0,
    });
    let pairs: Vec<(f64, f64)> = law.atoms.iter().map(|a| (a.value, a.mass)).collect();
    assert_eq!(pairs, [(0.0, 0.5), (2.0, 0.5)]);
    // A normal law rounded to a coarse step: cells from the normal distribution function, far tails included.
    let law = compiled(LawSpec::Round { law: boxed(LawSpec::Normal { mean: 0.0, sd: 1.0 }), step: 2.0 });
    let cell = law.atoms.iter().find(|a| a.value == 8.0).unwrap().mass;
    let expected = crate::special::normal::above(7.0) - crate::special::normal::above(9.0);
    assert!((cell / expected - 1.0).abs() < 1e-13);
}

#[test]
fn rounding_a_heavy_tail_is_left_to_simulation_with_exact_moments() {
    let rounded = |law: LawSpec| compiled(LawSpec::Round { law: boxed(law), step: 0.5 });
    let law = rounded(LawSpec::Lomax { shape: 4.5, scale: 3.0 });
    assert!(law.only_simulation.as_ref().unwrap().contains("rounding leaves"));
    // The same to 1e-9 from a table cut where the tail no longer counts: Σ over 4 million cells of the survival.
    let survival = |k: f64| (1.0 + (k - 0.5) * 0.5 / 3.0f64).powf(-4.5);
    let cells = (1..4_000_000u32).rev().map(f64::from);
    let (mut first, mut second) = (0.0, 0.0);
    for k in cells {
        // E g(K) = Σ (g(k) − g(k−1)) P(K ≥ k).
        first += survival(k);
        second += (2.0 * k - 1.0) * survival(k);
    }
    let (mean, sd) = (0.5 * first, 0.5 * (second - first * first).sqrt());
    assert!((law.mean().unwrap() / mean - 1.0).abs() < 1e-12, "{} {mean}", law.mean().unwrap());
    assert!((law.sd().unwrap() / sd - 1.0).abs() < 1e-11, "{} {sd}", law.sd().unwrap());
    assert!((law.above(10.0) - (1.0 + 10.25 / 3.0f64).powf(-4.5)).abs() < 1e-15);
    assert!((law.at_or_above(10.0) - (1.0 + 9.75 / 3.0f64).powf(-4.5)).abs() < 1e-15);
    let cells = law.quantile(0.5) / 0.5;
    assert!((cells - cells.round()).abs() < 1e-14, "{cells}");
}

mod random_laws {
    use super::*;
    use crate::law::MixturePart;
    use proptest::prelude::*;

    /// Any law, nested up to three operations deep, with ordinary and extreme parameters.
    fn any_law() -> impl Strategy<Value = LawSpec> {
        let size = || prop_oneof![0.05..20.0f64, Just(1e-12), Just(1e-300), Just(1e8), Just(1e290)];
        let shape = || prop_oneof![0.05..8.0f64, Just(1e-3), Just(150.0), Just(1e7)];
        let value = || prop_oneof![-20.0..20.0f64, Just(0.0), Just(-1e12), Just(1e290)];
        let p = || prop_oneof![0.0..1.0f64, Just(1e-12), Just(1.0)];
        let leaf = prop_oneof![
            value().prop_map(|value| LawSpec::Constant { value }),
            p().prop_map(|p| LawSpec::Bernoulli { p }),
            (1..3000u64, p()).prop_map(|(trials, p)| LawSpec::Binomial { trials, p }),
            size().prop_map(|rate| LawSpec::Poisson { rate: rate.min(1e4) }),
            p().prop_map(|p| LawSpec::Geometric { p: p.max(1e-3) }),
            (value(), size()).prop_map(|(mean, sd)| LawSpec::Normal { mean, sd }),
            (value(), size()).prop_map(|(low, width)| LawSpec::Uniform { low, high: low + width }),
            size().prop_map(|mean| LawSpec::Exponential { mean }),
            (shape(), size()).prop_map(|(shape, scale)| LawSpec::Gamma { shape, scale }),
            (shape(), size()).prop_map(|(shape, scale)| LawSpec::Weibull { shape, scale }),
            (-5.0..5.0f64, shape()).prop_map(|(m, s)| lognormal(m, s.min(20.0))),
            (shape(), size()).prop_map(|(shape, scale)| LawSpec::Lomax { shape, scale }),
            (shape(), shape()).prop_map(|(a, b)| LawSpec::Beta { a, b, low: None, high: None }),
            (value(), size(), -3.0..3.0f64)
                .prop_map(|(threshold, scale, shape)| LawSpec::GeneralizedPareto { threshold, scale, shape }),
            (value(), size()).prop_map(|(mean, scale)| LawSpec::Logistic { mean, scale }),
            (shape(), size()).prop_map(|(df, scale)| LawSpec::StudentT {
                df,
                location: None,
                scale: Some(scale)
            }),
            (size(), size()).prop_map(|(mean, shape)| LawSpec::InverseGaussian { mean, shape }),
        ];
        leaf.prop_recursive(3, 8, 2, move |inner| {
            let law = || inner.clone().prop_map(Box::new);
            prop_oneof![
                (size(), inner.clone(), size(), inner.clone()).prop_map(|(v, one, w, other)| {
                    LawSpec::Mixture {
                        parts: vec![
                            MixturePart { weight: v, law: one },
                            MixturePart { weight: w, law: other },
                        ],
                    }
                }),
                (law(), value(), value()).prop_map(|(law, add, multiply)| LawSpec::Affine {
                    law,
                    add,
                    multiply
                }),
                (law(), value(), size()).prop_map(|(law, low, width)| LawSpec::Cap {
                    law,
                    low: Some(low),
                    high: Some(low + width)
                }),
                (law(), value()).prop_map(|(law, low)| LawSpec::Restrict { law, low: Some(low), high: None }),
                (law(), size()).prop_map(|(law, step)| LawSpec::Round { law, step }),
                (0..6u64, law()).prop_map(|(trials, each)| LawSpec::Compound {
                    count: Box::new(LawSpec::Binomial { trials: trials + 1, p: 0.4 }),
                    each
                }),
            ]
        })
    }

    proptest! {
        #![proptest_config(ProptestConfig { cases: 60, failure_persistence: None, rng_seed: proptest::test_runner::RngSeed::Fixed(20_260_101), ..ProptestConfig::default() })]
        #[test]
        fn never_panic_and_stay_finite(spec in any_law()) {
            use rand::SeedableRng;
            let Ok(law) = spec.compile() else { return Ok(()) };
            for moment in [
                law.mean(), law.sd(), law.variance(), law.skewness(), law.excess_kurtosis(),
                law.third_absolute_central_moment(), law.third_absolute_ratio(),
            ] {
                prop_assert!(moment.is_none_or(f64::is_finite), "{:?}", law.moments);
            }
            // Lyapunov: E|X − μ|³ ≥ sd³. Loosely, because limits a few units in the last place apart leave a
            // piece whose width is known to as few digits.
            if let Some(ratio) = law.third_absolute_ratio() {
                prop_assert!(ratio >= 1.0 - 1e-3, "ratio {ratio}");
                if let Some(skewness) = law.skewness() {
                    prop_assert!(skewness.abs() <= ratio * (1.0 + 1e-3), "skewness {skewness}, ratio {ratio}");
                }
            }
            if let (Some(skewness), Some(excess)) = (law.skewness(), law.excess_kurtosis()) {
                prop_assert!(excess >= skewness * skewness - 2.0 - 1e-3 * (1.0 + skewness * skewness));
            }
            let masses = law.atoms.iter().map(|a| a.mass).sum::<f64>()
                + law.pieces.iter().map(crate::law::Piece::mass).sum::<f64>();
            prop_assert!((masses - 1.0).abs() < 1e-11 || law.share_is_opaque(), "masses {masses}");
            let mut before = 0.0;
            for level in [1e-15, 1e-4, 0.2, 0.5, 0.9, 0.9999] {
                let x = law.quantile(level);
                let (below, above) = (law.at_or_below(x), law.above(x));
                prop_assert!(x.is_finite() && !law.density(x).is_nan());
                prop_assert!((below + above - 1.0).abs() < 1e-10 || law.share_is_opaque());
                prop_assert!(below >= before && law.quantile_above(level).is_finite());
                before = below;
            }
            let mut random = rand::rngs::SmallRng::seed_from_u64(7);
            for _ in 0..20 {
                let draw = law.sample(&mut random);
                prop_assert!(draw.is_finite() && draw >= law.support.0 && draw <= law.support.1, "drew {draw}");
            }
            for piece in law.pieces.iter().take(3) {
                prop_assert!(piece.panels().iter().all(|(a, b)| a.is_finite() && b.is_finite() && a < b));
            }
            prop_assert_eq!(law.reflected().sd(), law.sd());
        }
    }
}

//! A report made by hand for the tests of this crate: the mean of 30 exponential summands, whose sum is a gamma
//! law with an elementary distribution function.

use gaussgap_conclusions::report::*;
use gaussgap_conclusions::scenario::*;
use gaussgap_simulation::figure::Figure;
use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::sum::{Route, RouteChoice, Side};

/// P(G ≤ x) of the gamma law with whole shape n and scale 1: 1 − e^(−x) Σ_{k<n} x^k/k!.
fn erlang_at_or_below(n: u32, x: f64) -> f64 {
    if x <= 0.0 {
        return 0.0;
    }
    let (mut term, mut sum) = (1.0, 0.0);
    for k in 0..n {
        if k > 0 {
            term *= x / f64::from(k);
        }
        sum += term;
    }
    (1.0 - (-x).exp() * sum).max(0.0)
}

/// Φ by Simpson's rule on the density: plenty for a picture.
fn normal_at_or_below(z: f64) -> f64 {
    let steps = 400;
    let width = z / f64::from(steps);
    let density = |x: f64| (-x * x / 2.0).exp() / (2.0 * std::f64::consts::PI).sqrt();
    let mut sum = density(0.0) + density(z);
    for k in 1..steps {
        sum += density(f64::from(k) * width) * if k % 2 == 1 { 4.0 } else { 2.0 };
    }
    0.5 + sum * width / 3.0
}

/// The mean of 30 exponential boarding times, assessed.
pub fn exponential() -> Report {
    let n = 30_u32;
    let root = f64::from(n).sqrt();
    let at = |z: f64| erlang_at_or_below(n, f64::from(n) + z * root);
    let z: Vec<f64> = (0..=320).map(|k| -8.0 + f64::from(k) * 0.05).collect();
    let at_or_below: Vec<f64> = z.iter().map(|&z| at(z)).collect();
    let normal: Vec<f64> = z.iter().map(|&z| normal_at_or_below(z)).collect();
    let growth_n: Vec<u64> = vec![1, 2, 5, 10, 30, 100, 300, 1000, 3000, 10_000];
    let leading: Vec<Option<f64>> = growth_n.iter().map(|&n| Some(0.132_981 / (n as f64).sqrt())).collect();
    Report {
        format: REPORT_FORMAT.to_owned(),
        program: Program { name: "gaussgap".to_owned(), version: "0.1.0".to_owned() },
        scenario: Scenario {
            format: SCENARIO_FORMAT.to_owned(),
            title: Some("Boarding time per car".to_owned()),
            notes: None,
            quantity: Some(Quantity { name: Some("boarding time".to_owned()), unit: Some("s".to_owned()) }),
            source: Source::Like { law: LawSpec::Exponential { mean: 48.0 }, n: u64::from(n), dependence: None },
            statistic: Statistic::Mean,
            claim: Claim::Curve,
            tolerance: Tolerance::Absolute(0.01),
            method: MethodSpec { route: RouteChoice::Auto, draws: 4_000_000, seed: 20_260_101, confidence: 0.999 },
            probe_z: (-4..=4).map(f64::from).collect(),
            search: Search { up_to: 10_000 },
        },
        summand: Summand {
            mean: Some(48.0),
            sd: Some(48.0),
            skewness: Some(2.0),
            excess_kurtosis: Some(6.0),
            third_absolute_central_moment: Some(266_978.0),
            support: [Some(0.0), None],
            lattice: None,
            atoms: vec![],
            warnings: vec![],
        },
        summands: vec![],
        sum: SumFacts {
            mean: Some(1440.0),
            sd: Some(48.0 * root),
            skewness: Some(2.0 / root),
            excess_kurtosis: Some(6.0 / f64::from(n)),
        },
        method: MethodFacts {
            route: Some(Route::ClosedForm),
            detail: "gamma law with shape 30".to_owned(),
            seconds: 0.004,
            draws: None,
            seed: None,
        },
        distance: DistanceFacts {
            kolmogorov: Some(Figure::bound(0.024_291, 5e-7)),
            at_z: Some(-0.06),
            side: Some(Side::At),
            leading_term: Some(0.132_981 / root),
            berry_esseen: Some(BerryEsseen {
                value: 0.169,
                constant: 0.3031,
                source: "Shevtsova 2013, Inform. Primen. 7(1):124–125".to_owned(),
            }),
        },
        tails: (-4..=4)
            .map(|z| {
                let z = f64::from(z);
                let value = at(z);
                TailRow {
                    z,
                    at_or_below: Some(Figure::bound(value, 1e-13)),
                    below: Some(Figure::bound(value, 1e-13)),
                    above: Some(Figure::bound(1.0 - value, 1e-13)),
                    normal_at_or_below: normal_at_or_below(z),
                    normal_above: normal_at_or_below(-z),
                }
            })
            .collect(),
        claim: ClaimFacts {
            kind: "curve".to_owned(),
            nominal: 0.0,
            actual: Some(Figure::bound(0.024_291, 5e-7)),
            difference: Some(0.024_291),
            allowed: 0.01,
            miss_low: None,
            miss_high: None,
            nominal_miss_low: None,
            nominal_miss_high: None,
            normal_quantile: None,
            actual_quantile: None,
            guarantees: None,
            needed_n: None,
        },
        verdict: Verdict {
            state: State::Fails,
            because: "Not safe at n = 30: probabilities are off by up to 2.4 points, more than the allowed 1 point."
                .to_owned(),
            safe_from: Some(177),
            last_failing: Some(176),
            checked: Some(Checked { from: 1, to: 10_000, every_n: true, which: None }),
        },
        remedies: vec![
            Remedy {
                name: "One-term Edgeworth correction".to_owned(),
                actual: Some(Figure::bound(0.0024, 1e-9)),
                holds: true,
                note: "needs the skewness of the law".to_owned(),
            },
            Remedy {
                name: "Take more: n = 177".to_owned(),
                actual: Some(Figure::bound(0.00999, 1e-9)),
                holds: true,
                note: "147 more observations".to_owned(),
            },
        ],
        rules_of_thumb: vec![RuleOfThumb {
            rule: "n ≥ 30".to_owned(),
            source: "common practice".to_owned(),
            n: Some(30),
            says: "enough".to_owned(),
            agrees: Some(false),
        }],
        growth: Growth {
            n: growth_n.clone(),
            kolmogorov: leading.iter().map(|value| value.map(|value| value * 0.995)).collect(),
            berry_esseen: growth_n.iter().map(|&n| Some((0.926 / (n as f64).sqrt()).min(0.540_937))).collect(),
            leading_term: leading,
        },
        curve: Curve { z, below: at_or_below.clone(), at_or_below, normal },
        cautions: vec!["The figures assume independent boarding times with exactly this law.".to_owned()],
    }
}

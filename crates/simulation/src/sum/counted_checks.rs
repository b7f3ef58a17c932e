//! Checks of the closed-form and lattice routes against references made by `references/counted_sums.py`.

use super::closed_form::ClosedFormSum;
use super::lattice::LatticeSum;
use super::{Method, Side, StandardizedSum, SumError, SumSpec, Term};
use crate::law::{Atom, ClosedFamily, ClosedForm, Lattice, Law, LawParts, Moments};
use crate::special::normal;
use crate::work::Work;

/// Rows `case,k,P(K<=k),P(K>=k)` and `case,kolmogorov,value,k`: mpmath 1.3.0, 20 digits.
const REFERENCES: &str = include_str!("../../references/counted_sums.csv");

fn law(atoms: Vec<Atom>, lattice: Option<Lattice>, closed_form: Option<ClosedForm>) -> Law {
    let moments = Moments {
        mean: None,
        variance: None,
        skewness: None,
        excess_kurtosis: None,
        third_absolute_central: None,
    };
    Law::from_parts(LawParts {
        atoms,
        missing_mass: 0.0,
        pieces: Vec::new(),
        lattice,
        closed_form,
        moments,
        support: (f64::NEG_INFINITY, f64::INFINITY),
        only_simulation: None,
        warnings: Vec::new(),
    })
}

fn named(family: ClosedFamily) -> Law {
    law(Vec::new(), None, Some(ClosedForm { family, add: 0.0, multiply: 1.0 }))
}

fn table(values: &[f64], weights: &[f64], span: f64) -> Law {
    let total: f64 = weights.iter().sum();
    let atoms = values.iter().zip(weights).map(|(&value, &w)| Atom { value, mass: w / total }).collect();
    law(atoms, Some(Lattice { offset: values[0], span }), None)
}

fn closed(law: &Law, n: u64) -> ClosedFormSum {
    ClosedFormSum::build(&SumSpec::like_summands(law.clone(), n), &Method::default(), &Work::new()).unwrap()
}

fn lattice(law: &Law, n: u64) -> LatticeSum {
    LatticeSum::build(&SumSpec::like_summands(law.clone(), n), &Method::default(), &Work::new()).unwrap()
}

/// The distribution a case of the reference file names.
fn distribution(case: &str) -> Box<dyn StandardizedSum> {
    let words: Vec<&str> = case.split(' ').collect();
    let number = |i: usize| words[i].parse::<f64>().unwrap();
    let n = words[words.len() - 1].parse::<u64>().unwrap_or(1);
    match words[0] {
        "binomial" => {
            let law = named(ClosedFamily::Binomial { trials: 1, p: number(2) });
            Box::new(closed(&law, words[1].parse().unwrap()))
        }
        "poisson" => Box::new(closed(&named(ClosedFamily::Poisson { rate: number(1) }), n)),
        "negative-binomial" => {
            Box::new(closed(&named(ClosedFamily::NegativeBinomial { size: number(1), p: number(2) }), 1))
        }
        _ => {
            let law = match words[1] {
                "lumpy" => table(&[0.0, 1.0, 2.0, 5.0], &[10.0, 6.0, 3.0, 1.0], 1.0),
                "die" => table(&[0.0, 1.0, 2.0, 3.0, 4.0, 5.0], &[1.0; 6], 1.0),
                "rare" => table(&[0.0, 1.0, 250.0], &[900.0, 99.0, 1.0], 1.0),
                _ => table(&[0.0, 97.0, 250.0], &[50.0, 30.0, 20.0], 1.0),
            };
            Box::new(lattice(&law, n))
        }
    }
}

/// Compares every row of the cases `wanted` picks; returns the worst (absolute error ≥ 1e-4, relative below).
fn compare(wanted: impl Fn(&str) -> bool) {
    let mut current: Option<(String, Box<dyn StandardizedSum>)> = None;
    let (mut compared, mut worst_absolute, mut worst_relative, mut worst_stated) =
        (0, 0.0f64, 0.0f64, 0.0f64);
    for row in REFERENCES.lines().filter(|row| wanted(row)) {
        let cells: Vec<&str> = row.split(',').collect();
        let case = cells[0];
        if current.as_ref().is_none_or(|(name, _)| name != case) {
            if current.is_some() {
                println!(
                    "   abs {worst_absolute:.1e} rel {worst_relative:.1e} stated rel {worst_stated:.1e}"
                );
                (worst_absolute, worst_relative, worst_stated) = (0.0, 0.0, 0.0);
            }
            current = Some((case.to_owned(), distribution(case)));
            println!("{case}");
        }
        let sum = &current.as_ref().unwrap().1;
        let moments = sum.moments();
        if cells[1] == "kolmogorov" {
            let truth: f64 = cells[2].parse().unwrap();
            let distance = sum.kolmogorov();
            let error = (distance.kolmogorov.value - truth).abs();
            println!("   distance {truth} error {error:.1e} stated {:.1e}", distance.kolmogorov.error);
            assert!(error <= distance.kolmogorov.error, "{row}: {distance:?}");
            assert!(distance.kolmogorov.error < 1e-10, "{row}: {distance:?}");
            compared += 1;
            continue;
        }
        let z = (cells[1].parse::<f64>().unwrap() - moments.mean) / moments.sd;
        for (figure, truth) in [(sum.at_or_below(z), cells[2]), (sum.at_or_above(z), cells[3])] {
            let truth: f64 = truth.parse().unwrap();
            let error = (figure.value - truth).abs();
            assert!(error <= figure.error, "{row}: {figure:?} error {error:e}");
            if truth >= 1e-4 {
                worst_absolute = worst_absolute.max(error);
                assert!(error <= 1e-11, "{row}: {figure:?} error {error:e}");
            }
            if truth > 1e-290 {
                worst_relative = worst_relative.max(error / truth);
                worst_stated = worst_stated.max(figure.error / truth);
            }
            if truth >= 1e-100 {
                assert!(error <= 1e-8 * truth, "{row}: {figure:?} relative error {:e}", error / truth);
                assert!(figure.error <= 1e-8 * truth, "{row}: {figure:?}");
            }
            compared += 1;
        }
    }
    println!("   abs {worst_absolute:.1e} rel {worst_relative:.1e} stated rel {worst_stated:.1e}");
    assert!(compared > 20);
}

#[test]
fn named_counts_agree_with_references() {
    compare(|row| !row.starts_with("table"));
}

#[test]
fn tables_agree_with_references() {
    compare(|row| row.starts_with("table"));
}

#[test]
fn bernoulli_half_has_the_published_distances() {
    // facts.md A (Hipp–Mattner 2007): Δ = C(n, n/2)/2^(n+1) for even n, Φ(1/√n) − ½ for odd n.
    let law = named(ClosedFamily::Binomial { trials: 1, p: 0.5 });
    let two_points = table(&[0.0, 1.0], &[1.0, 1.0], 1.0);
    let mut central = 1.0; // C(n, n/2)/2^n
    for n in 1..=300u64 {
        if n % 2 == 0 {
            central *= (n - 1) as f64 / n as f64;
        }
        let truth =
            if n % 2 == 0 { 0.5 * central } else { normal::at_or_below(1.0 / (n as f64).sqrt()) - 0.5 };
        for sum in [&closed(&law, n) as &dyn StandardizedSum, &lattice(&two_points, n)] {
            let distance = sum.kolmogorov().kolmogorov;
            assert!((distance.value - truth).abs() <= distance.error.min(1e-12), "{n}: {distance:?} {truth}");
        }
    }
    let n = 1_000_001;
    let truth = normal::at_or_below(1.0 / (n as f64).sqrt()) - 0.5;
    for sum in [&closed(&law, n) as &dyn StandardizedSum, &lattice(&two_points, n)] {
        let distance = sum.kolmogorov().kolmogorov;
        assert!((distance.value - truth).abs() <= distance.error.min(1e-11), "{distance:?} {truth}");
    }
}

#[test]
fn exponential_and_chi_square_have_the_published_values() {
    let exponential = named(ClosedFamily::Gamma { shape: 1.0, scale: 2.0 });
    // facts.md K, exponential distances.
    for (n, distance) in
        [(1, 0.158655), (2, 0.094463), (5, 0.059629), (10, 0.042114), (30, 0.024291), (100, 0.0133)]
    {
        let found = closed(&exponential, n).kolmogorov();
        assert!((found.kolmogorov.value - distance).abs() < 6e-7, "{n}: {found:?}");
    }
    // facts.md D: √n Δ → 2/(6√(2π)) = 0.132981 from above.
    let far = closed(&exponential, 1_000_000_000).kolmogorov().kolmogorov;
    assert!((far.value * 1e9f64.sqrt() - 0.13298076).abs() < 1e-7, "{far:?}");
    // 2·(sum of 5 unit exponentials) is χ² with 10 degrees of freedom; A&S 26.7 and 26.8 as in facts.md K.
    let sum = closed(&exponential, 5);
    for (x, q) in [(5.0, 0.89118), (10.0, 0.44049), (20.0, 0.02925)] {
        assert!((sum.above((x - 10.0) / 20f64.sqrt()).value - q).abs() < 6e-6);
    }
    for (q, x) in [(0.05, 18.30704), (0.025, 20.48318)] {
        let z = sum.quantile(1.0 - q);
        assert!((10.0 + 20f64.sqrt() * z.value - x).abs() < 6e-6, "{z:?}");
    }
}

#[test]
fn inverse_gaussian_keeps_both_tails() {
    // mpmath 1.3.0 at 60 digits, F = Φ(a) + e^(2r)Φ(−b), r = shape/mean of the sum; 17 digits.
    let rows: [(f64, f64, f64, f64); 9] = INVERSE_GAUSSIAN;
    for (ratio, z, lower, upper) in rows {
        let law = named(ClosedFamily::InverseGaussian { mean: 3.0, shape: 3.0 * ratio / 4.0 });
        let sum = closed(&law, 4);
        for (figure, truth) in [(sum.at_or_below(z), lower), (sum.above(z), upper)] {
            let error = (figure.value - truth).abs();
            assert!(
                error <= figure.error && figure.error <= 1e-10 * truth,
                "{ratio} {z}: {figure:?} {truth:e}"
            );
        }
    }
}

const INVERSE_GAUSSIAN: [(f64, f64, f64, f64); 9] = [
    (0.01, -0.099, 3.2049111633753882e-1, 6.7950888366246118e-1),
    (0.01, 3.0, 9.9343927554648563e-1, 6.5607244535143718e-3),
    (0.01, 40.0, 9.9991491917568828e-1, 8.5080824311721802e-5),
    (1.0, -0.9, 4.0761113207110075e-3, 9.9592388867928899e-1),
    (1.0, 0.5, 8.1076799299997907e-1, 1.8923200700002093e-1),
    (1.0, 20.0, 9.9999946392450072e-1, 5.3607549928404272e-7),
    (50.0, -6.0, 1.1023318283201451e-53, 1.0),
    (50.0, 6.0, 9.9999648607093585e-1, 3.5139290641466099e-6),
    (1000000.0, -8.0, 4.806783784938334e-16, 9.9999999999999952e-1),
];

#[test]
fn jumps_snap_and_have_two_sides() {
    // 3 000 trials at 0.001: P(S ≤ 3) includes 3, however 3 000 × 0.001 rounds.
    let sum = closed(&named(ClosedFamily::Binomial { trials: 3000, p: 0.001 }), 1);
    let z = (3.0 - 3000.0 * 0.001) / (3000.0 * 0.001 * 0.999f64).sqrt();
    let jump = sum.at_or_below(z).value - sum.below(z).value;
    assert!((jump - 0.224153).abs() < 1e-3, "{jump}");
    assert!((sum.at_or_below(z).value + sum.above(z).value - 1.0).abs() < 1e-13);
    assert!((sum.below(z).value + sum.at_or_above(z).value - 1.0).abs() < 1e-13);
    let jumps = sum.jumps(-1.0, 1.0, 10).unwrap();
    assert_eq!(jumps.len(), 3);
    for z in jumps {
        assert!(sum.at_or_below(z).value > sum.below(z).value + 0.1);
    }
    assert_eq!(sum.jumps(-3.0, 3.0, 2), None);
}

#[test]
fn wide_values_keep_their_own_span() {
    let law = table(&[0.0, 250.0], &[0.7, 0.3], 250.0);
    let sum = lattice(&law, 1_000_000);
    let twin = closed(&named(ClosedFamily::Binomial { trials: 1, p: 0.3 }), 1_000_000);
    for z in [-9.0, -4.0, -1.0, 0.0, 0.5, 2.0, 6.0, 11.0] {
        for (a, b) in [(sum.at_or_below(z), twin.at_or_below(z)), (sum.at_or_above(z), twin.at_or_above(z))] {
            assert!((a.value - b.value).abs() <= a.error + b.error, "{z}: {a:?} {b:?}");
        }
    }
    assert!((sum.lattice_span().unwrap() - 1.0 / 210_000f64.sqrt()).abs() < 1e-12);
}

#[test]
fn two_groups_meet_on_one_lattice() {
    // Second mean minus first: 3 : 2 copies of a 0/1/2 law; twin by direct enumeration.
    let law = table(&[0.0, 1.0, 2.0], &[0.5, 0.3, 0.2], 1.0);
    let convolve = |n: usize| {
        let mut f = vec![1.0];
        for _ in 0..n {
            let mut next = vec![0.0; f.len() + 2];
            for (i, x) in f.iter().enumerate() {
                for (j, p) in [0.5, 0.3, 0.2].iter().enumerate() {
                    next[i + j] += x * p;
                }
            }
            f = next;
        }
        f
    };
    // Index units of 1/(60·scale): 3·B − 2·A. The larger groups take the transform, the smaller are convolved.
    for scale in [1, 10] {
        let terms = vec![
            Term { law: law.clone(), count: 30 * scale, multiply: -1.0 / (30 * scale) as f64 },
            Term { law: law.clone(), count: 20 * scale, multiply: 1.0 / (20 * scale) as f64 },
        ];
        let sum = LatticeSum::build(&SumSpec { terms }, &Method::default(), &Work::new()).unwrap();
        assert_eq!(sum.detail().contains("transform"), scale > 1);
        let (a, b) = (convolve(30 * scale as usize), convolve(20 * scale as usize));
        let moments = sum.moments();
        assert!(moments.mean.abs() < 1e-14);
        for limit in [-300i64, -30, -7, -1, 0, 1, 12, 45, 200] {
            let mut truth = 0.0;
            for (i, x) in a.iter().enumerate() {
                for (j, y) in b.iter().enumerate() {
                    if 3 * j as i64 - 2 * i as i64 <= limit {
                        truth += x * y;
                    }
                }
            }
            let figure = sum.at_or_below((limit as f64 / (60 * scale) as f64 - moments.mean) / moments.sd);
            let error = (figure.value - truth).abs();
            assert!(error <= figure.error + 1e-13 * truth, "{limit}: {figure:?} {truth}");
            assert!(figure.error <= 1e-8 * truth, "{limit}: {figure:?} {truth}");
        }
    }
}

#[test]
fn a_reflected_law_mirrors_its_twin() {
    let family = ClosedFamily::Poisson { rate: 2.5 };
    let minus = law(Vec::new(), None, Some(ClosedForm { family, add: 1.0, multiply: -2.0 }));
    let (mirror, plain) = (closed(&minus, 7), closed(&named(family), 7));
    for i in -40..=40 {
        let z = f64::from(i) * 0.13;
        assert_eq!(mirror.at_or_below(z), plain.at_or_above(-z));
        assert_eq!(mirror.below(z), plain.above(-z));
    }
    assert_eq!(mirror.kolmogorov().kolmogorov, plain.kolmogorov().kolmogorov);
    let distance = mirror.kolmogorov();
    let figure = if distance.side == Side::At {
        mirror.at_or_below(distance.at_z)
    } else {
        mirror.below(distance.at_z)
    };
    let gap = (figure.value - normal::at_or_below(distance.at_z)).abs();
    assert!((gap - distance.kolmogorov.value).abs() < 1e-13);
    assert!((mirror.moments().mean - 7.0 * (1.0 - 5.0)).abs() < 1e-12);
}

#[test]
fn quantiles_invert() {
    let sums: [Box<dyn StandardizedSum>; 4] = [
        Box::new(closed(&named(ClosedFamily::Binomial { trials: 50, p: 0.3 }), 2)),
        Box::new(lattice(&table(&[0.0, 1.0, 2.0, 5.0], &[10.0, 6.0, 3.0, 1.0], 1.0), 2000)),
        Box::new(closed(&named(ClosedFamily::Gamma { shape: 0.4, scale: 1.0 }), 3)),
        Box::new(closed(&named(ClosedFamily::InverseGaussian { mean: 1.0, shape: 0.7 }), 3)),
    ];
    for sum in &sums {
        for p in [1e-12, 1e-4, 0.025, 0.5, 0.8, 0.975, 0.9999, 1.0 - 1e-12] {
            let z = sum.quantile(p);
            assert!(z.error < 1e-9, "{} {p} {z:?}", sum.detail());
            let step = 2.0 * z.error;
            assert!(sum.at_or_below(z.value + step).value >= p * (1.0 - 1e-12), "{p} {z:?}");
            assert!(sum.below(z.value - step).value <= p * (1.0 + 1e-12), "{p} {z:?}");
        }
    }
    // Ties: n odd at one half, P(S ≤ (n−1)/2) = ½ exactly.
    let half = closed(&named(ClosedFamily::Binomial { trials: 1, p: 0.5 }), 101);
    assert!((half.quantile(0.5).value + 0.5 / (101f64 / 4.0).sqrt()).abs() < 1e-14);
}

#[test]
fn refuses_what_it_cannot_do() {
    let law = named(ClosedFamily::Normal { mean: 1.0, sd: 0.0 });
    let spec = SumSpec::like_summands(law, 3);
    assert_eq!(
        ClosedFormSum::build(&spec, &Method::default(), &Work::new()).unwrap_err(),
        SumError::NoVariance
    );
    assert!(matches!(
        LatticeSum::build(&spec, &Method::default(), &Work::new()),
        Err(SumError::NotAvailable { .. })
    ));
    let work = Work::new();
    work.cancel();
    assert!(matches!(ClosedFormSum::build(&spec, &Method::default(), &work), Err(SumError::Cancelled(_))));
}

#[test]
fn transforms_agree_with_convolution_on_random_tables() {
    // The slow obvious twin: repeated convolution, all terms positive, relative error below 1e-11 at these sizes.
    let mut state = 12345u64;
    let mut random = move || {
        state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        (state >> 11) as f64 / (1u64 << 53) as f64
    };
    let (mut compared, mut closest) = (0, 0.0f64);
    for _ in 0..60 {
        let mut values = vec![0.0, 1.0];
        let reach = 10f64.powf(0.5 + 1.6 * random()).floor();
        for _ in 0..(random() * 5.0) as usize {
            values.push((reach * random()).floor() + 2.0);
        }
        values.sort_by(f64::total_cmp);
        values.dedup();
        let weights: Vec<f64> = values.iter().map(|_| 10f64.powf(-5.0 * random() * random())).collect();
        let widest = values[values.len() - 1] as usize;
        let n = (1100 + (random() * 3000.0) as usize) / widest + 1;
        let law = table(&values, &weights, 1.0);
        let sum = lattice(&law, n as u64);
        assert!(sum.detail().contains("transform"));
        let total: f64 = weights.iter().sum();
        let mut f = vec![1.0];
        for _ in 0..n {
            let mut next = vec![0.0; f.len() + widest];
            for (i, x) in f.iter().enumerate() {
                for (value, weight) in values.iter().zip(&weights) {
                    next[i + *value as usize] += x * weight / total;
                }
            }
            f = next;
        }
        let moments = sum.moments();
        let running = |masses: &mut dyn Iterator<Item = &f64>| -> Vec<f64> {
            masses
                .scan(0.0, |sum, x| {
                    *sum += x;
                    Some(*sum)
                })
                .collect()
        };
        let lower = running(&mut f.iter());
        let mut upper = running(&mut f.iter().rev());
        upper.reverse();
        upper.push(0.0);
        for k in (0..f.len()).step_by(7) {
            // Each from its smaller side, where the twin is relatively accurate.
            let at_or_below = if lower[k] < 0.5 { lower[k] } else { 1.0 - upper[k + 1] };
            let at_or_above = if k == 0 {
                1.0
            } else if upper[k] < 0.5 {
                upper[k]
            } else {
                1.0 - lower[k - 1]
            };
            let z = (k as f64 - moments.mean) / moments.sd;
            for (figure, truth) in [(sum.at_or_below(z), at_or_below), (sum.at_or_above(z), at_or_above)] {
                let error = (figure.value - truth).abs();
                // The twin's own error: a few hundred units in the last place of the smaller side, and one of 1.
                let twin = 2e-13 * truth.min(1.0 - truth).abs() + 2e-16 + 1e-290;
                let allowed = figure.error + if truth > 0.5 { twin } else { 2e-13 * truth + 1e-290 };
                assert!(error <= allowed, "{values:?} {weights:?} n {n} k {k}: {figure:?} {truth:e}");
                if truth > 1e-100 {
                    assert!(figure.error <= 1e-8 * truth, "{values:?} {weights:?} n {n} k {k}: {figure:?}");
                }
                closest = closest.max((error - twin) / figure.error);
                compared += 1;
            }
        }
    }
    println!("{compared} compared; largest error in units of the stated one {closest:.2}");
    assert!(compared > 10_000);
}

#[test]
fn short_series_agree_with_tables_at_large_counts() {
    // The same law as a count (tables of masses) and as a lattice law (a short Fourier series at these n).
    let two_points = table(&[0.0, 1.0], &[0.7, 0.3], 1.0);
    let bernoulli = named(ClosedFamily::Binomial { trials: 1, p: 0.3 });
    for n in [20_000_000u64, 1_000_000_000] {
        let (sum, twin) = (lattice(&two_points, n), closed(&bernoulli, n));
        assert!(sum.detail().contains("series"), "{}", sum.detail());
        for i in -21..=21 {
            let z = f64::from(i) + 0.013;
            for (a, b) in
                [(sum.at_or_below(z), twin.at_or_below(z)), (sum.at_or_above(z), twin.at_or_above(z))]
            {
                assert!((a.value - b.value).abs() <= a.error + b.error, "{n} {z}: {a:?} {b:?}");
                assert!(a.error <= 1e-8 * a.value, "{n} {z}: {a:?}");
            }
        }
        let (a, b) = (sum.kolmogorov(), twin.kolmogorov());
        assert!((a.kolmogorov.value - b.kolmogorov.value).abs() <= a.kolmogorov.error + b.kolmogorov.error);
        assert!(a.kolmogorov.error < 1e-11, "{a:?}");
        // Every index near the winner, looked at one by one, is no better.
        let span = sum.lattice_span().unwrap();
        for i in -300..=300 {
            let z = a.at_z + f64::from(i) * span;
            let gap = (twin.at_or_below(z).value - normal::at_or_below(z)).abs();
            assert!(gap <= a.kolmogorov.value + a.kolmogorov.error + 1e-13, "{i}");
        }
    }
    // A wide table of a thousand values, a billion copies: no transform could be that long.
    let values: Vec<f64> = (0..1000).map(f64::from).collect();
    let weights: Vec<f64> = values.iter().map(|x| (-x / 90.0).exp() + 0.01).collect();
    let sum = lattice(&table(&values, &weights, 1.0), 1_000_000_000);
    let skewness = sum.moments().skewness.unwrap();
    let span = sum.lattice_span().unwrap();
    // Esseen: the leading term (|γ| + 3h)φ(0)/6 in standard units; the next one is of the order 1/n.
    let leading = (skewness.abs() + 3.0 * span) * normal::density(0.0) / 6.0;
    assert!((sum.kolmogorov().kolmogorov.value / leading - 1.0).abs() < 1e-3);
}

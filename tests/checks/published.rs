//! Values published elsewhere, each with its source; those written from memory say so.

use gaussgap_simulation::law::LawSpec;
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::{self, Method, StandardizedSum, SumSpec};
use gaussgap_simulation::work::Work;

fn build(law: &LawSpec, n: u64) -> Box<dyn StandardizedSum> {
    let law = law.compile().expect("the law can be made ready");
    sum::build(&SumSpec::like_summands(law, n), &Method::default(), &Work::new()).expect("the sum can be built")
}

/// P(S ≤ s) for the sum itself.
fn at_or_below(sum: &dyn StandardizedSum, s: f64) -> f64 {
    let moments = sum.moments();
    sum.at_or_below((s - moments.mean) / moments.sd).value
}

#[test]
fn three_rectangles_have_the_coverage_factors_of_the_gum() {
    // JCGM 100:2008 (GUM), G.2.2: the convolution of three rectangular laws of equal width has its 95 % and 99 %
    // intervals at ±1.937σ and ±2.379σ (normal: 1.960 and 2.576). Quoted from memory; 1.93734 and 2.37855 were
    // recomputed with mpmath.
    let sum = build(&LawSpec::Uniform { low: -1.0, high: 1.0 }, 3);
    for (level, published, digits) in [(0.95, 1.937, 1.93734), (0.99, 2.379, 2.37855)] {
        let (low, high) = (sum.quantile(0.5 - 0.5 * level).value, sum.quantile(0.5 + 0.5 * level).value);
        assert!((low + high).abs() < 1e-12, "{low} {high}");
        assert!((high - published).abs() < 5e-4, "{high}");
        assert!((high - digits).abs() < 5.1e-6, "{high}");
    }
}

#[test]
fn sums_of_unit_uniforms_are_irwin_halls_rationals() {
    // Irwin 1927, Hall 1927: P(U₁+…+U_n ≤ x) = Σ (−1)^k C(n,k)(x−k)ⁿ/n!; the fractions by hand.
    let law = LawSpec::Uniform { low: 0.0, high: 1.0 };
    for (n, x, value) in [
        (3, 0.5, 1.0 / 48.0),
        (3, 1.0, 1.0 / 6.0),
        (4, 1.0, 1.0 / 24.0),
        (6, 2.0, 29.0 / 360.0),
        (12, 3.0, 397.0 / 394240.0),
    ] {
        let found = at_or_below(build(&law, n).as_ref(), x);
        assert!((found - value).abs() < 1e-11, "{n} {x}: {found} {value}");
    }
    // Distances recomputed with mpmath, five decimals; n·Δ tends to 0.02753 (φ-Hermite term of the kurtosis).
    for (n, distance) in [(2, 0.01643), (3, 0.00985), (4, 0.00738), (12, 0.00234)] {
        let found = build(&law, n).kolmogorov().kolmogorov.value;
        assert!((found - distance).abs() < 5.1e-6, "{n}: {found}");
    }
    let far = build(&law, 10_000).kolmogorov().kolmogorov.value;
    assert!((far * 10_000.0 - 0.02753).abs() < 1e-4, "{far}");
}

#[test]
fn sums_of_exponentials_have_the_tabulated_chi_square_points() {
    // Abramowitz & Stegun, Tables 26.7 and 26.8, χ² with 10 degrees of freedom = 2 × (sum of five unit
    // exponentials); the percentage points as quoted in secondary texts, all recomputed.
    let law = LawSpec::Exponential { mean: 2.0 };
    let sum = build(&law, 5);
    for (x, above) in [(5.0, 0.89118), (10.0, 0.44049), (20.0, 0.02925)] {
        let found = sum.above((x - 10.0) / 20f64.sqrt()).value;
        assert!((found - above).abs() < 5.1e-6, "{x}: {found}");
    }
    for (above, x) in [(0.05, 18.30704), (0.025, 20.48318)] {
        let found = 10.0 + 20f64.sqrt() * sum.quantile(1.0 - above).value;
        assert!((found - x).abs() < 5.1e-6, "{above}: {found}");
    }
}

#[test]
fn sums_of_exponentials_have_the_known_distances() {
    // Recomputed with mpmath, six decimals. Esseen 1945: √n·Δ → 2/(6√(2π)) = 0.132981.
    let law = LawSpec::Exponential { mean: 1.0 };
    for (n, distance) in
        [(1, 0.158655), (2, 0.094463), (5, 0.059629), (10, 0.042114), (30, 0.024291), (100, 0.013300)]
    {
        let found = build(&law, n).kolmogorov().kolmogorov.value;
        assert!((found - distance).abs() < 5.1e-7, "{n}: {found}");
    }
    let far = build(&law, 100_000_000).kolmogorov().kolmogorov.value;
    assert!((far * 1e4 - 0.132981).abs() < 1e-6, "{far}");
}

#[test]
fn binomial_tables() {
    // From memory of common tables of the binomial distribution, recomputed with SciPy.
    let tables: [(u64, f64, f64, f64); 4] =
        [(10, 0.2, 2.0, 0.6778), (100, 0.5, 60.0, 0.9824), (20, 0.5, 10.0, 0.5881), (10, 0.3, 4.0, 0.8497)];
    for (n, p, k, value) in tables {
        let found = at_or_below(build(&LawSpec::Bernoulli { p }, n).as_ref(), k);
        assert!((found - value).abs() < 5.1e-5, "{n} {p} {k}: {found}");
    }
}

#[test]
fn bernoulli_sums_have_the_known_distances() {
    // p = ½: C(n, n/2)/2^(n+1) for even n, Φ(1/√n) − ½ for odd n (Hipp & Mattner 2007). p = 0.1: recomputed with
    // SciPy, four or five decimals.
    for n in [1u64, 2, 7, 10, 25, 100, 1000, 1001] {
        let distance = build(&LawSpec::Bernoulli { p: 0.5 }, n).kolmogorov().kolmogorov;
        let truth = if n % 2 == 1 {
            normal::at_or_below(1.0 / (n as f64).sqrt()) - 0.5
        } else {
            0.5 * (1..=n / 2).map(|i| (2 * i - 1) as f64 / (2 * i) as f64).product::<f64>()
        };
        assert!((distance.value - truth).abs() < 1e-12, "{n}: {distance:?} {truth}");
    }
    for (p, n, value, half) in [(0.5, 10, 0.12305, 5e-6), (0.5, 100, 0.03979, 5e-6), (0.1, 10, 0.2361, 5e-5), (0.1, 100, 0.08316, 5e-6)] {
        let found = build(&LawSpec::Bernoulli { p }, n).kolmogorov().kolmogorov.value;
        assert!((found - value).abs() < 1.02 * half, "{p} {n}: {found}");
    }
    // Esseen 1945 for lattices: √n·Δ → (|γ| + 3h/σ)/(6√(2π)), 0.493319 at p = 0.3.
    let far = build(&LawSpec::Bernoulli { p: 0.3 }, 100_000_000).kolmogorov().kolmogorov.value;
    assert!((far * 1e4 - 0.493319).abs() < 1e-4, "{far}");
}

#[test]
fn the_normal_interval_for_a_proportion_covers_what_brown_cai_and_dasgupta_say() {
    // Brown, Cai & DasGupta 2001, Statistical Science 16:101–133: actual coverage of the nominal 95 % interval
    // p̂ ± 1.96·√(p̂q̂/n). From memory, recomputed exactly.
    let quantile = normal::quantile(0.975);
    for (n, p, published) in [
        (17u64, 0.5, 0.951),
        (40, 0.5, 0.919),
        (30, 0.2, 0.946),
        (98, 0.2, 0.928),
        (591, 0.005, 0.945),
        (592, 0.005, 0.792),
        (100, 0.106, 0.952),
        (100, 0.107, 0.911),
    ] {
        let covers = |k: u64| {
            let share = k as f64 / n as f64;
            (share - p).abs() <= quantile * (share * (1.0 - share) / n as f64).sqrt()
        };
        // The counts whose interval covers p form one run.
        let first = (0..=n).find(|&k| covers(k)).expect("some interval covers");
        let last = (first..=n).take_while(|&k| covers(k)).last().expect("the first one does");
        assert!((last + 1..=n).all(|k| !covers(k)));
        let sum = build(&LawSpec::Bernoulli { p }, n);
        let moments = sum.moments();
        let z = |k: u64| (k as f64 - moments.mean) / moments.sd;
        let coverage = sum.at_or_below(z(last)).value - sum.below(z(first)).value;
        assert!((coverage - published).abs() < 5.1e-4, "{n} {p}: {coverage}");
    }
}

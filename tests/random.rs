//! Random laws, sizes and claims for the standing tests: SplitMix64, so that a seed means the same everywhere.

use gaussgap_simulation::law::{LawSpec, MixturePart};

/// A seeded source of random scenarios.
#[derive(Debug)]
pub struct Random(u64);

impl Random {
    /// Starts at a seed.
    pub fn new(seed: u64) -> Self {
        Self(seed)
    }

    fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Uniform on [low, high).
    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * ((self.bits() >> 11) as f64 / 9_007_199_254_740_992.0)
    }

    fn below(&mut self, count: u64) -> u64 {
        self.bits() % count
    }

    /// Uniform in the logarithm.
    fn scale(&mut self, low: f64, high: f64) -> f64 {
        self.between(low.ln(), high.ln()).exp()
    }

    /// From 1 to 10⁶, small ones as likely as large ones.
    pub fn size(&mut self) -> u64 {
        self.scale(1.0, 1e6) as u64
    }

    /// The JSON of a claim.
    pub fn claim(&mut self) -> &'static str {
        [
            r#"{"kind":"curve"}"#,
            r#"{"kind":"interval","level":0.95,"sides":"two","spread":"known"}"#,
            r#"{"kind":"interval","level":0.9,"sides":"upper","spread":"known"}"#,
            r#"{"kind":"quantile","p":0.99}"#,
            r#"{"kind":"test","significance":0.05,"sides":"two","spread":"known","shift":0.3}"#,
            r#"{"kind":"deviation","epsilon":0.4}"#,
        ][self.below(6) as usize]
    }

    /// A law with everyday parameters.
    pub fn ordinary_law(&mut self, depth: u32) -> LawSpec {
        self.any_law(depth, 4.0)
    }

    /// A law whose parameters may be extreme.
    pub fn law(&mut self, depth: u32) -> LawSpec {
        let reach = [3.0, 100.0, 1e6][self.below(3) as usize];
        self.any_law(depth, reach)
    }

    fn any_law(&mut self, depth: u32, reach: f64) -> LawSpec {
        if depth > 0 && self.below(3) == 0 { self.operation(depth, reach) } else { self.family(reach) }
    }

    fn operation(&mut self, depth: u32, reach: f64) -> LawSpec {
        let inner = Box::new(self.any_law(depth - 1, reach));
        match self.below(6) {
            0 => LawSpec::Affine {
                law: inner,
                add: self.between(-reach, reach),
                multiply: self.scale(1.0 / reach, reach) * if self.below(2) == 0 { 1.0 } else { -1.0 },
            },
            1 => LawSpec::Cap { law: inner, low: None, high: Some(self.scale(0.5, 5.0)) },
            2 => LawSpec::Restrict { law: inner, low: Some(self.between(-1.0, 0.5)), high: None },
            3 => LawSpec::Round { law: inner, step: self.scale(0.05, 2.0) },
            4 => {
                let zero = MixturePart {
                    weight: self.scale(0.01, 50.0),
                    law: LawSpec::Constant { value: self.below(3) as f64 },
                };
                LawSpec::Mixture { parts: vec![zero, MixturePart { weight: 1.0, law: *inner }] }
            }
            _ => {
                let other =
                    MixturePart { weight: self.scale(0.05, 5.0), law: self.any_law(depth - 1, reach) };
                LawSpec::Mixture { parts: vec![MixturePart { weight: 1.0, law: *inner }, other] }
            }
        }
    }

    fn family(&mut self, reach: f64) -> LawSpec {
        let scale = self.scale(1.0 / reach, reach);
        let place = self.between(-reach, reach);
        let shape = self.scale(0.4, 3.0 + reach.ln());
        let p = self.between(0.01, 0.99);
        match self.below(24) {
            0 => LawSpec::Bernoulli { p: if self.below(3) == 0 { 1.0 / reach.max(2.0) } else { p } },
            1 => LawSpec::Binomial { trials: 1 + self.below(30), p },
            2 => LawSpec::Poisson { rate: scale },
            3 => LawSpec::Geometric { p },
            4 => LawSpec::NegativeBinomial { size: shape, p },
            5 => LawSpec::DiscreteUniform { low: -(self.below(5) as i64), high: 1 + self.below(20) as i64 },
            6 => {
                let count = 2 + self.below(6);
                let values = (0..count).map(|k| k as f64 * 1.5 + self.below(2) as f64).collect();
                let weights = (0..count).map(|_| self.scale(0.01, 10.0)).collect();
                LawSpec::Table { values, weights }
            }
            7 => {
                let values = (0..25).map(|_| (self.scale(0.2, 40.0) * 100.0).round() / 100.0).collect();
                LawSpec::Data { values: Some(values), path: None, column: None, tail: None }
            }
            8 => LawSpec::Normal { mean: place, sd: scale },
            9 => LawSpec::Uniform { low: place, high: place + scale },
            10 => LawSpec::Exponential { mean: scale },
            11 => LawSpec::Gamma { shape, scale },
            12 => LawSpec::Weibull { shape, scale },
            13 => LawSpec::Lognormal {
                log_mean: Some(place.clamp(-5.0, 5.0)),
                log_sd: Some(self.scale(0.1, 1.8)),
                mean: None,
                sd: None,
            },
            14 => LawSpec::Lognormal {
                log_mean: None,
                log_sd: None,
                mean: Some(scale),
                sd: Some(scale * self.scale(0.1, 4.0)),
            },
            15 => LawSpec::Lomax { shape: self.between(1.2, 6.0), scale },
            16 => LawSpec::Pareto { shape: self.between(1.2, 6.0), minimum: scale },
            17 => LawSpec::InverseGaussian { mean: scale, shape: scale * self.scale(0.1, 10.0) },
            18 => LawSpec::Beta { a: shape, b: self.scale(0.5, 5.0), low: None, high: None },
            19 => LawSpec::Triangular { low: place, mode: place + scale * p, high: place + scale },
            20 => LawSpec::Laplace { mean: place, scale },
            21 => LawSpec::Logistic { mean: place, scale },
            22 => {
                LawSpec::StudentT { df: self.between(1.5, 12.0), location: Some(place), scale: Some(scale) }
            }
            _ => LawSpec::Histogram {
                edges: vec![place, place + 0.3 * scale, place + scale, place + 2.5 * scale],
                weights: vec![1.0, self.scale(0.1, 3.0), self.scale(0.1, 3.0)],
            },
        }
    }
}

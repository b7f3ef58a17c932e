//! Exact laws of sums of atoms: the part of a sum in which only atoms, or all but a few summands, are atoms.

/// Probabilities at points, ascending; total mass may be below 1.
#[derive(Debug, Clone, Default)]
pub(super) struct PointMasses {
    /// Positions.
    pub(super) points: Vec<f64>,
    /// Masses.
    pub(super) masses: Vec<f64>,
    /// Mass of points left out because they were too improbable to matter.
    pub(super) left_out: f64,
}

/// Largest number of points of a sum.
const MAX_POINTS: usize = 200_000;
/// Largest number of products in one convolution.
const MAX_PRODUCTS: usize = 4_000_000;

impl PointMasses {
    /// All mass at one point.
    pub(super) fn single(point: f64, mass: f64) -> Self {
        Self { points: vec![point], masses: vec![mass], left_out: 0.0 }
    }

    /// The law of the sum of `count` values drawn from `atoms` (position, mass): mass (Σ mass)^count in all.
    /// `None` if it has too many points.
    pub(super) fn sum_of(atoms: &[(f64, f64)], count: u64, scale: f64) -> Option<Self> {
        match atoms {
            _ if count == 0 => Some(Self::single(0.0, 1.0)),
            [] => Some(Self::default()),
            [(x, p)] => Some(Self::single(scale * x * count as f64, power(*p, count))),
            [first, second] => Self::of_two(*first, *second, count, scale),
            many => {
                let base = Self {
                    points: many.iter().map(|a| scale * a.0).collect(),
                    masses: many.iter().map(|a| a.1).collect(),
                    left_out: 0.0,
                };
                let base = base.tidy();
                let mut result = Self::single(0.0, 1.0);
                let mut square = base;
                let mut rest = count;
                loop {
                    if rest & 1 == 1 {
                        result = result.plus(&square)?;
                    }
                    rest >>= 1;
                    if rest == 0 {
                        return Some(result);
                    }
                    square = square.plus(&square)?;
                }
            }
        }
    }

    /// Two atoms: a binomial law, by the ratio of neighbours outwards from its mode.
    fn of_two(first: (f64, f64), second: (f64, f64), count: u64, scale: f64) -> Option<Self> {
        let total = first.1 + second.1;
        let p = second.1 / total;
        let q = first.1 / total;
        let n = count as f64;
        let mode = ((n + 1.0) * p).floor().min(n);
        let mut down = Vec::new();
        let (mut k, mut mass) = (mode, 1.0);
        while k > 0.0 && mass > 1e-40 {
            mass *= k * q / ((n - k + 1.0) * p);
            k -= 1.0;
            down.push((k, mass));
            if down.len() > MAX_POINTS {
                return None;
            }
        }
        let mut list: Vec<(f64, f64)> = down.into_iter().rev().collect();
        list.push((mode, 1.0));
        let (mut k, mut mass) = (mode, 1.0);
        while k < n && mass > 1e-40 {
            mass *= (n - k) * p / ((k + 1.0) * q);
            k += 1.0;
            list.push((k, mass));
            if list.len() > MAX_POINTS {
                return None;
            }
        }
        let norm = power(total, count) / list.iter().map(|v| v.1).sum::<f64>();
        let mut result = Self {
            points: list.iter().map(|(k, _)| scale * (n * first.0 + k * (second.0 - first.0))).collect(),
            masses: list.iter().map(|(_, m)| m * norm).collect(),
            left_out: 0.0,
        };
        if scale * (second.0 - first.0) < 0.0 {
            result.points.reverse();
            result.masses.reverse();
        }
        Some(result)
    }

    /// The law of the sum of two independent values; `None` if it has too many points.
    pub(super) fn plus(&self, other: &Self) -> Option<Self> {
        if self.points.len().checked_mul(other.points.len())? > MAX_PRODUCTS {
            return None;
        }
        let mut pairs = Vec::with_capacity(self.points.len() * other.points.len());
        for (x, p) in self.points.iter().zip(&self.masses) {
            for (y, q) in other.points.iter().zip(&other.masses) {
                pairs.push((x + y, p * q));
            }
        }
        let (own, its): (f64, f64) = (self.masses.iter().sum(), other.masses.iter().sum());
        let result = Self {
            points: pairs.iter().map(|v| v.0).collect(),
            masses: pairs.iter().map(|v| v.1).collect(),
            left_out: self.left_out * (its + other.left_out) + other.left_out * own,
        };
        let result = result.tidy();
        (result.points.len() <= MAX_POINTS).then_some(result)
    }

    /// Sorts, merges points that differ by rounding, and leaves out what is too improbable to matter.
    fn tidy(self) -> Self {
        let mut pairs: Vec<(f64, f64)> = self.points.into_iter().zip(self.masses).collect();
        pairs.sort_by(|a, b| a.0.total_cmp(&b.0));
        let mut result = Self { left_out: self.left_out, ..Self::default() };
        for (x, p) in pairs {
            match result.points.last() {
                Some(last) if (x - last).abs() <= snap(x) => {
                    if let Some(mass) = result.masses.last_mut() {
                        *mass += p;
                    }
                }
                _ => {
                    result.points.push(x);
                    result.masses.push(p);
                }
            }
        }
        if result.points.len() > 64 {
            let floor =
                1e-16 / result.points.len() as f64 * result.masses.iter().sum::<f64>().min(1.0) * 1e-3;
            let keep: Vec<bool> = result.masses.iter().map(|m| *m > floor).collect();
            result.left_out +=
                result.masses.iter().zip(&keep).filter(|(_, k)| !**k).map(|(m, _)| m).sum::<f64>();
            let mut kept = keep.iter();
            result.points.retain(|_| kept.next().copied().unwrap_or(true));
            let mut kept = keep.iter();
            result.masses.retain(|_| kept.next().copied().unwrap_or(true));
        }
        result
    }

    /// Total mass.
    pub(super) fn mass(&self) -> f64 {
        self.masses.iter().sum()
    }
}

/// How near an argument must be to a point to be that point.
pub(super) fn snap(z: f64) -> f64 {
    1e-12 * (1.0 + z.abs())
}

/// p^count without overflow of the exponent.
fn power(p: f64, count: u64) -> f64 {
    match i32::try_from(count) {
        Ok(small) if small < 64 => p.powi(small),
        _ => (count as f64 * p.ln()).exp(),
    }
}

//! Drawing from finitely many possibilities in constant time: Walker's alias method, and counts through it.

use rand::Rng;

/// Draws an index with given probabilities (Walker 1977, tables after Vose 1991). One 64-bit word per draw; the
/// probabilities are met to about 1e-16.
#[derive(Debug, Clone)]
pub(crate) struct AliasTable {
    /// Per column: stay if the fraction is below the limit, else go to the alias.
    columns: Vec<(u64, u32)>,
}

impl AliasTable {
    /// A table for weights on any positive scale; at least one of them positive, at most 2³² of them.
    pub(crate) fn new(weights: &[f64]) -> Self {
        let total: f64 = weights.iter().sum();
        let columns_count = weights.len() as f64;
        let mut share: Vec<f64> = weights.iter().map(|weight| weight / total * columns_count).collect();
        let mut columns: Vec<(u64, u32)> = (0..weights.len()).map(|index| (u64::MAX, index as u32)).collect();
        let (mut small, mut large): (Vec<usize>, Vec<usize>) =
            (0..weights.len()).partition(|&i| share[i] < 1.0);
        while let (Some(&poor), Some(&rich)) = (small.last(), large.last()) {
            small.pop();
            columns[poor] = ((share[poor] * 18_446_744_073_709_551_616.0) as u64, rich as u32);
            share[rich] -= 1.0 - share[poor];
            if share[rich] < 1.0 {
                large.pop();
                small.push(rich);
            }
        }
        // Whatever is left over differs from 1 by rounding; but a weight of exactly 0 must never be drawn.
        if let Some(heaviest) = (0..weights.len()).max_by(|&a, &b| weights[a].total_cmp(&weights[b])) {
            for index in small {
                if weights[index] <= 0.0 {
                    columns[index] = (0, heaviest as u32);
                }
            }
        }
        Self { columns }
    }

    /// Draws an index.
    #[inline]
    pub(crate) fn draw(&self, random: &mut impl Rng) -> usize {
        let product = u128::from(random.next_u64()) * self.columns.len() as u128;
        let column = (product >> 64) as usize;
        let (limit, alias) = self.columns[column];
        if (product as u64) < limit { column } else { alias as usize }
    }
}

/// Draws from Binomial(trials, p), in constant time where the likely range is at most 2¹⁶ long.
#[derive(Debug, Clone)]
pub(crate) enum BinomialCount {
    /// The likely counts in a table; what lies outside has probability below 1e-20.
    Table {
        /// The smallest count of the table.
        first: u64,
        /// Which count.
        table: AliasTable,
    },
    /// The general method, fresh for each draw.
    General {
        /// Number of trials.
        trials: u64,
        /// Probability of success.
        p: f64,
    },
}

impl BinomialCount {
    /// A sampler of the count; `q` is 1 − p, given separately because it may be known more exactly.
    pub(crate) fn new(trials: u64, p: f64, q: f64) -> Self {
        match binomial_masses(trials, p, q, 1e-20, 1 << 16) {
            Some((first, masses)) => Self::Table { first, table: AliasTable::new(&masses) },
            None => Self::General { trials, p },
        }
    }

    /// Draws a count.
    #[inline]
    pub(crate) fn draw(&self, random: &mut impl Rng) -> u64 {
        match self {
            Self::Table { first, table } => first + table.draw(random) as u64,
            Self::General { trials, p } => draw_binomial(*trials, *p, random),
        }
    }
}

/// One draw from Binomial(trials, p) by the library sampler.
#[inline]
pub(crate) fn draw_binomial(trials: u64, p: f64, random: &mut impl Rng) -> u64 {
    use rand_distr::Distribution;
    if trials == 0 {
        return 0;
    }
    rand_distr::Binomial::new(trials, p.clamp(0.0, 1.0)).map_or(0, |binomial| binomial.sample(random))
}

/// Masses of Binomial(trials, p) on the stretch that contains all but `outside` of the probability, as the first
/// count and the masses, normalised to 1; `None` if that stretch is longer than `longest`.
///
/// Ratio recursion from the mode, P(k+1)/P(k) = (n−k)p/((k+1)q): relative error at distance d from the mode is
/// below 4·d·2⁻⁵³, so the error of any sum of masses is below 4·2⁻⁵³·E|K − mode| ≤ 4·2⁻⁵³(sd + 1), besides
/// `outside` and the rounding of the normalisation. The window ends follow from Bernstein's inequality,
/// P(|K − np| ≥ d) ≤ 2 exp(−d²/(2(npq + d/3))).
pub(crate) fn binomial_masses(
    trials: u64,
    p: f64,
    q: f64,
    outside: f64,
    longest: usize,
) -> Option<(u64, Vec<f64>)> {
    let n = trials as f64;
    let (mean, variance) = (n * p, n * p * q);
    let log_limit = (2.0 / outside).ln();
    let reach = log_limit / 3.0 + (log_limit * log_limit / 9.0 + 2.0 * log_limit * variance).sqrt() + 1.0;
    let first = (mean - reach).floor().max(0.0) as u64;
    let last = ((mean + reach).ceil() as u64).min(trials);
    if last - first >= longest as u64 {
        return None;
    }
    let mode = (((n + 1.0) * p).floor() as u64).clamp(first, last);
    let mut masses = vec![0.0; (last - first + 1) as usize];
    let at_mode = (mode - first) as usize;
    masses[at_mode] = 1.0;
    let odds = p / q;
    for index in at_mode + 1..masses.len() {
        let k = (first + index as u64) as f64;
        masses[index] = masses[index - 1] * ((n - k + 1.0) / k * odds);
    }
    for index in (0..at_mode).rev() {
        let k = (first + index as u64) as f64;
        masses[index] = masses[index + 1] * ((k + 1.0) / (n - k) / odds);
    }
    // Small to large from both ends: the sum is good to a few units in the last place.
    let total = masses[..at_mode].iter().sum::<f64>() + masses[at_mode..].iter().rev().sum::<f64>();
    for mass in &mut masses {
        *mass /= total;
    }
    Some((first, masses))
}

#[cfg(test)]
mod tests {
    use super::super::streams::{Purpose, block_stream};
    use super::*;

    #[test]
    fn alias_table_meets_its_weights() {
        let weights = [0.5, 0.0, 3.0, 1e-3, 1.2];
        let total: f64 = weights.iter().sum();
        let table = AliasTable::new(&weights);
        let mut random = block_stream(5, Purpose::Sums, 0);
        let draws = 1_000_000;
        let mut counts = [0u64; 5];
        for _ in 0..draws {
            counts[table.draw(&mut random)] += 1;
        }
        assert_eq!(counts[1], 0);
        for (count, weight) in counts.iter().zip(weights) {
            let p = weight / total;
            let sd = (draws as f64 * p * (1.0 - p)).sqrt();
            assert!((*count as f64 - draws as f64 * p).abs() <= 5.0 * sd + 1e-9, "{count} for {p}");
        }
    }

    #[test]
    fn binomial_masses_agree_with_the_formula() {
        let (first, masses) = binomial_masses(40, 0.3, 0.7, 1e-20, 1000).unwrap();
        let at = |k: u64| masses[(k - first) as usize];
        // C(40,12)·0.3^12·0.7^28 with C(40,12) = 5586853480 (Python, math.comb).
        let exact = 5_586_853_480.0 * 0.3f64.powi(12) * 0.7f64.powi(28);
        assert!((at(12) / exact - 1.0).abs() < 1e-13);
        assert!((at(0) / 0.7f64.powi(40) - 1.0).abs() < 1e-12);
        assert!((masses.iter().sum::<f64>() - 1.0).abs() < 1e-15);
        assert!(binomial_masses(1_000_000_000, 0.5, 0.5, 1e-20, 1000).is_none());
    }

    #[test]
    fn tabulated_counts_have_the_right_mean() {
        let count = BinomialCount::new(40, 0.3, 0.7);
        let mut random = block_stream(6, Purpose::Sums, 0);
        let draws = 400_000;
        let mean = (0..draws).map(|_| count.draw(&mut random) as f64).sum::<f64>() / f64::from(draws);
        assert!((mean - 12.0).abs() < 5.0 * (8.4f64 / f64::from(draws)).sqrt());
    }
}

//! Compound laws: the sum of a random number N of independent copies of X.
//!
//! Three ways, the first that applies: (1) N and X on integers (times a span): the masses by Horner's scheme on
//! the generating function, Σ P(N = k) f^k, in additions and products of positive numbers only, so that every
//! mass keeps its relative accuracy; (2) X with sums in closed form: one piece per number of summands; (3) draws
//! only, with exact moments.

use super::checks::compensated_sum;
use super::compile::finish;
use super::density::StandardMoments;
use super::form::{Form, MOST_ATOMS, Refusal};
use super::opaque::OpaqueLaw;
use super::{Atom, ClosedForm, Law, Piece, families, lattice};
use rand::SeedableRng;
use std::sync::{Arc, OnceLock};

/// Most multiplications spent on a table.
const MOST_WORK: f64 = 4e8;

/// Most numbers of summands that become pieces of their own.
const MOST_PIECES: usize = 400;

/// Largest count whose summands are drawn one by one.
const LARGEST_COUNT: f64 = 1e6;

/// Numbers of summands with less probability than this in all are left out of tables.
const NEGLIGIBLE: f64 = 1e-31;

/// Whether the law can be a number of summands.
pub(super) fn check_count(count: &Form) -> Result<(), Refusal> {
    if !count.pieces.is_empty() {
        return Err("must be a discrete law on 0, 1, 2, … (got a continuous one)".to_owned());
    }
    if !count.opaque.is_empty() {
        return Err(format!("must be a law with at most {MOST_ATOMS} values"));
    }
    match count.atoms.iter().find(|atom| atom.mass > 0.0 && (atom.value < 0.0 || atom.value.fract() != 0.0)) {
        Some(atom) => Err(format!("must take values 0, 1, 2, … only (got {})", atom.value)),
        None => Ok(()),
    }
}

/// The law of the sum of `count` copies of `each`; `count` has been checked.
pub(super) fn compile(mut count: Form, mut each: Form) -> Result<Form, Refusal> {
    count.merge_atoms();
    each.merge_atoms();
    let kept = trimmed(&count.atoms, count.missing_mass, NEGLIGIBLE);
    let mut warnings = each.warnings.clone();
    let discrete = each.pieces.is_empty() && each.opaque.is_empty();
    let form = if discrete && let Some(table) = table(&kept, &each) {
        table
    } else if let Some(pieces) = one_piece_per_number(&kept, each.closed_form) {
        pieces
    } else {
        warnings.clear();
        Form::opaque(Arc::new(Draws::new(finish(count)?, finish(each)?)?))
    };
    Ok(Form { warnings, ..form })
}

/// The atoms without a negligible upper end, and the mass left out.
fn trimmed(atoms: &[Atom], missing_mass: f64, negligible: f64) -> (Vec<Atom>, f64) {
    let mut atoms = atoms.to_vec();
    let mut left_out = 0.0;
    while let Some(last) = atoms.last() {
        if left_out + last.mass > negligible || atoms.len() == 1 {
            break;
        }
        left_out += last.mass;
        atoms.pop();
    }
    (atoms, missing_mass + left_out)
}

/// The table of the sum, if it and the work for it are short enough.
fn table((counts, missing): &(Vec<Atom>, f64), each: &Form) -> Option<Form> {
    let mean_count = compensated_sum(counts.iter().map(|a| a.mass * a.value)).max(1.0);
    let (values, values_missing) = trimmed(&each.atoms, each.missing_mass, NEGLIGIBLE / mean_count);
    // 0 must be on the lattice because sums of different numbers of summands share it.
    let mut with_zero = values.clone();
    with_zero.push(Atom { value: 0.0, mass: 0.0 });
    with_zero.sort_by(|a, b| a.value.total_cmp(&b.value));
    let span = match lattice::of_atoms(&with_zero) {
        Some(lattice) => lattice.span,
        None if values.iter().all(|atom| atom.value == 0.0) => 1.0,
        None => return None,
    };
    let steps: Vec<(i64, f64)> = values.iter().map(|a| ((a.value / span).round() as i64, a.mass)).collect();
    let (low, high) = (steps.first()?.0.min(0), steps.last()?.0.max(0));
    let most = counts.last()?.value;
    let width = (high - low) as f64;
    if most * width >= MOST_ATOMS as f64 || 0.5 * most * most * width * steps.len() as f64 > MOST_WORK {
        return None;
    }
    let (most, width) = (most as usize, (high - low) as usize);
    let mut probability = vec![0.0; most + 1];
    for atom in counts {
        probability[atom.value as usize] += atom.mass;
    }
    // Entry j of `sums` stands for the value (j + k·low)·span when k summands have been multiplied in.
    let mut sums = vec![probability[most]];
    for (done, k) in (0..most).rev().enumerate() {
        let mut next = vec![0.0; sums.len() + width];
        for (j, mass) in sums.iter().enumerate().filter(|(_, mass)| **mass > 0.0) {
            for (step, step_mass) in &steps {
                next[j + (step - low) as usize] += mass * step_mass;
            }
        }
        // The value 0 after done + 1 summands, each shifted by −low.
        let zero = (done + 1) * (-low) as usize;
        next[zero] += probability[k];
        sums = next;
    }
    let shift = most as i64 * low;
    let atoms = sums
        .into_iter()
        .enumerate()
        .filter(|(_, mass)| *mass > 0.0)
        .map(|(j, mass)| Atom { value: (j as i64 + shift) as f64 * span, mass })
        .collect();
    let missing_mass = missing + values_missing * mean_count;
    (missing_mass <= 1e-30).then(|| Form::atoms(atoms, missing_mass))
}

/// One piece per number of summands, where the sums of `each` stay in a continuous family.
fn one_piece_per_number(
    (counts, missing): &(Vec<Atom>, f64),
    closed_form: Option<ClosedForm>,
) -> Option<Form> {
    let ClosedForm { family, add, multiply } = closed_form?;
    if counts.len() > MOST_PIECES || *missing > 1e-30 {
        return None;
    }
    let mut form = Form { missing_mass: *missing, ..Form::default() };
    for atom in counts {
        let k = atom.value;
        if k == 0.0 {
            form.atoms.push(Atom { value: 0.0, mass: atom.mass });
            continue;
        }
        let sum = families::closed_sum(family, k)?;
        form.pieces.push(Piece {
            factor: atom.mass,
            add: k * add + multiply * sum.add,
            multiply: multiply * sum.multiply,
            ..sum
        });
    }
    Some(form)
}

/// A compound law that is only drawn from.
#[derive(Debug)]
struct Draws {
    count: Law,
    each: Law,
    moments: StandardMoments,
    /// A seeded sample, ascending, for pictures of the law: 2¹⁵ draws.
    sample: OnceLock<Vec<f64>>,
}

impl Draws {
    fn new(count: Law, each: Law) -> Result<Self, Refusal> {
        let mean_count = count.mean().unwrap_or(f64::INFINITY);
        if mean_count > LARGEST_COUNT {
            return Err(format!(
                "`count` may be {LARGEST_COUNT:e} on average at most where the sum can only be simulated (got {mean_count:e})"
            ));
        }
        let moments = compound_moments(&count, &each);
        Ok(Self { count, each, moments, sample: OnceLock::new() })
    }

    fn draws(&self) -> &[f64] {
        self.sample.get_or_init(|| {
            let mut random = rand::rngs::SmallRng::seed_from_u64(0x9e3779b97f4a7c15);
            let draws = ((1e7 / self.count.mean().unwrap_or(1.0).max(1.0)) as usize).clamp(1 << 8, 1 << 15);
            let mut sample: Vec<f64> = (0..draws).map(|_| self.sample(&mut random)).collect();
            sample.sort_by(f64::total_cmp);
            sample
        })
    }
}

/// Cumulants of the sum from those of N (ν, v, κ₃, κ₄) and X (μ, σ², …): νμ, νσ² + vμ²,
/// νκ₃ + 3vσ²μ + κ₃(N)μ³, νκ₄ + v(4μκ₃ + 3σ⁴) + 6κ₃(N)μ²σ² + κ₄(N)μ⁴.
fn compound_moments(count: &Law, each: &Law) -> StandardMoments {
    let mut moments = StandardMoments { mean: None, sd: None, skewness: None, excess_kurtosis: None };
    let (Some(nu), Some(count_sd), Some(mean)) = (count.mean(), count.sd(), each.mean()) else {
        return moments;
    };
    moments.mean = Some(nu * mean);
    let Some(sd) = each.sd() else { return moments };
    let unit = mean.abs().max(sd);
    if unit == 0.0 {
        return StandardMoments::finite(0.0, 0.0, 0.0, -3.0);
    }
    let (mu, s) = (mean / unit, sd / unit);
    let v = count_sd * count_sd;
    let count3 = count.skewness().unwrap_or(0.0) * v * count_sd;
    let count4 = count.excess_kurtosis().unwrap_or(0.0) * v * v;
    let variance = nu * s * s + v * mu * mu;
    let root = variance.sqrt();
    moments.sd = Some(unit * root);
    let Some(skewness) = each.skewness().or((sd == 0.0).then_some(0.0)) else { return moments };
    let each3 = skewness * s * s * s;
    let third = nu * each3 + 3.0 * v * s * s * mu + count3 * mu * mu * mu;
    moments.skewness = Some(third / (variance * root));
    let Some(excess) = each.excess_kurtosis().or((sd == 0.0).then_some(0.0)) else { return moments };
    let each4 = excess * s.powi(4);
    let fourth = nu * each4
        + v * (4.0 * mu * each3 + 3.0 * s.powi(4))
        + 6.0 * count3 * mu * mu * s * s
        + count4 * mu.powi(4);
    moments.excess_kurtosis = Some(fourth / (variance * variance));
    moments
}

impl OpaqueLaw for Draws {
    fn reason(&self) -> String {
        "the sum of a random number of such amounts has no exact form here".to_owned()
    }
    fn has_closed_form(&self) -> bool {
        false
    }
    fn moments(&self) -> StandardMoments {
        self.moments
    }
    fn support(&self) -> (f64, f64) {
        let most = self.count.support.1;
        let end = |edge: f64, least: f64| {
            let at_least = if least == 0.0 { 0.0 } else { edge * least };
            let at_most = if edge == 0.0 { 0.0 } else { edge * most };
            (at_least, at_most)
        };
        let (low, high) = self.each.support;
        let least = self.count.support.0;
        let (a, b) = end(low, least);
        let (c, d) = end(high, least);
        (a.min(b), c.max(d))
    }
    fn at_or_below(&self, x: f64, strictly: bool) -> f64 {
        let draws = self.draws();
        let count = draws.partition_point(|&draw| if strictly { draw < x } else { draw <= x });
        count as f64 / draws.len() as f64
    }
    fn above(&self, x: f64, or_equal: bool) -> f64 {
        1.0 - self.at_or_below(x, or_equal)
    }
    fn tail_indices(&self) -> (f64, f64) {
        self.each.tail_indices()
    }
    fn sample(&self, random: &mut dyn rand::Rng) -> f64 {
        let mut random = random;
        let count = self.count.sampler().sample(&mut random) as u64;
        let each = self.each.sampler();
        (0..count).map(|_| each.sample(&mut random)).sum()
    }
}

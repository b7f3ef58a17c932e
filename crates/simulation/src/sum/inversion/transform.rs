//! The transform E e^{−itX} of one summand, standardized, split into its atoms and its continuous part.
//!
//! For t below 1 (in units of 1/sd) the *compensated* transform ψ(t) = E(e^{−itX} − 1 + itX) is what is computed:
//! for a million summands only t ~ 10⁻³ matters, where the transform itself is too near 1 to keep any accuracy,
//! but ψ has full relative accuracy. ψ/t² varies slowly and is interpolated octave by octave.
//!
//! From t = 1 on, a stretch of density contributes e^{−ite}R_e(t) for each of its ends e, R_e being a transform
//! along a ray ([`super::ray`]) that neither oscillates nor varies fast in ln t: it is interpolated, so that a
//! hundred thousand frequencies cost little more than their sines.

use super::ceiling::Ceiling;
use super::chebyshev::Octaves;
use super::stretch::{Standard, Stretch, compensated_kernel};
use super::tails::Tails;
use crate::law::{Density, Law};
use num_complex::Complex64;
use std::sync::{Arc, OnceLock};

/// Above this many atoms their compensated transform is interpolated too.
const DIRECT_ATOMS: usize = 4;
/// Octaves of t for which a stretch whose rays may not be turned is integrated node by node.
const DENSE_OCTAVES: usize = 8;
const DENSE_NODES: usize = 12_000;
/// Absolute error with which what leaves from an end is content.
const ENOUGH: f64 = 2e-16;

/// Atoms and continuous part of a transform at one t.
#[derive(Debug, Clone, Copy)]
pub(super) struct SplitValue {
    /// Σ p e^{−ita}.
    pub(super) atoms: Complex64,
    /// ∫ e^{−itx} f(x) dx.
    pub(super) continuous: Complex64,
    /// Bound on the error of the sum of both.
    pub(super) error: f64,
}

/// A point where stretches begin or end, with everything that leaves from it.
#[derive(Debug)]
struct EndPoint {
    position: f64,
    /// Piece, stretch, and whether the point is its outer end (which enters with a minus sign).
    parts: Vec<(usize, usize, bool)>,
    table: Octaves,
}

#[derive(Debug)]
struct PieceTransform {
    stretches: Vec<Stretch>,
    /// Set where the piece is a whole unbounded family with a closed transform: factor, density, add, multiply (standardized).
    closed: Option<(f64, Arc<dyn Density>, f64, f64)>,
    /// For pieces whose rays may not be turned: nodes and weights, per octave of t from 1 on.
    dense: Vec<OnceLock<Vec<(f64, f64)>>>,
    /// Total variation of the density, for the same pieces.
    variation: f64,
}

/// The transform of one summand.
#[derive(Debug)]
pub(super) struct SummandTransform {
    /// The law.
    pub(super) law: Law,
    /// Its mean and standard deviation.
    pub(super) standard: Standard,
    /// Standardized atoms: position, mass.
    pub(super) atoms: Vec<(f64, f64)>,
    /// Mass of all atoms.
    pub(super) atom_mass: f64,
    /// Mass of all pieces.
    pub(super) continuous_mass: f64,
    continuous_mean: f64,
    pieces: Vec<PieceTransform>,
    ends: Vec<EndPoint>,
    continuous_table: Octaves,
    atoms_table: Octaves,
    ceiling: OnceLock<Ceiling>,
    tails: OnceLock<Tails>,
    /// Error of ψ relative to t², from the quadrature rules and the moments.
    quadrature_error: f64,
    /// Disagreement of the masses with 1.
    mass_error: f64,
}

impl SummandTransform {
    /// Prepares nodes and end points; the tables fill as they are used.
    pub(super) fn new(law: &Law) -> Result<Self, String> {
        let (Some(mean), Some(variance)) = (law.moments.mean, law.moments.variance) else {
            return Err("a summand has no finite variance".to_owned());
        };
        let sd = variance.sqrt();
        if !(sd > 0.0 && sd.is_finite() && mean.is_finite()) {
            return Err("the standard deviation of a summand is out of range".to_owned());
        }
        let standard = Standard { mean, sd };
        let atoms: Vec<(f64, f64)> = law.atoms.iter().map(|a| ((a.value - mean) / sd, a.mass)).collect();
        let atom_mass: f64 = atoms.iter().map(|a| a.1).sum();
        let (pieces, ends) = prepare_pieces(law, standard);
        let (mut mass, mut continuous_mean, mut second, mut rule_error) = (0.0, 0.0, 0.0, 0.0);
        let mut heavy = false;
        for stretch in pieces.iter().flat_map(|p| &p.stretches) {
            if let Some(first) = stretch.panels.first() {
                mass += first.mass_from_here;
                continuous_mean += first.mean_from_here;
            }
            rule_error += stretch.rule_error + stretch.mass_left_out;
            heavy |= stretch.mass_beyond > 0.0;
            for panel in &stretch.panels {
                for (x, w) in panel.nodes.iter().zip(&panel.weights) {
                    second += w * x * x;
                }
            }
        }
        second += atoms.iter().map(|(x, p)| p * x * x).sum::<f64>();
        let spread = if heavy { (second - 1.0).max(0.0) } else { (second - 1.0).abs() };
        let quadrature_error =
            rule_error + spread + (mass + atom_mass - 1.0).abs() + law.missing_mass + 2e-16;
        Ok(Self {
            law: law.clone(),
            standard,
            atoms,
            atom_mass,
            continuous_mass: mass,
            continuous_mean,
            pieces,
            ends,
            continuous_table: Octaves::new(-64, -1),
            atoms_table: Octaves::new(-64, -1),
            ceiling: OnceLock::new(),
            tails: OnceLock::new(),
            quadrature_error,
            mass_error: (mass + atom_mass - 1.0).abs(),
        })
    }

    fn compensated_continuous(&self, t: f64) -> (Complex64, f64) {
        let mut sum = Complex64::ZERO;
        let mut error = 0.0;
        for stretch in self.pieces.iter().flat_map(|p| &p.stretches) {
            let (value, stretch_error) = stretch.compensated(t);
            sum += value;
            error += stretch_error;
        }
        (sum / (t * t), error / (t * t))
    }

    fn compensated_atoms(&self, t: f64) -> (Complex64, f64) {
        let (mut real, mut imaginary) = (0.0, 0.0);
        for (x, p) in &self.atoms {
            let (re, im) = compensated_kernel(t * x);
            real += p * re;
            imaginary += p * im;
        }
        let value = Complex64::new(real, imaginary) / (t * t);
        (value, 4e-16 * value.norm())
    }

    /// Fills the tables between two frequencies, on all threads.
    pub(super) fn prepare(&self, low: f64, high: f64) {
        if low < 1.0 {
            let (low, high) = (low.max(1e-18), high.min(0.999));
            if !self.pieces.is_empty() {
                self.continuous_table.prepare(&|t| self.compensated_continuous(t), low, high, 2e-15);
            }
            if self.atoms.len() > DIRECT_ATOMS {
                self.atoms_table.prepare(&|t| self.compensated_atoms(t), low, high, 2e-15);
            }
        }
        if high > 1.0 {
            for end in &self.ends {
                end.table.prepare(&|t| self.seen_from(end, t), low.max(1.0), high, 1e-15);
            }
        }
    }

    /// ψ of continuous part and of the atoms, both divided by t², for 0 < t < 1, with the interpolation error.
    fn compensated(&self, t: f64) -> (Complex64, Complex64, f64) {
        let (continuous, mut error) = if self.pieces.is_empty() {
            (Complex64::ZERO, 0.0)
        } else {
            self.continuous_table.evaluate(&|t| self.compensated_continuous(t), t, 2e-15)
        };
        let atoms = if self.atoms.len() > DIRECT_ATOMS {
            let (value, more) = self.atoms_table.evaluate(&|t| self.compensated_atoms(t), t, 2e-15);
            error += more;
            value
        } else {
            self.compensated_atoms(t).0
        };
        (continuous, atoms, error)
    }

    /// ln E e^{−itX}, relative accuracy kept as t falls to 0, and its absolute error; 0 < t < 1.
    ///
    /// `None` where the transform is too near 0 for its logarithm to be meant.
    pub(super) fn cumulant(&self, t: f64) -> Option<(Complex64, f64)> {
        let (continuous, atoms, interpolation) = self.compensated(t);
        let psi = (continuous + atoms) * (t * t);
        let relative = interpolation + self.quadrature_error + 1e-15;
        let squared = 2.0 * psi.re + psi.norm_sqr();
        if squared < -0.99 {
            return None;
        }
        let value = Complex64::new(0.5 * squared.ln_1p(), psi.im.atan2(1.0 + psi.re));
        Some((value, relative * t * t / (1.0 + squared).sqrt()))
    }

    /// Both parts of the transform at any t > 0.
    pub(super) fn split(&self, t: f64) -> SplitValue {
        if t < 1.0 {
            let (continuous, atoms, interpolation) = self.compensated(t);
            let (mass, mean) = (self.continuous_mass, self.continuous_mean);
            let square = t * t;
            let relative = interpolation + self.quadrature_error + 1e-15;
            return SplitValue {
                atoms: if self.atoms.len() > DIRECT_ATOMS {
                    Complex64::new(self.atom_mass, t * mean) + atoms * square
                } else {
                    self.direct_atoms(t)
                },
                continuous: Complex64::new(mass, -t * mean) + continuous * square,
                error: relative * square + 4e-16 * mass + self.mass_error,
            };
        }
        let mut continuous = Complex64::ZERO;
        let mut error = 1e-16 * self.atom_mass + self.law.missing_mass;
        for piece in &self.pieces {
            let (value, piece_error) = piece.evaluate(t);
            continuous += value;
            error += piece_error;
        }
        for end in &self.ends {
            let (value, wrong) = end.table.evaluate(&|t| self.seen_from(end, t), t, 1e-15);
            let (sine, cosine) = (t * end.position).sin_cos();
            continuous += value * Complex64::new(cosine, -sine);
            error += wrong;
        }
        SplitValue { atoms: self.direct_atoms(t), continuous, error }
    }

    /// Everything that leaves from one point, its own oscillation e^{−it·position} taken out.
    fn seen_from(&self, end: &EndPoint, t: f64) -> (Complex64, f64) {
        let mut sum = Complex64::ZERO;
        let mut error = 0.0;
        for (piece, k, outer) in &end.parts {
            let stretch = &self.pieces[*piece].stretches[*k];
            let value =
                if *outer { stretch.seen_from_end(t, ENOUGH) } else { stretch.seen_from_start(t, ENOUGH) };
            sum += if *outer { -value.value } else { value.value };
            error += value.error;
        }
        (sum, error)
    }

    /// The highest frequency at which the transform can be had.
    pub(super) fn highest_frequency(&self) -> f64 {
        if self.pieces.iter().any(|p| !p.dense.is_empty()) {
            (DENSE_OCTAVES as f64).exp2()
        } else {
            f64::INFINITY
        }
    }

    fn direct_atoms(&self, t: f64) -> Complex64 {
        let (mut real, mut imaginary) = (0.0, 0.0);
        for (x, p) in &self.atoms {
            let (sine, cosine) = (t * x).sin_cos();
            real += p * cosine;
            imaginary -= p * sine;
        }
        Complex64::new(real, imaginary)
    }

    /// An upper bound, without oscillation, on |∫ e^{−itx} f(x) dx| for this and all larger t (t ≥ 1).
    ///
    /// The sum of the moduli of what leaves from each end point: each is a Laplace transform along a ray and
    /// falls with t.
    pub(super) fn envelope(&self, t: f64) -> f64 {
        let mut sum: f64 = self.pieces.iter().map(|p| p.envelope(t)).sum();
        for end in &self.ends {
            let (value, error) = end.table.evaluate(&|t| self.seen_from(end, t), t, 1e-15);
            sum += 1.001 * value.norm() + error;
        }
        sum.min(self.continuous_mass)
    }

    /// The continuous part at t by quadrature on the real axis: the slow twin of [`Self::split`].
    #[cfg(test)]
    pub(super) fn continuous_on_the_axis(&self, t: f64) -> Complex64 {
        let mut nodes = Vec::new();
        for stretch in self.pieces.iter().flat_map(|p| &p.stretches) {
            stretch.dense_nodes(6.0 / t, 4_000_000, &mut nodes);
        }
        nodes.iter().map(|(x, w)| w * Complex64::from_polar(1.0, -t * x)).sum()
    }

    /// Bounds without oscillation on the transform.
    pub(super) fn ceiling(&self) -> &Ceiling {
        self.ceiling.get_or_init(|| Ceiling::new(self))
    }

    /// Bounds on the tails.
    pub(super) fn tails(&self) -> &Tails {
        self.tails.get_or_init(|| Tails::new(&self.law, self.standard.mean, self.standard.sd))
    }

    /// Standardized points where the density or a derivative of it jumps.
    pub(super) fn corners(&self) -> Vec<f64> {
        let mut corners: Vec<f64> = self
            .pieces
            .iter()
            .flat_map(|p| &p.stretches)
            .flat_map(|s| [s.start(), s.end()])
            .flatten()
            .collect();
        corners.sort_by(f64::total_cmp);
        corners.dedup();
        corners
    }

    /// Standardized panel edges of the continuous part, ascending.
    pub(super) fn edges(&self) -> Vec<f64> {
        let mut edges = self.corners();
        for panel in self.pieces.iter().flat_map(|p| &p.stretches).flat_map(|s| &s.panels) {
            let middle = 0.5 * (panel.nodes[0] + panel.nodes[panel.nodes.len() - 1]);
            edges.push(middle - 0.5 * panel.length);
            edges.push(middle + 0.5 * panel.length);
        }
        edges.sort_by(f64::total_cmp);
        edges.dedup_by(|a, b| (*a - *b).abs() <= 1e-13 * (1.0 + a.abs()));
        edges
    }
}

/// The pieces, and the end points of all of them: ends at one place are taken together, so that what cancels
/// there (two halves of a smooth law) does cancel.
fn prepare_pieces(law: &Law, standard: Standard) -> (Vec<PieceTransform>, Vec<EndPoint>) {
    let same = |a: f64, b: f64| (a - b).abs() <= 1e-15 * (1.0 + a.abs());
    let stretches: Vec<Vec<Stretch>> = law.pieces.iter().map(|p| Stretch::of_piece(p, standard)).collect();
    let shared = |own: usize| {
        stretches[own].iter().flat_map(|s| [s.start(), s.end()]).flatten().any(|place| {
            let others = stretches.iter().enumerate().filter(|(k, _)| *k != own).flat_map(|(_, list)| list);
            others.flat_map(|s| [s.start(), s.end()]).flatten().any(|other| same(place, other))
        })
    };
    let closed: Vec<_> = law
        .pieces
        .iter()
        .enumerate()
        .map(|(k, piece)| {
            let multiply = piece.multiply / standard.sd;
            let (low, high) = piece.density.support();
            let whole = piece.low <= low && piece.high >= high;
            // The closed transforms of two-sided infinite families fall with t, and so do those of one-sided
            // ones, but these may cancel with a neighbour; those of bounded families swing.
            let falls = low.is_infinite() && high.is_infinite()
                || (low.is_infinite() || high.is_infinite()) && !shared(k);
            (whole && falls && piece.density.log_laplace(Complex64::new(0.0, multiply)).is_some()).then(
                || {
                    (
                        piece.factor,
                        Arc::clone(&piece.density),
                        (piece.add - standard.mean) / standard.sd,
                        multiply,
                    )
                },
            )
        })
        .collect();
    let mut ends: Vec<EndPoint> = Vec::new();
    let mut pieces = Vec::new();
    for (p, (stretches, closed)) in stretches.into_iter().zip(closed).enumerate() {
        let (mut dense, mut variation) = (Vec::new(), 0.0);
        if closed.is_none() && stretches.iter().all(|s| s.rotates) {
            for (k, stretch) in stretches.iter().enumerate() {
                for (position, outer) in [(stretch.start(), false), (stretch.end(), true)] {
                    let Some(position) = position else { continue };
                    match ends.iter_mut().find(|e| same(e.position, position)) {
                        Some(end) => end.parts.push((p, k, outer)),
                        None => {
                            ends.push(EndPoint {
                                position,
                                parts: vec![(p, k, outer)],
                                table: Octaves::new(0, 50),
                            });
                        }
                    }
                }
            }
        } else if closed.is_none() {
            dense = (0..DENSE_OCTAVES).map(|_| OnceLock::new()).collect();
            variation = stretches.iter().map(Stretch::variation).sum();
        }
        pieces.push(PieceTransform { stretches, closed, dense, variation });
    }
    (pieces, ends)
}

impl PieceTransform {
    fn dense_nodes(&self, t: f64) -> Option<&[(f64, f64)]> {
        let octave = t.log2().floor().max(0.0) as usize;
        let nodes = self.dense.get(octave)?.get_or_init(|| {
            let longest = 8.0 / ((octave + 1) as f64).exp2();
            let mut nodes = Vec::new();
            for stretch in &self.stretches {
                stretch.dense_nodes(longest, DENSE_NODES, &mut nodes);
            }
            nodes
        });
        (nodes.len() < DENSE_NODES).then_some(nodes)
    }

    fn evaluate(&self, t: f64) -> (Complex64, f64) {
        if let Some((factor, density, add, multiply)) = &self.closed {
            return match density.log_laplace(Complex64::new(0.0, t * multiply)) {
                Some(log) => {
                    let value = factor * (log - Complex64::new(0.0, t * add)).exp();
                    let error = value.norm() * 2e-16 * (4.0 + log.norm());
                    (value, error)
                }
                None => (Complex64::ZERO, *factor),
            };
        }
        let mut sum = Complex64::ZERO;
        let mut error = 0.0;
        if !self.dense.is_empty() {
            match self.dense_nodes(t) {
                Some(nodes) => {
                    for (x, w) in nodes {
                        let (sine, cosine) = (t * x).sin_cos();
                        sum += w * Complex64::new(cosine, -sine);
                    }
                    error += 1e-15;
                }
                None => error += f64::MAX,
            }
        }
        (sum, error)
    }

    fn envelope(&self, t: f64) -> f64 {
        if let Some((factor, density, _, multiply)) = &self.closed {
            return match density.log_laplace(Complex64::new(0.0, t * multiply)) {
                Some(log) => factor * log.re.exp(),
                None => *factor,
            };
        }
        if self.dense.is_empty() { 0.0 } else { self.variation / t }
    }
}

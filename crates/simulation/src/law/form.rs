//! The normal form while it is being built, and the operations on laws that stay inside it.

use super::checks::{compensated_sum, shares};
use super::density::StandardMoments;
use super::opaque::{Opaque, OpaqueLaw};
use super::rounded::Rounded;
use super::{Atom, ClosedFamily, ClosedForm, Piece};
use std::sync::Arc;

/// Most atoms a law may be tabulated with.
pub(crate) const MOST_ATOMS: usize = 1 << 21;

/// Finitely many atoms, analytic pieces, and laws that can only be drawn from.
#[derive(Debug, Clone, Default)]
pub(crate) struct Form {
    pub(crate) atoms: Vec<Atom>,
    pub(crate) missing_mass: f64,
    pub(crate) pieces: Vec<Piece>,
    pub(crate) opaque: Vec<Opaque>,
    pub(crate) closed_form: Option<ClosedForm>,
    /// Moments known better than the atoms give them.
    pub(crate) exact: Option<StandardMoments>,
    pub(crate) warnings: Vec<String>,
}

/// Why an operation is refused.
pub(crate) type Refusal = String;

impl Form {
    /// One continuous piece.
    pub(crate) fn piece(piece: Piece) -> Self {
        Self { pieces: vec![piece], ..Self::default() }
    }

    /// Continuous pieces.
    pub(crate) fn pieces(pieces: Vec<Piece>) -> Self {
        Self { pieces, ..Self::default() }
    }

    /// Atoms whose masses add up to 1 − `missing_mass`.
    pub(crate) fn atoms(atoms: Vec<Atom>, missing_mass: f64) -> Self {
        Self { atoms, missing_mass, ..Self::default() }
    }

    /// A law that can only be drawn from.
    pub(crate) fn opaque(law: Arc<dyn OpaqueLaw>) -> Self {
        Self { opaque: vec![Opaque { weight: 1.0, law, add: 0.0, multiply: 1.0 }], ..Self::default() }
    }

    /// The same with its closed form stated.
    pub(crate) fn with_closed_form(self, family: ClosedFamily, add: f64, multiply: f64) -> Self {
        Self { closed_form: Some(ClosedForm { family, add, multiply }), ..self }
    }

    /// The same with its moments stated.
    pub(crate) fn with_moments(self, moments: StandardMoments) -> Self {
        Self { exact: Some(moments), ..self }
    }

    /// The union with normalised weights.
    pub(crate) fn mixture(parts: Vec<(f64, Self)>) -> Self {
        let weights: Vec<f64> = parts.iter().map(|(weight, _)| *weight).collect();
        let mut mixed = Self::default();
        let mut kept: Vec<(f64, Self)> = shares(&weights)
            .into_iter()
            .zip(parts)
            .map(|(share, (_, form))| (share, form))
            .filter(|(share, _)| *share > 0.0)
            .collect();
        if kept.len() == 1 {
            return kept.swap_remove(0).1;
        }
        for (share, form) in kept {
            mixed.atoms.extend(form.atoms.iter().map(|a| Atom { mass: share * a.mass, ..*a }));
            mixed.missing_mass += share * form.missing_mass;
            mixed.pieces.extend(form.pieces.into_iter().map(|p| Piece { factor: share * p.factor, ..p }));
            mixed.opaque.extend(form.opaque.into_iter().map(|o| Opaque { weight: share * o.weight, ..o }));
            for warning in form.warnings {
                if !mixed.warnings.contains(&warning) {
                    mixed.warnings.push(warning);
                }
            }
        }
        mixed
    }

    /// The law of add + multiply·X.
    pub(crate) fn affine(self, add: f64, multiply: f64) -> Self {
        if multiply == 0.0 {
            return Self {
                atoms: vec![Atom { value: add, mass: 1.0 }],
                warnings: self.warnings,
                ..Self::default()
            };
        }
        let image = |value: f64| add + multiply * value;
        Self {
            atoms: self.atoms.iter().map(|a| Atom { value: image(a.value), ..*a }).collect(),
            missing_mass: self.missing_mass,
            pieces: self
                .pieces
                .into_iter()
                .map(|p| Piece { add: image(p.add), multiply: multiply * p.multiply, ..p })
                .collect(),
            opaque: self
                .opaque
                .into_iter()
                .map(|o| Opaque { add: image(o.add), multiply: multiply * o.multiply, ..o })
                .collect(),
            closed_form: self.closed_form.map(|closed| ClosedForm {
                add: image(closed.add),
                multiply: multiply * closed.multiply,
                ..closed
            }),
            exact: self.exact.map(|moments| moments.image(add, multiply)),
            warnings: self.warnings,
        }
    }

    /// Ends of the support.
    pub(crate) fn support(&self) -> (f64, f64) {
        let lows = self.atoms.iter().map(|a| a.value);
        let lows = lows.chain(self.pieces.iter().map(Piece::image_low));
        let lows = lows.chain(self.opaque.iter().map(|o| o.support().0));
        let highs = self.atoms.iter().map(|a| a.value);
        let highs = highs.chain(self.pieces.iter().map(Piece::image_high));
        let highs = highs.chain(self.opaque.iter().map(|o| o.support().1));
        (lows.fold(f64::INFINITY, f64::min), highs.fold(f64::NEG_INFINITY, f64::max))
    }

    /// Values beyond the limits are moved to the limits.
    pub(crate) fn cap(self, low: f64, high: f64) -> Result<Self, Refusal> {
        let (support_low, support_high) = self.support();
        if low <= support_low && support_high <= high {
            return Ok(self);
        }
        self.refuse_opaque("cap")?;
        let moved_down = self.mass_above(high);
        let moved_up = self.mass_below(low);
        let mut capped = self.clipped(low, high);
        if moved_up > 0.0 {
            capped.atoms.push(Atom { value: low, mass: moved_up });
        }
        if moved_down > 0.0 {
            capped.atoms.push(Atom { value: high, mass: moved_down });
        }
        Ok(capped)
    }

    /// Conditional on low ≤ X ≤ high.
    pub(crate) fn restrict(self, low: f64, high: f64) -> Result<Self, Refusal> {
        let (support_low, support_high) = self.support();
        if low <= support_low && support_high <= high {
            return Ok(self);
        }
        self.refuse_opaque("restrict")?;
        let mut inside = self.clipped(low, high);
        let total =
            compensated_sum(inside.atoms.iter().map(|a| a.mass).chain(inside.pieces.iter().map(Piece::mass)));
        if total.is_nan() || total < 1e-300 {
            return Err(format!("nothing of the law lies inside the limits (probability {total:e})"));
        }
        inside.missing_mass /= total;
        if inside.missing_mass > 1e-30 {
            return Err("the limits leave only a part of the law that is too improbable to tabulate".into());
        }
        inside.atoms.iter_mut().for_each(|a| a.mass /= total);
        inside.pieces.iter_mut().for_each(|p| p.factor /= total);
        Ok(inside)
    }

    /// To the nearest multiple of `step`, ties to even.
    pub(crate) fn round(self, step: f64) -> Result<Self, Refusal> {
        self.refuse_opaque("round")?;
        let nearest = |value: f64| (value / step).round_ties_even();
        let mut cells: std::collections::BTreeMap<i64, f64> = std::collections::BTreeMap::new();
        let mut missing_mass = self.missing_mass;
        let mut opaque = Vec::new();
        let too_many = || {
            format!(
                "the rounded law would have more than {MOST_ATOMS} values; take a larger step or cap it first"
            )
        };
        for atom in &self.atoms {
            let k = nearest(atom.value);
            if k.abs() > 9e15 {
                return Err(too_many());
            }
            *cells.entry(k as i64).or_default() += atom.mass;
        }
        for piece in &self.pieces {
            let reach = |end: f64, level_end: f64| if end.is_finite() { end } else { level_end };
            let (far_low, far_high) =
                (piece.conditional_quantile(1e-32), piece.conditional_quantile_above(1e-32));
            let (far_low, far_high) = if piece.multiply > 0.0 {
                (piece.image(far_low), piece.image(far_high))
            } else {
                (piece.image(far_high), piece.image(far_low))
            };
            let low = nearest(reach(piece.image_low(), far_low));
            let high = nearest(reach(piece.image_high(), far_high));
            if low.abs().max(high.abs()) > 9e15 || high - low > MOST_ATOMS as f64 {
                let (near, far) = (nearest(piece.image(piece.conditional_quantile(0.5))), 9e15);
                if near.abs() > far {
                    return Err(too_many());
                }
                let (weight, law) = (piece.mass(), Arc::new(Rounded::new(piece.clone(), step)));
                opaque.push(Opaque { weight, law, add: 0.0, multiply: 1.0 });
                continue;
            }
            missing_mass += piece.at_or_below((low - 0.5) * step) + piece.above((high + 0.5) * step);
            // Cell masses as differences from the nearer end, so that both tails keep their relative accuracy.
            let middle = piece.image(piece.conditional_quantile(0.5));
            let (mut below, mut above) =
                (piece.at_or_below((low - 0.5) * step), piece.above((low - 0.5) * step));
            for k in low as i64..=high as i64 {
                let edge = (k as f64 + 0.5) * step;
                let (next_below, next_above) = (piece.at_or_below(edge), piece.above(edge));
                let mass = if edge < middle { next_below - below } else { above - next_above };
                (below, above) = (next_below, next_above);
                if mass > 0.0 {
                    *cells.entry(k).or_default() += mass;
                }
            }
        }
        if cells.len() > MOST_ATOMS {
            return Err(too_many());
        }
        let atoms = cells.into_iter().map(|(k, mass)| Atom { value: k as f64 * step, mass }).collect();
        Ok(Self { atoms, missing_mass, opaque, warnings: self.warnings, ..Self::default() })
    }

    fn refuse_opaque(&self, operation: &str) -> Result<(), Refusal> {
        match self.opaque.first() {
            Some(opaque) => Err(format!(
                "`{operation}` cannot be applied to a law that can only be simulated ({}); apply it to the laws inside",
                opaque.law.reason()
            )),
            None => Ok(()),
        }
    }

    fn mass_below(&self, limit: f64) -> f64 {
        if limit == f64::NEG_INFINITY {
            return 0.0;
        }
        let atoms = self.atoms.iter().filter(|a| a.value < limit && !same(a.value, limit)).map(|a| a.mass);
        compensated_sum(atoms.chain(self.pieces.iter().map(|p| p.at_or_below(limit))))
    }

    fn mass_above(&self, limit: f64) -> f64 {
        if limit == f64::INFINITY {
            return 0.0;
        }
        let atoms = self.atoms.iter().filter(|a| a.value > limit && !same(a.value, limit)).map(|a| a.mass);
        compensated_sum(atoms.chain(self.pieces.iter().map(|p| p.above(limit))))
    }

    /// What lies inside the limits, not normalised.
    fn clipped(&self, low: f64, high: f64) -> Self {
        let inside = |value: f64| (value >= low || same(value, low)) && (value <= high || same(value, high));
        Self {
            atoms: self.atoms.iter().copied().filter(|a| inside(a.value)).collect(),
            missing_mass: self.missing_mass,
            pieces: self
                .pieces
                .iter()
                .flat_map(|piece| self.unfolded(piece))
                .filter_map(|piece| piece.restricted(low, high))
                .filter(|piece| piece.mass() > 0.0)
                .collect(),
            warnings: self.warnings.clone(),
            ..Self::default()
        }
    }

    /// A symmetric piece whose halves are better behaved once truncated becomes its two halves.
    fn unfolded(&self, piece: &Piece) -> Vec<Piece> {
        match piece.density.folded() {
            Some(half) if piece.is_whole() => [1.0, -1.0]
                .map(|sign| Piece::whole(half.clone(), 0.5 * piece.factor, piece.add, sign * piece.multiply))
                .to_vec(),
            _ => vec![piece.clone()],
        }
    }

    /// Sorts the atoms, merges equal ones and those a few units in the last place apart, drops empty ones.
    pub(crate) fn merge_atoms(&mut self) {
        self.atoms.retain(|a| a.mass > 0.0);
        self.atoms.sort_by(|one, other| one.value.total_cmp(&other.value));
        let mut merged: Vec<(Atom, f64)> = Vec::with_capacity(self.atoms.len());
        for atom in self.atoms.drain(..) {
            match merged.last_mut() {
                // The heaviest of merged atoms lends its value (the second number is its own mass).
                Some((last, heaviest)) if same(last.value, atom.value) => {
                    if atom.mass > *heaviest {
                        (last.value, *heaviest) = (atom.value, atom.mass);
                    }
                    last.mass += atom.mass;
                }
                _ => merged.push((atom, atom.mass)),
            }
        }
        self.atoms = merged
            .into_iter()
            // −0 and 0 are the same value; write it as 0.
            .map(|(atom, _)| Atom { value: atom.value + 0.0, ..atom })
            .collect();
    }
}

/// Whether two values differ by rounding only: 4 units in the last place.
pub(crate) fn same(a: f64, b: f64) -> bool {
    a == b || (a - b).abs() <= 4.0 * f64::EPSILON * a.abs().max(b.abs())
}

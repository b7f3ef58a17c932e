//! Drawing from a law: an alias table chooses the atom or piece, library samplers or inverse transforms draw
//! inside a piece.
//!
//! The alias table is M. D. Vose's (1991), *IEEE Trans. Softw. Eng.* 17:972–975 (from memory): one random number
//! and one comparison whatever the number of atoms.

use super::opaque::Opaque;
use super::piece::Slice;
use super::{LawParts, Piece};
use rand::RngExt;

/// A law prepared for many draws.
#[derive(Debug, Clone)]
pub struct Sampler {
    sources: Vec<Source>,
    /// Probability of keeping the column, and the source to take otherwise.
    columns: Vec<(f64, u32)>,
}

#[derive(Debug, Clone)]
enum Source {
    Atom(f64),
    /// The whole density, through the family's sampler.
    Whole(Piece),
    /// A large part of the density: draw until inside.
    Reject(Piece),
    /// A small part: inverse transform.
    Invert(Slice),
    Opaque(Opaque),
}

impl Sampler {
    pub(super) fn new(parts: &LawParts, opaque: &[Opaque]) -> Self {
        let mut sources = Vec::with_capacity(parts.atoms.len() + parts.pieces.len() + opaque.len());
        let mut masses = Vec::with_capacity(sources.capacity());
        for atom in &parts.atoms {
            sources.push(Source::Atom(atom.value));
            masses.push(atom.mass);
        }
        for piece in &parts.pieces {
            sources.push(if piece.is_whole() {
                Source::Whole(piece.clone())
            } else if piece.between(piece.low, piece.high) > 0.25 {
                Source::Reject(piece.clone())
            } else {
                Source::Invert(Slice::of(piece))
            });
            masses.push(piece.mass());
        }
        for part in opaque {
            sources.push(Source::Opaque(part.clone()));
            masses.push(part.weight);
        }
        let columns = alias_table(&masses);
        Self { sources, columns }
    }

    /// One draw.
    pub fn sample<R: rand::Rng>(&self, random: &mut R) -> f64 {
        let source =
            if self.sources.len() == 1 { &self.sources[0] } else { &self.sources[self.choose(random)] };
        let draw = match source {
            Source::Atom(value) => *value,
            Source::Whole(piece) => piece.image(piece.density.sample(random)),
            Source::Reject(piece) => loop {
                let y = piece.density.sample(random);
                if y >= piece.low && y <= piece.high {
                    break piece.image(y);
                }
            },
            Source::Invert(slice) => slice.sample(random),
            Source::Opaque(part) => part.sample(random),
        };
        // The far tail of an enormous law may leave the range of doubles.
        draw.clamp(f64::MIN, f64::MAX)
    }

    /// The chosen source: one uniform number gives the column and the coin.
    fn choose<R: rand::Rng>(&self, random: &mut R) -> usize {
        let count = self.columns.len() as u64;
        // The high bits of a 128-bit product choose the column, the low 64 bits are the coin.
        let product = u128::from(random.next_u64()) * u128::from(count);
        let column = (product >> 64) as usize;
        // For long tables the product's low bits are too coarse a coin; draw a fresh one.
        let coin: f64 = if count > 1 << 10 {
            random.random()
        } else {
            ((product as u64) >> 11) as f64 * (1.0 / (1u64 << 53) as f64)
        };
        let (keep, other) = self.columns[column];
        if coin < keep { column } else { other as usize }
    }
}

/// Vose's alias table for masses on any scale.
fn alias_table(masses: &[f64]) -> Vec<(f64, u32)> {
    let count = masses.len();
    let total: f64 = masses.iter().sum();
    let mut scaled: Vec<f64> = masses.iter().map(|mass| mass / total * count as f64).collect();
    let mut columns: Vec<(f64, u32)> = (0..count).map(|i| (1.0, i as u32)).collect();
    let (mut small, mut large): (Vec<usize>, Vec<usize>) = (0..count).partition(|&i| scaled[i] < 1.0);
    while let (Some(&poor), Some(&rich)) = (small.last(), large.last()) {
        small.pop();
        columns[poor] = (scaled[poor], rich as u32);
        scaled[rich] -= 1.0 - scaled[poor];
        if scaled[rich] < 1.0 {
            large.pop();
            small.push(rich);
        }
    }
    columns
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn alias_columns_give_back_the_masses() {
        let masses = [0.5, 1e-9, 0.2, 0.3 - 1e-9, 0.0];
        let columns = alias_table(&masses);
        for (i, mass) in masses.iter().enumerate() {
            let got: f64 = columns
                .iter()
                .enumerate()
                .map(|(column, &(keep, other))| {
                    f64::from(u8::from(column == i)) * keep
                        + f64::from(u8::from(other as usize == i)) * (1.0 - keep)
                })
                .sum::<f64>()
                / masses.len() as f64;
            assert!((got - mass).abs() < 1e-15, "atom {i}: {got}");
        }
    }
}

//! Moments of a normal form: closed forms of whole families, quadrature of truncated pieces, put together
//! about the common mean in units of the law's own size so that nothing overflows or cancels.

use super::Piece;
use super::checks::compensated_sum;
use super::density::StandardMoments;
use super::form::Form;
use super::opaque::Opaque;
use super::quadrature::standard_rule;

/// Moments of a law without units: ratios to powers of the sd.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct LawMoments {
    pub(crate) standard: StandardMoments,
    /// E|X − mean|³/sd³.
    pub(crate) third_absolute_ratio: Option<f64>,
}

/// One component with its share of the probability.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Component {
    pub(crate) mass: f64,
    pub(crate) moments: StandardMoments,
}

/// The moments of the law `form`, whose atoms are merged.
///
/// Relative error about 1e-14 for whole families and tables, 1e-13 for truncated pieces (20-node rules on
/// graded panels).
pub(crate) fn of_form(form: &Form) -> LawMoments {
    let constant = |value| StandardMoments::finite(value, 0.0, 0.0, -3.0);
    let mut components: Vec<Component> =
        form.atoms.iter().map(|atom| Component { mass: atom.mass, moments: constant(atom.value) }).collect();
    components
        .extend(form.pieces.iter().map(|piece| Component { mass: piece.mass(), moments: of_piece(piece) }));
    components.extend(form.opaque.iter().map(|opaque| Component {
        mass: opaque.weight,
        moments: opaque.law.moments().image(opaque.add, opaque.multiply),
    }));
    let standard = match (form.exact, &components[..]) {
        (Some(exact), _) => exact,
        (None, [only]) => only.moments,
        (None, several) => combine(several),
    };
    let third_absolute_ratio = match standard {
        StandardMoments { mean: Some(mean), sd: Some(sd), .. }
            if sd > 0.0 && form.opaque.is_empty() && tail_index(form) > 3.0 =>
        {
            Some(third_absolute(form, mean, sd))
        }
        _ => None,
    };
    LawMoments { standard, third_absolute_ratio }
}

/// sup of r with E|X|^r < ∞.
pub(crate) fn tail_index(form: &Form) -> f64 {
    let pieces = form.pieces.iter().map(Piece::tail_indices);
    let opaque = form.opaque.iter().map(Opaque::tail_indices);
    pieces.chain(opaque).fold(f64::INFINITY, |least, (upper, lower)| least.min(upper).min(lower))
}

/// Moments of a mixture of components about their common mean.
pub(crate) fn combine(components: &[Component]) -> StandardMoments {
    let total = compensated_sum(components.iter().map(|c| c.mass));
    let size = components.iter().filter_map(|c| c.moments.mean).map(f64::abs).fold(0.0, f64::max);
    let mut none = StandardMoments { mean: None, sd: None, skewness: None, excess_kurtosis: None };
    if components.iter().any(|c| c.moments.mean.is_none()) {
        return none;
    }
    let mean_of = |c: &Component| c.moments.mean.unwrap_or(0.0);
    let mean = if size == 0.0 {
        0.0
    } else {
        size * compensated_sum(components.iter().map(|c| c.mass * (mean_of(c) / size))) / total
    };
    // A second pass removes the rounding of the first mean.
    let mean = mean + compensated_sum(components.iter().map(|c| c.mass * (mean_of(c) - mean))) / total;
    none.mean = Some(mean);
    if components.iter().any(|c| c.moments.sd.is_none()) {
        return none;
    }
    let sd_of = |c: &Component| c.moments.sd.unwrap_or(0.0);
    let unit = components.iter().map(|c| (mean_of(c) - mean).abs().max(sd_of(c))).fold(0.0, f64::max);
    if unit == 0.0 {
        return StandardMoments::finite(mean, 0.0, 0.0, -3.0);
    }
    // Deviations d and sds s in that unit; a heavy component decides, light ones may underflow harmlessly.
    let scaled: Vec<(f64, f64, f64, StandardMoments)> = components
        .iter()
        .map(|c| (c.mass / total, (mean_of(c) - mean) / unit, sd_of(c) / unit, c.moments))
        .collect();
    let variance = compensated_sum(scaled.iter().map(|&(w, d, s, _)| w * (d * d + s * s)));
    let sd = variance.sqrt();
    if sd == 0.0 {
        // All but less than the smallest double's share of the law is one value.
        return StandardMoments::finite(mean, 0.0, 0.0, -3.0);
    }
    none.sd = Some(unit * sd);
    if scaled.iter().all(|(_, _, s, m)| *s == 0.0 || m.skewness.is_some()) {
        let third = compensated_sum(scaled.iter().flat_map(|&(w, d, s, m)| {
            [w * d * d * d, 3.0 * w * d * s * s, w * m.skewness.unwrap_or(0.0) * s * s * s]
        }));
        none.skewness = Some(third / variance / sd);
        if scaled.iter().all(|(_, _, s, m)| *s == 0.0 || m.excess_kurtosis.is_some()) {
            let fourth = compensated_sum(scaled.iter().flat_map(|&(w, d, s, m)| {
                let (d2, s2) = (d * d, s * s);
                [
                    w * d2 * d2,
                    6.0 * w * d2 * s2,
                    4.0 * w * d * m.skewness.unwrap_or(0.0) * s2 * s,
                    w * (m.excess_kurtosis.unwrap_or(0.0) + 3.0) * s2 * s2,
                ]
            }));
            none.excess_kurtosis = Some(fourth / variance / variance - 3.0);
        }
    }
    none
}

/// Moments of one piece, conditional on lying on it, in the quantity's unit.
pub(crate) fn of_piece(piece: &Piece) -> StandardMoments {
    if piece.is_whole()
        && let Some(moments) = piece.density.standard_moments()
    {
        return moments.image(piece.add, piece.multiply);
    }
    by_quadrature(piece)
}

/// The same by quadrature, whether or not the density has closed moments.
pub(crate) fn by_quadrature(piece: &Piece) -> StandardMoments {
    let (upper, lower) = piece.tail_indices();
    let index = upper.min(lower);
    let mut nodes = Nodes::of(piece);
    let none = StandardMoments { mean: None, sd: None, skewness: None, excess_kurtosis: None };
    if index <= 1.0 {
        return none;
    }
    let mean = nodes.mean();
    let (unit, powers) = nodes.central_powers(mean, index);
    let sd = powers[0].map(f64::sqrt);
    let moments = StandardMoments {
        mean: Some(mean),
        sd: sd.map(|sd| unit * sd),
        skewness: sd.zip(powers[1]).map(|(sd, third)| third / sd / sd / sd),
        excess_kurtosis: sd.zip(powers[2]).map(|(sd, fourth)| fourth / sd / sd / sd / sd - 3.0),
    };
    moments.image(piece.add, piece.multiply)
}

/// Quadrature nodes (y, probability) of one piece in family units, its mass normalised to 1.
struct Nodes {
    points: Vec<(f64, f64)>,
    /// End y of the panels and density there, relative to the mass, for power tails above and below.
    upper: Option<(f64, f64, f64)>,
    lower: Option<(f64, f64, f64)>,
}

/// How far beyond 1 a power tail is integrated by panels before its leading term takes over.
const FAR: f64 = 1e20;

impl Nodes {
    fn of(piece: &Piece) -> Self {
        let mass = piece.between(piece.low, piece.high);
        let f = &piece.density;
        let mut ends = piece.panel_points();
        let heavy_up = piece.high == f64::INFINITY && f.upper_tail_index() < f64::INFINITY;
        let heavy_down = piece.low == f64::NEG_INFINITY && f.lower_tail_index() < f64::INFINITY;
        if heavy_up && let Some(&last) = ends.last() {
            extend(&mut ends, last.abs().max(1.0));
        }
        if heavy_down && let Some(&first) = ends.first() {
            let mut mirrored: Vec<f64> = ends.iter().rev().map(|y| -y).collect();
            extend(&mut mirrored, first.abs().max(1.0));
            ends = mirrored.into_iter().rev().map(|y| -y).collect();
        }
        let mut points = Vec::with_capacity(20 * ends.len());
        for pair in ends.windows(2) {
            let (half, middle) = (0.5 * (pair[1] - pair[0]), 0.5 * pair[0] + 0.5 * pair[1]);
            points.extend(standard_rule().iter().map(|&(node, weight)| {
                let y = middle + half * node;
                (y, half * weight * (f.density(y) / mass))
            }));
        }
        // What lies between a singular end and the first panel sits at the end for all purposes.
        if let (Some(&first), Some(&last)) = (ends.first(), ends.last()) {
            if piece.low.is_finite() {
                points.push((piece.low, piece.between(piece.low, first) / mass));
            }
            if piece.high.is_finite() {
                points.push((piece.high, piece.between(last, piece.high) / mass));
            }
        }
        let end = |y: Option<&f64>, index: f64| y.map(|&y| (y, f.density(y) / mass, index));
        Self {
            points,
            upper: if heavy_up { end(ends.last(), f.upper_tail_index()) } else { None },
            lower: if heavy_down { end(ends.first(), f.lower_tail_index()) } else { None },
        }
    }

    /// ∫ beyond the panels of |y/unit|^order, for tails C|y|^{−index−1}.
    fn beyond(tail: Option<(f64, f64, f64)>, order: f64, unit: f64) -> f64 {
        match tail {
            Some((y, density, index)) if index > order && density > 0.0 => {
                (y.abs() / unit).powf(order) * (density * y.abs()) / (index - order)
            }
            _ => 0.0,
        }
    }

    fn mean(&mut self) -> f64 {
        let unit = self.points.iter().filter(|p| p.1 > 1e-30).map(|p| p.0.abs()).fold(0.0, f64::max);
        if unit == 0.0 {
            return 0.0;
        }
        let total = compensated_sum(self.points.iter().map(|p| p.1))
            + Self::beyond(self.upper, 0.0, 1.0)
            + Self::beyond(self.lower, 0.0, 1.0);
        let sum = compensated_sum(self.points.iter().map(|p| p.1 * (p.0 / unit)))
            + Self::beyond(self.upper, 1.0, unit)
            - Self::beyond(self.lower, 1.0, unit);
        let mean = unit * sum / total;
        // Second pass about the first mean.
        if self.upper.is_none() && self.lower.is_none() {
            mean + compensated_sum(self.points.iter().map(|p| p.1 * (p.0 - mean))) / total
        } else {
            mean
        }
    }

    /// A unit and the central moments of order 2, 3, 4 in it.
    fn central_powers(&self, mean: f64, index: f64) -> (f64, [Option<f64>; 3]) {
        let unit = self
            .points
            .iter()
            .filter(|p| p.1 > 0.0)
            .map(|p| (p.0 - mean).abs() * p.1.sqrt().sqrt())
            .fold(0.0, f64::max);
        if unit == 0.0 {
            return (1.0, [Some(0.0); 3]);
        }
        let powers = [2, 3, 4].map(|order| {
            (index > f64::from(order)).then(|| {
                let lower_sign = if order == 3 { -1.0 } else { 1.0 };
                compensated_sum(self.points.iter().filter(|p| p.1 > 0.0).map(|p| {
                    // The weight is spread over the factors so that neither overflows alone.
                    let root = p.1.powf(1.0 / f64::from(order));
                    ((p.0 - mean) / unit * root).powi(order)
                })) + Self::beyond(self.upper, f64::from(order), unit)
                    + lower_sign * Self::beyond(self.lower, f64::from(order), unit)
            })
        });
        (unit, powers)
    }
}

/// Appends points growing by a factor of 3 from `from` as far as the panels go.
fn extend(points: &mut Vec<f64>, from: f64) {
    let mut y = 3.0 * from;
    while y < FAR * from && y < 1e290 {
        points.push(y);
        y *= 3.0;
    }
}

/// E|X − mean|³/sd³ by quadrature split at the mean.
fn third_absolute(form: &Form, mean: f64, sd: f64) -> f64 {
    let atoms = form.atoms.iter().map(|atom| {
        // The mass is spread over the factors: neither a tiny mass nor a huge cube leaves the range alone.
        let d = ((atom.value - mean) / sd).abs() * atom.mass.cbrt();
        d * d * d
    });
    let pieces = form.pieces.iter().map(|piece| {
        let split = piece.preimage(mean);
        let inside = split > piece.low && split < piece.high;
        let scale = piece.multiply.abs();
        // (x − mean)/sd without cancellation: from the split where it is on the piece, from the shift elsewhere.
        let shift = (piece.add - mean) / sd * piece.multiply.signum();
        let rate = scale / sd;
        let in_sds = |y: f64| if rate.is_finite() { y * rate } else { y * scale / sd };
        let deviation = |y: f64| if inside { in_sds(y - split) } else { shift + in_sds(y) };
        let parts: Vec<Piece> = if inside {
            vec![Piece { high: split, ..piece.clone() }, Piece { low: split, ..piece.clone() }]
        } else {
            vec![piece.clone()]
        };
        compensated_sum(parts.iter().map(|part| {
            let mass = part.mass();
            if mass <= 0.0 {
                return 0.0;
            }
            let nodes = Nodes::of(part);
            let root = mass.cbrt();
            compensated_sum(nodes.points.iter().map(|p| {
                let d = (deviation(p.0) * root).abs() * p.1.max(0.0).cbrt();
                d * d * d
            })) + Nodes::beyond(nodes.upper, 3.0, sd / scale / root)
                + Nodes::beyond(nodes.lower, 3.0, sd / scale / root)
        }))
    });
    compensated_sum(atoms.chain(pieces))
}

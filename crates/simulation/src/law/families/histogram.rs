//! The histogram: a density that is constant on each bin. `weights` are the probabilities of the bins (counts,
//! say) on any positive scale, not the heights.

use super::uniform::Uniform;
use crate::law::Piece;
use crate::law::checks::{Checks, shares, show};
use crate::law::form::Form;
use std::sync::Arc;

/// Most bins.
const MOST_BINS: usize = 1 << 14;

pub(super) fn compile(edges: &[f64], weights: &[f64], checks: &mut Checks) -> Option<Form> {
    if edges.len() < 2 || edges.len() > MOST_BINS + 1 {
        checks.problem("edges", format!("must hold 2 to {} edges (got {})", MOST_BINS + 1, edges.len()));
        return None;
    }
    if weights.len() != edges.len() - 1 {
        checks.problem(
            "weights",
            format!("must hold one weight per bin, {} (got {})", edges.len() - 1, weights.len()),
        );
        return None;
    }
    let mut good = checks.weights("weights", weights);
    for (index, &edge) in edges.iter().enumerate() {
        let place = format!("edges/{index}");
        good &= checks.finite(&place, edge);
        if index > 0 && edge <= edges[index - 1] {
            let message = format!(
                "must be greater than the edge before, {} (got {})",
                show(edges[index - 1]),
                show(edge)
            );
            checks.problem(&place, message);
            good = false;
        }
    }
    if !good {
        return None;
    }
    let uniform = Arc::new(Uniform);
    let pieces = edges
        .windows(2)
        .zip(shares(weights))
        .filter(|(_, share)| *share > 0.0)
        .map(|(ends, share)| Piece::whole(uniform.clone(), share, ends[0], ends[1] - ends[0]))
        .collect();
    Some(Form::pieces(pieces))
}

//! The distance over n: computed, bounded and predicted, on a logarithmic grid.

use crate::bounds::{berry_esseen, leading_term};
use crate::cost;
use crate::prepared::Prepared;
use crate::report::Growth;
use gaussgap_simulation::sum::{Method, SumError, build_exact};
use gaussgap_simulation::work::{Cancelled, Work};
use rayon::prelude::*;

/// Units of work for the whole curve (see [`cost`]); where they do not suffice it has fewer points.
const ALLOWED: f64 = 6000.0;

/// Values of n per factor of ten.
const PER_DECADE: f64 = 10.0;

/// Every n from 1 to 10, then about ten per decade, `up_to` and the planned n included.
pub(crate) fn grid(up_to: u64, planned: u64) -> Vec<u64> {
    let mut grid = (1..=up_to.min(10)).collect::<Vec<_>>();
    let mut step = PER_DECADE as i32 + 1;
    loop {
        let n = 10_f64.powf(f64::from(step) / PER_DECADE).round() as u64;
        if n >= up_to {
            break;
        }
        grid.push(n);
        step += 1;
    }
    grid.push(up_to);
    if planned <= up_to {
        grid.push(planned);
    }
    grid.sort_unstable();
    grid.dedup();
    grid
}

/// The growth curve; the distance is null where no exact route reaches it.
pub(crate) fn growth(prepared: &Prepared, work: &Work) -> Result<Growth, Cancelled> {
    let n = grid(prepared.scenario.search.up_to, prepared.total())
        .into_iter()
        .filter(|n| *n >= prepared.smallest_n())
        .collect::<Vec<_>>();
    let mut spent = 0.0;
    let affordable = spread_out(n, prepared.total()).into_iter().filter(|n| {
        let Some(counts) = prepared.counts_at(*n) else { return false };
        spent += cost::of_sum(&prepared.sum_spec(&counts));
        spent <= ALLOWED || *n == prepared.total()
    });
    let mut rows = affordable
        .collect::<Vec<_>>()
        .into_par_iter()
        .with_max_len(1)
        .map(|n| {
            work.check()?;
            row(prepared, n, work)
        })
        .collect::<Result<Vec<_>, Cancelled>>()?;
    rows.sort_by_key(|row| row.n);
    let mut growth = Growth::default();
    for row in rows {
        growth.n.push(row.n);
        growth.kolmogorov.push(row.distance);
        growth.berry_esseen.push(row.bound);
        growth.leading_term.push(row.leading);
    }
    Ok(growth)
}

/// One point of the curve.
struct Row {
    n: u64,
    distance: Option<f64>,
    bound: Option<f64>,
    leading: Option<f64>,
}

fn row(prepared: &Prepared, n: u64, work: &Work) -> Result<Row, Cancelled> {
    let empty = Row { n, distance: None, bound: None, leading: None };
    let Some(counts) = prepared.counts_at(n) else { return Ok(empty) };
    let spec = prepared.sum_spec(&counts);
    let bound = berry_esseen(&spec).map(|bound| bound.value);
    match build_exact(&spec, &Method::default(), work) {
        Ok(sum) => {
            let distance = Some(sum.kolmogorov().kolmogorov.value);
            Ok(Row { n, distance, bound, leading: leading_term(&spec, sum.lattice_span()) })
        }
        Err(SumError::Cancelled(cancelled)) => Err(cancelled),
        Err(_) => Ok(Row { n, distance: None, bound, leading: leading_term(&spec, None) }),
    }
}

/// An order in which any beginning covers the whole range: the planned n and the ends, then every eighth, every
/// fourth, every second, the rest.
fn spread_out(n: Vec<u64>, planned: u64) -> Vec<u64> {
    let last = n.len().saturating_sub(1);
    let rank = |index: usize, n: u64| match index {
        _ if n == planned || index == 0 || index == last => 0,
        index if index % 8 == 0 => 1,
        index if index % 4 == 0 => 2,
        index if index % 2 == 0 => 3,
        _ => 4,
    };
    let mut ranked = n.iter().enumerate().map(|(index, n)| (rank(index, *n), *n)).collect::<Vec<_>>();
    ranked.sort_by_key(|(rank, _)| *rank);
    ranked.into_iter().map(|(_, n)| n).collect()
}

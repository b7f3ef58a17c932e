//! The distance over n: computed, bounded and predicted, on a logarithmic grid.

use crate::bounds::{berry_esseen, leading_term};
use crate::exact::build_exact;
use crate::prepared::Prepared;
use crate::report::Growth;
use gaussgap_simulation::sum::SumError;
use gaussgap_simulation::work::{Cancelled, Work};
use rayon::prelude::*;

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
    // Large n first: they cost most.
    let rows = n
        .par_iter()
        .rev()
        .map(|n| {
            work.check()?;
            let Some(counts) = prepared.counts_at(*n) else { return Ok((None, None, None)) };
            let spec = prepared.sum_spec(&counts);
            let bound = berry_esseen(&spec).map(|bound| bound.value);
            match build_exact(&spec, 8.0, work) {
                Ok(sum) => {
                    let distance = sum.kolmogorov().kolmogorov.value;
                    Ok((Some(distance), bound, leading_term(&spec, sum.lattice_span())))
                }
                Err(SumError::Cancelled(cancelled)) => Err(cancelled),
                Err(_) => Ok((None, bound, leading_term(&spec, None))),
            }
        })
        .collect::<Result<Vec<_>, Cancelled>>()?;
    let mut growth = Growth { n, ..Growth::default() };
    for (distance, bound, leading) in rows.into_iter().rev() {
        growth.kolmogorov.push(distance);
        growth.berry_esseen.push(bound);
        growth.leading_term.push(leading);
    }
    Ok(growth)
}

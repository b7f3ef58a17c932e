//! The plain facts of a report: the summand, the sum, the distance, the tails, the curve.

use crate::bounds::{berry_esseen, leading_term};
use crate::prepared::Prepared;
use crate::report::{Curve, DistanceFacts, SumFacts, Summand, TailRow};
use gaussgap_simulation::law::Law;
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::{StandardizedSum, SumMoments, SumSpec};

/// At most this many atoms are listed in a report.
const MOST_ATOMS: usize = 200;

/// Points of the curve's even grid.
const GRID: usize = 601;

/// At most this many jumps are listed beside the grid.
const MOST_JUMPS: usize = 600;

/// Keeps only finite numbers: a report has no infinity.
fn finite(x: f64) -> Option<f64> {
    x.is_finite().then_some(x)
}

/// The facts of one summand law.
pub(crate) fn summand(law: &Law) -> Summand {
    let mut atoms = law.atoms.clone();
    if atoms.len() > MOST_ATOMS {
        atoms.sort_by(|a, b| b.mass.total_cmp(&a.mass));
        atoms.truncate(MOST_ATOMS);
        atoms.sort_by(|a, b| a.value.total_cmp(&b.value));
    }
    let moments = &law.moments;
    Summand {
        mean: moments.mean.and_then(finite),
        sd: moments.variance.map(f64::sqrt).and_then(finite),
        skewness: moments.skewness.and_then(finite),
        excess_kurtosis: moments.excess_kurtosis.and_then(finite),
        third_absolute_central_moment: moments.third_absolute_central.and_then(finite),
        support: [finite(law.support.0), finite(law.support.1)],
        lattice: law.lattice,
        atoms,
        warnings: law.warnings.clone(),
    }
}

/// The moments of the sum.
pub(crate) fn sum(moments: &SumMoments) -> SumFacts {
    SumFacts {
        mean: finite(moments.mean),
        sd: finite(moments.sd),
        skewness: moments.skewness.and_then(finite),
        excess_kurtosis: moments.excess_kurtosis.and_then(finite),
    }
}

/// The distance and what theory says of it.
pub(crate) fn distance(spec: &SumSpec, sum: &dyn StandardizedSum) -> DistanceFacts {
    let distance = sum.kolmogorov();
    DistanceFacts {
        kolmogorov: Some(distance.kolmogorov),
        at_z: finite(distance.at_z),
        side: Some(distance.side),
        leading_term: leading_term(spec, sum.lattice_span()),
        berry_esseen: berry_esseen(spec),
    }
}

/// The probabilities at the probe points; without a law of the sum only the normal ones.
pub(crate) fn tails(prepared: &Prepared, sum: Option<&dyn StandardizedSum>) -> Vec<TailRow> {
    let row = |z: f64| TailRow {
        z,
        at_or_below: sum.map(|sum| sum.at_or_below(z)),
        below: sum.map(|sum| sum.below(z)),
        above: sum.map(|sum| sum.above(z)),
        normal_at_or_below: normal::at_or_below(z),
        normal_above: normal::above(z),
    };
    prepared.scenario.probe_z.iter().map(|z| row(*z)).collect()
}

/// The law of the standardized sum over an even grid, with every jump where there are few.
pub(crate) fn curve(prepared: &Prepared, sum: &dyn StandardizedSum) -> Curve {
    let farthest = prepared.scenario.probe_z.iter().fold(4.0_f64, |farthest, z| farthest.max(z.abs()));
    let reach = (farthest + 0.5).min(8.0);
    let mut z =
        (0..GRID).map(|index| reach * (2.0 * index as f64 / (GRID - 1) as f64 - 1.0)).collect::<Vec<_>>();
    z.extend(sum.jumps(-reach, reach, MOST_JUMPS).unwrap_or_default());
    z.sort_by(f64::total_cmp);
    z.dedup();
    Curve {
        at_or_below: z.iter().map(|z| sum.at_or_below(*z).value).collect(),
        below: z.iter().map(|z| sum.below(*z).value).collect(),
        normal: z.iter().map(|z| normal::at_or_below(*z)).collect(),
        z,
    }
}

//! Which route a sum takes: the best exact one that certifies its error, simulation otherwise.

use super::closed_form::ClosedFormSum;
use super::contour::ContourSum;
use super::inversion::InversionSum;
use super::lattice::{LatticeSum, RoundedSum};
use super::{Method, Route, RouteChoice, StandardizedSum, SumError, SumSpec, Term};
use crate::monte_carlo::sums::SimulatedSum;
use crate::work::Work;

type Built = Result<Box<dyn StandardizedSum>, SumError>;

fn boxed<T: StandardizedSum + 'static>(built: Result<T, SumError>) -> Built {
    built.map(|sum| Box::new(sum) as Box<dyn StandardizedSum>)
}

/// Builds the distribution of the standardized sum by the route `method` asks for.
///
/// `Auto` takes the closed form, else the lattice transform, else inversion; where none of them can certify its
/// error it simulates, and the detail of the result says why the exact routes were refused.
pub fn build(spec: &SumSpec, method: &Method, work: &Work) -> Built {
    has_variance(spec)?;
    match method.route {
        RouteChoice::Auto => match build_exact(spec, method, work) {
            Err(SumError::NotAvailable { reason, .. }) => simulate(spec, method, &reason, work),
            decided => decided,
        },
        RouteChoice::ClosedForm => boxed(ClosedFormSum::build(spec, method, work)),
        RouteChoice::Lattice => boxed(LatticeSum::build(spec, method, work)),
        RouteChoice::Inversion => invert(spec, method, work),
        RouteChoice::Simulation => simulate(spec, method, "simulation was asked for", work),
    }
}

/// Builds the distribution by the best exact route; `NotAvailable` says why there is none.
pub fn build_exact(spec: &SumSpec, method: &Method, work: &Work) -> Built {
    has_variance(spec)?;
    if let Some(reason) = spec.terms.iter().find_map(|term| term.law.only_simulation.as_ref())
        && spec.terms.iter().all(|term| term.law.closed_form.is_none())
    {
        return Err(SumError::NotAvailable { route: Route::Inversion, reason: reason.clone() });
    }
    let routes: [fn(&SumSpec, &Method, &Work) -> Built; 4] = [
        |spec, method, work| boxed(ClosedFormSum::build(spec, method, work)),
        |spec, method, work| boxed(LatticeSum::build(spec, method, work)),
        |spec, _, work| boxed(RoundedSum::build(spec, work)),
        invert,
    ];
    let discrete = spec.terms.iter().all(|term| term.law.pieces.is_empty());
    let mut reasons = Vec::new();
    for (index, route) in routes.iter().enumerate() {
        match route(spec, method, work) {
            Err(SumError::NotAvailable { reason, .. }) => {
                // Why a density has no closed form and no lattice, and a discrete law no density, goes without saying.
                if index == 3 && !discrete || (index == 1 || index == 2) && discrete {
                    reasons.push(reason);
                }
            }
            decided => return decided,
        }
    }
    Err(SumError::NotAvailable { route: Route::Inversion, reason: reasons.join("; ") })
}

fn has_variance(spec: &SumSpec) -> Result<(), SumError> {
    let variance = |term: &Term| term.law.variance().filter(|variance| variance.is_finite());
    let varies = |term: &Term| {
        term.count > 0 && term.multiply != 0.0 && variance(term).is_some_and(|variance| variance > 0.0)
    };
    if spec.terms.iter().all(|term| variance(term).is_some()) && spec.terms.iter().any(varies) {
        Ok(())
    } else {
        Err(SumError::NoVariance)
    }
}

/// While no more than this many summands are expected to come from the continuous part, a deformed contour is
/// tried before the transform, which then decays slowly.
const FEW_SUMMANDS: f64 = 30.0;

/// How many summands are expected to come from the continuous parts of their laws.
fn continuous_summands(spec: &SumSpec) -> f64 {
    let share = |term: &Term| 1.0 - term.law.atoms.iter().map(|atom| atom.mass).sum::<f64>();
    spec.terms.iter().map(|term| term.count as f64 * share(term)).sum()
}

fn invert(spec: &SumSpec, method: &Method, work: &Work) -> Built {
    let few = continuous_summands(spec) <= FEW_SUMMANDS;
    let contour = || boxed(ContourSum::build(spec, method, work));
    if few && let decided @ (Ok(_) | Err(SumError::Cancelled(_) | SumError::NoVariance)) = contour() {
        return decided;
    }
    // The transform takes every law, so its reason is the one that tells something.
    match boxed(InversionSum::build(spec, method, work)) {
        Err(SumError::NotAvailable { route, reason }) if !few => match contour() {
            Err(SumError::NotAvailable { .. }) => Err(SumError::NotAvailable { route, reason }),
            decided => decided,
        },
        decided => decided,
    }
}

fn simulate(spec: &SumSpec, method: &Method, reason: &str, work: &Work) -> Built {
    boxed(SimulatedSum::build(spec, method, &PROBES, reason, work))
}

/// Where a simulation sharpens its tail probabilities.
const PROBES: [f64; 9] = [-4.0, -3.0, -2.0, -1.0, 0.0, 1.0, 2.0, 3.0, 4.0];

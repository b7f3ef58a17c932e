//! Building the law of a sum by an exact route only, for work over many n where simulation would not do.

use gaussgap_simulation::sum::{Method, RouteChoice, StandardizedSum, SumError, SumSpec, build};
use gaussgap_simulation::work::Work;

/// The law of the sum by the best exact route; `NotAvailable` where there is none.
pub(crate) fn build_exact(spec: &SumSpec, reach_z: f64, work: &Work) -> Result<Box<dyn StandardizedSum>, SumError> {
    let mut refused = SumError::NoVariance;
    for route in [RouteChoice::ClosedForm, RouteChoice::Lattice, RouteChoice::Inversion] {
        let method = Method { route, reach_z, ..Method::default() };
        match build(spec, &method, work) {
            Ok(sum) => return Ok(sum),
            Err(SumError::Cancelled(cancelled)) => return Err(SumError::Cancelled(cancelled)),
            Err(other) => refused = other,
        }
    }
    Err(refused)
}

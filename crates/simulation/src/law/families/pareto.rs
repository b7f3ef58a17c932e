//! The Pareto law: survival (x/minimum)^{−shape}, x ≥ minimum. It is minimum·(1 + Y) with Y a Lomax law.

use super::lomax::Lomax;
use crate::law::Piece;
use crate::law::checks::Checks;
use crate::law::form::Form;
use std::sync::Arc;

pub(super) fn compile(shape: f64, minimum: f64, checks: &mut Checks) -> Option<Form> {
    if !(checks.within("shape", shape, 1e-2, 1e12) & checks.positive("minimum", minimum)) {
        return None;
    }
    Some(Form::piece(Piece::whole(Arc::new(Lomax { shape }), 1.0, minimum, minimum)))
}

//! Prepared transforms of the laws used last, so that many numbers of summands share one preparation.

use super::transform::SummandTransform;
use crate::law::{Law, LawParts};
use std::collections::VecDeque;
use std::sync::{Arc, Mutex, PoisonError};

/// How many laws are remembered.
const REMEMBERED: usize = 16;

static PREPARED: Mutex<VecDeque<Arc<SummandTransform>>> = Mutex::new(VecDeque::new());

/// The transform of this very law (the same compiled object, not an equal one), prepared now or earlier.
///
/// An entry holds its law, so that the address by which it is recognised stays taken.
pub(super) fn prepared(law: &Law) -> Result<Arc<SummandTransform>, String> {
    let address: *const LawParts = &raw const **law;
    let find = |list: &mut VecDeque<Arc<SummandTransform>>| {
        let place = list.iter().position(|s| std::ptr::eq(&raw const *s.law, address))?;
        let found = list.remove(place)?;
        list.push_front(Arc::clone(&found));
        Some(found)
    };
    if let Some(found) = find(&mut PREPARED.lock().unwrap_or_else(PoisonError::into_inner)) {
        return Ok(found);
    }
    let made = Arc::new(SummandTransform::new(law)?);
    let mut list = PREPARED.lock().unwrap_or_else(PoisonError::into_inner);
    if let Some(found) = find(&mut list) {
        return Ok(found);
    }
    list.push_front(Arc::clone(&made));
    list.truncate(REMEMBERED);
    Ok(made)
}

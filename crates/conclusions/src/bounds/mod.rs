//! What theory guarantees about the distance, and what it predicts for large n.

mod berry_esseen;
mod exponential_moment;
mod leading_term;

pub(crate) use berry_esseen::{LARGEST_DISTANCE, berry_esseen, standardized_third, two_valued};
pub(crate) use exponential_moment::centred_cumulant;
pub(crate) use leading_term::leading_term;

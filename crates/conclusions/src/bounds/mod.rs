//! What theory guarantees about the distance, and what it predicts for large n.

mod berry_esseen;
mod expansions;
mod exponential_moment;
mod leading_term;

pub(crate) use berry_esseen::{berry_esseen, two_valued};
pub(crate) use expansions::{
    Shape, cornish_fisher, edgeworth, edgeworth_on_lattice, edgeworth_slope, saddlepoint_above,
};
pub(crate) use exponential_moment::centred_cumulant;
pub(crate) use leading_term::leading_term;

//! Drainage from elevation: conditioning, routing, accumulation, channels and basins.

pub mod accumulate;
pub mod basins;
mod breach;
pub mod cells;
pub mod condition;
mod count;
mod curvature;
pub mod d8;
pub mod d_infinity;
mod drop;
pub mod extract;
mod fill;
pub mod flats;
pub mod heads;
pub mod multiple;
mod outlets;
mod outline;
mod paths;
pub mod routing;
pub mod smoothness;
mod sources;
mod tree;
mod walk;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &fill::METHOD,
    &breach::METHOD,
    &flats::METHOD,
    &d8::METHOD,
    &d_infinity::METHOD,
    &multiple::FREEMAN,
    &multiple::QUINN,
    &accumulate::METHOD,
    &heads::METHOD,
    &curvature::METHOD,
    &drop::METHOD,
    &basins::METHOD,
    &smoothness::METHOD,
];

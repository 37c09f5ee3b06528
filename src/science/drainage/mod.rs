//! Drainage from elevation: conditioning, routing, accumulation, channels and basins.

pub mod accumulate;
pub mod basins;
mod breach;
pub mod cells;
pub mod condition;
pub mod d8;
pub mod d_infinity;
pub mod extract;
mod fill;
pub mod flats;
pub mod heads;
pub mod multiple;
pub mod routing;
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
];

//! Drainage from elevation: conditioning, routing, accumulation, channels and basins.

pub mod basins;
pub mod cells;
pub mod condition;
pub mod extract;
pub mod heads;
pub mod routing;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[];

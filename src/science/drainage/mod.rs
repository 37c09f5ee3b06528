//! Drainage from elevation: conditioning, routing, accumulation, channels and basins.

pub mod basins;
pub mod cells;
pub mod condition;
mod curvature;
mod drop;
pub mod extract;
pub mod heads;
mod outlets;
mod outline;
mod paths;
pub mod routing;
mod sources;
mod tree;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[&heads::METHOD, &curvature::METHOD, &drop::METHOD, &basins::METHOD];

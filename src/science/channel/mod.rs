//! Channels on images: response, proposal, widths, sense, and the pen.

mod bridge;
mod belief;
pub mod chance;
mod cost;
pub mod detect;
pub mod graph;
pub mod pen;
mod prune;
mod refine;
mod response;
pub mod sense;
pub mod width;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] =
    &[&response::METHOD, &detect::METHOD, &cost::METHOD, &pen::METHOD, &chance::METHOD];
pub const METHODS: &[&Method] = &[&cost::METHOD, &pen::METHOD, &chance::METHOD, &sense::METHOD];

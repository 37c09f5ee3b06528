//! Channels on images: response, proposal, widths, sense, and the pen.

mod belief;
mod bridge;
pub mod chance;
mod cost;
pub mod detect;
mod evidence;
mod filter;
pub mod graph;
pub mod pen;
mod profile;
mod prune;
mod refine;
mod response;
pub mod sense;
pub mod width;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &response::METHOD,
    &detect::METHOD,
    &width::METHOD,
    &cost::METHOD,
    &pen::METHOD,
    &chance::METHOD,
    &sense::METHOD,
];

//! Measures of a channel network, whichever source it has: hierarchy, lengths and areas, profiles, junction
//! angles, pattern, planform, and what discharge its size allows.

mod ascent;
mod branch;
mod chi;
pub mod compare;
mod course;
pub mod density;
pub mod flow;
pub mod hierarchy;
pub mod hypsometry;
pub mod junctions;
mod kinds;
mod knickpoints;
mod line;
pub mod meanders;
mod path;
pub mod pattern;
pub mod planform;
pub mod profile;
pub mod scaling;
mod sources;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &hierarchy::METHOD,
    &hierarchy::TOKUNAGA,
    &density::METHOD,
    &scaling::HACK,
    &scaling::FLINT,
    &chi::METHOD,
    &profile::METHOD,
    &knickpoints::METHOD,
    &hypsometry::METHOD,
    &junctions::METHOD,
    &pattern::METHOD,
    &compare::METHOD,
    &planform::METHOD,
    &meanders::METHOD,
    &flow::METHOD,
];

//! Measures of a channel network, whichever source it has: hierarchy, lengths and areas, profiles, junction
//! angles, pattern, planform, and what discharge its size allows.

pub mod compare;
mod course;
pub mod density;
pub mod flow;
pub mod hierarchy;
pub mod hypsometry;
pub mod junctions;
pub mod meanders;
pub mod pattern;
pub mod planform;
pub mod profile;
pub mod scaling;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[&planform::METHOD, &meanders::METHOD, &flow::METHOD];

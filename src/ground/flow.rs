//! Sand moving one way: the meeting point of wind records and alignment theories.

use serde::{Deserialize, Serialize};

use super::Azimuth;

/// A share of the sand transport. `toward` is where the sand goes, `weight` ≥ 0 in any one unit
/// (drift potential or kg m⁻¹ s⁻¹), the same for all members of a list.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct SandFlow {
    pub toward: Azimuth,
    pub weight: f64,
}

/// The sand flow of a whole record, and of the parts of it that some theories single out.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Regime {
    pub all: Vec<SandFlow>,
    /// Of the strongest sand-moving winds only.
    pub storms: Vec<SandFlow>,
    /// Of the season that moves most sand; empty for a record without a clock.
    pub season: Vec<SandFlow>,
}

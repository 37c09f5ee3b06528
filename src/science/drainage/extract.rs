//! Channels from routed elevation as a network.

use crate::ground::Network;

use super::heads::{DropRow, HeadRule};

/// Channels at the threshold used, and at half and twice of it.
#[derive(Clone, Debug, PartialEq)]
pub struct Channels {
    pub rule: HeadRule,
    pub threshold_m2: f64,
    /// Whether the threshold is the test's proposal (else stated).
    pub is_proposed: bool,
    /// Proposed by the constant-drop test; `None` when no threshold passes.
    pub proposed_m2: Option<f64>,
    pub drops: Vec<DropRow>,
    pub network: Network,
    pub half: Network,
    pub twice: Network,
}

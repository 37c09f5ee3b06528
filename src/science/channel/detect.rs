//! Where the image shows channels: multi-scale response above the noise floor.

use serde::{Deserialize, Serialize};

/// How channels stand out.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum ChannelTone {
    /// Darker than their banks (smooth liquid or bed under radar).
    #[default]
    Dark,
    /// Brighter than their banks.
    Bright,
    /// A pair of edges of opposite sense, whatever lies between.
    EdgePair,
}

/// What to look for. Lengths in image pixels.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DetectSettings {
    pub tone: ChannelTone,
    pub narrowest_px: f64,
    pub widest_px: f64,
    /// Chance that a place of pure noise passes.
    pub significance: f64,
    /// Gaps up to so many widths are bridged.
    pub gap_widths: f64,
    /// Branches shorter than so many half-widths are pruned.
    pub spur_half_widths: f64,
    /// Lone pieces shorter than so many widths are dropped.
    pub least_length_widths: f64,
}

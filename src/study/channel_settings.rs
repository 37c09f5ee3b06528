//! What the user may turn about channels: drainage, channels on images, measures, and palaeo-flow.

use serde::{Deserialize, Serialize};

use crate::science::channel::detect::ChannelTone;
use crate::science::drainage::condition::Conditioning;
use crate::science::drainage::heads::HeadRule;
use crate::science::drainage::routing::Router;

/// Drainage from elevation.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct DrainageSettings {
    pub conditioning: Conditioning,
    /// Deepest trench, m.
    pub breach_depth_m: f64,
    /// Longest trench, cells.
    pub breach_cells: u32,
    /// How contributing area is shared. The network itself always follows D8.
    pub router: Router,
    pub heads: HeadRule,
    /// `None` = proposed by the constant-drop test.
    pub threshold_m2: Option<f64>,
    /// Standard deviation of the smoothing before curvature, cells.
    pub curvature_scale_cells: f64,
    /// A picked outlet is moved to the greatest area within so many cells.
    pub snap_cells: u32,
}

/// Channels on images.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct ChannelSettings {
    pub tone: ChannelTone,
    pub narrowest_px: f64,
    pub widest_px: f64,
    /// Chance that a place of pure noise passes.
    pub significance: f64,
    pub gap_widths: f64,
    pub spur_half_widths: f64,
    pub least_length_widths: f64,
}

/// Measures of networks and channels.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct NetworkSettings {
    /// Chord of junction angles, in the unit of the raster; `None` = by width, or by cells.
    pub chord: Option<f64>,
    /// Chord in channel widths, where widths are known.
    pub chord_widths: f64,
    /// Chord in cells otherwise.
    pub chord_cells: f64,
    /// Concavity of χ; `None` = least scatter.
    pub theta: Option<f64>,
    /// Reference concavity of the steepness index.
    pub theta_reference: f64,
    /// Fall over which a slope is measured, m; `None` = by the roughness of the raster.
    pub slope_drop_m: Option<f64>,
    /// Smoothing length of the valley line, channel widths (cells where no width is known).
    pub valley_widths: f64,
    /// Greatest distance at which two networks show the same channel, pixels of the coarser.
    pub same_channel_px: f64,
}

/// Palaeo-flow. Each unknown lies between `least_…` and `greatest_…`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct FlowSettings {
    pub liquid_density: f64,
    pub grain_density: f64,
    pub least_width_to_depth: f64,
    pub greatest_width_to_depth: f64,
    /// `None` = from the elevation of the network.
    pub least_slope: Option<f64>,
    pub greatest_slope: Option<f64>,
    pub least_friction: f64,
    pub greatest_friction: f64,
    pub least_shields: f64,
    pub greatest_shields: f64,
    pub least_manning: f64,
    pub greatest_manning: f64,
}

impl Default for DrainageSettings {
    fn default() -> Self {
        Self {
            conditioning: Conditioning::default(),
            breach_depth_m: 20.0,
            breach_cells: 50,
            router: Router::default(),
            heads: HeadRule::default(),
            threshold_m2: None,
            curvature_scale_cells: 1.0,
            snap_cells: 5,
        }
    }
}

impl Default for ChannelSettings {
    fn default() -> Self {
        Self {
            tone: ChannelTone::default(),
            narrowest_px: 2.0,
            widest_px: 40.0,
            significance: 0.001,
            gap_widths: 6.0,
            spur_half_widths: 3.0,
            least_length_widths: 8.0,
        }
    }
}

impl Default for NetworkSettings {
    fn default() -> Self {
        Self {
            chord: None,
            chord_widths: 8.0,
            chord_cells: 10.0,
            theta: None,
            theta_reference: 0.45,
            slope_drop_m: None,
            valley_widths: 30.0,
            same_channel_px: 3.0,
        }
    }
}

impl Default for FlowSettings {
    fn default() -> Self {
        Self {
            liquid_density: 1000.0,
            grain_density: 2650.0,
            least_width_to_depth: 10.0,
            greatest_width_to_depth: 40.0,
            least_slope: None,
            greatest_slope: None,
            least_friction: 0.03,
            greatest_friction: 0.12,
            least_shields: 0.03,
            greatest_shields: 0.06,
            least_manning: 0.025,
            greatest_manning: 0.05,
        }
    }
}

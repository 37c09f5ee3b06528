//! What the user may turn, as one plain struct; `records` describes each field once.

use serde::{Deserialize, Serialize};

/// All settings of a sheet.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Settings {
    pub trend: TrendSettings,
    pub spectrum: SpectrumSettings,
    pub statistics: StatisticsSettings,
    pub wind: WindSettings,
    pub verdict: VerdictSettings,
    pub obstacle: ObstacleSettings,
}

/// Structure-tensor trend. Scales in pixels of the finer ground direction; `None` = from the data.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct TrendSettings {
    pub gradient_scale_px: Option<f64>,
    pub integration_scale_px: Option<f64>,
    pub node_step_px: Option<f64>,
    /// Level below which a node's coherence is put down to noise.
    pub significance: f64,
}

/// Windowed spectrum. `None` = from the patch.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct SpectrumSettings {
    pub window_px: Option<f64>,
    pub shortest_spacing_px: f64,
    pub longest_spacing_px: Option<f64>,
    pub significance: f64,
}

/// Axial statistics.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct StatisticsSettings {
    /// Level of the test for a preferred trend.
    pub significance: f64,
    pub resamples: u32,
    pub most_modes: u32,
    pub rose_bin_deg: f64,
}

/// Sand transport by wind.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct WindSettings {
    pub grain_m: f64,
    pub grain_density: f64,
    pub threshold_law: ThresholdLaw,
    pub transport_law: TransportLaw,
    /// Speeds above this are set aside as impossible, m s⁻¹.
    pub greatest_speed: f64,
    /// Length of the blocks drawn together in the bootstrap, days.
    pub block_days: f64,
    pub resamples: u32,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum ThresholdLaw {
    Bagnold,
    IversenWhite,
    ShaoLu,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum TransportLaw {
    /// Drift potential V²(V − Vt) in knots at 10 m: Earth practice, not a flux.
    DriftPotential,
    Bagnold,
    Kawamura,
    White,
    Lettau,
    Kok,
}

/// The weighing of theories.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct VerdictSettings {
    /// Axial standard deviation by which a right theory may still miss, degrees.
    pub model_error_deg: f64,
    /// Share of each prediction spread over all axes.
    pub tail_share: f64,
    /// Prior weights: transverse to resultant, along resultant, gross bedform-normal, random.
    pub priors: [f64; 4],
    /// Margin within which two axes count as the same, degrees.
    pub margin_deg: f64,
    /// Alignment strength below which a predicted trend means nothing.
    pub least_strength: f64,
}

/// The obstacle test.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct ObstacleSettings {
    /// Inner and outer edge of the annulus looked at, in radii of the outcrop.
    pub inner_radii: f64,
    pub outer_radii: f64,
    /// Share by which an outcrop's radius may be wrong.
    pub radius_doubt: f64,
    /// Virtual outcrops behind a p; 0 for none.
    pub virtual_count: u32,
    /// Amplitude of the turn below which nothing is decided.
    pub least_amplitude: f64,
    pub ground: ObstacleGround,
}

/// Whether virtual outcrops may be turned.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum ObstacleGround {
    /// The texture has a grain: outlines are only moved.
    Grained,
    /// The user holds the field to be alike all over and in all directions.
    Homogeneous,
}

impl Default for TrendSettings {
    fn default() -> Self {
        Self { gradient_scale_px: None, integration_scale_px: None, node_step_px: None, significance: 0.01 }
    }
}

impl Default for SpectrumSettings {
    fn default() -> Self {
        Self { window_px: None, shortest_spacing_px: 4.0, longest_spacing_px: None, significance: 0.05 }
    }
}

impl Default for StatisticsSettings {
    fn default() -> Self {
        Self { significance: 0.05, resamples: 2000, most_modes: 4, rose_bin_deg: 10.0 }
    }
}

impl Default for WindSettings {
    fn default() -> Self {
        Self {
            grain_m: 250e-6,
            grain_density: 2650.0,
            threshold_law: ThresholdLaw::ShaoLu,
            transport_law: TransportLaw::Kok,
            greatest_speed: 75.0,
            block_days: 7.0,
            resamples: 1000,
        }
    }
}

impl Default for VerdictSettings {
    fn default() -> Self {
        Self {
            model_error_deg: 5.0,
            tail_share: 0.05,
            priors: [1.0; 4],
            margin_deg: 15.0,
            least_strength: 0.1,
        }
    }
}

impl Default for ObstacleSettings {
    fn default() -> Self {
        Self {
            inner_radii: 1.0,
            outer_radii: 3.0,
            radius_doubt: 0.3,
            virtual_count: 999,
            least_amplitude: 0.3,
            ground: ObstacleGround::Grained,
        }
    }
}

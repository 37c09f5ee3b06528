//! What the user may turn, as one plain struct; `records` describes each field once.

use serde::{Deserialize, Serialize};

use crate::science::alignment::Theory;
use crate::science::alignment::bed_instability::FLUX_UP;
use crate::science::wind::threshold::COHESION;

use super::channel_settings::{ChannelSettings, DrainageSettings, FlowSettings, NetworkSettings};
use super::pattern_settings::{CompareSettings, CrestSettings, RecoverySettings};

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
    pub backwards: BackwardsSettings,
    pub drainage: DrainageSettings,
    pub channel: ChannelSettings,
    pub network: NetworkSettings,
    pub flow: FlowSettings,
    pub crest: CrestSettings,
    pub recovery: RecoverySettings,
    pub compare: CompareSettings,
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
    /// Cohesion γ of Shao and Lu, kg s⁻².
    pub cohesion_kg_s2: f64,
    /// Grain diameter, grain density and cohesion are known to within these factors, each ≥ 1: the truth
    /// is taken to lie between value/factor and value × factor.
    pub grain_doubt: f64,
    pub grain_density_doubt: f64,
    pub cohesion_doubt: f64,
    pub lettau_constant: LettauConstant,
    /// The roughness at the mast is known to within this factor.
    pub roughness_doubt: f64,
    /// Share of the time with moving sand below which a wind is no storm.
    pub storm_quantile: f64,
    /// Threshold friction velocity known by other means, m s⁻¹; replaces the law's.
    pub threshold_ustar: Option<f64>,
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

/// Sources print two constants for Lettau's law.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum LettauConstant {
    #[serde(rename = "6.7")]
    High,
    #[serde(rename = "4.2")]
    Low,
}

/// The weighing of theories.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct VerdictSettings {
    /// Axial standard deviation by which a right theory may still miss, degrees.
    pub model_error_deg: f64,
    /// Share of each prediction spread over all axes.
    pub tail_share: f64,
    pub priors: Priors,
    /// Margin within which two axes count as the same, degrees.
    pub margin_deg: f64,
    /// Alignment strength below which a predicted trend means nothing.
    pub least_strength: f64,
    /// Flux-up ratio Γ: gain of the sand flux over a crest.
    pub flux_up: f64,
    /// Γ is known to within this factor.
    pub flux_up_doubt: f64,
}

/// What is believed of each theory before the ground is looked at: weights, only their ratios count.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Priors {
    pub transverse: f64,
    pub along: f64,
    pub gross_normal: f64,
    pub bed_instability: f64,
    pub fingering: f64,
    pub storms_across: f64,
    pub storms_along: f64,
    pub season: f64,
    pub stated: f64,
    pub random: f64,
}

impl Priors {
    /// In the order of [`Theory::ALL`], then the random axis.
    pub fn weights(&self) -> Vec<f64> {
        let of = |theory: &Theory| match theory {
            Theory::Transverse => self.transverse,
            Theory::Along => self.along,
            Theory::GrossNormal => self.gross_normal,
            Theory::BedInstability => self.bed_instability,
            Theory::Fingering => self.fingering,
            Theory::StormsAcross => self.storms_across,
            Theory::StormsAlong => self.storms_along,
            Theory::Season => self.season,
            Theory::Stated => self.stated,
        };
        Theory::ALL.iter().map(of).chain([self.random]).collect()
    }
}

/// The rules for all winds count alike; those for part of the winds, which need a reason, half; chance
/// as much as one rule.
impl Default for Priors {
    fn default() -> Self {
        Self {
            transverse: 1.0,
            along: 1.0,
            gross_normal: 1.0,
            bed_instability: 1.0,
            fingering: 1.0,
            storms_across: 0.5,
            storms_along: 0.5,
            season: 0.5,
            stated: 1.0,
            random: 1.0,
        }
    }
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
            cohesion_kg_s2: COHESION,
            grain_doubt: 1.3,
            grain_density_doubt: 1.05,
            cohesion_doubt: 1.7,
            lettau_constant: LettauConstant::High,
            roughness_doubt: 3.0,
            storm_quantile: 0.9,
            threshold_ustar: None,
        }
    }
}

impl Default for VerdictSettings {
    fn default() -> Self {
        Self {
            model_error_deg: 5.0,
            tail_share: 0.05,
            priors: Priors::default(),
            margin_deg: 15.0,
            least_strength: 0.1,
            flux_up: FLUX_UP,
            flux_up_doubt: 1.25,
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

/// Two-wind regimes sought from trends alone.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct BackwardsSettings {
    /// Flux-up ratios held equally likely.
    pub least_flux_up: f64,
    pub flux_up: f64,
    pub greatest_flux_up: f64,
    /// Where the dominant sand-moving wind blows FROM, when something is known of it; `None` = any.
    pub wind_from_deg: Option<f64>,
    /// Standard deviation of that azimuth, degrees.
    pub wind_sd_deg: f64,
}

impl Default for BackwardsSettings {
    fn default() -> Self {
        Self {
            least_flux_up: 0.0,
            flux_up: FLUX_UP,
            greatest_flux_up: 2.0,
            wind_from_deg: None,
            wind_sd_deg: 30.0,
        }
    }
}

//! What the user says about a mast and its sand, and how that can be wrong.

use crate::ground::{Air, Stopped};

use super::law::Law;
use super::threshold::{COHESION, Threshold};

/// Where the mast stands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Site {
    /// Height of the anemometer above ground, m.
    pub height_m: f64,
    /// Aerodynamic roughness of the ground, m.
    pub roughness_m: f64,
    /// Near-surface air; needed by the physical laws.
    pub air: Option<Air>,
    /// m s⁻²; needed by the physical laws.
    pub gravity: Option<f64>,
    /// Whether the Earth practice of drift potential applies.
    pub is_earth: bool,
}

/// How winds are turned into sand.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WindSettings {
    /// Grain diameter, m.
    pub grain_m: f64,
    /// kg m⁻³.
    pub grain_density: f64,
    /// Cohesion γ of the grains, kg s⁻².
    pub cohesion: f64,
    pub threshold: Threshold,
    /// Threshold friction velocity known by other means, m s⁻¹; replaces the model's.
    pub threshold_ustar: Option<f64>,
    pub transport: Transport,
    /// Speeds above this are set aside as impossible, m s⁻¹.
    pub greatest_speed: f64,
    /// Length of a bootstrap block, days.
    pub block_days: f64,
    pub resamples: u32,
    pub doubt: Doubt,
    /// Share of the time with moving sand below which a wind is no storm, in (0, 1).
    pub storm_quantile: f64,
}

/// Quartz sand of 0.25 mm by Shao and Lu's threshold and Kok's law, drawn a thousand times in blocks of a
/// week.
impl Default for WindSettings {
    fn default() -> Self {
        Self {
            grain_m: 250e-6,
            grain_density: 2650.0,
            cohesion: COHESION,
            threshold: Threshold::ShaoLu,
            threshold_ustar: None,
            transport: Transport::Physical(Law::Kok),
            greatest_speed: 75.0,
            block_days: 7.0,
            resamples: 1000,
            doubt: Doubt { grain: 1.3, grain_density: 1.05, cohesion: 1.7, roughness: 3.0 },
            storm_quantile: 0.9,
        }
    }
}

/// Factors, each ≥ 1, within which parts of the mill are known: the draws take each evenly in the
/// logarithm between value/factor and value·factor.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Doubt {
    pub grain: f64,
    pub grain_density: f64,
    pub cohesion: f64,
    pub roughness: f64,
}

/// One way the uncertain parts of the mill may be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Assumption {
    pub transport: Transport,
    pub threshold: Threshold,
    /// Friction velocity that replaces the model's, m s⁻¹.
    pub threshold_ustar: Option<f64>,
    /// On the threshold: 1 for the fluid threshold of the model, less for that of impact.
    pub threshold_factor: f64,
    /// m.
    pub grain_m: f64,
    /// kg m⁻³.
    pub grain_density: f64,
    /// kg s⁻².
    pub cohesion: f64,
    /// m.
    pub roughness_m: f64,
}

/// Drift potential or a physical law.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Transport {
    DriftPotential,
    Physical(Law),
}

/// Why there is no assessment.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum WindError {
    #[error(
        "the body has no air: no wind moves sand there; give its air's density and viscosity, or another body"
    )]
    NoAir,
    #[error("the body's gravity is not known; give it in m/s², or choose drift potential")]
    NoGravity,
    #[error(
        "the anemometer stands at {height_m} m over a roughness of {roughness_m} m; the height must be the greater"
    )]
    Height { height_m: f64, roughness_m: f64 },
    #[error("{what} is {value}; it must be above zero")]
    NotPositive { what: &'static str, value: f64 },
    #[error("no row of the record can be used: {reasons}")]
    NothingLeft { reasons: String },
    #[error(transparent)]
    Stopped(#[from] Stopped),
}

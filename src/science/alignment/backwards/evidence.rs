//! What was seen on the ground: trends, the sand under them, and which way they point.

use serde::{Deserialize, Serialize};

use crate::ground::{Axis, Azimuth};

/// How much sand lies between the bedforms, which decides the rule that sets their trend.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Cover {
    /// Either rule, one as likely as the other.
    #[default]
    Unknown,
    /// Sand everywhere: bed instability, or gross bedform-normal transport without flux-up.
    Full,
    /// Bare ground between: fingers extend.
    Starved,
}

impl Cover {
    pub const ALL: [Self; 3] = [Self::Unknown, Self::Full, Self::Starved];

    /// Nothing was said of it.
    pub fn is_unknown(&self) -> bool {
        *self == Self::Unknown
    }

    pub fn label(self) -> &'static str {
        match self {
            Self::Unknown => "cover unknown",
            Self::Full => "full sand cover",
            Self::Starved => "starved ground",
        }
    }
}

/// What a sense was read from.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum SenseKind {
    /// Crests join downwind: forks open upwind.
    #[default]
    Forks,
    /// Dunes thin out the way they extend.
    Tapering,
    /// Sand is piled before obstacles and missing behind them: the sense of the net drift.
    Obstacles,
    Other,
}

impl SenseKind {
    pub const ALL: [Self; 4] = [Self::Forks, Self::Tapering, Self::Obstacles, Self::Other];

    pub fn label(self) -> &'static str {
        match self {
            Self::Forks => "forks",
            Self::Tapering => "tapering",
            Self::Obstacles => "obstacles",
            Self::Other => "other signs",
        }
    }
}

/// Which way the sand goes, as the user reads it from the ground.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Sense {
    pub toward: Azimuth,
    #[serde(default)]
    pub evidence: SenseKind,
    /// Chance that it is right, in [0.5, 1]: 0.5 says nothing.
    #[serde(default = "likely")]
    pub chance_right: f64,
    /// Forks that speak for this sense, and against it, when they were counted.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub forks: Option<[u32; 2]>,
}

fn likely() -> f64 {
    Sense::LIKELY
}

impl Sense {
    /// A chance for signs that are a clue but no proof.
    pub const LIKELY: f64 = 0.8;
}

/// One population of bedforms.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Observed {
    pub axis: Axis,
    /// Concentration of the mean axis, doubled angle: n_eff κ A(κ), no more than its interval allows.
    pub kappa: f64,
    pub cover: Cover,
    pub sense: Option<Sense>,
}

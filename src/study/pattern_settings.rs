//! What the user may turn about crests, injection and recovery, and two pictures of one ground.

use serde::{Deserialize, Serialize};

use crate::science::crest::CrestModel;

/// Tracing of crests.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct CrestSettings {
    /// `None` = what fits each patch best, "fitting" in files.
    #[serde(with = "fitting")]
    pub model: Option<CrestModel>,
    /// Scale of the derivatives, pixels of the measured image; `None` = from the spacing, else a sweep.
    pub scale_px: Option<f64>,
    /// Chance that noise alone starts one line anywhere in the patch.
    pub significance: f64,
    /// Longest gap bridged, in scales.
    pub bridge_scales: f64,
    /// Shortest line kept, in scales.
    pub least_length_scales: f64,
    /// Greatest distance between a line and its simplified form, pixels.
    pub tolerance_px: f64,
}

/// Injection and recovery.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct RecoverySettings {
    /// Trends laid in, evenly over 180°; 0 leaves the whole test out.
    pub trends: u32,
    /// Fields laid in at each trend.
    pub repeats: u32,
    /// Side of the ground taken out of the patch, pixels.
    pub window_px: u32,
    /// Crest to crest in the patch's unit; `None` = the patch's own, else eight pixels.
    pub spacing: Option<f64>,
    /// Height over spacing of the bedforms laid in.
    pub steepness: f64,
    /// Tone (ln of intensity for radar) a slope of one toward the light adds; `None` = so that bedforms of that
    /// steepness show as strongly as the patch's own, where it has a trend.
    pub tone_per_slope: Option<f64>,
    /// Defects: free ends times spacing over crest length.
    pub defects: f64,
    /// Standard deviation of the crests' trends, degrees; `None` = as wide as makes them look like the patch's
    /// own, else ten.
    pub spread_deg: Option<f64>,
    /// A trend found within so many degrees of the one laid in is found.
    pub tolerance_deg: f64,
}

/// Two pictures of one ground.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct CompareSettings {
    /// Level of the tests.
    pub significance: f64,
    /// Farthest a crest is sought from where it was, in spacings.
    pub reach_spacings: f64,
    /// Random rearrangements of the tests.
    pub permutations: u32,
}

impl Default for CrestSettings {
    fn default() -> Self {
        Self {
            model: None,
            scale_px: None,
            significance: 0.05,
            bridge_scales: 5.0,
            least_length_scales: 8.0,
            tolerance_px: 0.5,
        }
    }
}

impl Default for RecoverySettings {
    fn default() -> Self {
        Self {
            trends: 18,
            repeats: 8,
            window_px: 256,
            spacing: None,
            steepness: 0.05,
            tone_per_slope: None,
            defects: 0.1,
            spread_deg: None,
            tolerance_deg: 15.0,
        }
    }
}

impl Default for CompareSettings {
    fn default() -> Self {
        Self { significance: 0.05, reach_spacings: 0.5, permutations: 999 }
    }
}

/// A model by its key; "fitting" where none is asked for.
mod fitting {
    use serde::{Deserialize, Deserializer, Serialize, Serializer};

    use crate::science::crest::CrestModel;

    #[derive(Serialize, Deserialize)]
    #[serde(rename_all = "kebab-case")]
    enum Word {
        Fitting,
        #[serde(untagged)]
        Model(CrestModel),
    }

    pub fn serialize<S: Serializer>(model: &Option<CrestModel>, to: S) -> Result<S::Ok, S::Error> {
        model.map_or(Word::Fitting, Word::Model).serialize(to)
    }

    pub fn deserialize<'de, D: Deserializer<'de>>(from: D) -> Result<Option<CrestModel>, D::Error> {
        Ok(match Word::deserialize(from)? {
            Word::Fitting => None,
            Word::Model(model) => Some(model),
        })
    }
}

//! Findings about the pattern of a patch: trend by scale, populations, light, injection and recovery, and two
//! pictures of one ground.

use crate::ground::{Axis, Azimuth, Caution, LengthUnit};
use crate::science::axial::two_samples::AxesCompared;
use crate::science::crest::{CrestLine, Shift};

use super::{CrestsFinding, Id, TrendFinding, VerdictFinding};

/// What a patch shows beyond one trend.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PatternFinding {
    /// Trend and coherence by scale, the finest first.
    pub scales: Vec<ScaleFinding>,
    /// Stretches of scales over which the trend stands still; two of them speak for superposed bedforms.
    pub plateaus: Vec<PlateauFinding>,
    /// Its populations, the heaviest first; empty where one trend tells all, or none does.
    pub populations: Vec<PopulationFinding>,
    /// What the light may have done; `None` while nobody said where it comes from.
    pub light: Option<LightFinding>,
}

/// The texture at one scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ScaleFinding {
    /// Gradient scale, full-resolution pixels of the finer direction.
    pub scale_px: f64,
    /// The spacing a texture of that scale has, in the patch's unit (6 scales).
    pub spacing: f64,
    /// ⟨C²⟩ beyond noise.
    pub coherence: f64,
    /// Share of nodes above the noise.
    pub share: f64,
    /// Mean axis of those nodes.
    pub axis: Option<Axis>,
    /// Their doubled resultant length.
    pub resultant_length: f64,
}

/// Scales over which the trend stands still.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PlateauFinding {
    /// First and last index into `scales`.
    pub scales: [usize; 2],
    pub axis: Axis,
    pub resultant_length: f64,
    /// The most coherent of its scales, full-resolution pixels.
    pub scale_px: f64,
}

/// Where a population comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PopulationSource {
    /// A component of the mixture of node axes: side by side, or crossing at one scale.
    Mixture,
    /// A plateau of the scale sweep: superposed.
    Scale,
}

/// One population of bedforms, measured and judged by itself.
#[derive(Clone, Debug, PartialEq)]
pub struct PopulationFinding {
    /// The user's name for it, or its trend in words.
    pub name: String,
    pub source: PopulationSource,
    /// Share of the ground (mixture: of the nodes; scale: of the relief's texture).
    pub weight: f64,
    /// Its trend with all numbers, as a patch has.
    pub trend: TrendFinding,
    /// Its spacing in the patch's unit with its interval, where the spectrum has a peak of its trend.
    pub spacing: Option<f64>,
    pub spacing_ci95: Option<[f64; 2]>,
    /// Its crests, traced at its scale and kept within its trend; in words why there are none.
    pub crests: Result<CrestsFinding, String>,
    pub verdicts: Vec<VerdictFinding>,
    pub cautions: Vec<Caution>,
}

/// A trend held against the light.
#[derive(Clone, Debug, PartialEq)]
pub struct LightFinding {
    /// Where the light or the radar look comes from.
    pub from: Azimuth,
    /// Angle between the mean trend and light + 90°, degrees; `None` without a trend.
    pub from_bias_deg: Option<f64>,
    /// R̄ that light alone gives a field without preference: weighted by contrast, and by gradient energy.
    pub by_light: [f64; 2],
    /// Whether the trend could be the light's work.
    pub suspect: bool,
    /// The trend with nodes weighted by 1/max(|sin(trend − light)|, 0.3).
    pub refit: Option<RefitFinding>,
    /// Share of nodes within 20° of the light, and of a field without preference there.
    pub near_light: [f64; 2],
}

/// A trend refitted against the light.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RefitFinding {
    pub axis: Axis,
    pub resultant_length: f64,
    /// Degrees from the trend as measured.
    pub turn_deg: f64,
}

/// Synthetic bedforms laid into the texture of a patch and sought again.
#[derive(Clone, Debug, PartialEq)]
pub struct RecoveryFinding {
    pub patch: Id,
    pub name: String,
    pub fingerprint: String,
    pub unit: LengthUnit,
    /// Where the light comes from; `None`: no look was stated, bedforms show alike whatever their trend.
    pub light_from: Option<Azimuth>,
    /// Of the bedforms laid in: crest to crest and height in the unit, tone a slope of one adds, and defects.
    pub spacing: f64,
    pub height: f64,
    pub tone_per_slope: f64,
    pub defects: f64,
    /// Standard deviation of their crests' trends, degrees.
    pub spread_deg: f64,
    /// Side of the ground they were laid in, full-resolution pixels.
    pub window_px: usize,
    /// By the trend laid in, from north.
    pub trends: Vec<RecoveredTrend>,
    /// Doubled resultant length a field of all trends alike would show here, and the axis it would point along.
    pub uniform_resultant: f64,
    /// The same with nodes weighted by contrast and by gradient energy: ⅓ and ½ on clean ground under one light.
    pub uniform_weighted: [f64; 2],
    pub uniform_axis: Option<Axis>,
    /// Trends that would have been missed (found less than half the time): from, to in degrees, clockwise;
    /// `to` may pass 180.
    pub missed: Vec<[f64; 2]>,
    /// The patch's own trend with the bias taken out; `None` without a trend.
    pub corrected: Option<RefitFinding>,
    /// "Trends between 70° and 100° would have been missed here."
    pub sentence: String,
    pub cautions: Vec<Caution>,
}

/// One trend laid in.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RecoveredTrend {
    pub trend: Axis,
    pub tries: u32,
    /// Tries in which a trend was claimed within the tolerance.
    pub found: u32,
    /// Wilson's 95 % interval of the probability.
    pub probability_ci95: [f64; 2],
    /// Mean of (found − laid in), degrees, over all tries with a trend; positive clockwise.
    pub bias_deg: Option<f64>,
    /// Standard deviation of the same.
    pub spread_deg: Option<f64>,
    /// Share of nodes above the noise, and their doubled resultant length, means over the tries.
    pub share: f64,
    pub resultant_length: f64,
}

/// Two looks, and a difference of trends between them.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LooksFinding {
    /// Angle between the axes of the two looks, degrees.
    pub apart_deg: f64,
    /// Second trend less the first with the weight of each look taken out of its nodes, degrees.
    pub refit_deg: Option<f64>,
    /// Whether the looks alone can make such a difference: more than 30° apart, and the trends turned the same way
    /// and no farther.
    pub may_explain: bool,
}

/// One ground on two pictures.
#[derive(Clone, Debug, PartialEq)]
pub struct ComparisonFinding {
    pub id: Id,
    pub name: String,
    pub fingerprint: String,
    pub patch: Id,
    pub patch_name: String,
    /// The rasters.
    pub rasters: [Id; 2],
    pub raster_names: [String; 2],
    pub unit: LengthUnit,
    /// Share of the patch that both show.
    pub overlap: f64,
    pub light_from: [Option<Azimuth>; 2],
    pub years: Option<f64>,
    pub trends: [TrendFinding; 2],
    /// The second trend against the first.
    pub axes: AxesCompared,
    /// What the two looks may have to do with a difference; `None` while one is not known.
    pub looks: Option<LooksFinding>,
    /// Crests of each, in full-resolution pixels of the first raster.
    pub crests: [Vec<CrestLine>; 2],
    /// How far crests moved; in words why that is not known.
    pub shift: Result<Shift, String>,
    /// One plain sentence.
    pub sentence: String,
    pub cautions: Vec<Caution>,
}

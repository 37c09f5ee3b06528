//! Crest lines of bedforms in one picture, and the numbers reviewers ask for: length, spacing, defects.

mod candidates;
mod decoy;
mod defects;
mod edit;
mod fields;
mod floor;
mod forks;
mod frames;
mod join;
mod lines;
mod link;
mod meet;
mod model;
mod numbers;
mod pen;
mod scale;
mod shift;
mod simplify;
mod spacing;
mod square;
mod survival;
mod tone;

pub use candidates::{Crossing, crossings};
pub use defects::{Defects, defects};
pub use edit::{CrestEdits, EditGround, Edited, Stroke, StrokeKind, clip, edit};
pub use forks::{Forks, binomial_p, forks};
pub use frames::{Frames, OnGround};
pub use model::{CrestModel, Fit};
pub use numbers::{CrestNumbers, length_rose, numbers};
pub use pen::Pen;
pub use scale::suited_scale;
pub use shift::{Shift, ShiftChance, ShiftSettings, ShiftVector, shift};
pub use spacing::{SpacingOnGround, SpacingSettings, spacing};
pub use square::detect_on_ground;
pub use survival::{Survival, kaplan_meier};

use serde::{Deserialize, Serialize};

use crate::ground::{Grid, Method, Point, Polygon, Polyline, Stopped, Work};

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &candidates::METHOD,
    &model::METHOD,
    &decoy::METHOD,
    &floor::METHOD,
    &link::METHOD,
    &numbers::METHOD,
    &spacing::METHOD,
    &survival::METHOD,
    &defects::METHOD,
    &forks::METHOD,
    &shift::METHOD,
    &pen::METHOD,
    &edit::METHOD,
];

/// How crests are looked for.
#[derive(Clone, Debug, PartialEq)]
pub struct CrestSettings {
    /// What a crest looks like; `None` takes the model that fits the patch best.
    pub model: Option<CrestModel>,
    /// Scale of the derivatives, pixels, at least 1; `None` derives it from the spacing, or from a sweep.
    pub scale_px: Option<f64>,
    /// Crest to crest, pixels, where it is known.
    pub spacing_px: Option<f64>,
    /// Whether the tone is radar intensity: its logarithm is taken, so that speckle is noise of one variance.
    pub logarithm: bool,
    /// Ground that is no bedform (ponds, roads, seams), pixels.
    pub excluded: Vec<Polygon>,
    /// Tones outside [least, most] are no ground to trace on.
    pub tone_limits: Option<[f64; 2]>,
    /// Chance that noise alone starts one line anywhere in the patch.
    pub significance: f64,
    /// Gaps up to so many scales are bridged where both sides point at each other.
    pub bridge_scales: f64,
    /// Shorter isolated lines are dropped, in scales.
    pub least_length_scales: f64,
    /// Greatest distance between a line and its simplified form, pixels.
    pub tolerance_px: f64,
}

impl Default for CrestSettings {
    fn default() -> Self {
        Self {
            model: None,
            scale_px: None,
            spacing_px: None,
            logarithm: false,
            excluded: Vec::new(),
            tone_limits: None,
            significance: 0.05,
            bridge_scales: 5.0,
            least_length_scales: 8.0,
            tolerance_px: 0.5,
        }
    }
}

/// Why a line stops.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum End {
    /// On open ground: a termination, one kind of defect.
    Free,
    /// On another line.
    Junction,
    /// At the edge of the patch or of the raster: the crest may go on.
    Border,
    /// At missing or excluded ground: the crest may go on.
    Gap,
    /// The line closes on itself; both its ends say so.
    Closed,
}

/// One crest.
#[derive(Clone, Debug, PartialEq)]
pub struct CrestLine {
    /// Pixels. In the slip-face model and for one-sided walks the bright side lies to the left when the
    /// picture's rows run downward.
    pub line: Polyline,
    /// Chance, 0 to 1, that the line is a crest and not what the texture of the picture makes of nothing, judged
    /// by its length and response against lines of the wrong sense. Where no model stands out it is held against
    /// pixel noise only.
    pub confidence: f64,
    /// At the first and the last point.
    pub ends: [End; 2],
    /// Length of bridged gaps, pixels.
    pub bridged_px: f64,
    /// Whether this is a bright ridge, a dark one or a slip face.
    pub model: CrestModel,
    /// Where it comes from.
    pub origin: CrestOrigin,
    /// Whether the user looked at it and let it stand.
    pub accepted: bool,
    /// Length laid by hand, pixels.
    pub by_hand_px: f64,
}

/// Where a crest line comes from.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum CrestOrigin {
    /// By the detector alone.
    #[default]
    Traced,
    /// By the detector, then cut, joined or extended by hand.
    Edited,
    /// By hand.
    Drawn,
    /// Out of a file.
    Imported,
}

impl CrestOrigin {
    /// One word for tables and layers.
    pub fn name(self) -> &'static str {
        match self {
            Self::Traced => "traced",
            Self::Edited => "edited",
            Self::Drawn => "drawn",
            Self::Imported => "imported",
        }
    }
}

/// A place where lines meet.
#[derive(Clone, Debug, PartialEq)]
pub struct Junction {
    /// Pixels.
    pub at: Point,
    /// The line that goes on through the place.
    pub through: usize,
    /// Lines that end here, each with the end that does (0 the first point, 1 the last).
    pub branches: Vec<(usize, usize)>,
}

/// The crests of a patch.
#[derive(Clone, Debug, PartialEq)]
pub struct Crests {
    pub lines: Vec<CrestLine>,
    pub junctions: Vec<Junction>,
    /// The model the lines follow.
    pub model: CrestModel,
    /// How well each model fits the patch, the one taken where nobody chose first.
    pub fits: Vec<Fit>,
    /// Whether any model stands out from a symmetric pattern.
    pub clear: bool,
    /// Direction from dark to bright across most slip faces, radians clockwise from the column axis as the
    /// picture is seen; `None` where both senses are traced.
    pub sense: Option<f64>,
    /// The greatest response noise alone reaches in the patch, in tone per pixel (slip face) or per px².
    pub floor: f64,
    /// The response that a tenth of the crest points exceed, in the same unit: where it is below 2.4 floors,
    /// speckle breaks and forks lines.
    pub strong: f64,
    /// Responses at which lines start and to which they are followed, in the same unit.
    pub thresholds: [f64; 2],
    /// Scales of the derivatives, pixels: the one lines are traced at, and the one that confirms them.
    pub scales_px: Vec<f64>,
    /// Side of the square pixels the lines were traced on, in the finer side of the picture's own; above 1 where
    /// it was too large and was averaged.
    pub side_px: f64,
}

/// Traces the crests inside `outline`. No crest is a result too: `lines` is then empty.
///
/// # Errors
/// [`Stopped`].
pub fn detect(
    image: &Grid<f32>,
    outline: &Polygon,
    settings: &CrestSettings,
    work: &Work,
) -> Result<Crests, Stopped> {
    work.phase("crests", 0);
    let ground = tone::Ground::new(image, outline, settings, work)?;
    let trace = match settings.scale_px.filter(|sigma| sigma.is_finite()) {
        Some(sigma) => lines::trace(&ground, settings, sigma.clamp(1.0, scale::MOST_PX), None, work)?,
        None => scale::choose(&ground, settings, work)?,
    };
    Ok(trace.finished(&ground, settings))
}

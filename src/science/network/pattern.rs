//! The arrangement of a network as probabilities.

use crate::ground::Axis;

/// Names in the order of `Pattern::probabilities`.
pub const PATTERN_NAMES: [&str; 5] = ["dendritic", "parallel", "trellis", "rectangular", "radial"];

#[derive(Clone, Debug, Default, PartialEq)]
pub struct Pattern {
    pub links: usize,
    /// Fewer than 30 links: probabilities are not given.
    pub too_few: bool,
    pub probabilities: Option<[f64; 5]>,
    pub features: PatternFeatures,
    /// Length-weighted share of link azimuths by bins of `rose_bin_deg`, from axis 0°.
    pub rose: Vec<f64>,
    pub rose_bin_deg: f64,
    /// Modes of link azimuths.
    pub modes: Vec<Axis>,
}

/// What the probabilities rest on.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct PatternFeatures {
    /// R̄ of the doubled link azimuths, weighted by length.
    pub alignment: f64,
    /// R̄ of the fourfold link azimuths: two trends at a right angle.
    pub crossing: f64,
    pub mean_junction_deg: Option<f64>,
    /// Share of junctions within 15° of a right angle.
    pub right_angles: Option<f64>,
    /// Length of order 1 over its mean on the dominant trend: short tributaries across.
    pub short_across: Option<f64>,
    /// Mean cos(azimuth − away from the summit).
    pub radial: Option<f64>,
}

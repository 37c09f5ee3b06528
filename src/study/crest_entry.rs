//! What the user says and draws of the crests and populations of a patch.

use serde::{Deserialize, Serialize};

use crate::ground::{Axis, Point, Polygon, Polyline};
use crate::science::crest::CrestModel;
pub use crate::science::crest::StrokeKind;

/// Crests of a patch as far as they are the user's; all points are full-resolution pixels of its raster.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct CrestEntry {
    /// What a crest looks like here; that of the settings, or what fits best, when absent.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub model: Option<CrestModel>,
    /// Only what is drawn counts: nothing is traced.
    #[serde(skip_serializing_if = "std::ops::Not::not")]
    pub drawn_only: bool,
    /// Ground that is no bedform: ponds, roads, seams.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub masks: Vec<Polygon>,
    /// Tones outside [least, most], in the raster's own numbers, are no ground to trace on.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub tone_limits: Option<[f64; 2]>,
    /// One point on each traced line that is no crest.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub rejected: Vec<Point>,
    /// One point on each traced line that the user looked at and lets stand.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub accepted: Vec<Point>,
    /// Places where a line is cut in two.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub cuts: Vec<Point>,
    /// Lines drawn, joining, lengthening or imported.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub strokes: Vec<CrestStroke>,
}

/// A line laid by hand or out of a file.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CrestStroke {
    pub kind: StrokeKind,
    /// Where the user clicked; empty for an imported line.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub picks: Vec<Point>,
    /// The way along the ridge between them.
    pub line: Polyline,
}

/// A population of a patch with a name of its own: the one whose trend lies nearest, within 20°.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PopulationName {
    pub axis: Axis,
    pub name: String,
}

impl CrestEntry {
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}

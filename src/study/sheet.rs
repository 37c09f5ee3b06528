//! The sheet: everything the user decided, as plain data. It is what is saved and undone.

use std::path::PathBuf;

use serde::{Deserialize, Serialize};

use crate::files::raster::Bands;
use crate::files::wind_table::WindImport;
use crate::ground::{Axis, Azimuth, Body, LonLat, Polygon, Seed};
use crate::science::alignment::backwards::{Cover, Sense};

use super::{CrestEntry, NetworkEntry, PopulationName, Settings};

/// The saved document.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Sheet {
    pub title: String,
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub notes: String,
    pub seed: Seed,
    #[serde(default)]
    pub rasters: Vec<RasterEntry>,
    #[serde(default)]
    pub patches: Vec<Patch>,
    #[serde(default)]
    pub winds: Vec<WindEntry>,
    #[serde(default)]
    pub settings: Settings,
    /// Bodies of the user's own, by name; rasters and records hold copies.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub bodies: Vec<Body>,
    /// Outcrops round which the wind parted.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub obstacles: Vec<Obstacle>,
    /// Channel networks.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub networks: Vec<NetworkEntry>,
    /// Patches held against the same ground on another raster.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub comparisons: Vec<Comparison>,
}

/// Names a raster, patch, wind record, outcrop, network or comparison within one sheet; never reused.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(transparent)]
pub struct Id(pub u32);

/// A raster of the study and what the user said about it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RasterEntry {
    pub id: Id,
    pub name: String,
    /// In memory absolute or relative to the working folder; in the file relative to the sheet.
    pub path: PathBuf,
    #[serde(default)]
    pub bands: Bands,
    #[serde(default)]
    pub kind: ImageKind,
    #[serde(default)]
    pub placement: Placement,
    #[serde(default)]
    pub tone: Tone,
    /// Radar look direction or sun azimuth (where the light comes from), when known.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub light_from: Option<Azimuth>,
}

/// What the user adds where the file is silent (or wrong).
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Placement {
    /// Ground size of a pixel (x, y), metres; replaces any georeference.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub pixel_m: Option<[f64; 2]>,
    /// Azimuth of image-up for rasters without georeference; north when absent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub north_deg: Option<f64>,
    /// The body the raster lies on: replaces name, gravity and air, and the shape where the file
    /// has none.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub body: Option<Body>,
}

/// What the pixels are, as far as the methods care.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ImageKind {
    /// Brightness from light; used as it is.
    #[default]
    Optical,
    /// Radar backscatter with speckle; the logarithm is used.
    Radar,
    /// Heights in metres.
    Elevation,
}

/// How the raster is shown; never touches a number.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Tone {
    /// Percentiles of valid pixels shown black and white.
    pub low_percent: f64,
    pub high_percent: f64,
    pub gamma: f64,
    #[serde(default)]
    pub inverted: bool,
}

impl Default for Tone {
    fn default() -> Self {
        Self { low_percent: 1.0, high_percent: 99.0, gamma: 1.0, inverted: false }
    }
}

/// A region the user outlined, in pixel coordinates of its raster.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Patch {
    pub id: Id,
    pub name: String,
    pub raster: Id,
    pub outline: Polygon,
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub tags: Vec<String>,
    /// The wind records it is judged by.
    #[serde(default, skip_serializing_if = "WindChoice::is_all")]
    pub winds: WindChoice,
    /// An axis known from elsewhere, weighed like a theory.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub stated_axis: Option<Axis>,
    /// How much sand lies between the bedforms.
    #[serde(default, skip_serializing_if = "Cover::is_unknown")]
    pub cover: Cover,
    /// Which way the sand goes, as read from the ground.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub sense: Option<Sense>,
    /// What the user says and draws of its crests.
    #[serde(default, skip_serializing_if = "CrestEntry::is_empty")]
    pub crests: CrestEntry,
    /// Names given to its populations.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub populations: Vec<PopulationName>,
}

impl Patch {
    /// A patch of which nothing but its outline is said.
    pub fn new(id: Id, name: impl Into<String>, raster: Id, outline: Polygon) -> Self {
        let (name, tags, winds) = (name.into(), Vec::new(), WindChoice::All);
        Self {
            id,
            name,
            raster,
            outline,
            tags,
            winds,
            stated_axis: None,
            cover: Cover::Unknown,
            sense: None,
            crests: CrestEntry::default(),
            populations: Vec::new(),
        }
    }
}

/// Which wind records judge a patch.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum WindChoice {
    /// Every record of the sheet, one verdict each.
    #[default]
    All,
    /// The record that stands nearest to the middle of the patch, on the same body.
    Nearest,
    Chosen(Vec<Id>),
}

/// An outcrop that stands in the way of the wind, in pixel coordinates of its raster. It belongs to every patch
/// that holds half or more of the ground round it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Obstacle {
    pub id: Id,
    pub name: String,
    pub raster: Id,
    pub outline: Polygon,
}

/// A patch and another raster that shows the same ground: under another look, or at another time.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Comparison {
    pub id: Id,
    pub name: String,
    /// Outlined on the first raster.
    pub patch: Id,
    /// The second raster.
    pub raster: Id,
    /// Time from the first to the second, in years of the user's own reckoning; below 0 when the second is older.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub years: Option<f64>,
}

/// A wind record of the study and how to read it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct WindEntry {
    pub id: Id,
    pub name: String,
    pub path: PathBuf,
    pub import: WindImport,
    /// Height of the anemometer above ground, m.
    pub height_m: f64,
    /// Aerodynamic roughness of the ground, m.
    pub roughness_m: f64,
    /// The body whose air and gravity apply; Earth when absent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub body: Option<Body>,
    /// Where the mast stands or the model's cell lies, when known.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub at: Option<LonLat>,
}

impl WindChoice {
    pub fn is_all(&self) -> bool {
        *self == Self::All
    }

    /// The records named; none for the other choices.
    pub fn named(&self) -> &[Id] {
        if let Self::Chosen(ids) = self { ids } else { &[] }
    }

    /// The choice once a record is gone; all records when it was the last one named.
    pub fn without(self, gone: Id) -> Self {
        match self {
            Self::Chosen(mut ids) => {
                ids.retain(|id| *id != gone);
                if ids.is_empty() { Self::All } else { Self::Chosen(ids) }
            }
            other => other,
        }
    }
}

impl Sheet {
    pub fn empty(title: impl Into<String>) -> Self {
        Self {
            title: title.into(),
            notes: String::new(),
            seed: Seed(1),
            rasters: Vec::new(),
            patches: Vec::new(),
            winds: Vec::new(),
            settings: Settings::default(),
            bodies: Vec::new(),
            obstacles: Vec::new(),
            networks: Vec::new(),
            comparisons: Vec::new(),
        }
    }

    /// An id no entry of this sheet has.
    pub fn fresh_id(&self) -> Id {
        let used = self
            .rasters
            .iter()
            .map(|r| r.id)
            .chain(self.patches.iter().map(|p| p.id))
            .chain(self.winds.iter().map(|w| w.id))
            .chain(self.obstacles.iter().map(|o| o.id))
            .chain(self.networks.iter().map(|n| n.id))
            .chain(self.comparisons.iter().map(|c| c.id));
        Id(used.max().map_or(1, |Id(n)| n + 1))
    }

    /// The bodies one may choose from: those known by name, then the sheet's own.
    pub fn known_bodies(&self) -> Vec<Body> {
        Body::known().into_iter().chain(self.bodies.iter().cloned()).collect()
    }

    pub fn raster(&self, id: Id) -> Option<&RasterEntry> {
        self.rasters.iter().find(|r| r.id == id)
    }

    pub fn patch(&self, id: Id) -> Option<&Patch> {
        self.patches.iter().find(|p| p.id == id)
    }

    pub fn obstacle(&self, id: Id) -> Option<&Obstacle> {
        self.obstacles.iter().find(|o| o.id == id)
    }

    pub fn network(&self, id: Id) -> Option<&NetworkEntry> {
        self.networks.iter().find(|n| n.id == id)
    }

    pub fn comparison(&self, id: Id) -> Option<&Comparison> {
        self.comparisons.iter().find(|c| c.id == id)
    }

    pub fn wind(&self, id: Id) -> Option<&WindEntry> {
        self.winds.iter().find(|w| w.id == id)
    }
}

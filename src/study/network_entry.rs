//! What the sheet holds of a channel network: where it is sought, and what the user said and drew.

use serde::{Deserialize, Serialize};

use crate::ground::{Point, Polygon, Polyline};

use super::Id;

/// A network of the study; all points are full-resolution pixels of its raster.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct NetworkEntry {
    pub id: Id,
    pub name: String,
    pub raster: Id,
    /// The ground it is sought on; the whole raster when absent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub within: Option<Polygon>,
    pub source: NetworkSource,
}

#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum NetworkSource {
    Elevation(FromElevation),
    Image(FromImage),
}

/// A network routed over an elevation raster.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct FromElevation {
    /// Where it ends; each is moved to the greatest contributing area near it. None: every channel that leaves
    /// the ground.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub outlets: Vec<Point>,
    /// Lakes and basins that stay closed.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub closed: Vec<Polygon>,
    /// The threshold of this network, m²; that of the settings, or the proposed one, when absent.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub threshold_m2: Option<f64>,
}

/// A network seen on an image.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct FromImage {
    /// Whether channels are proposed by themselves (else only those traced).
    pub proposed: bool,
    /// Channels drawn with the pen.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub traced: Vec<TracedChannel>,
    /// One point on each proposed reach that the user struck out.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub struck: Vec<Point>,
    /// Arrows beside reaches: the water went this way.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub flows: Vec<[Point; 2]>,
    /// An elevation raster of the same ground that tells which way the channels fall.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub elevation: Option<Id>,
}

/// A channel drawn with the pen, upstream end first when the user knew it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct TracedChannel {
    /// Where the user clicked.
    pub picks: Vec<Point>,
    /// The way the pen took between them.
    pub line: Polyline,
}

impl Default for FromImage {
    fn default() -> Self {
        Self { proposed: true, traced: Vec::new(), struck: Vec::new(), flows: Vec::new(), elevation: None }
    }
}

impl NetworkEntry {
    pub fn from_elevation(id: Id, name: impl Into<String>, raster: Id) -> Self {
        let source = NetworkSource::Elevation(FromElevation::default());
        Self { id, name: name.into(), raster, within: None, source }
    }

    pub fn from_image(id: Id, name: impl Into<String>, raster: Id) -> Self {
        let source = NetworkSource::Image(FromImage::default());
        Self { id, name: name.into(), raster, within: None, source }
    }

    /// What the user said of its elevation; `None` for one on an image.
    pub fn elevation(&self) -> Option<&FromElevation> {
        if let NetworkSource::Elevation(it) = &self.source { Some(it) } else { None }
    }

    /// What the user said and drew on the image; `None` for one from elevation.
    pub fn image(&self) -> Option<&FromImage> {
        if let NetworkSource::Image(it) = &self.source { Some(it) } else { None }
    }
}

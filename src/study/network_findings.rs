//! What a run says of one channel network.

use crate::ground::{Caution, Grid, LengthUnit, LonLat, Network, Point};
use crate::science::drainage::basins::Basin;
use crate::science::drainage::condition::{Changed, Conditioning};
use crate::science::drainage::extract::Channels;
use crate::science::drainage::routing::Router;
use crate::science::network::compare::Agreement;
use crate::science::network::density::Density;
use crate::science::network::flow::{FlowAsk, PalaeoFlow};
use crate::science::network::hierarchy::{Horton, OrderCount, Tokunaga};
use crate::science::network::hypsometry::Hypsometry;
use crate::science::network::junctions::Junctions;
use crate::science::network::pattern::Pattern;
use crate::science::network::planform::Planform;
use crate::science::network::profile::{ChiFit, Profile};
use crate::science::network::scaling::PowerLaw;

use super::Id;

/// Everything about one network. Points are full-resolution pixels of its raster; lengths are in `unit`.
#[derive(Clone, Debug, PartialEq)]
pub struct NetworkFinding {
    pub id: Id,
    pub name: String,
    pub raster: Id,
    pub fingerprint: String,
    pub unit: LengthUnit,
    /// Ground it was sought on, in the square of `unit`.
    pub area: f64,
    pub centre: Option<LonLat>,
    /// Full-resolution pixels per pixel measured.
    pub factor: usize,
    pub network: Network,
    /// How it came from elevation; `None` on an image.
    pub drainage: Option<DrainageFinding>,
    /// How it came from an image; `None` from elevation.
    pub tracing: Option<TracingFinding>,
    pub orders: Vec<OrderCount>,
    pub horton: Option<Horton>,
    pub tokunaga: Option<Tokunaga>,
    pub density: Option<Density>,
    pub hack: Option<PowerLaw>,
    pub flint: Option<PowerLaw>,
    pub profiles: Vec<Profile>,
    pub chi: Option<ChiFit>,
    /// Of the greatest basin.
    pub hypsometry: Option<Hypsometry>,
    pub junctions: Junctions,
    pub pattern: Pattern,
    /// The trunk first, then other long channels.
    pub planforms: Vec<Planform>,
    /// What went into the palaeo-flow and what came out; in words why there is none.
    pub flow: Result<(FlowAsk, PalaeoFlow), String>,
    /// Against the other networks of the sheet on the same ground.
    pub agreements: Vec<(Id, String, Agreement)>,
    pub sentence: String,
    pub cautions: Vec<Caution>,
}

/// From elevation to channels.
#[derive(Clone, Debug, PartialEq)]
pub struct DrainageFinding {
    pub conditioning: Conditioning,
    pub changed: Changed,
    /// Depth raised (positive) or cut (negative) in metres, reduced for show, and full-resolution pixels a cell.
    pub change_map: Grid<f32>,
    pub change_map_px: f64,
    /// Its upper left corner, full-resolution pixels.
    pub change_map_at: Point,
    pub router: Router,
    pub channels: Channels,
    /// Greatest first.
    pub basins: Vec<Basin>,
    /// Sum of the cells' ground areas, m².
    pub cells_area_m2: f64,
}

/// From image to channels.
#[derive(Clone, Debug, PartialEq)]
pub struct TracingFinding {
    /// Response a place had to pass, in its own unit of contrast over noise.
    pub floor: f64,
    /// Widths looked for, pixels of the measured image.
    pub widths_px: Vec<f64>,
    pub proposed_reaches: usize,
    pub struck_reaches: usize,
    pub bridged_gaps: usize,
    /// Independent loops kept.
    pub loops: usize,
    /// Where the user's arrows found no reach.
    pub lost_arrows: Vec<Point>,
}

impl NetworkFinding {
    /// `"elevation"` or `"image"`.
    pub fn source_in_words(&self) -> &'static str {
        if self.drainage.is_some() { "elevation" } else { "image" }
    }
}

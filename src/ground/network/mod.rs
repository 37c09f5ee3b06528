//! A channel network: nodes and the reaches between them, from elevation or traced on an image.

mod edit;
mod graph;
mod join;
mod order;
mod placed;

pub use order::{Order, orders};
pub use placed::ground_distance;

use super::{Point, Polyline};

/// Nodes and reaches in full-resolution pixel coordinates of one raster. Reaches join nodes only; a node is a
/// head, a junction, an outlet, or a place where a property of the channel changes.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Network {
    pub nodes: Vec<NetworkNode>,
    pub reaches: Vec<Reach>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NetworkNode {
    pub at: Point,
    /// Metres, when known.
    pub elevation_m: Option<f64>,
}

/// A stretch of channel between two nodes.
#[derive(Clone, Debug, PartialEq)]
pub struct Reach {
    /// Index of the node at the upstream end, as far as the sense is known.
    pub from: usize,
    /// Index of the node at the downstream end.
    pub to: usize,
    /// From `from` to `to`, both included; at least two points.
    pub line: Polyline,
    /// Along the ground, in the unit of the raster's place.
    pub length: f64,
    pub sense: FlowSense,
    /// Strahler order and Shreve magnitude; `None` on loops and below them.
    pub order: Option<Order>,
    /// Mean width in the unit of the raster's place, with its standard error; `None` when not measured.
    pub width: Option<Width>,
    /// Along the reach, upstream end first, equally spaced or one a cell.
    pub stations: Vec<Station>,
    pub origin: ReachOrigin,
    /// Probability that there is a channel, 0 to 1; 1 for what the user drew.
    pub confidence: f64,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Width {
    pub mean: f64,
    pub se: f64,
}

/// A place along a reach.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Station {
    pub at: Point,
    /// Ground distance from the upstream end of the reach.
    pub along: f64,
    pub elevation_m: Option<f64>,
    /// Ground that drains through it, m².
    pub area_m2: Option<f64>,
    /// Bank to bank, in the unit of the raster's place.
    pub width: Option<f64>,
    /// The banks, left and right of the way down.
    pub banks: Option<[Point; 2]>,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ReachOrigin {
    /// Routed over an elevation raster.
    Elevation,
    /// Found on an image.
    Detected,
    /// Joins two found reaches across a gap.
    Bridged,
    /// Drawn by the user with the pen.
    Traced,
}

/// Which way the water went, and why we think so.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct FlowSense {
    /// Each piece with its ln odds for `from` → `to`; empty when nothing tells.
    pub evidence: Vec<SenseEvidence>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SenseEvidence {
    pub kind: SenseKind,
    /// ln of the odds that the water went from `from` to `to`.
    pub ln_odds: f64,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SenseKind {
    /// The bed falls.
    Elevation,
    /// Channels widen downstream.
    Widening,
    /// Tributaries join at acute angles that point downstream.
    Junctions,
    /// Said by the user.
    Stated,
}

impl FlowSense {
    /// ln odds that leave no doubt in practice.
    pub const SURE: f64 = 20.0;

    /// Routed downhill: no doubt.
    pub fn of_elevation() -> Self {
        Self { evidence: vec![SenseEvidence { kind: SenseKind::Elevation, ln_odds: Self::SURE }] }
    }

    /// Probability that the water went from `from` to `to`; ½ when nothing tells.
    pub fn probability(&self) -> f64 {
        let ln_odds: f64 = self.evidence.iter().map(|e| e.ln_odds).sum();
        1.0 / (1.0 + (-ln_odds).exp())
    }

    /// The same evidence for a reach whose ends were exchanged.
    pub fn reversed(&self) -> Self {
        let turned = |e: &SenseEvidence| SenseEvidence { ln_odds: -e.ln_odds, ..*e };
        Self { evidence: self.evidence.iter().map(turned).collect() }
    }
}

impl SenseKind {
    pub fn in_words(self) -> &'static str {
        match self {
            Self::Elevation => "elevation",
            Self::Widening => "widening",
            Self::Junctions => "junction angles",
            Self::Stated => "stated",
        }
    }
}

impl ReachOrigin {
    pub fn in_words(self) -> &'static str {
        match self {
            Self::Elevation => "elevation",
            Self::Detected => "detected",
            Self::Bridged => "bridged",
            Self::Traced => "traced",
        }
    }
}

impl Reach {
    /// The reach with its ends exchanged.
    pub fn reversed(&self) -> Self {
        let turn = |s: &Station| Station {
            along: self.length - s.along,
            banks: s.banks.map(|[left, right]| [right, left]),
            ..*s
        };
        Self {
            from: self.to,
            to: self.from,
            line: Polyline(self.line.0.iter().rev().copied().collect()),
            sense: self.sense.reversed(),
            stations: self.stations.iter().rev().map(turn).collect(),
            ..self.clone()
        }
    }
}

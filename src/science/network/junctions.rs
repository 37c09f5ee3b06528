//! Junction angles by chords of stated length.

use crate::ground::{Azimuth, Point};

/// Two channels that join, by chords of one length.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct JunctionAngle {
    pub at: Point,
    /// Node of the network.
    pub node: usize,
    /// Between the two upstream branches, degrees in (0, 180].
    pub angle_deg: f64,
    /// Between each branch and the channel below, as turned; left then right of the way down.
    pub turns_deg: [f64; 2],
    /// Where the two branches come from: azimuth of each chord, pointing downstream.
    pub toward: [Azimuth; 2],
    /// Strahler orders of the branches, when both are defined.
    pub orders: Option<[u32; 2]>,
    /// tan(slope of the stronger) / tan(slope of the weaker), and Howard's (1971) angle from it, degrees.
    pub howard_deg: Option<f64>,
}

/// The mean angle for one chord length.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AtChord {
    /// In the unit of the raster's place.
    pub chord: f64,
    pub n: usize,
    pub mean_deg: f64,
    pub ci95_deg: Option<[f64; 2]>,
    pub median_deg: f64,
}

#[derive(Clone, Debug, Default, PartialEq)]
pub struct Junctions {
    /// Chord of the angles listed.
    pub chord: f64,
    pub angles: Vec<JunctionAngle>,
    /// The same for shorter and longer chords: how far the answer depends on it.
    pub by_chord: Vec<AtChord>,
    /// Junctions where a chord found too little channel.
    pub too_short: usize,
}

//! How far crests moved between two pictures of one ground.

use crate::ground::Azimuth;

/// Movement of crests square to themselves; lengths in the unit of the ground.
#[derive(Clone, Debug, PartialEq)]
pub struct Shift {
    /// Points of the first crests that met a crest of the second, and their share of all points.
    pub matched: usize,
    pub share: f64,
    /// The way that counts as forward: across the mean crest.
    pub toward: Azimuth,
    /// Median movement toward it with its 95 % interval by crests redrawn.
    pub median: f64,
    pub ci95: [f64; 2],
    /// The quarter and three-quarter points of single movements.
    pub quartiles: [f64; 2],
    /// Crests that take part: the number of samples.
    pub crests: usize,
    /// Movement of each point, thinned for show.
    pub moves: Vec<f32>,
}

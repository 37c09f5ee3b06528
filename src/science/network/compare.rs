//! Two networks of the same ground, reach by reach.

/// How much of one network the other finds, by length.
#[derive(Clone, Debug, PartialEq)]
pub struct Agreement {
    /// Greatest distance at which a channel counts as the same, in the unit of the raster's place.
    pub tolerance: f64,
    /// Share of the other network's length that lies within the tolerance of this one.
    pub found: f64,
    /// Share of this network's length that lies within the tolerance of the other.
    pub confirmed: f64,
    /// Mean distance where both are found.
    pub mean_distance: f64,
    /// Share of the common length on which the senses agree, where both tell one.
    pub same_sense: Option<f64>,
    /// Share of the common length on which Strahler orders agree, where both have one.
    pub same_order: Option<f64>,
    /// Junctions of the other, those found within the tolerance, and junctions of this one.
    pub junctions: [usize; 3],
    /// Length of the other and of this one.
    pub lengths: [f64; 2],
}

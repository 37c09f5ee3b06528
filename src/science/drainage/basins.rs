//! Basins and their divides.

use crate::ground::{Point, Polygon};

/// The ground that drains through one outlet.
#[derive(Clone, Debug, PartialEq)]
pub struct Basin {
    /// Full-resolution pixels.
    pub outlet: Point,
    /// Node of the network, when a channel ends there.
    pub node: Option<usize>,
    /// Its divide; holes are closed basins within.
    pub outline: Polygon,
    pub area_m2: f64,
    /// Whether missing ground or the raster's edge cuts it off, so that it may be larger.
    pub touches_edge: bool,
    /// Elevations by equal shares of area, highest first, 101 values, m.
    pub elevations: Vec<f64>,
}

//! Elevation made to drain: filling, breaching, and both.

use serde::{Deserialize, Serialize};

use crate::ground::Grid;

/// How sinks are dealt with.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Conditioning {
    /// Raised to their lowest rim; flats stay flat.
    Fill,
    /// Raised, with the least slope a flat can hold toward its outlet.
    #[default]
    FillSloped,
    /// A trench cut from the sink to lower ground along the way of least cost.
    Breach,
    /// Breached where the trench is shallow and short enough, filled elsewhere.
    BreachThenFill,
}

/// What conditioning changed.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Changed {
    /// Cells raised and cells cut.
    pub raised_cells: usize,
    pub cut_cells: usize,
    pub valid_cells: usize,
    /// m³.
    pub raised_volume: f64,
    pub cut_volume: f64,
    /// m.
    pub deepest_fill: f64,
    pub deepest_cut: f64,
    /// Sinks before, and of those breached, filled, and left closed because the user said so.
    pub sinks: usize,
    pub breached: usize,
    pub filled: usize,
    pub left_closed: usize,
}

/// A surface that drains.
#[derive(Clone, Debug, PartialEq)]
pub struct Conditioned {
    pub surface: Grid<f32>,
    pub changed: Changed,
}

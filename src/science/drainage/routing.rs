//! Where water goes: one receiver a cell, or shares of several.

use serde::{Deserialize, Serialize};

use crate::ground::Grid;

/// How flow is shared among neighbours.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Router {
    /// All to the neighbour of steepest descent (O'Callaghan & Mark 1984).
    #[default]
    #[serde(rename = "d8")]
    D8,
    /// Between the two neighbours that enclose the steepest facet (Tarboton 1997).
    #[serde(rename = "d-infinity")]
    DInfinity,
    /// By slope to the power 1.1 (Freeman 1991).
    Freeman,
    /// By slope times contour length (Quinn et al. 1991).
    Quinn,
}

/// The neighbour each cell drains to, as an index into [`STEPS`]; [`OUT`] or [`VOID`] otherwise. Valid where the
/// elevation is.
#[derive(Clone, Debug, PartialEq)]
pub struct Receivers(pub Grid<u8>);

/// (column, row) steps to the eight neighbours: east, south-east, south, … clockwise on the image. Ties go to the
/// earlier.
pub const STEPS: [(isize, isize); 8] = [(1, 0), (1, 1), (0, 1), (-1, 1), (-1, 0), (-1, -1), (0, -1), (1, -1)];
/// The cell drains off the raster, into missing ground, or into a basin that stays closed.
pub const OUT: u8 = 8;
/// The cell is missing.
pub const VOID: u8 = 9;

impl Receivers {
    /// The cell that (col, row) drains to; `None` when it leaves the ground.
    pub fn next(&self, col: usize, row: usize) -> Option<(usize, usize)> {
        let (dx, dy) = *STEPS.get(usize::from(self.0.at(col, row)))?;
        Some((col.checked_add_signed(dx)?, row.checked_add_signed(dy)?))
    }
}

//! Ground size of the cells of an elevation raster: slopes and areas use metres on the body, never degrees.

/// Distances and areas row by row, metres. Cells are taken as parallelograms of the local frame at each row's
/// middle.
#[derive(Clone, Debug, PartialEq)]
pub struct Cells {
    /// Ground distance from a cell to its neighbour of the same row, a value a row.
    pub across: Vec<f64>,
    /// To the neighbour of the next row.
    pub down: Vec<f64>,
    /// To the neighbours down-right and down-left.
    pub diagonal: Vec<[f64; 2]>,
    /// Ground area of a cell, m².
    pub area: Vec<f64>,
}

//! Drainage density and stream frequency.

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Density {
    /// Channel length in metres (pixels without ground size), as drawn.
    pub length: f64,
    /// What a path that steps from cell to cell overstates; 1 for traced lines. `length / inflation` is used.
    pub inflation: f64,
    pub area: f64,
    /// Length over area, per unit length.
    pub density: f64,
    /// Streams of order 1 and above over area; `None` where order is undefined.
    pub frequency: Option<f64>,
}

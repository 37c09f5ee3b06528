//! A raster as a picture needs it: a box of pixels, reduced to a screenful.

use crate::files::raster::Window;
use crate::ground::{Bounds, Grid, Point, Work};

use super::{OpenRaster, RasterEntry};

/// A box of a raster, averaged to `factor` × `factor` pixels.
#[derive(Clone, Debug, PartialEq)]
pub struct Glance {
    pub grid: Grid<f32>,
    /// What it covers, full-resolution pixels.
    pub covers: Bounds,
}

/// Reads `bounds` with at most `longest` cells a side.
///
/// # Errors
/// Why the pixels could not be read, in words.
pub fn glance(
    entry: &RasterEntry,
    open: &OpenRaster,
    bounds: Bounds,
    longest: usize,
    work: &Work,
) -> Result<Glance, String> {
    let info = open.raster.info();
    let low = |v: f64| v.floor().max(0.0) as usize;
    let (col, row) = (low(bounds.min.x), low(bounds.min.y));
    let width = (bounds.max.x.ceil().max(0.0) as usize).saturating_sub(col);
    let height = (bounds.max.y.ceil().max(0.0) as usize).saturating_sub(row);
    let window = Window { col, row, width, height }.clipped(info.width, info.height);
    let factor = window.width.max(window.height).div_ceil(longest.max(1)).max(1);
    let grid = open.raster.read_reduced(window, factor, &entry.bands, work).map_err(|e| e.to_string())?;
    let min = Point::new(col as f64, row as f64);
    let max = Point::new((col + window.width) as f64, (row + window.height) as f64);
    Ok(Glance { grid, covers: Bounds { min, max } })
}

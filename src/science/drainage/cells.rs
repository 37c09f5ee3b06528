//! Ground size of the cells of an elevation raster: slopes and areas use metres on the body, never degrees.

use crate::ground::{Frame, LocalFrame, Place, Point};

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

impl Cells {
    /// The cells of a raster of `width` × `height` pixels at `place`. A raster in pixels has cells of 1 × 1.
    ///
    /// `None` when no row has a ground size: the whole raster lies outside its projection. A row that has none
    /// takes that of the nearest row with one.
    pub fn of(place: &Place, width: usize, height: usize) -> Option<Self> {
        if matches!(place.frame, Frame::Pixels { .. }) {
            return Some(Self::square(1.0, height));
        }
        // Distances to the next row are measured between the two rows, areas at the row itself.
        let own = frames(place, width, height, 0.5)?;
        let between = frames(place, width, height, 1.0)?;
        Some(Self {
            across: own.iter().map(|f| f.length(1.0, 0.0)).collect(),
            down: between.iter().map(|f| f.length(0.0, 1.0)).collect(),
            diagonal: between.iter().map(|f| [f.length(1.0, 1.0), f.length(-1.0, 1.0)]).collect(),
            area: own.iter().map(LocalFrame::pixel_area).collect(),
        })
    }

    /// Square cells of one size, in metres, on `height` rows.
    pub fn square(size_m: f64, height: usize) -> Self {
        let diagonal = size_m * std::f64::consts::SQRT_2;
        Self {
            across: vec![size_m; height],
            down: vec![size_m; height],
            diagonal: vec![[diagonal; 2]; height],
            area: vec![size_m * size_m; height],
        }
    }

    /// Ground distances from a cell of `row` to its neighbours, in the order of [`super::routing::STEPS`].
    pub fn steps(&self, row: usize) -> [f64; 8] {
        let above = row.saturating_sub(1);
        let ([right, left], [from_left, from_right]) = (self.diagonal[row], self.diagonal[above]);
        let across = self.across[row];
        [across, right, self.down[row], left, across, from_left, self.down[above], from_right]
    }
}

/// The local frame at the middle of every row, `offset` pixels below its upper edge.
fn frames(place: &Place, width: usize, height: usize, offset: f64) -> Option<Vec<LocalFrame>> {
    // Where the middle lies outside the projection or on a pole, another column may not.
    let at = |row: usize| {
        let y = row as f64 + offset;
        let usable = |f: &LocalFrame| f.pixel_area().is_finite() && f.pixel_area() > 0.0;
        [0.5, 0.25, 0.75, 0.05, 0.95]
            .iter()
            .find_map(|share| place.local_frame(Point::new(share * width as f64, y)).filter(usable))
    };
    let mut frames: Vec<Option<LocalFrame>> = (0..height).map(at).collect();
    let known: Vec<usize> = (0..height).filter(|row| frames[*row].is_some()).collect();
    for row in 0..height {
        if frames[row].is_none() {
            let after = known.partition_point(|k| *k < row);
            let near = [after.checked_sub(1), Some(after)].into_iter().flatten().filter_map(|i| known.get(i));
            frames[row] = frames[*near.min_by_key(|k| k.abs_diff(row))?];
        }
    }
    frames.into_iter().collect()
}

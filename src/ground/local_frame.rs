//! The local frame: at one point, from pixel steps to true east and north in ground metres.

use super::Azimuth;

/// The linear map from a pixel step (Δcol, Δrow) to ground (east, north) at one point, in metres
/// (or pixels where the raster has no ground size). East and north are true.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LocalFrame {
    pub east_per_col: f64,
    pub east_per_row: f64,
    pub north_per_col: f64,
    pub north_per_row: f64,
}

impl LocalFrame {
    /// Ground (east, north) of a pixel step.
    pub fn ground(&self, dcol: f64, drow: f64) -> (f64, f64) {
        (
            self.east_per_col * dcol + self.east_per_row * drow,
            self.north_per_col * dcol + self.north_per_row * drow,
        )
    }

    /// Pixel step (Δcol, Δrow) of a ground vector.
    pub fn pixel(&self, east: f64, north: f64) -> (f64, f64) {
        let det = self.determinant();
        (
            (self.north_per_row * east - self.east_per_row * north) / det,
            (self.east_per_col * north - self.north_per_col * east) / det,
        )
    }

    /// Ground gradient (∂/∂E, ∂/∂N) of a pixel gradient (∂/∂col, ∂/∂row): M⁻ᵀ g. Wave vectors
    /// transform the same way.
    pub fn gradient(&self, per_col: f64, per_row: f64) -> (f64, f64) {
        let det = self.determinant();
        (
            (self.north_per_row * per_col - self.north_per_col * per_row) / det,
            (self.east_per_col * per_row - self.east_per_row * per_col) / det,
        )
    }

    /// True azimuth of a pixel step.
    pub fn azimuth(&self, dcol: f64, drow: f64) -> Azimuth {
        let (east, north) = self.ground(dcol, drow);
        Azimuth::from_east_north(east, north)
    }

    /// Ground length of a pixel step.
    pub fn length(&self, dcol: f64, drow: f64) -> f64 {
        let (east, north) = self.ground(dcol, drow);
        east.hypot(north)
    }

    /// Ground size of one column step and one row step.
    pub fn pixel_size(&self) -> [f64; 2] {
        [self.length(1.0, 0.0), self.length(0.0, 1.0)]
    }

    /// Ground area of one pixel.
    pub fn pixel_area(&self) -> f64 {
        self.determinant().abs()
    }

    /// Whether the image shows the ground as in a mirror.
    pub fn is_mirrored(&self) -> bool {
        self.determinant() > 0.0
    }

    fn determinant(&self) -> f64 {
        self.east_per_col * self.north_per_row - self.east_per_row * self.north_per_col
    }
}

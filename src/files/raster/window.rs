//! A rectangle of pixels.

/// Columns `col .. col + width` and rows `row .. row + height` of one level.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Window {
    pub col: usize,
    pub row: usize,
    pub width: usize,
    pub height: usize,
}

impl Window {
    /// All of a raster of this size.
    pub fn whole(width: usize, height: usize) -> Self {
        Self { col: 0, row: 0, width, height }
    }

    /// The part inside a raster of this size.
    pub fn clipped(self, width: usize, height: usize) -> Self {
        Self {
            width: self.width.min(width.saturating_sub(self.col)),
            height: self.height.min(height.saturating_sub(self.row)),
            ..self
        }
    }

    pub(super) fn pixels(self) -> u64 {
        (self.width as u64).saturating_mul(self.height as u64)
    }
}

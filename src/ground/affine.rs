//! The affine map from pixels to map coordinates.

use super::Point;

/// map = (a·col + b·row + c, d·col + e·row + f).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Affine {
    pub a: f64,
    pub b: f64,
    pub c: f64,
    pub d: f64,
    pub e: f64,
    pub f: f64,
}

impl Affine {
    pub fn apply(&self, p: Point) -> Point {
        Point::new(self.a * p.x + self.b * p.y + self.c, self.d * p.x + self.e * p.y + self.f)
    }

    pub fn determinant(&self) -> f64 {
        self.a * self.e - self.b * self.d
    }

    /// The inverse; `None` when singular or not finite.
    pub fn inverse(&self) -> Option<Self> {
        let det = self.determinant();
        if !det.is_finite() || det == 0.0 || !self.c.is_finite() || !self.f.is_finite() {
            return None;
        }
        let (a, b, d, e) = (self.e / det, -self.b / det, -self.d / det, self.a / det);
        Some(Self { a, b, c: -(a * self.c + b * self.f), d, e, f: -(d * self.c + e * self.f) })
    }
}

//! The outcrop as a circle or an ellipse: the shape with the same area and second moments.

use crate::ground::{Method, Point, Symbol};

use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "obstacle.outline",
    name: "Ellipse of an outcrop",
    question: "Which circle or ellipse does the wind meet?",
    formula: "μ = ∫∫ (x − x̄)(x − x̄)ᵀ dA / A; semi-axes 2√λ₁, 2√λ₂ along the eigenvectors of μ, scaled to the area A; a circle √(A/π) where they differ by less than 1.2",
    symbols: &[
        Symbol { symbol: "μ", meaning: "second moments of the outline's area, in closed form", unit: "m2" },
        Symbol { symbol: "λ", meaning: "eigenvalues of μ", unit: "m2" },
        Symbol { symbol: "A", meaning: "area of the outline", unit: "m2" },
    ],
    assumptions: &["The outline follows the foot of the outcrop, where the flow has to part."],
    limits: &["Bays and spurs are smoothed away; the answer is given over a doubt in the radius."],
    sources: &[at(DERIVED, "moments of a polygon by Green's theorem")],
};

/// Axis ratio from which an outcrop is an ellipse.
const LEAST_RATIO: f64 = 1.2;

/// An ellipse on the ground plane (x east, y north).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ellipse {
    pub centre: Point,
    /// Longer semi-axis, ground units.
    pub major: f64,
    /// Shorter semi-axis; equal to `major` for a circle.
    pub minor: f64,
    /// Turn of the longer axis from east, counter-clockwise, radians in [0, π).
    pub turn: f64,
}

impl Ellipse {
    /// A circle.
    pub fn circle(centre: Point, radius: f64) -> Self {
        Self { centre, major: radius, minor: radius, turn: 0.0 }
    }

    /// The shape of an outer ring; `None` when it encloses nothing.
    pub fn of_ring(ring: &[Point]) -> Option<Self> {
        let origin = *ring.first()?;
        let (mut area, mut first, mut second) = (0.0, [0.0; 2], [0.0; 3]);
        for (i, p) in ring.iter().enumerate() {
            let q = ring[(i + 1) % ring.len()];
            let (x0, y0, x1, y1) = (p.x - origin.x, p.y - origin.y, q.x - origin.x, q.y - origin.y);
            let cross = x0 * y1 - x1 * y0;
            area += cross / 2.0;
            first[0] += cross * (x0 + x1) / 6.0;
            first[1] += cross * (y0 + y1) / 6.0;
            second[0] += cross * (x0 * x0 + x0 * x1 + x1 * x1) / 12.0;
            second[1] += cross * (x0 * (2.0 * y0 + y1) + x1 * (y0 + 2.0 * y1)) / 24.0;
            second[2] += cross * (y0 * y0 + y0 * y1 + y1 * y1) / 12.0;
        }
        if area.is_nan() || area == 0.0 {
            return None;
        }
        let (mx, my) = (first[0] / area, first[1] / area);
        let xx = second[0] / area - mx * mx;
        let xy = second[1] / area - mx * my;
        let yy = second[2] / area - my * my;
        let area = area.abs();
        let centre = Point::new(origin.x + mx, origin.y + my);
        let (mean, half) = (0.5 * (xx + yy), (0.5 * (xx - yy)).hypot(xy));
        let (long, short) = ((mean + half).max(0.0).sqrt(), (mean - half).max(0.0).sqrt());
        if short.is_nan() || short <= 0.0 {
            return None;
        }
        if long < LEAST_RATIO * short {
            return Some(Self::circle(centre, (area / std::f64::consts::PI).sqrt()));
        }
        let scale = (area / (std::f64::consts::PI * long * short)).sqrt();
        let turn = (0.5 * xy.atan2(0.5 * (xx - yy))).rem_euclid(std::f64::consts::PI);
        Some(Self { centre, major: scale * long, minor: scale * short, turn })
    }

    /// Radius of the circle of equal area.
    pub fn radius(&self) -> f64 {
        (self.major * self.minor).sqrt()
    }

    /// The same shape `factor` times as large.
    pub fn scaled(&self, factor: f64) -> Self {
        Self { major: factor * self.major, minor: factor * self.minor, ..*self }
    }

    /// The same shape elsewhere.
    pub fn moved_to(&self, centre: Point) -> Self {
        Self { centre, ..*self }
    }

    /// Whether it is drawn and reckoned as a circle.
    pub fn is_circle(&self) -> bool {
        self.major == self.minor
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    fn ring(major: f64, minor: f64, turn: f64, centre: Point) -> Vec<Point> {
        (0..360)
            .map(|i| {
                let (sin, cos) = f64::from(i).to_radians().sin_cos();
                let (x, y) = (major * cos, minor * sin);
                let (s, c) = turn.sin_cos();
                Point::new(centre.x + c * x - s * y, centre.y + s * x + c * y)
            })
            .collect()
    }

    #[test]
    fn an_ellipse_is_found_again_whichever_way_round_it_was_drawn() {
        let mut points = ring(5.0, 2.0, 0.7, Point::new(1e5, -3e4));
        for _ in 0..2 {
            let got = Ellipse::of_ring(&points).unwrap();
            assert_close!(got.major, 5.0, 2e-3, "longer semi-axis");
            assert_close!(got.minor, 2.0, 2e-3, "shorter semi-axis");
            assert_close!(got.turn, 0.7, 1e-6, "turn");
            assert_close!(got.centre.x, 1e5, 1e-6, "centre");
            points.reverse();
        }
    }

    #[test]
    fn nearly_round_is_a_circle_of_the_same_area() {
        let square = [[0.0, 0.0], [2.0, 0.0], [2.0, 2.0], [0.0, 2.0]].map(Point::from);
        let got = Ellipse::of_ring(&square).unwrap();
        assert!(got.is_circle());
        assert_close!(got.radius(), (4.0 / std::f64::consts::PI).sqrt(), 1e-12, "radius");
        assert_eq!(got.centre, Point::new(1.0, 1.0));
    }

    #[test]
    fn a_line_is_no_outcrop() {
        assert!(
            Ellipse::of_ring(&[Point::new(0.0, 0.0), Point::new(1.0, 1.0), Point::new(2.0, 2.0)]).is_none()
        );
    }
}

//! Potential flow round a circle or an ellipse: how far it turns, where its lines run.

use rustfft::num_complex::Complex64;

use crate::ground::{Method, Point, Symbol};

use super::outline::Ellipse;
use super::sources::{DERIVED, MILNE_THOMSON, at};

pub static METHOD: Method = Method {
    id: "obstacle.potential-flow",
    name: "Potential flow round an outcrop",
    question: "How would a wind turn round this outcrop?",
    formula: "z = ζ + c²/ζ; dw/dz = U (e^{−iχ} − R² e^{iχ}/ζ²)/(1 − c²/ζ²); δ = −arg(dw/dz) − χ; circle: δ = −arg(1 − (a/r)² e^{−2iϑ})",
    symbols: &[
        Symbol { symbol: "z", meaning: "place about the outcrop's centre, longer axis real", unit: "m" },
        Symbol { symbol: "ζ", meaning: "the root with |ζ| > R", unit: "m" },
        Symbol { symbol: "c²", meaning: "(a² − b²)/4 of the semi-axes a, b", unit: "m2" },
        Symbol { symbol: "R", meaning: "(a + b)/2", unit: "m" },
        Symbol {
            symbol: "χ",
            meaning: "wind direction from the longer axis, counter-clockwise",
            unit: "rad",
        },
        Symbol { symbol: "δ", meaning: "turn of the flow, counter-clockwise", unit: "rad" },
        Symbol { symbol: "r, ϑ", meaning: "distance, and angle from downwind", unit: "m, rad" },
    ],
    assumptions: &[
        "The flow parts sideways round an outcrop that blocks it; it has no viscosity, no wake and one direction.",
    ],
    limits: &[
        "The same upwind and downwind: the sense of the wind does not show in it.",
        "A low or gentle hill lets the wind over it and turns it less.",
    ],
    sources: &[MILNE_THOMSON, at(DERIVED, "checked against independent evaluations")],
};

/// The flow of one wind round one outcrop.
#[derive(Clone, Copy, Debug)]
pub struct Flow {
    ellipse: Ellipse,
    /// c² ≥ 0: the longer axis is the real one.
    c2: f64,
    /// R.
    mean: f64,
}

/// A turn of the flow and how it changes with the wind's direction, radians and pure number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Turn {
    pub deflection: f64,
    /// ∂δ/∂(wind direction).
    pub per_wind: f64,
}

impl Flow {
    pub fn round(ellipse: Ellipse) -> Self {
        let (a, b) = (ellipse.major, ellipse.minor);
        Self { ellipse, c2: 0.25 * (a * a - b * b), mean: 0.5 * (a + b) }
    }

    /// The place in the plane where the outcrop is a circle of radius R; of two roots the outer one.
    fn zeta(&self, at: Point) -> Complex64 {
        let z = self.local(at);
        if self.c2 == 0.0 {
            return z;
        }
        let mut root = (z * z - 4.0 * self.c2).sqrt();
        if (z * root.conj()).re < 0.0 {
            root = -root;
        }
        0.5 * (z + root)
    }

    fn local(&self, at: Point) -> Complex64 {
        let c = self.ellipse.centre;
        Complex64::new(at.x - c.x, at.y - c.y) * Complex64::from_polar(1.0, -self.ellipse.turn)
    }

    /// Distance in radii: 1 on the outline, r/a far out; below 1 inside a circle.
    pub fn radii(&self, at: Point) -> f64 {
        self.zeta(at).norm() / self.mean
    }

    /// How a wind toward `wind` (radians counter-clockwise from east; its opposite gives the same)
    /// turns at a place outside the outline.
    pub fn turn(&self, at: Point, wind: f64) -> Turn {
        let zeta = self.zeta(at);
        let square = (zeta * zeta).inv();
        let chi = wind - self.ellipse.turn;
        let dipole = self.mean * self.mean * Complex64::from_polar(1.0, 2.0 * chi) * square;
        let (top, bottom) = (1.0 - dipole, 1.0 - self.c2 * square);
        // d arg(1 − d)/dχ = Im(−2i d/(1 − d)), and δ = −arg(…).
        let per_wind = (Complex64::new(0.0, 2.0) * dipole / top).im;
        Turn { deflection: (bottom.arg() - top.arg()), per_wind }
    }

    /// Speed over the speed far away.
    pub fn speed(&self, at: Point, wind: f64) -> f64 {
        self.velocity(at, wind).norm()
    }

    /// The stream function over the speed, ground units: constant along a line of the flow, 0 on the
    /// outline.
    pub fn stream(&self, at: Point, wind: f64) -> f64 {
        let zeta = self.zeta(at);
        let chi = wind - self.ellipse.turn;
        let turned = zeta * Complex64::from_polar(1.0, -chi);
        (turned + self.mean * self.mean / turned).im
    }

    /// East and north components as a complex number.
    fn velocity(&self, at: Point, wind: f64) -> Complex64 {
        let zeta = self.zeta(at);
        let square = (zeta * zeta).inv();
        let chi = wind - self.ellipse.turn;
        let top = Complex64::from_polar(1.0, -chi)
            - self.mean * self.mean * Complex64::from_polar(1.0, chi) * square;
        let conjugate = top / (1.0 - self.c2 * square);
        conjugate.conj() * Complex64::from_polar(1.0, self.ellipse.turn)
    }

    /// `count` lines of the flow that start upwind, `reach` radii before the centre, evenly `gap` radii apart
    /// and none on the stagnation line, followed as far downwind.
    pub fn lines(&self, wind: f64, count: usize, gap: f64, reach: f64) -> Vec<Vec<Point>> {
        let unit = self.ellipse.radius();
        let (sin, cos) = wind.sin_cos();
        let start = |k: usize| {
            let across = (k as f64 - 0.5 * (count as f64 - 1.0)) * gap * unit;
            let along = -reach * unit;
            let c = self.ellipse.centre;
            Point::new(c.x + along * cos - across * sin, c.y + along * sin + across * cos)
        };
        (0..count).map(|k| self.line(start(k), wind, reach)).collect()
    }

    /// One line by steps along the middle direction of each (second order).
    fn line(&self, from: Point, wind: f64, reach: f64) -> Vec<Point> {
        let unit = self.ellipse.radius();
        let step = 0.04 * unit;
        let (sin, cos) = wind.sin_cos();
        let ahead = |p: Point, by: f64| {
            let v = self.velocity(p, wind);
            let length = v.norm();
            (length > 1e-6).then(|| Point::new(p.x + by * v.re / length, p.y + by * v.im / length))
        };
        let mut line = vec![from];
        let mut at = from;
        // Half as long again as straight across: the way round is longer.
        for _ in 0..(3.0 * reach / 0.04) as usize {
            let Some(middle) = ahead(at, 0.5 * step) else { break };
            let v = self.velocity(middle, wind);
            let length = v.norm();
            if length < 1e-6 {
                break;
            }
            at = Point::new(at.x + step * v.re / length, at.y + step * v.im / length);
            line.push(at);
            let c = self.ellipse.centre;
            if (at.x - c.x) * cos + (at.y - c.y) * sin > reach * unit {
                break;
            }
        }
        line
    }
}

/// Where a line of the flow that runs `offset` beside the axis far upwind passes a circle of radius
/// `radius` abeam: y₀ = r − a²/r.
pub fn abeam(offset: f64, radius: f64) -> f64 {
    0.5 * (offset + offset.hypot(2.0 * radius))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn lines_of_the_flow_keep_their_stream_function_and_do_not_cross_the_outline() {
        let ellipse = Ellipse { centre: Point::new(3.0, -2.0), major: 2.0, minor: 1.0, turn: 0.4 };
        let flow = Flow::round(ellipse);
        for line in flow.lines(1.1, 6, 0.6, 4.0) {
            let first = flow.stream(line[0], 1.1);
            for p in &line {
                assert_close!(flow.stream(*p, 1.1), first, 0.02, "stream function");
                assert!(flow.radii(*p) > 0.99, "a line enters the outcrop");
            }
        }
    }

    #[test]
    fn the_derivative_is_that_of_the_turn() {
        let ellipse = Ellipse { centre: Point::default(), major: 2.0, minor: 1.0, turn: 0.3 };
        let (flow, at, h) = (Flow::round(ellipse), Point::new(2.1, 1.4), 1e-6);
        let numeric = (flow.turn(at, 0.8 + h).deflection - flow.turn(at, 0.8 - h).deflection) / (2.0 * h);
        assert_close!(flow.turn(at, 0.8).per_wind, numeric, 1e-8, "∂δ/∂wind");
    }

    #[test]
    fn a_line_passes_abeam_where_the_formula_says() {
        let flow = Flow::round(Ellipse::circle(Point::default(), 1.0));
        let beside = abeam(0.7, 1.0);
        assert_close!(flow.stream(Point::new(0.0, beside), 0.0), 0.7, 1e-12, "stream function abeam");
    }
}

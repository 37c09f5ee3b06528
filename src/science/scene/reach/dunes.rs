//! The dunes of Sorrel Reach as phase fields: crests are where the phase is a multiple of 2π.

use std::f64::consts::{PI, TAU};

use crate::ground::{Point, Seed};

use super::{CORRIDOR_SPACING, CORRIDOR_TREND, LONG_SPACING, LONG_TREND, PIXEL_M, sampled};
use crate::science::scene::smooth::SampledField;

/// A round outcrop: centre and radius in mosaic pixels.
pub struct Outcrop {
    pub centre: Point,
    pub radius: f64,
}

pub const OUTCROPS: [Outcrop; 2] = [
    Outcrop { centre: Point::new(235.0, 235.0), radius: 34.0 },
    Outcrop { centre: Point::new(455.0, 330.0), radius: 26.0 },
];

impl Outcrop {
    /// A ring of `factor` radii around it.
    pub fn ring(&self, factor: f64) -> Vec<Point> {
        (0..24)
            .map(|i| {
                let (sin, cos) = (TAU * f64::from(i) / 24.0).sin_cos();
                let r = factor * self.radius;
                Point::new(self.centre.x + r * cos, self.centre.y + r * sin)
            })
            .collect()
    }
}

/// Both dune fields.
pub struct Dunes {
    long_wander: SampledField,
    corridor_wander: SampledField,
    height: SampledField,
    edge: SampledField,
}

impl Dunes {
    pub fn new(seed: Seed) -> Self {
        Self {
            long_wander: sampled(130.0, seed.child("long-wander")),
            corridor_wander: sampled(90.0, seed.child("corridor-wander")),
            height: sampled(160.0, seed.child("height")),
            edge: sampled(120.0, seed.child("edge")),
        }
    }

    /// Relative brightening by dunes at a mosaic pixel, about −0.5 … 1.
    pub fn contrast(&self, p: Point) -> f64 {
        let rough_edge = (14.0 * self.edge.at(p)).clamp(-22.0, 22.0);
        let long = cover(p, (10.0, 690.0), (-20.0, 575.0), rough_edge);
        let corridor = cover(p, (748.0, 1178.0), (18.0, 478.0), rough_edge);
        let mut contrast = 0.0;
        if long > 0.0 {
            contrast += long * ridge(self.long_phase(p), 0.62);
        }
        if corridor > 0.0 {
            contrast += corridor * ridge(self.corridor_phase(p), 0.70);
        }
        contrast * (1.0 + 0.30 * self.height.at(p)).max(0.2)
    }

    /// 1 on an outcrop, 0 off it.
    pub fn outcrop(&self, p: Point) -> f64 {
        OUTCROPS
            .iter()
            .map(|o| {
                let edge = o.radius + 0.9 * self.edge.at(Point::new(2.0 * p.x, 2.0 * p.y));
                step((edge - p.distance(o.centre)) / 2.0)
            })
            .fold(0.0, f64::max)
    }

    /// Crests along the wind follow the streamlines round each cylinder:
    /// ψ = n·(1 − a²/r²), n the distance from the axis through the centre.
    fn long_phase(&self, p: Point) -> f64 {
        let normal = crest_normal(LONG_TREND);
        let mut psi = normal.x * p.x + normal.y * p.y;
        for o in &OUTCROPS {
            let (dx, dy) = (p.x - o.centre.x, p.y - o.centre.y);
            let r2 = (dx * dx + dy * dy).max(o.radius * o.radius);
            psi -= (normal.x * dx + normal.y * dy) * o.radius * o.radius / r2;
        }
        let spacing = LONG_SPACING / PIXEL_M;
        TAU * psi / spacing + 0.75 * self.long_wander.at(p) + defect(p, Point::new(560.0, 160.0))
            - defect(p, Point::new(120.0, 430.0))
    }

    fn corridor_phase(&self, p: Point) -> f64 {
        let normal = crest_normal(CORRIDOR_TREND);
        let spacing = CORRIDOR_SPACING / PIXEL_M;
        TAU * (normal.x * p.x + normal.y * p.y) / spacing
            + 0.9 * self.corridor_wander.at(p)
            + defect(p, Point::new(905.0, 330.0))
            - defect(p, Point::new(1050.0, 140.0))
    }
}

/// Unit vector across crests of grid trend `deg`, in pixel axes (x right, y down).
fn crest_normal(deg: f64) -> Point {
    let (sin, cos) = deg.to_radians().sin_cos();
    // Trend (sin, −cos) in (x, y); its normal:
    Point::new(cos, sin)
}

/// A fork: the phase turns once around `centre`.
fn defect(p: Point, centre: Point) -> f64 {
    (p.y - centre.y).atan2(p.x - centre.x)
}

/// Sharp crests, broad troughs, zero mean over a wave.
fn ridge(phase: f64, strength: f64) -> f64 {
    const SHARPNESS: f64 = 1.2;
    // The mean of exp(s·cos) over a wave is I0(s); 1.3937 for s = 1.2.
    const MEAN: f64 = 1.393_726;
    strength * ((SHARPNESS * phase.cos()).exp() / MEAN - 1.0)
}

/// 1 inside the box, 0 outside, with an edge that wanders by `rough`.
fn cover(p: Point, x: (f64, f64), y: (f64, f64), rough: f64) -> f64 {
    let inside = (p.x - x.0).min(x.1 - p.x).min(p.y - y.0).min(y.1 - p.y) + rough;
    step(inside / 8.0)
}

/// 0 below −1, 1 above 1, smooth between.
fn step(t: f64) -> f64 {
    0.5 + 0.5 * (0.5 * PI * t.clamp(-1.0, 1.0)).sin()
}

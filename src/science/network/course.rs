//! A channel's course at equal steps along it, on a plane that unrolls the ground.

use crate::ground::{Network, Place, Point, Polyline};

/// Points at equal steps along a course, in pixels and in the unit of the place.
#[derive(Clone, Debug)]
pub(super) struct Course {
    /// Ground distance of neighbours.
    pub step: f64,
    pub pixels: Vec<Point>,
    /// East and north of the first point, each step by the local frame where it lies.
    pub ground: Vec<Point>,
}

/// Most points of a course.
const MOST_POINTS: f64 = 20_000.0;
/// Points per standard deviation at which a line is smoothed.
const FINENESS: f64 = 12.0;

impl Course {
    /// The course along reaches that follow one another, at steps of about `step`; `None` for less than four
    /// steps or where the place has no ground.
    pub fn along(network: &Network, reaches: &[usize], place: &Place, step: f64) -> Option<Self> {
        let mut pixels: Vec<Point> = Vec::new();
        for reach in reaches {
            for p in &network.reaches[*reach].line.0 {
                if pixels.last() != Some(p) && p.x.is_finite() && p.y.is_finite() {
                    pixels.push(*p);
                }
            }
        }
        let mut ground = vec![Point::default()];
        let mut along = vec![0.0];
        for pair in pixels.windows(2) {
            let middle = Point::new(0.5 * (pair[0].x + pair[1].x), 0.5 * (pair[0].y + pair[1].y));
            let (east, north) =
                place.local_frame(middle)?.ground(pair[1].x - pair[0].x, pair[1].y - pair[0].y);
            let last = ground[ground.len() - 1];
            ground.push(Point::new(last.x + east, last.y + north));
            along.push(along[along.len() - 1] + east.hypot(north));
        }
        let length = *along.last()?;
        let count = (length / step).min(MOST_POINTS).floor();
        if count.is_nan() || count < 4.0 {
            return None;
        }
        let at: Vec<f64> = (0..=count as usize).map(|i| length * i as f64 / count).collect();
        Some(Self {
            step: length / count,
            pixels: between(&along, &pixels, &at),
            ground: between(&along, &ground, &at),
        })
    }

    pub fn length(&self) -> f64 {
        length(&self.ground)
    }

    /// Distance along the course of each point.
    pub fn distances(&self) -> Vec<f64> {
        distances(&self.ground)
    }

    /// The course without what is shorter than a few `sigma`, at equal steps again: twice smoothed minus once
    /// more (2G − G²), which leaves longer bends their size; ends kept.
    pub fn cleaned(&self, sigma: f64) -> Self {
        let clean = |line: &[Point]| {
            let once = smoothed(line, self.step, sigma);
            let twice = smoothed(&once, self.step, sigma);
            let both = |(a, b): (&Point, &Point)| Point::new(2.0 * a.x - b.x, 2.0 * a.y - b.y);
            once.iter().zip(&twice).map(both).collect::<Vec<_>>()
        };
        let (pixels, ground) = (clean(&self.pixels), clean(&self.ground));
        let along = distances(&ground);
        let steps = ground.len() - 1;
        let length = along[steps];
        let at: Vec<f64> = (0..=steps).map(|i| length * i as f64 / steps as f64).collect();
        Self {
            step: length / steps as f64,
            pixels: between(&along, &pixels, &at),
            ground: between(&along, &ground, &at),
        }
    }

    /// Pixels and ground smoothed by a Gaussian along the course, one point a point.
    pub fn valley(&self, sigma: f64) -> (Polyline, Vec<Point>) {
        (Polyline(smoothed(&self.pixels, self.step, sigma)), smoothed(&self.ground, self.step, sigma))
    }

    /// Direction of each step, radians, without jumps by a turn.
    pub fn directions(&self) -> Vec<f64> {
        let mut directions: Vec<f64> = Vec::with_capacity(self.ground.len());
        for pair in self.ground.windows(2) {
            let own = (pair[1].y - pair[0].y).atan2(pair[1].x - pair[0].x);
            let last = directions.last().copied().unwrap_or(own);
            let turn = (own - last + std::f64::consts::PI).rem_euclid(std::f64::consts::TAU);
            directions.push(last + turn - std::f64::consts::PI);
        }
        directions
    }
}

pub(super) fn distances(line: &[Point]) -> Vec<f64> {
    let mut along = vec![0.0];
    for pair in line.windows(2) {
        along.push(along[along.len() - 1] + pair[0].distance(pair[1]));
    }
    along
}

pub(super) fn length(line: &[Point]) -> f64 {
    line.windows(2).map(|w| w[0].distance(w[1])).sum()
}

/// Gaussian smoothing of equally spaced points; beyond each end the line goes on as its image through that
/// end, so that ends stay where they are.
fn smoothed(line: &[Point], step: f64, sigma: f64) -> Vec<Point> {
    let last = line.len() - 1;
    // A long kernel is laid over every n-th point, and the points between are put back on a line.
    let every = ((sigma / step / FINENESS) as usize).clamp(1, last.max(1));
    let knots: Vec<usize> = (0..last).step_by(every).chain([last]).collect();
    let sigma = sigma / step;
    let reach = (4.0 * sigma).ceil() as isize;
    // Offsets in whole strides, so that the taps fall on points for every knot.
    let taps: Vec<(isize, f64)> = (-(reach / every as isize)..=reach / every as isize)
        .map(|k| k * every as isize)
        .map(|d| (d, (-0.5 * (d as f64 / sigma).powi(2)).exp()))
        .collect();
    let weight: f64 = taps.iter().map(|t| t.1).sum();
    let beyond = |i: isize| -> Point {
        let (mut i, mut offset, mut sign) = (i, Point::default(), 1.0);
        // Images through the ends until the index falls on the line.
        loop {
            let end = if i < 0 {
                0
            } else if i > last as isize {
                last
            } else {
                let p = line[i as usize];
                return Point::new(offset.x + sign * p.x, offset.y + sign * p.y);
            };
            offset = Point::new(offset.x + sign * 2.0 * line[end].x, offset.y + sign * 2.0 * line[end].y);
            sign = -sign;
            i = 2 * end as isize - i;
        }
    };
    let at_knot = |k: &usize| {
        let sum = taps.iter().fold(Point::default(), |sum, (d, w)| {
            let p = beyond(*k as isize + d);
            Point::new(sum.x + w * p.x, sum.y + w * p.y)
        });
        Point::new(sum.x / weight, sum.y / weight)
    };
    let values: Vec<Point> = knots.iter().map(at_knot).collect();
    let knots: Vec<f64> = knots.iter().map(|k| *k as f64).collect();
    let at: Vec<f64> = (0..=last).map(|i| i as f64).collect();
    between(&knots, &values, &at)
}

/// Points at the ascending places `at` of a line whose points stand at ascending `along`.
fn between(along: &[f64], line: &[Point], at: &[f64]) -> Vec<Point> {
    let mut i = 0;
    at.iter()
        .map(|s| {
            while i + 2 < along.len() && along[i + 1] < *s {
                i += 1;
            }
            let (a, b) = (line[i], line[(i + 1).min(line.len() - 1)]);
            let width = along[(i + 1).min(along.len() - 1)] - along[i];
            let t = if width > 0.0 { ((s - along[i]) / width).clamp(0.0, 1.0) } else { 0.0 };
            Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))
        })
        .collect()
}

//! Where the normals of crests meet the crests of another picture.

use std::collections::HashMap;

use crate::ground::{LocalFrame, Point};

use super::numbers::on_ground;
use super::{CrestLine, CrestModel};

/// Cosine of the greatest angle between two crests that may be the same.
const ALIKE: f64 = 0.866;
/// With fewer lines than this, pieces of lines are taken as samples.
const LEAST_LINES: usize = 6;
/// Length of such a piece, in steps from start to start.
const PIECE: usize = 12;

/// A crest on the ground plane.
pub(super) struct Curve {
    pub points: Vec<Point>,
    pub model: CrestModel,
}

/// A point of a crest, its normal, and which sample it belongs to.
#[derive(Clone, Copy)]
pub(super) struct Start {
    pub at: Point,
    pub normal: [f64; 2],
    pub model: CrestModel,
    pub cluster: usize,
}

impl Curve {
    pub fn new(line: &CrestLine, frame: LocalFrame) -> Self {
        Self { points: on_ground(&line.line.0, &frame), model: line.model }
    }

    pub fn moved(&self, to: impl Fn(Point) -> Point) -> Self {
        Self { points: self.points.iter().map(|p| to(*p)).collect(), model: self.model }
    }
}

/// Points every `step` along each crest, half a step from its start; the normal is that of two steps of crest
/// about the point, since single segments are rough.
pub(super) fn starts(curves: &[Curve], step: f64) -> Vec<Start> {
    let pieces = curves.len() < LEAST_LINES;
    let (mut out, mut cluster) = (Vec::new(), 0);
    for curve in curves {
        let mut along = vec![0.0];
        for w in curve.points.windows(2) {
            along.push(along[along.len() - 1] + w[0].distance(w[1]));
        }
        let length = along[along.len() - 1];
        let at = |s: f64| {
            let s = s.clamp(0.0, length);
            let k = along.partition_point(|a| *a < s).clamp(1, along.len() - 1);
            let (a, b) = (curve.points[k - 1], curve.points[k]);
            let piece = along[k] - along[k - 1];
            let t = if piece > 0.0 { (s - along[k - 1]) / piece } else { 0.0 };
            Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))
        };
        if along.len() < 2 || !length.is_finite() {
            continue;
        }
        let count = (length / step).floor() as usize;
        for i in 0..count {
            let s = (i as f64 + 0.5) * step;
            let (a, b) = (at(s - step), at(s + step));
            let d = a.distance(b);
            if d > 0.0 {
                let normal = [-(b.y - a.y) / d, (b.x - a.x) / d];
                out.push(Start { at: at(s), normal, model: curve.model, cluster });
            }
            if pieces && (i + 1) % PIECE == 0 {
                cluster += 1;
            }
        }
        cluster += 1;
    }
    out
}

/// Segments of crests by square cells.
pub(super) struct Segments {
    segments: Vec<(Point, Point, CrestModel)>,
    cells: HashMap<(i64, i64), Vec<usize>>,
    side: f64,
}

impl Segments {
    pub fn new(curves: &[Curve], side: f64) -> Self {
        let mut segments = Vec::new();
        for curve in curves {
            segments.extend(curve.points.windows(2).map(|w| (w[0], w[1], curve.model)));
        }
        let mut cells: HashMap<(i64, i64), Vec<usize>> = HashMap::new();
        for (i, (a, b, _)) in segments.iter().enumerate() {
            let range = |a: f64, b: f64| (a.min(b) / side).floor() as i64..=(a.max(b) / side).floor() as i64;
            // Steps of one cell, so that a long segment fills few cells it does not cross.
            let count = (a.distance(*b) / side).ceil().clamp(1.0, 1e6) as usize;
            let mut told = Vec::new();
            let part = |k: usize| {
                let t = k as f64 / count as f64;
                Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))
            };
            for (p, q) in (0..count).map(|k| (part(k), part(k + 1))) {
                for x in range(p.x, q.x) {
                    told.extend(range(p.y, q.y).map(|y| (x, y)));
                }
            }
            told.sort_unstable();
            told.dedup();
            told.into_iter().for_each(|key| cells.entry(key).or_default().push(i));
        }
        Self { segments, cells, side }
    }

    /// Signed distances along a normal, out to `far` on both sides, at which it meets crests of the same kind that
    /// run alike; they rise.
    pub fn along(&self, start: &Start, far: f64) -> Vec<f64> {
        let [nx, ny] = start.normal;
        let point = |t: f64| Point::new(start.at.x + t * nx, start.at.y + t * ny);
        let steps = (2.0 * far / self.side).ceil().max(1.0) as usize;
        let mut keys = Vec::new();
        for k in 0..steps {
            let (p, q) = (k as f64, k as f64 + 1.0);
            let (p, q) =
                (point(-far + 2.0 * far * p / steps as f64), point(-far + 2.0 * far * q / steps as f64));
            let range = |a: f64, b: f64| {
                (a.min(b) / self.side).floor() as i64..=(a.max(b) / self.side).floor() as i64
            };
            for x in range(p.x, q.x) {
                keys.extend(range(p.y, q.y).map(|y| (x, y)));
            }
        }
        keys.sort_unstable();
        keys.dedup();
        let mut near: Vec<usize> = keys.iter().filter_map(|k| self.cells.get(k)).flatten().copied().collect();
        near.sort_unstable();
        near.dedup();
        let mut met: Vec<f64> = near
            .into_iter()
            .filter_map(|i| {
                let (a, b, model) = self.segments[i];
                let (ex, ey) = (b.x - a.x, b.y - a.y);
                let length = ex.hypot(ey);
                // The crest runs along (ny, −nx).
                let alike = length > 0.0 && ((ex * ny - ey * nx) / length).abs() >= ALIKE;
                if model != start.model || !alike {
                    return None;
                }
                let det = nx * ey - ny * ex;
                let (rx, ry) = (a.x - start.at.x, a.y - start.at.y);
                let (t, u) = ((rx * ey - ry * ex) / det, (rx * ny - ry * nx) / det);
                (t.abs() <= far && (0.0..=1.0).contains(&u)).then_some(t)
            })
            .collect();
        met.sort_unstable_by(f64::total_cmp);
        met
    }
}

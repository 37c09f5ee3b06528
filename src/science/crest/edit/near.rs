//! Lines found by place.

use std::collections::HashMap;

use crate::ground::{Point, Polyline};

/// Segments of lines by square cells.
pub(super) struct Near<'a> {
    lines: Vec<&'a [Point]>,
    cells: HashMap<(i64, i64), Vec<(usize, usize)>>,
    side: f64,
}

/// A place on a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Place {
    pub line: usize,
    /// The segment, from 0.
    pub segment: usize,
    pub at: Point,
    pub distance: f64,
}

/// A place where a segment crosses a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Crossed {
    pub line: usize,
    pub segment: usize,
    pub at: Point,
}

impl<'a> Near<'a> {
    /// Of lines, for questions within `reach` pixels.
    pub fn new(lines: impl Iterator<Item = &'a [Point]>, reach: f64) -> Self {
        let side = reach.max(8.0);
        let lines: Vec<&[Point]> = lines.collect();
        let mut cells: HashMap<(i64, i64), Vec<(usize, usize)>> = HashMap::new();
        for (line, points) in lines.iter().enumerate() {
            for (segment, w) in points.windows(2).enumerate() {
                each_cell(w[0], w[1], side, |cell| {
                    let held = cells.entry(cell).or_default();
                    if held.last() != Some(&(line, segment)) {
                        held.push((line, segment));
                    }
                });
            }
        }
        Self { lines, cells, side }
    }

    /// The nearest place within `reach` on a segment that `counts`; of equally near ones the first.
    pub fn nearest(&self, p: Point, reach: f64, counts: impl Fn(usize, usize) -> bool) -> Option<Place> {
        if !(p.x.is_finite() && p.y.is_finite()) {
            return None;
        }
        let cell = |v: f64| (v / self.side).floor() as i64;
        let mut best: Option<Place> = None;
        for cx in cell(p.x - reach)..=cell(p.x + reach) {
            for cy in cell(p.y - reach)..=cell(p.y + reach) {
                for (line, segment) in self.cells.get(&(cx, cy)).into_iter().flatten() {
                    if !counts(*line, *segment) {
                        continue;
                    }
                    let w = &self.lines[*line][*segment..*segment + 2];
                    let Some(foot) = Polyline(w.to_vec()).nearest(p) else { continue };
                    let place =
                        Place { line: *line, segment: *segment, at: foot.at, distance: foot.distance };
                    let key = |q: &Place| (q.distance, q.line, q.segment);
                    if place.distance <= reach && best.is_none_or(|b| key(&place) < key(&b)) {
                        best = Some(place);
                    }
                }
            }
        }
        best
    }

    /// Where the segment from `a` to `b` properly crosses segments that `count`, in no order.
    pub fn crossings(&self, a: Point, b: Point, counts: impl Fn(usize, usize) -> bool) -> Vec<Crossed> {
        let mut found: Vec<Crossed> = Vec::new();
        each_cell(a, b, self.side, |cell| {
            for (line, segment) in self.cells.get(&cell).into_iter().flatten() {
                let new = !found.iter().any(|f| (f.line, f.segment) == (*line, *segment));
                if new && counts(*line, *segment) {
                    let w = &self.lines[*line][*segment..*segment + 2];
                    if let Some(at) = crossing(a, b, w[0], w[1]) {
                        found.push(Crossed { line: *line, segment: *segment, at });
                    }
                }
            }
        });
        found
    }

    /// Length of a line up to a place on it.
    pub fn along(&self, line: usize, segment: usize, at: Point) -> f64 {
        length_to(self.lines[line], segment, at)
    }
}

/// Length of a line up to a place on its segment.
pub(super) fn length_to(points: &[Point], segment: usize, at: Point) -> f64 {
    let before: f64 = points[..=segment].windows(2).map(|w| w[0].distance(w[1])).sum();
    before + points[segment].distance(at)
}

/// Where two segments cross; touching ends are no crossing.
pub(super) fn crossing(a: Point, b: Point, c: Point, d: Point) -> Option<Point> {
    let side = |p: Point, q: Point, r: Point| (q.x - p.x) * (r.y - p.y) - (q.y - p.y) * (r.x - p.x);
    let (of_a, of_b) = (side(c, d, a), side(c, d, b));
    let apart = of_a * of_b < 0.0 && side(a, b, c) * side(a, b, d) < 0.0;
    let t = of_a / (of_a - of_b);
    apart.then(|| Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y)))
}

/// The cells a segment passes, and at most some of their neighbours.
fn each_cell(a: Point, b: Point, side: f64, mut visit: impl FnMut((i64, i64))) {
    let pieces = (a.distance(b) / side).ceil().max(1.0) as usize;
    let at = |k: usize| {
        let t = k as f64 / pieces as f64;
        Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))
    };
    let cell = |v: f64| (v / side).floor() as i64;
    for k in 0..pieces {
        let (p, q) = (at(k), at(k + 1));
        for cx in cell(p.x.min(q.x))..=cell(p.x.max(q.x)) {
            for cy in cell(p.y.min(q.y))..=cell(p.y.max(q.y)) {
                visit((cx, cy));
            }
        }
    }
}

//! Points, polylines and polygons in whatever plane the caller says (mostly pixels).

use serde::{Deserialize, Serialize};

/// A point. In pixel coordinates x = column and y = row from the outer corner of the upper-left
/// pixel, so the centre of the first pixel is (0.5, 0.5).
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(from = "[f64; 2]", into = "[f64; 2]")]
pub struct Point {
    pub x: f64,
    pub y: f64,
}

/// An axis-parallel box.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bounds {
    pub min: Point,
    pub max: Point,
}

/// An open chain of points.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(transparent)]
pub struct Polyline(pub Vec<Point>);

/// A region: one outer ring and holes. Rings are not closed (the last point is not the first).
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Polygon {
    pub outer: Vec<Point>,
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub holes: Vec<Vec<Point>>,
}

impl Point {
    pub const fn new(x: f64, y: f64) -> Self {
        Self { x, y }
    }

    pub fn distance(self, other: Self) -> f64 {
        (self.x - other.x).hypot(self.y - other.y)
    }
}

impl From<[f64; 2]> for Point {
    fn from([x, y]: [f64; 2]) -> Self {
        Self { x, y }
    }
}

impl From<Point> for [f64; 2] {
    fn from(point: Point) -> Self {
        [point.x, point.y]
    }
}

impl Bounds {
    /// The smallest box around the points; `None` for no points.
    pub fn of(points: impl IntoIterator<Item = Point>) -> Option<Self> {
        points.into_iter().fold(None, |bounds, p| match bounds {
            None => Some(Self { min: p, max: p }),
            Some(b) => Some(Self {
                min: Point::new(b.min.x.min(p.x), b.min.y.min(p.y)),
                max: Point::new(b.max.x.max(p.x), b.max.y.max(p.y)),
            }),
        })
    }

    pub fn width(self) -> f64 {
        self.max.x - self.min.x
    }

    pub fn height(self) -> f64 {
        self.max.y - self.min.y
    }

    pub fn centre(self) -> Point {
        Point::new(0.5 * (self.min.x + self.max.x), 0.5 * (self.min.y + self.max.y))
    }
}

/// The place on a polyline that lies nearest to a point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Nearest {
    pub at: Point,
    pub distance: f64,
    /// Length of the line up to it.
    pub along: f64,
}

impl Polyline {
    /// Length in the plane of the points.
    pub fn length(&self) -> f64 {
        self.0.windows(2).map(|w| w[0].distance(w[1])).sum()
    }

    /// Where the line passes nearest to `p`, the first such place; `None` for fewer than two points.
    pub fn nearest(&self, p: Point) -> Option<Nearest> {
        let mut best: Option<Nearest> = None;
        let mut before = 0.0;
        for w in self.0.windows(2) {
            let at = foot(p, w[0], w[1]);
            let distance = p.distance(at);
            if best.is_none_or(|b| distance < b.distance) {
                best = Some(Nearest { at, distance, along: before + w[0].distance(at) });
            }
            before += w[0].distance(w[1]);
        }
        best
    }

    /// The pieces between cuts at lengths `at` along the line, which must rise; pieces share their ends.
    pub fn cut(&self, at: &[f64]) -> Vec<Self> {
        let mut pieces = vec![Vec::from_iter(self.0.first().copied())];
        let (mut before, mut next) = (0.0, 0);
        for w in self.0.windows(2) {
            let length = w[0].distance(w[1]);
            while next < at.len() && at[next] < before + length {
                let t = ((at[next] - before) / length).clamp(0.0, 1.0);
                let p = Point::new(w[0].x + t * (w[1].x - w[0].x), w[0].y + t * (w[1].y - w[0].y));
                pieces.last_mut().into_iter().for_each(|piece| piece.push(p));
                pieces.push(vec![p]);
                next += 1;
            }
            pieces.last_mut().into_iter().for_each(|piece| piece.push(w[1]));
            before += length;
        }
        pieces.into_iter().filter(|piece| piece.len() >= 2).map(Self).collect()
    }
}

impl Polygon {
    /// The rectangle from (0, 0) to (width, height).
    pub fn rectangle(width: f64, height: f64) -> Self {
        Self {
            outer: vec![
                Point::new(0.0, 0.0),
                Point::new(width, 0.0),
                Point::new(width, height),
                Point::new(0.0, height),
            ],
            holes: Vec::new(),
        }
    }

    /// Outer ring first, then the holes.
    pub fn rings(&self) -> impl Iterator<Item = &[Point]> {
        std::iter::once(self.outer.as_slice()).chain(self.holes.iter().map(Vec::as_slice))
    }

    pub fn bounds(&self) -> Option<Bounds> {
        Bounds::of(self.outer.iter().copied())
    }

    /// Area without the holes, ≥ 0, in the square of the plane's unit.
    pub fn area(&self) -> f64 {
        let holes: f64 = self.holes.iter().map(|ring| ring_area(ring).abs()).sum();
        (ring_area(&self.outer).abs() - holes).max(0.0)
    }

    /// Inside the outer ring and in no hole (even–odd rule).
    pub fn contains(&self, p: Point) -> bool {
        self.rings().filter(|ring| ring_contains(ring, p)).count() % 2 == 1
    }

    /// Spans of columns [from, to) whose pixel centres lie inside, for one pixel row, in order.
    pub fn row_spans(&self, row: usize, width: usize) -> Vec<(usize, usize)> {
        let y = row as f64 + 0.5;
        let mut crossings = Vec::new();
        for ring in self.rings() {
            for (a, b) in edges(ring) {
                if (a.y > y) != (b.y > y) {
                    crossings.push(a.x + (y - a.y) / (b.y - a.y) * (b.x - a.x));
                }
            }
        }
        crossings.sort_by(f64::total_cmp);
        let to_col = |x: f64| (x - 0.5).ceil().clamp(0.0, width as f64) as usize;
        crossings
            .chunks_exact(2)
            .map(|pair| (to_col(pair[0]), to_col(pair[1])))
            .filter(|(from, to)| from < to)
            .collect()
    }

    /// Distance from `p` to the nearest edge of any ring, infinite for an empty polygon.
    pub fn distance_to_edge(&self, p: Point) -> f64 {
        self.rings().flat_map(edges).map(|(a, b)| segment_distance(p, a, b)).fold(f64::INFINITY, f64::min)
    }

    /// Every vertex moved by `f`.
    pub fn map(&self, f: impl Fn(Point) -> Point) -> Self {
        Self {
            outer: self.outer.iter().map(|p| f(*p)).collect(),
            holes: self.holes.iter().map(|ring| ring.iter().map(|p| f(*p)).collect()).collect(),
        }
    }
}

/// Consecutive vertices, the last joined to the first.
fn edges(ring: &[Point]) -> impl Iterator<Item = (Point, Point)> + '_ {
    (0..ring.len()).map(|i| (ring[i], ring[(i + 1) % ring.len()]))
}

/// Signed shoelace area.
fn ring_area(ring: &[Point]) -> f64 {
    0.5 * edges(ring).map(|(a, b)| a.x * b.y - b.x * a.y).sum::<f64>()
}

fn ring_contains(ring: &[Point], p: Point) -> bool {
    edges(ring)
        .filter(|(a, b)| (a.y > p.y) != (b.y > p.y) && p.x < a.x + (p.y - a.y) / (b.y - a.y) * (b.x - a.x))
        .count()
        % 2
        == 1
}

fn segment_distance(p: Point, a: Point, b: Point) -> f64 {
    p.distance(foot(p, a, b))
}

/// The point of the segment from `a` to `b` that is nearest to `p`.
fn foot(p: Point, a: Point, b: Point) -> Point {
    let (dx, dy) = (b.x - a.x, b.y - a.y);
    let squared = dx * dx + dy * dy;
    let t =
        if squared > 0.0 { (((p.x - a.x) * dx + (p.y - a.y) * dy) / squared).clamp(0.0, 1.0) } else { 0.0 };
    Point::new(a.x + t * dx, a.y + t * dy)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn ring() -> Polygon {
        Polygon {
            outer: Polygon::rectangle(10.0, 8.0).outer,
            holes: vec![vec![
                Point::new(2.0, 2.0),
                Point::new(5.0, 2.0),
                Point::new(5.0, 4.0),
                Point::new(2.0, 4.0),
            ]],
        }
    }

    #[test]
    fn holes_are_outside() {
        assert_eq!(ring().area(), 74.0);
        assert!(ring().contains(Point::new(1.0, 1.0)));
        assert!(!ring().contains(Point::new(3.0, 3.0)));
        assert_eq!(ring().distance_to_edge(Point::new(3.0, 3.0)), 1.0);
    }

    proptest! {
        #[test]
        fn row_spans_are_the_pixel_centres_inside(xs in prop::collection::vec((0.0..20.0f64, 0.0..20.0f64), 3..9)) {
            let polygon = Polygon { outer: xs.into_iter().map(|(x, y)| Point::new(x, y)).collect(), holes: vec![] };
            for row in 0..20 {
                let spans = polygon.row_spans(row, 20);
                for col in 0..20 {
                    let inside = polygon.contains(Point::new(col as f64 + 0.5, row as f64 + 0.5));
                    prop_assert_eq!(inside, spans.iter().any(|(a, b)| (*a..*b).contains(&col)));
                }
            }
        }
    }
}

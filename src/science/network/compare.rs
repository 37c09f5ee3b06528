//! Two networks of the same ground, reach by reach.

use crate::ground::{Method, Network, Point, Symbol};

use super::sources::{DERIVED, at, memory};

pub const METHOD: Method = Method {
    id: "network.agreement",
    name: "Agreement of two networks",
    question: "How much of one network does the other show too?",
    formula: "found = |{x ∈ other : d(x, this) ≤ t}| / |other|; confirmed = |{x ∈ this : d(x, other) ≤ t}| / |this|",
    symbols: &[
        Symbol {
            symbol: "d",
            meaning: "ground distance to the nearest channel of the other network",
            unit: "m",
        },
        Symbol { symbol: "t", meaning: "greatest distance at which a channel counts as the same", unit: "m" },
        Symbol {
            symbol: "|·|",
            meaning: "length of channel, sampled every quarter of t or finer",
            unit: "m",
        },
    ],
    assumptions: &["Both are drawn in one frame; a shift of the images counts as disagreement."],
    limits: &[
        "Both shares grow with t: state it. Neither network is truth.",
        "Channels that run nearer to each other than t are not told apart.",
        "Senses and orders are compared only where the two run within 60° of each other.",
    ],
    sources: &[
        memory(
            "heipke1997",
            "Heipke, C.; Mayer, H.; Wiedemann, C.; Jamet, O.",
            1997,
            "Evaluation of automatic road extraction",
            "International Archives of Photogrammetry and Remote Sensing 32, 151–160",
        ),
        at(DERIVED, "sense and order along the common length"),
    ],
};

/// Samples within a tolerance along a line.
const SAMPLES: f64 = 4.0;
/// Pieces and samples of one network at most; longer ones are sampled more sparsely.
const MOST: f64 = 4e6;
/// cos 60°: channels that cross at more are not compared in sense and order.
const ALONG: f64 = 0.5;

/// How much of one network the other finds, by length.
#[derive(Clone, Debug, PartialEq)]
pub struct Agreement {
    /// Greatest distance at which a channel counts as the same, in the unit of the raster's place.
    pub tolerance: f64,
    /// Share of the other network's length that lies within the tolerance of this one.
    pub found: f64,
    /// Share of this network's length that lies within the tolerance of the other.
    pub confirmed: f64,
    /// Mean distance where both are found.
    pub mean_distance: f64,
    /// Share of the common length on which the senses agree, where both tell one.
    pub same_sense: Option<f64>,
    /// Share of the common length on which Strahler orders agree, where both have one.
    pub same_order: Option<f64>,
    /// Junctions of the other, those found within the tolerance, and junctions of this one.
    pub junctions: [usize; 3],
    /// Length of the other and of this one.
    pub lengths: [f64; 2],
}

/// Compares two networks in one pixel frame. `distance` is the ground distance of two near pixels; `tolerance` is in
/// its unit. Shares of an empty network are 0.
pub fn compare(
    this: &Network,
    other: &Network,
    tolerance: f64,
    distance: impl Fn(Point, Point) -> f64,
) -> Agreement {
    let lengths = [other.length(), this.length()];
    let junctions = |n: &Network| n.junctions().iter().map(|j| n.nodes[*j].at).collect::<Vec<_>>();
    let (of_other, of_this) = (junctions(other), junctions(this));
    let mut agreement = Agreement {
        tolerance,
        found: 0.0,
        confirmed: 0.0,
        mean_distance: 0.0,
        same_sense: None,
        same_order: None,
        junctions: [of_other.len(), 0, of_this.len()],
        lengths,
    };
    let Some((finest, pixel)) = pixel_sizes(&[this, other], &distance) else { return agreement };
    let radius = tolerance / finest;
    if !(tolerance > 0.0 && radius > 0.0 && radius.is_finite()) {
        return agreement;
    }
    let (on_this, on_other) = (Pieces::of(this, radius), Pieces::of(other, radius));
    let found = on_this.matched(other, &on_other, tolerance, pixel, &distance);
    let confirmed = on_other.matched(this, &on_this, tolerance, pixel, &distance);
    agreement.found = share(found.near, found.length).unwrap_or(0.0);
    agreement.confirmed = share(confirmed.near, confirmed.length).unwrap_or(0.0);
    agreement.mean_distance = share(found.away + confirmed.away, found.near + confirmed.near).unwrap_or(0.0);
    agreement.same_sense = share(found.same_sense, found.both_sense);
    agreement.same_order = share(found.same_order, found.both_order);
    let (places, reach) = (Buckets::of(of_this.iter().copied(), radius), radius);
    let is_found = |at: &&Point| places.around(**at, reach).any(|i| distance(**at, of_this[i]) <= tolerance);
    agreement.junctions[1] = of_other.iter().filter(is_found).count();
    agreement
}

fn share(part: f64, whole: f64) -> Option<f64> {
    (whole > 0.0).then(|| part / whole)
}

/// The least ground size of a pixel over the networks' bounds, and the size of one column and one row in their
/// middle; `None` for no nodes or pixels without size.
fn pixel_sizes(networks: &[&Network], distance: &impl Fn(Point, Point) -> f64) -> Option<(f64, [f64; 2])> {
    let nodes = networks.iter().flat_map(|n| n.nodes.iter().map(|node| node.at));
    let bounds = crate::ground::Bounds::of(nodes)?;
    let (low, high, middle) = (bounds.min, bounds.max, bounds.centre());
    let size = |p: Point| [Point::new(p.x + 1.0, p.y), Point::new(p.x, p.y + 1.0)].map(|q| distance(p, q));
    let corners = [low, high, Point::new(low.x, high.y), Point::new(high.x, low.y)];
    let sizes = corners.into_iter().chain([middle]).flat_map(size);
    let finest = sizes.filter(|d| *d > 0.0).fold(f64::INFINITY, f64::min);
    finest.is_finite().then(|| (finest, size(middle)))
}

/// Points by square cells, sorted by row and column.
struct Buckets {
    sorted: Vec<(i64, i64, usize)>,
}

impl Buckets {
    fn of(points: impl Iterator<Item = Point>, side: f64) -> Self {
        let place = |(i, p): (usize, Point)| (cell(p.y, side), cell(p.x, side), i);
        let mut sorted: Vec<_> = points.enumerate().map(place).collect();
        sorted.sort_unstable();
        Self { sorted }
    }

    /// Indices of the points in the cell of `p` and its eight neighbours.
    fn around(&self, p: Point, side: f64) -> impl Iterator<Item = usize> {
        let (row, col) = (cell(p.y, side), cell(p.x, side));
        (row - 1..=row + 1).flat_map(move |row| {
            let first = self.sorted.partition_point(|c| (c.0, c.1) < (row, col - 1));
            let own = self.sorted[first..].iter().take_while(move |c| c.0 == row && c.1 <= col + 1);
            own.map(|c| c.2)
        })
    }
}

fn cell(x: f64, side: f64) -> i64 {
    (x / side).floor() as i64
}

/// A straight piece of a reach, no longer than a part of the tolerance.
#[derive(Clone, Copy)]
struct Piece {
    a: Point,
    b: Point,
    reach: usize,
    /// Its share of the reach's length on the ground.
    length: f64,
}

/// The pieces of a network, and by cell those whose middle lies there.
struct Pieces<'a> {
    network: &'a Network,
    all: Vec<Piece>,
    middles: Buckets,
    /// Side of a cell: the tolerance and half a piece, in pixels.
    side: f64,
}

/// Lengths of a network by how another meets them.
#[derive(Default)]
struct Matched {
    length: f64,
    near: f64,
    /// Length × distance.
    away: f64,
    both_sense: f64,
    same_sense: f64,
    both_order: f64,
    same_order: f64,
}

impl<'a> Pieces<'a> {
    fn of(network: &'a Network, radius: f64) -> Self {
        let all: f64 = network.reaches.iter().map(|r| r.line.length()).sum();
        let longest = (radius / SAMPLES).max(all / MOST);
        let mut pieces = Vec::new();
        for (index, reach) in network.reaches.iter().enumerate() {
            let on_ground = reach.length / reach.line.length();
            for pair in reach.line.0.windows(2) {
                let (a, b) = (pair[0], pair[1]);
                let parts = (a.distance(b) / longest).ceil().max(1.0);
                if !parts.is_finite() {
                    continue;
                }
                let along = |k: f64| Point::new(a.x + (b.x - a.x) * k / parts, a.y + (b.y - a.y) * k / parts);
                let length = a.distance(b) / parts * on_ground;
                if !length.is_finite() {
                    continue;
                }
                let piece =
                    |k: usize| Piece { a: along(k as f64), b: along(k as f64 + 1.0), reach: index, length };
                pieces.extend((0..parts as usize).map(piece));
            }
        }
        let side = radius + 0.5 * longest;
        let middles = Buckets::of(pieces.iter().map(Piece::middle), side);
        Self { network, all: pieces, middles, side }
    }

    /// How the length of `network`, cut into `samples`, is met by these pieces.
    fn matched(
        &self,
        network: &Network,
        samples: &Pieces,
        tolerance: f64,
        pixel: [f64; 2],
        distance: &impl Fn(Point, Point) -> f64,
    ) -> Matched {
        let mut sums = Matched::default();
        for sample in &samples.all {
            let at = sample.middle();
            let length = sample.length;
            sums.length += length;
            let squared = |p: Point| ((p.x - at.x) * pixel[0]).powi(2) + ((p.y - at.y) * pixel[1]).powi(2);
            let near = self
                .middles
                .around(at, self.side)
                .map(|i| (squared(self.all[i].nearest(at)), i))
                .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
            let Some((_, index)) = near else { continue };
            let away = distance(at, self.all[index].nearest(at));
            if away.is_nan() || away > tolerance {
                continue;
            }
            sums.near += length;
            sums.away += length * away;
            let piece = &self.all[index];
            let cos = sample.cos_to(piece);
            if cos.abs() < ALONG {
                continue;
            }
            let (one, two) = (&network.reaches[sample.reach], &self.network.reaches[piece.reach]);
            let (p, q) = (one.sense.probability(), two.sense.probability());
            if p != 0.5 && q != 0.5 {
                sums.both_sense += length;
                // The more likely sense of each, along its line or against it.
                let agree = (cos > 0.0) == ((p > 0.5) == (q > 0.5));
                sums.same_sense += if agree { length } else { 0.0 };
            }
            if let (Some(p), Some(q)) = (one.order, two.order) {
                sums.both_order += length;
                sums.same_order += if p.strahler == q.strahler { length } else { 0.0 };
            }
        }
        sums
    }
}

impl Piece {
    fn middle(&self) -> Point {
        Point::new(0.5 * (self.a.x + self.b.x), 0.5 * (self.a.y + self.b.y))
    }

    /// The nearest point of the piece, in pixels: pieces are short, so that unequal pixels hardly matter.
    fn nearest(&self, p: Point) -> Point {
        let (dx, dy) = (self.b.x - self.a.x, self.b.y - self.a.y);
        let squared = dx * dx + dy * dy;
        let t = ((p.x - self.a.x) * dx + (p.y - self.a.y) * dy) / squared;
        let t = if squared > 0.0 { t.clamp(0.0, 1.0) } else { 0.0 };
        Point::new(self.a.x + t * dx, self.a.y + t * dy)
    }

    fn cos_to(&self, other: &Self) -> f64 {
        let (ax, ay) = (self.b.x - self.a.x, self.b.y - self.a.y);
        let (bx, by) = (other.b.x - other.a.x, other.b.y - other.a.y);
        let size = ax.hypot(ay) * bx.hypot(by);
        if size > 0.0 { (ax * bx + ay * by) / size } else { 0.0 }
    }
}

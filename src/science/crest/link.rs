//! Crest points linked to chains: from the strongest on, along the crest, down to the lower threshold.

use crate::ground::{Method, Point, Read, Source, Stopped, Symbol, Work};

use super::candidates::Crossing;
use super::floor::Thresholds;

/// The record of linking, joining and pruning.
pub static METHOD: Method = Method {
    id: "crest.linking",
    name: "Linking, bridging and pruning of crest lines",
    question: "Which crest points belong to one crest?",
    formula: "next point: least d + β + ½ γ among those within 2.6 px, β ≤ 60°, γ ≤ 60°;  bridge: least d (3 − cos γ₁ − cos γ₂) with d ≤ 5σ and γ₁, γ₂ ≤ 40° (any turn up to 120° for d ≤ 2σ)",
    symbols: &[
        Symbol { symbol: "d", meaning: "distance", unit: "px" },
        Symbol { symbol: "β", meaning: "angle between the two normals", unit: "rad" },
        Symbol { symbol: "γ", meaning: "angle between the way there and the direction walked", unit: "rad" },
        Symbol { symbol: "σ", meaning: "scale of the derivatives", unit: "px" },
    ],
    assumptions: &["a crest keeps its bright side on one hand, so slip faces join head to tail only"],
    limits: &[
        "branches shorter than 4σ are pruned, isolated lines shorter than the least length are dropped",
        "a crest that fades over more than the bridge is two lines with free ends",
    ],
    sources: &[
        Source {
            key: "steger1998",
            authors: "Steger, C.",
            year: 1998,
            title: "An unbiased detector of curvilinear structures",
            published: "IEEE Transactions on Pattern Analysis and Machine Intelligence 20, 113",
            locator: "linking",
            read: Read::Memory,
        },
        Source {
            key: "douglas1973",
            authors: "Douglas, D. H.; Peucker, T. K.",
            year: 1973,
            title: "Algorithms for the reduction of the number of points required to represent a digitized line or its caricature",
            published: "Cartographica 10, 112",
            locator: "simplification",
            read: Read::Memory,
        },
    ],
};

/// Farthest next point, pixels.
const REACH: f64 = 2.6;

/// Cosine of the greatest turn from point to point.
const TURN: f64 = 0.5;

/// A point of a chain. Bridges have no points of their own.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Vertex {
    pub at: Point,
    pub strength: f64,
    /// Whether the way from the point before is a bridge.
    pub bridged: bool,
}

/// Where a chain's end has run onto another chain.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Hit {
    pub chain: usize,
    pub at: Point,
}

/// A linked crest. For slip faces the bright side is always on the same hand.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Chain {
    pub points: Vec<Vertex>,
    /// At the first and the last point.
    pub hits: [Option<Hit>; 2],
    pub closed: bool,
    /// Whether its strongest point passes the starting threshold. Others count only where they go on from one
    /// that does.
    pub strong: bool,
}

impl Chain {
    pub fn length(&self) -> f64 {
        self.points.windows(2).map(|w| w[0].at.distance(w[1].at)).sum()
    }
}

/// Crest points found by pixel.
pub(super) struct Index<'a> {
    points: &'a [Crossing],
    /// First point of each row.
    rows: Vec<usize>,
}

impl<'a> Index<'a> {
    /// Of points in row order.
    pub fn new(points: &'a [Crossing], height: usize) -> Self {
        let mut rows = vec![0usize; height + 1];
        for p in points {
            rows[p.row as usize + 1] += 1;
        }
        for row in 0..height {
            rows[row + 1] += rows[row];
        }
        Self { points, rows }
    }

    /// Points whose pixels lie within `reach` pixels of a pixel, in row order.
    pub fn around(&self, col: u32, row: u32, reach: u32) -> impl Iterator<Item = usize> + '_ {
        let end = (self.rows.len() as u32 - 1).min(row + reach + 1);
        (row.saturating_sub(reach)..end).flat_map(move |r| {
            let line = &self.points[self.rows[r as usize]..self.rows[r as usize + 1]];
            let from = line.partition_point(|p| p.col < col.saturating_sub(reach));
            let to = line.partition_point(|p| p.col <= col + reach);
            self.rows[r as usize] + from..self.rows[r as usize] + to
        })
    }
}

/// The chains, and for every point the chain that holds it.
pub(super) struct Linked {
    pub chains: Vec<Chain>,
    pub owner: Vec<Option<usize>>,
}

/// Links points (all of one sense, above the lower threshold, in row order).
pub(super) fn link(
    points: &[Crossing],
    index: &Index<'_>,
    thresholds: &Thresholds,
    slip_face: bool,
    work: &Work,
) -> Result<Linked, Stopped> {
    let mut seeds: Vec<usize> = (0..points.len()).collect();
    seeds.sort_by(|a, b| points[*b].strength.total_cmp(&points[*a].strength).then(a.cmp(b)));
    let mut walker = Walker { points, index, slip_face, owner: vec![None; points.len()], current: 0 };
    let mut chains: Vec<Chain> = Vec::new();
    for (n, seed) in seeds.into_iter().enumerate() {
        if n % 256 == 0 {
            work.advance(0)?;
        }
        if walker.owner[seed].is_some() {
            continue;
        }
        walker.current = chains.len();
        walker.owner[seed] = Some(walker.current);
        let ahead = walker.walk(seed, 1.0);
        let back = if ahead.closed { Walk::default() } else { walker.walk(seed, -1.0) };
        let way: Vec<usize> =
            back.way.iter().rev().copied().chain([seed]).chain(ahead.way.iter().copied()).collect();
        walker.absorb(&way);
        let closed = ahead.closed || back.closed;
        let mut vertices: Vec<Vertex> = way
            .iter()
            .map(|i| Vertex { at: points[*i].at, strength: points[*i].strength, bridged: false })
            .collect();
        if closed && let Some(first) = vertices.first().copied() {
            vertices.push(first);
        }
        let strong = points[seed].strength >= thresholds.high;
        chains.push(Chain { points: vertices, hits: [back.hit, ahead.hit], closed, strong });
    }
    Ok(Linked { chains, owner: walker.owner })
}

#[derive(Default)]
struct Walk {
    way: Vec<usize>,
    hit: Option<Hit>,
    closed: bool,
}

struct Walker<'a> {
    points: &'a [Crossing],
    index: &'a Index<'a>,
    slip_face: bool,
    owner: Vec<Option<usize>>,
    current: usize,
}

impl Walker<'_> {
    /// From a seed along its crest, in the sense of the tangent (times `sense`).
    fn walk(&mut self, seed: usize, sense: f64) -> Walk {
        let mut walk = Walk::default();
        let mut here = seed;
        let n = self.points[seed].normal;
        let mut direction = [sense * n[1], -sense * n[0]];
        while let Some(next) = self.next(here, direction, seed, walk.way.len()) {
            let (p, q) = (&self.points[here], &self.points[next]);
            if next == seed {
                walk.closed = true;
                break;
            }
            walk.way.push(next);
            if let Some(chain) = self.owner[next] {
                walk.hit = Some(Hit { chain, at: q.at });
                break;
            }
            self.owner[next] = Some(self.current);
            let d = p.at.distance(q.at);
            let way = [(q.at.x - p.at.x) / d, (q.at.y - p.at.y) / d];
            let mut tangent = [q.normal[1], -q.normal[0]];
            if tangent[0] * way[0] + tangent[1] * way[1] < 0.0 {
                tangent = [-tangent[0], -tangent[1]];
            }
            let sum = [tangent[0] + 0.5 * way[0], tangent[1] + 0.5 * way[1]];
            let length = sum[0].hypot(sum[1]);
            direction = [sum[0] / length, sum[1] / length];
            here = next;
        }
        walk
    }

    /// The best next point: least d + β + ½ γ.
    fn next(&self, here: usize, direction: [f64; 2], seed: usize, steps: usize) -> Option<usize> {
        let p = &self.points[here];
        let mut best: Option<(f64, usize)> = None;
        for i in self.index.around(p.col, p.row, 3) {
            let q = &self.points[i];
            let own = self.owner[i] == Some(self.current);
            if i == here || (own && !(i == seed && steps >= 8)) {
                continue;
            }
            let (dx, dy) = (q.at.x - p.at.x, q.at.y - p.at.y);
            let d = dx.hypot(dy);
            let ahead = (dx * direction[0] + dy * direction[1]) / d;
            let mut alike = p.normal[0] * q.normal[0] + p.normal[1] * q.normal[1];
            if !self.slip_face {
                alike = alike.abs();
            }
            if !(d > 0.3 && d <= REACH && ahead > TURN && alike > TURN) {
                continue;
            }
            let cost = d + alike.min(1.0).acos() + 0.5 * ahead.min(1.0).acos();
            if best.is_none_or(|(least, _)| cost < least) {
                best = Some((cost, i));
            }
        }
        best.map(|(_, i)| i)
    }

    /// Points beside the way belong to it, so that no second line starts from them.
    fn absorb(&mut self, way: &[usize]) {
        for i in way {
            let p = self.points[*i];
            for j in self.index.around(p.col, p.row, 2) {
                let q = &self.points[j];
                let alike = (p.normal[0] * q.normal[0] + p.normal[1] * q.normal[1]).abs();
                if self.owner[j].is_none() && p.at.distance(q.at) < 1.6 && alike > 0.7 {
                    self.owner[j] = Some(self.current);
                }
            }
        }
    }
}

//! The lines of a network made ready for a scale: simplified to what the screen can show, ranked so that the
//! smallest can be left out when there are too many.

use std::sync::Arc;

use crate::ground::{Bounds, Network, Point, Reach, ReachOrigin};
use crate::study::NetworkFinding;

/// How far a simplified line may lie from the true one, screen points.
pub const SLACK: f64 = 0.6;
/// Basins smaller than this on the screen have no outline.
const LEAST_BASIN: f64 = 14.0;

/// A network as it is drawn at one scale.
pub struct Chart {
    pub finding: Arc<NetworkFinding>,
    /// Nodes.
    pub heads: Vec<usize>,
    pub outlets: Vec<usize>,
    /// Ranks and boxes of the reaches.
    ranks: Vec<u32>,
    boxes: Vec<Bounds>,
    /// Power of two of the scale the lines are for.
    level: i32,
    /// A reach that was never in sight at this scale has none yet.
    lines: Vec<Option<Line>>,
    chosen: Vec<usize>,
    divides: Vec<(Bounds, Vec<Point>)>,
}

/// A reach, simplified.
#[derive(Clone, Debug, PartialEq)]
pub struct Line {
    /// The Strahler order, or a stand-in from the width where there is none.
    pub rank: u32,
    pub points: Vec<Point>,
    pub origin: ReachOrigin,
    pub confidence: f64,
    /// Probability that the water went from the first to the last point.
    pub sense: f64,
}

impl Chart {
    pub fn new(finding: Arc<NetworkFinding>) -> Self {
        let network = &finding.network;
        let (heads, outlets) = (network.heads(), network.outlets());
        Self {
            heads,
            outlets,
            ranks: ranks(network),
            boxes: network.reaches.iter().map(|r| bounds(&r.line.0)).collect(),
            level: i32::MIN,
            lines: Vec::new(),
            chosen: Vec::new(),
            divides: Vec::new(),
            finding,
        }
    }

    /// Makes it ready for `scale` screen points a pixel.
    pub fn fit(&mut self, scale: f64) {
        let level = scale.max(f64::MIN_POSITIVE).log2().ceil() as i32;
        if self.level == level {
            return;
        }
        self.level = level;
        self.lines = vec![None; self.boxes.len()];
        let least = LEAST_BASIN / 2f64.powi(level);
        let basins = self.finding.drainage.iter().flat_map(|d| &d.basins);
        self.divides = basins
            .flat_map(|basin| basin.outline.rings())
            .map(|ring| (bounds(ring), ring))
            .filter(|(b, _)| b.width().max(b.height()) >= least)
            .map(|(b, ring)| (b, simplified(ring, self.slack())))
            .collect();
    }

    fn slack(&self) -> f64 {
        SLACK / 2f64.powi(self.level)
    }

    /// Chooses the lines in sight; the lowest ranks are left out as long as the others have about `most` points.
    pub fn choose(&mut self, seen: Bounds, most: usize) {
        let in_sight: Vec<usize> = (0..self.boxes.len()).filter(|i| meet(&self.boxes[*i], &seen)).collect();
        let highest = in_sight.iter().map(|i| self.ranks[*i]).max().unwrap_or(0) as usize;
        let mut points = vec![0usize; highest + 1];
        in_sight.iter().for_each(|i| points[self.ranks[*i] as usize] += self.about(*i));
        let (mut least, mut sum) = (highest, 0);
        for rank in (0..=highest).rev() {
            sum += points[rank];
            if sum > most && rank < highest {
                break;
            }
            least = rank;
        }
        self.chosen = in_sight.into_iter().filter(|i| self.ranks[*i] as usize >= least).collect();
        for at in 0..self.chosen.len() {
            let i = self.chosen[at];
            if self.lines[i].is_none() {
                self.lines[i] = Some(self.line(i));
            }
        }
    }

    /// About how many points a reach will have: one a few points of screen, and never more than it has.
    fn about(&self, i: usize) -> usize {
        let b = &self.boxes[i];
        let on_screen = (b.width() + b.height()) * 2f64.powi(self.level);
        (2 + (0.2 * on_screen) as usize).min(self.finding.network.reaches[i].line.0.len())
    }

    fn line(&self, i: usize) -> Line {
        let reach = &self.finding.network.reaches[i];
        Line {
            rank: self.ranks[i],
            points: simplified(&reach.line.0, self.slack()),
            origin: reach.origin,
            confidence: reach.confidence.clamp(0.0, 1.0),
            sense: reach.sense.probability(),
        }
    }

    pub fn chosen(&self) -> impl Iterator<Item = &Line> {
        self.chosen.iter().filter_map(|i| self.lines[*i].as_ref())
    }

    pub fn divides_in(&self, seen: Bounds) -> impl Iterator<Item = &[Point]> {
        self.divides.iter().filter(move |(b, _)| meet(b, &seen)).map(|(_, ring)| ring.as_slice())
    }
}

/// Strahler orders; without them by width, each rank twice as wide as the one before.
fn ranks(network: &Network) -> Vec<u32> {
    let width = |r: &Reach| r.width.map(|w| w.mean).filter(|w| *w > 0.0);
    let narrowest = network.reaches.iter().filter_map(width).fold(f64::INFINITY, f64::min);
    let rank = |r: &Reach| match (r.order, width(r)) {
        (Some(order), _) => order.strahler,
        (None, Some(w)) => 1 + (w / narrowest).log2().clamp(0.0, 6.0) as u32,
        (None, None) => 2,
    };
    network.reaches.iter().map(rank).collect()
}

pub fn bounds(line: &[Point]) -> Bounds {
    let far = Point::new(f64::INFINITY, f64::INFINITY);
    Bounds::of(line.iter().copied()).unwrap_or(Bounds { min: far, max: far })
}

pub fn meet(a: &Bounds, b: &Bounds) -> bool {
    a.min.x <= b.max.x && a.max.x >= b.min.x && a.min.y <= b.max.y && a.max.y >= b.min.y
}

/// The line with as few of its points as keep it within `slack` (Ramer 1972; Douglas & Peucker 1973).
pub fn simplified(line: &[Point], slack: f64) -> Vec<Point> {
    if line.len() <= 2 {
        return line.to_vec();
    }
    let mut kept = vec![false; line.len()];
    let last = line.len() - 1;
    (kept[0], kept[last]) = (true, true);
    let mut waiting = vec![(0, last)];
    while let Some((from, to)) = waiting.pop() {
        let farthest = (from + 1..to)
            .map(|i| (i, distance(line[i], line[from], line[to])))
            .max_by(|a, b| a.1.total_cmp(&b.1));
        if let Some((at, _)) = farthest.filter(|(_, d)| *d > slack) {
            kept[at] = true;
            waiting.extend([(from, at), (at, to)]);
        }
    }
    line.iter().zip(kept).filter_map(|(p, kept)| kept.then_some(*p)).collect()
}

/// Of `p` from the segment.
fn distance(p: Point, a: Point, b: Point) -> f64 {
    let (dx, dy) = (b.x - a.x, b.y - a.y);
    let squared = dx * dx + dy * dy;
    let t =
        if squared > 0.0 { (((p.x - a.x) * dx + (p.y - a.y) * dy) / squared).clamp(0.0, 1.0) } else { 0.0 };
    Point::new(a.x + t * dx, a.y + t * dy).distance(p)
}

#[cfg(test)]
mod tests {
    use super::{distance, simplified};
    use crate::ground::Point;

    #[test]
    fn a_simplified_line_stays_within_its_slack_and_keeps_its_ends() {
        let wave: Vec<Point> =
            (0..400).map(|i| Point::new(f64::from(i), 20.0 * (f64::from(i) * 0.05).sin())).collect();
        let few = simplified(&wave, 0.5);
        assert!(few.len() < 80 && few.len() > 10, "{} points", few.len());
        assert_eq!((few[0], few[few.len() - 1]), (wave[0], wave[399]));
        for p in &wave {
            let off = few.windows(2).map(|w| distance(*p, w[0], w[1])).fold(f64::INFINITY, f64::min);
            assert!(off <= 0.5 + 1e-9, "{p:?} is {off} away");
        }
        assert_eq!(simplified(&wave, 1e9).len(), 2);
    }
}

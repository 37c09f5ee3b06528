//! Channels followed up or down from a node, over a straight distance.

use std::cmp::Ordering;

use crate::ground::{LocalFrame, Network, Point};
use crate::numeric::eigen::Symmetric2;

use super::path::area_at_end;

/// Reaches followed for one branch at most.
const MOST_REACHES: usize = 64;
/// A branch that needs more way than so many chords to get away is not followed further.
const MOST_WAY: f64 = 8.0;

/// A network with its lists of neighbours.
pub(super) struct Graph<'a> {
    pub network: &'a Network,
    pub into: Vec<Vec<usize>>,
    pub out: Vec<Vec<usize>>,
}

/// A channel from a node to where it is one chord away from it.
pub(super) struct Branch {
    /// (east, north) from the node, the node first.
    line: Vec<(f64, f64)>,
    /// Straight distance asked for, and whether the channel got there.
    chord: f64,
    is_whole: bool,
    /// Fall over length within the chord, along its first reach; `None` without elevations.
    pub slope: Option<f64>,
}

impl<'a> Graph<'a> {
    pub fn of(network: &'a Network) -> Self {
        Self { network, into: network.incoming(), out: network.outgoing() }
    }

    /// The greater area first, then the higher order, then the longer reach.
    pub fn stronger(&self, a: usize, b: usize) -> Ordering {
        let key = |r: usize| {
            let reach = &self.network.reaches[r];
            let area = area_at_end(self.network, r, self.out[reach.to].is_empty()).unwrap_or(0.0);
            // Steps between cells often add up to the same length but for the last digit.
            (area, reach.order.map_or(0, |o| o.strahler), reach.length as f32)
        };
        let (a_key, b_key) = (key(a), key(b));
        let by_area = b_key.0.total_cmp(&a_key.0);
        by_area.then(b_key.1.cmp(&a_key.1)).then(b_key.2.total_cmp(&a_key.2)).then(a.cmp(&b))
    }

    /// The branch that comes in at `node` by `reach`.
    pub fn up(&self, node: usize, reach: usize, chord: f64, frame: &LocalFrame) -> Branch {
        let mut branch = self.follow(node, reach, chord, frame, true);
        branch.slope = self.slope(reach, chord);
        branch
    }

    /// The channel that leaves `node` by `reach`.
    pub fn down(&self, node: usize, reach: usize, chord: f64, frame: &LocalFrame) -> Branch {
        self.follow(node, reach, chord, frame, false)
    }

    fn follow(&self, node: usize, first: usize, chord: f64, frame: &LocalFrame, up: bool) -> Branch {
        let origin = self.network.nodes[node].at;
        let mut branch = Branch { line: vec![(0.0, 0.0)], chord, is_whole: false, slope: None };
        let mut way = 0.0;
        let mut next = Some(first);
        for _ in 0..MOST_REACHES {
            let Some(reach) = next.map(|r| &self.network.reaches[r]) else { break };
            let points: &mut dyn Iterator<Item = &Point> =
                if up { &mut reach.line.0.iter().rev() } else { &mut reach.line.0.iter() };
            for p in points {
                let to = frame.ground(p.x - origin.x, p.y - origin.y);
                let from = branch.line[branch.line.len() - 1];
                way += (to.0 - from.0).hypot(to.1 - from.1);
                branch.line.push(to);
                // A channel exactly one chord long is whole, whatever the last digit says.
                if to.0.hypot(to.1) >= chord * (1.0 - 1e-9) {
                    branch.is_whole = true;
                    return branch;
                }
                if way > MOST_WAY * chord {
                    return branch;
                }
            }
            let (end, list) = if up { (reach.from, &self.into) } else { (reach.to, &self.out) };
            next = list[end].iter().copied().min_by(|a, b| self.stronger(*a, *b));
        }
        branch
    }

    /// Fall over length of the lowest `chord` of a reach.
    fn slope(&self, reach: usize, chord: f64) -> Option<f64> {
        let reach = &self.network.reaches[reach];
        let low = self.network.nodes[reach.to].elevation_m.or(reach.stations.last()?.elevation_m)?;
        let top = reach.stations.iter().rev().find(|s| reach.length - s.along >= chord);
        let top = top.or(reach.stations.first())?;
        let run = reach.length - top.along;
        (run > 0.0).then_some((top.elevation_m? - low) / run).filter(|s| s.is_finite())
    }
}

impl Branch {
    /// Unit vector (east, north) of the line of least squares through the channel from `skipped` chords to one
    /// chord away, pointing away from the node; `None` when the channel is shorter.
    pub fn direction(&self, skipped: f64) -> Option<(f64, f64)> {
        if !self.is_whole {
            return None;
        }
        // The last crossing of the inner circle begins the stretch, so that it is one piece.
        let inner = skipped * self.chord;
        let begin = self.line.iter().rposition(|p| p.0.hypot(p.1) <= inner)?;
        let mut sums = [0.0; 6];
        for pair in self.line[begin..].windows(2) {
            let (a, b) = (cut(pair[0], pair[1], inner, true), cut(pair[1], pair[0], self.chord, false));
            let length = (b.0 - a.0).hypot(b.1 - a.1);
            // Exact moments of a segment: its ends at 1/6 and its middle at 4/6.
            let middle = (0.5 * (a.0 + b.0), 0.5 * (a.1 + b.1));
            for (p, share) in [(a, 1.0 / 6.0), (middle, 4.0 / 6.0), (b, 1.0 / 6.0)] {
                let w = share * length;
                let terms = [1.0, p.0, p.1, p.0 * p.0, p.0 * p.1, p.1 * p.1];
                sums.iter_mut().zip(terms).for_each(|(sum, term)| *sum += w * term);
            }
        }
        let [w, x, y, xx, xy, yy] = sums;
        if !(w > 0.0 && w.is_finite()) {
            return None;
        }
        let (mx, my) = (x / w, y / w);
        let spread = Symmetric2 { xx: xx / w - mx * mx, xy: xy / w - mx * my, yy: yy / w - my * my };
        let (x, y) = spread.major();
        Some(if x * mx + y * my >= 0.0 { (x, y) } else { (-x, -y) })
    }
}

/// `p`, moved along the segment to `other` onto the circle of radius `r` when it lies within (`inside`) or beyond
/// it.
fn cut(p: (f64, f64), other: (f64, f64), r: f64, inside: bool) -> (f64, f64) {
    let off = p.0.hypot(p.1) - r;
    if (inside && off >= 0.0) || (!inside && off <= 0.0) {
        return p;
    }
    // |p + t d|² = r²
    let d = (other.0 - p.0, other.1 - p.1);
    let (a, b, c) = (d.0 * d.0 + d.1 * d.1, p.0 * d.0 + p.1 * d.1, p.0 * p.0 + p.1 * p.1 - r * r);
    let root = (b * b - a * c).max(0.0).sqrt();
    let t = if a > 0.0 { (if inside { root - b } else { -root - b }) / a } else { 0.0 };
    let t = t.clamp(0.0, 1.0);
    (p.0 + t * d.0, p.1 + t * d.1)
}

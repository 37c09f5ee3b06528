//! A network with reaches taken out.

use super::{Network, NetworkNode, Reach, ReachOrigin};
use crate::ground::{Point, Polyline};

impl Network {
    /// The network without some reaches: nodes nobody needs go, and reaches that then meet two by two become one.
    pub fn without(&self, gone: &[usize]) -> Self {
        let kept = self.reaches.iter().enumerate().filter(|(i, _)| !gone.contains(i)).map(|(_, r)| r.clone());
        Self { nodes: self.nodes.clone(), reaches: kept.collect() }.merged()
    }

    /// Reaches that meet two by two at a node become one, unless one was drawn and the other found; nodes
    /// without reaches go.
    pub fn merged(mut self) -> Self {
        let mut touching = vec![Vec::new(); self.nodes.len()];
        for (i, reach) in self.reaches.iter().enumerate() {
            touching[reach.from].push(i);
            touching[reach.to].push(i);
        }
        let mut alive = vec![true; self.reaches.len()];
        for node in 0..self.nodes.len() {
            let [a, b] = touching[node][..] else { continue };
            let alike = |r: &Reach| r.origin == ReachOrigin::Traced;
            if a == b || alike(&self.reaches[a]) != alike(&self.reaches[b]) {
                continue;
            }
            let first =
                if self.reaches[a].to == node { self.reaches[a].clone() } else { self.reaches[a].reversed() };
            let second = if self.reaches[b].from == node {
                self.reaches[b].clone()
            } else {
                self.reaches[b].reversed()
            };
            let end = second.to;
            self.reaches[a] = joined(first, second);
            alive[b] = false;
            for entry in touching[end].iter_mut().filter(|r| **r == b) {
                *entry = a;
            }
            touching[node].clear();
        }
        let mut keep = alive.iter();
        self.reaches.retain(|_| keep.next() == Some(&true));
        self.compacted()
    }

    /// Without nodes that no reach touches.
    pub(super) fn compacted(mut self) -> Self {
        let mut used = vec![false; self.nodes.len()];
        for reach in &self.reaches {
            (used[reach.from], used[reach.to]) = (true, true);
        }
        let mut new_index = vec![0; self.nodes.len()];
        let mut nodes: Vec<NetworkNode> = Vec::new();
        for (i, node) in self.nodes.iter().enumerate().filter(|(i, _)| used[*i]) {
            new_index[i] = nodes.len();
            nodes.push(*node);
        }
        for reach in &mut self.reaches {
            (reach.from, reach.to) = (new_index[reach.from], new_index[reach.to]);
        }
        self.nodes = nodes;
        self
    }

    /// The parts of its reaches that lie inside; cut reaches keep their properties, and end where they are cut.
    pub fn clipped(&self, inside: impl Fn(Point) -> bool) -> Self {
        let mut clipped = Self { nodes: self.nodes.clone(), reaches: Vec::new() };
        for reach in &self.reaches {
            let points = &reach.line.0;
            if points.iter().all(|p| inside(*p)) {
                clipped.reaches.push(reach.clone());
                continue;
            }
            for run in points.split(|p| !inside(*p)).filter(|run| run.len() >= 2) {
                let ends = [run[0], run[run.len() - 1]];
                let [from, to] = ends.map(|at| {
                    clipped.nodes.push(NetworkNode { at, elevation_m: None });
                    clipped.nodes.len() - 1
                });
                let line = Polyline(run.to_vec());
                let length = reach.length * line.length() / reach.line.length();
                let stations = reach.stations.iter().filter(|s| inside(s.at)).copied().collect();
                clipped.reaches.push(Reach { from, to, line, length, stations, ..reach.clone() });
            }
        }
        clipped.compacted()
    }

    /// The reach whose line passes nearest to a point, and how near; `None` without reaches.
    pub fn nearest_reach(&self, p: Point) -> Option<(usize, f64)> {
        let distances = self.reaches.iter().map(|r| r.line.nearest(p).map_or(f64::INFINITY, |n| n.distance));
        distances.enumerate().min_by(|a, b| a.1.total_cmp(&b.1))
    }
}

/// Two reaches end to end; a property that only one of them has is lost where it would mislead.
fn joined(mut a: Reach, b: Reach) -> Reach {
    let total = a.length + b.length;
    let share = if total > 0.0 { a.length / total } else { 0.5 };
    a.width = match (a.width, b.width) {
        (Some(x), Some(y)) => Some(super::Width {
            mean: share * x.mean + (1.0 - share) * y.mean,
            se: (share * x.se).hypot((1.0 - share) * y.se),
        }),
        (x, y) => x.or(y),
    };
    let shift = a.length;
    a.stations.extend(b.stations.iter().map(|s| super::Station { along: s.along + shift, ..*s }));
    a.line = Polyline(a.line.0.iter().chain(b.line.0.iter().skip(1)).copied().collect());
    a.length = total;
    a.to = b.to;
    a.confidence = a.confidence.min(b.confidence);
    // A bridge inside a found channel is part of it; a chain of bridges stays one.
    if a.origin != b.origin {
        a.origin = if a.origin == ReachOrigin::Bridged { b.origin } else { a.origin };
    }
    for e in b.sense.evidence {
        match a.sense.evidence.iter_mut().find(|known| known.kind == e.kind) {
            Some(known) => known.ln_odds += e.ln_odds,
            None => a.sense.evidence.push(e),
        }
    }
    a.order = if a.order == b.order { a.order } else { None };
    a
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::FlowSense;

    fn network(pairs: &[(usize, usize)], at: &[[f64; 2]]) -> Network {
        let nodes: Vec<_> =
            at.iter().map(|p| NetworkNode { at: Point::from(*p), elevation_m: None }).collect();
        let reach = |&(from, to): &(usize, usize)| {
            let line = Polyline(vec![nodes[from].at, nodes[to].at]);
            Reach { length: line.length(), ..Reach::drawn(from, to, line, ReachOrigin::Detected) }
        };
        Network { reaches: pairs.iter().map(reach).collect(), nodes }
    }

    #[test]
    fn taking_a_tributary_out_joins_the_trunk() {
        let n = network(&[(0, 2), (1, 2), (2, 3)], &[[0.0, 0.0], [5.0, 5.0], [5.0, 0.0], [9.0, 0.0]]);
        assert_eq!(n.nearest_reach(Point::new(5.5, 3.0)), Some((1, 0.5)));
        let left = n.without(&[1]);
        assert_eq!((left.reaches.len(), left.nodes.len()), (1, 3 - 1));
        assert_eq!(left.reaches[0].line.0.len(), 3);
        assert_eq!(left.reaches[0].length, 9.0);
        assert_eq!(left.reaches[0].sense, FlowSense::default());
    }

    #[test]
    fn a_ring_stays_a_ring() {
        let ring = network(&[(0, 1), (1, 2), (2, 0)], &[[0.0, 0.0], [4.0, 0.0], [0.0, 3.0]]).merged();
        assert_eq!((ring.loops(), ring.length()), (1, 12.0));
    }
}

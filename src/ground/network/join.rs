//! Channels drawn by hand set into a network: what was found beside a drawn channel gives way to it, and what
//! meets it is joined to it.

use super::{FlowSense, Network, NetworkNode, Reach, ReachOrigin};
use crate::ground::{Point, Polyline};

impl Reach {
    /// A reach of which only its line is known; its length is that of the line in the line's own plane.
    pub fn drawn(from: usize, to: usize, line: Polyline, origin: ReachOrigin) -> Self {
        Self {
            from,
            to,
            length: line.length(),
            line,
            sense: FlowSense::default(),
            order: None,
            width: None,
            stations: Vec::new(),
            origin,
            confidence: 1.0,
        }
    }
}

impl Network {
    /// The network with `lines` drawn into it. Ends within `tolerance` of one another, or of a drawn line, are
    /// joined; found channels that run within `tolerance` of a drawn line give way to it.
    pub fn with_drawn(self, lines: &[Polyline], tolerance: f64) -> Self {
        let lines: Vec<&Polyline> = lines.iter().filter(|l| l.0.len() >= 2).collect();
        if lines.is_empty() {
            return self;
        }
        let mut pieces: Vec<(Polyline, Option<Reach>)> =
            self.reaches.iter().flat_map(|reach| remainders(reach, &lines, tolerance)).collect();
        pieces.extend(lines.iter().map(|line| ((*line).clone(), None)));
        stitched(pieces, tolerance)
    }
}

/// What is left of a found reach beside the drawn lines; whole (with its properties) when none is near.
fn remainders(reach: &Reach, lines: &[&Polyline], tolerance: f64) -> Vec<(Polyline, Option<Reach>)> {
    let nearest = |p: Point| {
        let near = lines.iter().filter_map(|l| l.nearest(p));
        near.min_by(|a, b| a.distance.total_cmp(&b.distance))
            .map_or((f64::INFINITY, p), |n| (n.distance, n.at))
    };
    let points = &reach.line.0;
    let near: Vec<(f64, Point)> = points.iter().map(|p| nearest(*p)).collect();
    let mut left = Vec::new();
    let mut at = 0;
    while at < points.len() {
        if near[at].0 <= tolerance {
            at += 1;
            continue;
        }
        let start = at;
        while at < points.len() && near[at].0 > tolerance {
            at += 1;
        }
        // The ends that broke off reach to the drawn line.
        let mut line: Vec<Point> = points[start..at].to_vec();
        if start > 0 {
            line.insert(0, near[start - 1].1);
        }
        if at < points.len() {
            line.push(near[at].1);
        }
        let whole = start == 0 && at == points.len();
        if line.len() >= 2 {
            let line = Polyline(line);
            let mut piece = reach.clone();
            if !whole {
                piece.stations.retain(|s| nearest(s.at).0 > tolerance);
                piece.length = line.length();
            }
            left.push((line, Some(piece)));
        }
    }
    left
}

/// Pieces joined into a network: every line is cut where an end of another comes within the tolerance.
fn stitched(pieces: Vec<(Polyline, Option<Reach>)>, tolerance: f64) -> Network {
    let ends: Vec<Point> =
        pieces.iter().flat_map(|(line, _)| [line.0[0], line.0[line.0.len() - 1]]).collect();
    let mut network = Network::default();
    for (line, found) in pieces {
        let total = line.length();
        let mut cuts: Vec<f64> = Vec::new();
        for end in &ends {
            if let Some(n) = line.nearest(*end)
                && n.distance <= tolerance
                && n.along > tolerance
                && n.along < total - tolerance
            {
                cuts.push(n.along);
            }
        }
        cuts.sort_by(f64::total_cmp);
        cuts.dedup_by(|a, b| *a - *b <= tolerance);
        for part in line.cut(&cuts) {
            let (from, to) =
                (network.node_at(part.0[0], tolerance), network.node_at(part.0[part.0.len() - 1], tolerance));
            if from == to && part.length() <= 2.0 * tolerance {
                continue;
            }
            let mut reach = Reach::drawn(from, to, part, ReachOrigin::Traced);
            if let Some(found) = &found {
                let own = Reach { from, to, line: reach.line.clone(), length: reach.length, ..found.clone() };
                let on_it = |p: Point| own.line.nearest(p).is_some_and(|n| n.distance <= tolerance);
                let stations =
                    found.stations.iter().filter(|s| cuts.is_empty() || on_it(s.at)).copied().collect();
                reach = Reach { stations, ..own };
            }
            network.reaches.push(reach);
        }
    }
    network.compacted()
}

impl Network {
    /// The node within the tolerance, or a new one.
    fn node_at(&mut self, p: Point, tolerance: f64) -> usize {
        let near = (0..self.nodes.len()).map(|i| (i, self.nodes[i].at.distance(p)));
        let near = near.filter(|(_, d)| *d <= tolerance).min_by(|a, b| a.1.total_cmp(&b.1));
        near.map_or_else(
            || {
                self.nodes.push(NetworkNode { at: p, elevation_m: None });
                self.nodes.len() - 1
            },
            |(i, _)| i,
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn line(points: &[[f64; 2]]) -> Polyline {
        Polyline(points.iter().map(|p| Point::from(*p)).collect())
    }

    fn found(points: &[[f64; 2]]) -> Network {
        Network::default().with_drawn(&[line(points)], 1.0).detected()
    }

    impl Network {
        fn detected(mut self) -> Self {
            self.reaches.iter_mut().for_each(|r| r.origin = ReachOrigin::Detected);
            self
        }
    }

    #[test]
    fn a_drawn_tributary_joins_what_was_found() {
        let trunk: Vec<[f64; 2]> = (0..=20).map(|x| [f64::from(x), 0.0]).collect();
        let n = found(&trunk).with_drawn(&[line(&[[10.0, 8.0], [10.0, 0.4]])], 1.0);
        assert_eq!((n.reaches.len(), n.junctions().len()), (3, 1));
        let drawn: Vec<_> = n.reaches.iter().filter(|r| r.origin == ReachOrigin::Traced).collect();
        assert_eq!(drawn.len(), 1);
        crate::assert_close!(n.length(), 20.0 + 7.6, 0.5, "length of both");
    }

    #[test]
    fn a_drawn_line_replaces_the_found_one_under_it_and_keeps_what_branches_off() {
        let trunk: Vec<[f64; 2]> = (0..=20).map(|x| [f64::from(x), 0.3]).collect();
        let branch: Vec<[f64; 2]> = (0..=9).map(|y| [12.0, f64::from(9 - y) + 0.3]).collect();
        let both = found(&trunk).with_drawn(&[line(&branch)], 1.0).detected();
        let n = both.with_drawn(&[line(&[[-2.0, 0.0], [22.0, 0.0]])], 1.0);
        let traced: f64 =
            n.reaches.iter().filter(|r| r.origin == ReachOrigin::Traced).map(|r| r.length).sum();
        let kept: f64 =
            n.reaches.iter().filter(|r| r.origin == ReachOrigin::Detected).map(|r| r.length).sum();
        crate::assert_close!(traced, 24.0, 1e-9, "the drawn line is whole");
        crate::assert_close!(kept, 9.3, 1e-9, "the branch reaches the drawn line");
        assert_eq!(n.junctions().len(), 1);
    }
}

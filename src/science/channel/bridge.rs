//! Open ends carried on: to the channel they run into, and over gaps in their own direction.

use std::collections::HashMap;
use std::f64::consts::PI;

use crate::ground::{Point, Stopped, Work};

use super::graph::{Sketch, Stretch};

/// Greatest angle between the direction of an end and its bridge, and between a bridge and the end it meets.
const TURN: f64 = 35.0 * PI / 180.0;
/// The same where an end runs into the half-width of another channel.
const TURN_INTO: f64 = 80.0 * PI / 180.0;
/// Ends are aimed over so many widths, at least so many pixels.
const AIM_WIDTHS: f64 = 2.5;
const LEAST_AIM: f64 = 8.0;
/// Least angle in the count of ends met by chance.
const LEAST_TURN: f64 = 10.0 * PI / 180.0;
/// Bridges less sure than this are not made.
const LEAST_SURE: f64 = 0.6;
/// Pixels on a side of the cells in which line points are looked up.
const CELL: f64 = 16.0;

/// An open end and where it points.
#[derive(Clone, Copy)]
struct End {
    node: usize,
    stretch: usize,
    at: Point,
    /// Unit vector outwards.
    aim: (f64, f64),
    width: f64,
    /// Of its stretch.
    length: f64,
}

/// A way to carry an end on: to point `vertex` of a stretch.
struct Way {
    end: usize,
    stretch: usize,
    vertex: usize,
    cost: f64,
    /// `None` when the end reached the other channel's bank already.
    bridge: Option<f64>,
}

impl Sketch {
    /// Carries open ends on, each at most once, the cheapest ways first. `area` is that of the image, square
    /// pixels: it tells how often an end would be met by chance; `width_at` tells the width at a place of a line.
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn bridge(
        &mut self,
        gap_widths: f64,
        area: f64,
        width_at: impl Fn(Point) -> f64,
        work: &Work,
    ) -> Result<(), Stopped> {
        let ends = self.open_ends();
        let mut points: HashMap<(i64, i64), Vec<(usize, usize)>> = HashMap::new();
        for (s, stretch) in self.stretches.iter().enumerate() {
            for (v, p) in stretch.line.iter().enumerate() {
                points.entry(cell_of(*p)).or_default().push((s, v));
            }
        }
        let total: f64 = self.stretches.iter().map(Stretch::length).sum();
        let (lines, open) = (total / area.max(1.0), ends.len() as f64 / area.max(1.0));
        let by_node: HashMap<usize, usize> = ends.iter().enumerate().map(|(i, e)| (e.node, i)).collect();
        let widest = self.stretches.iter().map(|s| s.width).fold(0.0, f64::max);
        let mut ways = Vec::new();
        for (i, end) in ends.iter().enumerate() {
            work.advance(0)?;
            let reach = (gap_widths * end.width).max(0.5 * widest + 2.0 * end.width);
            let span = (reach / CELL).ceil() as i64;
            let (cx, cy) = cell_of(end.at);
            let near = (cy - span..=cy + span).flat_map(|y| (cx - span..=cx + span).map(move |x| (x, y)));
            let mut best: Option<Way> = None;
            for &(stretch, vertex) in near.filter_map(|c| points.get(&c)).flatten() {
                if stretch == end.stretch {
                    continue;
                }
                let way =
                    self.way((&ends, &by_node), i, (stretch, vertex), &width_at, gap_widths, (lines, open));
                if let Some(way) = way.filter(|w| best.as_ref().is_none_or(|b| w.cost < b.cost)) {
                    best = Some(way);
                }
            }
            ways.extend(best);
        }
        ways.sort_by(|a, b| a.cost.total_cmp(&b.cost).then(a.end.cmp(&b.end)));
        self.join(&ends, &by_node, ways);
        Ok(())
    }

    fn open_ends(&self) -> Vec<End> {
        let at = self.at_nodes();
        let mut ends = Vec::new();
        for (node, meeting) in at.iter().enumerate() {
            let [stretch] = meeting[..] else { continue };
            let it = &self.stretches[stretch];
            let mut line: Vec<Point> = it.line.clone();
            if it.ends[1] == node {
                line.reverse();
            }
            let (first, want) = (line[0], (AIM_WIDTHS * it.width).max(LEAST_AIM));
            let back =
                line.iter().find(|p| p.distance(first) >= want).or(line.last()).copied().unwrap_or(first);
            let length = back.distance(first);
            if length > 0.0 {
                let aim = ((first.x - back.x) / length, (first.y - back.y) / length);
                ends.push(End { node, stretch, at: first, aim, width: it.width, length: it.length() });
            }
        }
        ends
    }

    /// The way from end `i` to a line point; `None` when it is too far or too crooked.
    fn way(
        &self,
        (ends, by_node): (&[End], &HashMap<usize, usize>),
        i: usize,
        (stretch, vertex): (usize, usize),
        width_at: &impl Fn(Point) -> f64,
        gap_widths: f64,
        (lines, open): (f64, f64),
    ) -> Option<Way> {
        let (end, other) = (&ends[i], &self.stretches[stretch]);
        let to = other.line[vertex];
        let gap = end.at.distance(to);
        let (dx, dy) = ((to.x - end.at.x) / gap.max(1e-9), (to.y - end.at.y) / gap.max(1e-9));
        let turn = (dx * end.aim.0 + dy * end.aim.1).clamp(-1.0, 1.0).acos();
        let node = match vertex {
            0 => Some(other.ends[0]),
            v if v + 1 == other.line.len() => Some(other.ends[1]),
            _ => None,
        };
        let facing = node.and_then(|n| by_node.get(&n)).map(|e| &ends[*e]);
        let into = 0.5 * other.width.min(width_at(to)) + 1.5 * end.width + 1.0;
        let into = into.min(0.5 * end.length + LEAST_AIM);
        if facing.is_none() && gap <= into && turn <= TURN_INTO {
            let cost = 0.5 * gap / into + (turn / TURN_INTO).powi(2);
            return Some(Way { end: i, stretch, vertex, cost, bridge: None });
        }
        // No bridge is longer than the line it continues.
        let reach = (gap_widths * end.width).min(end.length);
        if gap > reach || turn > TURN {
            return None;
        }
        let (mut cost, mut chance) = (gap / reach + (turn / TURN).powi(2), 2.0 * lines * gap / PI);
        if let Some(facing) = facing {
            let against = (-dx * facing.aim.0 - dy * facing.aim.1).clamp(-1.0, 1.0).acos();
            if against > TURN || gap > facing.length {
                return None;
            }
            cost = 0.5 * (cost + (against / TURN).powi(2));
            // Ends as near and as well in line, facing this one, that chance would put there.
            chance = open * gap * gap * turn.max(LEAST_TURN) * against.max(LEAST_TURN) / PI;
        }
        let sure = (-chance).exp();
        (sure >= LEAST_SURE).then_some(Way { end: i, stretch, vertex, cost, bridge: Some(sure) })
    }

    /// Adds the ways as stretches; those that lead to the middle of a line part it there.
    fn join(&mut self, ends: &[End], by_node: &HashMap<usize, usize>, ways: Vec<Way>) {
        let mut used = vec![false; ends.len()];
        // Where stretches are to be parted: vertex and node, by stretch.
        let mut parts: HashMap<usize, Vec<(usize, usize)>> = HashMap::new();
        let mut added = Vec::new();
        for way in ways {
            if used[way.end] {
                continue;
            }
            let end = &ends[way.end];
            let line = &self.stretches[way.stretch].line;
            let to = line[way.vertex];
            let node = match way.vertex {
                0 => self.stretches[way.stretch].ends[0],
                v if v + 1 == line.len() => self.stretches[way.stretch].ends[1],
                v => {
                    let held = parts.entry(way.stretch).or_default();
                    match held.iter().find(|(at, _)| *at == v) {
                        Some((_, node)) => *node,
                        None => {
                            self.nodes.push(to);
                            held.push((v, self.nodes.len() - 1));
                            self.nodes.len() - 1
                        }
                    }
                }
            };
            if let Some(&facing) = by_node.get(&node) {
                if used[facing] {
                    continue;
                }
                used[facing] = true;
            }
            used[way.end] = true;
            added.push(Stretch {
                ends: [end.node, node],
                line: vec![end.at, to],
                width: end.width,
                bridge: way.bridge,
            });
        }
        let mut stretches = Vec::new();
        for (s, stretch) in std::mem::take(&mut self.stretches).into_iter().enumerate() {
            let mut cuts = parts.remove(&s).unwrap_or_default();
            cuts.sort_unstable();
            let (mut from, mut node) = (0, stretch.ends[0]);
            for (vertex, at) in cuts {
                stretches.push(Stretch {
                    ends: [node, at],
                    line: stretch.line[from..=vertex].to_vec(),
                    ..stretch
                });
                (from, node) = (vertex, at);
            }
            stretches.push(Stretch {
                ends: [node, stretch.ends[1]],
                line: stretch.line[from..].to_vec(),
                ..stretch
            });
        }
        stretches.extend(added);
        self.stretches = stretches;
    }
}

fn cell_of(p: Point) -> (i64, i64) {
    ((p.x / CELL).floor() as i64, (p.y / CELL).floor() as i64)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn line(from: (f64, f64), to: (f64, f64), width: f64, nodes: [usize; 2]) -> Stretch {
        let point = |i: usize| {
            let t = i as f64 / 40.0;
            Point::new(from.0 + t * (to.0 - from.0), from.1 + t * (to.1 - from.1))
        };
        Stretch { ends: nodes, line: (0..=40).map(point).collect(), width, bridge: None }
    }

    fn of(stretches: Vec<Stretch>) -> Sketch {
        let nodes = stretches.iter().flat_map(|s| [s.line[0], s.line[40]]).collect();
        Sketch { nodes, stretches }
    }

    #[test]
    fn ends_in_line_are_bridged_and_ends_beside_are_not() {
        let pair = |shift: f64| {
            let mut sketch = of(vec![
                line((0.0, 50.0), (100.0, 50.0), 4.0, [0, 1]),
                line((118.0, 50.0 + shift), (220.0, 50.0 + shift), 4.0, [2, 3]),
            ]);
            sketch.bridge(6.0, 1e5, |_| f64::INFINITY, &Work::quiet()).unwrap();
            sketch.stretches.iter().filter_map(|s| s.bridge).collect::<Vec<_>>()
        };
        assert!(pair(2.0).len() == 1 && pair(2.0)[0] > 0.9, "{:?}", pair(2.0));
        assert!(pair(22.0).is_empty());
    }

    #[test]
    fn an_end_at_the_bank_joins_the_middle_of_the_channel_without_a_bridge() {
        let mut sketch = of(vec![
            line((0.0, 50.0), (200.0, 50.0), 20.0, [0, 1]),
            line((80.0, 150.0), (100.0, 62.0), 4.0, [2, 3]),
        ]);
        sketch.bridge(6.0, 1e5, |_| f64::INFINITY, &Work::quiet()).unwrap();
        sketch.join_through();
        assert_eq!(
            (sketch.stretches.len(), sketch.stretches.iter().filter(|s| s.bridge.is_some()).count()),
            (3, 0)
        );
        assert_eq!(sketch.at_nodes().iter().filter(|m| m.len() == 3).count(), 1);
    }
}

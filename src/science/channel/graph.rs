//! From lines one cell wide to nodes and the stretches between them.

use crate::ground::{Point, Stopped, Work};
use crate::numeric::thin::around;

/// A network in the making: stretches come and go, nodes stay.
#[derive(Clone, Debug, Default)]
pub(super) struct Sketch {
    pub nodes: Vec<Point>,
    pub stretches: Vec<Stretch>,
}

/// A line between two nodes, both included; pixel coordinates.
#[derive(Clone, Debug)]
pub(super) struct Stretch {
    pub ends: [usize; 2],
    pub line: Vec<Point>,
    /// Typical width, pixels.
    pub width: f64,
    /// Chance that a bridge leads where it should; `None` on what was found itself.
    pub bridge: Option<f64>,
}

impl Stretch {
    pub fn length(&self) -> f64 {
        self.line.windows(2).map(|w| w[0].distance(w[1])).sum()
    }
}

impl Sketch {
    /// Follows the set cells. Cells with three neighbours or more that touch are one junction; a circle without
    /// junction begins and ends at its first cell. `width` tells the typical width of a line of cells.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn of_lines(
        set: &[bool],
        columns: usize,
        width: impl Fn(&[usize]) -> f64,
        work: &Work,
    ) -> Result<Self, Stopped> {
        let near = |cell: usize| around(cell, columns, set.len()).into_iter().flatten().filter(|n| set[*n]);
        let centre = |cell: usize| Point::new((cell % columns) as f64 + 0.5, (cell / columns) as f64 + 0.5);
        let cells: Vec<usize> = (0..set.len()).filter(|c| set[*c]).collect();
        // Node of each cell that belongs to one.
        let mut node_of = std::collections::HashMap::new();
        let mut sketch = Self::default();
        for &cell in &cells {
            let count = near(cell).count();
            if count == 1 || count == 0 {
                node_of.insert(cell, sketch.nodes.len());
                sketch.nodes.push(centre(cell));
            } else if count > 2 && !node_of.contains_key(&cell) {
                let mut cluster = vec![cell];
                node_of.insert(cell, sketch.nodes.len());
                let mut at = 0;
                while at < cluster.len() {
                    for n in near(cluster[at]).filter(|n| near(*n).count() > 2) {
                        if let std::collections::hash_map::Entry::Vacant(e) = node_of.entry(n) {
                            e.insert(sketch.nodes.len());
                            cluster.push(n);
                        }
                    }
                    at += 1;
                }
                let share = 1.0 / cluster.len() as f64;
                let mean = cluster
                    .iter()
                    .map(|c| centre(*c))
                    .fold(Point::default(), |m, p| Point::new(m.x + share * p.x, m.y + share * p.y));
                sketch.nodes.push(mean);
            }
        }
        work.advance(0)?;
        let mut walked = std::collections::HashSet::new();
        for (i, &start) in cells.iter().enumerate() {
            if i % 4096 == 0 {
                work.advance(0)?;
            }
            let Some(&node) = node_of.get(&start) else { continue };
            for first in near(start) {
                let mut path = vec![start];
                let mut next = Some(first);
                // From node to node; two junctions never touch, but a junction may touch an end.
                let end = loop {
                    let Some(cell) = next else { break None };
                    path.push(cell);
                    if let Some(&end) = node_of.get(&cell) {
                        break Some(end);
                    }
                    let before = path[path.len() - 2];
                    next = near(cell)
                        .find(|n| *n != before && !(node_of.get(n) == Some(&node) && path.len() == 2));
                    next = next.or_else(|| near(cell).find(|n| *n != before));
                };
                let Some(end) = end else { continue };
                let last = path[path.len() - 1];
                if (end == node && path.len() == 2) || !walked.insert((start, first)) {
                    continue;
                }
                walked.insert((last, path[path.len() - 2]));
                sketch.add(&path, [node, end], &centre, &width);
            }
        }
        let mut seen: std::collections::HashSet<usize> = walked.iter().map(|w| w.1).collect();
        sketch.circles(&cells, &mut seen, &node_of, near, &centre, &width);
        Ok(sketch)
    }

    fn add(
        &mut self,
        path: &[usize],
        ends: [usize; 2],
        centre: &impl Fn(usize) -> Point,
        width: &impl Fn(&[usize]) -> f64,
    ) {
        let mut line = vec![self.nodes[ends[0]]];
        line.extend(path[1..path.len() - 1].iter().map(|c| centre(*c)));
        line.push(self.nodes[ends[1]]);
        self.stretches.push(Stretch { ends, line, width: width(path), bridge: None });
    }

    /// Closed lines that meet no node.
    fn circles<I: Iterator<Item = usize>>(
        &mut self,
        cells: &[usize],
        seen: &mut std::collections::HashSet<usize>,
        node_of: &std::collections::HashMap<usize, usize>,
        near: impl Fn(usize) -> I,
        centre: &impl Fn(usize) -> Point,
        width: &impl Fn(&[usize]) -> f64,
    ) {
        // Cells of stretches between nodes were all passed: mark them from both ends of each stretch.
        let mut waiting: Vec<usize> = seen.iter().copied().filter(|c| !node_of.contains_key(c)).collect();
        while let Some(cell) = waiting.pop() {
            for n in near(cell).filter(|n| !node_of.contains_key(n)) {
                if seen.insert(n) {
                    waiting.push(n);
                }
            }
        }
        for &start in cells {
            if node_of.contains_key(&start) || seen.contains(&start) {
                continue;
            }
            let mut path = vec![start];
            seen.insert(start);
            while let Some(next) = near(path[path.len() - 1]).find(|n| !seen.contains(n)) {
                seen.insert(next);
                path.push(next);
            }
            path.push(start);
            let node = self.nodes.len();
            self.nodes.push(centre(start));
            self.add(&path, [node, node], centre, width);
        }
    }

    /// Stretches at each node; one that begins and ends there counts twice.
    pub fn at_nodes(&self) -> Vec<Vec<usize>> {
        let mut lists = vec![Vec::new(); self.nodes.len()];
        for (i, stretch) in self.stretches.iter().enumerate() {
            stretch.ends.iter().for_each(|n| lists[*n].push(i));
        }
        lists
    }

    /// Joins stretches that meet alone at a node, unless just one of them is a bridge.
    pub fn join_through(&mut self) {
        let mut at = self.at_nodes();
        let mut gone = vec![false; self.stretches.len()];
        for node in 0..self.nodes.len() {
            let [a, b] = at[node][..] else { continue };
            if a == b || self.stretches[a].bridge.is_some() || self.stretches[b].bridge.is_some() {
                continue;
            }
            let mut first = self.stretches[a].clone();
            let mut second = self.stretches[b].clone();
            if first.ends[1] != node {
                first.turn();
            }
            if second.ends[0] != node {
                second.turn();
            }
            let (one, two) = (first.length(), second.length());
            let width = (first.width * one + second.width * two) / (one + two).max(1e-9);
            first.line.extend_from_slice(&second.line[1..]);
            let far = second.ends[1];
            self.stretches[a] = Stretch { ends: [first.ends[0], far], width, ..first };
            gone[b] = true;
            at[node].clear();
            at[far].iter_mut().filter(|s| **s == b).for_each(|s| *s = a);
        }
        self.drop_where(&gone);
    }

    /// Leaves out the stretches marked.
    pub fn drop_where(&mut self, gone: &[bool]) {
        let mut number = 0;
        self.stretches.retain(|_| {
            number += 1;
            !gone[number - 1]
        });
    }

    /// Part of the network each node belongs to, by the smallest node number of the part.
    pub fn parts(&self) -> Vec<usize> {
        let mut root: Vec<usize> = (0..self.nodes.len()).collect();
        fn find(root: &mut [usize], mut n: usize) -> usize {
            while root[n] != n {
                root[n] = root[root[n]];
                n = root[n];
            }
            n
        }
        for stretch in &self.stretches {
            let (a, b) = (find(&mut root, stretch.ends[0]), find(&mut root, stretch.ends[1]));
            root[a.max(b)] = a.min(b);
        }
        (0..root.len()).map(|n| find(&mut root, n)).collect()
    }
}

impl Stretch {
    pub fn turn(&mut self) {
        self.ends.reverse();
        self.line.reverse();
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sketch(picture: &[&str]) -> Sketch {
        let set: Vec<bool> = picture.iter().flat_map(|row| row.chars().map(|c| c == '#')).collect();
        Sketch::of_lines(&set, picture[0].len(), |cells| cells.len() as f64, &Work::quiet()).unwrap()
    }

    #[test]
    fn a_fork_has_one_junction_and_three_stretches() {
        let fork = sketch(&["#...#", ".#.#.", "..#..", "..#..", "..#.."]);
        assert_eq!((fork.nodes.len(), fork.stretches.len()), (4, 3));
        assert_eq!(fork.at_nodes().iter().filter(|a| a.len() == 3).count(), 1);
    }

    #[test]
    fn circles_are_kept_with_and_without_a_tail() {
        let alone = sketch(&[".##.", "#..#", "#..#", ".##."]);
        assert_eq!((alone.nodes.len(), alone.stretches.len()), (1, 1));
        crate::assert_close!(alone.stretches[0].length(), 4.0 + 4.0 * 2f64.sqrt(), 1e-9, "length");
        let tail = sketch(&[".##....", "#..####", "#..#...", ".##...."]);
        assert_eq!(tail.stretches.len(), 2);
        assert!(tail.stretches.iter().any(|s| s.ends[0] == s.ends[1]));
    }

    #[test]
    fn stretches_meet_through_a_plain_node() {
        let mut line = sketch(&["#...#", ".#.#.", "..#..", "..#..", "..#.."]);
        line.drop_where(&[true, false, false]);
        line.join_through();
        assert_eq!(line.stretches.len(), 1);
        assert!(line.stretches[0].line.len() >= 4);
    }
}

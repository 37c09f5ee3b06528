//! The channels a threshold leaves, as nodes with one way down each, and their streams by Strahler order.

use rayon::prelude::*;

use crate::ground::{Stopped, Work};
use crate::numeric::sum::total;

use super::paths::{Paths, pause};

/// Rows a task scans; fixed, and joined in order.
const STRIP: usize = 32;
/// Nodes a task follows.
const BATCH: usize = 1024;

/// Which cells are channels.
#[derive(Clone, Copy)]
pub(super) struct Choice<'a> {
    /// What must reach the threshold; never less downstream than upstream.
    pub support: &'a [f64],
    pub threshold: f64,
    /// The ground of the picked outlets; all ground without.
    pub kept: Option<&'a [bool]>,
    /// Cells of picked outlets, ascending: nodes wherever a channel passes them.
    pub picked: &'a [usize],
}

/// Heads, junctions and ends, and the way down from each to the next.
pub(super) struct Tree {
    /// Cells of the nodes, ascending.
    pub nodes: Vec<usize>,
    /// The next node downstream and the ground distance to it, m; `None` where a channel ends.
    pub down: Vec<Option<(usize, f64)>>,
}

/// A chain of links of one Strahler order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Stream {
    pub order: u32,
    /// Cells of its upper and lower end.
    pub top: usize,
    pub foot: usize,
    /// Whether it ends at a junction (else it leaves the ground, or ends at an outlet).
    pub joins: bool,
}

impl Choice<'_> {
    fn is_channel(&self, paths: Paths, cell: usize) -> bool {
        self.support[cell] >= self.threshold
            && paths.is_ground(cell)
            && self.kept.is_none_or(|kept| kept[cell])
    }

    /// The channel cell downstream.
    pub fn next(&self, paths: Paths, cell: usize) -> Option<usize> {
        paths.next(cell).filter(|to| self.is_channel(paths, *to))
    }

    /// Whether a channel cell is a head, a junction, an end or a picked outlet, and not alone.
    pub fn is_node(&self, paths: Paths, cell: usize) -> bool {
        let above = paths.donors(cell).filter(|from| self.is_channel(paths, *from)).count();
        let below = self.next(paths, cell).is_some();
        match (above, below) {
            (0, false) => false,
            (1, true) => self.picked.binary_search(&cell).is_ok(),
            _ => true,
        }
    }
}

impl Tree {
    pub fn new(paths: Paths, choice: Choice, work: &Work) -> Result<Self, Stopped> {
        let strips = paths.height.div_ceil(STRIP);
        let found: Vec<Vec<usize>> = (0..strips)
            .into_par_iter()
            .map(|strip| {
                let rows = strip * STRIP..((strip + 1) * STRIP).min(paths.height);
                let mut nodes = Vec::new();
                for row in rows {
                    work.advance(0)?;
                    let cells = row * paths.width..(row + 1) * paths.width;
                    nodes.extend(cells.filter(|c| choice.is_channel(paths, *c) && choice.is_node(paths, *c)));
                }
                Ok(nodes)
            })
            .collect::<Result<_, Stopped>>()?;
        let nodes = found.concat();
        let down: Vec<Vec<Option<(usize, f64)>>> = nodes
            .par_chunks(BATCH)
            .map(|batch| batch.iter().map(|node| link(paths, choice, &nodes, *node, work)).collect())
            .collect::<Result<_, Stopped>>()?;
        Ok(Self { down: down.concat(), nodes })
    }

    /// Ground length of all channels, m.
    pub fn length(&self) -> f64 {
        total(self.down.iter().flatten().map(|(_, length)| *length))
    }

    /// Its streams (Strahler 1957), in no particular order but always the same.
    pub fn streams(&self, work: &Work) -> Result<Vec<Stream>, Stopped> {
        let mut waiting = vec![0u32; self.nodes.len()];
        self.down.iter().flatten().for_each(|(to, _)| waiting[*to] += 1);
        let mut sequence: Vec<usize> = (0..self.nodes.len()).filter(|n| waiting[*n] == 0).collect();
        // Of what has come down to each node: the greatest order, how often, and where that stream began.
        let mut above: Vec<(u32, u32, usize)> = self.nodes.iter().map(|cell| (0, 0, *cell)).collect();
        let mut leaving = vec![(0u32, 0usize); self.nodes.len()];
        let (mut at, mut steps) = (0, 0);
        while at < sequence.len() {
            pause(&mut steps, work)?;
            let node = sequence[at];
            let (most, times, top) = above[node];
            leaving[node] = match times {
                0 => (1, self.nodes[node]),
                1 => (most, top),
                _ => (most + 1, self.nodes[node]),
            };
            if let Some((to, _)) = self.down[node] {
                let (order, top) = leaving[node];
                let here = &mut above[to];
                if order > here.0 {
                    *here = (order, 1, top);
                } else if order == here.0 {
                    here.1 += 1;
                }
                waiting[to] -= 1;
                if waiting[to] == 0 {
                    sequence.push(to);
                }
            }
            at += 1;
        }
        let stream = |node: &usize| {
            let (to, _) = self.down[*node]?;
            let (order, top) = leaving[*node];
            let joins = self.down[to].is_some();
            // It goes on below a node that it passes alone or as the strongest.
            (!joins || leaving[to].1 != top).then_some(Stream { order, top, foot: self.nodes[to], joins })
        };
        Ok(sequence.iter().filter_map(stream).collect())
    }
}

/// The next node below a node, and how far it is.
fn link(
    paths: Paths,
    choice: Choice,
    nodes: &[usize],
    node: usize,
    work: &Work,
) -> Result<Option<(usize, f64)>, Stopped> {
    let (mut cell, mut length, mut steps) = (node, 0.0, 0usize);
    while let Some(to) = choice.next(paths, cell) {
        length += paths.step(cell);
        pause(&mut steps, work)?;
        cell = to;
        if choice.is_node(paths, cell) {
            return Ok(nodes.binary_search(&cell).ok().map(|to| (to, length)));
        }
    }
    work.advance(0)?;
    Ok(None)
}

//! The network as a graph: who joins whom, where it begins, joins and ends.

use super::Network;

impl Network {
    /// Reaches that begin at each node.
    pub fn outgoing(&self) -> Vec<Vec<usize>> {
        self.by_node(|reach| reach.from)
    }

    /// Reaches that end at each node.
    pub fn incoming(&self) -> Vec<Vec<usize>> {
        self.by_node(|reach| reach.to)
    }

    fn by_node(&self, end: impl Fn(&super::Reach) -> usize) -> Vec<Vec<usize>> {
        let mut lists = vec![Vec::new(); self.nodes.len()];
        for (i, reach) in self.reaches.iter().enumerate() {
            lists[end(reach)].push(i);
        }
        lists
    }

    /// Nodes where a channel begins: nothing comes in, something goes out.
    pub fn heads(&self) -> Vec<usize> {
        let (into, out) = (self.incoming(), self.outgoing());
        (0..self.nodes.len()).filter(|n| into[*n].is_empty() && !out[*n].is_empty()).collect()
    }

    /// Nodes where a channel ends: something comes in, nothing goes out.
    pub fn outlets(&self) -> Vec<usize> {
        let (into, out) = (self.incoming(), self.outgoing());
        (0..self.nodes.len()).filter(|n| !into[*n].is_empty() && out[*n].is_empty()).collect()
    }

    /// Nodes where three reaches or more meet.
    pub fn junctions(&self) -> Vec<usize> {
        let (into, out) = (self.incoming(), self.outgoing());
        (0..self.nodes.len()).filter(|n| into[*n].len() + out[*n].len() >= 3).collect()
    }

    /// Independent loops: reaches − nodes + connected parts. Nodes without reaches count as parts.
    pub fn loops(&self) -> usize {
        let mut root: Vec<usize> = (0..self.nodes.len()).collect();
        fn find(root: &mut [usize], mut n: usize) -> usize {
            while root[n] != n {
                root[n] = root[root[n]];
                n = root[n];
            }
            n
        }
        let mut closing = 0;
        for reach in &self.reaches {
            let (a, b) = (find(&mut root, reach.from), find(&mut root, reach.to));
            if a == b { closing += 1 } else { root[a] = b }
        }
        closing
    }

    /// Length of all reaches, in the unit of the raster's place.
    pub fn length(&self) -> f64 {
        self.reaches.iter().map(|r| r.length).sum()
    }

    /// Reaches from head to outlet along which the flow path to the outlet is longest; empty where the senses
    /// run in a circle or there is no reach.
    pub fn trunk(&self) -> Vec<usize> {
        let out = self.outgoing();
        let Some(sequence) = self.downstream_sequence() else { return Vec::new() };
        // Longest way down from each node: (length, first reach of it).
        let mut best: Vec<(f64, Option<usize>)> = vec![(0.0, None); self.nodes.len()];
        for node in sequence.into_iter().rev() {
            for &reach in &out[node] {
                let way = self.reaches[reach].length + best[self.reaches[reach].to].0;
                if best[node].1.is_none() || way > best[node].0 {
                    best[node] = (way, Some(reach));
                }
            }
        }
        let start = (0..best.len()).max_by(|a, b| best[*a].0.total_cmp(&best[*b].0).then(b.cmp(a)));
        let mut reaches = Vec::new();
        let mut next = start.and_then(|node| best[node].1);
        while let Some(reach) = next {
            reaches.push(reach);
            next = best[self.reaches[reach].to].1;
        }
        reaches
    }

    /// Nodes so that every reach leads from an earlier to a later one; `None` when the senses run in a circle.
    pub fn downstream_sequence(&self) -> Option<Vec<usize>> {
        let out = self.outgoing();
        let mut waiting_for: Vec<usize> = self.incoming().iter().map(Vec::len).collect();
        let mut sequence: Vec<usize> = (0..self.nodes.len()).filter(|n| waiting_for[*n] == 0).collect();
        let mut at = 0;
        while at < sequence.len() {
            for &reach in &out[sequence[at]] {
                let to = self.reaches[reach].to;
                waiting_for[to] -= 1;
                if waiting_for[to] == 0 {
                    sequence.push(to);
                }
            }
            at += 1;
        }
        (sequence.len() == self.nodes.len()).then_some(sequence)
    }
}

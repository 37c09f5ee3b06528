//! The network cut into flow paths: each from a head down to an outlet, or to the longer channel it joins.

use crate::ground::{Network, Station};

/// Two places nearer than this, in pixels, are one.
const SAME_PLACE: f64 = 1e-3;

/// A flow path; every reach belongs to exactly one.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Path {
    /// Downstream end first.
    pub reaches: Vec<usize>,
    /// The path it flows into; `None` at an outlet.
    pub joins: Option<usize>,
    /// From its head to its own lower end.
    pub length: f64,
}

/// The paths of a network and the distances they rest on.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Paths {
    /// The longest first, and each after the one it joins.
    pub list: Vec<Path>,
    /// Longest way up from each node to a head.
    pub up: Vec<f64>,
    /// The head at its end; the node itself where nothing comes in.
    pub head: Vec<usize>,
    /// Longest way down from each node to an outlet.
    pub down: Vec<f64>,
}

impl Paths {
    /// At a junction the branch with the longest way up goes on, where the flow divides that with the longest
    /// way down. `None` when the senses run in a circle.
    pub fn of(network: &Network) -> Option<Self> {
        let (into, out) = (network.incoming(), network.outgoing());
        let sequence = network.downstream_sequence()?;
        let longest =
            |lists: &[Vec<usize>], far: &dyn Fn(usize) -> usize, nodes: &mut dyn Iterator<Item = usize>| {
                let mut best: Vec<(f64, Option<usize>)> = vec![(0.0, None); network.nodes.len()];
                for node in nodes {
                    for &reach in &lists[node] {
                        let way = network.reaches[reach].length + best[far(reach)].0;
                        if best[node].1.is_none() || way > best[node].0 {
                            best[node] = (way, Some(reach));
                        }
                    }
                }
                best
            };
        let up = longest(&into, &|r| network.reaches[r].from, &mut sequence.iter().copied());
        let down = longest(&out, &|r| network.reaches[r].to, &mut sequence.iter().rev().copied());
        let goes_on = |reach: usize| {
            let node = network.reaches[reach].to;
            down[node].1.filter(|_| up[node].1 == Some(reach))
        };
        let mut list = Vec::new();
        let mut of_reach = vec![usize::MAX; network.reaches.len()];
        for lowest in (0..network.reaches.len()).filter(|r| goes_on(*r).is_none()) {
            let mut reaches = vec![lowest];
            let mut top = lowest;
            while let Some(above) = up[network.reaches[top].from].1.filter(|a| goes_on(*a) == Some(top)) {
                reaches.push(above);
                top = above;
            }
            let length = reaches.iter().map(|r| network.reaches[*r].length).sum();
            list.push(Path { reaches, joins: None, length });
        }
        // Of equal lengths the one nearer the outlet first, so that a path never precedes the one it joins.
        let lower = |path: &Path| down[network.reaches[path.reaches[0]].to].0;
        list.sort_by(|a, b| b.length.total_cmp(&a.length).then(lower(a).total_cmp(&lower(b))));
        for (i, path) in list.iter().enumerate() {
            path.reaches.iter().for_each(|r| of_reach[*r] = i);
        }
        for path in &mut list {
            let node = network.reaches[path.reaches[0]].to;
            path.joins = down[node].1.map(|below| of_reach[below]);
        }
        let mut head: Vec<usize> = (0..network.nodes.len()).collect();
        for &node in &sequence {
            head[node] = up[node].1.map_or(node, |r| head[network.reaches[r].from]);
        }
        let ways = |best: Vec<(f64, Option<usize>)>| best.into_iter().map(|b| b.0).collect();
        Some(Self { list, up: ways(up), head, down: ways(down) })
    }

    /// For each path the first of its tree, the one that reaches the outlet.
    pub fn trees(&self) -> Vec<usize> {
        self.rooted(|_, joins| joins.is_none())
    }

    /// For each path the tributary basin of the tree's main path it lies in: the path itself when it is a main
    /// path or joins one.
    pub fn basins(&self) -> Vec<usize> {
        self.rooted(|list, joins| joins.is_none_or(|j: usize| list[j].joins.is_none()))
    }

    fn rooted(&self, is_root: impl Fn(&[Path], Option<usize>) -> bool) -> Vec<usize> {
        (0..self.list.len())
            .map(|mut i| {
                // A path joins an earlier one, but where the flow divides it may be a longer way round.
                for _ in 0..self.list.len() {
                    match self.list[i].joins {
                        Some(below) if !is_root(&self.list, self.list[i].joins) => i = below,
                        _ => break,
                    }
                }
                i
            })
            .collect()
    }
}

/// Stations of a reach without the one at its lower node, where the ground of the channel below is counted too;
/// at an outlet all of them.
pub(super) fn own_stations(network: &Network, reach: usize, is_outlet: bool) -> &[Station] {
    let reach = &network.reaches[reach];
    match reach.stations.split_last() {
        Some((last, others))
            if !is_outlet
                && !others.is_empty()
                && last.at.distance(network.nodes[reach.to].at) < SAME_PLACE =>
        {
            others
        }
        _ => &reach.stations,
    }
}

/// Ground that drains through the lower end of a reach, before it joins another, m².
pub(super) fn area_at_end(network: &Network, reach: usize, is_outlet: bool) -> Option<f64> {
    own_stations(network, reach, is_outlet).iter().rev().find_map(|s| s.area_m2).filter(|a| *a > 0.0)
}

/// Elevations at the upper and lower end of a chain of reaches.
pub(super) fn fall(network: &Network, first: usize, last: usize) -> Option<f64> {
    let (first, last) = (&network.reaches[first], &network.reaches[last]);
    let above = network.nodes[first.from].elevation_m.or(first.stations.first()?.elevation_m)?;
    let below = network.nodes[last.to].elevation_m.or(last.stations.last()?.elevation_m)?;
    Some(above - below)
}

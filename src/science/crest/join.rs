//! Chains joined across short gaps, ends led onto the crest they nearly touch, short branches pruned.

use std::collections::HashMap;

use crate::ground::{Point, Stopped, Work};

use super::candidates::Crossing;
use super::link::{Chain, Hit, Index, Linked};

/// Cosine of the greatest angle between a bridge and the crests at its ends.
const AIM: f64 = 0.766;

/// Gaps up to so many scales may turn.
const SHORT: f64 = 2.0;

/// Cosine of the greatest turn over a short gap.
const CORNER: f64 = -0.5;

/// An end within so many scales of another crest, and pointing at it, runs onto it.
const ONTO: f64 = 4.0;

/// Branches below so many scales are spurs.
const SPUR: f64 = 4.0;

/// Points an end's direction is taken over, in scales of length.
const LOOK_BACK: f64 = 3.0;

/// An end of a chain: 0 its first point, 1 its last.
#[derive(Clone, Copy)]
struct Tip {
    chain: usize,
    end: usize,
    at: Point,
    /// Unit vector out of the chain.
    out: [f64; 2],
    strong: bool,
}

/// How chains are joined.
pub(super) struct Joining {
    pub sigma: f64,
    pub bridge: f64,
    pub least_length: f64,
    pub slip_face: bool,
}

impl Joining {
    /// Ends led onto crests, gaps bridged, spurs and short lines dropped.
    pub fn run(
        &self,
        mut linked: Linked,
        points: &[Crossing],
        index: &Index<'_>,
        work: &Work,
    ) -> Result<Vec<Chain>, Stopped> {
        let mut chains = self.bridge(&mut linked, work)?;
        // Weak chains have had their chance to go on from a strong one; what they hit stays where it is.
        keep_only(&mut chains, &mut linked.owner, |c| c.strong);
        self.run_onto(&mut chains, &linked.owner, points, index, work)?;
        Ok(self.prune(chains))
    }

    /// The free tips of all chains.
    fn tips(&self, chains: &[Chain]) -> Vec<Tip> {
        let mut tips = Vec::new();
        for (chain, c) in chains.iter().enumerate() {
            if c.closed || c.points.len() < 3 || (!c.strong && c.length() < SPUR * self.sigma) {
                continue;
            }
            for end in (0..2).filter(|end| c.hits[*end].is_none()) {
                let way: Vec<Point> = match end {
                    0 => c.points.iter().map(|v| v.at).collect(),
                    _ => c.points.iter().rev().map(|v| v.at).collect(),
                };
                let inner = way.iter().find(|p| p.distance(way[0]) >= LOOK_BACK * self.sigma);
                let inner = inner.or(way.last()).copied().unwrap_or(way[0]);
                let d = way[0].distance(inner);
                if d > 0.0 {
                    let out = [(way[0].x - inner.x) / d, (way[0].y - inner.y) / d];
                    tips.push(Tip { chain, end, at: way[0], out, strong: c.strong });
                }
            }
        }
        tips
    }

    /// Cost of a bridge d (3 − cos γ₁ − cos γ₂), if allowed.
    fn cost(&self, a: &Tip, b: &Tip) -> Option<f64> {
        if a.chain == b.chain || (self.slip_face && a.end == b.end) {
            return None;
        }
        let d = a.at.distance(b.at);
        if d > self.bridge {
            return None;
        }
        let turn = -(a.out[0] * b.out[0] + a.out[1] * b.out[1]);
        if d < 1.0 {
            return (turn > CORNER).then_some(3.0 * d);
        }
        let way = [(b.at.x - a.at.x) / d, (b.at.y - a.at.y) / d];
        let first = a.out[0] * way[0] + a.out[1] * way[1];
        let second = -(b.out[0] * way[0] + b.out[1] * way[1]);
        let straight = a.strong && b.strong && first > AIM && second > AIM;
        let corner = d <= SHORT * self.sigma && turn > CORNER && first > CORNER && second > CORNER;
        (straight || corner).then_some(d * (3.0 - first - second))
    }

    /// Bridges of least cost first, each tip once.
    fn bridge(&self, linked: &mut Linked, work: &Work) -> Result<Vec<Chain>, Stopped> {
        let chains = std::mem::take(&mut linked.chains);
        let tips = self.tips(&chains);
        let cell = |p: Point| ((p.x / self.bridge).floor() as i64, (p.y / self.bridge).floor() as i64);
        let mut cells: HashMap<(i64, i64), Vec<usize>> = HashMap::new();
        for (i, tip) in tips.iter().enumerate() {
            cells.entry(cell(tip.at)).or_default().push(i);
        }
        let mut pairs = Vec::new();
        for (i, tip) in tips.iter().enumerate() {
            let (cx, cy) = cell(tip.at);
            for key in (-1..=1).flat_map(|dx| (-1..=1).map(move |dy| (cx + dx, cy + dy))) {
                for j in cells.get(&key).into_iter().flatten().filter(|j| **j > i) {
                    if let Some(cost) = self.cost(tip, &tips[*j]) {
                        pairs.push((cost, i, *j));
                    }
                }
            }
            work.advance(0)?;
        }
        pairs.sort_by(|a, b| a.0.total_cmp(&b.0).then((a.1, a.2).cmp(&(b.1, b.2))));
        let mut taken = vec![false; tips.len()];
        // Which chain a chain has become part of.
        let mut into: Vec<usize> = (0..chains.len()).collect();
        let mut parts: Vec<Option<Chain>> = chains.into_iter().map(Some).collect();
        for (_, i, j) in pairs {
            let (a, b) = (root(&mut into, tips[i].chain), root(&mut into, tips[j].chain));
            if taken[i] || taken[j] || a == b {
                continue;
            }
            let (Some(first), Some(second)) = (parts[a].take(), parts[b].take()) else { continue };
            taken[i] = true;
            taken[j] = true;
            into[b] = a;
            parts[a] = Some(joined(first, second, tips[i].at, tips[j].at));
        }
        // Chains keep their order; owners and hits follow.
        let mut place = vec![None; parts.len()];
        let mut kept = Vec::new();
        for (i, part) in parts.into_iter().enumerate() {
            if let Some(chain) = part {
                place[i] = Some(kept.len());
                kept.push(chain);
            }
        }
        let mut now = |chain: usize| place[root(&mut into, chain)];
        for owner in &mut linked.owner {
            *owner = owner.and_then(&mut now);
        }
        for chain in &mut kept {
            chain.hits = chain.hits.map(|hit| {
                let hit = hit?;
                Some(Hit { chain: now(hit.chain)?, at: hit.at })
            });
        }
        Ok(kept)
    }

    /// Free ends that point at another crest close by run onto it.
    fn run_onto(
        &self,
        chains: &mut [Chain],
        owner: &[Option<usize>],
        points: &[Crossing],
        index: &Index<'_>,
        work: &Work,
    ) -> Result<(), Stopped> {
        let reach = ONTO * self.sigma;
        for tip in self.tips(chains) {
            work.advance(0)?;
            let (col, row) = (tip.at.x.max(0.0) as u32, tip.at.y.max(0.0) as u32);
            let mut best: Option<(f64, usize, usize)> = None;
            for i in index.around(col, row, reach.ceil() as u32) {
                let Some(other) = owner[i].filter(|o| *o != tip.chain) else { continue };
                let (dx, dy) = (points[i].at.x - tip.at.x, points[i].at.y - tip.at.y);
                let d = dx.hypot(dy);
                let aims = d < 1.0 || (dx * tip.out[0] + dy * tip.out[1]) / d > AIM;
                if d <= reach && aims && best.is_none_or(|(least, ..)| d < least) {
                    best = Some((d, i, other));
                }
            }
            let Some((d, i, other)) = best else { continue };
            // Two ends that meet would each run onto the other: the first one does.
            let meets = chains[other].hits.iter().flatten().any(|hit| hit.chain == tip.chain && d < reach);
            if meets {
                continue;
            }
            let chain = &mut chains[tip.chain];
            let vertex = super::link::Vertex { at: points[i].at, strength: 0.0, bridged: true };
            match tip.end {
                0 => {
                    chain.points[0].bridged = true;
                    chain.points.insert(0, super::link::Vertex { bridged: false, ..vertex });
                }
                _ => chain.points.push(vertex),
            }
            chain.hits[tip.end] = Some(Hit { chain: other, at: points[i].at });
        }
        Ok(())
    }

    /// Without spurs and short isolated lines; hits onto what is gone become free ends.
    fn prune(&self, mut chains: Vec<Chain>) -> Vec<Chain> {
        for _ in 0..3 {
            let mut hit = vec![false; chains.len()];
            for h in chains.iter().flat_map(|c| c.hits.iter().flatten()) {
                hit[h.chain] = true;
            }
            let keep: Vec<bool> = chains
                .iter()
                .zip(&hit)
                .map(|(c, is_hit)| {
                    let branches = c.hits.iter().flatten().count();
                    let least = match branches {
                        0 if *is_hit && c.length() >= 0.5 * self.least_length => 0.0,
                        0 => self.least_length,
                        _ => SPUR * self.sigma,
                    };
                    c.length() >= least
                })
                .collect();
            let mut kept = keep.iter();
            keep_only(&mut chains, &mut [], |_| *kept.next().unwrap_or(&false));
        }
        chains
    }
}

/// Drops chains; owners and hits follow, those of dropped chains become none.
fn keep_only(chains: &mut Vec<Chain>, owner: &mut [Option<usize>], mut keep: impl FnMut(&Chain) -> bool) {
    let mut place = vec![None; chains.len()];
    let (mut at, mut next) = (0, 0);
    chains.retain(|chain| {
        let kept = keep(chain);
        if kept {
            place[at] = Some(next);
            next += 1;
        }
        at += 1;
        kept
    });
    owner.iter_mut().for_each(|o| *o = o.and_then(|o| place[o]));
    for chain in chains {
        chain.hits = chain.hits.map(|hit| {
            let hit = hit?;
            Some(Hit { chain: place[hit.chain]?, at: hit.at })
        });
    }
}

/// The chain a chain has become part of.
fn root(into: &mut [usize], mut chain: usize) -> usize {
    while into[chain] != chain {
        into[chain] = into[into[chain]];
        chain = into[chain];
    }
    chain
}

/// Two chains made one over the gap between the points `from` of the first and `to` of the second. The
/// result runs as the first did.
fn joined(mut first: Chain, mut second: Chain, from: Point, to: Point) -> Chain {
    let ends_at = |c: &Chain, p: Point| c.points.last().is_some_and(|v| v.at == p);
    if ends_at(&first, from) {
        if ends_at(&second, to) {
            reverse(&mut second);
        }
        if let Some(v) = second.points.first_mut() {
            v.bridged = true;
        }
        first.points.append(&mut second.points);
        first.hits[1] = second.hits[1];
        first.strong |= second.strong;
        first
    } else {
        if !ends_at(&second, to) {
            reverse(&mut second);
        }
        if let Some(v) = first.points.first_mut() {
            v.bridged = true;
        }
        second.points.append(&mut first.points);
        second.hits[1] = first.hits[1];
        second.strong |= first.strong;
        second
    }
}

fn reverse(chain: &mut Chain) {
    let bridged: Vec<bool> = chain.points.iter().map(|v| v.bridged).collect();
    chain.points.reverse();
    let n = chain.points.len();
    for (i, v) in chain.points.iter_mut().enumerate() {
        v.bridged = i > 0 && bridged[n - i];
    }
    chain.hits.swap(0, 1);
}

//! Which way the water went, where no routing tells.

use crate::ground::{
    FlowSense, Method, Network, Point, Reach, Read, SenseEvidence, SenseKind, Source, Station, Symbol,
};
use crate::numeric::quantile::median;
use crate::numeric::tail::f_above;
use crate::science::axial::sources::{DERIVED, at};

use super::belief::{Meeting, weigh};

pub static METHOD: Method = Method {
    id: "channel.sense",
    name: "Sense of flow from elevation, widening, junctions and what is said",
    question: "Which way did the water go, and how sure is that?",
    formula: "ln odds: elevation ln(P(t ≤ −b/s)/P(t ≤ b/s)); widening 2bμ/(τ² + s²); said ± 20; junctions by sums over the graph of Π p(reach) Π q(who comes in), weighed over six kinds of network",
    symbols: &[
        Symbol {
            symbol: "b, s",
            meaning: "trend along the reach of elevation, of ln width, and its error with related residuals",
            unit: "m, 1",
        },
        Symbol {
            symbol: "μ, τ",
            meaning: "0.1 and 0.15: how much a reach widens, in ln width, from its upper to its lower end, and how much that varies",
            unit: "1",
        },
        Symbol {
            symbol: "q",
            meaning: "weight of a junction: channels join or part; the stem is the one across from the smallest angle (60 ± 35° between the others) and the widest (by 0.35 ± 0.4 in ln width)",
            unit: "1",
        },
    ],
    assumptions: &[
        "Water hardly ever only comes to a junction, or only leaves it.",
        "Before looking: 8 of 10 networks gather (92 % of junctions join), 1 parts like a delta (8 %), 1 braids (half); of those that gather 5 in 8 widen downstream along their reaches, 1 in 16 narrows, of those that part half narrow.",
    ],
    limits: &[
        "Angles and widths tell the stem of a junction, not whether water gathered into it or spread from it: without elevation or an arrow that stays a matter of the kind of network.",
        "Widening holds in most networks, not in all, so widths alone never decide by more than ten to one.",
        "Relief may have changed since the channels were cut.",
        "In a network with loops the sums are approximate.",
        "What the junctions say includes the evidence of reaches beyond them.",
    ],
    sources: &[
        Source {
            key: "pearl1988",
            authors: "Pearl, J.",
            year: 1988,
            title: "Probabilistic Reasoning in Intelligent Systems",
            published: "Morgan Kaufmann",
            locator: "sums passed over a tree",
            read: Read::Memory,
        },
        at(DERIVED, "evidence and its calibration on simulated trees and deltas"),
    ],
};

/// μ and τ.
const WIDENING: [f64; 2] = [0.1, 0.15];
/// Mean and spread of the angle between the two that join or part.
const FORK_DEG: [f64; 2] = [60.0, 35.0];
/// Mean and spread of ln(width of the stem / width of another).
const STEM_WIDER: [f64; 2] = [0.35, 0.4];
/// Kinds of network: (probability before looking, share of junctions that join, whether reaches widen (1) or
/// narrow (−1) downstream).
const VIEWS: [(f64, f64, f64); 6] = [
    (0.5, 0.92, 1.0),
    (0.25, 0.92, 0.0),
    (0.05, 0.92, -1.0),
    (0.05, 0.08, 0.0),
    (0.05, 0.08, -1.0),
    (0.1, 0.5, 0.0),
];
/// No trend is believed beyond this: relief may have been turned since.
const MOST_OF_TREND: f64 = 8.0;
/// Length of a chord from a junction, pixels, and in widths where banks are known.
const CHORD_PX: f64 = 12.0;
const CHORD_WIDTHS: f64 = 2.0;
/// An arrow reaches so many pixels, or its own length.
const ARROW_REACH: f64 = 10.0;

/// The network with every reach's sense weighed, reaches turned so that `from` → `to` is the likelier way
/// down; and where arrows met no reach. `elevation` gives metres at a point of the network's frame; `arrows`
/// point the way the water went. Earlier evidence is dropped.
pub fn sense(
    mut network: Network,
    elevation: Option<&dyn Fn(Point) -> Option<f64>>,
    arrows: &[[Point; 2]],
) -> (Network, Vec<Point>) {
    let mut lost = Vec::new();
    let mut stated = vec![0.0f64; network.reaches.len()];
    for arrow in arrows {
        match met(&network, arrow) {
            Some((reach, ln_odds)) => stated[reach] += ln_odds,
            None => lost.push(middle(arrow[0], arrow[1])),
        }
    }
    let mut trends = Vec::with_capacity(stated.len());
    for (reach, stated) in network.reaches.iter_mut().zip(stated) {
        let said = Some((SenseKind::Stated, stated)).filter(|_| stated != 0.0);
        let fall = elevation.and_then(|at| falling(reach, at)).map(|l| (SenseKind::Elevation, l));
        trends.push(widening(reach));
        let evidence = [fall, said].into_iter().flatten();
        reach.sense =
            FlowSense { evidence: evidence.map(|(kind, ln_odds)| SenseEvidence { kind, ln_odds }).collect() };
    }
    let own: Vec<f64> =
        network.reaches.iter().map(|r| r.sense.evidence.iter().map(|e| e.ln_odds).sum()).collect();
    let meetings = meetings(&network);
    let mut ln_odds = vec![0.0; own.len()];
    for (part, reaches) in parts(&network) {
        let local: Vec<Meeting> = part.iter().map(|n| meetings[*n].clone()).collect();
        weigh_views(&local, &own, &trends, &reaches, &mut ln_odds);
    }
    for (i, reach) in network.reaches.iter_mut().enumerate() {
        // A reach's own widths count for what they say before its neighbours are asked; the rest is theirs.
        let wider = trends[i].map_or(0.0, Trend::alone);
        let rest = ln_odds[i] - own[i] - wider;
        for (kind, ln_odds) in [(SenseKind::Widening, wider), (SenseKind::Junctions, rest)] {
            if ln_odds.abs() > 1e-12 {
                reach.sense.evidence.push(SenseEvidence { kind, ln_odds });
            }
        }
    }
    let mut turned: Vec<bool> = ln_odds.iter().map(|l| *l < 0.0).collect();
    settle(&network, &ln_odds, &mut turned);
    for (reach, turned) in network.reaches.iter_mut().zip(turned) {
        if turned {
            *reach = reach.reversed();
        }
    }
    (network, lost)
}

/// Marginal ln odds of one connected part over all views, written to `ln_odds` at its `reaches`.
fn weigh_views(
    meetings: &[Meeting],
    own: &[f64],
    trends: &[Option<Trend>],
    reaches: &[usize],
    ln_odds: &mut [f64],
) {
    let mut place = vec![usize::MAX; own.len()];
    reaches.iter().enumerate().for_each(|(i, r)| place[*r] = i);
    let meetings: Vec<Meeting> = meetings
        .iter()
        .map(|m| Meeting {
            reaches: m.reaches.iter().map(|(r, begins)| (place[*r], *begins)).collect(),
            stem: m.stem.clone(),
        })
        .collect();
    let beliefs = VIEWS.map(|(prior, joining, widens)| {
        let mut ln_weight = prior.ln();
        let with_widths = |r: &usize| {
            let trend = trends[*r].unwrap_or_default();
            let all = own[*r] + widens * trend.ln_odds;
            // What `weigh` takes out by counting odds only: (e^{l/2} + e^{−l/2}) e^{−μ²/2v}.
            ln_weight += ln_cosh(0.5 * all) - widens.abs() * trend.cost;
            all
        };
        let all: Vec<f64> = reaches.iter().map(with_widths).collect();
        let belief = weigh(&meetings, &all, joining);
        (ln_weight + belief.ln_evidence, belief.ln_odds)
    });
    let most = beliefs.iter().map(|b| b.0).fold(f64::NEG_INFINITY, f64::max);
    for (i, reach) in reaches.iter().enumerate() {
        let (mut with, mut without) = (0.0, 0.0);
        for (ln_weight, odds) in &beliefs {
            let weight = (ln_weight - most).exp();
            with += weight / (1.0 + (-odds[i]).exp());
            without += weight / (1.0 + odds[i].exp());
        }
        ln_odds[*reach] = (with / without).ln().clamp(-60.0, 60.0);
    }
}

/// Connected parts: their nodes and reaches.
fn parts(network: &Network) -> Vec<(Vec<usize>, Vec<usize>)> {
    let mut beside = vec![Vec::new(); network.nodes.len()];
    for (i, reach) in network.reaches.iter().enumerate() {
        beside[reach.from].push(i);
        beside[reach.to].push(i);
    }
    let mut seen = vec![false; network.nodes.len()];
    let mut parts = Vec::new();
    for first in 0..network.nodes.len() {
        if seen[first] || beside[first].is_empty() {
            continue;
        }
        seen[first] = true;
        let (mut nodes, mut reaches) = (vec![first], Vec::new());
        let mut at = 0;
        while at < nodes.len() {
            for &r in &beside[nodes[at]] {
                reaches.push(r);
                for end in [network.reaches[r].from, network.reaches[r].to] {
                    if !std::mem::replace(&mut seen[end], true) {
                        nodes.push(end);
                    }
                }
            }
            at += 1;
        }
        reaches.sort_unstable();
        reaches.dedup();
        parts.push((nodes, reaches));
    }
    parts
}

/// The reach an arrow lies beside and the ln odds it gives: the nearest to its middle, within its length.
fn met(network: &Network, arrow: &[Point; 2]) -> Option<(usize, f64)> {
    let at = middle(arrow[0], arrow[1]);
    let reach_of_arrow = arrow[0].distance(arrow[1]).max(ARROW_REACH);
    let mut best: Option<(f64, usize, f64)> = None;
    for (i, reach) in network.reaches.iter().enumerate() {
        for pair in reach.line.0.windows(2) {
            let (dx, dy) = (pair[1].x - pair[0].x, pair[1].y - pair[0].y);
            let square = dx * dx + dy * dy;
            if square <= 0.0 {
                continue;
            }
            let t = (((at.x - pair[0].x) * dx + (at.y - pair[0].y) * dy) / square).clamp(0.0, 1.0);
            let far = at.distance(Point::new(pair[0].x + t * dx, pair[0].y + t * dy));
            let with = dx * (arrow[1].x - arrow[0].x) + dy * (arrow[1].y - arrow[0].y);
            if far <= reach_of_arrow && with != 0.0 && best.is_none_or(|b| far < b.0) {
                best = Some((far, i, FlowSense::SURE.copysign(with)));
            }
        }
    }
    best.map(|(_, reach, ln_odds)| (reach, ln_odds))
}

fn middle(a: Point, b: Point) -> Point {
    Point::new(0.5 * (a.x + b.x), 0.5 * (a.y + b.y))
}

/// Trend of (place in 0 … 1, value): (change from end to end, its error, degrees of freedom), with residuals
/// that resemble their neighbours counted as fewer. `None` for fewer than four values or all at one place.
fn trend(values: &[[f64; 2]]) -> Option<[f64; 3]> {
    let n = values.len() as f64;
    if values.len() < 4 {
        return None;
    }
    let mean = |k: usize| values.iter().map(|v| v[k]).sum::<f64>() / n;
    let (x, y) = (mean(0), mean(1));
    let sxx: f64 = values.iter().map(|v| (v[0] - x).powi(2)).sum();
    let sxy: f64 = values.iter().map(|v| (v[0] - x) * (v[1] - y)).sum();
    let slope = sxy / sxx;
    let rest: Vec<f64> = values.iter().map(|v| v[1] - y - slope * (v[0] - x)).collect();
    let square: f64 = rest.iter().map(|r| r * r).sum();
    let near: f64 = rest.windows(2).map(|w| w[0] * w[1]).sum();
    let rho = if square > 0.0 { (near / square).clamp(0.0, 0.98) } else { 0.0 };
    let free = (n * (1.0 - rho) / (1.0 + rho) - 2.0).clamp(1.0, n - 2.0);
    let error = (square / (n - 2.0) / sxx * (1.0 + rho) / (1.0 - rho)).sqrt();
    slope.is_finite().then_some([slope, error, free])
}

/// ln odds that the bed falls along the reach; `None` where too little elevation is known.
fn falling(reach: &Reach, at: &dyn Fn(Point) -> Option<f64>) -> Option<f64> {
    const MOST: usize = 200;
    let line = &reach.line.0;
    let along = distances(line);
    let whole = *along.last().filter(|l| **l > 0.0)?;
    let every = (line.len() / MOST).max(1);
    let mut values: Vec<[f64; 2]> = (0..line.len())
        .step_by(every)
        .filter_map(|i| Some([along[i] / whole, at(line[i]).filter(|z| z.is_finite())?]))
        .collect();
    if values.len() < 4 && line.len() >= 2 {
        // A line of a few corners: looked at between them.
        let between = |k: usize| {
            let s = whole * k as f64 / 7.0;
            let i = (1..line.len() - 1).find(|i| along[*i] >= s).unwrap_or(line.len() - 1);
            let t =
                if along[i] > along[i - 1] { (s - along[i - 1]) / (along[i] - along[i - 1]) } else { 0.0 };
            let (a, b) = (line[i - 1], line[i]);
            let p = Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y));
            Some([s / whole, at(p).filter(|z| z.is_finite())?])
        };
        values = (0..8).filter_map(between).collect();
    }
    let [slope, error, free] = trend(&values)?;
    if slope == 0.0 {
        return Some(0.0);
    }
    let beyond = if error > 0.0 { 0.5 * f_above((slope / error).powi(2), 1.0, free) } else { 0.0 };
    let size = ((1.0 - beyond) / beyond.max(1e-9)).ln().min(MOST_OF_TREND);
    Some(-size.copysign(slope))
}

/// What the widths along a reach say: ln odds that it widens downstream if reaches do, and μ²/2(τ² + s²), what
/// it costs to expect a trend at all.
#[derive(Clone, Copy, Debug, Default)]
struct Trend {
    ln_odds: f64,
    cost: f64,
}

impl Trend {
    /// ln odds over the kinds of network that may be, nothing else known.
    fn alone(self) -> f64 {
        let (with, without) = VIEWS.iter().fold((0.0, 0.0), |(with, without), (prior, _, widens)| {
            let half = 0.5 * widens * self.ln_odds;
            let weight = prior * (-widens.abs() * self.cost).exp();
            (with + weight * half.exp(), without + weight * (-half).exp())
        });
        (with / without).ln()
    }
}

/// `None` where too few widths are known.
fn widening(reach: &Reach) -> Option<Trend> {
    let whole = reach.stations.last()?.along - reach.stations.first()?.along;
    let known =
        |s: &Station| s.width.filter(|w| *w > 0.0 && w.is_finite()).map(|w| [s.along / whole, w.ln()]);
    let values: Vec<[f64; 2]> = reach.stations.iter().filter_map(known).collect();
    let [slope, error, _] = trend(&values)?;
    let [mean, spread] = WIDENING;
    let variance = spread * spread + error * error;
    let ln_odds = (2.0 * slope * mean / variance).clamp(-3.0, 3.0);
    ln_odds.is_finite().then_some(Trend { ln_odds, cost: 0.5 * mean * mean / variance })
}

/// ln cosh x without overflow.
fn ln_cosh(x: f64) -> f64 {
    x.abs() + (-2.0 * x.abs()).exp().ln_1p() - std::f64::consts::LN_2
}

fn distances(line: &[Point]) -> Vec<f64> {
    let mut along = vec![0.0];
    for pair in line.windows(2) {
        along.push(along[along.len() - 1] + pair[0].distance(pair[1]));
    }
    along
}

/// What meets at each node; loops from a node to itself take no part.
fn meetings(network: &Network) -> Vec<Meeting> {
    let mut meetings = vec![Meeting { reaches: Vec::new(), stem: Vec::new() }; network.nodes.len()];
    for (i, reach) in network.reaches.iter().enumerate().filter(|(_, r)| r.from != r.to) {
        meetings[reach.from].reaches.push((i, true));
        meetings[reach.to].reaches.push((i, false));
    }
    for meeting in &mut meetings {
        meeting.stem = if meeting.reaches.len() == 3 {
            stems(network, &meeting.reaches)
        } else {
            vec![0.0; meeting.reaches.len()]
        };
    }
    meetings
}

/// ln likelihood of each of three reaches as the stem of the other two, the best at 0.
fn stems(network: &Network, reaches: &[(usize, bool)]) -> Vec<f64> {
    let away: Vec<Option<(f64, f64)>> =
        reaches.iter().map(|(r, begins)| leaving(&network.reaches[*r], *begins)).collect();
    let width: Vec<Option<f64>> = reaches
        .iter()
        .map(|(r, _)| network.reaches[*r].width.map(|w| w.mean).filter(|w| *w > 0.0).map(f64::ln))
        .collect();
    let fit = |k: usize| {
        let (i, j) = ((k + 1) % 3, (k + 2) % 3);
        let mut ln = 0.0;
        if let (Some(a), Some(b)) = (away[i], away[j]) {
            let fork = (a.0 * b.0 + a.1 * b.1).clamp(-1.0, 1.0).acos().to_degrees();
            ln -= 0.5 * ((fork - FORK_DEG[0]) / FORK_DEG[1]).powi(2);
        }
        for other in [i, j] {
            if let (Some(own), Some(other)) = (width[k], width[other]) {
                ln -= 0.5 * ((own - other - STEM_WIDER[0]) / STEM_WIDER[1]).powi(2);
            }
        }
        ln
    };
    let fits: Vec<f64> = (0..3).map(fit).collect();
    let best = fits.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    fits.iter().map(|f| f - best).collect()
}

/// Unit vector of the chord along which a reach leaves one of its ends.
fn leaving(reach: &Reach, at_start: bool) -> Option<(f64, f64)> {
    let mut widths: Vec<f64> =
        reach.stations.iter().filter_map(|s| s.banks).map(|[l, r]| l.distance(r)).collect();
    let width = if widths.is_empty() { 0.0 } else { median(&mut widths) };
    let chord = CHORD_PX.max(CHORD_WIDTHS * width).min(0.6 * reach.line.length());
    let line = &reach.line.0;
    let end = if at_start { *line.first()? } else { *line.last()? };
    let mut others: Box<dyn Iterator<Item = &Point>> =
        if at_start { Box::new(line.iter()) } else { Box::new(line.iter().rev()) };
    let far =
        others.find(|p| p.distance(end) >= chord).or(if at_start { line.last() } else { line.first() })?;
    let size = far.distance(end);
    (size > 0.0).then(|| ((far.x - end.x) / size, (far.y - end.y) / size))
}

/// Makes the likeliest senses agree: no node inside where water only comes or only goes, and no circle, as far
/// as the least certain reaches allow.
fn settle(network: &Network, ln_odds: &[f64], turned: &mut [bool]) {
    let mut fixed = vec![false; turned.len()];
    for _ in 0..2 * turned.len() + 8 {
        let Some(reach) = wrong(network, ln_odds, turned, &fixed) else { break };
        turned[reach] = !turned[reach];
        fixed[reach] = true;
    }
}

/// The least certain reach, not turned before, of the first bad node or of a circle.
fn wrong(network: &Network, ln_odds: &[f64], turned: &[bool], fixed: &[bool]) -> Option<usize> {
    let ends = |r: usize| {
        let reach = &network.reaches[r];
        if turned[r] { (reach.to, reach.from) } else { (reach.from, reach.to) }
    };
    let mut into = vec![0usize; network.nodes.len()];
    let mut out = vec![Vec::new(); network.nodes.len()];
    for r in (0..turned.len()).filter(|r| network.reaches[*r].from != network.reaches[*r].to) {
        let (from, to) = ends(r);
        into[to] += 1;
        out[from].push(r);
    }
    let alone = |n: usize| into[n] + out[n].len() >= 2 && (into[n] == 0 || out[n].is_empty());
    let mut bad: Vec<usize> = (0..turned.len())
        .filter(|r| {
            let (from, to) = ends(*r);
            from != to && (alone(from) || alone(to))
        })
        .collect();
    if bad.is_empty() {
        // What is left after taking away, again and again, nodes without inflow and without outflow.
        let mut left = into.clone();
        let mut waiting: Vec<usize> = (0..left.len()).filter(|n| left[*n] == 0).collect();
        let mut gone = vec![false; left.len()];
        while let Some(n) = waiting.pop() {
            gone[n] = true;
            for r in &out[n] {
                let to = ends(*r).1;
                left[to] -= 1;
                if left[to] == 0 {
                    waiting.push(to);
                }
            }
        }
        bad = (0..turned.len())
            .filter(|r| {
                let (from, to) = ends(*r);
                from != to && !gone[from] && !gone[to]
            })
            .collect();
    }
    bad.into_iter()
        .filter(|r| !fixed[*r] && ln_odds[*r].abs() < 0.5 * FlowSense::SURE)
        .min_by(|a, b| ln_odds[*a].abs().total_cmp(&ln_odds[*b].abs()).then(a.cmp(b)))
}

//! Streams by order: Horton's laws and Tokunaga's side branches.

use crate::ground::{Method, Network, Symbol};

use super::line::Line;
use super::path::{area_at_end, fall};
use super::sources::{DERIVED, HORTON_1945, SHREVE_1966, STRAHLER_1957, at, memory};

pub const METHOD: Method = Method {
    id: "network.horton",
    name: "Horton's ratios by regression",
    question: "How do number, length, area and slope of streams change from order to order?",
    formula: "ln N_w = α − w ln R_B; ln L̄_w = β + w ln R_L; ln Ā_w = γ + w ln R_A; ln S̄_w = δ − w ln R_S",
    symbols: &[
        Symbol { symbol: "w", meaning: "Strahler order", unit: "1" },
        Symbol { symbol: "N_w", meaning: "streams of order w", unit: "1" },
        Symbol {
            symbol: "L̄_w, Ā_w",
            meaning: "their mean length, and mean area at the lower end",
            unit: "m, m²",
        },
        Symbol { symbol: "S̄_w", meaning: "their mean fall over length", unit: "1" },
        Symbol {
            symbol: "R_B, R_L, R_A, R_S",
            meaning: "ratios of bifurcation, length, area, slope",
            unit: "1",
        },
    ],
    assumptions: &["The logarithms lie on straight lines over all orders."],
    limits: &[
        "A bifurcation ratio of 3 to 5 is no evidence of running water: nearly every branching network has one.",
        "Intervals are Student's t over a handful of orders, so they are wide; none with two orders.",
        "The stream of highest order is one and often cut by the outlet.",
        "Where the flow divides no order is defined, and such reaches are left out.",
    ],
    sources: &[
        HORTON_1945,
        STRAHLER_1957,
        at(SHREVE_1966, "random topology gives 4"),
        memory(
            "kirchner1993",
            "Kirchner, J. W.",
            1993,
            "Statistical inevitability of Horton's laws and the apparent randomness of stream channel networks",
            "Geology 21, 591–594",
        ),
    ],
};

pub const TOKUNAGA: Method = Method {
    id: "network.tokunaga",
    name: "Tokunaga's side branches",
    question: "How many lesser streams join a stream from the side?",
    formula: "T_k = Σ_j N_{j−k,j} / Σ_j N_j = a c^{k−1}; R_B = ½(2 + c + a + √((2 + c + a)² − 8c))",
    symbols: &[
        Symbol {
            symbol: "N_{i,j}",
            meaning: "streams of order i that join one of order j from the side",
            unit: "1",
        },
        Symbol { symbol: "N_j", meaning: "streams of order j", unit: "1" },
        Symbol { symbol: "k", meaning: "difference of order j − i", unit: "1" },
        Symbol { symbol: "a, c", meaning: "side branches at k = 1, and their growth", unit: "1" },
    ],
    assumptions: &["T depends on the difference of order only."],
    limits: &[
        "Pooled over all j, so that streams weigh alike; a and c by regression of ln T_k weighted with the number of branches.",
        "Needs side branches at two differences of order.",
        "Like Horton's ratios, no evidence of what made the network: random topology gives a = 1, c = 2.",
    ],
    sources: &[
        memory(
            "tokunaga1978",
            "Tokunaga, E.",
            1978,
            "Consideration on the composition of drainage networks and their evolution",
            "Geographical Reports of Tokyo Metropolitan University 13, 1–27",
        ),
        memory(
            "peckham1995",
            "Peckham, S. D.",
            1995,
            "New results for self-similar trees with applications to river networks",
            "Water Resources Research 31, 1023–1029",
        ),
        at(DERIVED, "weights: ln of a Poisson count n has variance 1/n"),
    ],
};

/// Streams of one Strahler order; a stream is a chain of reaches of the same order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OrderCount {
    pub order: u32,
    pub streams: usize,
    /// Mean length of the streams, in the unit of the raster's place.
    pub mean_length: f64,
    /// Mean area that drains through their lower ends, m²; `None` without elevation.
    pub mean_area_m2: Option<f64>,
    /// Mean of fall over length; `None` without elevation.
    pub mean_slope: Option<f64>,
}

/// A ratio from the regression of a logarithm on order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ratio {
    pub value: f64,
    /// 95 % interval; `None` with two orders only.
    pub ci95: Option<[f64; 2]>,
}

/// Horton's ratios.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Horton {
    pub bifurcation: Ratio,
    pub length: Ratio,
    pub area: Option<Ratio>,
    pub slope: Option<Ratio>,
    /// Orders the regressions rest on.
    pub orders: u32,
}

/// Tokunaga's T_k = a c^(k−1).
#[derive(Clone, Debug, PartialEq)]
pub struct Tokunaga {
    pub a: f64,
    pub c: f64,
    /// Mean number of side branches by difference of order k = 1, 2, …
    pub side_branches: Vec<f64>,
    /// The bifurcation ratio that a and c imply.
    pub bifurcation: f64,
}

/// Streams: chains of reaches of equal Strahler order, upstream end first. Reaches without order are left out.
pub fn streams(network: &Network) -> Vec<Vec<usize>> {
    let (into, out) = (network.incoming(), network.outgoing());
    let order = |reach: usize| network.reaches[reach].order.map(|o| o.strahler);
    let begins = |reach: &usize| {
        let own = order(*reach);
        own.is_some() && !into[network.reaches[*reach].from].iter().any(|above| order(*above) == own)
    };
    (0..network.reaches.len())
        .filter(begins)
        .map(|first| {
            let mut chain = vec![first];
            let mut last = first;
            // No more steps than reaches, whatever orders were handed in.
            while let [below] = out[network.reaches[last].to][..] {
                if order(below) != order(first) || chain.len() >= network.reaches.len() {
                    break;
                }
                chain.push(below);
                last = below;
            }
            chain
        })
        .collect()
}

/// What each Strahler order has, from order 1 upward; empty where no order is defined.
pub fn order_counts(network: &Network) -> Vec<OrderCount> {
    let out = network.outgoing();
    let streams = streams(network);
    let most = network.greatest_order().unwrap_or(0);
    let order = |chain: &[usize]| network.reaches[chain[0]].order.map_or(0, |o| o.strahler);
    let mean =
        |values: &[f64]| (!values.is_empty()).then(|| values.iter().sum::<f64>() / values.len() as f64);
    let length = |chain: &[usize]| chain.iter().map(|r| network.reaches[*r].length).sum::<f64>();
    (1..=most)
        .map(|w| {
            let own: Vec<&Vec<usize>> = streams.iter().filter(|s| order(s) == w).collect();
            let ends = |s: &[usize]| (s[0], s[s.len() - 1]);
            let areas: Vec<f64> = own
                .iter()
                .filter_map(|s| {
                    let last = ends(s).1;
                    area_at_end(network, last, out[network.reaches[last].to].is_empty())
                })
                .collect();
            let slopes: Vec<f64> = own
                .iter()
                .filter_map(|s| {
                    let (first, last) = ends(s);
                    let length = length(s);
                    Some(fall(network, first, last)? / length).filter(|slope| slope.is_finite())
                })
                .collect();
            OrderCount {
                order: w,
                streams: own.len(),
                mean_length: mean(&own.iter().map(|s| length(s)).collect::<Vec<_>>()).unwrap_or(0.0),
                mean_area_m2: mean(&areas),
                mean_slope: mean(&slopes),
            }
        })
        .collect()
}

/// Horton's ratios; `None` for fewer than two orders.
pub fn horton(counts: &[OrderCount]) -> Option<Horton> {
    let grows = |value: &dyn Fn(&OrderCount) -> Option<f64>| {
        let rows: Vec<[f64; 3]> = counts
            .iter()
            .filter_map(|c| Some([f64::from(c.order), value(c).filter(|v| *v > 0.0)?.ln(), 1.0]))
            .collect();
        ratio(&Line::through(&rows)?)
    };
    let inverse = |ratio: Ratio| Ratio {
        value: 1.0 / ratio.value,
        ci95: ratio.ci95.map(|[low, high]| [1.0 / high, 1.0 / low]),
    };
    Some(Horton {
        bifurcation: inverse(grows(&|c| Some(c.streams as f64))?),
        length: grows(&|c| Some(c.mean_length))?,
        area: grows(&|c| c.mean_area_m2),
        slope: grows(&|c| c.mean_slope).map(inverse),
        orders: counts.iter().filter(|c| c.streams > 0).count() as u32,
    })
}

/// e^slope with its interval.
fn ratio(line: &Line) -> Option<Ratio> {
    let value = line.slope.exp();
    let ci95 = line.slope_half_width().map(|half| [(line.slope - half).exp(), (line.slope + half).exp()]);
    (value.is_finite() && value > 0.0).then_some(Ratio { value, ci95 })
}

/// Side branches by difference of order; `None` unless two differences have some.
pub fn tokunaga(network: &Network) -> Option<Tokunaga> {
    let most = network.greatest_order()? as usize;
    let (into, out) = (network.incoming(), network.outgoing());
    let order = |reach: usize| network.reaches[reach].order.map(|o| o.strahler as usize);
    let mut streams_of = vec![0.0; most + 1];
    for stream in streams(network) {
        streams_of[order(stream[0])?] += 1.0;
    }
    // Branches by k: all that come in at a node but the stream that goes on, or the two that make it.
    let mut branches = vec![0.0; most];
    for node in 0..network.nodes.len() {
        let [below] = out[node][..] else { continue };
        let Some(j) = order(below) else { continue };
        let orders: Vec<usize> = into[node].iter().filter_map(|r| order(*r)).collect();
        let lesser = orders.iter().filter(|i| **i < j);
        let makers = if orders.contains(&j) { 0 } else { 2 };
        let equal = orders.iter().filter(|i| **i + 1 == j).count();
        for &i in lesser.filter(|i| **i + 1 < j) {
            branches[j - i] += 1.0;
        }
        if j > 1 && most > 1 {
            branches[1] += equal.saturating_sub(makers) as f64;
        }
    }
    let streams_above = |k: usize| streams_of[k + 1..].iter().sum::<f64>();
    let side_branches: Vec<f64> = (1..most).map(|k| branches[k] / streams_above(k)).collect();
    let rows: Vec<[f64; 3]> = (1..most)
        .filter(|k| branches[*k] > 0.0)
        .map(|k| [k as f64 - 1.0, side_branches[k - 1].ln(), branches[k]])
        .collect();
    // ln T_k = ln a + (k − 1) ln c
    let line = Line::through(&rows)?;
    let (a, c) = (line.intercept.exp(), line.slope.exp());
    Some(Tokunaga { a, c, side_branches, bifurcation: bifurcation(a, c) })
}

/// The bifurcation ratio of a self-similar tree with T_k = a c^(k−1), a ≥ 0, c > 0.
pub fn bifurcation(a: f64, c: f64) -> f64 {
    let sum = 2.0 + c + a;
    0.5 * (sum + (sum * sum - 8.0 * c).sqrt())
}

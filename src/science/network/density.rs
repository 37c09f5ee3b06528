//! Drainage density and stream frequency.

use crate::ground::{Method, Network, Place, Point, Symbol, ground_distance};

use super::hierarchy::streams;
use super::sources::{DERIVED, HORTON_1945, at, memory};

pub const METHOD: Method = Method {
    id: "network.density",
    name: "Drainage density and stream frequency",
    question: "How much channel is there on a unit of ground?",
    formula: "D_d = ΣL / (i A); F_s = ΣN_w / A; i = (8/π)(√2 − 1) = 1.0548 for straight lines of every azimuth stepped between cells",
    symbols: &[
        Symbol { symbol: "ΣL", meaning: "length of all reaches as drawn", unit: "m" },
        Symbol { symbol: "A", meaning: "area the network was sought on", unit: "m²" },
        Symbol { symbol: "i", meaning: "what steps from cell to cell overstate", unit: "1" },
        Symbol { symbol: "ΣN_w", meaning: "streams of all orders", unit: "1" },
    ],
    assumptions: &["The network is whole within the area."],
    limits: &[
        "From elevation it follows the chosen head rule: half the threshold gives about 1.4 times the density. Compare networks of one rule only.",
        "A stepped line overstates between 0 (along rows, columns, diagonals) and 8.2 % (at 22.5°). The inflation is measured on each network by smoothing its lines over five vertices, which also removes bends that a grid cannot show.",
        "Finer rasters show more bends and more channels.",
    ],
    sources: &[
        HORTON_1945,
        memory(
            "montgomery1992",
            "Montgomery, D. R.; Dietrich, W. E.",
            1992,
            "Channel initiation and the problem of landscape scale",
            "Science 255, 826–830",
        ),
        at(
            DERIVED,
            "mean of cos φ + (√2 − 1) sin φ over 0 to 45°; smoothing checked on stepped lines and arcs",
        ),
    ],
};

/// (8/π)(√2 − 1): the mean of cos φ + (√2 − 1) sin φ over φ in [0, 45°], what paths of steps to eight neighbours
/// overstate the length of straight lines, all azimuths alike.
pub const INFLATION_MEAN: f64 = 8.0 / std::f64::consts::PI * (std::f64::consts::SQRT_2 - 1.0);

/// Vertices each side that a smoothed vertex is the mean of.
const REACH: usize = 2;

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Density {
    /// Channel length in metres (pixels without ground size), as drawn.
    pub length: f64,
    /// What a path that steps from cell to cell overstates; 1 for traced lines. `length / inflation` is used.
    pub inflation: f64,
    pub area: f64,
    /// Length over area, per unit length.
    pub density: f64,
    /// Streams of order 1 and above over area; `None` where order is undefined.
    pub frequency: Option<f64>,
}

/// Density of a network on `area` (in the square of its unit), its length divided by `inflation` ≥ 1; `None`
/// without area.
pub fn density(network: &Network, area: f64, inflation: f64) -> Option<Density> {
    if !(area > 0.0 && area.is_finite() && inflation >= 1.0 && inflation.is_finite()) {
        return None;
    }
    let length = network.length();
    let is_ordered = network.reaches.iter().all(|r| r.order.is_some());
    let frequency = is_ordered.then(|| streams(network).len() as f64 / area);
    Some(Density { length, inflation, area, density: length / inflation / area, frequency })
}

/// The inflation of a straight line at `deg` from the rows of square cells: cos φ + (√2 − 1) sin φ.
pub fn inflation_at(deg: f64) -> f64 {
    let folded = deg.rem_euclid(90.0);
    let (sin, cos) = folded.min(90.0 - folded).to_radians().sin_cos();
    cos + (std::f64::consts::SQRT_2 - 1.0) * sin
}

/// What the steps of this network's own lines overstate: their length over that of the lines smoothed over five
/// vertices, ends held. For lines that step from cell to cell; at least 1, and 1 for no reaches.
pub fn inflation_of(network: &Network, place: &Place) -> f64 {
    let ground = |line: &[Point]| line.windows(2).map(|w| ground_distance(place, w[0], w[1])).sum::<f64>();
    let (mut drawn, mut smooth) = (0.0, 0.0);
    for reach in &network.reaches {
        drawn += ground(&reach.line.0);
        smooth += ground(&smoothed(&reach.line.0));
    }
    if smooth > 0.0 { (drawn / smooth).max(1.0) } else { 1.0 }
}

/// Each vertex the mean of its neighbours to both sides, fewer near the ends, which stay.
fn smoothed(line: &[Point]) -> Vec<Point> {
    (0..line.len())
        .map(|i| {
            let reach = REACH.min(i).min(line.len() - 1 - i);
            let near = &line[i - reach..=i + reach];
            let mean = |f: fn(&Point) -> f64| near.iter().map(f).sum::<f64>() / near.len() as f64;
            Point::new(mean(|p| p.x), mean(|p| p.y))
        })
        .collect()
}

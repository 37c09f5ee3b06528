//! Flow to all lower neighbours.

use crate::ground::{Method, Read, Source, Symbol};

use super::cells::Cells;

/// The record of shares by slope alone.
pub const FREEMAN: Method = Method {
    id: "drainage.freeman",
    name: "Multiple flow by slope (Freeman)",
    question: "How does the water of a cell divide among all lower neighbours?",
    formula: "f_k = max(0, tan β_k)^1.1 / Σ max(0, tan β_j)^1.1",
    symbols: &[
        Symbol { symbol: "f_k", meaning: "share of neighbour k", unit: "1" },
        Symbol { symbol: "tan β_k", meaning: "fall toward it over ground distance", unit: "1" },
    ],
    assumptions: &["water spreads on slopes; the exponent was found on cones of square cells"],
    limits: &["water also spreads in valleys, where it should gather: channels come out wide"],
    sources: &[Source {
        key: "freeman1991",
        authors: "Freeman, T. G.",
        year: 1991,
        title: "Calculating catchment area with divergent flow based on a regular grid",
        published: "Computers & Geosciences 17, 413",
        locator: "",
        read: Read::Memory,
    }],
};

/// The record of shares by slope and contour length.
pub const QUINN: Method = Method {
    id: "drainage.quinn",
    name: "Multiple flow by slope and contour (Quinn)",
    question: "How does the water of a cell divide among all lower neighbours?",
    formula: "f_k = L_k max(0, tan β_k) / Σ L_j max(0, tan β_j);  L = ½ cell toward sides, √2/4 cell toward corners",
    symbols: &[
        Symbol { symbol: "f_k", meaning: "share of neighbour k", unit: "1" },
        Symbol { symbol: "tan β_k", meaning: "fall toward it over ground distance", unit: "1" },
        Symbol { symbol: "L_k", meaning: "length of contour that faces it", unit: "m" },
    ],
    assumptions: &["water spreads on slopes"],
    limits: &[
        "water also spreads in valleys, where it should gather: channels come out wide",
        "where cells are not square, L is half the cell's other side, and a quarter of its other diagonal",
    ],
    sources: &[Source {
        key: "quinn1991",
        authors: "Quinn, P.; Beven, K.; Chevallier, P.; Planchon, O.",
        year: 1991,
        title: "The prediction of hillslope flow paths for distributed hydrological modelling using digital terrain models",
        published: "Hydrological Processes 5, 59",
        locator: "",
        read: Read::Memory,
    }],
};

/// Freeman's exponent.
const POWER: f64 = 1.1;

/// Weights of the eight neighbours of one row's cells.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spread {
    distance: [f64; 8],
    /// Contour lengths; `None` for slope to the power 1.1.
    contour: Option<[f64; 8]>,
}

impl Spread {
    pub fn freeman(cells: &Cells, row: usize) -> Self {
        Self { distance: cells.steps(row), contour: None }
    }

    pub fn quinn(cells: &Cells, row: usize) -> Self {
        let distance = cells.steps(row);
        let [e, se, s, sw, w, nw, n, ne] = distance;
        let contour = [0.5 * s, 0.25 * sw, 0.5 * e, 0.25 * se, 0.5 * n, 0.25 * ne, 0.5 * w, 0.25 * nw];
        Self { distance, contour: Some(contour) }
    }

    /// Shares of the eight neighbours at elevations `around`, in the order of [`super::routing::STEPS`], missing
    /// ones at +∞. All 0 where none is lower than `z`.
    pub fn shares(&self, z: f64, around: &[f64; 8]) -> [f64; 8] {
        let flow: [f64; 8] = std::array::from_fn(|k| {
            let slope = (z - around[k]) / self.distance[k];
            match self.contour {
                _ if slope <= 0.0 => 0.0,
                Some(contour) => contour[k] * slope,
                None => slope.powf(POWER),
            }
        });
        let sum: f64 = flow.iter().sum();
        if sum > 0.0 { flow.map(|f| f / sum) } else { flow }
    }
}

//! Trends told from the resultant drift alone: across it, along it, and the classes between.

use crate::ground::{Azimuth, Method, Read, SandFlow, Source, Symbol};

use super::theory::{Prediction, Way};

/// Crests across the resultant.
pub const TRANSVERSE: Method = Method {
    id: "alignment.transverse",
    name: "Transverse to the resultant",
    question: "Which trend would crests have that lie across the net drift?",
    formula: "α = θ_R + 90°",
    symbols: SYMBOLS,
    assumptions: &["Crests turn to face the net drift"],
    limits: &["No meaning where opposing winds leave almost no resultant"],
    sources: &[HUNTER],
};

/// Crests along the resultant.
pub const ALONG: Method = Method {
    id: "alignment.along",
    name: "Along the resultant",
    question: "Which trend would crests have that lie along the net drift?",
    formula: "α = θ_R",
    symbols: SYMBOLS,
    assumptions: &["Crests extend with the net drift"],
    limits: &["No meaning where opposing winds leave almost no resultant"],
    sources: &[HUNTER],
};

const SYMBOLS: &[Symbol] = &[
    Symbol { symbol: "α", meaning: "trend of the crests", unit: "deg" },
    Symbol { symbol: "θ_R", meaning: "azimuth of the resultant drift", unit: "deg" },
];

/// The source of the classes of obliquity.
pub(super) const HUNTER: Source = Source {
    key: "hunter1983",
    authors: "Hunter, R. E.; Richmond, B. M.; Alpha, T. R.",
    year: 1983,
    title: "Storm-controlled oblique dunes of the Oregon coast",
    published: "Geological Society of America Bulletin 94, 1450–1465",
    locator: "",
    read: Read::Memory,
};

/// Total, and vector sum as (east, north), of a list of flows.
pub fn sums(flows: &[SandFlow]) -> (f64, f64, f64) {
    let (mut total, mut east, mut north) = (0.0, 0.0, 0.0);
    for flow in flows {
        let (e, n) = flow.toward.east_north();
        total += flow.weight;
        east += flow.weight * e;
        north += flow.weight * n;
    }
    (total, east, north)
}

/// Where the sand goes on balance, and the length of the resultant over the total; `None` without
/// flow, or when the flows cancel to rounding.
pub fn resultant(flows: &[SandFlow]) -> Option<(Azimuth, f64)> {
    let (total, east, north) = sums(flows);
    let ratio = f64::hypot(east, north) / total;
    (total > 0.0 && ratio > 1e-9).then(|| (Azimuth::from_east_north(east, north), ratio))
}

/// The trend across the resultant; its strength is the resultant over the total.
pub fn transverse(flows: &[SandFlow]) -> Option<Prediction> {
    resultant(flows).map(|(toward, ratio)| Prediction::of_axis(toward.axis().perpendicular(), ratio))
}

/// The trend along the resultant, growing its way.
pub fn along(flows: &[SandFlow]) -> Option<Prediction> {
    resultant(flows).map(|(toward, ratio)| Prediction {
        ways: vec![Way { axis: toward.axis(), toward: Some(toward), share: 1.0 }],
        strength: ratio,
    })
}

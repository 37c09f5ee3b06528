//! Hypsometry and relief of a basin.

use crate::ground::{Method, Symbol};

use super::sources::memory;

pub const METHOD: Method = Method {
    id: "network.hypsometry",
    name: "Hypsometry and relief ratios",
    question: "How is the ground of a basin spread over its height, and how steep is the basin as a whole?",
    formula: "HI = (z̄ − z_min)/(z_max − z_min); relief ratio = H/L; Melton = H/√A",
    symbols: &[
        Symbol { symbol: "z̄", meaning: "mean elevation by area", unit: "m" },
        Symbol { symbol: "H", meaning: "relief z_max − z_min", unit: "m" },
        Symbol { symbol: "L", meaning: "length of the trunk", unit: "m" },
        Symbol { symbol: "A", meaning: "area of the basin", unit: "m²" },
    ],
    assumptions: &["Elevations stand for equal shares of the area."],
    limits: &[
        "The integral depends on the basin's size and on where the outlet was set: it tells no age.",
        "One tower or one pit moves z_max or z_min, and with them everything here.",
        "Schumm's L runs along the longest dimension of the basin; here it is the trunk from its channel head.",
    ],
    sources: &[
        memory(
            "strahler1952",
            "Strahler, A. N.",
            1952,
            "Hypsometric (area–altitude) analysis of erosional topography",
            "Geological Society of America Bulletin 63, 1117–1142",
        ),
        memory(
            "pike1971",
            "Pike, R. J.; Wilson, S. E.",
            1971,
            "Elevation–relief ratio, hypsometric integral, and geomorphic area–altitude analysis",
            "Geological Society of America Bulletin 82, 1079–1084",
        ),
        memory(
            "schumm1956",
            "Schumm, S. A.",
            1956,
            "Evolution of drainage systems and slopes in badlands at Perth Amboy, New Jersey",
            "Geological Society of America Bulletin 67, 597–646",
        ),
        memory(
            "melton1965",
            "Melton, M. A.",
            1965,
            "The geomorphic and paleoclimatic significance of alluvial deposits in southern Arizona",
            "Journal of Geology 73, 1–38",
        ),
    ],
};

#[derive(Clone, Debug, PartialEq)]
pub struct Hypsometry {
    pub lowest_m: f64,
    pub highest_m: f64,
    pub mean_m: f64,
    /// (mean − lowest) / (highest − lowest).
    pub integral: f64,
    /// (share of area above, share of height), from (0, 1) to (1, 0).
    pub curve: Vec<[f64; 2]>,
    /// Relief over the length of the trunk.
    pub relief_ratio: Option<f64>,
    /// Relief over the root of the area (Melton 1965).
    pub melton: f64,
}

/// From the elevations at equal steps of the share of area above, highest first (both ends included, so that the
/// mean is a trapezoid sum); `None` for fewer than two, no relief, or no area.
pub fn hypsometry(
    elevations_highest_first: &[f64],
    area_m2: f64,
    trunk_length: Option<f64>,
) -> Option<Hypsometry> {
    let z = elevations_highest_first;
    let (&highest_m, &lowest_m) = (z.first()?, z.last()?);
    let relief = highest_m - lowest_m;
    if !(relief > 0.0 && relief.is_finite() && area_m2 > 0.0 && area_m2.is_finite()) {
        return None;
    }
    let steps = (z.len() - 1) as f64;
    let mean_m = z.windows(2).map(|w| 0.5 * (w[0] + w[1])).sum::<f64>() / steps;
    let curve = z.iter().enumerate().map(|(i, z)| [i as f64 / steps, (z - lowest_m) / relief]).collect();
    Some(Hypsometry {
        lowest_m,
        highest_m,
        mean_m,
        integral: (mean_m - lowest_m) / relief,
        curve,
        relief_ratio: trunk_length.filter(|l| *l > 0.0).map(|l| relief / l),
        melton: relief / area_m2.sqrt(),
    })
}

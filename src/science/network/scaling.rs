//! Power laws of a network: Hack's length and area, Flint's slope and area.

use crate::ground::{Method, Network, Symbol};
use crate::numeric::tail::student_two_sided;

use super::ascent::{Ascent, drop_by_roughness, filled, reached_at};
use super::hierarchy::streams;
use super::line::Line;
use super::path::{Paths, area_at_end};
use super::sources::{DERIVED, WOBUS_2006, at, memory};

pub const HACK: Method = Method {
    id: "network.hack",
    name: "Hack's law",
    question: "How does the longest channel lengthen as the basin grows?",
    formula: "L + √(2 A_head) = k A^h by regression of logarithms, one point a stream",
    symbols: &[
        Symbol { symbol: "L", meaning: "longest way up from the lower end of a stream", unit: "m" },
        Symbol { symbol: "A", meaning: "ground that drains through that end", unit: "m²" },
        Symbol {
            symbol: "A_head",
            meaning: "ground that drains through the channel head at the top of that way",
            unit: "m²",
        },
        Symbol { symbol: "h, k", meaning: "exponent and factor", unit: "1, m^(1−2h)" },
    ],
    assumptions: &["One law over all basins of the network."],
    limits: &[
        "Streams within one tributary basin share ground: the interval comes from the spread between tributary basins of the trunk (at least 5 of them), not from the count of streams.",
        "Channels begin at heads, Hack's lengths at the divide: the way between is taken as that of a hollow twice as long as wide, √(2 A_head). On directed random networks the exponent is then within 0.04 of that of the full lengths. Only streams with 10 times the ground of their head count where there are 8 of them.",
        "Traced channels without areas have no law.",
        "Exponents of 0.57 to 0.6 are usual and tell little of the process.",
    ],
    sources: &[
        memory(
            "hack1957",
            "Hack, J. T.",
            1957,
            "Studies of longitudinal stream profiles in Virginia and Maryland",
            "US Geological Survey Professional Paper 294-B",
        ),
        memory(
            "liang1986",
            "Liang, K.-Y.; Zeger, S. L.",
            1986,
            "Longitudinal data analysis using generalized linear models",
            "Biometrika 73, 13–22",
        ),
        at(DERIVED, "way above the heads, checked on directed random networks"),
    ],
};

pub const FLINT: Method = Method {
    id: "network.flint",
    name: "Flint's law",
    question: "How does the channel flatten as the basin grows?",
    formula: "S = k_s A^{−θ} by regression of ln(ΣΔz/Σx) on the mean ln A of bins of area",
    symbols: &[
        Symbol { symbol: "Δz", meaning: "one fixed fall for every slope", unit: "m" },
        Symbol { symbol: "x", meaning: "distance along the channel it takes", unit: "m" },
        Symbol { symbol: "θ", meaning: "concavity", unit: "1" },
        Symbol { symbol: "k_s", meaning: "steepness", unit: "m^(2θ)" },
    ],
    assumptions: &["One steepness over the whole network."],
    limits: &[
        "Where steepness varies with area (a knickpoint low in the basin) θ is wrong; χ asks the same with less noise.",
        "Slopes of elevation rasters are noisy: five bins a decade hold the total fall over the total length.",
        "The interval is Student's t over bins; bins of neighbouring ground are not quite independent.",
    ],
    sources: &[
        memory(
            "flint1974",
            "Flint, J. J.",
            1974,
            "Stream gradient as a function of order, magnitude, and discharge",
            "Water Resources Research 10, 969–973",
        ),
        WOBUS_2006,
        at(DERIVED, "the fall when none is stated: 14 times the roughness of elevation along the channels"),
    ],
};

/// Bins of area in a factor of ten.
const BINS_A_DECADE: f64 = 5.0;
/// Basins so many times greater than the ground above their head hardly depend on the way above it.
const GREAT: f64 = 10.0;
/// So many of those allow to leave the others out.
const ENOUGH_STREAMS: usize = 8;
/// Tributary basins an interval needs.
const LEAST_BASINS: usize = 5;
/// Points kept for show.
const SHOWN: usize = 2000;

/// y = factor · x^exponent by regression of logarithms.
#[derive(Clone, Debug, PartialEq)]
pub struct PowerLaw {
    pub factor: f64,
    pub exponent: f64,
    pub exponent_ci95: Option<[f64; 2]>,
    pub r2: f64,
    /// The (x, y) it rests on, thinned for show.
    pub points: Vec<[f64; 2]>,
}

/// Hack's law of a network: longest way up (y, in the unit of the place) over area (x, m²). `None` without areas,
/// or for fewer than three streams.
pub fn hack(network: &Network) -> Option<PowerLaw> {
    let paths = Paths::of(network)?;
    let out = network.outgoing();
    let mut basin_of_reach = vec![0; network.reaches.len()];
    for (path, basin) in paths.list.iter().zip(paths.basins()) {
        path.reaches.iter().for_each(|r| basin_of_reach[*r] = basin);
    }
    let ends: Vec<End> = streams(network)
        .iter()
        .filter_map(|stream| {
            let last = *stream.last()?;
            let reach = &network.reaches[last];
            let above = out[paths.head[reach.from]].first()?;
            let head_area = network.reaches[*above].stations.iter().find_map(|s| s.area_m2)?;
            Some(End {
                basin: basin_of_reach[last],
                length: paths.up[reach.from] + reach.length,
                area: area_at_end(network, last, out[reach.to].is_empty())?,
                head_area: head_area.max(0.0),
            })
        })
        .filter(|end| end.length > 0.0)
        .collect();
    let is_great = |e: &&End| e.area >= GREAT * e.head_area;
    let enough = ends.iter().filter(is_great).count() >= ENOUGH_STREAMS;
    let ends: Vec<&End> = ends.iter().filter(|e| !enough || is_great(e)).collect();
    let basins: Vec<usize> = ends.iter().map(|e| e.basin).collect();
    // L + √(2 A_head)
    let row = |e: &&End| [e.area.ln(), (e.length + (2.0 * e.head_area).sqrt()).ln(), 1.0];
    let rows: Vec<[f64; 3]> = ends.iter().map(row).collect();
    let line = Line::through(&rows).filter(|_| rows.len() >= 3)?;
    let half = clustered_half_width(&rows, &basins, &line);
    Some(power_law(&line, half, &rows))
}

/// The lower end of a stream.
struct End {
    basin: usize,
    /// Longest way up to a head, and the area there.
    length: f64,
    head_area: f64,
    area: f64,
}

/// Half width of the 95 % interval of a slope whose rows are independent between clusters only:
/// V = g/(g − 1) Σ_c (Σ_{i∈c} (xᵢ − x̄) eᵢ)² / (Σ (x − x̄)²)², t with g − 1 degrees of freedom.
fn clustered_half_width(rows: &[[f64; 3]], clusters: &[usize], line: &Line) -> Option<f64> {
    let mean = rows.iter().map(|r| r[0]).sum::<f64>() / rows.len() as f64;
    let mut scores = std::collections::BTreeMap::new();
    for (row, cluster) in rows.iter().zip(clusters) {
        *scores.entry(*cluster).or_insert(0.0) += (row[0] - mean) * (row[1] - line.at(row[0]));
    }
    let g = scores.len();
    if g < LEAST_BASINS {
        return None;
    }
    let df = (g - 1) as f64;
    let variance = g as f64 / df * scores.values().map(|s: &f64| s * s).sum::<f64>() / line.spread.powi(2);
    Some(student_two_sided(0.95, df) * variance.sqrt())
}

/// Flint's law of a network: slope (y) over area (x, m²), exponent −θ. Each slope is over a fall of
/// `slope_drop_m`, or one by the roughness of the elevations. `None` without areas and elevations, or for fewer
/// than three bins of area.
pub fn flint(network: &Network, slope_drop_m: Option<f64>) -> Option<PowerLaw> {
    let paths = Paths::of(network)?;
    let ascent = Ascent::of(network, &paths);
    let drop = slope_drop_m.filter(|d| *d > 0.0).or_else(|| drop_by_roughness(&ascent))?;
    // By bin of area: falls, lengths, Σ ln A over falls.
    let mut bins = std::collections::BTreeMap::<i64, [f64; 3]>::new();
    for run in &ascent.runs {
        let steps = ascent.of_run(run);
        let filled = filled(steps);
        let mut from = steps[0].s;
        let mut i = 0;
        let falls = ((filled[filled.len() - 1] - filled[0]) / drop) as usize;
        // Never more falls than stations can tell.
        for k in 1..=falls.min(steps.len()) {
            let to = reached_at(steps, &filled, filled[0] + k as f64 * drop);
            let begin = i;
            while i + 1 < steps.len() && steps[i].s < to {
                i += 1;
            }
            let inside = &steps[begin..=i];
            let ln_area = inside.iter().map(|s| s.area.ln()).sum::<f64>() / inside.len() as f64;
            let bin = (ln_area / std::f64::consts::LN_10 * BINS_A_DECADE).floor() as i64;
            let sums = bins.entry(bin).or_default();
            sums[0] += 1.0;
            sums[1] += to - from;
            sums[2] += ln_area;
            from = to;
        }
    }
    let rows: Vec<[f64; 3]> = bins
        .values()
        .filter(|b| b[1] > 0.0)
        .map(|[falls, length, ln_area]| [ln_area / falls, (falls * drop / length).ln(), *falls])
        .collect();
    let line = Line::through(&rows).filter(|_| rows.len() >= 3)?;
    Some(power_law(&line, line.slope_half_width(), &rows))
}

fn power_law(line: &Line, half: Option<f64>, rows: &[[f64; 3]]) -> PowerLaw {
    PowerLaw {
        factor: line.intercept.exp(),
        exponent: line.slope,
        exponent_ci95: half.map(|half| [line.slope - half, line.slope + half]),
        r2: line.r2,
        points: rows.iter().step_by(rows.len().div_ceil(SHOWN)).map(|r| [r[0].exp(), r[1].exp()]).collect(),
    }
}

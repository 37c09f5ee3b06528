//! What discharge and grain size a channel's size allows, under any gravity and liquid: ranges, never one number.

use crate::ground::{Method, Read, Source, Symbol};
use crate::science::axial::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "network.palaeo-flow",
    name: "Palaeo-flow by Darcy–Weisbach, Shields and dimensionally consistent geometry",
    question: "What discharge and grain size does a channel of this size allow?",
    formula: "R = h/(1 + 2h/w); V = √(8gRS/f); Fr = V/√(gh); Q = Vwh; d = RS/((s − 1)τ_c); Q_w = √g (w/w*)^{2.5}; n = n_E √(g_E/g), Q_n = wh R^{2/3} S^{1/2}/n; n(f) = R^{1/6} √(f/8g)",
    symbols: &[
        Symbol {
            symbol: "w, h, R",
            meaning: "width, depth and hydraulic radius of a rectangular section",
            unit: "m",
        },
        Symbol { symbol: "S", meaning: "slope of bed and surface", unit: "1" },
        Symbol { symbol: "f", meaning: "Darcy–Weisbach friction factor", unit: "1" },
        Symbol { symbol: "g, g_E", meaning: "gravity here and on Earth (9.81)", unit: "m s⁻²" },
        Symbol { symbol: "s", meaning: "density of the grains over that of the liquid", unit: "1" },
        Symbol { symbol: "τ_c", meaning: "critical Shields stress", unit: "1" },
        Symbol {
            symbol: "w*",
            meaning: "w g^{0.2}/Q^{0.4}: 7 (small gravel rivers) to 25 (large sandy ones)",
            unit: "1",
        },
        Symbol { symbol: "n, n_E", meaning: "Manning's coefficient here and on Earth", unit: "s m^{−1/3}" },
    ],
    assumptions: &[
        "Steady, uniform flow that filled the channel from bank to bank.",
        "Each unknown lies anywhere in its range, evenly in its logarithm, whatever the others are.",
    ],
    limits: &[
        "Manning's n holds for Earth's gravity; carried over by √(g_E/g) it is Darcy–Weisbach under another name, and no better known.",
        "Q from width alone rests on w* of rivers on Earth; their scatter is a factor of three and the carry-over to other gravities is by dimensions only.",
        "Froude number and competent size do not depend on gravity, velocity and discharge do.",
    ],
    sources: &[
        Source {
            key: "shields1936",
            authors: "Shields, A.",
            year: 1936,
            title: "Anwendung der Ähnlichkeitsmechanik und der Turbulenzforschung auf die Geschiebebewegung",
            published: "Mitteilungen der Preussischen Versuchsanstalt für Wasserbau und Schiffbau 26",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "parker2007",
            authors: "Parker, G.; Wilcock, P. R.; Paola, C.; Dietrich, W. E.; Pitlick, J.",
            year: 2007,
            title: "Physical basis for quasi-universal relations describing bankfull hydraulic geometry of single-thread gravel bed rivers",
            published: "Journal of Geophysical Research 112, F04005",
            locator: "w* of gravel rivers",
            read: Read::Memory,
        },
        at(
            DERIVED,
            "w* as a constant from Q²/g scaling, its upper end from large sandy rivers; Manning's n rescaled; first-order shares",
        ),
    ],
};

/// What every figure of a palaeo-flow must be read with.
pub const CAUTION: &str = "Width is not depth, and a valley is not its channel: taking one for the other changes discharge three- to twentyfold. That the channel was ever full from bank to bank is not shown; friction of an unknown bed is known to a factor of two; dark under radar does not mean filled with liquid. These ranges are for comparing landscapes. They are not fit for flood protection or the design of works: local codes and licensed practice decide there.";

/// Earth's gravity, m s⁻².
const EARTH: f64 = 9.81;
/// w* from least to greatest.
pub const WIDTH_NUMBER: [f64; 2] = [7.0, 25.0];

/// What is known of the channel and its liquid, each as a range from least to greatest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FlowAsk {
    /// m s⁻².
    pub gravity: f64,
    pub width_m: [f64; 2],
    /// Width over depth.
    pub width_to_depth: [f64; 2],
    pub slope: [f64; 2],
    /// Darcy–Weisbach friction factor.
    pub friction: [f64; 2],
    /// kg m⁻³.
    pub liquid_density: f64,
    pub grain_density: f64,
    /// Critical Shields stress.
    pub shields: [f64; 2],
    /// Manning's n on Earth, s m^(−1/3).
    pub manning_earth: [f64; 2],
}

/// Least, middle (geometric) and greatest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Range {
    pub least: f64,
    pub middle: f64,
    pub greatest: f64,
}

#[derive(Clone, Debug, PartialEq)]
pub struct PalaeoFlow {
    pub depth_m: Range,
    /// m s⁻¹ by Darcy–Weisbach.
    pub velocity: Range,
    pub froude: Range,
    /// m³ s⁻¹ by Darcy–Weisbach.
    pub discharge: Range,
    /// m³ s⁻¹ by dimensionally consistent hydraulic geometry from width alone.
    pub discharge_by_width: Range,
    /// m³ s⁻¹ by Manning's n rescaled to this gravity.
    pub discharge_by_manning: Range,
    /// m: the greatest grain the flow moves.
    pub grain_m: Range,
    /// Manning's n that would give the velocity by Darcy–Weisbach here, s m^(−1/3).
    pub equivalent_manning: Range,
    /// Shares of the spread of ln discharge (by Darcy–Weisbach) that each unknown brings; they add up to 1,
    /// greatest first. Empty when nothing is unknown.
    pub shares: Vec<(&'static str, f64)>,
}

/// V = √(8gRS/f), m s⁻¹.
pub fn velocity(gravity: f64, radius: f64, slope: f64, friction: f64) -> f64 {
    (8.0 * gravity * radius * slope / friction).sqrt()
}

/// Manning's n of the same velocity: R^{1/6} √(f/8g).
pub fn equivalent_manning(gravity: f64, radius: f64, friction: f64) -> f64 {
    radius.powf(1.0 / 6.0) * (friction / (8.0 * gravity)).sqrt()
}

/// n = n_E √(g_E/g).
pub fn rescaled_manning(earth: f64, gravity: f64) -> f64 {
    earth * (EARTH / gravity).sqrt()
}

/// d = RS/((s − 1)τ_c), m.
pub fn competent_size(radius: f64, slope: f64, density_ratio: f64, shields: f64) -> f64 {
    radius * slope / ((density_ratio - 1.0) * shields)
}

/// Q = √g (w/w*)^{2.5}, m³ s⁻¹.
pub fn discharge_of_width(gravity: f64, width: f64, width_number: f64) -> f64 {
    gravity.sqrt() * (width / width_number).powf(2.5)
}

/// The unknowns in the order they are handed about.
const NAMES: [&str; 4] = ["width", "width to depth", "slope", "friction"];

/// Ranges of all that follows from what is known.
///
/// # Errors
/// In words which range is missing, turned round or not positive, and when grains would float.
pub fn flow(ask: &FlowAsk) -> Result<PalaeoFlow, String> {
    let ranges = [
        ("width", ask.width_m),
        ("width to depth", ask.width_to_depth),
        ("slope", ask.slope),
        ("friction factor", ask.friction),
        ("critical Shields stress", ask.shields),
        ("Manning's n", ask.manning_earth),
        ("gravity", [ask.gravity; 2]),
        ("density of the liquid", [ask.liquid_density; 2]),
    ];
    for (name, [least, greatest]) in ranges {
        if !(least > 0.0 && least <= greatest && greatest.is_finite()) {
            return Err(format!("{name} {least} to {greatest} is not a range of positive numbers"));
        }
    }
    let s = ask.grain_density / ask.liquid_density;
    if !(s > 1.0 && s.is_finite()) {
        return Err(format!(
            "grains of {} kg m⁻³ do not sink in a liquid of {} kg m⁻³",
            ask.grain_density, ask.liquid_density
        ));
    }
    let g = ask.gravity;
    let unknowns = [ask.width_m, ask.width_to_depth, ask.slope, ask.friction];
    let depth = |[w, ratio, ..]: [f64; 4]| w / ratio;
    let radius = |[w, ratio, ..]: [f64; 4]| w / (ratio + 2.0);
    let speed = |u: [f64; 4]| velocity(g, radius(u), u[2], u[3]);
    let discharge = |u: [f64; 4]| speed(u) * u[0] * depth(u);
    let by_manning = |[w, ratio, slope, n]: [f64; 4]| {
        let u = [w, ratio, slope, n];
        radius(u).powf(2.0 / 3.0) * slope.sqrt() / rescaled_manning(n, g) * w * depth(u)
    };
    Ok(PalaeoFlow {
        depth_m: range(unknowns, depth),
        velocity: range(unknowns, speed),
        froude: range(unknowns, |u| speed(u) / (g * depth(u)).sqrt()),
        discharge: range(unknowns, discharge),
        discharge_by_width: range([ask.width_m, WIDTH_NUMBER], |[w, number]| {
            discharge_of_width(g, w, number)
        }),
        discharge_by_manning: range(
            [ask.width_m, ask.width_to_depth, ask.slope, ask.manning_earth],
            by_manning,
        ),
        grain_m: range([ask.width_m, ask.width_to_depth, ask.slope, ask.shields], |u| {
            competent_size(radius(u), u[2], s, u[3])
        }),
        equivalent_manning: range(unknowns, |u| equivalent_manning(g, radius(u), u[3])),
        shares: shares(unknowns, discharge),
    })
}

fn middle_of([least, greatest]: [f64; 2]) -> f64 {
    (least * greatest).sqrt()
}

/// Every quantity here rises or falls with each unknown throughout, so its extremes lie at corners.
fn range<const N: usize>(unknowns: [[f64; 2]; N], f: impl Fn([f64; N]) -> f64) -> Range {
    let corners = (0..1usize << N).map(|corner| f(std::array::from_fn(|i| unknowns[i][(corner >> i) & 1])));
    let (least, greatest) =
        corners.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), v| (low.min(v), high.max(v)));
    Range { least, middle: f(unknowns.map(middle_of)), greatest }
}

/// Variance of ln f while one unknown runs evenly through the logarithm of its range and the others stand at
/// their middles, over the sum of these variances. ln Q is so nearly a sum that nothing else is left.
fn shares(unknowns: [[f64; 2]; 4], f: impl Fn([f64; 4]) -> f64) -> Vec<(&'static str, f64)> {
    const STEPS: usize = 64;
    let variance = |unknown: usize| {
        let [least, greatest] = unknowns[unknown];
        let values: Vec<f64> = (0..STEPS)
            .map(|k| {
                let mut at = unknowns.map(middle_of);
                at[unknown] = least * (greatest / least).powf((k as f64 + 0.5) / STEPS as f64);
                f(at).ln()
            })
            .collect();
        let mean = values.iter().sum::<f64>() / STEPS as f64;
        values.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / STEPS as f64
    };
    let variances: Vec<f64> = (0..4).map(variance).collect();
    let whole: f64 = variances.iter().sum();
    if whole <= 1e-24 {
        return Vec::new();
    }
    let mut shares: Vec<_> = NAMES.into_iter().zip(variances.iter().map(|v| v / whole)).collect();
    shares.sort_by(|a, b| b.1.total_cmp(&a.1));
    shares
}

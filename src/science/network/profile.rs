//! Long profiles, steepness along them, and their knickpoints.

use crate::ground::{Method, Network, Point, Symbol};

use super::ascent::{Ascent, Run, drop_by_roughness, filled, reached_at};
use super::chi::fit;
use super::knickpoints::breaks;
use super::path::Paths;
use super::sources::{WOBUS_2006, memory};

pub use super::chi::ChiFit;

pub const METHOD: Method = Method {
    id: "network.steepness",
    name: "Normalised steepness index",
    question: "How steep is each stretch of channel for the ground it drains?",
    formula: "k_sn = S A^{θ_ref}, S = Δz / (x(z + ½Δz) − x(z − ½Δz))",
    symbols: &[
        Symbol { symbol: "S", meaning: "slope over a fixed fall about the station", unit: "1" },
        Symbol { symbol: "Δz", meaning: "that fall", unit: "m" },
        Symbol { symbol: "A", meaning: "ground that drains through the station", unit: "m²" },
        Symbol {
            symbol: "θ_ref",
            meaning: "reference concavity, alike for all channels compared",
            unit: "1",
        },
    ],
    assumptions: &["The profile is read as filled: upward never falling."],
    limits: &[
        "Values for different θ_ref have different units and do not compare.",
        "Near the ends of a channel the fall is taken to one side.",
        "Where no fall is stated it is 14 times the roughness of elevation along the channels, within a fortieth and a quarter of the relief.",
    ],
    sources: &[
        WOBUS_2006,
        memory(
            "kirby2012",
            "Kirby, E.; Whipple, K. X.",
            2012,
            "Expression of active tectonics in erosional landscapes",
            "Journal of Structural Geology 44, 54–75",
        ),
    ],
};

/// What to make of the profiles.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ProfileAsk {
    /// Concavity of χ; `None` = by least scatter.
    pub theta: Option<f64>,
    /// Reference concavity of the steepness index.
    pub theta_reference: f64,
    /// Fall over which a slope is measured, m; `None` = by the roughness of the elevations.
    pub slope_drop_m: Option<f64>,
    /// Profiles returned at most.
    pub most: usize,
}

/// A flow path from a head to the outlet (or to the path it joins).
#[derive(Clone, Debug, PartialEq)]
pub struct Profile {
    /// Whether it is the longest path of the network.
    pub is_trunk: bool,
    /// From the outlet upward.
    pub stations: Vec<ProfileStation>,
    pub knickpoints: Vec<Knickpoint>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ProfileStation {
    pub at: Point,
    /// Ground distance from the outlet of the network, m.
    pub from_outlet_m: f64,
    pub elevation_m: f64,
    pub area_m2: f64,
    /// m (with A₀ = 1 m²).
    pub chi: f64,
    /// Slope over the fitted stretch, 1; `None` where it is flat or too short.
    pub slope: Option<f64>,
    /// Normalised steepness at the reference concavity, m^(2θ).
    pub ksn: Option<f64>,
}

/// A place where steepness changes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Knickpoint {
    pub at: Point,
    pub from_outlet_m: f64,
    pub elevation_m: f64,
    /// ksn above over ksn below.
    pub ratio: f64,
    /// Chance of so great a break on a uniform profile.
    pub p: f64,
}

/// S A^θ, m^(2θ).
pub fn steepness(slope: f64, area_m2: f64, theta: f64) -> f64 {
    slope * area_m2.powf(theta)
}

/// The fall over which slopes are measured when none is stated, m; `None` without elevations, areas and relief.
pub fn slope_drop(network: &Network) -> Option<f64> {
    drop_by_roughness(&Ascent::of(network, &Paths::of(network)?))
}

/// The trunk's profile, then those of other channels by length, and χ fitted to the trunk's tree. Empty and `None`
/// where no station has both elevation and area, or senses run in a circle.
pub fn profiles(network: &Network, ask: &ProfileAsk) -> (Vec<Profile>, Option<ChiFit>) {
    let Some(paths) = Paths::of(network) else { return (Vec::new(), None) };
    let ascent = Ascent::of(network, &paths);
    let chi_fit = fit(&ascent, &paths.trees(), ask.theta);
    let theta = chi_fit.as_ref().map(|fit| fit.theta).or(ask.theta).unwrap_or(ask.theta_reference);
    let chi = ascent.chi(theta);
    let drop = ask.slope_drop_m.filter(|d| *d > 0.0).or_else(|| drop_by_roughness(&ascent));
    let profile = |run: &Run| profile(&ascent, run, &chi[run.first..run.end], drop, ask.theta_reference);
    (ascent.runs.iter().take(ask.most).map(profile).collect(), chi_fit)
}

fn profile(ascent: &Ascent, run: &Run, chi: &[f64], drop: Option<f64>, theta_reference: f64) -> Profile {
    let steps = ascent.of_run(run);
    let filled = filled(steps);
    let (low, high) = (filled[0], filled[filled.len() - 1]);
    let slope = |i: usize| {
        let drop = drop.filter(|d| *d <= high - low)?;
        // Centred, but whole within the channel.
        let from = (filled[i] - 0.5 * drop).clamp(low, high - drop);
        let run = reached_at(steps, &filled, from + drop) - reached_at(steps, &filled, from);
        (run > 0.0).then(|| drop / run)
    };
    let stations: Vec<ProfileStation> = (0..steps.len())
        .map(|i| {
            let slope = slope(i);
            ProfileStation {
                at: steps[i].at,
                from_outlet_m: steps[i].s,
                elevation_m: steps[i].z,
                area_m2: steps[i].area,
                chi: chi[i],
                slope,
                ksn: slope.map(|s| steepness(s, steps[i].area, theta_reference)),
            }
        })
        .collect();
    let elevations: Vec<f64> = steps.iter().map(|s| s.z).collect();
    let knickpoints = breaks(chi, &elevations)
        .into_iter()
        .map(|b| Knickpoint {
            at: steps[b.index].at,
            from_outlet_m: steps[b.index].s,
            elevation_m: steps[b.index].z,
            ratio: b.ratio,
            p: b.p,
        })
        .collect();
    Profile { is_trunk: run.path == 0, stations, knickpoints }
}

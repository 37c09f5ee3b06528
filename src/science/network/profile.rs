//! Long profiles, χ, steepness and knickpoints.

use crate::ground::Point;

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

/// The concavity that lays all profiles on one line in χ.
#[derive(Clone, Debug, PartialEq)]
pub struct ChiFit {
    /// Concavity used for χ.
    pub theta: f64,
    /// Whether it was found by least scatter (else it is stated).
    pub found: bool,
    /// Range within which the scatter is indistinguishable from the least.
    pub theta_range: Option<[f64; 2]>,
    /// (θ, root mean square distance from one line, m).
    pub scatter: Vec<[f64; 2]>,
    /// Slope of elevation on χ with its 95 % interval: steepness, m^(2θ)/m.
    pub slope: f64,
    pub slope_ci95: Option<[f64; 2]>,
    pub r2: f64,
}

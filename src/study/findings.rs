//! What the executor returns: per patch the trend, the spacing, the verdicts, the sentence, and the
//! evidence behind each, so that window, plates and tables draw from one place.
//!
//! Angles are true azimuths. Lengths are in metres, or in pixels where the raster has no ground
//! size; `PatchFinding::unit` says which.

use crate::ground::{Axis, Azimuth, Caution, Grid, LengthUnit, LonLat, Point, SandFlow};

use super::{
    BackwardsFinding, BirthFinding, BuildingFinding, CalendarFinding, ComparisonFinding, CrestsFinding,
    DriftFinding, ElongationFinding, EquivalenceFinding, GustFinding, Id, MigrationFinding, NetworkFinding,
    ObstaclesFinding, PatternFinding, RecoveryFinding, RoundingFinding, SandFinding, SeasonFinding,
    SensitivityFinding, SetAside, ThinningFinding,
};

/// All results of one run.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Findings {
    /// SHA-256 of the sheet that made them, hex.
    pub sheet_fingerprint: String,
    pub rasters: Vec<RasterFinding>,
    pub winds: Vec<WindFinding>,
    pub patches: Vec<PatchFinding>,
    pub networks: Vec<NetworkFinding>,
    /// What synthetic bedforms laid into patches say of what would have been seen there.
    pub recoveries: Vec<RecoveryFinding>,
    /// Patches held against the same ground on other rasters.
    pub comparisons: Vec<ComparisonFinding>,
    /// What the patches say together.
    pub together: TogetherFinding,
    /// What failed, by name; everything else is complete.
    pub failures: Vec<Failure>,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Failure {
    /// `"patch Long dunes"`, `"raster north.tif"`.
    pub what: String,
    pub why: String,
}

/// What a raster is, as used.
#[derive(Clone, Debug, PartialEq)]
pub struct RasterFinding {
    pub id: Id,
    pub name: String,
    pub path: String,
    pub width: usize,
    pub height: usize,
    pub bands: usize,
    pub sample: String,
    /// Ground size of the centre pixel; `None` in pixel units.
    pub pixel_m: Option<[f64; 2]>,
    pub body: String,
    /// Projection definition, or a phrase that says there is none.
    pub projection: String,
    pub nodata: Option<f64>,
    /// Valid share of all pixels at the level looked at; `None` when not counted.
    pub valid_fraction: Option<f64>,
    pub cautions: Vec<Caution>,
}

/// Everything about one patch.
#[derive(Clone, Debug, PartialEq)]
pub struct PatchFinding {
    pub id: Id,
    pub name: String,
    pub raster: Id,
    /// Fingerprint of all that made this finding; differs from the sheet's when out of date.
    pub fingerprint: String,
    pub unit: LengthUnit,
    pub area: f64,
    pub valid_fraction: f64,
    pub centre: Option<LonLat>,
    pub trend: TrendFinding,
    pub spectrum: SpectrumFinding,
    pub verdicts: Vec<VerdictFinding>,
    /// The two-wind regimes that would make its trend; `None` without one.
    pub backwards: Option<BackwardsFinding>,
    /// One plain sentence with uncertainty and caveat.
    pub sentence: String,
    pub cautions: Vec<Caution>,
    /// The spacing against that of first dunes, by each wind record whose air is known.
    pub birth: Vec<BirthFinding>,
    /// The crests traced in it; in words why there are none.
    pub crests: Result<CrestsFinding, String>,
    /// Its trend by scale, its populations, and what the light does to them; empty at a first look.
    pub pattern: PatternFinding,
    /// What the outcrops in it say; `None` where the sheet has none there, or at a first look.
    pub obstacles: Option<ObstaclesFinding>,
}

/// The trend from the structure tensor.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct TrendFinding {
    /// Whether a preferred trend is claimed at the sheet's level.
    pub defined: bool,
    /// The mean axis; `None` whenever `defined` is false.
    pub axis: Option<Axis>,
    /// Half width of the 95 % interval, degrees (axial); `None` when the interval is all axes.
    pub ci95_half_deg: Option<f64>,
    /// Which interval: `"block bootstrap"` or `"effective n"`.
    pub ci95_source: &'static str,
    /// R̄ of the doubled angle over the nodes that passed, in [0, 1].
    pub resultant_length: f64,
    /// The same over all nodes: how aligned the ground as a whole is, faint places included.
    pub resultant_length_all: f64,
    /// κ of the doubled angle, and which estimator.
    pub kappa_doubled: Option<f64>,
    /// Axial standard deviation, degrees.
    pub spread_deg: Option<f64>,
    /// Nodes that passed the noise floor, and all nodes looked at.
    pub n: usize,
    pub n_all: usize,
    pub n_eff: f64,
    /// e-folding length of the trend field, in `unit`.
    pub correlation_length: Option<f64>,
    pub rayleigh_p: Option<f64>,
    pub modes: Vec<ModeFinding>,
    pub nodes: Vec<Node>,
    /// Share of weight per bin of `rose_bin_deg`, from axis 0°.
    pub rose: Vec<f64>,
    pub rose_bin_deg: f64,
    /// Kernel density of axes at every degree 0..180 (per degree of axis).
    pub density: Vec<f64>,
    /// Scales used, in pixels.
    pub gradient_scale_px: f64,
    pub integration_scale_px: f64,
    pub node_step_px: f64,
    /// The coherence a node had to pass.
    pub coherence_floor: f64,
}

/// One component of the mixture.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ModeFinding {
    pub axis: Axis,
    pub weight: f64,
    pub kappa_doubled: f64,
}

/// A place where the trend was measured.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Node {
    /// Full-resolution pixel coordinates.
    pub at: Point,
    pub axis: Axis,
    pub coherence: f64,
    /// Passed the noise floor.
    pub significant: bool,
}

/// Dominant spacing and trend from windowed spectra.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SpectrumFinding {
    /// Whether a peak passed the test.
    pub defined: bool,
    pub axis: Option<Axis>,
    pub axis_ci95_half_deg: Option<f64>,
    /// In `PatchFinding::unit`.
    pub spacing: Option<f64>,
    pub spacing_ci95: Option<[f64; 2]>,
    /// Global p of the strongest peak.
    pub p: Option<f64>,
    /// Axial angular spread of the peak, degrees.
    pub spread_deg: Option<f64>,
    pub windows: usize,
    pub windows_with_peak: usize,
    pub window_px: usize,
    /// Wavelengths per window.
    pub cycles: Option<f64>,
    /// Mean log₁₀(power / background), frequency origin in the middle, for show.
    pub picture: Option<SpectrumPicture>,
    /// (wavelength in `unit`, power / background) along the peak's direction ± 15°.
    pub profile: Vec<[f64; 2]>,
}

/// A north-up spectrum: x = east frequency, y = −north frequency, centre = 0.
#[derive(Clone, Debug, PartialEq)]
pub struct SpectrumPicture {
    pub log_ratio: Grid<f32>,
    /// Frequency at the right and upper edge, cycles per `unit`.
    pub edge_frequency: f64,
}

/// A wind record after quality control, and the sand it moves.
#[derive(Clone, Debug, PartialEq)]
pub struct WindFinding {
    pub id: Id,
    pub name: String,
    pub rows: usize,
    pub used: usize,
    pub calm: usize,
    /// What was set aside, and why: code, count, text naming the first lines.
    pub set_aside: Vec<SetAside>,
    /// (first, last) seconds since 1970, in the record's clock.
    pub span: Option<[i64; 2]>,
    pub interval_s: Option<f64>,
    /// Drift potential by the Earth practice in knots (vector units); `None` off Earth.
    pub fryberger: Option<DriftFinding>,
    /// By the sheet's transport law and threshold.
    pub flux: DriftFinding,
    pub law: String,
    pub threshold_ustar: f64,
    pub threshold_speed_at_height: f64,
    /// Sand flow by 5° sectors of direction TOWARD, in the flux unit, for roses and theories.
    pub rose: Vec<SandFlow>,
    pub seasons: Vec<SeasonFinding>,
    /// Winds at least as strong count as storms, m s⁻¹ at the anemometer.
    pub storm_speed: Option<f64>,
    /// The months that move most sand.
    pub season: Option<&'static str>,
    /// The drift under every law and threshold.
    pub sensitivity: Vec<SensitivityFinding>,
    pub cautions: Vec<Caution>,
    /// The sand under this air; `None` without air or gravity.
    pub sand: Option<SandFinding>,
    /// By years, months and seasons; `None` without a clock or without sand.
    pub calendar: Option<CalendarFinding>,
    /// What longer intervals and coarser classes would have hidden.
    pub thinning: Option<ThinningFinding>,
    pub rounding: RoundingFinding,
    /// An upper bound by the gusts of the record; `None` when it has none.
    pub gusts: Option<GustFinding>,
}

/// A patch judged by one wind record.
#[derive(Clone, Debug, PartialEq)]
pub struct VerdictFinding {
    pub winds: Id,
    pub winds_name: String,
    /// Why there is no verdict; then the rest is empty.
    pub refused: Option<String>,
    pub toward: Option<Azimuth>,
    pub ratio: Option<f64>,
    pub obliquity_deg: Option<f64>,
    pub obliquity_ci95_deg: Option<[f64; 2]>,
    /// Longitudinal, oblique, transverse.
    pub probabilities: Option<[f64; 3]>,
    /// The same for a random axis, so that probability can be read as a ratio.
    pub class_priors: [f64; 3],
    /// The trend against the way crests extend: the test of "longitudinal".
    pub elongation: Option<ElongationFinding>,
    pub theories: Vec<TheoryFinding>,
    /// Posterior by how crests are built.
    pub building: BuildingFinding,
    /// ln of the factor by which bed instability is better than fingering: above 0 speaks for full sand
    /// cover, below for starved ground.
    pub supply_ln: Option<f64>,
    /// Growth of the fingering trend over that of the bed-instability trend, at the stated flux-up ratio.
    pub growth_ratio: Option<f64>,
    /// Which way crests built by bed instability move, at their trend and those that tie with it.
    pub migration: Vec<MigrationFinding>,
    /// (T_max − T_min)/(T_max + T_min) of the regime.
    pub alignment_strength: Option<f64>,
    /// What would change the verdict, the nearest change first.
    pub flips: Vec<Flip>,
    pub cautions: Vec<Caution>,
}

#[derive(Clone, Debug, PartialEq)]
pub struct TheoryFinding {
    pub name: &'static str,
    pub method: &'static str,
    /// Whether crests extend along themselves under it.
    pub extends: bool,
    /// Predicted by the whole record; `None` for the random reference or when undefined.
    pub axis: Option<Axis>,
    /// The end that grows, where the theory tells one.
    pub toward: Option<Azimuth>,
    /// Other axes that tie or compete with it.
    pub ties: Vec<Axis>,
    /// How much better the axis is than others, 0 to 1, in the theory's own measure.
    pub strength: Option<f64>,
    /// Axial standard deviation of the bootstrap cloud, degrees.
    pub spread_deg: Option<f64>,
    /// Whether the trend agrees with the prediction within the margin.
    pub equivalence: Option<EquivalenceFinding>,
    pub prior: f64,
    pub posterior: f64,
    /// ln of the Bayes factor against a random axis.
    pub ln_bayes_factor: f64,
    /// Predicted obliquities (degrees from the resultant) of the bootstrap draws, thinned for show.
    pub cloud_deg: Vec<f32>,
}

/// A parameter and the value at which the verdict turns.
#[derive(Clone, Debug, PartialEq)]
pub struct Flip {
    pub parameter: &'static str,
    /// As it stands, with its unit.
    pub now: String,
    /// Where the verdict has turned, with its unit.
    pub at: String,
    /// What turns into what.
    pub change: String,
    /// How far that is in units of the parameter's own doubt; below 1 the change lies within it.
    /// `None` for a choice, such as the law.
    pub reach: Option<f64>,
}

/// What the patches say together.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct TogetherFinding {
    /// One for each record that judges two trends or more.
    pub joint: Vec<JointFinding>,
    /// The tests for a preferred trend, with false discoveries controlled.
    pub discoveries: Vec<Discovery>,
    /// The two-wind regimes that would make the trends of several patches.
    pub regimes: Vec<BackwardsFinding>,
}

/// Several trends judged by one record under one theory.
#[derive(Clone, Debug, PartialEq)]
pub struct JointFinding {
    pub winds: Id,
    pub winds_name: String,
    pub trends: Vec<JointTrend>,
    pub theories: Vec<JointTheory>,
    pub sentence: String,
}

#[derive(Clone, Debug, PartialEq)]
pub struct JointTrend {
    /// The patch, and which of its populations when it has several.
    pub name: String,
    pub axis: Axis,
    /// ln of the factor by which bed instability is better than fingering here.
    pub supply_ln: f64,
}

#[derive(Clone, Debug, PartialEq)]
pub struct JointTheory {
    pub name: &'static str,
    pub posterior: f64,
    pub ln_bayes_factor: f64,
}

/// A patch's test for a preferred trend among all of the sheet's.
#[derive(Clone, Debug, PartialEq)]
pub struct Discovery {
    pub patch: Id,
    pub name: String,
    pub p: f64,
    /// Benjamini–Hochberg: claiming all with q at or below a level keeps the expected share of false
    /// claims at that level.
    pub q: f64,
    /// Whether the patch claims a trend by its own p.
    pub claimed: bool,
}

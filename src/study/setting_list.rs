//! Every setting of the sheet, each with its record.

use super::records::{Setting, SettingKind, SettingValue};
use super::{LettauConstant, ObstacleGround, ThresholdLaw, TransportLaw, channel_list, pattern_list};

const THRESHOLD_LAWS: [(ThresholdLaw, &str, &str); 3] = [
    (ThresholdLaw::Bagnold, "bagnold", "Bagnold 1941"),
    (ThresholdLaw::IversenWhite, "iversen-white", "Iversen & White 1982"),
    (ThresholdLaw::ShaoLu, "shao-lu", "Shao & Lu 2000"),
];

const TRANSPORT_LAWS: [(TransportLaw, &str, &str); 6] = [
    (TransportLaw::DriftPotential, "drift-potential", "Drift potential (Fryberger & Dean 1979)"),
    (TransportLaw::Bagnold, "bagnold", "Bagnold 1941"),
    (TransportLaw::Kawamura, "kawamura", "Kawamura 1951"),
    (TransportLaw::White, "white", "White 1979, corrected"),
    (TransportLaw::Lettau, "lettau", "Lettau & Lettau 1978"),
    (TransportLaw::Kok, "kok", "Kok et al. 2012, linear in stress"),
];

const LETTAU_CONSTANTS: [(LettauConstant, &str, &str); 2] =
    [(LettauConstant::High, "6.7", "6.7"), (LettauConstant::Low, "4.2", "4.2")];
const OBSTACLE_GROUNDS: [(ObstacleGround, &str, &str); 2] = [
    (ObstacleGround::Grained, "grained", "moved only"),
    (ObstacleGround::Homogeneous, "homogeneous", "moved and turned"),
];

/// Every setting, in the order of the reasoning.
pub fn all_settings() -> impl Iterator<Item = &'static Setting> {
    PATTERN.iter().chain(pattern_list::BEDFORM_PATTERN).chain(channel_list::CHANNELS)
}

/// Bedforms, winds and verdicts.
const PATTERN: &[Setting] = &[
    auto!(
        "trend.gradient_scale_px",
        "Gradient scale",
        "px",
        1.0,
        64.0,
        trend.gradient_scale_px,
        "Standard deviation of the Gaussian whose derivative measures the slope of brightness. Left open, it follows the spacing."
    ),
    auto!(
        "trend.integration_scale_px",
        "Integration scale",
        "px",
        2.0,
        512.0,
        trend.integration_scale_px,
        "Standard deviation of the Gaussian over which slopes are gathered into one trend. Left open: at least half the spacing and twice the gradient scale."
    ),
    auto!(
        "trend.node_step_px",
        "Node step",
        "px",
        1.0,
        1024.0,
        trend.node_step_px,
        "Distance between the places where the trend is measured. Left open, it follows the integration scale."
    ),
    number!(
        "trend.significance",
        "Noise level of a node",
        "1",
        1e-6,
        0.5,
        trend.significance,
        "Chance that a node of pure noise would show as much coherence; nodes above it are not drawn."
    ),
    auto!(
        "spectrum.window_px",
        "Spectrum window",
        "px",
        32.0,
        4096.0,
        spectrum.window_px,
        "Side of the square windows whose spectra are averaged. Left open: about eight spacings."
    ),
    number!(
        "spectrum.shortest_spacing_px",
        "Shortest spacing",
        "px",
        2.5,
        1024.0,
        spectrum.shortest_spacing_px,
        "Waves shorter than this are not looked for."
    ),
    auto!(
        "spectrum.longest_spacing_px",
        "Longest spacing",
        "px",
        4.0,
        65536.0,
        spectrum.longest_spacing_px,
        "Waves longer than this are not looked for. Left open: a third of the window."
    ),
    number!(
        "spectrum.significance",
        "Level of a spectral peak",
        "1",
        1e-6,
        0.5,
        spectrum.significance,
        "Chance that the background alone would raise a peak as high anywhere in the search range."
    ),
    number!(
        "statistics.significance",
        "Level for a preferred trend",
        "1",
        1e-6,
        0.5,
        statistics.significance,
        "A preferred trend is claimed when directions without preference would look as aligned less often than this."
    ),
    whole!(
        "statistics.resamples",
        "Bootstrap resamples of nodes",
        100,
        100_000,
        statistics.resamples,
        "Draws of the block bootstrap behind the interval of the mean trend."
    ),
    whole!(
        "statistics.most_modes",
        "Most trends in one patch",
        1,
        6,
        statistics.most_modes,
        "Largest number of von Mises components tried; the criterion decides how many are kept."
    ),
    number!(
        "statistics.rose_bin_deg",
        "Bin of the rose",
        "°",
        1.0,
        30.0,
        statistics.rose_bin_deg,
        "Width of the petals of the rose diagram; 180 must be a multiple of it."
    ),
    number!(
        "wind.grain_m",
        "Grain diameter",
        "m",
        2e-5,
        5e-3,
        wind.grain_m,
        "Diameter of the sand that builds the bedforms."
    ),
    number!(
        "wind.grain_density",
        "Grain density",
        "kg/m³",
        300.0,
        8000.0,
        wind.grain_density,
        "Density of the grains: quartz 2650, basalt 3000, water ice 920."
    ),
    Setting {
        key: "wind.threshold_law",
        label: "Threshold",
        unit: "1",
        help: "Which published law gives the friction velocity at which sand starts to move.",
        kind: SettingKind::Choice(&[
            ("bagnold", "Bagnold 1941"),
            ("iversen-white", "Iversen & White 1982"),
            ("shao-lu", "Shao & Lu 2000"),
        ]),
        get: |s| SettingValue::Choice(key_of(&THRESHOLD_LAWS, s.wind.threshold_law)),
        set: |s, v| choose(&THRESHOLD_LAWS, v, &mut s.wind.threshold_law),
    },
    Setting {
        key: "wind.transport_law",
        label: "Transport law",
        unit: "1",
        help: "Which published law turns wind into moving sand. Trends need only the shares of the sectors.",
        kind: SettingKind::Choice(&[
            ("drift-potential", "Drift potential (Fryberger & Dean 1979)"),
            ("bagnold", "Bagnold 1941"),
            ("kawamura", "Kawamura 1951"),
            ("white", "White 1979, corrected"),
            ("lettau", "Lettau & Lettau 1978"),
            ("kok", "Kok et al. 2012, linear in stress"),
        ]),
        get: |s| SettingValue::Choice(key_of(&TRANSPORT_LAWS, s.wind.transport_law)),
        set: |s, v| choose(&TRANSPORT_LAWS, v, &mut s.wind.transport_law),
    },
    number!(
        "wind.greatest_speed",
        "Greatest believable speed",
        "m/s",
        5.0,
        500.0,
        wind.greatest_speed,
        "Faster records are set aside and named."
    ),
    number!(
        "wind.block_days",
        "Bootstrap block of the record",
        "d",
        0.25,
        400.0,
        wind.block_days,
        "Length of the pieces in which the record is redrawn, so that weather and season stay together."
    ),
    whole!(
        "wind.resamples",
        "Bootstrap resamples of the record",
        50,
        20_000,
        wind.resamples,
        "Draws of the record behind drift intervals and theory clouds."
    ),
    number!(
        "wind.cohesion_kg_s2",
        "Cohesion γ",
        "kg/s²",
        1e-5,
        1e-2,
        wind.cohesion_kg_s2,
        "What holds grains together in Shao and Lu's threshold; 1.65e-4 to 5e-4 is published. Under low gravity it decides the threshold."
    ),
    number!(
        "wind.grain_doubt",
        "Doubt of the grain diameter",
        "1",
        1.0,
        10.0,
        wind.grain_doubt,
        "The diameter is known to within this factor: it may be the value divided by it, or times it."
    ),
    number!(
        "wind.grain_density_doubt",
        "Doubt of the grain density",
        "1",
        1.0,
        10.0,
        wind.grain_density_doubt,
        "The grain density is known to within this factor."
    ),
    number!(
        "wind.cohesion_doubt",
        "Doubt of the cohesion",
        "1",
        1.0,
        10.0,
        wind.cohesion_doubt,
        "The cohesion is known to within this factor; 1.7 spans what is published."
    ),
    Setting {
        key: "wind.lettau_constant",
        label: "Lettau's constant",
        unit: "1",
        help: "Sources differ: 6.7 or 4.2. It scales the flux and leaves trends alone.",
        kind: SettingKind::Choice(&[("6.7", "6.7"), ("4.2", "4.2")]),
        get: |s| SettingValue::Choice(key_of(&LETTAU_CONSTANTS, s.wind.lettau_constant)),
        set: |s, v| choose(&LETTAU_CONSTANTS, v, &mut s.wind.lettau_constant),
    },
    auto!(
        "wind.threshold_ustar",
        "Threshold friction velocity",
        "m/s",
        0.001,
        20.0,
        wind.threshold_ustar,
        "Friction velocity at which this sand starts to move, when known. Left open, the threshold law gives it."
    ),
    number!(
        "wind.roughness_doubt",
        "Roughness, factor of doubt",
        "1",
        1.0,
        100.0,
        wind.roughness_doubt,
        "The roughness at the mast lies between value/factor and value × factor; the draws take it from there."
    ),
    number!(
        "wind.storm_quantile",
        "Storms begin at",
        "1",
        0.5,
        0.999,
        wind.storm_quantile,
        "Share of the time with moving sand that is spent below storm speed; the storm theories see only the winds above."
    ),
    number!(
        "verdict.model_error_deg",
        "Model error",
        "°",
        0.0,
        45.0,
        verdict.model_error_deg,
        "Axial standard deviation by which a right theory may still miss the ground."
    ),
    number!(
        "verdict.tail_share",
        "Fat tail",
        "1",
        0.001,
        0.5,
        verdict.tail_share,
        "Share of every prediction spread over all axes, so that no factor becomes absurd."
    ),
    number!(
        "verdict.margin_deg",
        "Margin of agreement",
        "°",
        1.0,
        45.0,
        verdict.margin_deg,
        "Two axes count as the same when the test shows them within this of each other."
    ),
    number!(
        "verdict.least_strength",
        "Least alignment strength",
        "1",
        0.0,
        1.0,
        verdict.least_strength,
        "Below this contrast of bedform-normal transport a predicted trend is not meaningful and no verdict is given."
    ),
    number!(
        "verdict.flux_up",
        "Flux-up ratio Γ",
        "1",
        0.0,
        10.0,
        verdict.flux_up,
        "How much faster sand moves over a crest than over flat ground: 0 not at all, 1.6 in numerical dunes."
    ),
    number!(
        "verdict.flux_up_doubt",
        "Flux-up ratio, factor of doubt",
        "1",
        1.0,
        5.0,
        verdict.flux_up_doubt,
        "The flux-up ratio lies between value/factor and value × factor; sources print 1.5 to 2."
    ),
    prior!("verdict.priors.transverse", "transverse to the resultant", verdict.priors.transverse),
    prior!("verdict.priors.along", "along the resultant", verdict.priors.along),
    prior!("verdict.priors.gross_normal", "gross bedform-normal", verdict.priors.gross_normal),
    prior!("verdict.priors.bed_instability", "bed instability", verdict.priors.bed_instability),
    prior!("verdict.priors.fingering", "fingering", verdict.priors.fingering),
    prior!("verdict.priors.storms_across", "bed instability, storms only", verdict.priors.storms_across),
    prior!("verdict.priors.storms_along", "fingering, storms only", verdict.priors.storms_along),
    prior!("verdict.priors.season", "bed instability, strongest season", verdict.priors.season),
    prior!("verdict.priors.stated", "stated axis", verdict.priors.stated),
    prior!("verdict.priors.random", "random axis", verdict.priors.random),
    number!(
        "backwards.least_flux_up",
        "Least flux-up ratio",
        "1",
        0.0,
        10.0,
        backwards.least_flux_up,
        "First of three gains of flux over a crest that are held equally likely when regimes are sought from trends alone; 0 is gross transport."
    ),
    number!(
        "backwards.flux_up",
        "Usual flux-up ratio",
        "1",
        0.0,
        10.0,
        backwards.flux_up,
        "The second of the three; what a picked regime is drawn with."
    ),
    number!(
        "backwards.greatest_flux_up",
        "Greatest flux-up ratio",
        "1",
        0.0,
        10.0,
        backwards.greatest_flux_up,
        "The third of the three."
    ),
    auto!(
        "backwards.wind_from_deg",
        "Dominant wind from",
        "°",
        0.0,
        360.0,
        backwards.wind_from_deg,
        "Azimuth the dominant sand-moving wind blows from, when something is known of it without a record. Left open: any."
    ),
    number!(
        "backwards.wind_sd_deg",
        "Doubt of that wind",
        "°",
        1.0,
        90.0,
        backwards.wind_sd_deg,
        "Standard deviation of the dominant wind's azimuth."
    ),
    number!(
        "obstacle.inner_radii",
        "Annulus from",
        "radii",
        1.0,
        3.0,
        obstacle.inner_radii,
        "Inner edge of the ground looked at round an outcrop. State it before looking: do not pick the one that works."
    ),
    number!(
        "obstacle.outer_radii",
        "Annulus to",
        "radii",
        1.5,
        8.0,
        obstacle.outer_radii,
        "Outer edge of the ground looked at round an outcrop; the regional trend is taken beyond it."
    ),
    number!(
        "obstacle.radius_doubt",
        "Doubt in the radius",
        "1",
        0.05,
        0.6,
        obstacle.radius_doubt,
        "Share by which the outlined radius may be wrong: the amplitude is given over this range."
    ),
    whole!(
        "obstacle.virtual_count",
        "Virtual outcrops",
        0,
        20_000,
        obstacle.virtual_count,
        "How often the outline is set down where no outcrop stands, to see what the ground gives by itself. Below 999 no p is given."
    ),
    number!(
        "obstacle.least_amplitude",
        "Least turn",
        "1",
        0.05,
        1.0,
        obstacle.least_amplitude,
        "Amplitude of the turn round an outcrop (1 = as the flow turns) below which nothing is decided."
    ),
    Setting {
        key: "obstacle.ground",
        label: "Virtual outcrops are",
        unit: "1",
        help: "Turned too only where the field is alike in all directions.",
        kind: SettingKind::Choice(&[("grained", "moved only"), ("homogeneous", "moved and turned")]),
        get: |s| SettingValue::Choice(key_of(&OBSTACLE_GROUNDS, s.obstacle.ground)),
        set: |s, v| choose(&OBSTACLE_GROUNDS, v, &mut s.obstacle.ground),
    },
];

pub(super) fn key_of<T: Copy + PartialEq>(laws: &[(T, &'static str, &'static str)], law: T) -> &'static str {
    laws.iter().find(|(l, ..)| *l == law).map_or("", |(_, key, _)| key)
}

pub(super) fn choose<T: Copy>(laws: &[(T, &'static str, &'static str)], value: SettingValue, field: &mut T) {
    if let SettingValue::Choice(key) = value
        && let Some((law, ..)) = laws.iter().find(|(_, k, _)| *k == key)
    {
        *field = *law;
    }
}

impl ThresholdLaw {
    /// The name as cited.
    pub fn label(self) -> &'static str {
        THRESHOLD_LAWS.iter().find(|(l, ..)| *l == self).map_or("", |(.., label)| label)
    }
}

impl TransportLaw {
    /// The name as cited.
    pub fn label(self) -> &'static str {
        TRANSPORT_LAWS.iter().find(|(l, ..)| *l == self).map_or("", |(.., label)| label)
    }
}

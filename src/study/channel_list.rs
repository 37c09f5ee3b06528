//! Every setting about channels, each with its record.

use crate::science::channel::detect::ChannelTone;
use crate::science::drainage::condition::Conditioning;
use crate::science::drainage::heads::HeadRule;
use crate::science::drainage::routing::Router;

use super::records::{Setting, SettingKind, SettingValue};
use super::setting_list::{choose, key_of};

const CONDITIONINGS: [(Conditioning, &str, &str); 4] = [
    (Conditioning::Fill, "fill", "filled"),
    (Conditioning::FillSloped, "fill-sloped", "filled, flats sloped"),
    (Conditioning::Breach, "breach", "breached"),
    (Conditioning::BreachThenFill, "breach-then-fill", "breached, else filled"),
];

const ROUTERS: [(Router, &str, &str); 4] = [
    (Router::D8, "d8", "D8 (O’Callaghan & Mark 1984)"),
    (Router::DInfinity, "d-infinity", "D∞ (Tarboton 1997)"),
    (Router::Freeman, "freeman", "Multiple (Freeman 1991)"),
    (Router::Quinn, "quinn", "Multiple (Quinn et al. 1991)"),
];

const HEAD_RULES: [(HeadRule, &str, &str); 3] = [
    (HeadRule::Area, "area", "contributing area"),
    (HeadRule::SlopeArea, "slope-area", "area times slope squared"),
    (HeadRule::CurvedArea, "curved-area", "curved area above"),
];

const TONES: [(ChannelTone, &str, &str); 3] = [
    (ChannelTone::Dark, "dark", "darker than their banks"),
    (ChannelTone::Bright, "bright", "brighter than their banks"),
    (ChannelTone::EdgePair, "edge-pair", "a pair of edges"),
];

/// Drainage, channels on images, measures, palaeo-flow.
pub const CHANNELS: &[Setting] = &[
    Setting {
        key: "drainage.conditioning",
        label: "Sinks are",
        unit: "1",
        help: "How elevation is made to drain. Lakes and basins you mark stay closed whatever is chosen.",
        kind: SettingKind::Choice(&[
            ("fill", "filled"),
            ("fill-sloped", "filled, flats sloped"),
            ("breach", "breached"),
            ("breach-then-fill", "breached, else filled"),
        ]),
        get: |s| SettingValue::Choice(key_of(&CONDITIONINGS, s.drainage.conditioning)),
        set: |s, v| choose(&CONDITIONINGS, v, &mut s.drainage.conditioning),
    },
    number!(
        "drainage.breach_depth_m",
        "Deepest trench",
        "m",
        0.0,
        10000.0,
        drainage.breach_depth_m,
        "A sink is breached only where the trench stays shallower than this."
    ),
    whole!(
        "drainage.breach_cells",
        "Longest trench",
        1,
        10000,
        drainage.breach_cells,
        "A sink is breached only where the trench is shorter than so many cells."
    ),
    Setting {
        key: "drainage.router",
        label: "Area is shared by",
        unit: "1",
        help: "How contributing area is handed down. The lines of the network always follow the steepest neighbour.",
        kind: SettingKind::Choice(&[
            ("d8", "D8 (O’Callaghan & Mark 1984)"),
            ("d-infinity", "D∞ (Tarboton 1997)"),
            ("freeman", "Multiple (Freeman 1991)"),
            ("quinn", "Multiple (Quinn et al. 1991)"),
        ]),
        get: |s| SettingValue::Choice(key_of(&ROUTERS, s.drainage.router)),
        set: |s, v| choose(&ROUTERS, v, &mut s.drainage.router),
    },
    Setting {
        key: "drainage.heads",
        label: "Channels begin by",
        unit: "1",
        help: "What must pass the threshold for a channel to begin.",
        kind: SettingKind::Choice(&[
            ("area", "contributing area"),
            ("slope-area", "area times slope squared"),
            ("curved-area", "curved area above"),
        ]),
        get: |s| SettingValue::Choice(key_of(&HEAD_RULES, s.drainage.heads)),
        set: |s, v| choose(&HEAD_RULES, v, &mut s.drainage.heads),
    },
    auto!(
        "drainage.threshold_m2",
        "Threshold",
        "m²",
        1e-06,
        1000000000000000.0,
        drainage.threshold_m2,
        "Value at which channels begin. Left open: the smallest that passes the constant-drop test."
    ),
    number!(
        "drainage.curvature_scale_cells",
        "Smoothing before curvature",
        "cells",
        0.5,
        50.0,
        drainage.curvature_scale_cells,
        "Standard deviation of the smoothing before upwardly curved cells are told."
    ),
    whole!(
        "drainage.snap_cells",
        "Reach of an outlet",
        0,
        1000,
        drainage.snap_cells,
        "A picked outlet is moved to the greatest contributing area within so many cells."
    ),
    Setting {
        key: "channel.tone",
        label: "Channels are",
        unit: "1",
        help: "How channels stand out from the ground beside them.",
        kind: SettingKind::Choice(&[
            ("dark", "darker than their banks"),
            ("bright", "brighter than their banks"),
            ("edge-pair", "a pair of edges"),
        ]),
        get: |s| SettingValue::Choice(key_of(&TONES, s.channel.tone)),
        set: |s, v| choose(&TONES, v, &mut s.channel.tone),
    },
    number!(
        "channel.narrowest_px",
        "Narrowest channel",
        "px",
        1.5,
        1000.0,
        channel.narrowest_px,
        "Channels narrower than this are not looked for."
    ),
    number!(
        "channel.widest_px",
        "Widest channel",
        "px",
        2.0,
        2000.0,
        channel.widest_px,
        "Channels wider than this are not looked for."
    ),
    number!(
        "channel.significance",
        "Noise level of a channel",
        "1",
        1e-09,
        0.5,
        channel.significance,
        "Chance that a place of pure noise would answer as strongly."
    ),
    number!(
        "channel.gap_widths",
        "Longest gap",
        "widths",
        0.0,
        100.0,
        channel.gap_widths,
        "Gaps up to so many channel widths are bridged, with the confidence stated."
    ),
    number!(
        "channel.spur_half_widths",
        "Shortest branch",
        "half-widths",
        0.0,
        100.0,
        channel.spur_half_widths,
        "Branches shorter than so many half-widths are pruned."
    ),
    number!(
        "channel.least_length_widths",
        "Shortest lone channel",
        "widths",
        0.0,
        1000.0,
        channel.least_length_widths,
        "Lone pieces shorter than so many widths are dropped."
    ),
    auto!(
        "network.chord",
        "Chord of junction angles",
        "m or px",
        1e-06,
        10000000.0,
        network.chord,
        "Length over which the directions of channels that join are taken. Left open: by channel width, or by cells."
    ),
    number!(
        "network.chord_widths",
        "Chord by widths",
        "widths",
        1.0,
        100.0,
        network.chord_widths,
        "The chord in channel widths where these are known."
    ),
    number!(
        "network.chord_cells",
        "Chord by cells",
        "cells",
        3.0,
        1000.0,
        network.chord_cells,
        "The chord in cells where no width is known."
    ),
    auto!(
        "network.theta",
        "Concavity",
        "1",
        0.0,
        2.0,
        network.theta,
        "Concavity of χ. Left open: the one that scatters elevation least about one line."
    ),
    number!(
        "network.theta_reference",
        "Reference concavity",
        "1",
        0.01,
        2.0,
        network.theta_reference,
        "Concavity at which steepness indices are compared."
    ),
    auto!(
        "network.slope_drop_m",
        "Fall per slope",
        "m",
        0.001,
        10000.0,
        network.slope_drop_m,
        "Fall over which the slope of a channel is taken. Left open: by the roughness of the raster."
    ),
    number!(
        "network.valley_widths",
        "Valley scale",
        "widths",
        2.0,
        1000.0,
        network.valley_widths,
        "Length over which a channel is smoothed into its valley line, in channel widths (cells where none is known)."
    ),
    number!(
        "network.same_channel_px",
        "Same channel within",
        "px",
        0.5,
        100.0,
        network.same_channel_px,
        "Two networks show the same channel where they lie within so many pixels of the coarser raster."
    ),
    number!(
        "flow.liquid_density",
        "Density of the liquid",
        "kg/m³",
        100.0,
        5000.0,
        flow.liquid_density,
        "Density of the liquid that ran in the channels."
    ),
    number!(
        "flow.grain_density",
        "Density of the bed grains",
        "kg/m³",
        200.0,
        10000.0,
        flow.grain_density,
        "Density of the grains on the bed."
    ),
    number!(
        "flow.least_width_to_depth",
        "Least width over depth",
        "1",
        1.0,
        1000.0,
        flow.least_width_to_depth,
        "Width is measured, depth is not: bankfull depth lies between these shares of it."
    ),
    number!(
        "flow.greatest_width_to_depth",
        "Greatest width over depth",
        "1",
        1.0,
        1000.0,
        flow.greatest_width_to_depth,
        "Width is measured, depth is not: bankfull depth lies between these shares of it."
    ),
    auto!(
        "flow.least_slope",
        "Least slope",
        "1",
        1e-07,
        1.0,
        flow.least_slope,
        "Slope of the flow. Left open: from the elevation of the network."
    ),
    auto!(
        "flow.greatest_slope",
        "Greatest slope",
        "1",
        1e-07,
        1.0,
        flow.greatest_slope,
        "Slope of the flow. Left open: from the elevation of the network."
    ),
    number!(
        "flow.least_friction",
        "Least friction factor",
        "1",
        0.001,
        10.0,
        flow.least_friction,
        "Darcy–Weisbach friction factor."
    ),
    number!(
        "flow.greatest_friction",
        "Greatest friction factor",
        "1",
        0.001,
        10.0,
        flow.greatest_friction,
        "Darcy–Weisbach friction factor."
    ),
    number!(
        "flow.least_shields",
        "Least critical Shields stress",
        "1",
        0.001,
        1.0,
        flow.least_shields,
        "Dimensionless stress at which grains of the bed begin to move."
    ),
    number!(
        "flow.greatest_shields",
        "Greatest critical Shields stress",
        "1",
        0.001,
        1.0,
        flow.greatest_shields,
        "Dimensionless stress at which grains of the bed begin to move."
    ),
    number!(
        "flow.least_manning",
        "Least Manning’s n on Earth",
        "s/m^⅓",
        0.005,
        0.5,
        flow.least_manning,
        "Roughness as tabled for Earth; rescaled to the gravity of the body."
    ),
    number!(
        "flow.greatest_manning",
        "Greatest Manning’s n on Earth",
        "s/m^⅓",
        0.005,
        0.5,
        flow.greatest_manning,
        "Roughness as tabled for Earth; rescaled to the gravity of the body."
    ),
];

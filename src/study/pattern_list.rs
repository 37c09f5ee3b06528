//! Every setting about crests, injection and recovery, and two pictures, each with its record.

use crate::science::crest::CrestModel;

use super::records::{Setting, SettingKind, SettingValue};
use super::setting_list::{choose, key_of};

const MODELS: [(Option<CrestModel>, &str, &str); 5] = [
    (None, "fitting", "what fits the patch best"),
    (Some(CrestModel::BrightRidge), "bright-ridge", "bright ridges"),
    (Some(CrestModel::DarkRidge), "dark-ridge", "dark ridges"),
    (Some(CrestModel::BothRidges), "both-ridges", "bright and dark ridges"),
    (Some(CrestModel::SlipFace), "slip-face", "steps of tone at slip faces"),
];

/// Crests, injection and recovery, two pictures.
pub const BEDFORM_PATTERN: &[Setting] = &[
    Setting {
        key: "crest.model",
        label: "Crests are",
        unit: "1",
        help: "What a crest looks like; a patch may have its own.",
        kind: SettingKind::Choice(&[
            ("fitting", "what fits the patch best"),
            ("bright-ridge", "bright ridges"),
            ("dark-ridge", "dark ridges"),
            ("both-ridges", "bright and dark ridges"),
            ("slip-face", "steps of tone at slip faces"),
        ]),
        get: |s| SettingValue::Choice(key_of(&MODELS, s.crest.model)),
        set: |s, v| choose(&MODELS, v, &mut s.crest.model),
    },
    auto!(
        "crest.scale_px",
        "Crest scale",
        "px",
        1.0,
        64.0,
        crest.scale_px,
        "Scale of the derivatives; automatic takes it from the spacing, or from a sweep."
    ),
    number!(
        "crest.significance",
        "Chance of a false crest",
        "1",
        1e-6,
        0.5,
        crest.significance,
        "Chance that noise alone starts a line anywhere in the patch; sets the thresholds."
    ),
    number!(
        "crest.bridge_scales",
        "Longest gap bridged",
        "scales",
        0.0,
        40.0,
        crest.bridge_scales,
        "Gaps are bridged where both sides point at each other."
    ),
    number!(
        "crest.least_length_scales",
        "Shortest crest",
        "scales",
        1.0,
        200.0,
        crest.least_length_scales,
        "Shorter isolated lines are dropped."
    ),
    number!(
        "crest.tolerance_px",
        "Simplification",
        "px",
        0.0,
        10.0,
        crest.tolerance_px,
        "Greatest distance between a line as traced and as kept."
    ),
    whole!(
        "recovery.trends",
        "Trends laid in",
        0,
        90,
        recovery.trends,
        "Synthetic bedforms are laid in at so many trends, evenly over 180°; 0 leaves the test out, else 12 or more."
    ),
    whole!(
        "recovery.repeats",
        "Fields at each trend",
        1,
        200,
        recovery.repeats,
        "More give narrower intervals of the probability."
    ),
    whole!(
        "recovery.window_px",
        "Ground used",
        64,
        2048,
        recovery.window_px,
        "Side of the ground taken out of the patch to lay bedforms in, pixels."
    ),
    auto!(
        "recovery.spacing",
        "Spacing laid in",
        "m or px",
        1e-3,
        1e7,
        recovery.spacing,
        "Crest to crest; automatic takes the patch's own, else eight pixels."
    ),
    number!(
        "recovery.steepness",
        "Height over spacing",
        "1",
        1e-4,
        0.5,
        recovery.steepness,
        "Of the bedforms laid in; dunes are commonly near 1/20."
    ),
    auto!(
        "recovery.tone_per_slope",
        "Tone a slope adds",
        "tone",
        1e-9,
        1e9,
        recovery.tone_per_slope,
        "What a slope of one toward the light adds to the tone (to ln of intensity for radar); automatic makes them as strong as the patch's own."
    ),
    number!(
        "recovery.defects",
        "Defects laid in",
        "1",
        0.0,
        2.0,
        recovery.defects,
        "Free ends times spacing over crest length."
    ),
    auto!(
        "recovery.spread_deg",
        "Spread of crests laid in",
        "deg",
        0.0,
        40.0,
        recovery.spread_deg,
        "Standard deviation of their trends; automatic makes them stray as the patch's own do. Defects need some."
    ),
    number!(
        "recovery.tolerance_deg",
        "Counts as found within",
        "deg",
        1.0,
        45.0,
        recovery.tolerance_deg,
        "A trend claimed within so many degrees of the one laid in is found."
    ),
    number!(
        "compare.significance",
        "Level of two-picture tests",
        "1",
        1e-4,
        0.5,
        compare.significance,
        "Below this p two pictures are said to differ."
    ),
    number!(
        "compare.reach_spacings",
        "Farthest a crest may move",
        "spacings",
        0.05,
        2.0,
        compare.reach_spacings,
        "Crests are sought so far from where they were; beyond half a spacing the next crest is as near."
    ),
    whole!(
        "compare.permutations",
        "Rearrangements",
        0,
        100_000,
        compare.permutations,
        "Random rearrangements for tests whose tables do not hold here."
    ),
];

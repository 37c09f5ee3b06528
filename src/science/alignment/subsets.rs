//! Theories that hold part of the winds to be the builders: the storms, or one season.

use crate::ground::{Method, Symbol};

use super::bed_instability::COURRECH;
use super::resultant::HUNTER;

/// Storms alone.
pub const STORMS: Method = Method {
    id: "alignment.storms",
    name: "Storms only",
    question: "Which trend would crests have if only the strongest winds built them?",
    formula: "α = rule applied to the flows with V ≥ V_q, where q of the time that sand moves the wind is below V_q",
    symbols: SYMBOLS,
    assumptions: &["Weaker winds move sand but do not shape the crests, or move none"],
    limits: &[
        "The quantile is the user's choice: it stands among the settings",
        "Few storms are in a short record: look at the spread of the cloud",
    ],
    sources: &[HUNTER, COURRECH],
};

/// One season alone.
pub const SEASON: Method = Method {
    id: "alignment.season",
    name: "Strongest season only",
    question: "Which trend would crests have if the season that moves most sand built them?",
    formula: "α = argmax σ over the flows of the three calendar months with the greatest Σ q",
    symbols: SYMBOLS,
    assumptions: &["Crests are small enough to turn within the season"],
    limits: &["Needs a record with a clock and a calendar of four seasons"],
    sources: &[COURRECH],
};

const SYMBOLS: &[Symbol] = &[
    Symbol { symbol: "α", meaning: "trend of the crests", unit: "deg" },
    Symbol { symbol: "V", meaning: "wind speed at the anemometer", unit: "m s⁻¹" },
    Symbol { symbol: "q", meaning: "share of time, or flow", unit: "1" },
    Symbol { symbol: "σ", meaning: "growth by bed instability", unit: "unit of q" },
];

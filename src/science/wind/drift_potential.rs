//! Drift potential: the Earth practice of weighing winds by V²(V − Vt) in knots.

use crate::ground::{Method, Read, Source, Symbol};

/// Drift potential after Fryberger and Dean.
pub const METHOD: Method = Method {
    id: "wind.drift-potential",
    name: "Drift potential",
    question: "How energetic and how steady are the sand-moving winds, in the trade's units?",
    formula: "DP = Σ V² (V − Vt) t / 100;  RDP = |Σ DPᵢ e^{iθᵢ}|;  RDD = arg Σ DPᵢ e^{iθᵢ}",
    symbols: &[
        Symbol { symbol: "DP", meaning: "drift potential", unit: "vector units (knots)" },
        Symbol { symbol: "V", meaning: "wind speed at 10 m", unit: "knot" },
        Symbol { symbol: "Vt", meaning: "threshold at 10 m, 12 knots", unit: "knot" },
        Symbol { symbol: "t", meaning: "share of the record", unit: "%" },
        Symbol { symbol: "θ", meaning: "azimuth the wind blows toward", unit: "deg" },
        Symbol {
            symbol: "RDP, RDD",
            meaning: "length and azimuth of the resultant",
            unit: "vector units (knots), deg",
        },
    ],
    assumptions: &[
        "Quartz sand of 0.25–0.30 mm on Earth",
        "Winds at 10 m; others are carried there by the log law",
    ],
    limits: &[
        "Not a flux, and not comparable between worlds",
        "In m s⁻¹ all numbers are 0.1361 times as large; papers mix the two",
        "From classes it depends on their width; here each record counts by its own speed",
    ],
    sources: &[
        super::regime::FRYBERGER,
        Source {
            key: "bullard1997",
            authors: "Bullard, J. E.",
            year: 1997,
            title: "A note on the use of the \"Fryberger method\" for evaluating potential sand transport by wind",
            published: "Journal of Sedimentary Research 67, 499–501",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// The unit of a drift potential.
pub const UNIT: &str = "vector units (knots)";
/// Threshold at 10 m, knots.
pub const THRESHOLD_KNOTS: f64 = 12.0;
/// Height the practice refers to, m.
pub const HEIGHT: f64 = 10.0;
/// One knot, m s⁻¹.
pub const KNOT: f64 = 1852.0 / 3600.0;

/// V²(V − Vt) for a speed at 10 m in knots; 0 at and below the threshold. Times the share of the
/// record in percent, over 100, it is the record's part of DP: with shares that add to 1, the sum
/// of weight × share is DP itself.
pub fn weight(knots: f64) -> f64 {
    if knots > THRESHOLD_KNOTS { knots * knots * (knots - THRESHOLD_KNOTS) } else { 0.0 }
}

/// A drift potential in knot units, expressed in (m s⁻¹)³ units (Bullard 1997).
pub fn in_metric_units(dp: f64) -> f64 {
    dp * KNOT.powi(3)
}

/// The energy class of the wind regime by DP in knot units.
pub fn energy(dp: f64) -> &'static str {
    match dp {
        d if d < 200.0 => "low energy",
        d if d <= 400.0 => "intermediate energy",
        _ => "high energy",
    }
}

/// The steadiness class by RDP/DP.
pub fn steadiness(ratio: f64) -> &'static str {
    match ratio {
        r if r < 0.3 => "complex",
        r if r <= 0.8 => "bimodal",
        _ => "unimodal",
    }
}

//! Wind speed at one height from the friction velocity, and back.

use crate::ground::{Method, Read, Source, Symbol};

/// Von Kármán's constant as sand-transport papers use it.
pub const KARMAN: f64 = 0.40;

/// The logarithmic wind profile.
pub const METHOD: Method = Method {
    id: "wind.log-law",
    name: "Logarithmic wind profile",
    question: "What shear does a wind measured at some height put on the sand?",
    formula: "u(z) = (u*/κ) ln(z/z₀)",
    symbols: &[
        Symbol { symbol: "u(z)", meaning: "wind speed at height z", unit: "m s⁻¹" },
        Symbol { symbol: "u*", meaning: "friction velocity", unit: "m s⁻¹" },
        Symbol { symbol: "κ", meaning: "von Kármán's constant, 0.40", unit: "1" },
        Symbol { symbol: "z₀", meaning: "aerodynamic roughness length", unit: "m" },
    ],
    assumptions: &["Neutral stratification", "Even ground upwind for about a hundred times the height"],
    limits: &[
        "Between z₀ = d/30 and 1 mm the flux changes some 3.5-fold: the roughness is part of the uncertainty",
    ],
    sources: &[Source {
        key: "bagnold1941",
        authors: "Bagnold, R. A.",
        year: 1941,
        title: "The Physics of Blown Sand and Desert Dunes",
        published: "Methuen",
        locator: "",
        read: Read::Memory,
    }],
};

/// Friction velocity for each m s⁻¹ of wind at `height` over ground of `roughness`, both in m.
pub fn friction_ratio(height: f64, roughness: f64) -> f64 {
    KARMAN / (height / roughness).ln()
}

/// Wind speed at `height` for the friction velocity `friction`.
pub fn speed_at(friction: f64, height: f64, roughness: f64) -> f64 {
    friction / friction_ratio(height, roughness)
}

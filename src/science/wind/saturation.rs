//! Grain settling, the saturation length of sand transport, and the spacing new dunes start with.

use crate::ground::{Method, Read, Source, Symbol};

/// Settling velocity.
pub const SETTLING: Method = Method {
    id: "wind.settling",
    name: "Settling velocity after Ferguson and Church",
    question: "How fast does a grain fall through the fluid?",
    formula: "w = R g d² / (C₁ ν + √(0.75 C₂ R g d³)),  C₁ = 18, C₂ = 1",
    symbols: &[
        Symbol { symbol: "w", meaning: "settling velocity", unit: "m s⁻¹" },
        Symbol { symbol: "R", meaning: "submerged relative density (ρp − ρ)/ρ", unit: "1" },
        Symbol { symbol: "d", meaning: "grain diameter", unit: "m" },
        Symbol { symbol: "ν", meaning: "kinematic viscosity", unit: "m² s⁻¹" },
    ],
    assumptions: &["Natural grains (C₂ = 1; spheres have 0.4)"],
    limits: &[],
    sources: &[Source {
        key: "ferguson2004",
        authors: "Ferguson, R. I.; Church, M.",
        year: 2004,
        title: "A simple universal equation for grain settling velocity",
        published: "Journal of Sedimentary Research 74, 933–937",
        locator: "",
        read: Read::Memory,
    }],
};

/// Saturation length and the fastest-growing wavelength.
pub const WAVELENGTH: Method = Method {
    id: "wind.minimal-wavelength",
    name: "Saturation length and fastest-growing wavelength",
    question: "With what spacing would dunes start on a flat bed of this sand?",
    formula: "Ls ≈ 2.2 d ρp/ρ;  k³ + 3k = 2B/A, so k = X^{1/3} − X^{−1/3}, X = B/A + √(1 + (B/A)²);  λ = 2π Ls/k;  \
              rule λ ≈ 53 d ρp/ρ",
    symbols: &[
        Symbol { symbol: "Ls", meaning: "saturation length", unit: "m" },
        Symbol {
            symbol: "A, B",
            meaning: "stress over a wave: parts in phase with height and with slope",
            unit: "1",
        },
        Symbol { symbol: "k", meaning: "wavenumber times Ls", unit: "1" },
        Symbol { symbol: "λ", meaning: "wavelength", unit: "m" },
    ],
    assumptions: &["Flow in one direction far above threshold"],
    limits: &[
        "Published A and B differ: 3.6 and 1.9, 3.5 and 2.0, 4.7 and 4.0; waves shorter than 2π Ls A/B do not grow",
        "Spacing of grown dunes is much larger: the length is a lower bound, not a prediction for dune fields",
        "Whether Ls follows the drag length is disputed",
    ],
    sources: &[
        Source {
            key: "claudin2006",
            authors: "Claudin, P.; Andreotti, B.",
            year: 2006,
            title: "A scaling law for aeolian dunes on Mars, Venus, Earth, and for subaqueous ripples",
            published: "Earth and Planetary Science Letters 252, 30–44",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "andreotti2010",
            authors: "Andreotti, B.; Claudin, P.; Pouliquen, O.",
            year: 2010,
            title: "Measurements of the aeolian sand transport saturation length",
            published: "Geomorphology 123, 343–348",
            locator: "",
            read: Read::Abstract,
        },
        Source {
            key: "ventifact-wavenumber",
            authors: "Ventifact",
            year: 2026,
            title: "Closed root of the growth-rate maximum",
            published: "derived here; a grid search agrees",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Published pairs of A and B: the part of the stress in phase with the height of a wave, and with its slope.
pub const STRESS_COEFFICIENTS: [(f64, f64); 3] = [(3.6, 1.9), (3.5, 2.0), (4.7, 4.0)];

/// Settling velocity of a natural grain, m s⁻¹. `relative_density` is (ρp − ρ)/ρ.
pub fn settling_velocity(grain: f64, relative_density: f64, gravity: f64, kinematic_viscosity: f64) -> f64 {
    let rgd = relative_density * gravity * grain;
    // w = R g d² / (18 ν + √(0.75 R g d³))
    rgd * grain / (18.0 * kinematic_viscosity + (0.75 * rgd * grain * grain).sqrt())
}

/// Saturation length, m; `density_ratio` is ρp/ρ.
pub fn saturation_length(grain: f64, density_ratio: f64) -> f64 {
    2.2 * grain * density_ratio
}

/// Wavenumber times Ls at which a wave grows fastest, from the stress coefficients A and B > 0.
pub fn fastest_wavenumber(a: f64, b: f64) -> f64 {
    let ratio = b / a;
    let root = (ratio + (1.0 + ratio * ratio).sqrt()).cbrt();
    root - 1.0 / root
}

/// Fastest-growing wavelength over the saturation length.
pub fn fastest_wavelength(a: f64, b: f64) -> f64 {
    std::f64::consts::TAU / fastest_wavenumber(a, b)
}

/// Shortest growing wavelength over the saturation length: growth stops at k = B/A.
pub fn cutoff_wavelength(a: f64, b: f64) -> f64 {
    std::f64::consts::TAU * a / b
}

/// The rule λ ≈ 53 d ρp/ρ, m.
pub fn minimal_wavelength(grain: f64, density_ratio: f64) -> f64 {
    53.0 * grain * density_ratio
}

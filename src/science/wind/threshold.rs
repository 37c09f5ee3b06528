//! Friction velocity at which sand starts to move, by three published models.

use crate::ground::{Air, Method, Read, Source, Symbol};

use super::air::kinematic_viscosity;

/// Bagnold's threshold.
pub const BAGNOLD: Method = Method {
    id: "wind.threshold-bagnold",
    name: "Threshold after Bagnold",
    question: "How strong must the wind be to start loose sand?",
    formula: "u*t = A √((ρp − ρ) g d / ρ),  A = 0.10",
    symbols: SYMBOLS,
    assumptions: &["Loose dry grains of one size, no cohesion"],
    limits: &["Too low for grains below about 0.1 mm, where cohesion counts"],
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

/// Iversen and White's threshold.
pub const IVERSEN_WHITE: Method = Method {
    id: "wind.threshold-iversen-white",
    name: "Threshold after Iversen and White",
    question: "How strong must the wind be to start sand, on this and other worlds?",
    formula: "u*t = A √(ρp g d / ρ);  k = 6·10⁻⁷/(ρp g d^{2.5}),  Re = u*t d/ν;  A = 0.20 √((1+k)/(1+2.5 Re)) for Re < 0.3;  \
              0.129 √((1+k)/(1.928 Re^{0.092} − 1)) to 10;  0.120 √(1+k) (1 − 0.0858 e^{−0.0617 (Re−10)}) above",
    symbols: SYMBOLS,
    assumptions: &["Fitted to wind-tunnel runs at one and at low pressure", "k in SI units"],
    limits: &["Small steps at Re 0.3 and 10", "Some 40 % below later runs in dense cold gas"],
    sources: &[Source {
        key: "iversen1982",
        authors: "Iversen, J. D.; White, B. R.",
        year: 1982,
        title: "Saltation threshold on Earth, Mars and Venus",
        published: "Sedimentology 29, 111–119",
        locator: "",
        read: Read::Abstract,
    }],
};

/// Shao and Lu's threshold.
pub const SHAO_LU: Method = Method {
    id: "wind.threshold-shao-lu",
    name: "Threshold after Shao and Lu",
    question: "How strong must the wind be to start sand held by cohesion?",
    formula: "u*t = √(A_N (ρp g d/ρ + γ/(ρ d))),  A_N = 0.0123,  γ = 3·10⁻⁴ kg s⁻² unless set",
    symbols: SYMBOLS,
    assumptions: &["Cohesion proportional to grain size"],
    limits: &["γ is known only to 1.65–5·10⁻⁴ kg s⁻²; under low gravity it decides the answer"],
    sources: &[Source {
        key: "shao2000",
        authors: "Shao, Y.; Lu, H.",
        year: 2000,
        title: "A simple expression for wind erosion threshold friction velocity",
        published: "Journal of Geophysical Research 105, 22437–22443",
        locator: "",
        read: Read::Memory,
    }],
};

const SYMBOLS: &[Symbol] = &[
    Symbol { symbol: "u*t", meaning: "threshold friction velocity", unit: "m s⁻¹" },
    Symbol { symbol: "ρp", meaning: "grain density", unit: "kg m⁻³" },
    Symbol { symbol: "ρ", meaning: "gas density", unit: "kg m⁻³" },
    Symbol { symbol: "g", meaning: "gravity", unit: "m s⁻²" },
    Symbol { symbol: "d", meaning: "grain diameter", unit: "m" },
    Symbol { symbol: "ν", meaning: "kinematic viscosity of the gas", unit: "m² s⁻¹" },
    Symbol { symbol: "γ", meaning: "cohesion", unit: "kg s⁻²" },
];

/// Cohesion γ of Shao and Lu, kg s⁻².
pub const COHESION: f64 = 3e-4;

/// Which model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Threshold {
    Bagnold,
    IversenWhite,
    ShaoLu,
}

/// Grains on a body: all that a threshold needs.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bed {
    /// Grain diameter, m.
    pub grain: f64,
    /// Grain density, kg m⁻³.
    pub grain_density: f64,
    pub air: Air,
    /// m s⁻².
    pub gravity: f64,
    /// Cohesion γ between grains, kg s⁻²; only Shao and Lu's threshold asks for it.
    pub cohesion: f64,
}

impl Threshold {
    pub const ALL: [Self; 3] = [Self::Bagnold, Self::IversenWhite, Self::ShaoLu];

    /// Threshold friction velocity, m s⁻¹.
    pub fn friction_velocity(self, bed: &Bed) -> f64 {
        match self {
            Self::Bagnold => bagnold(bed),
            Self::IversenWhite => iversen_white(bed),
            Self::ShaoLu => shao_lu(bed),
        }
    }

    pub fn label(self) -> &'static str {
        match self {
            Self::Bagnold => "Bagnold",
            Self::IversenWhite => "Iversen–White",
            Self::ShaoLu => "Shao–Lu",
        }
    }
}

// u*t = A √((ρp − ρ) g d / ρ)
fn bagnold(bed: &Bed) -> f64 {
    let Bed { grain: d, grain_density: rho_p, air, gravity: g, .. } = *bed;
    0.10 * ((rho_p - air.density).max(0.0) * g * d / air.density).sqrt()
}

// u*t = A(Re) √(ρp g d / ρ) with Re = u*t d / ν, as a damped fixed point: A changes slowly with Re, so the
// average of old and new converges fast everywhere but within a seam, where it settles on the step.
fn iversen_white(bed: &Bed) -> f64 {
    let Bed { grain: d, grain_density: rho_p, air, gravity: g, .. } = *bed;
    let nu = kinematic_viscosity(air);
    let k = 6e-7 / (rho_p * g * d.powf(2.5));
    let scale = (rho_p * g * d / air.density).sqrt();
    let coefficient = |re: f64| {
        if re < 0.3 {
            0.20 * ((1.0 + k) / (1.0 + 2.5 * re)).sqrt()
        } else if re <= 10.0 {
            0.129 * ((1.0 + k) / (1.928 * re.powf(0.092) - 1.0)).sqrt()
        } else {
            0.120 * (1.0 + k).sqrt() * (1.0 - 0.0858 * (-0.0617 * (re - 10.0)).exp())
        }
    };
    let mut u = 0.2 * scale;
    for _ in 0..200 {
        u = 0.5 * (u + coefficient(u * d / nu) * scale);
    }
    u
}

// u*t = √(A_N (ρp g d/ρ + γ/(ρ d)))
fn shao_lu(bed: &Bed) -> f64 {
    let Bed { grain: d, grain_density: rho_p, air, gravity: g, cohesion: gamma } = *bed;
    (0.0123 * (rho_p * g * d / air.density + gamma / (air.density * d))).sqrt()
}

/// The grain that moves most easily by Shao and Lu, m: d = √(γ/(ρp g)).
pub fn easiest_grain(cohesion: f64, grain_density: f64, gravity: f64) -> f64 {
    (cohesion / (grain_density * gravity)).sqrt()
}

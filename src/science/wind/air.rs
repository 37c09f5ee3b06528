//! Gas density and viscosity from pressure, temperature and composition: the record of what
//! `ground::gas` computes, and what follows for an atmosphere.

use crate::ground::gas::MOLAR_GAS_CONSTANT;
use crate::ground::{Air, Method, Read, Source, Symbol};

/// Density and viscosity of a gas.
pub const METHOD: Method = Method {
    id: "wind.air",
    name: "Gas density, Sutherland viscosity, Wilke's mixtures",
    question: "How dense and how viscous is the air that moves the sand?",
    formula: "ρ = P M / (Z R T);  Z = 1 + B P / (R T);  μ = μ₀ (T₀ + S)/(T + S) (T/T₀)^{3/2};  air μ = 1.458·10⁻⁶ T^{3/2}/(T + 110.4);  \
              mixtures M = Σ xᵢ Mᵢ,  μ = Σᵢ xᵢ μᵢ / Σⱼ xⱼ Φᵢⱼ,  Φᵢⱼ = [1 + (μᵢ/μⱼ)^{1/2} (Mⱼ/Mᵢ)^{1/4}]² / √(8 (1 + Mᵢ/Mⱼ));  \
              λ = (μ/P) √(π R T/(2 M))",
    symbols: &[
        Symbol { symbol: "ρ", meaning: "gas density", unit: "kg m⁻³" },
        Symbol { symbol: "P", meaning: "pressure", unit: "Pa" },
        Symbol { symbol: "M", meaning: "molar mass", unit: "kg mol⁻¹" },
        Symbol { symbol: "R", meaning: "molar gas constant", unit: "J mol⁻¹ K⁻¹" },
        Symbol { symbol: "T", meaning: "temperature", unit: "K" },
        Symbol { symbol: "Z", meaning: "compressibility", unit: "1" },
        Symbol { symbol: "B", meaning: "second virial coefficient", unit: "m³ mol⁻¹" },
        Symbol { symbol: "μ", meaning: "dynamic viscosity", unit: "Pa s" },
        Symbol { symbol: "μ₀, T₀, S", meaning: "Sutherland's constants of the gas", unit: "Pa s, K, K" },
        Symbol { symbol: "xᵢ", meaning: "share of the molecules of gas i", unit: "1" },
        Symbol { symbol: "λ", meaning: "mean free path", unit: "m" },
    ],
    assumptions: &["Viscosity does not depend on pressure"],
    limits: &[
        "Sutherland's law is extrapolated below about 100 K",
        "The virial form holds while |Z − 1| is small; B is stated, not computed",
        "Wilke's rule is good to some per cent, worse with hydrogen",
    ],
    sources: &[
        Source {
            key: "sutherland1893",
            authors: "Sutherland, W.",
            year: 1893,
            title: "The viscosity of gases and molecular force",
            published: "Philosophical Magazine 36, 507–531",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "wilke1950",
            authors: "Wilke, C. R.",
            year: 1950,
            title: "A viscosity equation for gas mixtures",
            published: "Journal of Chemical Physics 18, 517–519",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "white2006",
            authors: "White, F. M.",
            year: 2006,
            title: "Viscous Fluid Flow (Sutherland's constants of all gases but methane)",
            published: "McGraw-Hill, 3rd edition",
            locator: "table 1-2",
            read: Read::Memory,
        },
        Source {
            key: "huber2011",
            authors: "Huber, M. L.; Harvey, A. H.",
            year: 2011,
            title: "Viscosity of gases (methane; its constants are fitted here to 200 and 400 K)",
            published: "CRC Handbook of Chemistry and Physics, section 6",
            locator: "",
            read: Read::Abstract,
        },
        Source {
            key: "standardatmosphere1976",
            authors: "NOAA; NASA; USAF",
            year: 1976,
            title: "U.S. Standard Atmosphere, 1976",
            published: "U.S. Government Printing Office",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// Height over which the pressure of an isothermal atmosphere falls by e, m.
pub fn scale_height(molar_mass: f64, temperature: f64, gravity: f64) -> f64 {
    MOLAR_GAS_CONSTANT * temperature / (molar_mass * gravity)
}

/// Dry adiabatic lapse rate, K m⁻¹: `heat_capacity` J kg⁻¹ K⁻¹ at constant pressure.
pub fn dry_lapse_rate(gravity: f64, heat_capacity: f64) -> f64 {
    gravity / heat_capacity
}

/// Kinematic viscosity ν = μ/ρ, m² s⁻¹.
pub fn kinematic_viscosity(air: Air) -> f64 {
    air.viscosity / air.density
}

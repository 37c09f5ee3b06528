//! Gas density and viscosity from pressure, temperature and composition.

use crate::ground::{Air, Method, Read, Source, Symbol};

/// Molar gas constant, J mol⁻¹ K⁻¹ (exact since 2019).
pub const MOLAR_GAS_CONSTANT: f64 = 8.314_462_618;

/// Density and viscosity of a gas.
pub const METHOD: Method = Method {
    id: "wind.air",
    name: "Ideal-gas density and Sutherland viscosity",
    question: "How dense and how viscous is the air that moves the sand?",
    formula: "ρ = P M / (Z R T);  Z = 1 + B P / (R T);  μ = μ₀ (T₀ + S)/(T + S) (T/T₀)^{3/2}",
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
    ],
    assumptions: &["A single gas, or a mixture with the constants of its main gas"],
    limits: &[
        "Sutherland's law is extrapolated below about 100 K",
        "The virial form holds while |Z − 1| is small",
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

/// Sutherland's three constants of a gas.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sutherland {
    /// Viscosity at the reference temperature, Pa s.
    pub viscosity: f64,
    /// Reference temperature, K.
    pub temperature: f64,
    /// Sutherland's constant, K.
    pub constant: f64,
}

impl Sutherland {
    pub const AIR: Self = Self { viscosity: 1.716e-5, temperature: 273.15, constant: 110.4 };
    pub const NITROGEN: Self = Self { viscosity: 1.663e-5, temperature: 273.0, constant: 107.0 };
    pub const CARBON_DIOXIDE: Self = Self { viscosity: 1.370e-5, temperature: 273.0, constant: 222.0 };

    /// Dynamic viscosity at `temperature` K, Pa s.
    pub fn viscosity_at(self, temperature: f64) -> f64 {
        self.viscosity * (self.temperature + self.constant) / (temperature + self.constant)
            * (temperature / self.temperature).powf(1.5)
    }
}

/// Density of an ideal gas, kg m⁻³: `pressure` Pa, `molar_mass` kg mol⁻¹, `temperature` K.
pub fn ideal_density(pressure: f64, molar_mass: f64, temperature: f64) -> f64 {
    pressure * molar_mass / (MOLAR_GAS_CONSTANT * temperature)
}

/// Compressibility Z from the second virial coefficient `virial`, m³ mol⁻¹. Divide the ideal
/// density by it.
pub fn compressibility(virial: f64, pressure: f64, temperature: f64) -> f64 {
    1.0 + virial * pressure / (MOLAR_GAS_CONSTANT * temperature)
}

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

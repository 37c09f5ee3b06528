//! Near-surface gas as one would describe it: which gases, how much pressure, how cold; and the density and
//! viscosity that follow. `science::wind::air` holds the method record.

use serde::{Deserialize, Serialize};

use super::Air;

/// Molar gas constant, J mol⁻¹ K⁻¹ (exact since 2019).
pub const MOLAR_GAS_CONSTANT: f64 = 8.314_462_618;

/// A gas of which molar mass and viscosity are known.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Gas {
    /// Dry air of the Earth.
    #[serde(rename = "air")]
    Air,
    #[serde(rename = "N2")]
    Nitrogen,
    #[serde(rename = "CO2")]
    CarbonDioxide,
    #[serde(rename = "CH4")]
    Methane,
    #[serde(rename = "Ar")]
    Argon,
    #[serde(rename = "O2")]
    Oxygen,
    #[serde(rename = "CO")]
    CarbonMonoxide,
    #[serde(rename = "H2")]
    Hydrogen,
}

/// A gas and its share of the molecules.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct GasShare {
    pub gas: Gas,
    /// Share of the molecules (mole fraction), above 0 and at most 1; counted relative to the sum of all.
    pub share: f64,
}

/// The state of the gas near the ground, from which its density and viscosity follow.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct GasState {
    pub mix: Vec<GasShare>,
    pub pressure_pa: f64,
    pub temperature_k: f64,
    /// Compressibility Z; 1 for an ideal gas. Stands over the second virial coefficient.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub compressibility: Option<f64>,
    /// Second virial coefficient B, m³ mol⁻¹.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub second_virial: Option<f64>,
}

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
    /// Fitted here through 7.7 and 14.2 µPa s at 200 and 400 K; gives 11.2 at 300 K, where the same table
    /// has 11.1.
    pub const METHANE: Self = Self { viscosity: 1.117e-5, temperature: 300.0, constant: 175.0 };
    pub const ARGON: Self = Self { viscosity: 2.125e-5, temperature: 273.0, constant: 144.0 };
    pub const OXYGEN: Self = Self { viscosity: 1.919e-5, temperature: 273.0, constant: 139.0 };
    pub const CARBON_MONOXIDE: Self = Self { viscosity: 1.657e-5, temperature: 273.0, constant: 136.0 };
    pub const HYDROGEN: Self = Self { viscosity: 8.411e-6, temperature: 273.0, constant: 97.0 };

    /// Dynamic viscosity at `temperature` K, Pa s: μ = μ₀ (T₀ + S)/(T + S) (T/T₀)^{3/2}.
    pub fn viscosity_at(self, temperature: f64) -> f64 {
        self.viscosity * (self.temperature + self.constant) / (temperature + self.constant)
            * (temperature / self.temperature).powf(1.5)
    }
}

/// Viscosity of air by the U.S. Standard Atmosphere 1976, Pa s: μ = β T^{3/2}/(T + 110.4), β = 1.458·10⁻⁶.
/// The three constants of [`Sutherland::AIR`] give 5 parts in 10⁵ less.
pub fn standard_air_viscosity(temperature: f64) -> f64 {
    1.458e-6 * temperature.powf(1.5) / (temperature + 110.4)
}

impl Gas {
    pub const ALL: [Self; 8] = [
        Self::Air,
        Self::Nitrogen,
        Self::CarbonDioxide,
        Self::Methane,
        Self::Argon,
        Self::Oxygen,
        Self::CarbonMonoxide,
        Self::Hydrogen,
    ];

    /// Molar mass, kg mol⁻¹.
    pub fn molar_mass(self) -> f64 {
        1e-3 * match self {
            Self::Air => 28.9644,
            Self::Nitrogen => 28.0134,
            Self::CarbonDioxide => 44.0095,
            Self::Methane => 16.0425,
            Self::Argon => 39.948,
            Self::Oxygen => 31.9988,
            Self::CarbonMonoxide => 28.0101,
            Self::Hydrogen => 2.015_88,
        }
    }

    /// Dynamic viscosity of the pure gas at `temperature` K, Pa s; at pressures where it does not depend on it.
    pub fn viscosity_at(self, temperature: f64) -> f64 {
        let constants = match self {
            Self::Air => return standard_air_viscosity(temperature),
            Self::Nitrogen => Sutherland::NITROGEN,
            Self::CarbonDioxide => Sutherland::CARBON_DIOXIDE,
            Self::Methane => Sutherland::METHANE,
            Self::Argon => Sutherland::ARGON,
            Self::Oxygen => Sutherland::OXYGEN,
            Self::CarbonMonoxide => Sutherland::CARBON_MONOXIDE,
            Self::Hydrogen => Sutherland::HYDROGEN,
        };
        constants.viscosity_at(temperature)
    }

    /// As in a sheet file: `"N2"`.
    pub fn label(self) -> &'static str {
        match self {
            Self::Air => "air",
            Self::Nitrogen => "N2",
            Self::CarbonDioxide => "CO2",
            Self::Methane => "CH4",
            Self::Argon => "Ar",
            Self::Oxygen => "O2",
            Self::CarbonMonoxide => "CO",
            Self::Hydrogen => "H2",
        }
    }
}

impl GasState {
    /// An ideal gas of these shares.
    pub fn ideal(mix: &[(Gas, f64)], pressure_pa: f64, temperature_k: f64) -> Self {
        let mix = mix.iter().map(|&(gas, share)| GasShare { gas, share }).collect();
        Self { mix, pressure_pa, temperature_k, compressibility: None, second_virial: None }
    }

    /// Mean molar mass, kg mol⁻¹: M = Σ xᵢ Mᵢ / Σ xᵢ.
    pub fn molar_mass(&self) -> f64 {
        let moles: f64 = self.mix.iter().map(|part| part.share).sum();
        self.mix.iter().map(|part| part.share * part.gas.molar_mass()).sum::<f64>() / moles
    }

    /// Z as stated, else 1 + B P/(R T), else 1.
    pub fn compressibility(&self) -> f64 {
        let of_virial = |b| compressibility(b, self.pressure_pa, self.temperature_k);
        self.compressibility.or(self.second_virial.map(of_virial)).unwrap_or(1.0)
    }

    /// Density and viscosity: ρ = P M/(Z R T), and Wilke's rule over the viscosities of the pure gases.
    pub fn air(&self) -> Air {
        let t = self.temperature_k;
        let parts: Vec<_> =
            self.mix.iter().map(|p| (p.share, p.gas.molar_mass(), p.gas.viscosity_at(t))).collect();
        Air {
            density: ideal_density(self.pressure_pa, self.molar_mass(), t) / self.compressibility(),
            viscosity: mixed_viscosity(&parts),
        }
    }

    /// What makes the state impossible; `None` when nothing does.
    pub fn problem(&self) -> Option<String> {
        if self.mix.is_empty() {
            return Some("no gas is named; give at least one with its share".into());
        }
        if let Some(bad) = self.mix.iter().find(|part| !(part.share > 0.0 && part.share <= 1.0)) {
            return Some(format!("the share of {} is {}; it must lie in 0 to 1", bad.gas.label(), bad.share));
        }
        for (what, value, least, greatest, unit) in [
            ("pressure", self.pressure_pa, 1e-3, 1e9, "Pa"),
            ("temperature", self.temperature_k, 20.0, 3000.0, "K"),
            ("compressibility", self.compressibility(), 0.2, 5.0, ""),
        ] {
            if !(least..=greatest).contains(&value) {
                return Some(format!("its {what} is {value} {unit}; allowed: {least} to {greatest}"));
            }
        }
        None
    }

    /// `"N2 98.5 %, CH4 1.5 %; 1.467 bar, 94 K"`.
    pub fn in_words(&self) -> String {
        let sum: f64 = self.mix.iter().map(|part| part.share).sum();
        let percent =
            |part: &GasShare| format!("{} {} %", part.gas.label(), tidy(100.0 * part.share / sum, 4));
        let mix: Vec<_> = self.mix.iter().map(percent).collect();
        let pressure = match self.pressure_pa {
            p if p >= 1e4 => format!("{} bar", tidy(p / 1e5, 6)),
            p => format!("{} Pa", tidy(p, 6)),
        };
        format!("{}; {pressure}, {} K", mix.join(", "), tidy(self.temperature_k, 6))
    }
}

/// To so many significant digits, so that 100 × 0.985 reads 98.5.
pub(super) fn tidy(value: f64, digits: usize) -> f64 {
    format!("{value:.*e}", digits - 1).parse().unwrap_or(value)
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

/// Viscosity of a mixture, Pa s, from (mole fraction xᵢ, molar mass Mᵢ, viscosity μᵢ) of its gases.
///
/// Wilke 1950: μ = Σᵢ xᵢ μᵢ / Σⱼ xⱼ Φᵢⱼ,  Φᵢⱼ = [1 + (μᵢ/μⱼ)^{1/2} (Mⱼ/Mᵢ)^{1/4}]² / √(8 (1 + Mᵢ/Mⱼ)).
pub fn mixed_viscosity(parts: &[(f64, f64, f64)]) -> f64 {
    let of_part = |&(x_i, m_i, mu_i): &(f64, f64, f64)| {
        let met = parts.iter().map(|&(x_j, m_j, mu_j)| {
            let phi = (1.0 + (mu_i / mu_j).sqrt() * (m_j / m_i).sqrt().sqrt()).powi(2)
                / (8.0 * (1.0 + m_i / m_j)).sqrt();
            x_j * phi
        });
        x_i * mu_i / met.sum::<f64>()
    };
    parts.iter().map(of_part).sum()
}

/// Mean way of a molecule between two others, m: λ = (μ/P) √(π R T/(2 M)).
pub fn mean_free_path(state: &GasState) -> f64 {
    let GasState { pressure_pa: p, temperature_k: t, .. } = *state;
    let speed2 = std::f64::consts::PI * MOLAR_GAS_CONSTANT * t / (2.0 * state.molar_mass());
    state.air().viscosity / p * speed2.sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use proptest::prelude::*;

    #[test]
    fn a_pure_gas_mixed_with_itself_stays_as_it_is() {
        let t = 210.0;
        for gas in Gas::ALL {
            let split = [(0.3, gas.molar_mass(), gas.viscosity_at(t)); 2];
            assert_close!(mixed_viscosity(&split), gas.viscosity_at(t), 1e-18, "{}", gas.label());
        }
    }

    #[test]
    fn a_stated_compressibility_stands_over_the_virial_coefficient() {
        let ideal = GasState::ideal(&[(Gas::Nitrogen, 1.0)], 1.5e5, 94.0);
        let virial = GasState { second_virial: Some(-1.6e-4), ..ideal.clone() };
        let both = GasState { compressibility: Some(0.9), ..virial.clone() };
        assert!(virial.air().density > ideal.air().density);
        assert_close!(both.air().density, ideal.air().density / 0.9, 1e-12);
    }

    #[test]
    fn what_cannot_be_is_named() {
        let good = GasState::ideal(&[(Gas::Nitrogen, 0.985), (Gas::Methane, 0.015)], 1.467e5, 94.0);
        assert_eq!(good.problem(), None);
        assert_eq!(good.in_words(), "N2 98.5 %, CH4 1.5 %; 1.467 bar, 94 K");
        let sea_level = GasState::ideal(&[(Gas::Air, 1.0)], 101_325.0, 288.15);
        assert_eq!(sea_level.in_words(), "air 100 %; 1.01325 bar, 288.15 K");
        let percent = GasState::ideal(&[(Gas::Nitrogen, 98.5)], 1e5, 94.0);
        assert!(percent.problem().expect("a problem").contains("share of N2 is 98.5"));
        let empty = GasState { mix: Vec::new(), ..good.clone() };
        assert!(empty.problem().expect("a problem").contains("no gas"));
        let negative = GasState { temperature_k: -3.0, ..good };
        assert!(negative.problem().expect("a problem").contains("temperature is -3 K"));
    }

    #[test]
    fn shares_count_relative_to_their_sum() {
        let whole = GasState::ideal(&[(Gas::CarbonDioxide, 0.8), (Gas::Argon, 0.2)], 1e5, 250.0).air();
        let half = GasState::ideal(&[(Gas::CarbonDioxide, 0.4), (Gas::Argon, 0.1)], 1e5, 250.0).air();
        assert_close!(half.density, whole.density, 1e-12, "density");
        assert_close!(half.viscosity, whole.viscosity, 1e-18, "viscosity");
    }

    proptest! {
        #[test]
        fn a_mixture_does_not_depend_on_the_order_of_its_gases(x in 0.01..0.99f64, t in 60.0..800.0f64) {
            let (a, b) = (Gas::CarbonDioxide, Gas::Hydrogen);
            let one = GasState::ideal(&[(a, x), (b, 1.0 - x)], 1e5, t).air();
            let other = GasState::ideal(&[(b, 1.0 - x), (a, x)], 1e5, t).air();
            prop_assert!((one.viscosity / other.viscosity - 1.0).abs() < 1e-12);
            prop_assert!((one.density / other.density - 1.0).abs() < 1e-12);
        }
    }
}

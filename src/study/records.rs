//! Each setting described once: key, label, unit, range, default, help. Forms, `check`, the
//! documents and hover texts read these records.

use super::{LettauConstant, Settings, ThresholdLaw, TransportLaw};

/// One setting.
pub struct Setting {
    /// Path in the sheet file, `"trend.significance"`.
    pub key: &'static str,
    pub label: &'static str,
    /// `"1"` for pure numbers.
    pub unit: &'static str,
    pub help: &'static str,
    pub kind: SettingKind,
    pub get: fn(&Settings) -> SettingValue,
    /// Ignores a value of another kind; ranges are checked by [`Setting::problem`].
    pub set: fn(&mut Settings, SettingValue),
}

/// What values a setting takes; ranges are inclusive.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum SettingKind {
    Number {
        least: f64,
        greatest: f64,
    },
    /// A number, or left to the program.
    Auto {
        least: f64,
        greatest: f64,
    },
    Whole {
        least: u32,
        greatest: u32,
    },
    /// (key, label) pairs.
    Choice(&'static [(&'static str, &'static str)]),
}

/// The value of a setting.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum SettingValue {
    Number(f64),
    Auto(Option<f64>),
    Whole(u32),
    /// The key of a choice.
    Choice(&'static str),
}

impl Setting {
    /// What is wrong with the present value, in words; `None` when nothing is.
    pub fn problem(&self, settings: &Settings) -> Option<String> {
        let outside = |value: f64, least: f64, greatest: f64| {
            (!(least..=greatest).contains(&value)).then(|| {
                format!("{} is {value}; allowed: {least} to {greatest} {}", self.key, self.unit_suffix())
            })
        };
        match (self.kind, (self.get)(settings)) {
            (SettingKind::Number { least, greatest }, SettingValue::Number(value))
            | (SettingKind::Auto { least, greatest }, SettingValue::Auto(Some(value))) => {
                outside(value, least, greatest)
            }
            (SettingKind::Whole { least, greatest }, SettingValue::Whole(value)) => {
                outside(f64::from(value), f64::from(least), f64::from(greatest))
            }
            _ => None,
        }
    }

    fn unit_suffix(&self) -> &'static str {
        if self.unit == "1" { "" } else { self.unit }
    }
}

/// Numbers, automatic numbers and whole numbers are told apart by the field's type.
macro_rules! number {
    ($key:literal, $label:expr, $unit:literal, $least:expr, $greatest:expr, $($field:ident).+, $help:literal) => {
        Setting {
            key: $key,
            label: $label,
            unit: $unit,
            help: $help,
            kind: SettingKind::Number { least: $least, greatest: $greatest },
            get: |s| SettingValue::Number(s.$($field).+),
            set: |s, v| if let SettingValue::Number(v) = v { s.$($field).+ = v },
        }
    };
}
macro_rules! auto {
    ($key:literal, $label:literal, $unit:literal, $least:expr, $greatest:expr, $($field:ident).+, $help:literal) => {
        Setting {
            key: $key,
            label: $label,
            unit: $unit,
            help: $help,
            kind: SettingKind::Auto { least: $least, greatest: $greatest },
            get: |s| SettingValue::Auto(s.$($field).+),
            set: |s, v| if let SettingValue::Auto(v) = v { s.$($field).+ = v },
        }
    };
}
/// A prior weight.
macro_rules! prior {
    ($key:literal, $theory:literal, $($field:ident).+) => {
        number!(
            $key,
            concat!("Prior of ", $theory),
            "1",
            0.0,
            1000.0,
            $($field).+,
            "Weight given to the theory before the ground is looked at; only ratios count, 0 leaves it out."
        )
    };
}
macro_rules! whole {
    ($key:literal, $label:literal, $least:expr, $greatest:expr, $($field:ident).+, $help:literal) => {
        Setting {
            key: $key,
            label: $label,
            unit: "1",
            help: $help,
            kind: SettingKind::Whole { least: $least, greatest: $greatest },
            get: |s| SettingValue::Whole(s.$($field).+),
            set: |s, v| if let SettingValue::Whole(v) = v { s.$($field).+ = v },
        }
    };
}

const THRESHOLD_LAWS: [(ThresholdLaw, &str, &str); 3] = [
    (ThresholdLaw::Bagnold, "bagnold", "Bagnold 1941"),
    (ThresholdLaw::IversenWhite, "iversen-white", "Iversen & White 1982"),
    (ThresholdLaw::ShaoLu, "shao-lu", "Shao & Lu 2000"),
];

const TRANSPORT_LAWS: [(TransportLaw, &str, &str); 6] = [
    (TransportLaw::DriftPotential, "drift-potential", "Drift potential (Fryberger & Dean 1979)"),
    (TransportLaw::Bagnold, "bagnold", "Bagnold 1941"),
    (TransportLaw::Kawamura, "kawamura", "Kawamura 1951"),
    (TransportLaw::White, "white", "White 1979, corrected"),
    (TransportLaw::Lettau, "lettau", "Lettau & Lettau 1978"),
    (TransportLaw::Kok, "kok", "Kok et al. 2012, linear in stress"),
];

const LETTAU_CONSTANTS: [(LettauConstant, &str, &str); 2] =
    [(LettauConstant::High, "6.7", "6.7"), (LettauConstant::Low, "4.2", "4.2")];

/// Every setting, in the order of the reasoning.
pub const SETTINGS: &[Setting] = &[
    auto!(
        "trend.gradient_scale_px",
        "Gradient scale",
        "px",
        1.0,
        64.0,
        trend.gradient_scale_px,
        "Standard deviation of the Gaussian whose derivative measures the slope of brightness. Left open, it follows the spacing."
    ),
    auto!(
        "trend.integration_scale_px",
        "Integration scale",
        "px",
        2.0,
        512.0,
        trend.integration_scale_px,
        "Standard deviation of the Gaussian over which slopes are gathered into one trend. Left open: at least half the spacing and twice the gradient scale."
    ),
    auto!(
        "trend.node_step_px",
        "Node step",
        "px",
        1.0,
        1024.0,
        trend.node_step_px,
        "Distance between the places where the trend is measured. Left open, it follows the integration scale."
    ),
    number!(
        "trend.significance",
        "Noise level of a node",
        "1",
        1e-6,
        0.5,
        trend.significance,
        "Chance that a node of pure noise would show as much coherence; nodes above it are not drawn."
    ),
    auto!(
        "spectrum.window_px",
        "Spectrum window",
        "px",
        32.0,
        4096.0,
        spectrum.window_px,
        "Side of the square windows whose spectra are averaged. Left open: about eight spacings."
    ),
    number!(
        "spectrum.shortest_spacing_px",
        "Shortest spacing",
        "px",
        2.5,
        1024.0,
        spectrum.shortest_spacing_px,
        "Waves shorter than this are not looked for."
    ),
    auto!(
        "spectrum.longest_spacing_px",
        "Longest spacing",
        "px",
        4.0,
        65536.0,
        spectrum.longest_spacing_px,
        "Waves longer than this are not looked for. Left open: a third of the window."
    ),
    number!(
        "spectrum.significance",
        "Level of a spectral peak",
        "1",
        1e-6,
        0.5,
        spectrum.significance,
        "Chance that the background alone would raise a peak as high anywhere in the search range."
    ),
    number!(
        "statistics.significance",
        "Level for a preferred trend",
        "1",
        1e-6,
        0.5,
        statistics.significance,
        "A preferred trend is claimed when directions without preference would look as aligned less often than this."
    ),
    whole!(
        "statistics.resamples",
        "Bootstrap resamples of nodes",
        100,
        100_000,
        statistics.resamples,
        "Draws of the block bootstrap behind the interval of the mean trend."
    ),
    whole!(
        "statistics.most_modes",
        "Most trends in one patch",
        1,
        6,
        statistics.most_modes,
        "Largest number of von Mises components tried; the criterion decides how many are kept."
    ),
    number!(
        "statistics.rose_bin_deg",
        "Bin of the rose",
        "°",
        1.0,
        30.0,
        statistics.rose_bin_deg,
        "Width of the petals of the rose diagram; 180 must be a multiple of it."
    ),
    number!(
        "wind.grain_m",
        "Grain diameter",
        "m",
        2e-5,
        5e-3,
        wind.grain_m,
        "Diameter of the sand that builds the bedforms."
    ),
    number!(
        "wind.grain_density",
        "Grain density",
        "kg/m³",
        300.0,
        8000.0,
        wind.grain_density,
        "Density of the grains: quartz 2650, basalt 3000, water ice 920."
    ),
    Setting {
        key: "wind.threshold_law",
        label: "Threshold",
        unit: "1",
        help: "Which published law gives the friction velocity at which sand starts to move.",
        kind: SettingKind::Choice(&[
            ("bagnold", "Bagnold 1941"),
            ("iversen-white", "Iversen & White 1982"),
            ("shao-lu", "Shao & Lu 2000"),
        ]),
        get: |s| SettingValue::Choice(key_of(&THRESHOLD_LAWS, s.wind.threshold_law)),
        set: |s, v| choose(&THRESHOLD_LAWS, v, &mut s.wind.threshold_law),
    },
    Setting {
        key: "wind.transport_law",
        label: "Transport law",
        unit: "1",
        help: "Which published law turns wind into moving sand. Trends need only the shares of the sectors.",
        kind: SettingKind::Choice(&[
            ("drift-potential", "Drift potential (Fryberger & Dean 1979)"),
            ("bagnold", "Bagnold 1941"),
            ("kawamura", "Kawamura 1951"),
            ("white", "White 1979, corrected"),
            ("lettau", "Lettau & Lettau 1978"),
            ("kok", "Kok et al. 2012, linear in stress"),
        ]),
        get: |s| SettingValue::Choice(key_of(&TRANSPORT_LAWS, s.wind.transport_law)),
        set: |s, v| choose(&TRANSPORT_LAWS, v, &mut s.wind.transport_law),
    },
    number!(
        "wind.greatest_speed",
        "Greatest believable speed",
        "m/s",
        5.0,
        500.0,
        wind.greatest_speed,
        "Faster records are set aside and named."
    ),
    number!(
        "wind.block_days",
        "Bootstrap block of the record",
        "d",
        0.25,
        400.0,
        wind.block_days,
        "Length of the pieces in which the record is redrawn, so that weather and season stay together."
    ),
    whole!(
        "wind.resamples",
        "Bootstrap resamples of the record",
        50,
        20_000,
        wind.resamples,
        "Draws of the record behind drift intervals and theory clouds."
    ),
    number!(
        "wind.cohesion_kg_s2",
        "Cohesion γ",
        "kg/s²",
        1e-5,
        1e-2,
        wind.cohesion_kg_s2,
        "What holds grains together in Shao and Lu's threshold; 1.65e-4 to 5e-4 is published. Under low gravity it decides the threshold."
    ),
    number!(
        "wind.grain_doubt",
        "Doubt of the grain diameter",
        "1",
        1.0,
        10.0,
        wind.grain_doubt,
        "The diameter is known to within this factor: it may be the value divided by it, or times it."
    ),
    number!(
        "wind.grain_density_doubt",
        "Doubt of the grain density",
        "1",
        1.0,
        10.0,
        wind.grain_density_doubt,
        "The grain density is known to within this factor."
    ),
    number!(
        "wind.cohesion_doubt",
        "Doubt of the cohesion",
        "1",
        1.0,
        10.0,
        wind.cohesion_doubt,
        "The cohesion is known to within this factor; 1.7 spans what is published."
    ),
    Setting {
        key: "wind.lettau_constant",
        label: "Lettau's constant",
        unit: "1",
        help: "Sources differ: 6.7 or 4.2. It scales the flux and leaves trends alone.",
        kind: SettingKind::Choice(&[("6.7", "6.7"), ("4.2", "4.2")]),
        get: |s| SettingValue::Choice(key_of(&LETTAU_CONSTANTS, s.wind.lettau_constant)),
        set: |s, v| choose(&LETTAU_CONSTANTS, v, &mut s.wind.lettau_constant),
    },
    auto!(
        "wind.threshold_ustar",
        "Threshold friction velocity",
        "m/s",
        0.001,
        20.0,
        wind.threshold_ustar,
        "Friction velocity at which this sand starts to move, when known. Left open, the threshold law gives it."
    ),
    number!(
        "wind.roughness_doubt",
        "Roughness, factor of doubt",
        "1",
        1.0,
        100.0,
        wind.roughness_doubt,
        "The roughness at the mast lies between value/factor and value × factor; the draws take it from there."
    ),
    number!(
        "wind.storm_quantile",
        "Storms begin at",
        "1",
        0.5,
        0.999,
        wind.storm_quantile,
        "Share of the time with moving sand that is spent below storm speed; the storm theories see only the winds above."
    ),
    number!(
        "verdict.model_error_deg",
        "Model error",
        "°",
        0.0,
        45.0,
        verdict.model_error_deg,
        "Axial standard deviation by which a right theory may still miss the ground."
    ),
    number!(
        "verdict.tail_share",
        "Fat tail",
        "1",
        0.001,
        0.5,
        verdict.tail_share,
        "Share of every prediction spread over all axes, so that no factor becomes absurd."
    ),
    number!(
        "verdict.margin_deg",
        "Margin of agreement",
        "°",
        1.0,
        45.0,
        verdict.margin_deg,
        "Two axes count as the same when the test shows them within this of each other."
    ),
    number!(
        "verdict.least_strength",
        "Least alignment strength",
        "1",
        0.0,
        1.0,
        verdict.least_strength,
        "Below this contrast of bedform-normal transport a predicted trend is not meaningful and no verdict is given."
    ),
    number!(
        "verdict.flux_up",
        "Flux-up ratio Γ",
        "1",
        0.0,
        10.0,
        verdict.flux_up,
        "How much faster sand moves over a crest than over flat ground: 0 not at all, 1.6 in numerical dunes."
    ),
    number!(
        "verdict.flux_up_doubt",
        "Flux-up ratio, factor of doubt",
        "1",
        1.0,
        5.0,
        verdict.flux_up_doubt,
        "The flux-up ratio lies between value/factor and value × factor; sources print 1.5 to 2."
    ),
    prior!("verdict.priors.transverse", "transverse to the resultant", verdict.priors.transverse),
    prior!("verdict.priors.along", "along the resultant", verdict.priors.along),
    prior!("verdict.priors.gross_normal", "gross bedform-normal", verdict.priors.gross_normal),
    prior!("verdict.priors.bed_instability", "bed instability", verdict.priors.bed_instability),
    prior!("verdict.priors.fingering", "fingering", verdict.priors.fingering),
    prior!("verdict.priors.storms_across", "bed instability, storms only", verdict.priors.storms_across),
    prior!("verdict.priors.storms_along", "fingering, storms only", verdict.priors.storms_along),
    prior!("verdict.priors.season", "bed instability, strongest season", verdict.priors.season),
    prior!("verdict.priors.stated", "stated axis", verdict.priors.stated),
    prior!("verdict.priors.random", "random axis", verdict.priors.random),
];

fn key_of<T: Copy + PartialEq>(laws: &[(T, &'static str, &'static str)], law: T) -> &'static str {
    laws.iter().find(|(l, ..)| *l == law).map_or("", |(_, key, _)| key)
}

fn choose<T: Copy>(laws: &[(T, &'static str, &'static str)], value: SettingValue, field: &mut T) {
    if let SettingValue::Choice(key) = value
        && let Some((law, ..)) = laws.iter().find(|(_, k, _)| *k == key)
    {
        *field = *law;
    }
}

impl ThresholdLaw {
    /// The name as cited.
    pub fn label(self) -> &'static str {
        THRESHOLD_LAWS.iter().find(|(l, ..)| *l == self).map_or("", |(.., label)| label)
    }
}

impl TransportLaw {
    /// The name as cited.
    pub fn label(self) -> &'static str {
        TRANSPORT_LAWS.iter().find(|(l, ..)| *l == self).map_or("", |(.., label)| label)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The path `a.b` in a JSON object.
    fn field<'a>(json: &'a serde_json::Value, key: &str) -> &'a serde_json::Value {
        key.split('.').fold(json, |v, part| &v[part])
    }

    #[test]
    fn every_number_of_the_settings_has_a_record_and_every_record_a_field() {
        let json = serde_json::to_value(Settings::default()).unwrap();
        for setting in SETTINGS {
            let value = field(&json, setting.key);
            match (setting.get)(&Settings::default()) {
                SettingValue::Number(v) => assert_eq!(value.as_f64(), Some(v), "{}", setting.key),
                SettingValue::Auto(v) => assert_eq!(value.as_f64(), v, "{}", setting.key),
                SettingValue::Whole(v) => assert_eq!(value.as_u64(), Some(v.into()), "{}", setting.key),
                SettingValue::Choice(v) => assert_eq!(value.as_str(), Some(v), "{}", setting.key),
            }
        }
        let fields: usize =
            json.as_object().unwrap().values().map(|part| part.as_object().unwrap().len()).sum();
        // The priors are one field of the verdict's, with a record each.
        let priors = json["verdict"]["priors"].as_object().unwrap().len();
        assert_eq!(SETTINGS.len(), fields - 1 + priors);
    }

    #[test]
    fn defaults_are_within_their_ranges_and_a_value_outside_is_named() {
        let mut settings = Settings::default();
        assert!(SETTINGS.iter().all(|s| s.problem(&settings).is_none()));
        settings.wind.grain_m = 3.0;
        let said: Vec<_> = SETTINGS.iter().filter_map(|s| s.problem(&settings)).collect();
        assert_eq!(said.len(), 1);
        assert!(said[0].contains("wind.grain_m is 3"), "{}", said[0]);
    }

    #[test]
    fn setting_what_was_got_changes_nothing() {
        for setting in SETTINGS {
            let mut settings = Settings::default();
            (setting.set)(&mut settings, (setting.get)(&Settings::default()));
            assert_eq!(settings, Settings::default(), "{}", setting.key);
        }
    }
}

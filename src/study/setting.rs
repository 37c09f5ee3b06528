//! What a record of a setting holds, and the short ways to write one.

use super::Settings;

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

pub(super) use {auto, number, prior, whole};

//! Short forms of a setting's record: a field of the settings is read and written by its path.

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

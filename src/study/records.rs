//! Each setting described once: key, label, unit, range, default, help. Forms, `check`, the
//! documents and hover texts read these records.

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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::all_settings;

    /// The path `a.b` in a JSON object.
    fn field<'a>(json: &'a serde_json::Value, key: &str) -> &'a serde_json::Value {
        key.split('.').fold(json, |v, part| &v[part])
    }

    #[test]
    fn every_number_of_the_settings_has_a_record_and_every_record_a_field() {
        let json = serde_json::to_value(Settings::default()).unwrap();
        for setting in all_settings() {
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
        assert_eq!(all_settings().count(), fields - 1 + priors);
    }

    #[test]
    fn defaults_are_within_their_ranges_and_a_value_outside_is_named() {
        let mut settings = Settings::default();
        assert!(all_settings().all(|s| s.problem(&settings).is_none()));
        settings.wind.grain_m = 3.0;
        let said: Vec<_> = all_settings().filter_map(|s| s.problem(&settings)).collect();
        assert_eq!(said.len(), 1);
        assert!(said[0].contains("wind.grain_m is 3"), "{}", said[0]);
    }

    #[test]
    fn setting_what_was_got_changes_nothing() {
        for setting in all_settings() {
            let mut settings = Settings::default();
            (setting.set)(&mut settings, (setting.get)(&Settings::default()));
            assert_eq!(settings, Settings::default(), "{}", setting.key);
        }
    }
}

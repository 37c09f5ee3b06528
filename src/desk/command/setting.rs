//! Settings, by the records that describe them.

use crate::desk::{MergeKey, Model};
use crate::study::{Setting, SettingValue, Settings, all_settings};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum SettingCommand {
    /// A value for the setting of this key.
    Set {
        key: &'static str,
        value: SettingValue,
    },
    Reset(&'static str),
    ResetAll,
}

impl SettingCommand {
    pub(super) const LISTED: &[Self] = &[Self::ResetAll];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Set { .. } => {
                Record::new("setting.set", "Change setting", "Tells a method something.").editing()
            }
            Self::Reset(_) => Record::new("setting.reset", "Reset setting", "Back to the default.").editing(),
            Self::ResetAll => {
                Record::new("setting.reset-all", "Reset all settings", "Every setting back to its default.")
                    .editing()
            }
        }
    }

    pub(super) fn refusal(&self, _: &Model) -> Option<&'static str> {
        match self {
            Self::Set { key, .. } | Self::Reset(key) if find(key).is_none() => {
                Some("there is no such setting")
            }
            _ => None,
        }
    }

    pub(super) fn merge_key(&self) -> Option<MergeKey> {
        match self {
            Self::Set { key, .. } => Some(MergeKey::Setting(key)),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Set { key, value } => set(model, key, value),
            Self::Reset(key) => {
                if let Some(setting) = find(key) {
                    (setting.set)(&mut model.sheet.settings, (setting.get)(&Settings::default()));
                }
            }
            Self::ResetAll => model.sheet.settings = Settings::default(),
        }
    }
}

/// A value out of range is refused with the range, and nothing changes.
fn set(model: &mut Model, key: &str, value: SettingValue) {
    let Some(setting) = find(key) else { return };
    let mut changed = model.sheet.settings.clone();
    (setting.set)(&mut changed, value);
    match setting.problem(&changed) {
        Some(problem) => model.session.notices.problem(problem),
        None => model.sheet.settings = changed,
    }
}

fn find(key: &str) -> Option<&'static Setting> {
    all_settings().find(|setting| setting.key == key)
}

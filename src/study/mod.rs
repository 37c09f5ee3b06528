//! The study: the sheet (document), its settings, the one executor, and the findings it returns.

mod findings;
pub mod fingerprint;
mod records;
mod settings;
mod sheet;
pub mod sheet_file;

pub use findings::*;
pub use records::{SETTINGS, Setting, SettingKind, SettingValue};
pub use settings::*;
pub use sheet::*;

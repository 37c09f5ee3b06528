//! The study: the sheet (document), its settings, the one executor, and the findings it returns.

pub mod bulk;
mod cautions;
pub mod check;
pub mod demo;
mod findings;
pub mod fingerprint;
pub mod glance;
pub mod handover;
pub mod judges;
mod migrate;
mod patch;
mod records;
pub mod run;
mod sentence;
mod settings;
mod sheet;
pub mod sheet_file;
pub mod sources;
mod verdict;
pub mod window;
pub mod winds;

pub use crate::science::wind::calendar::{Calendar as CalendarFinding, Period as PeriodFinding};
pub use crate::science::wind::gusts::Gusts as GustFinding;
pub use crate::science::wind::quality::SetAside;
pub use crate::science::wind::regime::{Drift as DriftFinding, Season as SeasonFinding};
pub use crate::science::wind::rounding::Rounding as RoundingFinding;
pub use crate::science::wind::thinning::{Changed as ChangedFinding, Thinning as ThinningFinding};
pub use findings::{
    Failure, Findings, ModeFinding, Node, PatchFinding, RasterFinding, SpectrumFinding, SpectrumPicture,
    TheoryFinding, TrendFinding, VerdictFinding, WindFinding,
};
pub use records::{SETTINGS, Setting, SettingKind, SettingValue};
pub use settings::{
    Settings, SpectrumSettings, StatisticsSettings, ThresholdLaw, TransportLaw, TrendSettings,
    VerdictSettings, WindSettings,
};
pub use sheet::{Id, ImageKind, Patch, Placement, RasterEntry, Sheet, Tone, WindChoice, WindEntry};
pub use sources::{OpenRaster, Sources};

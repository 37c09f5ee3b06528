//! The study: the sheet (document), its settings, the one executor, and the findings it returns.

mod cautions;
pub mod check;
pub mod demo;
mod findings;
pub mod fingerprint;
pub mod glance;
pub mod handover;
mod obstacles;
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

pub use crate::science::wind::quality::SetAside;
pub use crate::science::wind::regime::{Drift as DriftFinding, Season as SeasonFinding};
pub use findings::{
    Failure, Findings, ModeFinding, Node, PatchFinding, RasterFinding, SpectrumFinding, SpectrumPicture,
    TheoryFinding, TrendFinding, VerdictFinding, WindFinding,
};
pub use obstacles::{NodeAround, ObstacleFinding, ObstaclesFinding};
pub use records::{SETTINGS, Setting, SettingKind, SettingValue};
pub use settings::{
    ObstacleGround, ObstacleSettings, Settings, SpectrumSettings, StatisticsSettings, ThresholdLaw,
    TransportLaw, TrendSettings, VerdictSettings, WindSettings,
};
pub use sheet::{Id, ImageKind, Obstacle, Patch, Placement, RasterEntry, Sheet, Tone, WindEntry};
pub use sources::{OpenRaster, Sources};

//! The study: the sheet (document), its settings, the one executor, and the findings it returns.

mod backwards;
pub mod bulk;
mod cautions;
mod channel_settings;
pub mod check;
pub mod claim;
mod comparison;
mod comparison_check;
mod crest_check;
pub mod crest_edits;
mod crest_entry;
mod crest_words;
mod crests;
pub mod demo;
mod findings;
pub mod fingerprint;
pub mod glance;
mod grains;
pub mod handover;
pub mod judges;
mod light;
mod migrate;
mod network;
mod network_check;
mod network_entry;
mod network_findings;
mod obstacles;
mod patch;
mod pattern_findings;
mod pattern_settings;
pub mod pen;
mod populations;
mod records;
mod recovery;
pub mod run;
mod sentence;
#[macro_use]
mod setting_macros;
mod channel_list;
mod pattern_list;
mod setting_list;
mod settings;
mod sheet;
pub mod sheet_file;
pub mod sources;
pub mod together;
mod verdict;
mod what_if;
pub mod window;
pub mod winds;

pub use crate::science::alignment::equivalence::Equivalence as EquivalenceFinding;
pub use crate::science::alignment::migration::Migration as MigrationFinding;
pub use crate::science::alignment::{Building as BuildingFinding, Elongation as ElongationFinding};
pub use crate::science::wind::Sensitivity as SensitivityFinding;
pub use crate::science::wind::calendar::{Calendar as CalendarFinding, Period as PeriodFinding};
pub use crate::science::wind::gusts::Gusts as GustFinding;
pub use crate::science::wind::quality::SetAside;
pub use crate::science::wind::regime::{Drift as DriftFinding, Season as SeasonFinding};
pub use crate::science::wind::rounding::Rounding as RoundingFinding;
pub use crate::science::wind::thinning::{Changed as ChangedFinding, Thinning as ThinningFinding};
pub use backwards::{BackwardsFinding, arc_words};
pub use channel_settings::{ChannelSettings, DrainageSettings, FlowSettings, NetworkSettings};
pub use crest_entry::{CrestEntry, CrestStroke, PopulationName, StrokeKind};
pub use crests::CrestsFinding;
pub use findings::{
    Discovery, Failure, Findings, Flip, JointFinding, JointTheory, JointTrend, ModeFinding, Node,
    PatchFinding, RasterFinding, SpectrumFinding, SpectrumPicture, TheoryFinding, TogetherFinding,
    TrendFinding, VerdictFinding, WindFinding,
};
pub use grains::{Birth, BirthFinding, Doubtful, FirstWave, SandFinding, SandThreshold};
pub use network_entry::{FromElevation, FromImage, NetworkEntry, NetworkSource, TracedChannel};
pub use network_findings::{DrainageFinding, NetworkFinding, TracingFinding};
pub use obstacles::{NodeAround, ObstacleFinding, ObstaclesFinding};
pub use pattern_findings::{
    ComparisonFinding, LightFinding, LooksFinding, PatternFinding, PlateauFinding, PopulationFinding,
    PopulationSource, RecoveredTrend, RecoveryFinding, RefitFinding, ScaleFinding,
};
pub use pattern_settings::{CompareSettings, CrestSettings, RecoverySettings};
pub use records::{Setting, SettingKind, SettingValue};
pub use setting_list::all_settings;
pub use settings::{
    BackwardsSettings, LettauConstant, ObstacleGround, ObstacleSettings, Priors, Settings, SpectrumSettings,
    StatisticsSettings, ThresholdLaw, TransportLaw, TrendSettings, VerdictSettings, WindSettings,
};
pub use sheet::{
    Comparison, Id, ImageKind, Obstacle, Patch, Placement, RasterEntry, Sheet, Tone, WindChoice, WindEntry,
};
pub use sources::{OpenRaster, Sources};

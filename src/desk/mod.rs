//! Behaviour without drawing: the model, its commands, the one `apply`, undo, background jobs,
//! notices, and what the panels show. Knows no window toolkit.

mod answer;
pub mod channel_facts;
pub mod channels;
mod charting;
mod command;
mod comparing;
pub mod comparison_facts;
pub mod crest_facts;
pub mod crests;
mod engine;
pub mod facts;
mod history;
mod import;
mod jobs;
mod laying;
pub mod ledger;
pub mod light_facts;
mod measuring;
mod model;
mod notices;
mod pen;
pub mod planform_facts;
mod plates;
pub mod population_facts;
pub mod readout;
mod recovering;
pub mod regimes;
mod results;
pub mod sand;
mod session;
mod tiles;
mod view;

pub use crate::files::raster::Bands;
pub use crate::files::wind_table::{DirectionSense, SpeedUnit, Stand, WindImport, WindLayout, ZeroDirection};
pub use crate::study::bulk::LonLatBox;
pub use answer::{Answer, absorb};
pub use command::{
    AskCommand, BodyCommand, Chord, Command, ComparisonCommand, CrestCommand, DrawCommand, JobCommand,
    NetworkCommand, ObstacleCommand, PatchCommand, PlateCommand, RasterCommand, Record, SettingCommand,
    SheetCommand, ViewCommand, WindCommand, apply, listed,
};
pub use comparing::Compared;
pub use crests::Crested;
pub use engine::SheetError;
pub use history::{History, MergeKey};
pub use import::{Import, Pick, ReadRow, Reading};
pub use jobs::{Delivery, Jobs, Post, Running, Slot, Wake};
pub use model::Model;
pub use notices::{Notice, NoticeKind, Notices};
pub use pen::{Leg, PenAnswer, PenGround, Subject, Tracing};
pub use plates::{Format, Motif, PlateChoice, Preview};
pub use recovering::Recovered;
pub use results::{Charted, Measured, Results, Standing, Stick, WindResult};
pub use session::{Ask, Cursor, Dialog, Draft, Laid, Opened, Purpose, Session, Tool};
pub use tiles::{TILE, TileKey, TileReader, TileShelf};
pub use view::{Camera, Layers, Page, PickedRegime, Theme, View};

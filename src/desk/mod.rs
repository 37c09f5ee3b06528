//! Behaviour without drawing: the model, its commands, the one `apply`, undo, background jobs,
//! notices, and what the panels show. Knows no window toolkit.

mod answer;
mod command;
mod engine;
pub mod facts;
mod history;
mod jobs;
pub mod ledger;
mod model;
mod notices;
mod results;
mod session;
mod tiles;
mod view;

pub use answer::{Answer, absorb};
pub use command::{
    AskCommand, Chord, Command, DrawCommand, JobCommand, PatchCommand, RasterCommand, Record, SettingCommand,
    SheetCommand, ViewCommand, apply, listed,
};
pub use engine::SheetError;
pub use history::{History, MergeKey};
pub use jobs::{Delivery, Jobs, Post, Running, Slot, Wake};
pub use model::Model;
pub use notices::{Notice, NoticeKind, Notices};
pub use results::{Measured, Results, Standing};
pub use session::{Ask, Cursor, Dialog, Draft, Laid, Opened, Purpose, Session, Tool};
pub use tiles::{TILE, TileKey, TileReader, TileShelf};
pub use view::{Camera, Layers, Page, Theme, View};

//! The window: draws from the model and answers with commands. The only floor that knows egui.

mod app;
mod ask;
mod bench;
mod bodies;
mod controls;
mod dialogs;
mod figure;
mod finder;
mod foot;
mod head;
mod keys;
mod ledger;
mod ledger_networks;
mod notices;
mod open;
pub mod painter;
mod software;
mod start_page;
pub mod table;
mod theme;
mod winds_cells;
mod winds_import;

pub use app::App;
pub use open::{Start, WindowError, open};

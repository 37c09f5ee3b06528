//! The study: the sheet (document), its settings, the one executor, and the findings it returns.

mod findings;
mod settings;
mod sheet;

pub use findings::*;
pub use settings::*;
pub use sheet::*;

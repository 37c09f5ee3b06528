//! What leaves the program: the findings as JSON, tables and layers, the methods as a page.

mod bodies;
mod comparisons;
mod crest_layers;
mod crests;
mod json;
mod layers;
mod methods;
mod network_layers;
mod networks;
mod obstacles;
mod pattern_light;
mod populations;
mod records;
mod regimes;
mod sand;
mod weighing;
mod write;

pub use json::findings_json;
pub use methods::{bibtex, citation, methods_markdown};
pub use write::{HandoverError, write_all};

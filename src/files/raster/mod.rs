//! Raster files, read by window and level.

mod bands;

pub use bands::Bands;

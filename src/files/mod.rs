//! Bytes to checked values and back: the only floor that touches files.

pub mod error;
pub mod georef;
pub mod layers;
pub mod netcdf;
pub mod places;
pub mod raster;
pub mod save;
pub mod text;
pub mod wind_table;

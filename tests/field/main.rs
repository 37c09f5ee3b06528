//! Real rasters and records from `../shared/data` (or the folder in `FIELD_DATA`); each test says so
//! when the data is absent and it is skipped.

mod cells;
mod channels;
mod crests;
mod drainage;
mod look;
mod measure;
mod records;
mod winds;

use std::path::PathBuf;

/// The folder of field data, or `None` with a note that the caller's test is skipped.
pub fn field_data(test: &str) -> Option<PathBuf> {
    let root = std::env::var_os("FIELD_DATA")
        .map_or_else(|| PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("../shared/data"), PathBuf::from);
    if root.is_dir() {
        return Some(root);
    }
    eprintln!("skipped {test}: no field data at {}", root.display());
    None
}

//! Writes what a run found: findings, tables, layers and plates.

use std::path::Path;

use crate::plate::compose;
use crate::study::handover::write_all;
use crate::study::{Findings, Sheet, Sources};

use super::Trouble;
use super::progress::watched;

/// Returns how many files were written.
pub fn write(out: &Path, sheet: &Sheet, sources: &Sources, findings: &Findings) -> Result<usize, Trouble> {
    let plates = watched(|work| compose::all(sheet, sources, findings, work)).map_err(|e| {
        Trouble::new("the plates cannot be made", e, "The measured numbers are not affected.")
    })?;
    let written = write_all(out, sheet, sources, findings, &plates)
        .map_err(|e| Trouble::new("the findings cannot be written", e, "Give another folder with --out."))?;
    Ok(written.len())
}

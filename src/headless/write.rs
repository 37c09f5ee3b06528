//! Writes what a run found: findings, tables, layers and plates.

use std::path::Path;

use crate::study::handover::write_all;
use crate::study::{Findings, Sheet, Sources};

use super::Trouble;

/// Returns how many files were written.
pub fn write(out: &Path, sheet: &Sheet, sources: &Sources, findings: &Findings) -> Result<usize, Trouble> {
    let written = write_all(out, sheet, sources, findings, &[])
        .map_err(|e| Trouble::new("the findings cannot be written", e, "Give another folder with --out."))?;
    Ok(written.len())
}

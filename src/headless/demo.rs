//! `demo`: the invented ground, made, measured and judged.

use std::path::{Path, PathBuf};

use crate::study::demo::lay_out;

use super::check::read_sheet;
use super::run::study;
use super::{Outcome, Trouble};

/// Returns the sheet's path too, so that the window can open it.
pub fn demo(out: &Path) -> Result<(Outcome, PathBuf), Trouble> {
    let sheet_path = lay_out(out).map_err(|why| {
        Trouble::new(
            format!("the demo cannot be written to {}", out.display()),
            why,
            "Give another folder with --out.",
        )
    })?;
    let sheet = read_sheet(&sheet_path)?;
    let folder = sheet_path.parent().unwrap_or(out).join("findings");
    Ok((study(&sheet, &folder)?, sheet_path))
}

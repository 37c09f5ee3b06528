//! `check`: all problems of a sheet at once, nothing computed.

use std::path::Path;

use crate::files::text;
use crate::study::check::problems;
use crate::study::sheet_file::SheetFile;
use crate::study::{Sheet, Sources};

use super::{Outcome, Trouble};

/// Reads a sheet; its relative paths count from its own folder.
pub fn read_sheet(path: &Path) -> Result<Sheet, Trouble> {
    let trouble = |why: String| {
        Trouble::new(
            format!("{} cannot be opened as a sheet", path.display()),
            why,
            "Sheets are written by the window, `ventifact measure` and `ventifact demo`.",
        )
    };
    let text = text::read(path).map_err(|e| trouble(e.to_string()))?;
    let folder = path.parent().unwrap_or_else(|| Path::new(""));
    Ok(SheetFile::parse(&text, folder).map_err(|e| trouble(e.to_string()))?.sheet)
}

pub fn check(path: &Path) -> Result<Outcome, Trouble> {
    let sheet = read_sheet(path)?;
    let sources = Sources::open(&sheet);
    let problems = problems(&sheet, &sources);
    for problem in &problems {
        println!("{}: {}", problem.what, problem.why);
    }
    if problems.is_empty() {
        println!(
            "no problems: {} rasters, {} patches, {} wind records",
            sheet.rasters.len(),
            sheet.patches.len(),
            sheet.winds.len()
        );
        return Ok(Outcome::Done);
    }
    Ok(Outcome::PartFailed)
}

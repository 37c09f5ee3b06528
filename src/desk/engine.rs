//! The desk's way to the floors below: sheets in and out.

use std::path::{Path, PathBuf};

use crate::files::{places, save, text};
use crate::study::sheet_file::{SheetFile, SheetFileError};
use crate::study::{Sheet, demo};

use super::View;

/// A sheet that cannot be opened or saved.
#[derive(Debug, thiserror::Error)]
pub enum SheetError {
    #[error(transparent)]
    Text(#[from] text::TextError),
    #[error(transparent)]
    Content(#[from] SheetFileError),
}

/// Reads a sheet and how its window was left; a view of another version falls back to the default.
///
/// # Errors
/// [`SheetError`].
pub fn read_sheet(path: &Path) -> Result<(Sheet, View), SheetError> {
    let file = SheetFile::parse(&text::read(path)?, folder_of(path))?;
    Ok((file.sheet, serde_json::from_value(file.view).unwrap_or_default()))
}

/// Writes the sheet and the view; the previous text stays beside it as its one backup.
///
/// # Errors
/// [`SheetError::Text`].
pub fn write_sheet(path: &Path, sheet: &Sheet, view: &View) -> Result<(), SheetError> {
    let view = serde_json::to_value(view).unwrap_or_default();
    let text = SheetFile::new(sheet.clone(), view).render(folder_of(path));
    Ok(text::write(path, &text, Some(&save::backup_of(path)))?)
}

/// The recent sheets, latest first.
pub fn recent_sheets() -> Vec<PathBuf> {
    places::recent_sheets()
}

/// Puts a sheet first in the list of recent ones.
///
/// # Errors
/// [`text::TextError`].
pub fn remember_sheet(path: &Path) -> Result<Vec<PathBuf>, text::TextError> {
    places::remember_sheet(path)
}

/// Makes the demo's files in the program's own folder and says where its sheet is.
///
/// # Errors
/// The reason in words.
pub fn lay_out_demo() -> Result<PathBuf, String> {
    demo::lay_out(&places::demo_folder())
}

fn folder_of(path: &Path) -> &Path {
    path.parent().unwrap_or(Path::new(""))
}

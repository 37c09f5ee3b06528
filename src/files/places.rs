//! Where the program keeps its own few files: the list of recent sheets, the demo.

use std::path::{Path, PathBuf};

use directories::ProjectDirs;

use super::text;

/// Sheets kept in the list.
const MOST_RECENT: usize = 12;

/// The recent sheets that still exist, latest first; empty when there is no list or no home.
pub fn recent_sheets() -> Vec<PathBuf> {
    let Some(text) = recent_file().and_then(|file| text::read(&file).ok()) else { return Vec::new() };
    text.lines().map(PathBuf::from).filter(|path| path.is_file()).collect()
}

/// Puts `sheet` first in the list and returns the list.
///
/// # Errors
/// [`text::TextError`] when the list cannot be written; without a home folder nothing is written.
pub fn remember_sheet(sheet: &Path) -> Result<Vec<PathBuf>, text::TextError> {
    let mut list = recent_sheets();
    let sheet = std::path::absolute(sheet).unwrap_or_else(|_| sheet.to_owned());
    list.retain(|path| *path != sheet);
    list.insert(0, sheet);
    list.truncate(MOST_RECENT);
    if let Some(file) = recent_file() {
        let lines: Vec<_> = list.iter().map(|path| path.to_string_lossy()).collect();
        text::write(&file, &(lines.join("\n") + "\n"), None)?;
    }
    Ok(list)
}

/// The folder for the generated demo; the system's temporary folder without a home.
pub fn demo_folder() -> PathBuf {
    project().map_or_else(|| std::env::temp_dir().join("ventifact-demo"), |p| p.data_local_dir().join("demo"))
}

fn recent_file() -> Option<PathBuf> {
    project().map(|p| p.config_dir().join("recent-sheets.txt"))
}

fn project() -> Option<ProjectDirs> {
    ProjectDirs::from("", "", "ventifact")
}

//! The sheet as a file: pretty JSON with a format number. Unknown fields are refused with their
//! path; paths of rasters and records are stored relative to the sheet where possible.

use std::path::{Component, Path, PathBuf};

use serde::{Deserialize, Serialize};

use super::Sheet;
use super::migrate::migrate;

/// The format this program writes.
pub const FORMAT: u32 = 2;

/// What a `NAME.sheet.json` holds.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SheetFile {
    pub format: u32,
    pub sheet: Sheet,
    /// How the window was left; plain data the study never reads.
    #[serde(default, skip_serializing_if = "serde_json::Value::is_null")]
    pub view: serde_json::Value,
}

/// A sheet file that cannot be used.
#[derive(Debug, thiserror::Error)]
pub enum SheetFileError {
    #[error("not a sheet: {reason} (at {path}, {place})")]
    Malformed {
        path: String,
        /// The line, or that an older sheet was brought up to this format before.
        place: String,
        reason: String,
    },
    #[error(
        "the sheet has format {found}, this program reads up to {FORMAT}; open it with a newer version of the program"
    )]
    TooNew { found: u64 },
}

impl SheetFile {
    pub fn new(sheet: Sheet, view: serde_json::Value) -> Self {
        Self { format: FORMAT, sheet, view }
    }

    /// Reads the text of a sheet that lies in `folder`; relative paths become paths from there.
    ///
    /// # Errors
    /// [`SheetFileError`] naming the path of the field that is wrong, or the newer format. A sheet of an
    /// earlier format is brought up to this one.
    pub fn parse(text: &str, folder: &Path) -> Result<Self, SheetFileError> {
        #[derive(Deserialize)]
        struct Stamp {
            format: u64,
        }
        let malformed = |path: String, error: &serde_json::Error| SheetFileError::Malformed {
            path,
            place: format!("line {}", error.line()),
            reason: error.to_string(),
        };
        // The stamp is read first, so that a newer file is told apart from a broken one.
        let stamp: Stamp = serde_json::from_str(text).map_err(|e| malformed("the start".into(), &e))?;
        if stamp.format > u64::from(FORMAT) {
            return Err(SheetFileError::TooNew { found: stamp.format });
        }
        let mut file: Self = if stamp.format < u64::from(FORMAT) {
            let mut old = serde_json::from_str(text).map_err(|e| malformed("the file".into(), &e))?;
            migrate(&mut old, stamp.format);
            serde_path_to_error::deserialize(old).map_err(|e| SheetFileError::Malformed {
                path: e.path().to_string(),
                place: format!("brought up from format {}", stamp.format),
                reason: e.inner().to_string(),
            })?
        } else {
            let mut reader = serde_json::Deserializer::from_str(text);
            let file = serde_path_to_error::deserialize(&mut reader)
                .map_err(|e| malformed(e.path().to_string(), e.inner()))?;
            reader.end().map_err(|e| malformed("the end".into(), &e))?;
            file
        };
        each_path(
            &mut file.sheet,
            |path| if path.is_relative() { folder.join(path) } else { path.to_owned() },
        );
        Ok(file)
    }

    /// The text to save in `folder`.
    pub fn render(&self, folder: &Path) -> String {
        let mut file = self.clone();
        each_path(&mut file.sheet, |path| relative(path, folder));
        let mut text = serde_json::to_string_pretty(&file).unwrap_or_default();
        text.push('\n');
        text
    }
}

fn each_path(sheet: &mut Sheet, change: impl Fn(&Path) -> PathBuf) {
    let rasters = sheet.rasters.iter_mut().map(|r| &mut r.path);
    for path in rasters.chain(sheet.winds.iter_mut().map(|w| &mut w.path)) {
        *path = change(path);
    }
}

/// `path` as seen from `folder`; unchanged when they share no root or only one is absolute.
fn relative(path: &Path, folder: &Path) -> PathBuf {
    if path.is_absolute() != folder.is_absolute() {
        return path.to_owned();
    }
    let (to, from): (Vec<_>, Vec<_>) = (path.components().collect(), folder.components().collect());
    let shared = to.iter().zip(&from).take_while(|(a, b)| a == b).count();
    let climbs = &from[shared..];
    let rootless = shared == 0 && path.is_absolute();
    if rootless || climbs.iter().any(|c| !matches!(c, Component::Normal(_) | Component::CurDir)) {
        return path.to_owned();
    }
    let up = climbs.iter().filter(|c| matches!(c, Component::Normal(_))).map(|_| Component::ParentDir);
    up.chain(to[shared..].iter().copied()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::{Id, ImageKind, Placement, RasterEntry, Tone};

    fn sheet(path: &str) -> SheetFile {
        let mut sheet = Sheet::empty("Sorrel Reach");
        sheet.rasters.push(RasterEntry {
            id: Id(1),
            name: "mosaic".into(),
            path: path.into(),
            bands: Default::default(),
            kind: ImageKind::Radar,
            placement: Placement::default(),
            tone: Tone::default(),
            light_from: None,
        });
        SheetFile::new(sheet, serde_json::Value::Null)
    }

    #[test]
    fn a_saved_sheet_comes_back_the_same_from_another_folder() {
        let file = sheet("/reach/rasters/mosaic.tif");
        let text = file.render(Path::new("/reach/sheets"));
        assert!(text.contains("\"../rasters/mosaic.tif\""), "{text}");
        let moved = SheetFile::parse(&text, Path::new("/elsewhere/sheets")).unwrap();
        assert_eq!(moved.sheet.rasters[0].path, Path::new("/elsewhere/sheets/../rasters/mosaic.tif"));
        assert_eq!(moved.render(Path::new("/elsewhere/sheets")), text);
    }

    #[test]
    fn an_unknown_field_is_refused_with_its_path() {
        let text = sheet("a.tif").render(Path::new(""));
        let bent = text.replace("\"gamma\"", "\"gama\"");
        let error = SheetFile::parse(&bent, Path::new("")).unwrap_err().to_string();
        assert!(error.contains("sheet.rasters[0].tone"), "{error}");
        assert!(error.contains("gama"), "{error}");
    }

    #[test]
    fn a_newer_format_is_told_apart_from_a_broken_file() {
        let error = SheetFile::parse("{\"format\": 99, \"novelty\": 1}", Path::new("")).unwrap_err();
        assert!(matches!(error, SheetFileError::TooNew { found: 99 }));
        let error = SheetFile::parse("{\"format\": 1, \"sheet\": {", Path::new("")).unwrap_err();
        assert!(matches!(error, SheetFileError::Malformed { .. }));
    }
}

//! Small text files: sheets and the list of recent ones.

use std::fs;
use std::io::{self, Read as _};
use std::path::{Path, PathBuf};

use super::save;

/// A text file that cannot be read or written.
#[derive(Debug, thiserror::Error)]
pub enum TextError {
    #[error("{path}: {source}")]
    Io { path: PathBuf, source: io::Error },
    #[error("{path} is larger than {MOST_BYTES} bytes; a sheet is never that large")]
    TooLarge { path: PathBuf },
}

/// Greater than any sheet of a hundred thousand patches.
const MOST_BYTES: u64 = 256 << 20;

/// The whole text of a file.
///
/// # Errors
/// [`TextError`] when it cannot be read, is not UTF-8, or is absurdly large.
pub fn read(path: &Path) -> Result<String, TextError> {
    let fail = |source| TextError::Io { path: path.to_owned(), source };
    let mut text = String::new();
    let file = fs::File::open(path).map_err(fail)?;
    file.take(MOST_BYTES + 1).read_to_string(&mut text).map_err(fail)?;
    if text.len() as u64 > MOST_BYTES {
        return Err(TextError::TooLarge { path: path.to_owned() });
    }
    Ok(text)
}

/// Replaces a file in one step, so that a crash leaves the old or the new text, never a half.
/// Folders on the way are made. `backup` keeps the old text beside it under that name.
///
/// # Errors
/// [`TextError::Io`].
pub fn write(path: &Path, text: &str, backup: Option<&Path>) -> Result<(), TextError> {
    save::bytes(path, text.as_bytes(), backup)
        .map_err(|source| TextError::Io { path: path.to_owned(), source })
}

#[cfg(test)]
mod tests {
    use super::{read, write};

    #[test]
    fn the_old_text_is_kept_as_backup() {
        let folder = tempfile::tempdir().unwrap();
        let (path, backup) = (folder.path().join("new/a.json"), folder.path().join("new/a.json.bak"));
        write(&path, "one", Some(&backup)).unwrap();
        assert!(!backup.exists());
        write(&path, "two", Some(&backup)).unwrap();
        assert_eq!((read(&path).unwrap().as_str(), read(&backup).unwrap().as_str()), ("two", "one"));
    }

    #[test]
    fn a_missing_file_is_named() {
        let error = read(std::path::Path::new("no/such.sheet.json")).unwrap_err().to_string();
        assert!(error.contains("no/such.sheet.json"), "{error}");
    }
}

//! Saving in one step: a crash leaves the old file or the new one, never a half.

use std::fs::{self, File};
use std::io::{self, Write as _};
use std::path::{Path, PathBuf};

/// Replaces `path` by what `fill` writes into a fresh file in the same folder. Folders on the way
/// are made; with `backup`, the old file stays beside the new one under that name.
///
/// # Errors
/// Whatever the system or `fill` refuses; the old file is then untouched.
pub fn replace<E: From<io::Error>>(
    path: &Path,
    backup: Option<&Path>,
    fill: impl FnOnce(&Path) -> Result<(), E>,
) -> Result<(), E> {
    let folder = match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    fs::create_dir_all(folder)?;
    let fresh = tempfile::Builder::new().prefix(".ventifact-").tempfile_in(folder)?.into_temp_path();
    fill(&fresh)?;
    File::open(&fresh)?.sync_all()?;
    match fs::metadata(path) {
        // Temporary files are private; the new file gets the rights of the old one.
        Ok(old) => fs::set_permissions(&fresh, old.permissions())?,
        Err(_) => share(&fresh)?,
    }
    if let Some(backup) = backup.filter(|_| path.is_file()) {
        fs::copy(path, backup)?;
    }
    fresh.persist(path).map_err(|refused| refused.error)?;
    sync_folder(folder)?;
    Ok(())
}

/// Replaces `path` by `bytes`, as [`replace`] does.
///
/// # Errors
/// As [`replace`].
pub fn bytes(path: &Path, bytes: &[u8], backup: Option<&Path>) -> io::Result<()> {
    replace(path, backup, |fresh| {
        let mut file = File::create(fresh)?;
        file.write_all(bytes)
    })
}

/// The name of a file's one backup: `NAME.previous` beside it.
pub fn backup_of(path: &Path) -> PathBuf {
    let mut name = path.file_name().unwrap_or_default().to_owned();
    name.push(".previous");
    path.with_file_name(name)
}

/// Gives a fresh file the rights any new file has.
#[cfg(unix)]
fn share(path: &Path) -> io::Result<()> {
    use std::os::unix::fs::PermissionsExt as _;
    fs::set_permissions(path, fs::Permissions::from_mode(0o644))
}

#[cfg(not(unix))]
fn share(_path: &Path) -> io::Result<()> {
    Ok(())
}

/// A rename is safe only once its folder is on the disk too; other systems sync it themselves.
#[cfg(unix)]
fn sync_folder(folder: &Path) -> io::Result<()> {
    File::open(folder)?.sync_all()
}

#[cfg(not(unix))]
fn sync_folder(_folder: &Path) -> io::Result<()> {
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_old_file_survives_a_failed_save_and_is_kept_as_backup() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("deep/a.txt");
        let backup = backup_of(&path);
        bytes(&path, b"one", Some(&backup)).unwrap();
        assert!(!backup.exists());
        let failed = replace(&path, Some(&backup), |fresh| {
            fs::write(fresh, b"half")?;
            Err(io::Error::other("disk full"))
        });
        assert_eq!(failed.unwrap_err().to_string(), "disk full");
        assert_eq!(fs::read(&path).unwrap(), b"one");
        bytes(&path, b"two", Some(&backup)).unwrap();
        assert_eq!(
            (fs::read(&path).unwrap(), fs::read(&backup).unwrap()),
            (b"two".to_vec(), b"one".to_vec())
        );
        let left: Vec<_> = fs::read_dir(path.parent().unwrap()).unwrap().collect();
        assert_eq!(left.len(), 2, "no temporary file stays");
    }
}

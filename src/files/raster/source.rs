//! A file read at stated positions, never past its end, from any thread.

use std::fs::File;
use std::path::{Path, PathBuf};

use crate::files::error::{FileError, Spot};

/// An open file and its length.
#[derive(Debug)]
pub(super) struct Source {
    file: File,
    len: u64,
    path: PathBuf,
}

impl Source {
    pub(super) fn open(path: &Path) -> Result<Self, FileError> {
        let fail = |e| FileError::io(path, "opening", e);
        let file = File::open(path).map_err(fail)?;
        let about = file.metadata().map_err(fail)?;
        if !about.is_file() {
            return Err(FileError::malformed(path, Spot::File, "this is not a regular file"));
        }
        Ok(Self { file, len: about.len(), path: path.into() })
    }

    pub(super) fn path(&self) -> &Path {
        &self.path
    }

    pub(super) fn len(&self) -> u64 {
        self.len
    }

    /// Exactly `count` bytes from `offset`. Nothing is allocated unless the file holds them.
    pub(super) fn read(&self, offset: u64, count: usize) -> Result<Vec<u8>, FileError> {
        self.check(offset, count)?;
        let mut bytes = vec![0; count];
        self.fill(offset, &mut bytes)?;
        Ok(bytes)
    }

    /// Reads into a buffer that the caller keeps.
    pub(super) fn read_into(&self, offset: u64, count: usize, buffer: &mut Vec<u8>) -> Result<(), FileError> {
        self.check(offset, count)?;
        buffer.resize(count, 0);
        self.fill(offset, buffer)
    }

    /// A buffered sequential reader from the start, for the stream decoders.
    pub(super) fn stream(&self) -> Result<std::io::BufReader<File>, FileError> {
        let file = File::open(&self.path).map_err(|e| FileError::io(&self.path, "opening", e))?;
        Ok(std::io::BufReader::with_capacity(1 << 16, file))
    }

    fn check(&self, offset: u64, count: usize) -> Result<(), FileError> {
        if offset.checked_add(count as u64).is_none_or(|end| end > self.len) {
            let problem = format!("{count} bytes are expected there, the file ends at byte {}", self.len);
            return Err(FileError::malformed(&self.path, Spot::Offset(offset), problem));
        }
        Ok(())
    }

    #[cfg(unix)]
    fn fill(&self, offset: u64, bytes: &mut [u8]) -> Result<(), FileError> {
        use std::os::unix::fs::FileExt;
        self.file.read_exact_at(bytes, offset).map_err(|e| FileError::io(&self.path, "reading", e))
    }

    #[cfg(windows)]
    fn fill(&self, offset: u64, bytes: &mut [u8]) -> Result<(), FileError> {
        use std::os::windows::fs::FileExt;
        let mut done = 0;
        while done < bytes.len() {
            let got = self
                .file
                .seek_read(&mut bytes[done..], offset + done as u64)
                .map_err(|e| FileError::io(&self.path, "reading", e))?;
            if got == 0 {
                let ended = std::io::Error::from(std::io::ErrorKind::UnexpectedEof);
                return Err(FileError::io(&self.path, "reading", ended));
            }
            done += got;
        }
        Ok(())
    }
}

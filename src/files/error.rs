//! What can go wrong with a file, by whose fault it is: the file's, this program's reach, the set
//! limits, or the machine's.

use std::fmt;
use std::io;
use std::path::{Path, PathBuf};

use crate::ground::Stopped;

/// A file that could not be read or written. Each case carries the path, the place inside the file
/// and what was expected there.
#[derive(Debug, thiserror::Error)]
pub enum FileError {
    /// The bytes contradict the format.
    #[error("{}: damaged {at}: {problem}", path.display())]
    Malformed { path: PathBuf, at: Spot, problem: String },
    /// The file may be sound, but this program does not read that kind.
    #[error("{}: not supported {at}: {feature}; {advice}", path.display())]
    Unsupported { path: PathBuf, at: Spot, feature: String, advice: &'static str },
    /// Reading on would pass a limit of [`Limits`](crate::files::raster::Limits).
    #[error("{}: too large: {what} is {asked}, the limit is {limit}", path.display())]
    TooLarge { path: PathBuf, what: &'static str, asked: u64, limit: u64 },
    /// The raster has no such band.
    #[error("{}: band {} was asked for, the raster has {bands}", path.display(), asked + 1)]
    NoBand { path: PathBuf, asked: usize, bands: usize },
    /// The raster has no such stored level.
    #[error("{}: level {asked} was asked for, the raster has levels 0 to {last}", path.display())]
    NoLevel { path: PathBuf, asked: usize, last: usize },
    /// The operating system refused.
    #[error("{}: {doing}: {source}", path.display())]
    Io { path: PathBuf, doing: &'static str, source: io::Error },
    /// The user asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
}

/// Where in a file something is wrong.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Spot {
    /// The file as a whole.
    File,
    /// The byte at this offset.
    Offset(u64),
    /// A tag of a TIFF directory (counted from 0).
    Tag { directory: usize, tag: u16 },
    /// A strip or tile (counted from 0) of a TIFF directory.
    Chunk { directory: usize, chunk: usize, offset: u64 },
}

impl fmt::Display for Spot {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::File => write!(f, "file"),
            Self::Offset(offset) => write!(f, "at byte {offset}"),
            Self::Tag { directory, tag } => write!(f, "in tag {tag} of directory {directory}"),
            Self::Chunk { directory, chunk, offset } => {
                write!(f, "in chunk {chunk} of directory {directory} at byte {offset}")
            }
        }
    }
}

impl FileError {
    pub(crate) fn malformed(path: &Path, at: Spot, problem: impl Into<String>) -> Self {
        Self::Malformed { path: path.into(), at, problem: problem.into() }
    }

    pub(crate) fn unsupported(
        path: &Path,
        at: Spot,
        feature: impl Into<String>,
        advice: &'static str,
    ) -> Self {
        Self::Unsupported { path: path.into(), at, feature: feature.into(), advice }
    }

    pub(crate) fn too_large(path: &Path, what: &'static str, asked: u64, limit: u64) -> Self {
        Self::TooLarge { path: path.into(), what, asked, limit }
    }

    pub(crate) fn io(path: &Path, doing: &'static str, source: io::Error) -> Self {
        Self::Io { path: path.into(), doing, source }
    }
}

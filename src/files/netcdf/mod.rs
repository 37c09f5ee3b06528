//! NetCDF files of the classic formats (CDF-1, CDF-2, CDF-5), read a box of values at a time; and what a
//! gridded wind series in one holds. The format is an open standard: a header of dimensions, attributes and
//! variables, then the values, big-endian, those of the record dimension interleaved.

mod clock;
mod header;
mod values;
mod winds;

use std::fs::File;
use std::io::BufReader;
use std::path::{Path, PathBuf};

use crate::files::error::{FileError, Spot};

pub use clock::Clock;
pub use header::{Attribute, Dimension, Kind, Variable};
pub use winds::{GridCell, GridWinds, Winds, blowing};

/// An open file of a classic format; nothing but its header is in memory.
#[derive(Debug)]
pub struct Netcdf {
    path: PathBuf,
    file: BufReader<File>,
    bytes: u64,
    pub dimensions: Vec<Dimension>,
    pub attributes: Vec<Attribute>,
    pub variables: Vec<Variable>,
    /// Length of the record dimension.
    records: u64,
    /// Bytes from one record to the next.
    record_bytes: u64,
}

/// What the first bytes of a file say.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Signature {
    Classic,
    /// HDF5, which NetCDF-4 builds on.
    Hdf5,
}

/// Whether a file that begins with `head` is one of the formats called NetCDF.
pub fn signature(head: &[u8]) -> Option<Signature> {
    match head {
        [b'C', b'D', b'F', 1 | 2 | 5, ..] => Some(Signature::Classic),
        [0x89, b'H', b'D', b'F', b'\r', b'\n', 0x1A, b'\n', ..] => Some(Signature::Hdf5),
        _ => None,
    }
}

impl Netcdf {
    /// Opens a file and reads its header.
    ///
    /// # Errors
    /// [`FileError`]: what is damaged and at which byte, NetCDF-4, a header past the limits, or the disk.
    pub fn open(path: &Path) -> Result<Self, FileError> {
        let io = |source| FileError::io(path, "opening", source);
        let file = File::open(path).map_err(io)?;
        let bytes = file.metadata().map_err(io)?.len();
        header::read(path, BufReader::with_capacity(1 << 13, file), bytes)
    }

    pub fn variable(&self, name: &str) -> Option<&Variable> {
        self.variables.iter().find(|v| v.name == name)
    }

    /// Length of each dimension of `variable`.
    pub fn shape(&self, variable: &Variable) -> Vec<u64> {
        variable.dimensions.iter().map(|d| self.length(*d)).collect()
    }

    fn length(&self, dimension: usize) -> u64 {
        self.dimensions.get(dimension).map_or(0, |d| if d.is_record { self.records } else { d.length })
    }

    fn malformed(&self, at: u64, problem: impl Into<String>) -> FileError {
        FileError::malformed(&self.path, Spot::Offset(at), problem)
    }
}

//! Wind records as text: guess how a table is laid out, let the user correct it, read it into SI units.

mod clock;
mod columns;
mod frequency;
mod guess;
mod import;
mod layout;
mod many;
mod number;
mod read;
mod text;
mod units;

pub use guess::{WindGuess, guess, guess_text, preview};
pub use import::{DirectionSense, OnlyRows, SpeedClass, SpeedUnit, WindImport, WindLayout, ZeroDirection};
pub use many::Stand;
pub use read::{read, read_text};

use crate::files::error::FileError;

/// Why a wind table could not be read.
#[derive(Debug, thiserror::Error)]
pub enum WindFileError {
    #[error("{path}: {source}")]
    Io { path: String, source: std::io::Error },
    #[error("{path} holds {bytes} bytes; a wind table may hold at most {limit}")]
    TooLarge { path: String, bytes: u64, limit: u64 },
    #[error("line {line} is {bytes} bytes long; a row of a wind table may have at most {limit}")]
    LongLine { line: usize, bytes: usize, limit: usize },
    #[error("the file holds no rows of data; a wind table needs at least {needed}")]
    Empty { needed: usize },
    #[error(
        "no columns look like wind speed and direction; name them in the import (the rows have {columns} columns)"
    )]
    NoWindColumns { columns: usize },
    #[error(
        "line {line} has {found} columns, but the import needs column {wanted}; check delimiter and header lines"
    )]
    MissingColumn { line: u32, wanted: usize, found: usize },
    #[error(
        "{count} of {rows} rows hold no number in column {column}; the first is {cell:?} on line {line}; check the \
         columns and the missing codes"
    )]
    NotNumbers { column: usize, line: u32, cell: String, count: usize, rows: usize },
    #[error(
        "{count} of {rows} rows hold no date or time; the first is {cell:?} on line {line}; check the time columns"
    )]
    NotTimes { line: u32, cell: String, count: usize, rows: usize },
    #[error("line {line}: {cell:?} is no sector; give degrees from north or a compass point such as NNE")]
    NotASector { line: u32, cell: String },
    #[error("the import lists {count} time columns; give none, one, two, or three to six")]
    TimeColumns { count: usize },
    #[error(transparent)]
    Netcdf(#[from] FileError),
    #[error("the speed class {low} to {high} is empty or negative")]
    SpeedClass { low: f64, high: f64 },
}

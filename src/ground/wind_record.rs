//! A wind record as read from a file, in SI units, before and after quality control.

use super::Azimuth;

/// One row of a record, or one cell of a sector × speed-class table.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WindSample {
    /// Line in the file, from 1, so that what is set aside can be named.
    pub line: u32,
    /// Seconds since 1970-01-01T00:00 in the record's own clock; `None` for tables.
    pub time: Option<i64>,
    /// Wind speed, m s⁻¹; `None` when blank or coded missing.
    pub speed: Option<f64>,
    /// Where the wind blows FROM; `None` when calm, variable or blank.
    pub from: Option<Azimuth>,
    /// Share of time the sample stands for; 1 for equal-interval records.
    pub weight: f64,
}

/// A whole record.
#[derive(Clone, Debug, PartialEq)]
pub struct WindRecord {
    pub samples: Vec<WindSample>,
    /// Whether it came from a frequency table, so that speeds are class midpoints and time is gone.
    pub is_table: bool,
    /// The gust of each sample, m s⁻¹, in the order of the samples; empty where the file has none.
    pub gusts: Vec<Option<f64>>,
}

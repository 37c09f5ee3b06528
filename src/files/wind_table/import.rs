//! How a wind table is to be read: guessed first, then the user's to edit, and kept in the sheet.

use serde::{Deserialize, Serialize};

use crate::files::netcdf::GridWinds;

/// How to read a wind file. Columns are counted from 0.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct WindImport {
    /// `','`, `';'`, `'\t'`, or `' '` for any run of white space.
    pub delimiter: char,
    /// Lines before the first row of data.
    pub header_lines: usize,
    pub layout: WindLayout,
    pub speed_unit: SpeedUnit,
    /// Whether directions say where the wind comes from (the rule) or goes to.
    pub direction: DirectionSense,
    /// Numbers that stand for "no value" in the speed or direction column.
    pub missing: Vec<f64>,
    /// What direction 0 (with 360 = north) stands for.
    pub zero_direction: ZeroDirection,
    /// Whether dates with slashes, dots or dashes and the year last put the day before the month.
    #[serde(default)]
    pub day_first: bool,
    /// The rows that belong to the record, in a table of several stations or cells; all rows when absent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub only: Option<OnlyRows>,
    /// The column of gusts, in the speed unit, where there is one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub gust: Option<usize>,
}

/// The rows of one station or cell: those whose cells in `columns` read `values`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct OnlyRows {
    pub columns: Vec<usize>,
    pub values: Vec<String>,
}

/// What the columns hold.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase", deny_unknown_fields)]
pub enum WindLayout {
    /// One row a time. `time` lists the columns that together make the time stamp, in the order
    /// year, month, day, hour, minute, or one column with a whole date or date and time, or two
    /// with date and time of day; empty when the record has no clock.
    Series { time: Vec<usize>, speed: usize, direction: usize },
    /// As `Series`, with the wind as components toward east and north in the speed unit.
    Components { time: Vec<usize>, east: usize, north: usize },
    /// One cell of a classic NetCDF file: its index along every dimension but time. What is said of
    /// columns and rows does not apply.
    Grid { winds: GridWinds, cell: Vec<u64> },
    /// One row a sector: its azimuth (or compass point) in column `sector`, then one column of
    /// frequencies for each speed class [low, high), in the speed unit: shares, percents or counts.
    Frequencies { sector: usize, classes: Vec<SpeedClass> },
}

/// A column of a frequency table.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SpeedClass {
    pub column: usize,
    pub low: f64,
    pub high: f64,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum SpeedUnit {
    #[serde(rename = "m/s")]
    MetrePerSecond,
    #[serde(rename = "km/h")]
    KilometrePerHour,
    #[serde(rename = "mph")]
    MilePerHour,
    #[serde(rename = "knot")]
    Knot,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum DirectionSense {
    From,
    Toward,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ZeroDirection {
    /// 0 is north, like 360.
    North,
    /// 0 is calm or unknown; north is coded 360.
    NoDirection,
}

impl SpeedUnit {
    /// Metres per second in one unit. Exact: international mile and nautical mile.
    pub fn metres_per_second(self) -> f64 {
        match self {
            Self::MetrePerSecond => 1.0,
            Self::KilometrePerHour => 1.0 / 3.6,
            Self::MilePerHour => 0.447_04,
            Self::Knot => 1852.0 / 3600.0,
        }
    }

    pub fn label(self) -> &'static str {
        match self {
            Self::MetrePerSecond => "m/s",
            Self::KilometrePerHour => "km/h",
            Self::MilePerHour => "mph",
            Self::Knot => "knot",
        }
    }
}

//! Reading a wind table by an import the user has seen.

use std::path::Path;

use crate::files::netcdf::{Netcdf, blowing};
use crate::ground::{Azimuth, WindRecord, WindSample};

use super::WindFileError;
use super::clock::Clock;
use super::frequency;
use super::import::{DirectionSense, OnlyRows, WindImport, WindLayout, ZeroDirection};
use super::number::{Cell, cell};
use super::text::{for_each_row, load};

/// Above this share of cells that are no number, the import is wrong rather than the rows.
const MOST_BAD: f64 = 0.2;

/// Reads the record in `path`: speeds in m s⁻¹, directions as where the wind blows from.
///
/// Blank cells, missing codes and directions outside 0–360° become `None`; nothing is judged here.
///
/// # Errors
/// [`WindFileError`] when the file cannot be read or does not fit the import.
pub fn read(path: &Path, import: &WindImport) -> Result<WindRecord, WindFileError> {
    match &import.layout {
        WindLayout::Grid { winds, cell } => Ok(Netcdf::open(path)?.record(winds, cell)?),
        _ => read_text(&load(path)?, import),
    }
}

/// [`read`] for text at hand.
///
/// # Errors
/// As [`read`].
pub fn read_text(text: &str, import: &WindImport) -> Result<WindRecord, WindFileError> {
    match &import.layout {
        WindLayout::Series { time, speed, direction } => {
            series(text, import, time, Pair::Polar { speed: *speed, direction: *direction })
        }
        WindLayout::Components { time, east, north } => {
            series(text, import, time, Pair::Components { east: *east, north: *north })
        }
        WindLayout::Grid { .. } => Err(WindFileError::Empty { needed: 1 }),
        WindLayout::Frequencies { sector, classes } => frequency::read(text, import, *sector, classes),
    }
}

/// Cells of one column that are neither number nor absent.
#[derive(Default)]
struct Misfits {
    count: usize,
    first: Option<(u32, String)>,
}

impl Misfits {
    fn add(&mut self, line: u32, cell: &str) {
        self.count += 1;
        self.first.get_or_insert_with(|| (line, cell.chars().take(40).collect()));
    }

    /// The first misfit when they are too many of `rows`.
    fn verdict(self, rows: usize) -> Option<(u32, String, usize)> {
        let (line, cell) = self.first?;
        (self.count as f64 > MOST_BAD * rows as f64).then_some((line, cell, self.count))
    }
}

/// The two columns of a wind.
#[derive(Clone, Copy)]
enum Pair {
    Polar { speed: usize, direction: usize },
    Components { east: usize, north: usize },
}

impl Pair {
    fn columns(self) -> [usize; 2] {
        match self {
            Self::Polar { speed, direction } => [speed, direction],
            Self::Components { east, north } => [east, north],
        }
    }
}

impl OnlyRows {
    /// Whether a row belongs to the station or cell.
    pub(super) fn holds(&self, cells: &[&str]) -> bool {
        self.columns
            .iter()
            .zip(&self.values)
            .all(|(c, value)| cells.get(*c).is_some_and(|cell| cell == value))
    }
}

fn series(text: &str, import: &WindImport, time: &[usize], pair: Pair) -> Result<WindRecord, WindFileError> {
    if time.len() > 6 {
        return Err(WindFileError::TimeColumns { count: time.len() });
    }
    let [first, second] = pair.columns();
    let picked = import.only.iter().flat_map(|only| only.columns.iter().copied());
    let wanted = time.iter().copied().chain([first, second]).chain(picked).max().unwrap_or(0);
    let decimal_comma = import.delimiter != ',';
    let clock =
        Clock { day_first: import.day_first, hours_with_minutes: hours_with_minutes(text, import, time) };
    let unit = import.speed_unit.metres_per_second();
    let missing =
        |value: f64| import.missing.iter().any(|code| (code - value).abs() < 1e-6 * code.abs().max(1.0));

    let mut samples = Vec::new();
    let mut gusts = Vec::new();
    let mut short = None;
    let (mut no_first, mut no_second, mut no_time) =
        (Misfits::default(), Misfits::default(), Misfits::default());
    let mut short_rows = 0;
    for_each_row(text, import.delimiter, import.header_lines, |line, cells| {
        if cells.len() <= wanted {
            short.get_or_insert((line, cells.len()));
            short_rows += 1;
            return true;
        }
        if import.only.as_ref().is_some_and(|only| !only.holds(cells)) {
            return true;
        }
        let number = |column: usize, misfits: &mut Misfits| match cell(cells[column], decimal_comma) {
            Cell::Number(value) if !missing(value) => Some(value),
            Cell::Number(_) | Cell::Absent => None,
            Cell::Text => {
                misfits.add(line, cells[column]);
                None
            }
        };
        let (a, b) = (number(first, &mut no_first), number(second, &mut no_second));
        let (value, from) = match pair {
            Pair::Components { .. } => blowing(a.map(|a| a * unit).zip(b.map(|b| b * unit))),
            Pair::Polar { .. } => {
                let from = b.filter(|deg| {
                    (0.0..=360.0).contains(deg)
                        && (*deg != 0.0 || import.zero_direction == ZeroDirection::North)
                });
                (a.map(|a| a * unit), from.map(|deg| oriented(deg, import.direction)))
            }
        };
        let at = if time.is_empty() {
            None
        } else {
            let stamp: Vec<&str> = time.iter().map(|&c| cells[c]).collect();
            let at = clock.stamp(&stamp);
            if at.is_none() {
                no_time.add(line, &stamp.join(" "));
            }
            at
        };
        // A gust is only reported where there was one, so whatever is no number is none.
        gusts.extend(import.gust.map(|column| match cells.get(column).map(|c| cell(c, decimal_comma)) {
            Some(Cell::Number(value)) if !missing(value) && value >= 0.0 => Some(value * unit),
            _ => None,
        }));
        samples.push(WindSample { line, time: at, speed: value, from, weight: 1.0 });
        true
    });

    let rows = samples.len();
    if let Some((line, found)) = short.filter(|_| short_rows as f64 > MOST_BAD * (rows + short_rows) as f64) {
        return Err(WindFileError::MissingColumn { line, wanted: wanted + 1, found });
    }
    if rows == 0 {
        return Err(WindFileError::Empty { needed: 1 });
    }
    for (column, misfits) in [(first, no_first), (second, no_second)] {
        if let Some((line, cell, count)) = misfits.verdict(rows) {
            return Err(WindFileError::NotNumbers { column: column + 1, line, cell, count, rows });
        }
    }
    if let Some((line, cell, count)) = no_time.verdict(rows) {
        return Err(WindFileError::NotTimes { line, cell, count, rows });
    }
    Ok(WindRecord { samples, is_table: false, gusts })
}

/// The azimuth the wind blows from.
pub(super) fn oriented(deg: f64, sense: DirectionSense) -> Azimuth {
    let azimuth = Azimuth::from_deg(deg);
    match sense {
        DirectionSense::From => azimuth,
        DirectionSense::Toward => azimuth.reversed(),
    }
}

/// A lone hour column that passes 24 must count minutes in its last two digits.
fn hours_with_minutes(text: &str, import: &WindImport, time: &[usize]) -> bool {
    let [_, _, _, hour] = time else { return false };
    let mut past = false;
    for_each_row(text, import.delimiter, import.header_lines, |_, cells| {
        past = cells.get(*hour).and_then(|c| c.parse::<f64>().ok()).is_some_and(|h| h > 24.0 && h <= 2400.0);
        !past
    });
    past
}

//! A wind file in the preview: how it is taken to be laid out, what that makes of its rows, and
//! what the user says about the mast.

use std::path::{Path, PathBuf};

use crate::files::wind_table::{self, WindImport};
use crate::ground::{Azimuth, Body, Caution, LonLat, WindRecord};
use crate::study::{Id, WindEntry};

/// The file in the preview.
#[derive(Clone, Debug, PartialEq)]
pub struct Import {
    pub path: PathBuf,
    /// The record of the sheet that is being reviewed.
    pub replaces: Option<Id>,
    pub name: String,
    pub height_m: f64,
    pub roughness_m: f64,
    pub body: Option<Body>,
    pub at: Option<LonLat>,
    /// How it is read; the user's to change.
    pub import: WindImport,
    /// The first rows of the file as cells, header lines included.
    pub cells: Vec<Vec<String>>,
    pub column_names: Vec<String>,
    /// One sentence for each thing guessed.
    pub reasons: Vec<String>,
    pub cautions: Vec<Caution>,
    /// What the file gives when read so; `None` while it is being read.
    pub outcome: Option<Result<Reading, String>>,
}

/// What a file gives when read in one way.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    pub rows: usize,
    pub with_speed: usize,
    pub with_direction: usize,
    pub fastest: Option<f64>,
    /// First and last second since 1970, where the record has a clock.
    pub span: Option<[i64; 2]>,
    /// The first rows: line in the file, seconds, m s⁻¹, from.
    pub first: Vec<ReadRow>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ReadRow {
    pub line: u32,
    pub time: Option<i64>,
    pub speed: Option<f64>,
    pub from: Option<Azimuth>,
}

/// The usual mast.
const MAST_M: f64 = 10.0;
/// Bare sand at the scale of a mast.
const ROUGHNESS_M: f64 = 0.001;
/// Rows of the preview.
const SHOWN_ROWS: usize = 24;

impl Import {
    /// Guesses how `path` is laid out.
    ///
    /// # Errors
    /// Why it holds no wind table, in words.
    pub fn of_file(path: &Path, body: Option<Body>) -> Result<Self, String> {
        let guess = wind_table::guess(path).map_err(|e| e.to_string())?;
        let name =
            path.file_stem().map_or_else(|| "winds".into(), |stem| stem.to_string_lossy().into_owned());
        Ok(Self {
            path: std::path::absolute(path).unwrap_or_else(|_| path.to_owned()),
            replaces: None,
            name,
            height_m: MAST_M,
            roughness_m: ROUGHNESS_M,
            body,
            at: None,
            import: guess.import,
            cells: guess.preview,
            column_names: guess.column_names,
            reasons: guess.reasons,
            cautions: guess.cautions,
            outcome: None,
        })
    }

    /// The same for a record of the sheet, as the user has it read.
    ///
    /// # Errors
    /// As [`Self::of_file`].
    pub fn of_entry(entry: &WindEntry) -> Result<Self, String> {
        let guessed = Self::of_file(&entry.path, entry.body.clone())?;
        Ok(Self {
            path: entry.path.clone(),
            replaces: Some(entry.id),
            name: entry.name.clone(),
            height_m: entry.height_m,
            roughness_m: entry.roughness_m,
            at: entry.at,
            import: entry.import.clone(),
            ..guessed
        })
    }

    /// Why the record cannot be used as it is read now; `None` when it can.
    pub fn hindrance(&self) -> Option<&'static str> {
        match &self.outcome {
            None => Some("the file is still being read"),
            Some(Err(_)) => Some("the file cannot be read this way"),
            Some(Ok(reading)) if reading.with_speed == 0 => {
                Some("no row has a wind speed when read this way")
            }
            Some(Ok(_)) => None,
        }
    }

    pub fn into_entry(self, id: Id) -> WindEntry {
        WindEntry {
            id,
            name: self.name,
            path: self.path,
            import: self.import,
            height_m: self.height_m,
            roughness_m: self.roughness_m,
            body: self.body,
            at: self.at,
        }
    }
}

impl Reading {
    /// Reads the whole file.
    ///
    /// # Errors
    /// Why it does not fit, in words.
    pub fn of(path: &Path, import: &WindImport) -> Result<Self, String> {
        wind_table::read(path, import).map(|record| Self::summed(&record)).map_err(|e| e.to_string())
    }

    fn summed(record: &WindRecord) -> Self {
        let samples = &record.samples;
        let times = || samples.iter().filter_map(|s| s.time);
        let row = |s: &crate::ground::WindSample| ReadRow {
            line: s.line,
            time: s.time,
            speed: s.speed,
            from: s.from,
        };
        Self {
            rows: samples.len(),
            with_speed: samples.iter().filter(|s| s.speed.is_some()).count(),
            with_direction: samples.iter().filter(|s| s.from.is_some()).count(),
            fastest: samples.iter().filter_map(|s| s.speed).max_by(f64::total_cmp),
            span: times().min().zip(times().max()).map(|(first, last)| [first, last]),
            first: samples.iter().take(SHOWN_ROWS).map(row).collect(),
        }
    }
}

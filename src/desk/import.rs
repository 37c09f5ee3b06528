//! A wind file in the preview: how it is taken to be laid out, what that makes of its rows, and
//! what the user says about the mast.

use std::path::{Path, PathBuf};

use crate::files::wind_table::{self, Stand, WindImport, WindLayout};
use crate::ground::{Azimuth, Body, Caution, LonLat, WindRecord};
use crate::study::bulk::{self, LonLatBox};
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
    /// The stations or cells of the file; empty when it holds one record.
    pub stands: Vec<Stand>,
    /// Those to take, by index; the first is the one read in the preview.
    pub chosen: Vec<usize>,
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
/// Records one file may put on a sheet at once: each is a verdict a patch.
const MOST_RECORDS: usize = 200;
/// Rows of the preview.
const SHOWN_ROWS: usize = 24;

/// Which stations or cells of a file to take.
#[derive(Clone, Debug, PartialEq)]
pub enum Pick {
    /// So many nearest to each patch.
    Nearest(usize),
    Inside(LonLatBox),
    /// One more or one less.
    Turn(usize),
}

impl Import {
    /// Guesses how `path` is laid out; of many stations or cells those nearest to `centres` are chosen.
    ///
    /// # Errors
    /// Why it holds no wind table, in words.
    pub fn of_file(path: &Path, body: Option<Body>, centres: &[LonLat]) -> Result<Self, String> {
        let guess = wind_table::guess(path).map_err(|e| e.to_string())?;
        let shape = body.as_ref().map_or(Body::earth().shape, |body| body.shape);
        let chosen = bulk::nearest(&guess.stands, centres, shape, 1);
        let first = chosen.first().map(|at| guess.stands[*at].import.clone());
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
            import: first.unwrap_or(guess.import),
            stands: guess.stands,
            chosen,
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
        let guessed = Self::of_file(&entry.path, entry.body.clone(), &[])?;
        Ok(Self {
            path: entry.path.clone(),
            replaces: Some(entry.id),
            name: entry.name.clone(),
            height_m: entry.height_m,
            roughness_m: entry.roughness_m,
            at: entry.at,
            import: entry.import.clone(),
            stands: Vec::new(),
            chosen: Vec::new(),
            ..guessed
        })
    }

    /// The first rows as `how` cuts them; none for a grid.
    pub fn cells_of(path: &Path, how: &WindImport) -> Vec<Vec<String>> {
        if matches!(how.layout, WindLayout::Grid { .. }) {
            return Vec::new();
        }
        // A file that cannot be read at all says so where its rows are read.
        wind_table::preview(path, how.delimiter).unwrap_or_default()
    }

    /// Why the record cannot be used as it is read now; `None` when it can.
    pub fn hindrance(&self) -> Option<&'static str> {
        match &self.outcome {
            None => Some("the file is still being read"),
            Some(Err(_)) => Some("the file cannot be read this way"),
            Some(Ok(_)) if !self.stands.is_empty() && self.chosen.is_empty() => {
                Some("no station or cell is chosen")
            }
            Some(Ok(_)) if self.chosen.len() > MOST_RECORDS => {
                Some("too many cells are chosen; take fewer than 200")
            }
            Some(Ok(reading)) if reading.with_speed == 0 => {
                Some("no row has a wind speed when read this way")
            }
            Some(Ok(_)) => None,
        }
    }

    /// Takes other stations or cells; the first is read in the preview.
    pub fn choose(&mut self, pick: &Pick, centres: &[LonLat]) {
        let shape = self.body.as_ref().map_or(Body::earth().shape, |body| body.shape);
        match pick {
            Pick::Nearest(each) => self.chosen = bulk::nearest(&self.stands, centres, shape, *each),
            Pick::Inside(area) => self.chosen = bulk::inside(&self.stands, *area),
            Pick::Turn(at) => match self.chosen.iter().position(|c| c == at) {
                Some(place) => {
                    self.chosen.remove(place);
                }
                None => {
                    self.chosen.push(*at);
                    self.chosen.sort_unstable();
                }
            },
        }
        if let Some(first) = self.chosen.first() {
            self.import = self.way_of(&self.stands[*first]);
        }
    }

    /// How the record of a station or cell is read, with what the user changed for all.
    fn way_of(&self, stand: &Stand) -> WindImport {
        let layout = match &stand.import.layout {
            cell @ WindLayout::Grid { .. } => cell.clone(),
            _ => self.import.layout.clone(),
        };
        WindImport { layout, only: stand.import.only.clone(), ..self.import.clone() }
    }

    /// The records to put on the sheet; `fresh` is the first id that is free.
    pub fn into_entries(self, fresh: Id) -> Vec<WindEntry> {
        let of_stand = |(k, at): (usize, &usize)| {
            let stand = &self.stands[*at];
            let id = Id(fresh.0 + k as u32);
            self.entry(id, stand.name.clone(), stand.at, self.way_of(stand))
        };
        if self.stands.is_empty() {
            let id = self.replaces.unwrap_or(fresh);
            return vec![self.entry(id, self.name.clone(), self.at, self.import.clone())];
        }
        self.chosen.iter().enumerate().map(of_stand).collect()
    }

    fn entry(&self, id: Id, name: String, at: Option<LonLat>, import: WindImport) -> WindEntry {
        WindEntry {
            id,
            name,
            path: self.path.clone(),
            import,
            height_m: self.height_m,
            roughness_m: self.roughness_m,
            body: self.body.clone(),
            at,
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

#[cfg(test)]
mod tests {
    use super::*;

    /// Three stations in one table, ten days each.
    fn table() -> (tempfile::TempDir, PathBuf) {
        let mut text = String::from("station,lat,lon,time,wind_speed,wind_dir\n");
        for hour in 0..240 {
            for (name, lat) in [("Ford", 10.0), ("Heath", 12.0), ("Scar", 14.0)] {
                let stamp = format!("2001-01-{:02}T{:02}:00", 1 + hour / 24, hour % 24);
                text.push_str(&format!("{name},{lat},64,{stamp},{}.5,{}\n", hour % 9, 10 * (hour % 36)));
            }
        }
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("stations.csv");
        std::fs::write(&path, text).expect("written");
        (folder, path)
    }

    #[test]
    fn the_stations_nearest_to_the_patches_are_taken_and_what_is_changed_holds_for_all() {
        let (_folder, path) = table();
        let centres = [LonLat { lon: 64.0, lat: 13.8 }, LonLat { lon: 64.0, lat: 9.0 }];
        let mut import = Import::of_file(&path, Some(Body::halvane()), &centres).expect("a guess");
        let names = |import: &Import| {
            import.chosen.iter().map(|i| import.stands[*i].name.clone()).collect::<Vec<_>>()
        };
        assert_eq!(names(&import), ["Ford", "Scar"]);
        import.import.speed_unit = wind_table::SpeedUnit::Knot;
        import.choose(&Pick::Turn(1), &centres);
        assert_eq!(names(&import), ["Ford", "Heath", "Scar"]);
        import.choose(&Pick::Turn(0), &centres);
        let entries = import.clone().into_entries(Id(7));
        let told: Vec<_> = entries.iter().map(|e| (e.id, e.name.as_str(), e.at.map(|at| at.lat))).collect();
        assert_eq!(told, [(Id(7), "Heath", Some(12.0)), (Id(8), "Scar", Some(14.0))]);
        for entry in &entries {
            let record = wind_table::read(&entry.path, &entry.import).expect("a record");
            assert_eq!(record.samples.len(), 240);
            // The first hour's 0.5 knots.
            assert_eq!(record.samples[0].speed, Some(0.5 * 1852.0 / 3600.0));
        }
        import.choose(&Pick::Inside(LonLatBox { west: 0.0, east: 1.0, south: 0.0, north: 1.0 }), &centres);
        import.outcome = Some(Reading::of(&import.path, &import.import));
        assert_eq!(import.hindrance(), Some("no station or cell is chosen"));
    }
}

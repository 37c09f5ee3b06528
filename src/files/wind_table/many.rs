//! Files of many stations or cells: long tables with a column that says where a row belongs, and grids.

use std::collections::BTreeMap;
use std::io::Read as _;
use std::path::Path;

use crate::files::netcdf::{GridCell, GridWinds, Netcdf, signature};
use crate::ground::LonLat;

use super::WindFileError;
use super::columns::{self, Places};
use super::guess::WindGuess;
use super::import::{DirectionSense, OnlyRows, SpeedUnit, WindImport, WindLayout, ZeroDirection};
use super::layout::Shape;
use super::number::{Cell, cell};
use super::text::for_each_row;

/// One station or cell of a file that holds several.
#[derive(Clone, Debug, PartialEq)]
pub struct Stand {
    pub name: String,
    pub at: Option<LonLat>,
    /// How its record is read.
    pub import: WindImport,
}

/// A table with more places than this is something else.
const MOST_STANDS: usize = 100_000;

/// The stations or cells of a long table; none when all rows belong together.
pub(super) fn stands(text: &str, shape: &Shape, import: &WindImport) -> Vec<Stand> {
    let Places { lonlat, station } = columns::places(&shape.names);
    let columns: Vec<usize> = station.into_iter().chain(lonlat.into_iter().flatten()).collect();
    if columns.is_empty() {
        return Vec::new();
    }
    // In the order in which they first come.
    let mut found: BTreeMap<Vec<String>, usize> = BTreeMap::new();
    for_each_row(text, shape.delimiter, shape.header_lines, |_, cells| {
        let key: Option<Vec<String>> =
            columns.iter().map(|c| cells.get(*c).map(|s| (*s).to_owned())).collect();
        if let Some(key) = key {
            let next = found.len();
            found.entry(key).or_insert(next);
        }
        found.len() <= MOST_STANDS
    });
    if !(2..=MOST_STANDS).contains(&found.len()) {
        return Vec::new();
    }
    let mut keys: Vec<(usize, Vec<String>)> = found.into_iter().map(|(key, order)| (order, key)).collect();
    keys.sort_unstable();
    let number = |text: &str| match cell(text, shape.delimiter != ',') {
        Cell::Number(value) => Some(value),
        Cell::Absent | Cell::Text => None,
    };
    let stand = |key: Vec<String>| {
        let value = |column: usize| columns.iter().position(|c| *c == column).map(|at| key[at].as_str());
        let at = lonlat.and_then(|[lon, lat]| place(number(value(lon)?)?, number(value(lat)?)?));
        let name = station.and_then(value).map_or_else(|| key.join(" "), str::to_owned);
        let only = Some(OnlyRows { columns: columns.clone(), values: key.clone() });
        Stand { name, at, import: WindImport { only, ..import.clone() } }
    };
    keys.into_iter().map(|(_, key)| stand(key)).collect()
}

fn place(lon: f64, lat: f64) -> Option<LonLat> {
    (lon.abs() <= 360.0 && lat.abs() <= 90.0).then(|| LonLat { lon, lat }.folded())
}

/// A NetCDF file at `path`; `None` when it is something else.
pub(super) fn grid(path: &Path) -> Result<Option<WindGuess>, WindFileError> {
    let mut head = Vec::new();
    let io = |source| WindFileError::Io { path: path.display().to_string(), source };
    std::fs::File::open(path).map_err(io)?.take(8).read_to_end(&mut head).map_err(io)?;
    if signature(&head).is_none() {
        return Ok(None);
    }
    let winds = Netcdf::open(path)?.winds()?;
    let stem = path.file_stem().map_or_else(|| "cell".into(), |stem| stem.to_string_lossy().into_owned());
    let stands: Vec<Stand> = winds.cells.iter().map(|cell| grid_stand(&stem, &winds.values, cell)).collect();
    let first = stands.first().map(|s| s.import.clone()).ok_or(WindFileError::Empty { needed: 1 })?;
    Ok(Some(WindGuess {
        import: first,
        preview: Vec::new(),
        column_names: Vec::new(),
        reasons: winds.reasons,
        cautions: Vec::new(),
        stands,
    }))
}

fn grid_stand(stem: &str, winds: &GridWinds, cell: &GridCell) -> Stand {
    let placed = cell.at.map(|at| format!("{stem} {:.3} {:.3}", at.lon, at.lat));
    let listed = || cell.index.iter().map(u64::to_string).collect::<Vec<_>>().join(" ");
    let name =
        cell.name.clone().or(placed).unwrap_or_else(|| format!("{stem} {}", listed()).trim().to_owned());
    let layout = WindLayout::Grid { winds: winds.clone(), cell: cell.index.clone() };
    Stand { name, at: cell.at, import: WindImport::of_grid(layout) }
}

impl WindImport {
    /// For a cell of a grid, which has no columns, codes or senses to settle.
    fn of_grid(layout: WindLayout) -> Self {
        Self {
            delimiter: ',',
            header_lines: 0,
            layout,
            speed_unit: SpeedUnit::MetrePerSecond,
            direction: DirectionSense::From,
            missing: Vec::new(),
            zero_direction: ZeroDirection::North,
            day_first: false,
            only: None,
            gust: None,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::{WindLayout, guess_text, read_text};
    use crate::ground::LonLat;

    fn table() -> String {
        let mut text = String::from("lat,lon,time,u10,v10\n");
        for hour in 0..30 {
            for (lat, lon) in [("31.0", "256.5"), ("30.5", "256.5"), ("30.5", "257.0")] {
                let east = if lon == "257.0" { -3.0 } else { 3.0 };
                text.push_str(&format!(
                    "{lat},{lon},2001-01-{:02}T{:02}:00,{east},4\n",
                    1 + hour / 24,
                    hour % 24
                ));
            }
        }
        text
    }

    #[test]
    fn a_long_table_of_cells_gives_a_record_each() {
        let text = table();
        let guess = guess_text(&text).expect("a guess");
        let names: Vec<_> = guess.stands.iter().map(|s| (s.name.as_str(), s.at)).collect();
        assert_eq!(names.len(), 3);
        assert_eq!(names[2], ("257.0 30.5", Some(LonLat { lon: -103.0, lat: 30.5 })));
        assert!(matches!(guess.import.layout, WindLayout::Components { east: 3, north: 4, .. }));
        for (stand, from) in guess.stands.iter().zip([216.87, 216.87, 143.13]) {
            let record = read_text(&text, &stand.import).expect("a record");
            assert_eq!(record.samples.len(), 30, "{}", stand.name);
            assert_eq!(record.samples[0].speed, Some(5.0));
            let got = record.samples[0].from.map_or(f64::NAN, |a| a.deg());
            crate::assert_close!(got, from, 0.01, "{}", stand.name);
            assert_eq!(record.samples[29].time, Some(978_307_200 + 29 * 3600));
        }
    }

    #[test]
    fn stations_go_by_name_and_one_station_is_no_bulk() {
        let mut text = String::from("station;date;speed (m/s);direction\n");
        for day in 1..29 {
            for (name, speed) in [("Ford", 3), ("Heath", 4)] {
                text.push_str(&format!("{name};2013-02-{day:02};{speed},{};{}\n", day % 10, 10 * day));
            }
        }
        let guess = guess_text(&text).expect("a guess");
        let names: Vec<_> = guess.stands.iter().map(|s| s.name.as_str()).collect();
        assert_eq!(names, ["Ford", "Heath"]);
        let heath = read_text(&text, &guess.stands[1].import).expect("a record");
        assert_eq!(heath.samples.len(), 28);
        assert_eq!(heath.samples[0].speed, Some(4.1));
        assert!(guess_text(&text.replace("Heath", "Ford")).expect("a guess").stands.is_empty());
    }
}

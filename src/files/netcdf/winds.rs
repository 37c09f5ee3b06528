//! Wind series in a NetCDF file: which variables, which cells, and the record of a cell.

use serde::{Deserialize, Serialize};

use crate::files::error::{FileError, Spot};
use crate::ground::{Azimuth, LonLat, WindRecord, WindSample};

use super::Netcdf;
use super::clock::Clock;
use super::header::Variable;

/// The two variables of a wind.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase", deny_unknown_fields)]
pub enum GridWinds {
    /// Where the air goes: its components toward east and north.
    Components { east: String, north: String },
    /// Speed, and the direction it comes from in degrees.
    Polar { speed: String, from: String },
}

/// A place the file has a series for.
#[derive(Clone, Debug, PartialEq)]
pub struct GridCell {
    /// Index along every dimension but time, in the order of the variable.
    pub index: Vec<u64>,
    pub at: Option<LonLat>,
    pub name: Option<String>,
}

/// What a file holds.
#[derive(Clone, Debug, PartialEq)]
pub struct Winds {
    pub values: GridWinds,
    pub cells: Vec<GridCell>,
    /// Steps of time.
    pub times: u64,
    /// One sentence for each thing found.
    pub reasons: Vec<String>,
}

/// The whole globe in half degrees; of finer grids a region is taken out first.
const MOST_CELLS: u64 = 300_000;
const KNOT: f64 = 1852.0 / 3600.0;

const EAST: [&str; 9] = ["u10", "u10m", "10u", "uas", "u10n", "u", "uwnd", "ugrd", "u_wind"];
const NORTH: [&str; 9] = ["v10", "v10m", "10v", "vas", "v10n", "v", "vwnd", "vgrd", "v_wind"];
const SPEED: [&str; 8] = ["wind_speed", "windspeed", "wspd", "ws", "ws10", "si10", "ff", "speed"];
const FROM: [&str; 8] =
    ["wind_from_direction", "wind_direction", "wdir", "wd", "wdir10", "dd", "winddir", "direction"];

const ADVICE: &str = "give a file with u and v toward east and north by time, lat and lon or station; docs/winds.md \
                      shows one and the CSV way";

impl Netcdf {
    /// Finds the winds of the file and where its cells lie.
    ///
    /// # Errors
    /// [`FileError`]: no pair of variables like wind, or laid out in a way that is not read.
    pub fn winds(&mut self) -> Result<Winds, FileError> {
        let named = |standard: &str, names: &[&str]| {
            let by_standard = self.variables.iter().find(|v| v.text("standard_name") == Some(standard));
            let by_name =
                || names.iter().find_map(|n| self.variables.iter().find(|v| v.name.eq_ignore_ascii_case(n)));
            by_standard.or_else(by_name).map(|v| v.name.clone())
        };
        let components = named("eastward_wind", &EAST).zip(named("northward_wind", &NORTH));
        let polar = || named("wind_speed", &SPEED).zip(named("wind_from_direction", &FROM));
        let values = match components {
            Some((east, north)) => GridWinds::Components { east, north },
            None => match polar() {
                Some((speed, from)) => GridWinds::Polar { speed, from },
                None => {
                    let names: Vec<&str> = self.variables.iter().map(|v| v.name.as_str()).take(20).collect();
                    let feature = format!("no two variables look like wind (it has {})", names.join(", "));
                    return Err(self.unsupported(feature));
                }
            },
        };
        let (first, second) = self.pair(&values)?;
        let (time, series) = self.time_of(&first)?;
        let times = self.shape(&first)[time];
        let mut reasons = vec![match &values {
            GridWinds::Components { east, north } => {
                format!("wind toward east in “{east}”, toward north in “{north}”")
            }
            GridWinds::Polar { speed, from } => {
                format!("speed in “{speed}”, direction it comes from in “{from}”")
            }
        }];
        for variable in [&first, &second] {
            if variable.text("units").is_none() {
                reasons.push(format!("“{}” names no unit: metres per second were taken", variable.name));
            }
        }
        reasons.push(format!(
            "{times} times in “{}” ({})",
            series.name,
            series.text("units").unwrap_or("no unit")
        ));
        let cells = self.cells(&first, time)?;
        let placed = cells.iter().filter(|c| c.at.is_some()).count();
        reasons
            .push(format!("{} cells or stations, {placed} of them with longitude and latitude", cells.len()));
        Ok(Winds { values, cells, times, reasons })
    }

    /// The series of one cell, index by index along every dimension but time.
    ///
    /// # Errors
    /// [`FileError`].
    pub fn record(&mut self, values: &GridWinds, cell: &[u64]) -> Result<WindRecord, FileError> {
        let (first, second) = self.pair(values)?;
        let (time, series) = self.time_of(&first)?;
        let shape = self.shape(&first);
        if cell.len() + 1 != shape.len() {
            let problem = format!(
                "“{}” has {} dimensions, a cell of {} was asked for",
                first.name,
                shape.len(),
                cell.len() + 1
            );
            return Err(self.malformed(first.begin, problem));
        }
        let times = shape[time];
        let mut start = cell.to_vec();
        start.insert(time, 0);
        let mut count = vec![1; cell.len()];
        count.insert(time, times);
        let clock = Clock::of(series.text("units").unwrap_or(""), series.text("calendar"));
        let clock = clock.map_err(|why| self.unsupported(why))?;
        let stamps = self.read(&series, &[0], &[times])?;
        let a = self.read(&first, &start, &count)?;
        let b = self.read(&second, &start, &count)?;
        let unit = self.unit_of(&first)?;
        let samples = stamps.iter().zip(a.iter().zip(&b)).enumerate().map(|(row, (stamp, (a, b)))| {
            let (speed, from) = match values {
                GridWinds::Components { .. } => blowing(a.map(|a| a * unit).zip(b.map(|b| b * unit))),
                GridWinds::Polar { .. } => {
                    let from = b.filter(|deg| (0.0..=360.0).contains(deg)).map(Azimuth::from_deg);
                    (a.map(|a| a * unit), from)
                }
            };
            let time = stamp.and_then(|t| clock.seconds(t));
            WindSample { line: row as u32 + 1, time, speed, from, weight: 1.0 }
        });
        Ok(WindRecord { samples: samples.collect(), is_table: false, gusts: Vec::new() })
    }

    fn unsupported(&self, feature: impl Into<String>) -> FileError {
        FileError::unsupported(&self.path, Spot::File, feature, ADVICE)
    }

    /// The two variables, of the same shape.
    fn pair(&self, values: &GridWinds) -> Result<(Variable, Variable), FileError> {
        let (a, b) = match values {
            GridWinds::Components { east, north } => (east, north),
            GridWinds::Polar { speed, from } => (speed, from),
        };
        let find = |name: &str| {
            let missing = || self.unsupported(format!("it has no variable “{name}”"));
            self.variable(name).cloned().ok_or_else(missing)
        };
        let (first, second) = (find(a)?, find(b)?);
        for variable in [&first, &second] {
            if matches!(
                variable.text("standard_name"),
                Some("x_wind" | "y_wind" | "grid_eastward_wind" | "grid_northward_wind")
            ) {
                let feature = format!("“{}” goes along the grid, not toward east or north", variable.name);
                return Err(self.unsupported(feature));
            }
        }
        if first.dimensions != second.dimensions {
            let feature = format!("“{a}” and “{b}” lie on different dimensions");
            return Err(self.unsupported(feature));
        }
        self.unit_of(&first)?;
        Ok((first, second))
    }

    /// Metres per second in the unit of a speed.
    fn unit_of(&self, variable: &Variable) -> Result<f64, FileError> {
        let unit: String =
            variable.text("units").unwrap_or("m/s").chars().filter(|c| !c.is_whitespace()).collect();
        match unit.to_lowercase().as_str() {
            "m/s" | "ms-1" | "ms**-1" | "ms^-1" | "m.s-1" | "meters/second" | "metres/second"
            | "meterspersecond" | "metrespersecond" | "ms^{-1}" => Ok(1.0),
            "knots" | "knot" | "kt" | "kts" | "kn" => Ok(KNOT),
            "km/h" | "kmh-1" | "kmhr-1" => Ok(1.0 / 3.6),
            other => Err(self.unsupported(format!(
                "“{}” is in “{other}”, which is no unit of speed known here",
                variable.name
            ))),
        }
    }

    /// Which dimension of a wind is time, and the variable that holds its values.
    fn time_of(&self, wind: &Variable) -> Result<(usize, Variable), FileError> {
        let is_time = |v: &&Variable| {
            v.text("units").is_some_and(|units| units.to_lowercase().contains(" since "))
                || v.text("standard_name") == Some("time")
        };
        let along = |d: usize| {
            let own = |v: &&Variable| v.dimensions == [d] && is_time(v);
            self.variables.iter().find(own).cloned()
        };
        let found = wind.dimensions.iter().enumerate().find_map(|(place, d)| Some((place, along(*d)?)));
        found.ok_or_else(|| self.unsupported(format!("no dimension of “{}” is time", wind.name)))
    }

    /// Every cell, with its place where the file says it.
    fn cells(&mut self, wind: &Variable, time: usize) -> Result<Vec<GridCell>, FileError> {
        let mut shape = self.shape(wind);
        let mut dimensions = wind.dimensions.clone();
        shape.remove(time);
        dimensions.remove(time);
        let count = shape.iter().try_fold(1u64, |n, d| n.checked_mul(*d)).unwrap_or(u64::MAX);
        if count > MOST_CELLS {
            return Err(FileError::too_large(&self.path, "the number of cells", count, MOST_CELLS));
        }
        let lon = self.coordinate(&dimensions, "longitude", &["longitude", "lon", "lons", "x", "xlong"])?;
        let lat = self.coordinate(&dimensions, "latitude", &["latitude", "lat", "lats", "y", "xlat"])?;
        let covered = |place: usize| [&lon, &lat].into_iter().flatten().any(|c| c.places.contains(&place));
        for (place, length) in shape.iter().enumerate() {
            // One station dimension may lack a place; a second free dimension is a level or a member.
            let free = (0..shape.len()).filter(|p| !covered(*p) && shape[*p] > 1).count();
            if !covered(place) && *length > 1 && (free > 1 || lon.is_some()) {
                let name = &self.dimensions[dimensions[place]].name;
                return Err(self.unsupported(format!(
                    "“{}” has a further dimension “{name}” of {length}; take one of it out first",
                    wind.name
                )));
            }
        }
        let mut cells = Vec::with_capacity(count as usize);
        let mut index = vec![0u64; shape.len()];
        for _ in 0..count {
            let value = |c: &Option<Coordinate>| c.as_ref().and_then(|c| c.at(&index));
            let at = value(&lon).zip(value(&lat)).map(|(lon, lat)| LonLat { lon, lat }.folded());
            let at = at.filter(|at| at.lat.abs() <= 90.0 && at.lon.abs() <= 180.0);
            cells.push(GridCell { index: index.clone(), at, name: None });
            for k in (0..index.len()).rev() {
                index[k] += 1;
                if index[k] < shape[k] {
                    break;
                }
                index[k] = 0;
            }
        }
        self.name_stations(&dimensions, &mut cells)?;
        Ok(cells)
    }

    /// Longitudes or latitudes over some of `dimensions`.
    fn coordinate(
        &mut self,
        dimensions: &[usize],
        standard: &str,
        names: &[&str],
    ) -> Result<Option<Coordinate>, FileError> {
        let degrees = |v: &Variable| v.text("units").is_none_or(|u| u.to_lowercase().starts_with("degree"));
        let inside = |v: &&Variable| v.dimensions.iter().all(|d| dimensions.contains(d)) && degrees(v);
        let by_standard =
            self.variables.iter().filter(inside).find(|v| v.text("standard_name") == Some(standard));
        let by_name = || {
            let hit = |v: &&Variable| names.iter().any(|n| v.name.eq_ignore_ascii_case(n));
            self.variables.iter().filter(inside).find(hit)
        };
        let Some(variable) = by_standard.or_else(by_name).cloned() else { return Ok(None) };
        let shape = self.shape(&variable);
        let values = self.read(&variable, &vec![0; shape.len()], &shape)?;
        let places =
            variable.dimensions.iter().filter_map(|d| dimensions.iter().position(|o| o == d)).collect();
        Ok(Some(Coordinate { places, shape, values }))
    }

    /// Names of stations, where a text variable holds them.
    fn name_stations(&mut self, dimensions: &[usize], cells: &mut [GridCell]) -> Result<(), FileError> {
        let [station] = dimensions else { return Ok(()) };
        let text = |v: &&Variable| {
            v.kind == super::Kind::Char && v.dimensions.len() == 2 && v.dimensions[0] == *station
        };
        let Some(variable) = self.variables.iter().find(text).cloned() else { return Ok(()) };
        let shape = self.shape(&variable);
        let letters = self.read(&variable, &[0, 0], &shape)?;
        for (cell, name) in cells.iter_mut().zip(letters.chunks_exact(shape[1].max(1) as usize)) {
            let name: String =
                name.iter().flatten().map(|c| char::from(*c as u8)).filter(|c| *c != '\0').collect();
            cell.name = Some(name.trim().to_owned()).filter(|n| !n.is_empty());
        }
        Ok(())
    }
}

/// A longitude or latitude over some dimensions of a cell.
struct Coordinate {
    /// Where its dimensions stand in a cell's index.
    places: Vec<usize>,
    shape: Vec<u64>,
    values: Vec<Option<f64>>,
}

impl Coordinate {
    fn at(&self, index: &[u64]) -> Option<f64> {
        let flat = self.places.iter().zip(&self.shape).fold(0, |at, (place, n)| at * n + index[*place]);
        self.values.get(flat as usize).copied().flatten()
    }
}

/// Speed and where the wind comes from, of components toward east and north.
pub fn blowing(components: Option<(f64, f64)>) -> (Option<f64>, Option<Azimuth>) {
    let Some((east, north)) = components else { return (None, None) };
    let speed = east.hypot(north);
    (Some(speed), (speed > 0.0).then(|| Azimuth::from_east_north(-east, -north)))
}

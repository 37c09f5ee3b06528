//! Layers for other programs: GeoPackage, GeoJSON and CSV out; patches and lines in.

mod features;
mod geojson;
mod geopackage;
mod lines;
mod patches;
mod srs;
mod table;
#[cfg(test)]
mod tests;
mod wkb;
mod wkt;

use std::io;
use std::path::{Path, PathBuf};

use crate::ground::{Point, Polygon, Polyline};

pub use geojson::write_geojson;
pub use geopackage::write_geopackage;
pub use lines::{LineImport, LineShape, read_lines};
pub use patches::{PatchImport, PatchShape, read_patches, write_patches};
pub use srs::Srs;
pub use table::write_csv;

/// A table of features of one kind in one reference system.
#[derive(Clone, Debug, PartialEq)]
pub struct Layer {
    /// Table name, unique in its file.
    pub name: String,
    pub description: String,
    pub kind: GeometryKind,
    pub srs: Srs,
    pub columns: Vec<Column>,
    pub rows: Vec<Row>,
}

/// One feature.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// In the coordinates of the layer's reference system.
    pub geometry: Option<Geometry>,
    /// As many as the layer has columns.
    pub values: Vec<Value>,
}

/// A column; units belong into its name (`spacing_m`).
#[derive(Clone, Debug, PartialEq)]
pub struct Column {
    pub name: String,
    pub kind: ColumnKind,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ColumnKind {
    Text,
    Real,
    Integer,
}

/// A cell. A number that is not finite is written as missing.
#[derive(Clone, Debug, PartialEq)]
pub enum Value {
    Missing,
    Text(String),
    Real(f64),
    Integer(i64),
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum GeometryKind {
    Point,
    LineString,
    Polygon,
    MultiLineString,
    MultiPolygon,
}

#[derive(Clone, Debug, PartialEq)]
pub enum Geometry {
    Point(Point),
    LineString(Polyline),
    Polygon(Polygon),
    MultiLineString(Vec<Polyline>),
    MultiPolygon(Vec<Polygon>),
}

/// A layer that could not be written or read.
#[derive(Debug, thiserror::Error)]
pub enum LayerError {
    #[error("{}: {doing}: {source}", path.display())]
    Io { path: PathBuf, doing: &'static str, source: io::Error },
    #[error("{}: {doing}: {source}", path.display())]
    Database { path: PathBuf, doing: &'static str, source: rusqlite::Error },
    #[error("{}: not valid JSON: {source}", path.display())]
    Json { path: PathBuf, source: serde_json::Error },
    #[error("{} is larger than {limit} bytes, too large for a list of features", path.display())]
    TooLarge { path: PathBuf, limit: u64 },
    #[error("{}: {problem}", path.display())]
    Content { path: PathBuf, problem: String },
    #[error("{}: {feature}: {problem}", path.display())]
    Feature { path: PathBuf, feature: String, problem: String },
    #[error("layer “{layer}”, row {row}: {problem}")]
    Row { layer: String, row: usize, problem: String },
}

impl Column {
    pub fn new(name: &str, kind: ColumnKind) -> Self {
        Self { name: name.to_owned(), kind }
    }

    pub fn text(name: &str) -> Self {
        Self::new(name, ColumnKind::Text)
    }

    pub fn real(name: &str) -> Self {
        Self::new(name, ColumnKind::Real)
    }

    pub fn integer(name: &str) -> Self {
        Self::new(name, ColumnKind::Integer)
    }
}

impl From<&str> for Value {
    fn from(text: &str) -> Self {
        Self::Text(text.to_owned())
    }
}

impl From<String> for Value {
    fn from(text: String) -> Self {
        Self::Text(text)
    }
}

impl From<f64> for Value {
    fn from(number: f64) -> Self {
        if number.is_finite() { Self::Real(number) } else { Self::Missing }
    }
}

impl From<i64> for Value {
    fn from(number: i64) -> Self {
        Self::Integer(number)
    }
}

impl<T: Into<Self>> From<Option<T>> for Value {
    fn from(value: Option<T>) -> Self {
        value.map_or(Self::Missing, Into::into)
    }
}

impl Value {
    /// Whether a column of this kind may hold it; whole numbers may stand for real ones.
    fn fits(&self, kind: ColumnKind) -> bool {
        match self {
            Self::Missing => true,
            Self::Text(_) => kind == ColumnKind::Text,
            Self::Real(_) => kind == ColumnKind::Real,
            Self::Integer(_) => kind != ColumnKind::Text,
        }
    }
}

impl Geometry {
    pub fn kind(&self) -> GeometryKind {
        match self {
            Self::Point(_) => GeometryKind::Point,
            Self::LineString(_) => GeometryKind::LineString,
            Self::Polygon(_) => GeometryKind::Polygon,
            Self::MultiLineString(_) => GeometryKind::MultiLineString,
            Self::MultiPolygon(_) => GeometryKind::MultiPolygon,
        }
    }

    /// Every vertex.
    pub fn points(&self) -> Vec<Point> {
        match self {
            Self::Point(point) => vec![*point],
            Self::LineString(line) => line.0.clone(),
            Self::Polygon(polygon) => polygon.rings().flatten().copied().collect(),
            Self::MultiLineString(lines) => lines.iter().flat_map(|line| line.0.iter().copied()).collect(),
            Self::MultiPolygon(parts) => parts.iter().flat_map(|p| p.rings().flatten().copied()).collect(),
        }
    }

    /// Why the geometry has no shape, if it has none.
    fn problem(&self) -> Option<&'static str> {
        let short = |line: &Polyline| line.0.len() < 2;
        let flat = |polygon: &Polygon| polygon.rings().any(|ring| ring.len() < 3);
        if self.points().iter().any(|p| !p.x.is_finite() || !p.y.is_finite()) {
            return Some("a coordinate is not a number");
        }
        match self {
            Self::Point(_) => None,
            Self::LineString(line) => short(line).then_some("a line needs 2 points"),
            Self::MultiLineString(lines) => lines.iter().any(short).then_some("a line needs 2 points"),
            Self::Polygon(polygon) => flat(polygon).then_some("a ring needs 3 points"),
            Self::MultiPolygon(parts) => parts.iter().any(flat).then_some("a ring needs 3 points"),
        }
    }
}

impl Layer {
    /// Checks that rows match columns and geometries their kind: a caller's mistake is named
    /// before anything is written.
    fn check(&self) -> Result<(), LayerError> {
        for (row, Row { geometry, values }) in self.rows.iter().enumerate() {
            let fail =
                |problem: String| Err(LayerError::Row { layer: self.name.clone(), row: row + 1, problem });
            if values.len() != self.columns.len() {
                return fail(format!("{} values for {} columns", values.len(), self.columns.len()));
            }
            if let Some((column, value)) =
                self.columns.iter().zip(values).find(|(column, value)| !value.fits(column.kind))
            {
                return fail(format!("{value:?} does not fit column {} ({:?})", column.name, column.kind));
            }
            if let Some(geometry) = geometry {
                if geometry.kind() != self.kind {
                    return fail(format!("a {:?} in a layer of {:?}", geometry.kind(), self.kind));
                }
                if let Some(problem) = geometry.problem() {
                    return fail(problem.to_owned());
                }
            }
        }
        Ok(())
    }
}

/// A ring wound as asked (counter-clockwise with y up), closed by its first point.
fn closed_ring(ring: &[Point], counter_clockwise: bool) -> Vec<Point> {
    let doubled: f64 = (0..ring.len())
        .map(|i| {
            let (a, b) = (ring[i], ring[(i + 1) % ring.len()]);
            a.x * b.y - b.x * a.y
        })
        .sum();
    let mut closed = ring.to_vec();
    if (doubled > 0.0) != counter_clockwise {
        closed.reverse();
    }
    closed.extend(closed.first().copied());
    closed
}

/// Outer ring counter-clockwise, holes clockwise, all closed: what both formats prefer.
fn closed_rings(polygon: &Polygon) -> Vec<Vec<Point>> {
    polygon.rings().enumerate().map(|(i, ring)| closed_ring(ring, i == 0)).collect()
}

fn io_error(path: &Path, doing: &'static str, source: io::Error) -> LayerError {
    LayerError::Io { path: path.to_owned(), doing, source }
}

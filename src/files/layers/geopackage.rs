//! The GeoPackage writer: an SQLite file of feature tables that general-purpose readers open, with
//! reference systems for bodies other than Earth.

use std::collections::HashSet;
use std::path::Path;

use rusqlite::types::{ToSql, ToSqlOutput, Value as Cell, ValueRef};
use rusqlite::{Connection, OpenFlags, params, params_from_iter};

use crate::files::save;
use crate::ground::Bounds;

use super::{ColumnKind, GeometryKind, Layer, LayerError, Srs, Value, io_error, wkb, wkt};
use crate::ground::Body;

/// "GPKG".
const APPLICATION_ID: i32 = 0x4750_4B47;
/// GeoPackage 1.3.
const USER_VERSION: i32 = 10300;
/// Systems of our own are numbered from here.
const FIRST_CUSTOM: i32 = 100_000;

const TABLES: &str = "
CREATE TABLE gpkg_spatial_ref_sys (
    srs_name TEXT NOT NULL, srs_id INTEGER PRIMARY KEY, organization TEXT NOT NULL,
    organization_coordsys_id INTEGER NOT NULL, definition TEXT NOT NULL, description TEXT);
CREATE TABLE gpkg_contents (
    table_name TEXT NOT NULL PRIMARY KEY, data_type TEXT NOT NULL, identifier TEXT UNIQUE,
    description TEXT DEFAULT '',
    last_change DATETIME NOT NULL DEFAULT (strftime('%Y-%m-%dT%H:%M:%fZ','now')),
    min_x DOUBLE, min_y DOUBLE, max_x DOUBLE, max_y DOUBLE, srs_id INTEGER,
    CONSTRAINT fk_gc_r_srs_id FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys(srs_id));
CREATE TABLE gpkg_geometry_columns (
    table_name TEXT NOT NULL, column_name TEXT NOT NULL, geometry_type_name TEXT NOT NULL,
    srs_id INTEGER NOT NULL, z TINYINT NOT NULL, m TINYINT NOT NULL,
    CONSTRAINT pk_geom_cols PRIMARY KEY (table_name, column_name),
    CONSTRAINT uk_gc_table_name UNIQUE (table_name),
    CONSTRAINT fk_gc_tn FOREIGN KEY (table_name) REFERENCES gpkg_contents(table_name),
    CONSTRAINT fk_gc_srs FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys (srs_id));
";

/// Writes the layers into one GeoPackage, replacing the file in one step.
///
/// # Errors
/// [`LayerError::Row`] for rows that do not fit their layer, [`LayerError::Content`] for names used
/// twice, otherwise what the system or the database refuses.
pub fn write_geopackage(path: &Path, layers: &[Layer]) -> Result<(), LayerError> {
    check_names(path, layers)?;
    layers.iter().try_for_each(Layer::check)?;
    save::replace(path, None, |fresh| fill(fresh, layers).map_err(Fault::Database)).map_err(|fault| {
        match fault {
            Fault::Io(source) => io_error(path, "writing the GeoPackage", source),
            Fault::Database(source) => {
                LayerError::Database { path: path.to_owned(), doing: "writing the GeoPackage", source }
            }
        }
    })
}

enum Fault {
    Io(std::io::Error),
    Database(rusqlite::Error),
}

impl From<std::io::Error> for Fault {
    fn from(error: std::io::Error) -> Self {
        Self::Io(error)
    }
}

/// Table and column names are compared without case by the database.
fn check_names(path: &Path, layers: &[Layer]) -> Result<(), LayerError> {
    let fail = |problem: String| Err(LayerError::Content { path: path.to_owned(), problem });
    let mut tables = HashSet::new();
    for layer in layers {
        let name = layer.name.to_lowercase();
        if name.is_empty() || ["gpkg_", "sqlite_", "rtree_"].iter().any(|taken| name.starts_with(taken)) {
            return fail(format!("“{}” cannot be the name of a layer", layer.name));
        }
        if !tables.insert(name) {
            return fail(format!("two layers are named “{}”", layer.name));
        }
        let mut columns: HashSet<String> = ["fid", "geom"].map(str::to_owned).into();
        if let Some(twice) = layer.columns.iter().find(|column| !columns.insert(column.name.to_lowercase())) {
            return fail(format!("layer “{}” has column “{}” twice", layer.name, twice.name));
        }
    }
    Ok(())
}

fn fill(path: &Path, layers: &[Layer]) -> rusqlite::Result<()> {
    let flags = OpenFlags::SQLITE_OPEN_READ_WRITE | OpenFlags::SQLITE_OPEN_CREATE;
    let mut database = Connection::open_with_flags(path, flags)?;
    // The whole file is thrown away when anything fails, so it needs no journal beside it.
    database.pragma_update(None, "journal_mode", "MEMORY")?;
    database.pragma_update(None, "synchronous", "OFF")?;
    database.pragma_update(None, "application_id", APPLICATION_ID)?;
    database.pragma_update(None, "user_version", USER_VERSION)?;
    let transaction = database.transaction()?;
    transaction.execute_batch(TABLES)?;
    let ids = write_systems(&transaction, layers)?;
    for (layer, srs_id) in layers.iter().zip(ids) {
        write_layer(&transaction, layer, srs_id)?;
    }
    transaction.commit()?;
    database.close().map_err(|(_, error)| error)
}

/// The three rows every GeoPackage has, then those of the layers; the layers' ids in order.
fn write_systems(database: &Connection, layers: &[Layer]) -> rusqlite::Result<Vec<i32>> {
    let mut insert = database.prepare("INSERT INTO gpkg_spatial_ref_sys VALUES (?, ?, ?, ?, ?, ?)")?;
    let plane = "coordinates in a plane without reference system";
    insert.execute(params!["Undefined Cartesian SRS", -1, "NONE", -1, "undefined", plane])?;
    let angles = "longitude and latitude on an unknown body";
    insert.execute(params!["Undefined geographic SRS", 0, "NONE", 0, "undefined", angles])?;
    let earth = wkt::geographic(&Body::earth(), 0.0);
    insert.execute(params![
        "WGS 84 geodetic",
        4326,
        "EPSG",
        4326,
        earth,
        "longitude and latitude on Earth"
    ])?;

    let mut written: Vec<(&Srs, i32)> = Vec::new();
    let mut ids = Vec::with_capacity(layers.len());
    let mut next = FIRST_CUSTOM;
    for Layer { srs, .. } in layers {
        let known = written.iter().find(|(other, _)| *other == srs).map(|(_, id)| *id);
        let id = match (srs, known) {
            (_, Some(id)) => id,
            (Srs::Plane, None) => -1,
            (Srs::Epsg { code: 4326, .. }, None) => 4326,
            (Srs::Epsg { code, name, definition }, None) => {
                let id = i32::try_from(*code).unwrap_or(next);
                if !written.iter().any(|(_, other)| *other == id) {
                    insert.execute(params![name, id, "EPSG", id, definition, name])?;
                }
                id
            }
            (Srs::Custom { name, definition, .. }, None) => {
                next += 1;
                let id = next - 1;
                insert.execute(params![name, id, "NONE", id, definition, "written by ventifact"])?;
                id
            }
        };
        written.push((srs, id));
        ids.push(id);
    }
    Ok(ids)
}

fn write_layer(database: &Connection, layer: &Layer, srs_id: i32) -> rusqlite::Result<()> {
    let table = quoted(&layer.name);
    let kind = match layer.kind {
        GeometryKind::Point => "POINT",
        GeometryKind::LineString => "LINESTRING",
        GeometryKind::Polygon => "POLYGON",
        GeometryKind::MultiLineString => "MULTILINESTRING",
        GeometryKind::MultiPolygon => "MULTIPOLYGON",
    };
    let mut columns = format!("fid INTEGER PRIMARY KEY AUTOINCREMENT NOT NULL, geom {kind}");
    for column in &layer.columns {
        let of = match column.kind {
            ColumnKind::Text => "TEXT",
            ColumnKind::Real => "DOUBLE",
            ColumnKind::Integer => "INTEGER",
        };
        columns.push_str(&format!(", {} {of}", quoted(&column.name)));
    }
    database.execute(&format!("CREATE TABLE {table} ({columns})"), [])?;

    let extent =
        Bounds::of(layer.rows.iter().filter_map(|row| row.geometry.as_ref()).flat_map(|g| g.points()));
    let edges = extent.map(|b| [b.min.x, b.min.y, b.max.x, b.max.y]);
    let edge = |i: usize| edges.map(|edges| edges[i]);
    database.execute(
        "INSERT INTO gpkg_contents (table_name, data_type, identifier, description, min_x, min_y, max_x, max_y, \
         srs_id) VALUES (?, 'features', ?, ?, ?, ?, ?, ?, ?)",
        params![layer.name, layer.name, layer.description, edge(0), edge(1), edge(2), edge(3), srs_id],
    )?;
    database.execute(
        "INSERT INTO gpkg_geometry_columns VALUES (?, 'geom', ?, ?, 0, 0)",
        params![layer.name, kind, srs_id],
    )?;

    let marks = vec!["?"; layer.columns.len() + 1].join(", ");
    let mut insert = database.prepare(&format!("INSERT INTO {table} VALUES (NULL, {marks})"))?;
    for row in &layer.rows {
        let geometry = row.geometry.as_ref().map(|geometry| wkb::encode(geometry, srs_id));
        let geometry = Bound::Owned(geometry.map_or(Cell::Null, Cell::Blob));
        insert
            .execute(params_from_iter(std::iter::once(geometry).chain(row.values.iter().map(Bound::Of))))?;
    }
    Ok(())
}

/// A cell bound to a statement: the geometry, or a value of the row.
enum Bound<'a> {
    Owned(Cell),
    Of(&'a Value),
}

impl ToSql for Bound<'_> {
    fn to_sql(&self) -> rusqlite::Result<ToSqlOutput<'_>> {
        Ok(ToSqlOutput::Borrowed(match self {
            Self::Owned(cell) => cell.into(),
            Self::Of(Value::Missing) => ValueRef::Null,
            Self::Of(Value::Text(text)) => ValueRef::Text(text.as_bytes()),
            Self::Of(Value::Real(number)) if !number.is_finite() => ValueRef::Null,
            Self::Of(Value::Real(number)) => ValueRef::Real(*number),
            Self::Of(Value::Integer(number)) => ValueRef::Integer(*number),
        }))
    }
}

fn quoted(name: &str) -> String {
    format!("\"{}\"", name.replace('"', "\"\""))
}

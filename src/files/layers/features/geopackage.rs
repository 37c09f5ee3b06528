//! Polygons and lines from the feature tables of a GeoPackage.

use std::path::Path;

use rusqlite::types::ValueRef;
use rusqlite::{Connection, OpenFlags, Row};

use crate::ground::Place;

use super::super::{LayerError, wkb, wkt};
use super::{Feature, Meaning, Wanted};

/// How layers of crest lines are named; where there are such, other lines are not looked at.
const CRESTS: &str = "crests";

/// One feature table.
struct Table {
    name: String,
    geometry: String,
    /// The identifier the file gives its reference system, and what it says about it.
    srs_id: i64,
    srs_name: String,
    organisation: String,
    code: i64,
    definition: String,
}

pub(super) fn features(
    path: &Path,
    place: &Place,
    epsg: Option<u32>,
    wanted: Wanted,
    notes: &mut Vec<String>,
) -> Result<Vec<Feature>, LayerError> {
    let fail =
        |source| LayerError::Database { path: path.to_owned(), doing: "reading the GeoPackage", source };
    let flags = OpenFlags::SQLITE_OPEN_READ_ONLY | OpenFlags::SQLITE_OPEN_NO_MUTEX;
    let database = Connection::open_with_flags(path, flags).map_err(fail)?;
    let mut found = Vec::new();
    let mut all = tables(&database).map_err(fail)?;
    // A package handed over by this program holds trend strokes and channels too.
    let of_crests = all.iter().filter(|table| table.name.starts_with(CRESTS)).count();
    if wanted == Wanted::Lines && (1..all.len()).contains(&of_crests) {
        all.retain(|table| table.name.starts_with(CRESTS));
        notes.push("only its layers of crests were read".to_owned());
    }
    for table in all {
        let meaning = meaning(&table, place, epsg).map_err(|problem| LayerError::Feature {
            path: path.to_owned(),
            feature: format!("layer “{}”", table.name),
            problem,
        })?;
        read_table(path, &database, &table, meaning, wanted, notes, &mut found)?;
    }
    Ok(found)
}

fn tables(database: &Connection) -> rusqlite::Result<Vec<Table>> {
    let mut query = database.prepare(
        "SELECT g.table_name, g.column_name, g.srs_id, s.srs_name, s.organization, s.organization_coordsys_id, \
         s.definition FROM gpkg_geometry_columns g LEFT JOIN gpkg_spatial_ref_sys s ON s.srs_id = g.srs_id \
         ORDER BY g.rowid",
    )?;
    let rows = query.query_map([], |row| {
        Ok(Table {
            name: row.get(0)?,
            geometry: row.get(1)?,
            srs_id: row.get(2)?,
            srs_name: row.get::<_, Option<String>>(3)?.unwrap_or_default(),
            organisation: row.get::<_, Option<String>>(4)?.unwrap_or_default(),
            code: row.get::<_, Option<i64>>(5)?.unwrap_or(0),
            definition: row.get::<_, Option<String>>(6)?.unwrap_or_default(),
        })
    })?;
    rows.collect()
}

/// What a table's coordinates are to this raster.
fn meaning(table: &Table, place: &Place, epsg: Option<u32>) -> Result<Meaning, String> {
    let registered = table.organisation.eq_ignore_ascii_case("EPSG");
    let own = wkt::projected(place, "");
    let same_text = |text: &str| own.as_deref().is_some_and(|own| body_of(own) == body_of(text));
    match table.srs_id {
        -1 => Ok(Meaning::Map),
        0 => Ok(Meaning::LonLat),
        _ if registered && table.code == 4326 => Ok(Meaning::LonLat),
        _ if registered && epsg.is_some_and(|code| i64::from(code) == table.code) => Ok(Meaning::Map),
        _ if same_text(&table.definition) => Ok(Meaning::Map),
        _ if is_lonlat_of(&table.definition, place) => Ok(Meaning::LonLat),
        _ => Err(format!(
            "it is in “{}”, which is neither longitude and latitude on this body nor the raster's own \
             system; export it in one of them",
            table.srs_name
        )),
    }
}

/// A projected definition without its name and blanks.
fn body_of(definition: &str) -> Option<String> {
    let (_, rest) = definition.split_once(",GEOGCS[")?;
    Some(rest.chars().filter(|c| !c.is_whitespace()).collect())
}

/// Whether a definition is longitude and latitude in degrees from the reference meridian, on a body
/// of this size (within 0.3 %).
fn is_lonlat_of(definition: &str, place: &Place) -> bool {
    let text = definition.trim_start().to_uppercase();
    let geographic = ["GEOGCS[", "GEOGCRS[", "GEODCRS[", "GEOGRAPHICCRS[", "GEODETICCRS["];
    if !geographic.iter().any(|head| text.starts_with(head)) || !text.contains("\"DEGREE\"") {
        return false;
    }
    let number_after = |key: &str| {
        let rest = &text[text.find(key)? + key.len()..];
        let rest = rest.split_once('"')?.1.split_once('"')?.1.trim_start_matches([',', ' ']);
        rest.split([',', ']']).next()?.trim().parse::<f64>().ok()
    };
    let axis = number_after("SPHEROID[").or_else(|| number_after("ELLIPSOID["));
    let meridian = number_after("PRIMEM[").unwrap_or(0.0);
    meridian == 0.0 && axis.is_some_and(|axis| (axis / place.body.shape.equatorial_m - 1.0).abs() < 3e-3)
}

fn read_table(
    path: &Path,
    database: &Connection,
    table: &Table,
    meaning: Meaning,
    wanted: Wanted,
    notes: &mut Vec<String>,
    found: &mut Vec<Feature>,
) -> Result<(), LayerError> {
    let fail =
        |source| LayerError::Database { path: path.to_owned(), doing: "reading the GeoPackage", source };
    let mut query = database.prepare(&format!("SELECT * FROM {}", quoted(&table.name))).map_err(fail)?;
    let columns: Vec<String> = query.column_names().map(|name| name.to_lowercase()).collect();
    let column = |name: &str| columns.iter().position(|column| *column == name);
    let (name_column, tags_column) = (column("name"), column("tags"));
    let geometry_column = column(&table.geometry.to_lowercase()).ok_or_else(|| LayerError::Feature {
        path: path.to_owned(),
        feature: format!("layer “{}”", table.name),
        problem: format!("it has no column “{}” for its geometries", table.geometry),
    })?;
    let mut rows = query.query([]).map_err(fail)?;
    let mut number = 0;
    while let Some(row) = rows.next().map_err(fail)? {
        number += 1;
        let name = name_column.and_then(|column| words(row, column)).filter(|name| !name.is_empty());
        let label = match &name {
            Some(name) => format!("layer “{}”, row {number} “{name}”", table.name),
            None => format!("layer “{}”, row {number}", table.name),
        };
        let geometry = match row.get_ref(geometry_column).map_err(fail)? {
            ValueRef::Blob(bytes) => wkb::decode(bytes).map_err(|problem| LayerError::Feature {
                path: path.to_owned(),
                feature: label.clone(),
                problem,
            })?,
            _ => None,
        };
        let geometry = match geometry {
            Some(geometry) if wanted.takes(geometry.kind()) => geometry,
            Some(other) => {
                let (one, ..) = wanted.words();
                notes.push(format!("{label}: a {:?} is no {one} and was left out", other.kind()));
                continue;
            }
            None => {
                notes.push(format!("{label}: it has no geometry and was left out"));
                continue;
            }
        };
        let tags = tags_column.and_then(|column| words(row, column)).map(|text| super::split_tags(&text));
        found.push(Feature { label, name, tags: tags.unwrap_or_default(), geometry, meaning });
    }
    Ok(())
}

/// A cell as text.
fn words(row: &Row<'_>, column: usize) -> Option<String> {
    match row.get_ref(column).ok()? {
        ValueRef::Text(text) => Some(String::from_utf8_lossy(text).trim().to_owned()),
        ValueRef::Integer(number) => Some(number.to_string()),
        ValueRef::Real(number) => Some(number.to_string()),
        ValueRef::Null | ValueRef::Blob(_) => None,
    }
}

fn quoted(name: &str) -> String {
    format!("\"{}\"", name.replace('"', "\"\""))
}

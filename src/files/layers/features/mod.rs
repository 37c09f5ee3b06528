//! Features out of files, GeoJSON or GeoPackage, and their numbers brought to pixels of one raster.

mod geojson;
mod geopackage;

use std::fs::File;
use std::io::Read as _;
use std::path::Path;

use crate::ground::{Frame, LonLat, Place, Point};

use super::{Geometry, GeometryKind, LayerError, io_error};

/// What the numbers of a file mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Meaning {
    /// Longitude (east positive) and planetographic latitude, degrees.
    LonLat,
    /// The raster's own map coordinates.
    Map,
    /// Column and row from the raster's upper left corner.
    Pixel,
}

/// Which geometries are looked for; others are left out, with a note.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Wanted {
    Polygons,
    Lines,
}

/// A feature as the file has it.
pub(super) struct Feature {
    /// "feature 3 “Corridor”", for messages.
    pub label: String,
    pub name: Option<String>,
    pub tags: Vec<String>,
    /// Of a kind that was wanted.
    pub geometry: Geometry,
    pub meaning: Meaning,
}

/// A list of features is never larger than this.
const MOST_BYTES: u64 = 256 << 20;

impl Wanted {
    fn takes(self, kind: GeometryKind) -> bool {
        match self {
            Self::Polygons => matches!(kind, GeometryKind::Polygon | GeometryKind::MultiPolygon),
            Self::Lines => matches!(kind, GeometryKind::LineString | GeometryKind::MultiLineString),
        }
    }

    /// (one of them, many of them, the geometries they are).
    fn words(self) -> (&'static str, &'static str, &'static str) {
        match self {
            Self::Polygons => ("patch", "patches", "polygons"),
            Self::Lines => ("line", "lines", "line strings"),
        }
    }
}

/// The wanted features of a file; `epsg` is the code of the raster's reference system, if it has one.
///
/// # Errors
/// [`LayerError`]: unreadable file, geometries that are none, a reference system that is neither longitude and
/// latitude nor the raster's.
pub(super) fn features(
    path: &Path,
    place: &Place,
    epsg: Option<u32>,
    wanted: Wanted,
    notes: &mut Vec<String>,
) -> Result<Vec<Feature>, LayerError> {
    let bytes = read(path)?;
    if bytes.starts_with(b"SQLite format 3\0") {
        geopackage::features(path, place, epsg, wanted, notes)
    } else {
        geojson::features(path, &bytes, wanted, notes)
    }
}

/// The file's bytes; of a database only as much as tells that it is one.
fn read(path: &Path) -> Result<Vec<u8>, LayerError> {
    let fail = |source| io_error(path, "reading the features", source);
    let mut file = File::open(path).map_err(fail)?;
    let mut bytes = Vec::new();
    file.by_ref().take(16).read_to_end(&mut bytes).map_err(fail)?;
    if bytes.starts_with(b"SQLite format 3\0") {
        return Ok(bytes);
    }
    file.take(MOST_BYTES).read_to_end(&mut bytes).map_err(fail)?;
    if bytes.len() as u64 > MOST_BYTES {
        return Err(LayerError::TooLarge { path: path.to_owned(), limit: MOST_BYTES });
    }
    Ok(bytes)
}

/// Whether numbers of this meaning can be placed on the raster.
pub(super) fn allowed(meaning: Meaning, place: &Place) -> Result<(), String> {
    let needs = match (meaning, &place.frame) {
        (Meaning::LonLat, _) if !place.is_georeferenced() => "longitude and latitude",
        (Meaning::Map, Frame::Pixels { .. }) => "map coordinates",
        _ => return Ok(()),
    };
    Err(format!(
        "its numbers are {needs}, but the raster has no georeference; give column and row and say \
         \"frame\": \"pixel\" at the top of the file"
    ))
}

/// Words between commas.
fn split_tags(text: &str) -> Vec<String> {
    text.split(',').map(str::trim).filter(|tag| !tag.is_empty()).map(str::to_owned).collect()
}

/// A ring (`closed`) or a line of longitudes and latitudes, at least one, in pixels. Edges are straight in
/// longitude and latitude (so GeoJSON says); where that bends them on the raster they get vertices in between.
pub(super) fn from_lonlat(
    chain: &[Point],
    closed: bool,
    place: &Place,
    centre: Point,
) -> Result<Vec<Point>, String> {
    /// Longest step in longitude by which a chain is followed, so that it stays on its own turn.
    const STRIDE_DEG: f64 = 60.0;
    if let Some(bad) = chain.iter().find(|p| !(p.y.abs() <= 90.0 && p.x.abs() <= 720.0)) {
        return Err(format!("({}, {}) is no longitude and latitude", bad.x, bad.y));
    }
    let pixel = |at: Point, near: Point| {
        place
            .pixel_of_lonlat(LonLat { lon: at.x, lat: at.y }, near)
            .ok_or_else(|| format!("({}, {}) lies outside the raster's projection", at.x, at.y))
    };
    let mut from = chain[0];
    let first = pixel(from, centre)?;
    let mut pixels = vec![first];
    let back = if closed { &chain[..1] } else { &[] };
    for to in chain[1..].iter().chain(back) {
        let strides = ((to.x - from.x).abs() / STRIDE_DEG).ceil().max(1.0);
        let mut start = from;
        for stride in 1..=strides as usize {
            let t = stride as f64 / strides;
            let end = Point::new(from.x + t * (to.x - from.x), from.y + t * (to.y - from.y));
            let last = pixels.last().copied().unwrap_or(first);
            let there = pixel(end, last)?;
            bend(&mut pixels, [start, end], there, &pixel, 0)?;
            pixels.push(there);
            start = end;
        }
        from = *to;
    }
    // The last vertex closed the ring; when it came round the body it stays, and the ring is open.
    if closed && pixels.len() > 3 && pixels.last().is_some_and(|last| last.distance(first) < 1e-6) {
        pixels.pop();
    }
    Ok(pixels)
}

/// Adds vertices before `end` until the pixel chain keeps within a quarter pixel of the edge.
fn bend(
    pixels: &mut Vec<Point>,
    edge: [Point; 2],
    end: Point,
    pixel: &impl Fn(Point, Point) -> Result<Point, String>,
    depth: usize,
) -> Result<(), String> {
    const MOST_HALVINGS: usize = 8;
    const BEND_PX: f64 = 0.25;
    let Some(start) = pixels.last().copied().filter(|_| depth < MOST_HALVINGS) else { return Ok(()) };
    let middle = Point::new(0.5 * (edge[0].x + edge[1].x), 0.5 * (edge[0].y + edge[1].y));
    let chord = Point::new(0.5 * (start.x + end.x), 0.5 * (start.y + end.y));
    let true_middle = pixel(middle, chord)?;
    if true_middle.distance(chord) <= BEND_PX {
        return Ok(());
    }
    bend(pixels, [edge[0], middle], true_middle, pixel, depth + 1)?;
    pixels.push(true_middle);
    bend(pixels, [middle, edge[1]], end, pixel, depth + 1)
}

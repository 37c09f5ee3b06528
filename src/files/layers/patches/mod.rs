//! Patches in and out: outlines from GeoJSON or GeoPackage, brought to pixels of one raster.

mod geojson;
mod geopackage;
mod rings;

use std::fs::File;
use std::io::Read as _;
use std::path::Path;

use serde_json::{Map, Value as Json, json};

use crate::ground::{Frame, LonLat, Place, Point, Polygon};

use super::{Geometry, LayerError, geojson as writer, io_error};

/// An outline in pixel coordinates of the raster it was read for.
#[derive(Clone, Debug, PartialEq)]
pub struct PatchShape {
    pub name: String,
    pub tags: Vec<String>,
    pub outline: Polygon,
}

/// What a file of patches gave.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PatchImport {
    pub shapes: Vec<PatchShape>,
    /// What was put right or left out, a sentence each.
    pub notes: Vec<String>,
}

/// What the numbers of a file mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Meaning {
    /// Longitude (east positive) and planetographic latitude, degrees.
    LonLat,
    /// The raster's own map coordinates.
    Map,
    /// Column and row from the raster's upper left corner.
    Pixel,
}

/// A feature as the file has it.
struct Found {
    /// "feature 3 “Corridor”", for messages.
    label: String,
    name: Option<String>,
    tags: Vec<String>,
    parts: Vec<Polygon>,
    meaning: Meaning,
}

/// A list of patches is never larger than this.
const MOST_BYTES: u64 = 256 << 20;

/// Reads outlines for a raster of `size` (width, height) pixels lying at `place`; `epsg` is the
/// code of its reference system, if it has one, so that layers in the same system are recognised.
/// GeoJSON says in its foreign member `"frame"` whether its numbers are `"lonlat"` (default),
/// `"map"` or `"pixel"`; a GeoPackage layer must be in longitude and latitude or in the raster's
/// own system. Parts of a multi-polygon become patches of their own with a number behind the name.
///
/// # Errors
/// [`LayerError`]: unreadable file, numbers that cannot be placed on this raster, rings that cross
/// themselves or have no area, no polygon that touches the raster.
pub fn read_patches(
    path: &Path,
    place: &Place,
    epsg: Option<u32>,
    size: [usize; 2],
) -> Result<PatchImport, LayerError> {
    let mut notes = Vec::new();
    let bytes = read(path)?;
    let found = if bytes.starts_with(b"SQLite format 3\0") {
        geopackage::features(path, place, epsg, &mut notes)?
    } else {
        geojson::features(path, &bytes, &mut notes)?
    };
    let mut import = PatchImport { shapes: Vec::new(), notes };
    let mut outside = 0;
    for (index, feature) in found.into_iter().enumerate() {
        let label = feature.label.clone();
        let fail =
            |problem: String| LayerError::Feature { path: path.to_owned(), feature: label.clone(), problem };
        allowed(feature.meaning, place).map_err(fail)?;
        let name = feature.name.clone().unwrap_or_else(|| format!("Patch {}", index + 1));
        let several = feature.parts.len() > 1;
        for (part, polygon) in feature.parts.iter().enumerate() {
            let outline =
                placed(polygon, feature.meaning, place, size, &label, &mut import.notes).map_err(fail)?;
            let name = if several { format!("{name} {}", part + 1) } else { name.clone() };
            if touches(&outline, size) {
                import.shapes.push(PatchShape { name, tags: feature.tags.clone(), outline });
            } else {
                outside += 1;
                import.notes.push(format!("{label}: “{name}” lies outside the raster and was left out"));
            }
        }
    }
    if import.shapes.is_empty() {
        let problem = match outside {
            0 => "there is no polygon in it".to_owned(),
            n => format!("none of its {n} polygons touches the raster; check what frame its numbers are in"),
        };
        return Err(LayerError::Content { path: path.to_owned(), problem });
    }
    Ok(import)
}

/// Writes outlines as GeoJSON in pixel coordinates (`"frame": "pixel"`): exact, and readable for
/// any raster. [`read_patches`] takes it back.
///
/// # Errors
/// [`LayerError::Io`].
pub fn write_patches(path: &Path, shapes: &[PatchShape]) -> Result<(), LayerError> {
    let features = shapes.iter().map(|shape| {
        let mut properties = Map::new();
        properties.insert("name".to_owned(), json!(shape.name));
        properties.insert("tags".to_owned(), json!(shape.tags));
        writer::feature(Some(&Geometry::Polygon(shape.outline.clone())), properties)
    });
    writer::save_collection(path, "pixel", features.collect::<Vec<Json>>())
}

/// The file's bytes; of a database only as much as tells that it is one.
fn read(path: &Path) -> Result<Vec<u8>, LayerError> {
    let fail = |source| io_error(path, "reading the patches", source);
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
fn allowed(meaning: Meaning, place: &Place) -> Result<(), String> {
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

fn touches(outline: &Polygon, [width, height]: [usize; 2]) -> bool {
    outline
        .bounds()
        .is_some_and(|b| b.max.x > 0.0 && b.max.y > 0.0 && b.min.x < width as f64 && b.min.y < height as f64)
}

/// A polygon with sound rings, in pixels.
fn placed(
    polygon: &Polygon,
    meaning: Meaning,
    place: &Place,
    size: [usize; 2],
    label: &str,
    notes: &mut Vec<String>,
) -> Result<Polygon, String> {
    let centre = Point::new(0.5 * size[0] as f64, 0.5 * size[1] as f64);
    let mut rings = Vec::new();
    for ring in polygon.rings() {
        let ring = rings::tidy(ring, label, notes)?;
        let ring = match meaning {
            Meaning::Pixel => ring,
            Meaning::Map => ring.into_iter().filter_map(|p| place.pixel_of_map(p)).collect(),
            Meaning::LonLat => from_lonlat(&ring, place, centre)?,
        };
        rings.push(ring);
    }
    let mut rings = rings.into_iter();
    let outline = Polygon { outer: rings.next().unwrap_or_default(), holes: rings.collect() };
    rings::check_holes(&outline)?;
    Ok(outline)
}

/// A ring of longitudes and latitudes in pixels. Edges are straight in longitude and latitude (so
/// GeoJSON says); where that bends them on the raster they get vertices in between.
fn from_lonlat(ring: &[Point], place: &Place, centre: Point) -> Result<Vec<Point>, String> {
    /// Longest step in longitude by which a ring is followed, so that it stays on its own turn.
    const STRIDE_DEG: f64 = 60.0;
    if let Some(bad) = ring.iter().find(|p| p.y.abs() > 90.0 || p.x.abs() > 720.0) {
        return Err(format!("({}, {}) is no longitude and latitude", bad.x, bad.y));
    }
    let pixel = |at: Point, near: Point| {
        place
            .pixel_of_lonlat(LonLat { lon: at.x, lat: at.y }, near)
            .ok_or_else(|| format!("({}, {}) lies outside the raster's projection", at.x, at.y))
    };
    let mut from = ring[0];
    let first = pixel(from, centre)?;
    let mut pixels = vec![first];
    for to in ring[1..].iter().chain(&ring[..1]) {
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
    if pixels.len() > 3 && pixels.last().is_some_and(|last| last.distance(first) < 1e-6) {
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

#[cfg(test)]
mod tests;

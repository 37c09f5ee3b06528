//! Patches in and out: outlines from GeoJSON or GeoPackage, brought to pixels of one raster.

mod rings;

use std::path::Path;

use serde_json::{Map, Value as Json, json};

use crate::ground::{Place, Point, Polygon};

use super::features::{Meaning, Wanted, allowed, features, from_lonlat};
use super::{Geometry, LayerError, geojson as writer};

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
    let found = features(path, place, epsg, Wanted::Polygons, &mut notes)?;
    let mut import = PatchImport { shapes: Vec::new(), notes };
    let mut outside = 0;
    for (index, feature) in found.into_iter().enumerate() {
        let label = feature.label.clone();
        let fail =
            |problem: String| LayerError::Feature { path: path.to_owned(), feature: label.clone(), problem };
        allowed(feature.meaning, place).map_err(fail)?;
        let name = feature.name.clone().unwrap_or_else(|| format!("Patch {}", index + 1));
        let parts = match feature.geometry {
            Geometry::Polygon(polygon) => vec![polygon],
            Geometry::MultiPolygon(parts) => parts,
            _ => continue,
        };
        let several = parts.len() > 1;
        for (part, polygon) in parts.iter().enumerate() {
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
            Meaning::LonLat => from_lonlat(&ring, true, place, centre)?,
        };
        rings.push(ring);
    }
    let mut rings = rings.into_iter();
    let outline = Polygon { outer: rings.next().unwrap_or_default(), holes: rings.collect() };
    rings::check_holes(&outline)?;
    Ok(outline)
}

#[cfg(test)]
mod tests;

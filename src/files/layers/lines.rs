//! Lines in: line strings from GeoJSON or GeoPackage, brought to pixels of one raster.

use std::path::Path;

use crate::ground::{Bounds, Place, Point, Polyline};

use super::features::{Meaning, Wanted, allowed, features, from_lonlat};
use super::{Geometry, LayerError};

/// A line in pixel coordinates of the raster it was read for.
#[derive(Clone, Debug, PartialEq)]
pub struct LineShape {
    /// "feature 3 “Long crest”", as messages name it.
    pub label: String,
    pub line: Polyline,
}

/// What a file of lines gave.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct LineImport {
    pub shapes: Vec<LineShape>,
    /// What was put right or left out, a sentence each.
    pub notes: Vec<String>,
}

/// Reads lines for a raster of `size` (width, height) pixels lying at `place`, as
/// [`read_patches`](super::read_patches) reads outlines: `epsg`, the member `"frame"` and reference systems mean the
/// same. Parts of a multi-line become lines of their own. Lines that do not touch the raster's box, or that its
/// projection cannot show, are left out with a note.
///
/// # Errors
/// [`LayerError`]: unreadable file, numbers that are none or cannot be placed on this raster, no line that touches
/// the raster.
pub fn read_lines(
    path: &Path,
    place: &Place,
    epsg: Option<u32>,
    size: [usize; 2],
) -> Result<LineImport, LayerError> {
    let mut notes = Vec::new();
    let found = features(path, place, epsg, Wanted::Lines, &mut notes)?;
    let mut import = LineImport { shapes: Vec::new(), notes };
    let centre = Point::new(0.5 * size[0] as f64, 0.5 * size[1] as f64);
    let mut outside = 0;
    for feature in found {
        let label = feature.label;
        let fail =
            |problem: String| LayerError::Feature { path: path.to_owned(), feature: label.clone(), problem };
        allowed(feature.meaning, place).map_err(fail)?;
        let parts = match feature.geometry {
            Geometry::LineString(line) => vec![line],
            Geometry::MultiLineString(lines) => lines,
            _ => continue,
        };
        for Polyline(mut points) in parts {
            if let Some(bad) = points.iter().find(|p| !p.x.is_finite() || !p.y.is_finite()) {
                return Err(fail(format!("a line has the coordinate ({}, {})", bad.x, bad.y)));
            }
            points.dedup();
            if points.len() < 2 {
                import.notes.push(format!("{label}: a line has no two distinct points and was left out"));
                continue;
            }
            let line = match feature.meaning {
                Meaning::Pixel => Some(points),
                Meaning::Map => points.iter().map(|p| place.pixel_of_map(*p)).collect(),
                Meaning::LonLat => {
                    check_degrees(&points).map_err(fail)?;
                    from_lonlat(&points, false, place, centre).ok()
                }
            };
            match line {
                Some(points) if touches(&points, size) => {
                    import.shapes.push(LineShape { label: label.clone(), line: Polyline(points) });
                }
                Some(_) => outside += 1,
                None => {
                    let note = "a line lies outside the raster's projection and was left out";
                    import.notes.push(format!("{label}: {note}"));
                }
            }
        }
    }
    if import.shapes.is_empty() {
        let problem = match outside {
            0 => "there is no line in it".to_owned(),
            n => format!("none of its {n} lines touches the raster; check what frame its numbers are in"),
        };
        return Err(LayerError::Content { path: path.to_owned(), problem });
    }
    if outside > 0 {
        import.notes.push(format!("{outside} of its lines lie outside the raster and were left out"));
    }
    Ok(import)
}

fn check_degrees(points: &[Point]) -> Result<(), String> {
    match points.iter().find(|p| p.y.abs() > 90.0 || p.x.abs() > 720.0) {
        Some(bad) => Err(format!("({}, {}) is no longitude and latitude", bad.x, bad.y)),
        None => Ok(()),
    }
}

fn touches(points: &[Point], [width, height]: [usize; 2]) -> bool {
    Bounds::of(points.iter().copied())
        .is_some_and(|b| b.max.x > 0.0 && b.max.y > 0.0 && b.min.x < width as f64 && b.min.y < height as f64)
}

#[cfg(test)]
mod tests;

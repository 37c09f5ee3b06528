//! From the georeferencing keys of a file to a [`Place`] on a body.
//!
//! Datum shifts are never applied: a raster is measured within its own reference system.

mod epsg;
mod method;
mod system;
mod tags;
mod transform;
mod units;

#[cfg(test)]
mod tests;

use crate::ground::{Affine, Body, Caution, Frame, Place, Point};

use system::System;

pub use tags::GeoTags;
pub use transform::from_world_file;

/// What georeferencing gave.
#[derive(Clone, Debug, PartialEq)]
pub struct Georeference {
    pub place: Place,
    /// The reference system in words: "UTM zone 33N, WGS 84 (EPSG:32633)".
    pub label: String,
    pub epsg: Option<u32>,
    pub cautions: Vec<Caution>,
    /// Root mean square misfit of ground control points, pixels; `None` without them.
    pub fit_residual_px: Option<f64>,
}

/// A georeference that is broken or not understood. The pixels may still be good: the user can
/// state a pixel size instead.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum GeorefError {
    #[error("world file: number {index} of 6 is “{found}”; expected A, D, B, E, C, F, one a line")]
    WorldFile { index: usize, found: String },
    #[error("the pixel-to-map transform {0:?} is singular: pixels would have no area")]
    Singular(Affine),
    #[error("georeferencing key or tag {key} holds {value}: expected a usable number")]
    BadNumber { key: u16, value: f64 },
    #[error("geokey {key} points outside the parameter list")]
    BrokenKey { key: u16 },
    #[error(
        "the file names a reference system but not where its pixels lie in it; state the pixel size instead"
    )]
    NoTransform,
    #[error("{count} ground control points: an affine needs at least 3")]
    TooFewControlPoints { count: usize },
    #[error("the {count} ground control points lie on one line: no affine fits them alone")]
    ControlPointsInLine { count: usize },
    #[error("EPSG:{0} is not in the table of reference systems; state the pixel size instead")]
    UnknownCode(u16),
    #[error("geokey {key} names unit {code}, which is not known; state the pixel size instead")]
    UnknownUnit { key: u16, code: u16 },
    #[error("prime meridian {0} is not known; state the pixel size instead")]
    UnknownMeridian(u16),
    #[error("a body with axes {equatorial_m} m and {polar_m} m is not a sphere or an oblate ellipsoid")]
    BadShape { equatorial_m: f64, polar_m: f64 },
    #[error("the projection is user-defined but its method is not given")]
    NoMethod,
    #[error("{0}")]
    Unsupported(String),
}

/// The place of a TIFF of `width` × `height` pixels from its georeferencing tags; `None` when they
/// say nothing.
///
/// # Errors
/// [`GeorefError`] when the tags are there but broken, or name something not understood. The
/// raster itself may still be read.
pub fn from_tiff(tags: &GeoTags, width: usize, height: usize) -> Result<Option<Georeference>, GeorefError> {
    if tags.is_empty() {
        return Ok(None);
    }
    let Some(found) = transform::from_tags(tags)? else {
        let origin = Affine { a: 1.0, b: 0.0, c: 0.0, d: 0.0, e: -1.0, f: 0.0 };
        return system::from_keys(tags, origin)?.map_or(Ok(None), |_| Err(GeorefError::NoTransform));
    };
    let mut reference = match system::from_keys(tags, found.affine)? {
        Some(System { frame, body, affine, label, epsg, cautions }) => {
            let place = Place::new(affine, frame, body).map_err(|_| GeorefError::Singular(affine))?;
            Georeference { place, label, epsg, cautions, fit_residual_px: None }
        }
        None => {
            let unit_m = units::linear(tags, 3076, 3077)?.unwrap_or(1.0);
            from_affine(scaled(found.affine, unit_m), width, height)?
        }
    };
    if says_west(tags) {
        reference.place = reference
            .place
            .with_west_longitudes()
            .map_err(|error| GeorefError::Unsupported(error.to_string()))?;
        reference.cautions.push(Caution::new(
            "west-longitudes",
            "the file's citation says that longitudes count positive toward west; they were turned round",
        ));
    }
    reference.cautions.extend(found.cautions);
    reference.cautions.extend(domain_cautions(&reference.place, width, height));
    reference.fit_residual_px = found.fit_residual_px;
    Ok(Some(reference))
}

/// A place of which only the affine is known: a plane whose map unit is taken as the metre and whose
/// +y as north, or pixels where the numbers look like degrees; a caution says which.
///
/// # Errors
/// [`GeorefError::Singular`].
pub fn from_affine(affine: Affine, width: usize, height: usize) -> Result<Georeference, GeorefError> {
    let plane = Place::new(affine, Frame::Plane { north_deg: 0.0 }, Body::earth())
        .map_err(|_| GeorefError::Singular(affine))?;
    let like_degrees = affine.determinant().abs().sqrt() < 1.0
        && corners(width, height).into_iter().all(|corner| {
            let map = affine.apply(corner);
            map.x.abs() <= 360.0 && map.y.abs() <= 90.0
        });
    let (place, taken) = if like_degrees {
        let taken = "its numbers look like degrees on an unknown body, so lengths stay in pixels; state the pixel size";
        (Place::pixels(0.0), taken)
    } else {
        (plane, "its map unit is taken as the metre and its +y axis as north")
    };
    let text = format!("the file says where its pixels lie but names no reference system: {taken}");
    Ok(Georeference {
        place,
        label: "no reference system".to_owned(),
        epsg: None,
        cautions: vec![Caution::new("no-reference-system", text)],
        fit_residual_px: None,
    })
}

fn scaled(Affine { a, b, c, d, e, f }: Affine, by: f64) -> Affine {
    Affine { a: a * by, b: b * by, c: c * by, d: d * by, e: e * by, f: f * by }
}

fn corners(width: usize, height: usize) -> [Point; 4] {
    let (w, h) = (width as f64, height as f64);
    [Point::new(0.0, 0.0), Point::new(w, 0.0), Point::new(w, h), Point::new(0.0, h)]
}

fn says_west(tags: &GeoTags) -> bool {
    let text = tags.ascii_params.to_lowercase().replace(['_', '-'], " ");
    ["positive west", "west positive", "positivewest"].iter().any(|words| text.contains(words))
}

/// What is odd about where the raster lies.
fn domain_cautions(place: &Place, width: usize, height: usize) -> Vec<Caution> {
    let mut cautions = Vec::new();
    let centre = Point::new(0.5 * width as f64, 0.5 * height as f64);
    if place.is_georeferenced() {
        let outside = corners(width, height).into_iter().filter(|p| place.lonlat_of(*p).is_none()).count();
        if place.lonlat_of(centre).is_none() {
            cautions.push(Caution::new(
                "outside-projection",
                "the raster's centre has no longitude and latitude in its own reference system",
            ));
        } else if outside > 0 {
            cautions.push(Caution::new(
                "edges-outside-projection",
                format!("{outside} of the raster's 4 corners have no longitude and latitude; nothing is measured there"),
            ));
        }
    }
    if place.local_frame(centre).is_some_and(|frame| frame.is_mirrored()) {
        cautions.push(Caution::new(
            "mirrored",
            "the image shows the ground as in a mirror; azimuths are corrected for it, unless its longitudes \
             count positive toward west and the file hides that",
        ));
    }
    if place.is_georeferenced() && place.body.gravity.is_none() {
        cautions.push(Caution::new(
            "unnamed-body",
            format!(
                "a body of radius {} km is not known by name: state its gravity and air where winds matter",
                place.body.shape.equatorial_m / 1e3
            ),
        ));
    }
    cautions
}

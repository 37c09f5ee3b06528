//! From the georeferencing keys of a file to a [`Place`] on a body.

mod epsg;
mod tags;
mod transform;

use crate::ground::{Affine, Caution, Place};

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
    #[error("geokey {key} is {value}: expected a finite number")]
    BadNumber { key: u16, value: f64 },
    #[error("geokey {key} points outside the parameter list")]
    BrokenKey { key: u16 },
    #[error("the file names a reference system but not where its pixels lie in it")]
    NoTransform,
    #[error("EPSG:{0} is not in the table of reference systems; state the pixel size instead")]
    UnknownCode(u16),
    #[error("{0}")]
    Unsupported(String),
}

/// The place of a TIFF from its georeferencing tags; `None` when it has none at all.
///
/// # Errors
/// [`GeorefError`] when the tags are there but broken, or name something not understood.
pub fn from_tiff(tags: &GeoTags, width: usize, height: usize) -> Result<Option<Georeference>, GeorefError> {
    let _ = (width, height);
    if tags.is_empty() {
        return Ok(None);
    }
    let affine = transform::from_scale(tags).ok_or(GeorefError::NoTransform)?;
    let code = tags.code(3072).or_else(|| tags.code(2048)).ok_or(GeorefError::UnknownCode(0))?;
    let system = epsg::system(code)?;
    let place = Place::new(affine, system.frame, system.body).map_err(|_| GeorefError::Singular(affine))?;
    let label = tags.text(1026).or_else(|| tags.text(2049)).unwrap_or("unnamed reference system");
    Ok(Some(Georeference {
        place,
        label: format!("{label} (EPSG:{code})"),
        epsg: Some(u32::from(code)),
        cautions: Vec::new(),
        fit_residual_px: None,
    }))
}

//! Map coordinates ↔ longitude and latitude on one body, through the projection crate.

use std::fmt;
use std::sync::Arc;

use proj4rs::Proj;

use super::{BodyShape, Point};

/// Planetographic (geodetic) position: degrees, longitude positive east in [−180, 180], latitude
/// in [−90, 90].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LonLat {
    pub lon: f64,
    pub lat: f64,
}

/// A projection given by a definition string (`+proj=… +R=…`), compiled once and shared.
#[derive(Clone)]
pub struct Projection {
    definition: Arc<str>,
    plane: Arc<Proj>,
    sphere: Arc<Proj>,
}

/// The definition cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("the projection “{definition}” is not usable: {reason}")]
pub struct ProjectionError {
    pub definition: String,
    pub reason: String,
}

impl Projection {
    /// Compiles `definition`; longitude/latitude are on the same ellipsoid, so no datum shift is
    /// ever applied.
    ///
    /// # Errors
    /// [`ProjectionError`] with the crate's reason: unknown projection, missing parameter.
    pub fn new(definition: &str, shape: BodyShape) -> Result<Self, ProjectionError> {
        let fail = |reason: String| ProjectionError { definition: definition.to_owned(), reason };
        let geographic = format!("+proj=longlat +a={} +b={} +no_defs", shape.equatorial_m, shape.polar_m);
        let plane = Proj::from_proj_string(definition).map_err(|e| fail(e.to_string()))?;
        let sphere = Proj::from_proj_string(&geographic).map_err(|e| fail(e.to_string()))?;
        Ok(Self { definition: definition.into(), plane: Arc::new(plane), sphere: Arc::new(sphere) })
    }

    pub fn definition(&self) -> &str {
        &self.definition
    }

    /// Map metres → longitude and latitude; `None` outside the projection's domain.
    pub fn to_lonlat(&self, map: Point) -> Option<LonLat> {
        let mut p = (map.x, map.y, 0.0);
        proj4rs::transform::transform(&self.plane, &self.sphere, &mut p).ok()?;
        let lonlat = LonLat { lon: p.0.to_degrees(), lat: p.1.to_degrees() };
        (lonlat.lon.is_finite() && lonlat.lat.is_finite()).then_some(lonlat)
    }

    /// Longitude and latitude → map metres; `None` outside the projection's domain.
    pub fn to_map(&self, at: LonLat) -> Option<Point> {
        let mut p = (at.lon.to_radians(), at.lat.to_radians(), 0.0);
        proj4rs::transform::transform(&self.sphere, &self.plane, &mut p).ok()?;
        (p.0.is_finite() && p.1.is_finite()).then_some(Point::new(p.0, p.1))
    }
}

impl fmt::Debug for Projection {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_tuple("Projection").field(&self.definition).finish()
    }
}

impl PartialEq for Projection {
    fn eq(&self, other: &Self) -> bool {
        self.definition == other.definition
    }
}

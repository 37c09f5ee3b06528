//! Reference systems by EPSG code.

use proj4rs::Proj;

use crate::ground::{Body, BodyShape, Frame, LatitudeKind, Projection};

use super::GeorefError;

/// A reference system: what map coordinates mean, and on which body.
pub(super) struct System {
    pub frame: Frame,
    pub body: Body,
}

/// Looks a code up.
pub(super) fn system(code: u16) -> Result<System, GeorefError> {
    let definition = crs_definitions::from_code(code).ok_or(GeorefError::UnknownCode(code))?.proj4;
    let refused = |reason: String| GeorefError::Unsupported(format!("EPSG:{code} is not usable: {reason}"));
    let proj = Proj::from_proj_string(definition).map_err(|e| refused(e.to_string()))?;
    let (equatorial_m, polar_m) = proj.ellipse_parameters();
    let shape = BodyShape { equatorial_m, polar_m };
    let body = Body { shape, ..Body::earth() };
    if proj.is_latlong() {
        return Ok(System {
            frame: Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::Planetographic },
            body,
        });
    }
    let plain = without_datum(definition, shape);
    let projection = Projection::new(&plain, shape).map_err(|e| refused(e.to_string()))?;
    Ok(System { frame: Frame::Projected { projection, unit_m: proj.to_meter() }, body })
}

/// The same projection in metres on its bare ellipsoid: datum shifts belong to positions between
/// reference systems, and a raster is measured within its own.
fn without_datum(definition: &str, shape: BodyShape) -> String {
    const DROPPED: [&str; 15] = [
        "+datum",
        "+ellps",
        "+towgs84",
        "+nadgrids",
        "+geoidgrids",
        "+units",
        "+to_meter",
        "+vunits",
        "+a",
        "+b",
        "+rf",
        "+R",
        "+no_defs",
        "+wktext",
        "+type",
    ];
    let mut kept: Vec<&str> = definition
        .split_whitespace()
        .filter(|word| !DROPPED.contains(&word.split('=').next().unwrap_or(word)))
        .collect();
    let axes = format!("+a={} +b={}", shape.equatorial_m, shape.polar_m);
    kept.push(&axes);
    kept.join(" ")
}

//! Reference systems by EPSG code.

use proj4rs::Proj;

use crate::ground::BodyShape;

use super::GeorefError;

/// What the table says about a code.
pub(super) enum Coded {
    Geographic {
        shape: BodyShape,
        prime_meridian_deg: f64,
    },
    /// A definition in metres on its bare ellipsoid, and its map unit in metres.
    Projected {
        definition: String,
        shape: BodyShape,
        unit_m: f64,
    },
}

/// Looks a code up.
pub(super) fn find(code: u16) -> Result<Coded, GeorefError> {
    let definition = crs_definitions::from_code(code).ok_or(GeorefError::UnknownCode(code))?.proj4;
    let refused = |reason: String| GeorefError::Unsupported(format!("EPSG:{code} is not usable: {reason}"));
    let proj = Proj::from_proj_string(definition).map_err(|e| refused(e.to_string()))?;
    let (equatorial_m, polar_m) = proj.ellipse_parameters();
    if proj.is_latlong() {
        let shape = BodyShape { equatorial_m, polar_m };
        return Ok(Coded::Geographic { shape, prime_meridian_deg: proj.from_greenwich().to_degrees() });
    }
    if proj.is_geocent() {
        return Err(refused("geocentric coordinates have no map".to_owned()));
    }
    if definition.contains("+nadgrids=@null") {
        // Web Mercator: spherical formulas on the ellipsoid's own latitudes.
        let shape = BodyShape { equatorial_m: 6_378_137.0, polar_m: 6_356_752.314_245_179 };
        return Ok(Coded::Projected { definition: "+proj=webmerc +lon_0=0".to_owned(), shape, unit_m: 1.0 });
    }
    // Some projections work on a sphere made from the ellipsoid; the body keeps its ellipsoid.
    let shape = ellipsoid_of(definition).unwrap_or(BodyShape { equatorial_m, polar_m });
    Ok(Coded::Projected { definition: without_datum(definition), shape, unit_m: proj.to_meter() })
}

/// The ellipsoid a definition names, as the same words would give it for longitude and latitude.
fn ellipsoid_of(definition: &str) -> Option<BodyShape> {
    let words = definition.split_whitespace().filter(|word| {
        ["+datum=", "+ellps=", "+a=", "+b=", "+rf=", "+R="].iter().any(|key| word.starts_with(key))
    });
    let words: Vec<&str> = std::iter::once("+proj=longlat").chain(words).collect();
    let proj = Proj::from_proj_string(&words.join(" ")).ok()?;
    let (equatorial_m, polar_m) = proj.ellipse_parameters();
    Some(BodyShape { equatorial_m, polar_m })
}

/// The projection's own words, without axes, units and datum shifts: shifts belong to positions
/// between reference systems, and a raster is measured within its own.
fn without_datum(definition: &str) -> String {
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
    let kept: Vec<&str> = definition
        .split_whitespace()
        .filter(|word| !DROPPED.contains(&word.split('=').next().unwrap_or(word)))
        .collect();
    kept.join(" ")
}

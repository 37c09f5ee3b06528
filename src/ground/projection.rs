//! Map coordinates ↔ longitude and latitude on one body, through the projection crate.

use std::fmt;
use std::sync::Arc;

use proj4rs::Proj;
use proj4rs::transform::transform;
use serde::{Deserialize, Serialize};

use super::{BodyShape, Point};

/// Planetographic (geodetic) position: degrees, longitude positive east in [−180, 180], latitude
/// in [−90, 90].
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LonLat {
    pub lon: f64,
    pub lat: f64,
}

impl LonLat {
    /// The same position with its longitude folded into [−180, 180); 180 itself stays.
    pub fn folded(self) -> Self {
        let lon =
            if self.lon.abs() <= 180.0 { self.lon } else { (self.lon + 180.0).rem_euclid(360.0) - 180.0 };
        Self { lon, lat: self.lat }
    }
}

/// A projection given by a definition string (`+proj=… +R=…`), compiled once and shared.
#[derive(Clone)]
pub struct Projection {
    definition: Arc<str>,
    plane: Arc<Proj>,
    sphere: Arc<Proj>,
    /// How far from the central meridian a longitude may be, degrees, where the projection is
    /// linear in longitude and so goes on past a half turn; `None` for the others.
    reach_deg: Option<f64>,
    central_deg: f64,
    /// Largest misfit of inverse then forward, metres, that still counts as inside the domain.
    slack_m: f64,
}

/// The definition cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("the projection “{definition}” is not usable: {reason}")]
pub struct ProjectionError {
    pub definition: String,
    pub reason: String,
}

/// Cylindrical: maps from 0° to 360° exist whatever the central meridian.
const CYLINDERS: [&str; 5] = ["eqc", "merc", "webmerc", "mill", "cea"];
/// Linear in longitude but bounded by a meridian half a turn away.
const BOUNDED: [&str; 7] = ["sinu", "moll", "robin", "eqearth", "lcc", "aea", "eqdc"];

impl Projection {
    /// Compiles `definition`; longitude/latitude are on the same ellipsoid, so no datum shift is
    /// ever applied.
    ///
    /// # Errors
    /// [`ProjectionError`] with the crate's reason: unknown projection, missing parameter.
    pub fn new(definition: &str, shape: BodyShape) -> Result<Self, ProjectionError> {
        let fail = |reason: String| ProjectionError { definition: definition.to_owned(), reason };
        let geographic = format!("+proj=longlat +a={} +b={} +no_defs", shape.equatorial_m, shape.polar_m);
        let name = parameter(definition, "proj").unwrap_or("");
        let reach_deg = if CYLINDERS.contains(&name) {
            Some(540.0)
        } else {
            BOUNDED.contains(&name).then_some(180.0 + 1e-9)
        };
        // Without this flag longitudes wrap, and the derivative breaks at the map's edge.
        let over = if reach_deg.is_some() { " +over" } else { "" };
        let plane =
            Proj::from_proj_string(&format!("{definition}{over}")).map_err(|e| fail(e.to_string()))?;
        let sphere = Proj::from_proj_string(&geographic).map_err(|e| fail(e.to_string()))?;
        if !plane.has_inverse() || !plane.has_forward() {
            return Err(fail("it has no inverse".to_owned()));
        }
        let central_deg = (plane.longitude_of_origin() + plane.from_greenwich()).to_degrees();
        Ok(Self {
            definition: definition.into(),
            plane: Arc::new(plane),
            sphere: Arc::new(sphere),
            reach_deg,
            central_deg,
            slack_m: 1e-7 * shape.equatorial_m,
        })
    }

    pub fn definition(&self) -> &str {
        &self.definition
    }

    /// The projection's short name in the definition, `"utm"`.
    pub fn name(&self) -> &str {
        self.text("proj").unwrap_or("")
    }

    /// The text of a parameter of the definition, `+key=text`; empty for a bare flag.
    pub fn text(&self, key: &str) -> Option<&str> {
        parameter(&self.definition, key)
    }

    /// The number of a parameter of the definition.
    pub fn number(&self, key: &str) -> Option<f64> {
        self.text(key)?.parse().ok()
    }

    /// The longitude the map is centred on, degrees east.
    pub fn central_longitude(&self) -> f64 {
        self.central_deg
    }

    /// The meridian the definition counts from, degrees east of the body's reference meridian.
    pub fn prime_meridian(&self) -> f64 {
        self.plane.from_greenwich().to_degrees()
    }

    /// Whether a longitude a whole turn further lies elsewhere on the map.
    pub fn repeats(&self) -> bool {
        self.reach_deg.is_some_and(|reach| reach > 360.0)
    }

    /// Map metres → longitude and latitude; `None` outside the projection's domain.
    pub fn to_lonlat(&self, map: Point) -> Option<LonLat> {
        Some(self.to_lonlat_unfolded(map)?.folded())
    }

    /// Longitude and latitude → map metres, within half a turn of the central meridian; `None`
    /// outside the projection's domain.
    pub fn to_map(&self, at: LonLat) -> Option<Point> {
        let away = at.lon - self.central_deg;
        let turns = if away.abs() <= 180.0 { 0.0 } else { ((away + 180.0) / 360.0).floor() };
        self.to_map_unfolded(LonLat { lon: at.lon - 360.0 * turns, lat: at.lat })
    }

    /// As [`Self::to_lonlat`], the longitude on the turn the map point lies on.
    pub(super) fn to_lonlat_unfolded(&self, map: Point) -> Option<LonLat> {
        let mut p = (map.x, map.y, 0.0);
        transform(&self.plane, &self.sphere, &mut p).ok()?;
        let at = LonLat { lon: p.0.to_degrees(), lat: p.1.to_degrees() };
        if !at.lon.is_finite() || at.lat.is_nan() || at.lat.abs() > 90.0 + 1e-9 {
            return None;
        }
        if self.reach_deg.is_some_and(|reach| (at.lon - self.central_deg).abs() > reach) {
            return None;
        }
        // Inverses answer outside their domain too; only a point that comes back was inside.
        let back = self.to_map_unfolded(at)?;
        (back.distance(map) <= self.slack_m).then_some(at)
    }

    /// As [`Self::to_map`], for a longitude on any turn the map has.
    pub(super) fn to_map_unfolded(&self, at: LonLat) -> Option<Point> {
        let mut p = (at.lon.to_radians(), at.lat.to_radians(), 0.0);
        transform(&self.sphere, &self.plane, &mut p).ok()?;
        (p.0.is_finite() && p.1.is_finite()).then_some(Point::new(p.0, p.1))
    }

    /// The projection in words: "transverse Mercator, central meridian 15°, scale 0.9996".
    pub fn in_words(&self) -> String {
        let name = match self.name() {
            "utm" => {
                let side = if self.text("south").is_some() { "S" } else { "N" };
                return format!("UTM zone {}{side}", self.text("zone").unwrap_or("?"));
            }
            "tmerc" | "etmerc" => "transverse Mercator",
            "merc" | "webmerc" => "Mercator",
            "eqc" => "equirectangular",
            "sinu" => "sinusoidal",
            "stere" | "ups" => "stereographic",
            "sterea" => "oblique stereographic",
            "laea" => "Lambert azimuthal equal-area",
            "lcc" => "Lambert conformal conic",
            "aea" | "leac" => "Albers equal-area conic",
            "eqdc" => "equidistant conic",
            "ortho" => "orthographic",
            "aeqd" => "azimuthal equidistant",
            "cea" => "cylindrical equal-area",
            "moll" => "Mollweide",
            "mill" => "Miller cylindrical",
            "omerc" | "somerc" => "oblique Mercator",
            "cass" => "transverse equidistant",
            "gnom" => "gnomonic",
            "poly" => "polyconic",
            other => other,
        };
        let mut words = name.to_owned();
        let spoken = [
            ("lat_0", "latitude of origin", "°"),
            ("lat_ts", "true at latitude", "°"),
            ("lat_1", "first parallel", "°"),
            ("lat_2", "second parallel", "°"),
        ];
        for (key, what, unit) in spoken {
            if let Some(value) = self.number(key).filter(|v| *v != 0.0) {
                words.push_str(&format!(", {what} {value}{unit}"));
            }
        }
        words.push_str(&format!(", central meridian {}°", trimmed(self.central_deg)));
        if let Some(k) = self.number("k").or(self.number("k_0")).filter(|k| *k != 1.0) {
            words.push_str(&format!(", scale {k}"));
        }
        words
    }
}

/// A number without the noise of a radian round trip.
fn trimmed(deg: f64) -> f64 {
    (deg * 1e9).round() / 1e9
}

/// The text of `+key=text` in a definition; empty for a bare `+key`.
fn parameter<'a>(definition: &'a str, key: &str) -> Option<&'a str> {
    definition.split_whitespace().find_map(|word| {
        let word = word.strip_prefix('+').unwrap_or(word);
        let (name, text) = word.split_once('=').unwrap_or((word, ""));
        (name == key).then_some(text)
    })
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use proptest::prelude::*;

    fn on_sphere(definition: &str) -> Projection {
        Projection::new(&format!("{definition} +R=1420000"), BodyShape::sphere(1_420_000.0))
            .expect(definition)
    }

    #[test]
    fn outside_the_domain_there_is_no_position() {
        let full = std::f64::consts::PI * 1_420_000.0;
        assert!(on_sphere("+proj=eqc").to_lonlat(Point::new(0.0, 0.51 * full)).is_none(), "past the pole");
        assert!(
            on_sphere("+proj=sinu").to_lonlat(Point::new(0.9 * full, 0.25 * full)).is_none(),
            "past a lobe"
        );
        assert!(on_sphere("+proj=ortho").to_lonlat(Point::new(0.0, 1.5e6)).is_none(), "off the disc");
        assert!(
            on_sphere("+proj=lcc +lat_1=40 +lat_2=60").to_lonlat(Point::new(0.0, 5e6)).is_none(),
            "the gap beyond the pole of a cone"
        );
    }

    #[test]
    fn a_map_from_zero_to_a_full_turn_works_on_both_halves() {
        let map = on_sphere("+proj=eqc");
        let x = 270f64.to_radians() * 1_420_000.0;
        let at = map.to_lonlat(Point::new(x, 0.0)).expect("inside");
        assert_close!(at.lon, -90.0, 1e-9, "longitude");
        let back = map.to_map_unfolded(LonLat { lon: 270.0, lat: 0.0 }).expect("inside");
        assert_close!(back.x, x, 1e-6, "easting");
    }

    #[test]
    fn words() {
        let utm =
            Projection::new("+proj=utm +zone=33", BodyShape { equatorial_m: 6378137.0, polar_m: 6356752.3 })
                .expect("utm");
        assert_eq!(utm.in_words(), "UTM zone 33N");
        assert_eq!(
            on_sphere("+proj=eqc +lat_ts=30 +lon_0=-12").in_words(),
            "equirectangular, true at latitude 30°, central meridian -12°"
        );
    }

    proptest! {
        #[test]
        fn forward_and_inverse_agree(lon in -179.0..179.0f64, lat in -85.0..85.0f64, kind in 0usize..8) {
            let definition = ["+proj=eqc", "+proj=sinu +lon_0=170", "+proj=merc", "+proj=stere +lat_0=90",
                "+proj=laea +lat_0=40", "+proj=lcc +lat_1=20 +lat_2=50", "+proj=aea +lat_1=20 +lat_2=50", "+proj=moll"][kind];
            let projection = on_sphere(definition);
            if let Some(map) = projection.to_map(LonLat { lon, lat }) {
                let back = projection.to_lonlat(map).expect("came from inside");
                prop_assert!(((back.lon - lon + 180.0).rem_euclid(360.0) - 180.0).abs() < 1e-7, "{definition} {back:?}");
                prop_assert!((back.lat - lat).abs() < 1e-7, "{definition} {back:?}");
            }
        }
    }
}

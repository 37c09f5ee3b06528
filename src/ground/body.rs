//! A world: its shape, gravity and air.

use serde::{Deserialize, Serialize};

/// A planet or moon. Lengths in metres, gravity in m s⁻².
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Body {
    pub name: String,
    pub shape: BodyShape,
    /// Surface gravity, m s⁻²; `None` when unknown (then nothing that needs it is computed).
    pub gravity: Option<f64>,
    /// Near-surface air; `None` on airless or unknown bodies.
    pub air: Option<Air>,
}

/// Semi-axes of the reference ellipsoid, metres; equal for a sphere.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BodyShape {
    pub equatorial_m: f64,
    pub polar_m: f64,
}

/// Near-surface air.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Air {
    /// kg m⁻³.
    pub density: f64,
    /// Dynamic viscosity, Pa s.
    pub viscosity: f64,
}

impl BodyShape {
    pub fn sphere(radius_m: f64) -> Self {
        Self { equatorial_m: radius_m, polar_m: radius_m }
    }

    pub fn is_sphere(self) -> bool {
        self.equatorial_m == self.polar_m
    }

    /// (a − b) / a.
    pub fn flattening(self) -> f64 {
        (self.equatorial_m - self.polar_m) / self.equatorial_m
    }

    /// Metres of one degree of longitude and of latitude at planetographic latitude φ:
    /// N cos φ and M of the ellipsoid, times π/180, with N = a/√(1 − e² sin² φ) and
    /// M = a(1 − e²)/(1 − e² sin² φ)^{3/2}.
    pub fn metres_per_degree(self, lat_deg: f64) -> (f64, f64) {
        let f = self.flattening();
        let e2 = f * (2.0 - f);
        let (sin, cos) = lat_deg.to_radians().sin_cos();
        let w2 = 1.0 - e2 * sin * sin;
        let prime_vertical = self.equatorial_m / w2.sqrt();
        let meridian = prime_vertical * (1.0 - e2) / w2;
        let degree = std::f64::consts::PI / 180.0;
        (prime_vertical * cos * degree, meridian * degree)
    }

    /// Planetocentric latitude of a planetographic one: tan c = (1 − f)² tan g. Degrees.
    pub fn planetocentric(self, planetographic_deg: f64) -> f64 {
        self.scaled_tangent(planetographic_deg, (self.polar_m / self.equatorial_m).powi(2))
    }

    /// Planetographic latitude of a planetocentric one: tan g = tan c / (1 − f)². Degrees.
    pub fn planetographic(self, planetocentric_deg: f64) -> f64 {
        self.scaled_tangent(planetocentric_deg, (self.equatorial_m / self.polar_m).powi(2))
    }

    /// Angle whose tangent is `factor` times that of `deg`; poles and sphere stay as they are.
    fn scaled_tangent(self, deg: f64, factor: f64) -> f64 {
        if factor == 1.0 || deg.abs() >= 90.0 {
            return deg;
        }
        (factor * deg.to_radians().tan()).atan().to_degrees()
    }
}

impl Body {
    /// Earth: WGS 84 ellipsoid, standard gravity, air of the US Standard Atmosphere 1976 at sea
    /// level (15 °C).
    pub fn earth() -> Self {
        Self {
            name: "Earth".into(),
            shape: BodyShape { equatorial_m: 6_378_137.0, polar_m: 6_356_752.314_245_179 },
            gravity: Some(9.806_65),
            air: Some(Air { density: 1.225, viscosity: 1.7894e-5 }),
        }
    }

    /// Mars: IAU ellipsoid. Air: ρ = PM/RT at 610 Pa, 210 K, 43.3 g mol⁻¹, and Sutherland's law for
    /// CO₂ (both vary by half with season and height: state your own when it matters).
    pub fn mars() -> Self {
        Self {
            name: "Mars".into(),
            shape: BodyShape { equatorial_m: 3_396_190.0, polar_m: 3_376_200.0 },
            gravity: Some(3.71),
            air: Some(Air { density: 0.0151, viscosity: 1.06e-5 }),
        }
    }

    /// Venus: IAU sphere. Air: ρ = PM/RT at 9.2 MPa, 737 K, 43.45 g mol⁻¹, and Sutherland's law for
    /// CO₂.
    pub fn venus() -> Self {
        Self {
            name: "Venus".into(),
            shape: BodyShape::sphere(6_051_800.0),
            gravity: Some(8.87),
            air: Some(Air { density: 65.2, viscosity: 3.1e-5 }),
        }
    }

    /// The Moon: IAU sphere, no air.
    pub fn moon() -> Self {
        Self { name: "Moon".into(), shape: BodyShape::sphere(1_737_400.0), gravity: Some(1.62), air: None }
    }

    /// Mercury: IAU 2015 ellipsoid, no air.
    pub fn mercury() -> Self {
        Self {
            name: "Mercury".into(),
            shape: BodyShape { equatorial_m: 2_440_530.0, polar_m: 2_438_260.0 },
            gravity: Some(3.70),
            air: None,
        }
    }

    /// Halvane, the invented small world of the demo: cold nitrogen–argon air near 1 bar and 130 K.
    /// Every figure is made up; the viscosity is what such a mixture would have.
    pub fn halvane() -> Self {
        Self {
            name: "Halvane".into(),
            shape: BodyShape::sphere(1_420_000.0),
            gravity: Some(1.1),
            air: Some(Air { density: 2.8, viscosity: 9.0e-6 }),
        }
    }

    /// A body of which only the shape is known, as read from a raster's keys.
    pub fn unnamed(shape: BodyShape) -> Self {
        Self { name: "unnamed body".into(), shape, gravity: None, air: None }
    }

    /// The bodies this program knows by name.
    pub fn known() -> [Self; 6] {
        [Self::earth(), Self::mars(), Self::venus(), Self::moon(), Self::mercury(), Self::halvane()]
    }

    /// The body of this shape, named when the size is that of a known one: the mean radius within
    /// 0.3 % (reference radii of one body differ by less, those of different bodies by more). The
    /// shape stays as given.
    pub fn of_shape(shape: BodyShape) -> Self {
        let mean = |s: BodyShape| (2.0 * s.equatorial_m + s.polar_m) / 3.0;
        let near = |body: &Self| (mean(shape) / mean(body.shape) - 1.0).abs() < 0.003;
        Self::known()
            .into_iter()
            .find(near)
            .map_or_else(|| Self::unnamed(shape), |body| Self { shape, ..body })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use proptest::prelude::*;

    #[test]
    fn a_shape_finds_its_body_and_keeps_its_axes() {
        let clarke = BodyShape { equatorial_m: 6_378_206.4, polar_m: 6_356_583.8 };
        assert_eq!(Body::of_shape(clarke).name, "Earth");
        assert_eq!(Body::of_shape(clarke).shape, clarke);
        assert_eq!(Body::of_shape(BodyShape::sphere(3_396_190.0)).name, "Mars");
        assert_eq!(Body::of_shape(BodyShape::sphere(3_389_500.0)).name, "Mars");
        assert_eq!(Body::of_shape(BodyShape::sphere(2_439_700.0)).name, "Mercury");
        assert_eq!(Body::of_shape(BodyShape::sphere(2_575_000.0)).name, "unnamed body");
    }

    #[test]
    fn metres_per_degree_on_a_sphere() {
        let (per_lon, per_lat) = BodyShape::sphere(1_000_000.0).metres_per_degree(60.0);
        assert_close!(per_lat, 17_453.292_519_943, 1e-6, "latitude");
        assert_close!(per_lon, 8_726.646_259_972, 1e-6, "longitude");
    }

    proptest! {
        #[test]
        fn latitude_kinds_invert(lat in -90.0..=90.0f64, f in 0.0..0.2f64) {
            let shape = BodyShape { equatorial_m: 1e6, polar_m: 1e6 * (1.0 - f) };
            let there = shape.planetocentric(lat);
            prop_assert!(there.abs() <= lat.abs() + 1e-12);
            prop_assert!((shape.planetographic(there) - lat).abs() < 1e-10);
        }
    }
}

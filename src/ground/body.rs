//! A world: its shape, gravity and air.

use serde::{Deserialize, Serialize};

use super::GasState;
use super::gas::tidy;

/// A planet or moon. Lengths in metres, gravity in m s⁻².
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "Written", into = "Written")]
pub struct Body {
    pub name: String,
    pub shape: BodyShape,
    /// Surface gravity, m s⁻²; `None` when unknown (then nothing that needs it is computed).
    pub gravity: Option<f64>,
    /// Near-surface air; `None` on airless or unknown bodies. It follows from `gas` where that is stated.
    pub air: Option<Air>,
    /// The gas of which the air is made; `None` when only density and viscosity are stated.
    pub gas: Option<GasState>,
    /// Where the user has the figures from; not read by any method.
    pub note: String,
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

    /// `"sphere of radius 1420 km"`.
    pub fn in_words(self) -> String {
        let km = |m: f64| m / 1e3;
        if self.is_sphere() {
            format!("sphere of radius {} km", km(self.equatorial_m))
        } else {
            format!("ellipsoid of {} × {:.3} km", km(self.equatorial_m), km(self.polar_m))
        }
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
    /// A body of which only the shape is known, as read from a raster's keys.
    pub fn unnamed(shape: BodyShape) -> Self {
        Self { name: "unnamed body".into(), shape, gravity: None, air: None, gas: None, note: String::new() }
    }

    /// The same body under this gas, with the air that follows from it.
    pub fn with_gas(self, gas: GasState) -> Self {
        Self { air: Some(gas.air()), gas: Some(gas), ..self }
    }

    /// The same body under air of which density and viscosity are stated, or none.
    pub fn with_air(self, air: Option<Air>) -> Self {
        Self { air, gas: None, ..self }
    }

    /// The gas and the air it makes, in one line.
    pub fn air_in_words(&self) -> String {
        let Some(Air { density, viscosity }) = self.air else { return "none that is known".into() };
        let air = format!("density {} kg/m³, viscosity {viscosity:.3e} Pa s", tidy(density, 4));
        self.gas.as_ref().map_or(air.clone(), |gas| format!("{}: {air}", gas.in_words()))
    }

    /// What makes the body impossible; `None` when nothing does.
    pub fn problem(&self) -> Option<String> {
        if self.name.trim().is_empty() {
            return Some("the body has no name; give it one".into());
        }
        let BodyShape { equatorial_m: a, polar_m: b } = self.shape;
        if !(b > 0.0 && a >= b && a.is_finite()) {
            return Some(format!(
                "its semi-axes are {a} m at the equator and {b} m at the poles; both must be above zero, the first \
                 the greater"
            ));
        }
        let air = self.air.filter(|_| self.gas.is_none());
        let stated = [
            ("gravity", self.gravity, "m/s²"),
            ("air density", air.map(|a| a.density), "kg/m³"),
            ("air viscosity", air.map(|a| a.viscosity), "Pa s"),
        ];
        for (what, value, unit) in stated {
            if let Some(value) = value.filter(|v| !(*v > 0.0 && v.is_finite())) {
                return Some(format!("its {what} is {value} {unit}; it must be above zero"));
            }
        }
        self.gas.as_ref().and_then(GasState::problem)
    }
}

/// A body in a sheet file: the gas, or the air where the gas is not stated.
#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    name: String,
    shape: BodyShape,
    gravity: Option<f64>,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    air: Option<Air>,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    gas: Option<GasState>,
    #[serde(default, skip_serializing_if = "String::is_empty")]
    note: String,
}

impl From<Body> for Written {
    fn from(body: Body) -> Self {
        let Body { name, shape, gravity, air, gas, note } = body;
        Self { name, shape, gravity, air: air.filter(|_| gas.is_none()), gas, note }
    }
}

impl TryFrom<Written> for Body {
    type Error = String;

    fn try_from(written: Written) -> Result<Self, String> {
        let Written { name, shape, gravity, air, gas, note } = written;
        if air.is_some() && gas.is_some() {
            return Err(format!(
                "the body {name} has both gas and air; air follows from the gas, so leave one of them out"
            ));
        }
        let air = gas.as_ref().map(GasState::air).or(air);
        Ok(Self { name, shape, gravity, air, gas, note })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use proptest::prelude::*;

    #[test]
    fn a_body_of_an_older_sheet_and_one_with_its_gas_come_back_the_same() {
        let old = r#"{"name": "Sorrel", "shape": {"equatorial_m": 2e6, "polar_m": 2e6}, "gravity": 1.2,
            "air": {"density": 5.0, "viscosity": 6e-6}}"#;
        let stated: Body = serde_json::from_str(old).expect("a body");
        assert_eq!(stated.air, Some(Air { density: 5.0, viscosity: 6e-6 }));
        for body in Body::known().into_iter().chain([stated]) {
            let text = serde_json::to_string(&body).expect("text");
            assert_eq!(serde_json::from_str::<Body>(&text).expect("a body"), body, "{text}");
        }
    }

    #[test]
    fn gas_and_air_together_are_refused() {
        let gas = serde_json::to_value(Body::earth()).expect("a value");
        let both = gas.as_object().expect("an object").iter();
        let mut both: serde_json::Map<_, _> = both.map(|(k, v)| (k.clone(), v.clone())).collect();
        both.insert("air".into(), serde_json::json!({ "density": 1.0, "viscosity": 1e-5 }));
        let error = serde_json::from_value::<Body>(both.into()).expect_err("refused").to_string();
        assert!(error.contains("both gas and air"), "{error}");
    }

    #[test]
    fn what_cannot_be_is_named() {
        let flat = BodyShape { equatorial_m: 1e6, polar_m: 2e6 };
        assert!(Body { shape: flat, ..Body::earth() }.problem().expect("a problem").contains("semi-axes"));
        let weightless = Body { gravity: Some(0.0), ..Body::earth() };
        assert!(weightless.problem().expect("a problem").contains("gravity is 0"));
        let void = Body::earth().with_air(Some(Air { density: -1.0, viscosity: 1e-5 }));
        assert!(void.problem().expect("a problem").contains("air density is -1"));
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

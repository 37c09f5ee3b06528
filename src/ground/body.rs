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

    /// A body of which only the shape is known, as read from a raster's keys.
    pub fn unnamed(shape: BodyShape) -> Self {
        Self { name: "unnamed body".into(), shape, gravity: None, air: None }
    }
}

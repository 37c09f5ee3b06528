//! The bodies known by name, each figure with where it comes from.

use super::{Body, BodyShape, Gas, GasState};

/// A figure of a body.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum BodyFigure {
    Shape,
    Gravity,
    Gas,
}

/// Where the figures of a body come from, in the order of [`BodyFigure`].
struct Known {
    name: &'static str,
    sources: [&'static str; 3],
}

const IAU: &str = "IAU Working Group on Cartographic Coordinates and Rotational Elements, report of 2015 [cited from memory]";
const FROM_GRAVITATION: &str = "G M/r² at the surface, rounded; common practice, no source";
const NO_AIR: &str = "No air that moves sand";
const MADE_UP: &str = "Made up with the body";
const PRACTICE: &str = "Common practice, no source";

const KNOWN: [Known; 7] = [
    Known {
        name: "Earth",
        sources: [
            "World Geodetic System 1984 [cited from memory]",
            "Standard gravity, 3rd General Conference on Weights and Measures, 1901 [cited from memory]",
            "Dry air at sea level, U.S. Standard Atmosphere 1976 [cited from memory]",
        ],
    },
    Known {
        name: "Mars",
        sources: [
            IAU,
            FROM_GRAVITATION,
            "Gases: Owen et al. 1977, Journal of Geophysical Research 82, 4635–4639 [cited from memory]; 610 Pa and \
             210 K: common practice, no source (both vary by half with season and height: state your own when it \
             matters)",
        ],
    },
    Known {
        name: "Venus",
        sources: [
            IAU,
            FROM_GRAVITATION,
            "Carbon dioxide with 3.5 % nitrogen at 9.2 MPa and 737 K: common practice, no source",
        ],
    },
    Known { name: "Moon", sources: [IAU, FROM_GRAVITATION, NO_AIR] },
    Known { name: "Mercury", sources: [IAU, FROM_GRAVITATION, NO_AIR] },
    Known { name: "Halvane", sources: [MADE_UP; 3] },
    Known {
        name: "generic cold nitrogen moon",
        sources: [
            PRACTICE,
            "About 0.14 of the Earth's: common practice, no source",
            "Nitrogen with 1.5 % methane at 1.467 bar and 94 K: common practice, no source (near the ground methane \
             is often put at 5 %, pressure at 1.45–1.5 bar); B cited from memory, −1.85·10⁻⁴ gives 0.5 % more density",
        ],
    },
];

impl Body {
    /// Earth: WGS 84 ellipsoid, standard gravity, dry air of the US Standard Atmosphere 1976 at sea
    /// level (15 °C).
    pub fn earth() -> Self {
        let shape = BodyShape { equatorial_m: 6_378_137.0, polar_m: 6_356_752.314_245_179 };
        let gas = GasState::ideal(&[(Gas::Air, 1.0)], 101_325.0, 288.15);
        named("Earth", shape, 9.806_65).with_gas(gas)
    }

    /// Mars: IAU ellipsoid; carbon dioxide at 610 Pa and 210 K.
    pub fn mars() -> Self {
        let shape = BodyShape { equatorial_m: 3_396_190.0, polar_m: 3_376_200.0 };
        let mix = [
            (Gas::CarbonDioxide, 0.9532),
            (Gas::Nitrogen, 0.027),
            (Gas::Argon, 0.016),
            (Gas::Oxygen, 0.0013),
            (Gas::CarbonMonoxide, 0.0007),
        ];
        named("Mars", shape, 3.71).with_gas(GasState::ideal(&mix, 610.0, 210.0))
    }

    /// Venus: IAU sphere; carbon dioxide at 9.2 MPa and 737 K.
    pub fn venus() -> Self {
        let mix = [(Gas::CarbonDioxide, 0.965), (Gas::Nitrogen, 0.035)];
        named("Venus", BodyShape::sphere(6_051_800.0), 8.87).with_gas(GasState::ideal(&mix, 9.2e6, 737.0))
    }

    /// The Moon: IAU sphere, no air.
    pub fn moon() -> Self {
        named("Moon", BodyShape::sphere(1_737_400.0), 1.62)
    }

    /// Mercury: IAU 2015 ellipsoid, no air.
    pub fn mercury() -> Self {
        named("Mercury", BodyShape { equatorial_m: 2_440_530.0, polar_m: 2_438_260.0 }, 3.70)
    }

    /// Halvane, the invented small world of the demo: cold nitrogen–argon air near 1 bar and 130 K.
    pub fn halvane() -> Self {
        let mix = [(Gas::Nitrogen, 0.85), (Gas::Argon, 0.15)];
        named("Halvane", BodyShape::sphere(1_420_000.0), 1.1).with_gas(GasState::ideal(&mix, 1.0155e5, 130.0))
    }

    /// A cold moon under dense nitrogen, with the figures commonly used for one.
    pub fn cold_nitrogen_moon() -> Self {
        let mix = [(Gas::Nitrogen, 0.985), (Gas::Methane, 0.015)];
        let ideal = GasState::ideal(&mix, 1.467e5, 94.0);
        named("generic cold nitrogen moon", BodyShape::sphere(2_575_000.0), 1.352)
            .with_gas(GasState { second_virial: Some(-1.6e-4), ..ideal })
    }

    /// The bodies this program knows by name.
    pub fn known() -> [Self; 7] {
        let [earth, mars, venus, moon, mercury, halvane] = Self::known_by_size();
        [earth, mars, venus, moon, mercury, halvane, Self::cold_nitrogen_moon()]
    }

    /// Those that a shape alone may stand for. The generic moon is none: it is a set of common figures,
    /// and a raster of its size may lie on any body of that size.
    fn known_by_size() -> [Self; 6] {
        [Self::earth(), Self::mars(), Self::venus(), Self::moon(), Self::mercury(), Self::halvane()]
    }

    /// The body of this shape, named when the size is that of a known one: the mean radius within
    /// 0.3 % (reference radii of one body differ by less, those of different bodies by more). The
    /// shape stays as given. The generic cold nitrogen moon is given to no raster: the user chooses it.
    pub fn of_shape(shape: BodyShape) -> Self {
        let mean = |s: BodyShape| (2.0 * s.equatorial_m + s.polar_m) / 3.0;
        let near = |body: &Self| (mean(shape) / mean(body.shape) - 1.0).abs() < 0.003;
        Self::known_by_size()
            .into_iter()
            .find(near)
            .map_or_else(|| Self::unnamed(shape), |body| Self { shape, ..body })
    }

    /// Whether it is the Earth by its size, under whatever name and air.
    pub fn is_earth(&self) -> bool {
        Self::of_shape(self.shape).name == Self::earth().name
    }

    /// Where a figure of this body comes from; `None` when it is not the one this program knows the body
    /// with, so that file or user stated it.
    pub fn source(&self, figure: BodyFigure) -> Option<&'static str> {
        let known = Self::known().into_iter().find(|known| known.name == self.name)?;
        let same = match figure {
            BodyFigure::Shape => known.shape == self.shape,
            BodyFigure::Gravity => known.gravity == self.gravity,
            BodyFigure::Gas => known.gas == self.gas && known.air == self.air,
        };
        let record = KNOWN.iter().find(|record| record.name == known.name).filter(|_| same)?;
        Some(record.sources[figure as usize])
    }
}

fn named(name: &str, shape: BodyShape, gravity: f64) -> Body {
    Body { name: name.into(), gravity: Some(gravity), ..Body::unnamed(shape) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

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
    fn the_earth_is_known_by_its_size() {
        let hot = Body { name: "hot desert".into(), ..Body::earth() }.with_air(None);
        assert!(hot.is_earth());
        assert!(!Body { name: "Earth".into(), ..Body::venus() }.is_earth());
    }

    #[test]
    fn every_figure_of_a_known_body_has_a_source_and_a_changed_one_has_none() {
        for body in Body::known() {
            assert_eq!(body.problem(), None, "{}", body.name);
            for figure in [BodyFigure::Shape, BodyFigure::Gravity, BodyFigure::Gas] {
                assert!(body.source(figure).is_some(), "{}: {figure:?}", body.name);
            }
            let heavier = Body { gravity: Some(20.0), ..body };
            assert_eq!(heavier.source(BodyFigure::Gravity), None);
            assert!(heavier.source(BodyFigure::Shape).is_some());
        }
    }

    /// What the gases give, against the figures commonly quoted.
    #[test]
    fn the_airs_are_those_commonly_quoted() {
        let density = |body: Body| body.air.expect("air").density;
        assert_close!(density(Body::earth()), 1.225, 1e-4, "US Standard Atmosphere 1976");
        assert_close!(density(Body::mars()), 0.0152, 2e-4, "thin carbon dioxide");
        assert_close!(density(Body::venus()), 65.0, 1.0, "hot dense carbon dioxide");
        assert_close!(density(Body::cold_nitrogen_moon()), 5.4, 0.1, "cold dense nitrogen: 5.4 ± 0.1");
        let earth = Body::earth().air.expect("air");
        assert_close!(earth.viscosity, 1.7894e-5, 1e-9, "US Standard Atmosphere 1976");
    }
}

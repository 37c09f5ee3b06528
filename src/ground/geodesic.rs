//! Shortest lines on a sphere or ellipsoid: true azimuth and length between two positions.

use geographiclib_rs::InverseGeodesic as _;

use super::{Azimuth, BodyShape, LonLat};

/// The shortest line between two positions.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Geodesic {
    pub length_m: f64,
    /// Azimuth at the start, toward the end.
    pub azimuth: Azimuth,
    /// Azimuth at the end, back toward the start.
    pub back_azimuth: Azimuth,
}

impl BodyShape {
    /// The geodesic from `from` to `to`, by Karney's series of order 6 (C. F. F. Karney 2013,
    /// *Algorithms for geodesics*, J. Geodesy 87:43), exact to nanometres on planets.
    pub fn geodesic(self, from: LonLat, to: LonLat) -> Geodesic {
        let solver = geographiclib_rs::Geodesic::new(self.equatorial_m, self.flattening());
        let (length_m, start, end, _): (f64, f64, f64, f64) =
            solver.inverse(from.lat, from.lon, to.lat, to.lon);
        Geodesic {
            length_m,
            azimuth: Azimuth::from_deg(start),
            back_azimuth: Azimuth::from_deg(end).reversed(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn one_degree_of_a_small_sphere() {
        // SCIENCE J4: one degree on a sphere of 2575 km is 44.9422 km.
        let line = BodyShape::sphere(2_575_000.0)
            .geodesic(LonLat { lon: 20.0, lat: 40.0 }, LonLat { lon: 20.0, lat: 41.0 });
        assert_close!(line.length_m, 44_942.2, 0.05, "length");
        assert_close!(line.azimuth.deg(), 0.0, 1e-9, "azimuth");
        assert_close!(line.back_azimuth.deg(), 180.0, 1e-9, "back azimuth");
    }
}

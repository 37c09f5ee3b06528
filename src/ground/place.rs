//! Where a raster lies: pixel ↔ map ↔ longitude/latitude, and at every point the local frame
//! that turns pixel steps into true-north ground metres.
//!
//! Pixel coordinates are continuous, (0, 0) the outer corner of the upper-left pixel.

use super::{Azimuth, Body, LonLat, Point, Projection};

/// map = (a·col + b·row + c, d·col + e·row + f).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Affine {
    pub a: f64,
    pub b: f64,
    pub c: f64,
    pub d: f64,
    pub e: f64,
    pub f: f64,
}

/// What the map coordinates of a raster mean.
#[derive(Clone, Debug, PartialEq)]
pub enum Frame {
    /// Map coordinates times `unit_m` are metres of a projection.
    Projected { projection: Projection, unit_m: f64 },
    /// Map x, y times `unit_deg` are longitude (east positive) and planetographic latitude, degrees.
    Geographic { unit_deg: f64 },
    /// No georeference, but the user stated a ground size: map coordinates are metres in a plane
    /// whose +y axis points to azimuth `north_deg`.
    Plane { north_deg: f64 },
    /// No georeference and no size: everything is in pixels, image-up is azimuth `north_deg`.
    Pixels { north_deg: f64 },
}

/// The unit of lengths on this raster.
#[derive(Clone, Copy, Debug, PartialEq, Eq, serde::Serialize, serde::Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum LengthUnit {
    Metre,
    Pixel,
}

/// A raster's place on a body.
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    pub affine: Affine,
    pub frame: Frame,
    pub body: Body,
}

/// The linear map from a pixel step (Δcol, Δrow) to ground (east, north) at one point, in metres
/// (or pixels where the raster has no ground size). East and north are true.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LocalFrame {
    pub east_per_col: f64,
    pub east_per_row: f64,
    pub north_per_col: f64,
    pub north_per_row: f64,
}

/// A place that cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum PlaceError {
    #[error("the pixel-to-map transform is singular ({0:?}): pixels would have no area")]
    Singular(Affine),
    #[error("pixel size {0} must be a positive number of metres")]
    PixelSize(f64),
}

impl LengthUnit {
    /// `"m"` or `"px"`.
    pub fn symbol(self) -> &'static str {
        match self {
            Self::Metre => "m",
            Self::Pixel => "px",
        }
    }
}

impl Affine {
    pub fn apply(&self, p: Point) -> Point {
        Point::new(self.a * p.x + self.b * p.y + self.c, self.d * p.x + self.e * p.y + self.f)
    }

    pub fn determinant(&self) -> f64 {
        self.a * self.e - self.b * self.d
    }

    /// The inverse; `None` when singular.
    pub fn inverse(&self) -> Option<Self> {
        let det = self.determinant();
        if !det.is_finite() || det == 0.0 {
            return None;
        }
        let (a, b, d, e) = (self.e / det, -self.b / det, -self.d / det, self.a / det);
        Some(Self { a, b, c: -(a * self.c + b * self.f), d, e, f: -(d * self.c + e * self.f) })
    }
}

impl Place {
    /// Checks that pixels have area.
    ///
    /// # Errors
    /// [`PlaceError::Singular`].
    pub fn new(affine: Affine, frame: Frame, body: Body) -> Result<Self, PlaceError> {
        affine.inverse().ok_or(PlaceError::Singular(affine))?;
        Ok(Self { affine, frame, body })
    }

    /// A raster without georeference or size; image-up points to `north_deg`.
    pub fn pixels(north_deg: f64) -> Self {
        let affine = Affine { a: 1.0, b: 0.0, c: 0.0, d: 0.0, e: -1.0, f: 0.0 };
        Self { affine, frame: Frame::Pixels { north_deg }, body: Body::earth() }
    }

    /// A raster whose pixel size (x, y in metres) and image-up azimuth the user stated.
    ///
    /// # Errors
    /// [`PlaceError::PixelSize`] unless both are positive and finite.
    pub fn plane(pixel_m: [f64; 2], north_deg: f64, body: Body) -> Result<Self, PlaceError> {
        if let Some(bad) = pixel_m.into_iter().find(|s| !(s.is_finite() && *s > 0.0)) {
            return Err(PlaceError::PixelSize(bad));
        }
        let affine = Affine { a: pixel_m[0], b: 0.0, c: 0.0, d: 0.0, e: -pixel_m[1], f: 0.0 };
        Ok(Self { affine, frame: Frame::Plane { north_deg }, body })
    }

    pub fn unit(&self) -> LengthUnit {
        match self.frame {
            Frame::Pixels { .. } => LengthUnit::Pixel,
            _ => LengthUnit::Metre,
        }
    }

    /// Whether pixels have longitude and latitude.
    pub fn is_georeferenced(&self) -> bool {
        matches!(self.frame, Frame::Projected { .. } | Frame::Geographic { .. })
    }

    pub fn map_of(&self, pixel: Point) -> Point {
        self.affine.apply(pixel)
    }

    /// The pixel of a map point. The affine is invertible by construction.
    pub fn pixel_of_map(&self, map: Point) -> Option<Point> {
        Some(self.affine.inverse()?.apply(map))
    }

    /// Longitude and latitude of a pixel; `None` without georeference or outside the domain.
    pub fn lonlat_of(&self, pixel: Point) -> Option<LonLat> {
        let map = self.map_of(pixel);
        match &self.frame {
            Frame::Projected { projection, unit_m } => {
                projection.to_lonlat(Point::new(map.x * unit_m, map.y * unit_m))
            }
            Frame::Geographic { unit_deg } => {
                let (lon, lat) = (map.x * unit_deg, map.y * unit_deg);
                (lat.abs() <= 90.0 && lon.is_finite()).then_some(LonLat { lon, lat })
            }
            Frame::Plane { .. } | Frame::Pixels { .. } => None,
        }
    }

    /// The pixel of a longitude and latitude; `None` without georeference or outside the domain.
    pub fn pixel_of_lonlat(&self, at: LonLat) -> Option<Point> {
        let map = match &self.frame {
            Frame::Projected { projection, unit_m } => {
                let metres = projection.to_map(at)?;
                Point::new(metres.x / unit_m, metres.y / unit_m)
            }
            Frame::Geographic { unit_deg } => Point::new(at.lon / unit_deg, at.lat / unit_deg),
            Frame::Plane { .. } | Frame::Pixels { .. } => return None,
        };
        self.pixel_of_map(map)
    }

    /// The local frame at a pixel; `None` where the place has no longitude and latitude there
    /// (outside a projection's domain) or within a hair of a pole.
    ///
    /// For a projection: J⁻¹ by central differences of the forward projection (h = 1e-4°).
    pub fn local_frame(&self, pixel: Point) -> Option<LocalFrame> {
        let Affine { a, b, d, e, .. } = self.affine;
        match &self.frame {
            Frame::Pixels { north_deg } => {
                let (sin, cos) = north_deg.to_radians().sin_cos();
                Some(turned(a, b, d, e, sin, cos))
            }
            Frame::Plane { north_deg } => {
                let (sin, cos) = north_deg.to_radians().sin_cos();
                Some(turned(a, b, d, e, sin, cos))
            }
            Frame::Geographic { unit_deg } => {
                let at = self.lonlat_of(pixel)?;
                let (per_lon, per_lat) = metres_per_degree(&self.body, at.lat);
                let (x, y) = (per_lon * unit_deg, per_lat * unit_deg);
                (per_lon > 1e-9 * per_lat).then_some(LocalFrame {
                    east_per_col: a * x,
                    east_per_row: b * x,
                    north_per_col: d * y,
                    north_per_row: e * y,
                })
            }
            Frame::Projected { projection, unit_m } => {
                let at = self.lonlat_of(pixel)?;
                const H: f64 = 1e-4;
                if at.lat.abs() > 90.0 - 2.0 * H {
                    return None;
                }
                let diff = |dlon: f64, dlat: f64| -> Option<(f64, f64)> {
                    let p = projection.to_map(LonLat { lon: at.lon + dlon, lat: at.lat + dlat })?;
                    let q = projection.to_map(LonLat { lon: at.lon - dlon, lat: at.lat - dlat })?;
                    Some(((p.x - q.x) / (2.0 * H), (p.y - q.y) / (2.0 * H)))
                };
                let (per_lon, per_lat) = metres_per_degree(&self.body, at.lat);
                let (xe, ye) = diff(H, 0.0).map(|(x, y)| (x / per_lon, y / per_lon))?;
                let (xn, yn) = diff(0.0, H).map(|(x, y)| (x / per_lat, y / per_lat))?;
                let det = xe * yn - xn * ye;
                if !det.is_finite() || det == 0.0 {
                    return None;
                }
                // Rows of J⁻¹ applied to the map steps of one column and one row.
                let ground = |x: f64, y: f64| {
                    let (x, y) = (x * unit_m, y * unit_m);
                    ((yn * x - xn * y) / det, (xe * y - ye * x) / det)
                };
                let (east_per_col, north_per_col) = ground(a, d);
                let (east_per_row, north_per_row) = ground(b, e);
                Some(LocalFrame { east_per_col, east_per_row, north_per_col, north_per_row })
            }
        }
    }

    /// The place of the same ground resampled by `factor` (2 = half as many pixels per side) and
    /// starting at full-resolution pixel (col, row).
    pub fn window(&self, col: f64, row: f64, factor: [f64; 2]) -> Self {
        let Affine { a, b, d, e, .. } = self.affine;
        let origin = self.affine.apply(Point::new(col, row));
        let affine = Affine {
            a: a * factor[0],
            b: b * factor[1],
            c: origin.x,
            d: d * factor[0],
            e: e * factor[1],
            f: origin.y,
        };
        Self { affine, frame: self.frame.clone(), body: self.body.clone() }
    }
}

/// Plane axes (x right of image-up, y along it) turned so that +y points to the stated azimuth.
fn turned(a: f64, b: f64, d: f64, e: f64, sin: f64, cos: f64) -> LocalFrame {
    LocalFrame {
        east_per_col: a * cos + d * sin,
        east_per_row: b * cos + e * sin,
        north_per_col: d * cos - a * sin,
        north_per_row: e * cos - b * sin,
    }
}

/// Metres of one degree of longitude and of latitude at planetographic latitude `lat_deg`:
/// N cos φ and M of the reference ellipsoid, times π/180.
fn metres_per_degree(body: &Body, lat_deg: f64) -> (f64, f64) {
    let (a, f) = (body.shape.equatorial_m, body.shape.flattening());
    let e2 = f * (2.0 - f);
    let (sin, cos) = lat_deg.to_radians().sin_cos();
    let w2 = 1.0 - e2 * sin * sin;
    let prime_vertical = a / w2.sqrt();
    let meridian = a * (1.0 - e2) / (w2 * w2.sqrt());
    let degree = std::f64::consts::PI / 180.0;
    (prime_vertical * cos * degree, meridian * degree)
}

impl LocalFrame {
    /// Ground (east, north) of a pixel step.
    pub fn ground(&self, dcol: f64, drow: f64) -> (f64, f64) {
        (
            self.east_per_col * dcol + self.east_per_row * drow,
            self.north_per_col * dcol + self.north_per_row * drow,
        )
    }

    /// Pixel step (Δcol, Δrow) of a ground vector.
    pub fn pixel(&self, east: f64, north: f64) -> (f64, f64) {
        let det = self.determinant();
        (
            (self.north_per_row * east - self.east_per_row * north) / det,
            (self.east_per_col * north - self.north_per_col * east) / det,
        )
    }

    /// Ground gradient (∂/∂E, ∂/∂N) of a pixel gradient (∂/∂col, ∂/∂row): M⁻ᵀ g. Wave vectors
    /// transform the same way.
    pub fn gradient(&self, per_col: f64, per_row: f64) -> (f64, f64) {
        let det = self.determinant();
        (
            (self.north_per_row * per_col - self.north_per_col * per_row) / det,
            (self.east_per_col * per_row - self.east_per_row * per_col) / det,
        )
    }

    /// True azimuth of a pixel step.
    pub fn azimuth(&self, dcol: f64, drow: f64) -> Azimuth {
        let (east, north) = self.ground(dcol, drow);
        Azimuth::from_east_north(east, north)
    }

    /// Ground length of a pixel step.
    pub fn length(&self, dcol: f64, drow: f64) -> f64 {
        let (east, north) = self.ground(dcol, drow);
        east.hypot(north)
    }

    /// Ground size of one column step and one row step.
    pub fn pixel_size(&self) -> [f64; 2] {
        [self.length(1.0, 0.0), self.length(0.0, 1.0)]
    }

    /// Ground area of one pixel.
    pub fn pixel_area(&self) -> f64 {
        self.determinant().abs()
    }

    fn determinant(&self) -> f64 {
        self.east_per_col * self.north_per_row - self.east_per_row * self.north_per_col
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn image_up_points_to_the_stated_north() {
        let place = Place::pixels(30.0);
        let frame = place.local_frame(Point::new(5.0, 5.0)).expect("pixels have a frame");
        assert!((frame.azimuth(0.0, -1.0).deg() - 30.0).abs() < 1e-12);
        assert!((frame.azimuth(1.0, 0.0).deg() - 120.0).abs() < 1e-12);
    }

    #[test]
    fn pixel_and_ground_steps_invert() {
        let body = Body::earth();
        let frame = Place::plane([2.0, 3.0], 17.0, body).unwrap().local_frame(Point::new(0.0, 0.0)).unwrap();
        let (e, n) = frame.ground(1.5, -2.5);
        let (c, r) = frame.pixel(e, n);
        assert!((c - 1.5).abs() < 1e-12 && (r + 2.5).abs() < 1e-12);
    }
}

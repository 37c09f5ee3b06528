//! Where a raster lies: pixel ↔ map ↔ longitude/latitude, and at every point the local frame
//! that turns pixel steps into true-north ground metres.
//!
//! Pixel coordinates are continuous, (0, 0) the outer corner of the upper-left pixel.

use serde::{Deserialize, Serialize};

use super::{Affine, Body, BodyShape, LocalFrame, LonLat, Point, Projection};

/// What the map coordinates of a raster mean.
#[derive(Clone, Debug, PartialEq)]
pub enum Frame {
    /// Map coordinates times `unit_m` are metres of a projection.
    Projected { projection: Projection, unit_m: f64 },
    /// Map x, y times `unit_deg` are longitude (east positive) and latitude, degrees.
    Geographic { unit_deg: f64, latitude: LatitudeKind },
    /// No reference system, but a ground size: map coordinates are metres in a plane whose +y axis
    /// points to azimuth `north_deg`.
    Plane { north_deg: f64 },
    /// No georeference and no size: everything is in pixels, image-up is azimuth `north_deg`.
    Pixels { north_deg: f64 },
}

/// Which angle a latitude is. On a sphere they are one.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum LatitudeKind {
    /// Between the equator's plane and the ellipsoid's normal (geodetic).
    #[default]
    Planetographic,
    /// Between the equator's plane and the line to the body's centre.
    Planetocentric,
}

/// The unit of lengths on this raster.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
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

/// A place that cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum PlaceError {
    #[error("the pixel-to-map transform is singular ({0:?}): pixels would have no area")]
    Singular(Affine),
    #[error("pixel size {0} must be a positive number of metres")]
    PixelSize(f64),
    #[error("north at {0}° is not an angle")]
    North(f64),
    #[error("a body with axes {equatorial_m} m and {polar_m} m is not a sphere or an oblate ellipsoid")]
    Shape { equatorial_m: f64, polar_m: f64 },
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

impl LatitudeKind {
    /// The planetographic latitude of a latitude of this kind, degrees.
    pub fn to_planetographic(self, shape: BodyShape, deg: f64) -> f64 {
        match self {
            Self::Planetographic => deg,
            Self::Planetocentric => shape.planetographic(deg),
        }
    }

    /// The latitude of this kind of a planetographic one, degrees.
    pub fn of_planetographic(self, shape: BodyShape, deg: f64) -> f64 {
        match self {
            Self::Planetographic => deg,
            Self::Planetocentric => shape.planetocentric(deg),
        }
    }

    /// d(planetographic)/d(this kind) at a latitude of this kind: k sec² c / (1 + k² tan² c),
    /// k = 1/(1 − f)².
    fn stretch(self, shape: BodyShape, deg: f64) -> f64 {
        match self {
            Self::Planetographic => 1.0,
            Self::Planetocentric => {
                let k = (shape.equatorial_m / shape.polar_m).powi(2);
                let (sin, cos) = deg.to_radians().sin_cos();
                k / (cos * cos + k * k * sin * sin)
            }
        }
    }
}

impl Place {
    /// Checks that pixels have area and the body has a shape.
    ///
    /// # Errors
    /// [`PlaceError::Singular`], [`PlaceError::Shape`].
    pub fn new(affine: Affine, frame: Frame, body: Body) -> Result<Self, PlaceError> {
        affine.inverse().ok_or(PlaceError::Singular(affine))?;
        let BodyShape { equatorial_m, polar_m } = body.shape;
        if !(polar_m > 0.0 && equatorial_m >= polar_m && equatorial_m.is_finite()) {
            return Err(PlaceError::Shape { equatorial_m, polar_m });
        }
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
        if !north_deg.is_finite() {
            return Err(PlaceError::North(north_deg));
        }
        let affine = Affine { a: pixel_m[0], b: 0.0, c: 0.0, d: 0.0, e: -pixel_m[1], f: 0.0 };
        Self::new(affine, Frame::Plane { north_deg }, body)
    }

    /// The place a study works with: what the file says, then what the user said.
    ///
    /// - `pixel_m` replaces any georeference by a plane with image-up at `north_deg` (0 if unsaid).
    /// - `north_deg`, the azimuth of image-up, counts only where the file names no reference system.
    /// - `body` replaces name, gravity and air; its shape counts only where the file has none.
    ///
    /// # Errors
    /// [`PlaceError::PixelSize`], [`PlaceError::North`], [`PlaceError::Shape`].
    pub fn settled(
        file: Option<&Self>,
        pixel_m: Option<[f64; 2]>,
        north_deg: Option<f64>,
        body: Option<&Body>,
    ) -> Result<Self, PlaceError> {
        if let Some(bad) = north_deg.filter(|deg| !deg.is_finite()) {
            return Err(PlaceError::North(bad));
        }
        let image_up = north_deg.unwrap_or(0.0);
        let file_body = file.map(|place| &place.body);
        let mut place = match (pixel_m, file) {
            (Some(size), _) => Self::plane(size, image_up, file_body.cloned().unwrap_or_else(Body::earth))?,
            (None, Some(place)) => place.clone(),
            (None, None) => Self::pixels(image_up),
        };
        if pixel_m.is_none() && north_deg.is_some() {
            place = place.with_image_up(image_up);
        }
        if let Some(stated) = body {
            let shape = if place.is_georeferenced() { place.body.shape } else { stated.shape };
            place.body = Body { shape, ..stated.clone() };
        }
        Self::new(place.affine, place.frame, place.body)
    }

    /// Turns a plane or pixel frame so that image-up points to `image_up_deg`; georeferenced
    /// places know their north and stay.
    fn with_image_up(mut self, image_up_deg: f64) -> Self {
        let now = self.local_frame(Point::new(0.0, 0.0)).map_or(0.0, |frame| frame.azimuth(0.0, -1.0).deg());
        match &mut self.frame {
            Frame::Plane { north_deg } | Frame::Pixels { north_deg } => *north_deg += image_up_deg - now,
            Frame::Projected { .. } | Frame::Geographic { .. } => {}
        }
        self
    }

    /// The same raster when its longitudes count positive toward WEST: a geographic frame is
    /// mirrored, a projection gets the other sign at its central meridian. Files hardly ever say
    /// so; the user must.
    ///
    /// # Errors
    /// [`super::ProjectionError`] when the projection cannot be rebuilt.
    pub fn with_west_longitudes(&self) -> Result<Self, super::ProjectionError> {
        let mut place = self.clone();
        match &self.frame {
            Frame::Geographic { .. } => {
                let Affine { a, b, c, .. } = self.affine;
                place.affine = Affine { a: -a, b: -b, c: -c, ..self.affine };
            }
            Frame::Projected { projection, unit_m } => {
                let centre = projection.central_longitude();
                let mut words: Vec<String> = projection
                    .definition()
                    .split_whitespace()
                    .filter(|word| !word.starts_with("+lon_0=") && !word.starts_with("+pm="))
                    .map(str::to_owned)
                    .collect();
                words.push(format!("+lon_0={}", -centre));
                let projection = Projection::new(&words.join(" "), self.body.shape)?;
                place.frame = Frame::Projected { projection, unit_m: *unit_m };
            }
            Frame::Plane { .. } | Frame::Pixels { .. } => {}
        }
        Ok(place)
    }

    /// The same raster when its latitudes are of `kind`, which a file can hardly say; only
    /// geographic frames have a choice.
    pub fn with_latitude(mut self, kind: LatitudeKind) -> Self {
        if let Frame::Geographic { latitude, .. } = &mut self.frame {
            *latitude = kind;
        }
        self
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
        Some(self.unfolded_lonlat_of(pixel)?.folded())
    }

    /// As [`Self::lonlat_of`], the longitude on the turn the pixel lies on.
    fn unfolded_lonlat_of(&self, pixel: Point) -> Option<LonLat> {
        let map = self.map_of(pixel);
        match &self.frame {
            Frame::Projected { projection, unit_m } => {
                projection.to_lonlat_unfolded(Point::new(map.x * unit_m, map.y * unit_m))
            }
            Frame::Geographic { unit_deg, latitude } => {
                let (lon, lat) = (map.x * unit_deg, map.y * unit_deg);
                (lat.abs() <= 90.0 && lon.abs() <= 720.0)
                    .then(|| LonLat { lon, lat: latitude.to_planetographic(self.body.shape, lat) })
            }
            Frame::Plane { .. } | Frame::Pixels { .. } => None,
        }
    }

    /// The pixel of a longitude and latitude; `None` without georeference or outside the domain.
    /// Where the map repeats after a whole turn (0–360° rasters, rasters over the antimeridian)
    /// the answer is the one nearest `near`: hand in the raster's centre.
    pub fn pixel_of_lonlat(&self, at: LonLat, near: Point) -> Option<Point> {
        let at = at.folded();
        let repeats = match &self.frame {
            Frame::Projected { projection, .. } => projection.repeats(),
            Frame::Geographic { .. } => true,
            Frame::Plane { .. } | Frame::Pixels { .. } => false,
        };
        if !repeats {
            return self.pixel_on_turn(at, true);
        }
        let turned = |turn: f64| self.pixel_on_turn(LonLat { lon: at.lon + 360.0 * turn, ..at }, false);
        // The stated turn first: it wins where another is equally near.
        let candidates = [0.0, -1.0, 1.0, -2.0, 2.0].into_iter().filter_map(turned);
        candidates.fold(None, |best: Option<Point>, p| match best {
            Some(best) if best.distance(near) <= p.distance(near) * (1.0 + 1e-9) => Some(best),
            _ => Some(p),
        })
    }

    fn pixel_on_turn(&self, at: LonLat, fold: bool) -> Option<Point> {
        let map = match &self.frame {
            Frame::Projected { projection, unit_m } => {
                let metres = if fold { projection.to_map(at)? } else { projection.to_map_unfolded(at)? };
                Point::new(metres.x / unit_m, metres.y / unit_m)
            }
            Frame::Geographic { unit_deg, latitude } => {
                let lat = latitude.of_planetographic(self.body.shape, at.lat);
                Point::new(at.lon / unit_deg, lat / unit_deg)
            }
            Frame::Plane { .. } | Frame::Pixels { .. } => return None,
        };
        self.pixel_of_map(map)
    }

    /// The local frame at a pixel; `None` where the place has no longitude and latitude there
    /// (outside a projection's domain) or at a pole itself.
    pub fn local_frame(&self, pixel: Point) -> Option<LocalFrame> {
        let Affine { a, b, d, e, .. } = self.affine;
        match &self.frame {
            Frame::Pixels { north_deg } | Frame::Plane { north_deg } => {
                Some(turned(self.affine, north_deg.to_radians()))
            }
            Frame::Geographic { unit_deg, latitude } => {
                let at = self.unfolded_lonlat_of(pixel)?;
                let (per_lon, per_lat) = self.body.shape.metres_per_degree(at.lat);
                let own_lat = self.map_of(pixel).y * unit_deg;
                let x = per_lon * unit_deg;
                let y = per_lat * unit_deg * latitude.stretch(self.body.shape, own_lat);
                (per_lon > 1e-9 * per_lat).then_some(LocalFrame {
                    east_per_col: a * x,
                    east_per_row: b * x,
                    north_per_col: d * y,
                    north_per_row: e * y,
                })
            }
            Frame::Projected { projection, unit_m } => {
                let at = self.unfolded_lonlat_of(pixel)?;
                let (east, north) = map_per_ground_metre(projection, self.body.shape, at)?;
                let det = east.x * north.y - north.x * east.y;
                if !det.is_finite() || det == 0.0 {
                    return None;
                }
                // Rows of J⁻¹ applied to the map steps of one column and one row.
                let ground = |x: f64, y: f64| {
                    let (x, y) = (x * unit_m, y * unit_m);
                    ((north.y * x - north.x * y) / det, (east.x * y - east.y * x) / det)
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

    /// The map's meaning in words: "UTM zone 33N", "longitude and latitude", "pixels".
    pub fn frame_in_words(&self) -> String {
        match &self.frame {
            Frame::Projected { projection, .. } => projection.in_words(),
            Frame::Geographic { latitude: LatitudeKind::Planetographic, .. } => {
                "longitude and latitude".to_owned()
            }
            Frame::Geographic { latitude: LatitudeKind::Planetocentric, .. } => {
                "longitude and planetocentric latitude".to_owned()
            }
            Frame::Plane { .. } => "a plane in metres, without a reference system".to_owned(),
            Frame::Pixels { .. } => "pixels, without ground size".to_owned(),
        }
    }

    /// One paragraph for `look`: frame, body, pixel size and where image-up points, at `centre`.
    pub fn description(&self, centre: Point) -> String {
        let shape = self.body.shape;
        let form = if shape.is_sphere() {
            format!("sphere of {} km", shape.equatorial_m / 1e3)
        } else {
            format!("ellipsoid {} × {:.3} km", shape.equatorial_m / 1e3, shape.polar_m / 1e3)
        };
        let mut text = self.frame_in_words();
        if self.is_georeferenced() {
            text.push_str(&format!("; {}, {form}", self.body.name));
        }
        let Some(frame) = self.local_frame(centre) else {
            return text + "; the raster's centre lies outside the projection's domain";
        };
        let [col, row] = frame.pixel_size();
        let up = frame.azimuth(0.0, -1.0);
        let hand = if frame.is_mirrored() { "; the image is mirrored" } else { "" };
        match self.unit() {
            LengthUnit::Metre => text.push_str(&format!("; pixels of {col:.6} m × {row:.6} m at the centre")),
            LengthUnit::Pixel => {}
        }
        text + &format!("; image-up lies at azimuth {:.3}°{hand}", up.deg())
    }
}

/// Plane axes turned so that +y points to azimuth `north` (radians).
fn turned(Affine { a, b, d, e, .. }: Affine, north: f64) -> LocalFrame {
    let (sin, cos) = north.sin_cos();
    LocalFrame {
        east_per_col: a * cos + d * sin,
        east_per_row: b * cos + e * sin,
        north_per_col: d * cos - a * sin,
        north_per_row: e * cos - b * sin,
    }
}

/// Map metres per metre of true east and of true north: the columns of J, by central differences
/// of the forward projection. The step is 1e-4°, of longitude more toward a pole (its degrees
/// shrink) and of latitude less (so as not to step over the pole).
fn map_per_ground_metre(projection: &Projection, shape: BodyShape, at: LonLat) -> Option<(Point, Point)> {
    const STEP: f64 = 1e-4;
    let dlat = STEP.min(0.25 * (90.0 - at.lat.abs()));
    let dlon = (STEP / at.lat.to_radians().cos()).min(0.05);
    if dlat.is_nan() || dlat <= 1e-9 {
        return None;
    }
    let slope = |dlon: f64, dlat: f64, step_m: f64| -> Option<Point> {
        let p = projection.to_map_unfolded(LonLat { lon: at.lon + dlon, lat: at.lat + dlat })?;
        let q = projection.to_map_unfolded(LonLat { lon: at.lon - dlon, lat: at.lat - dlat })?;
        Some(Point::new((p.x - q.x) / (2.0 * step_m), (p.y - q.y) / (2.0 * step_m)))
    };
    let (per_lon, per_lat) = shape.metres_per_degree(at.lat);
    Some((slope(dlon, 0.0, dlon * per_lon)?, slope(0.0, dlat, dlat * per_lat)?))
}

#[cfg(test)]
mod tests;

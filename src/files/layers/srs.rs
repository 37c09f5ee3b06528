//! The reference system of a layer, and geometries brought from pixels into it.

use crate::ground::{Body, Frame, LonLat, Place, Point, Polygon, Polyline};

use super::{Geometry, wkt};

/// What the coordinates of a layer mean.
#[derive(Clone, Debug, PartialEq)]
pub enum Srs {
    /// A registered system; `definition` is its well-known text.
    Epsg { code: u32, name: String, definition: String },
    /// A system of our own writing, for a body or a projection without a code.
    Custom { name: String, definition: String, geographic: bool },
    /// Plane coordinates of a raster without reference system (its map units, y up).
    Plane,
}

impl Srs {
    /// The system in which layers of a raster are written: its own map coordinates, or longitude
    /// and latitude when its projection has no name in well-known text. `label` and `epsg` are what
    /// georeferencing found.
    pub fn of_place(place: &Place, label: &str, epsg: Option<u32>) -> Self {
        match &place.frame {
            Frame::Plane { .. } | Frame::Pixels { .. } => Self::Plane,
            Frame::Geographic { .. } => Self::lonlat(&place.body),
            Frame::Projected { .. } => match (wkt::projected(place, label), epsg) {
                (Some(definition), Some(code)) => Self::Epsg { code, name: label.to_owned(), definition },
                (Some(definition), None) => {
                    Self::Custom { name: label.to_owned(), definition, geographic: false }
                }
                (None, _) => Self::lonlat(&place.body),
            },
        }
    }

    /// Longitude (east positive) and planetographic latitude on a body, degrees.
    pub fn lonlat(body: &Body) -> Self {
        let definition = wkt::geographic(body, 0.0);
        if body.shape == Body::earth().shape {
            return Self::Epsg { code: 4326, name: "WGS 84".to_owned(), definition };
        }
        Self::Custom { name: format!("{} longitude/latitude", body.name), definition, geographic: true }
    }

    /// Whether coordinates are longitude and latitude.
    pub fn is_lonlat(&self) -> bool {
        match self {
            Self::Epsg { code, .. } => *code == 4326,
            Self::Custom { geographic, .. } => *geographic,
            Self::Plane => false,
        }
    }

    /// A pixel position in this system; `None` outside the projection's domain.
    pub fn point(&self, place: &Place, pixel: Point) -> Option<Point> {
        if !self.is_lonlat() {
            return Some(place.map_of(pixel));
        }
        place.lonlat_of(pixel).map(|LonLat { lon, lat }| Point::new(lon, lat))
    }

    /// A geometry in pixel coordinates brought into this system; `None` when a vertex lies outside
    /// the projection's domain. Edges that would bend by more than a tenth of a pixel get vertices
    /// in between, and longitudes run on over the antimeridian (179°, 181°), so that shapes stay
    /// whole.
    pub fn geometry(&self, place: &Place, pixels: &Geometry) -> Option<Geometry> {
        let line = |points: &[Point]| Some(Polyline(self.chain(place, points, false)?));
        let polygon = |polygon: &Polygon| {
            let holes = polygon.holes.iter().map(|ring| self.chain(place, ring, true));
            let holes: Option<Vec<_>> = holes.collect();
            let outer = self.chain(place, &polygon.outer, true)?;
            let near = outer.first().map_or(0.0, |p| p.x);
            let holes =
                holes?.into_iter().map(|ring| if self.is_lonlat() { beside(ring, near) } else { ring });
            Some(Polygon { holes: holes.collect(), outer })
        };
        Some(match pixels {
            Geometry::Point(point) => Geometry::Point(self.point(place, *point)?),
            Geometry::LineString(chain) => Geometry::LineString(line(&chain.0)?),
            Geometry::MultiLineString(lines) => {
                Geometry::MultiLineString(lines.iter().map(|l| line(&l.0)).collect::<Option<_>>()?)
            }
            Geometry::Polygon(shape) => Geometry::Polygon(polygon(shape)?),
            Geometry::MultiPolygon(parts) => {
                Geometry::MultiPolygon(parts.iter().map(polygon).collect::<Option<_>>()?)
            }
        })
    }

    fn chain(&self, place: &Place, pixels: &[Point], ring: bool) -> Option<Vec<Point>> {
        if !self.is_lonlat() {
            return Some(pixels.iter().map(|p| place.map_of(*p)).collect());
        }
        let there = |pixel: Point, near: f64| {
            let at = place.lonlat_of(pixel)?;
            Some(Point::new(onto_turn(at.lon, near), at.lat))
        };
        let back = |map: Point, near: Point| place.pixel_of_lonlat(LonLat { lon: map.x, lat: map.y }, near);
        let mut chain = Vec::with_capacity(pixels.len());
        for (i, pixel) in pixels.iter().enumerate() {
            let near = chain.last().map_or(0.0, |p: &Point| p.x);
            let point = there(*pixel, near)?;
            if i > 0 {
                bend(&mut chain, [pixels[i - 1], *pixel], point, &there, &back, 0);
            }
            chain.push(point);
        }
        if let (true, Some(first), Some(last)) = (ring, pixels.first(), pixels.last()) {
            // The closing edge: back to the first vertex, which the ring does not repeat.
            let near = chain.last().map_or(0.0, |p| p.x);
            let close = there(*first, near)?;
            bend(&mut chain, [*last, *first], close, &there, &back, 0);
        }
        Some(chain)
    }
}

/// Adds vertices between the chain's last point and `end` (pixels `edge`) until the straight edges
/// keep within a tenth of a pixel of the pixel edge.
fn bend(
    chain: &mut Vec<Point>,
    edge: [Point; 2],
    end: Point,
    there: &impl Fn(Point, f64) -> Option<Point>,
    back: &impl Fn(Point, Point) -> Option<Point>,
    depth: usize,
) {
    const MOST_HALVINGS: usize = 8;
    const BEND_PX: f64 = 0.1;
    let Some(start) = chain.last().copied().filter(|_| depth < MOST_HALVINGS) else { return };
    let middle = Point::new(0.5 * (edge[0].x + edge[1].x), 0.5 * (edge[0].y + edge[1].y));
    let straight = Point::new(0.5 * (start.x + end.x), 0.5 * (start.y + end.y));
    let Some(off) = back(straight, middle).map(|p| p.distance(middle)) else { return };
    if off <= BEND_PX {
        return;
    }
    let Some(true_middle) = there(middle, start.x) else { return };
    bend(chain, [edge[0], middle], true_middle, there, back, depth + 1);
    chain.push(true_middle);
    bend(chain, [middle, edge[1]], end, there, back, depth + 1);
}

/// The longitude plus whole turns that is nearest `near`.
fn onto_turn(lon: f64, near: f64) -> f64 {
    lon + 360.0 * ((near - lon) / 360.0).round()
}

/// A ring moved by whole turns beside longitude `near`.
fn beside(ring: Vec<Point>, near: f64) -> Vec<Point> {
    let shift = ring.first().map_or(0.0, |p| onto_turn(p.x, near) - p.x);
    ring.into_iter().map(|p| Point::new(p.x + shift, p.y)).collect()
}

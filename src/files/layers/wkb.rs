//! Geometries as bytes: the GeoPackage header and well-known binary, both ways.

use crate::ground::{Bounds, Point, Polygon, Polyline};

use super::{Geometry, GeometryKind, closed_rings};

/// Little-endian, with a bounding box of x and y.
const FLAGS: u8 = 0b0000_0011;
const EMPTY: u8 = 0b0001_0000;

impl GeometryKind {
    /// The code of well-known binary.
    fn code(self) -> u32 {
        match self {
            Self::Point => 1,
            Self::LineString => 2,
            Self::Polygon => 3,
            Self::MultiLineString => 5,
            Self::MultiPolygon => 6,
        }
    }
}

/// The bytes of a geometry in reference system `srs_id`.
pub(super) fn encode(geometry: &Geometry, srs_id: i32) -> Vec<u8> {
    let mut bytes = vec![b'G', b'P', 0];
    match Bounds::of(geometry.points()) {
        Some(bounds) => {
            bytes.push(FLAGS);
            bytes.extend(srs_id.to_le_bytes());
            for edge in [bounds.min.x, bounds.max.x, bounds.min.y, bounds.max.y] {
                bytes.extend(edge.to_le_bytes());
            }
        }
        None => {
            bytes.push(EMPTY | 1);
            bytes.extend(srs_id.to_le_bytes());
        }
    }
    put(&mut bytes, geometry);
    bytes
}

fn put(bytes: &mut Vec<u8>, geometry: &Geometry) {
    head(bytes, geometry.kind());
    match geometry {
        Geometry::Point(point) => put_point(bytes, *point),
        Geometry::LineString(line) => put_points(bytes, &line.0),
        Geometry::Polygon(polygon) => put_polygon(bytes, polygon),
        Geometry::MultiLineString(lines) => {
            count(bytes, lines.len());
            for line in lines {
                head(bytes, GeometryKind::LineString);
                put_points(bytes, &line.0);
            }
        }
        Geometry::MultiPolygon(parts) => {
            count(bytes, parts.len());
            for part in parts {
                head(bytes, GeometryKind::Polygon);
                put_polygon(bytes, part);
            }
        }
    }
}

fn head(bytes: &mut Vec<u8>, kind: GeometryKind) {
    bytes.push(1);
    bytes.extend(kind.code().to_le_bytes());
}

fn count(bytes: &mut Vec<u8>, items: usize) {
    bytes.extend((items as u32).to_le_bytes());
}

fn put_point(bytes: &mut Vec<u8>, point: Point) {
    bytes.extend(point.x.to_le_bytes());
    bytes.extend(point.y.to_le_bytes());
}

fn put_points(bytes: &mut Vec<u8>, points: &[Point]) {
    count(bytes, points.len());
    for point in points {
        put_point(bytes, *point);
    }
}

fn put_polygon(bytes: &mut Vec<u8>, polygon: &Polygon) {
    let rings = closed_rings(polygon);
    count(bytes, rings.len());
    for ring in rings {
        put_points(bytes, &ring);
    }
}

/// The geometry of GeoPackage bytes; `None` for an empty one. Heights and measures are dropped.
///
/// # Errors
/// What is wrong with the bytes.
pub(super) fn decode(bytes: &[u8]) -> Result<Option<Geometry>, String> {
    let [b'G', b'P', _, flags, _, _, _, _, rest @ ..] = bytes else {
        return Err("the geometry does not begin with “GP”".to_owned());
    };
    if flags & EMPTY != 0 {
        return Ok(None);
    }
    let envelope = match flags >> 1 & 0b111 {
        0 => 0,
        1 => 32,
        2 | 3 => 48,
        4 => 64,
        code => return Err(format!("the geometry has an unknown bounding box of kind {code}")),
    };
    let mut reader = Reader { rest: rest.get(envelope..).ok_or_else(cut)?, little: true };
    reader.geometry(0)
}

struct Reader<'a> {
    rest: &'a [u8],
    little: bool,
}

fn cut() -> String {
    "the geometry ends too early".to_owned()
}

impl Reader<'_> {
    fn take<const N: usize>(&mut self) -> Result<[u8; N], String> {
        let (head, rest) = self.rest.split_first_chunk::<N>().ok_or_else(cut)?;
        self.rest = rest;
        Ok(*head)
    }

    fn u32(&mut self) -> Result<u32, String> {
        let bytes = self.take()?;
        Ok(if self.little { u32::from_le_bytes(bytes) } else { u32::from_be_bytes(bytes) })
    }

    fn f64(&mut self) -> Result<f64, String> {
        let bytes = self.take()?;
        Ok(if self.little { f64::from_le_bytes(bytes) } else { f64::from_be_bytes(bytes) })
    }

    /// A count of items of at least `each` bytes, so that a false one cannot ask for memory.
    fn count(&mut self, each: usize) -> Result<usize, String> {
        let items = self.u32()? as usize;
        if items > self.rest.len() / each {
            return Err(cut());
        }
        Ok(items)
    }

    fn geometry(&mut self, depth: usize) -> Result<Option<Geometry>, String> {
        self.little = match self.take::<1>()? {
            [0] => false,
            [1] => true,
            [other] => return Err(format!("the geometry has byte order {other}; expected 0 or 1")),
        };
        let code = self.u32()?;
        // Extended forms put flags on top and thousands for z and m.
        let (base, dimension) = (code & 0x0FFF_FFFF, code >> 30);
        let extra = match base / 1000 {
            0 => dimension.count_ones() as usize,
            1 | 2 => 1,
            3 => 2,
            _ => return Err(format!("the geometry has unknown type {code}")),
        };
        if depth > 0 && ![1, 2, 3].contains(&(base % 1000)) {
            return Err("the geometry is nested too deeply".to_owned());
        }
        Ok(Some(match base % 1000 {
            1 => Geometry::Point(self.point(extra)?),
            2 => Geometry::LineString(Polyline(self.points(extra)?)),
            3 => match self.polygon(extra)? {
                Some(polygon) => Geometry::Polygon(polygon),
                None => return Ok(None),
            },
            5 => {
                let mut lines = Vec::new();
                for _ in 0..self.count(9)? {
                    match self.geometry(depth + 1)? {
                        Some(Geometry::LineString(line)) => lines.push(line),
                        _ => return Err("a collection of lines holds something else".to_owned()),
                    }
                }
                Geometry::MultiLineString(lines)
            }
            6 => {
                let mut parts = Vec::new();
                for _ in 0..self.count(9)? {
                    match self.geometry(depth + 1)? {
                        Some(Geometry::Polygon(part)) => parts.push(part),
                        None => {}
                        _ => return Err("a collection of polygons holds something else".to_owned()),
                    }
                }
                Geometry::MultiPolygon(parts)
            }
            other => return Err(format!("geometries of type {other} are not read; polygons and lines are")),
        }))
    }

    fn point(&mut self, extra: usize) -> Result<Point, String> {
        let point = Point::new(self.f64()?, self.f64()?);
        for _ in 0..extra {
            self.f64()?;
        }
        Ok(point)
    }

    fn points(&mut self, extra: usize) -> Result<Vec<Point>, String> {
        (0..self.count(16 + 8 * extra)?).map(|_| self.point(extra)).collect()
    }

    fn polygon(&mut self, extra: usize) -> Result<Option<Polygon>, String> {
        let mut rings = Vec::new();
        for _ in 0..self.count(4)? {
            rings.push(self.points(extra)?);
        }
        let mut rings = rings.into_iter();
        Ok(rings.next().map(|outer| Polygon { outer, holes: rings.collect() }))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn square() -> Polygon {
        Polygon {
            outer: Polygon::rectangle(10.0, 8.0).outer,
            holes: vec![vec![Point::new(2.0, 2.0), Point::new(5.0, 2.0), Point::new(5.0, 4.0)]],
        }
    }

    #[test]
    fn the_bytes_of_a_point_are_those_of_the_standard() {
        let bytes = encode(&Geometry::Point(Point::new(1.0, -2.0)), 100_000);
        let one = [0, 0, 0, 0, 0, 0, 0xF0, 0x3F];
        let minus_two = [0, 0, 0, 0, 0, 0, 0, 0xC0];
        let mut want = vec![0x47, 0x50, 0x00, 0x03, 0xA0, 0x86, 0x01, 0x00];
        for part in [one, one, minus_two, minus_two] {
            want.extend(part);
        }
        want.extend([0x01, 0x01, 0, 0, 0]);
        want.extend(one);
        want.extend(minus_two);
        assert_eq!(bytes, want);
    }

    #[test]
    fn polygons_come_back_closed_and_wound() {
        let bytes = encode(&Geometry::Polygon(square()), 4326);
        let Ok(Some(Geometry::Polygon(back))) = decode(&bytes) else { panic!("a polygon") };
        assert_eq!(back.outer.first(), back.outer.last());
        assert_eq!((back.outer.len(), back.holes[0].len()), (5, 4));
        assert_eq!(back.area(), square().area());
    }

    #[test]
    fn heights_and_big_endian_are_read() {
        let mut bytes = vec![b'G', b'P', 0, 0, 0, 0, 0, 0, 0];
        bytes.extend(1003u32.to_be_bytes());
        bytes.extend(1u32.to_be_bytes());
        bytes.extend(3u32.to_be_bytes());
        for value in [0.0, 0.0, 7.0, 4.0, 0.0, 7.0, 0.0, 3.0, 7.0f64] {
            bytes.extend(value.to_be_bytes());
        }
        let Ok(Some(Geometry::Polygon(polygon))) = decode(&bytes) else { panic!("a polygon") };
        assert_eq!(polygon.area(), 6.0);
        assert_eq!(decode(&bytes[..bytes.len() - 1]), Err("the geometry ends too early".to_owned()));
    }

    proptest! {
        #[test]
        fn broken_bytes_are_errors(mut bytes in prop::collection::vec(any::<u8>(), 0..80), at in 0usize..60, to in any::<u8>()) {
            let _ = decode(&bytes);
            bytes.splice(..0, [b'G', b'P', 0, 1, 0, 0, 0, 0, 1, 3, 0, 0, 0]);
            let _ = decode(&bytes);
            let mut sound = encode(&Geometry::MultiPolygon(vec![square(), square()]), 7);
            sound[at] = to;
            let _ = decode(&sound);
        }
    }
}

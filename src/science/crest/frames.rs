//! Where the pixels of a patch lie on the ground: one linear frame, or a place whose frame changes across it.

use crate::ground::{Frame, LocalFrame, LonLat, Place, Point};

/// The ground under pixels.
pub trait OnGround: Sync {
    /// The frame at a pixel: true directions and short lengths there.
    fn frame(&self, at: Point) -> LocalFrame;

    /// The pixel in one plane for the whole patch, x east and y north of its middle: for what compares places
    /// far apart.
    fn plane(&self, at: Point) -> Point;
}

impl OnGround for LocalFrame {
    fn frame(&self, _: Point) -> LocalFrame {
        *self
    }

    fn plane(&self, at: Point) -> Point {
        let (east, north) = self.ground(at.x, at.y);
        Point::new(east, north)
    }
}

impl<T: OnGround + ?Sized> OnGround for &T {
    fn frame(&self, at: Point) -> LocalFrame {
        (**self).frame(at)
    }

    fn plane(&self, at: Point) -> Point {
        (**self).plane(at)
    }
}

/// A place about the middle of a patch. Its plane is azimuthal equidistant: true distance and azimuth from the
/// middle, so that other lengths err by at most (r/R)²/6 at a distance r on a body of radius R.
#[derive(Clone, Debug)]
pub struct Frames<'a> {
    place: &'a Place,
    middle: Point,
    at_middle: LocalFrame,
    lonlat: Option<LonLat>,
}

impl<'a> Frames<'a> {
    /// `None` where the place has no frame at the middle.
    pub fn new(place: &'a Place, middle: Point) -> Option<Self> {
        let at_middle = place.local_frame(middle)?;
        let curved = matches!(place.frame, Frame::Geographic { .. } | Frame::Projected { .. });
        let lonlat = if curved { place.lonlat_of(middle) } else { None };
        Some(Self { place, middle, at_middle, lonlat })
    }

    /// The frame at the middle of the patch.
    pub fn middle(&self) -> LocalFrame {
        self.at_middle
    }
}

impl OnGround for Frames<'_> {
    fn frame(&self, at: Point) -> LocalFrame {
        match self.lonlat {
            Some(_) => self.place.local_frame(at).unwrap_or(self.at_middle),
            None => self.at_middle,
        }
    }

    fn plane(&self, at: Point) -> Point {
        if let Some(middle) = self.lonlat
            && let Some(there) = self.place.lonlat_of(at)
        {
            let way = self.place.body.shape.geodesic(middle, there);
            let (east, north) = way.azimuth.east_north();
            return Point::new(way.length_m * east, way.length_m * north);
        }
        let (east, north) = self.at_middle.ground(at.x - self.middle.x, at.y - self.middle.y);
        Point::new(east, north)
    }
}

//! Which part of a raster a map shows, and how pixels become millimetres.

use crate::ground::{Axis, Bounds, LocalFrame, Place, Point};

use super::Picture;

/// A raster window as a picture, the full-resolution pixels it covers, and its place.
#[derive(Clone, Debug, PartialEq)]
pub struct MapView<'a> {
    pub picture: &'a Picture,
    /// In full-resolution pixel coordinates.
    pub covers: Bounds,
    pub place: &'a Place,
}

impl MapView<'_> {
    /// The part of the picture that shows `to`, widened to whole cells of it, and the pixels it covers; `None` where
    /// the two do not meet.
    pub fn cropped(&self, to: Bounds) -> Option<(Picture, Bounds)> {
        let Picture { width, height, rgba } = self.picture;
        let cell = [self.covers.width() / *width as f64, self.covers.height() / *height as f64];
        let origin = self.covers.min;
        let first = |v: f64| v.floor().max(0.0) as usize;
        let last = |v: f64, most: usize| (v.ceil().max(0.0) as usize).min(most);
        let (left, right) =
            (first((to.min.x - origin.x) / cell[0]), last((to.max.x - origin.x) / cell[0], *width));
        let (top, bottom) =
            (first((to.min.y - origin.y) / cell[1]), last((to.max.y - origin.y) / cell[1], *height));
        if left >= right || top >= bottom {
            return None;
        }
        let rows = (top..bottom).flat_map(|row| &rgba[4 * (row * width + left)..4 * (row * width + right)]);
        let picture = Picture { width: right - left, height: bottom - top, rgba: rows.copied().collect() };
        let at = |col: usize, row: usize| {
            Point::new(origin.x + cell[0] * col as f64, origin.y + cell[1] * row as f64)
        };
        Some((picture, Bounds { min: at(left, top), max: at(right, bottom) }))
    }
}

/// Pixels to millimetres: upright, scaled so that the ground has its true shape at the centre.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Sheet {
    /// The frame on the page.
    pub min: Point,
    pub max: Point,
    /// The pixels it shows.
    pub covers: Bounds,
}

impl Sheet {
    /// The largest frame inside `room` (width, height) whose upper left corner is `min`.
    pub fn fit(view: &MapView, min: Point, room: [f64; 2]) -> Self {
        let frame = view.place.local_frame(view.covers.centre());
        let [dx, dy] = frame.map_or([1.0, 1.0], |f| f.pixel_size());
        // Near a pole of a longitude–latitude raster the true shape would be a sliver.
        let stretch = (dy / dx).clamp(0.2, 5.0);
        let (width, height) = (view.covers.width(), stretch * view.covers.height());
        let per_pixel = (room[0] / width).min(room[1] / height);
        let max = Point::new(min.x + per_pixel * width, min.y + per_pixel * height);
        Self { min, max, covers: view.covers }
    }

    pub fn width(&self) -> f64 {
        self.max.x - self.min.x
    }

    pub fn height(&self) -> f64 {
        self.max.y - self.min.y
    }

    /// Millimetres per pixel, along columns and rows.
    pub fn scale(&self) -> [f64; 2] {
        [self.width() / self.covers.width(), self.height() / self.covers.height()]
    }

    pub fn at(&self, pixel: Point) -> Point {
        let [sx, sy] = self.scale();
        Point::new(
            self.min.x + sx * (pixel.x - self.covers.min.x),
            self.min.y + sy * (pixel.y - self.covers.min.y),
        )
    }

    pub fn pixel(&self, at: Point) -> Point {
        let [sx, sy] = self.scale();
        Point::new(self.covers.min.x + (at.x - self.min.x) / sx, self.covers.min.y + (at.y - self.min.y) / sy)
    }

    pub fn holds(&self, at: Point) -> bool {
        (self.min.x..=self.max.x).contains(&at.x) && (self.min.y..=self.max.y).contains(&at.y)
    }

    /// Unit vector on the page along a ground direction (east, north).
    pub fn direction(&self, frame: &LocalFrame, (east, north): (f64, f64)) -> Option<Point> {
        let (dcol, drow) = frame.pixel(east, north);
        let [sx, sy] = self.scale();
        let (x, y) = (sx * dcol, sy * drow);
        let length = x.hypot(y);
        (length.is_finite() && length > 0.0).then(|| Point::new(x / length, y / length))
    }

    /// Unit vector on the page along a true axis.
    pub fn along(&self, frame: &LocalFrame, axis: Axis) -> Option<Point> {
        self.direction(frame, axis.azimuth().east_north())
    }
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Body;

    pub fn picture() -> Picture {
        Picture { width: 2, height: 2, rgba: [128; 16].into() }
    }

    pub fn covers(width: f64, height: f64) -> Bounds {
        Bounds { min: Point::new(0.0, 0.0), max: Point::new(width, height) }
    }

    #[test]
    fn tall_pixels_make_a_tall_map() {
        let place = Place::plane([10.0, 20.0], 0.0, Body::earth()).expect("a place");
        let picture = picture();
        let view = MapView { picture: &picture, covers: covers(100.0, 100.0), place: &place };
        let sheet = Sheet::fit(&view, Point::new(5.0, 5.0), [50.0, 100.0]);
        assert_close!(sheet.height() / sheet.width(), 2.0, 1e-12);
        let there = sheet.at(Point::new(30.0, 70.0));
        assert_close!(sheet.pixel(there).y, 70.0, 1e-9);
    }

    #[test]
    fn a_cropped_view_keeps_its_pixels_in_place() {
        let place = Place::pixels(0.0);
        let rgba: Vec<u8> = (0..8 * 4).flat_map(|i| [i as u8; 4]).collect();
        let picture = Picture { width: 8, height: 4, rgba: rgba.into() };
        let view = MapView { picture: &picture, covers: covers(80.0, 40.0), place: &place };
        let to = Bounds { min: Point::new(25.0, 10.0), max: Point::new(61.0, 500.0) };
        let (part, bounds) = view.cropped(to).expect("a part");
        assert_eq!((part.width, part.height, part.rgba[0]), (5, 3, 8 + 2));
        assert_eq!((bounds.min, bounds.max), (Point::new(20.0, 10.0), Point::new(70.0, 40.0)));
        let away = Bounds { min: Point::new(90.0, 0.0), max: Point::new(99.0, 9.0) };
        assert_eq!(view.cropped(away), None);
    }

    #[test]
    fn true_directions_turn_with_the_raster() {
        // Image-up is east, so north is to the left.
        let place = Place::plane([10.0, 10.0], 90.0, Body::earth()).expect("a place");
        let picture = picture();
        let view = MapView { picture: &picture, covers: covers(100.0, 50.0), place: &place };
        let sheet = Sheet::fit(&view, Point::new(0.0, 0.0), [100.0, 100.0]);
        let frame = place.local_frame(Point::new(50.0, 25.0)).expect("a frame");
        let north = sheet.along(&frame, Axis::from_deg(0.0)).expect("a direction");
        assert_close!(north.x, -1.0, 1e-12);
        assert_close!(north.y, 0.0, 1e-12);
    }
}

//! How raster pixels lie on the screen at one moment.

use egui::{Pos2, Rect, Vec2, pos2, vec2};

use crate::ground::{Bounds, Place, Point};

/// A camera over a frame on the screen: a shift, a scale, and a stretch of the rows where pixels
/// are not square on the ground.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lens {
    /// The map frame, screen points.
    pub frame: Rect,
    /// Full-resolution pixel in the middle of the frame.
    pub centre: Point,
    /// Screen points a column.
    pub per_col: f64,
    /// Screen points a row.
    pub per_row: f64,
}

/// Ground length of a row step over that of a column step at the raster's middle, so that ground
/// shapes keep their shape on the screen. 1 where the place does not say or says something extreme.
pub fn row_stretch(place: &Place, [width, height]: [usize; 2]) -> f64 {
    let middle = Point::new(0.5 * width as f64, 0.5 * height as f64);
    place
        .local_frame(middle)
        .map(|frame| frame.pixel_size())
        .map(|[col, row]| row / col)
        .filter(|ratio| (0.1..=10.0).contains(ratio))
        .unwrap_or(1.0)
}

impl Lens {
    pub fn new(frame: Rect, centre: Point, scale: f64, stretch: f64) -> Self {
        Self { frame, centre, per_col: scale, per_row: scale * stretch }
    }

    pub fn to_screen(self, pixel: Point) -> Pos2 {
        let middle = self.frame.center();
        pos2(
            (f64::from(middle.x) + (pixel.x - self.centre.x) * self.per_col) as f32,
            (f64::from(middle.y) + (pixel.y - self.centre.y) * self.per_row) as f32,
        )
    }

    pub fn to_pixel(self, at: Pos2) -> Point {
        let from_middle = at - self.frame.center();
        Point::new(
            self.centre.x + f64::from(from_middle.x) / self.per_col,
            self.centre.y + f64::from(from_middle.y) / self.per_row,
        )
    }

    /// Screen vector of a pixel step.
    pub fn step(&self, dcol: f64, drow: f64) -> Vec2 {
        vec2((dcol * self.per_col) as f32, (drow * self.per_row) as f32)
    }

    /// Pixel step of a screen vector.
    pub fn pixel_step(&self, v: Vec2) -> (f64, f64) {
        (f64::from(v.x) / self.per_col, f64::from(v.y) / self.per_row)
    }

    /// Pixels within the frame.
    pub fn visible(&self) -> Bounds {
        Bounds { min: self.to_pixel(self.frame.min), max: self.to_pixel(self.frame.max) }
    }

    /// The part of a raster of this size within the frame; `None` when it is out of sight.
    pub fn visible_raster(&self, [width, height]: [usize; 2]) -> Option<Bounds> {
        let Bounds { min, max } = self.visible();
        let part = Bounds {
            min: Point::new(min.x.max(0.0), min.y.max(0.0)),
            max: Point::new(max.x.min(width as f64), max.y.min(height as f64)),
        };
        (part.width() > 0.0 && part.height() > 0.0).then_some(part)
    }

    /// Screen box of a box of pixels.
    pub fn rect(&self, bounds: Bounds) -> Rect {
        Rect::from_min_max(self.to_screen(bounds.min), self.to_screen(bounds.max))
    }

    /// The offset of a screen position from the middle, in the camera's points: there rows are as
    /// wide as columns.
    pub fn anchor(&self, at: Pos2) -> [f64; 2] {
        self.unstretched(at - self.frame.center())
    }

    /// A screen vector in the camera's points.
    pub fn unstretched(&self, v: Vec2) -> [f64; 2] {
        [f64::from(v.x), f64::from(v.y) * self.per_col / self.per_row]
    }
}

#[cfg(test)]
mod tests {
    use super::{Lens, row_stretch};
    use crate::assert_close;
    use crate::ground::{Body, Place, Point};
    use egui::{Rect, pos2, vec2};
    use proptest::prelude::{any, proptest};

    fn lens(centre: Point, scale: f64, stretch: f64) -> Lens {
        let frame = Rect::from_min_size(pos2(120.0, 40.0), vec2(800.0, 600.0));
        Lens::new(frame, centre, scale, stretch)
    }

    #[test]
    fn the_centre_is_in_the_middle() {
        let lens = lens(Point::new(5000.0, 7000.0), 0.25, 2.0);
        assert_eq!(lens.to_screen(Point::new(5000.0, 7000.0)), lens.frame.center());
        // 100 columns right at a quarter point each; 100 rows down at half a point each.
        assert_eq!(lens.to_screen(Point::new(5100.0, 7100.0)) - lens.frame.center(), vec2(25.0, 50.0));
        let seen = lens.visible();
        assert_eq!((seen.width(), seen.height()), (3200.0, 1200.0));
    }

    proptest! {
        #[test]
        fn screen_and_pixel_invert(x in -400.0..400.0f32, y in -300.0..300.0f32, zoom in -10.0..6.0f64, tall in any::<bool>()) {
            let lens = lens(Point::new(321.0, 9876.5), zoom.exp2(), if tall { 2.0 } else { 1.0 });
            let at = lens.frame.center() + vec2(x, y);
            let back = lens.to_screen(lens.to_pixel(at));
            assert_close!(f64::from(back.distance(at)), 0.0, 1e-3, "there and back");
        }
    }

    #[test]
    fn only_the_raster_counts_as_visible_raster() {
        let lens = lens(Point::new(0.0, 0.0), 1.0, 1.0);
        let part = lens.visible_raster([100, 1000]).expect("the upper left corner is in the middle");
        assert_eq!((part.min, part.max), (Point::new(0.0, 0.0), Point::new(100.0, 300.0)));
        assert!(Lens { centre: Point::new(-500.0, 0.0), ..lens }.visible_raster([100, 1000]).is_none());
    }

    #[test]
    fn tall_pixels_are_drawn_tall() {
        let place = Place::plane([2.0, 5.0], 30.0, Body::earth()).expect("a plane");
        assert_close!(row_stretch(&place, [10, 10]), 2.5, 1e-12, "5 m rows over 2 m columns");
        assert_eq!(row_stretch(&Place::pixels(0.0), [10, 10]), 1.0);
    }
}

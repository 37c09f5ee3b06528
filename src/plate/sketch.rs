//! A pen for building figures: lines, arcs, wedges, wrapped text, placed parts.

use crate::ground::{Azimuth, Point};

use super::font;
use super::{Figure, Fill, Item, Rgba, Stroke, TextAnchor};

/// Line spacing in text sizes.
const LEADING: f64 = 1.38;

/// How a text looks.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Type {
    pub size_mm: f64,
    pub bold: bool,
    pub color: Rgba,
    pub anchor: TextAnchor,
    pub halo: Option<Rgba>,
}

/// Items under construction.
#[derive(Debug, Default)]
pub(super) struct Sketch {
    pub items: Vec<Item>,
}

impl Type {
    pub fn new(size_mm: f64, color: Rgba) -> Self {
        Self { size_mm, bold: false, color, anchor: TextAnchor::Start, halo: None }
    }

    pub fn bold(self) -> Self {
        Self { bold: true, ..self }
    }

    pub fn anchored(self, anchor: TextAnchor) -> Self {
        Self { anchor, ..self }
    }

    pub fn haloed(self, halo: Rgba) -> Self {
        Self { halo: Some(halo), ..self }
    }

    pub fn leading(&self) -> f64 {
        LEADING * self.size_mm
    }
}

impl Sketch {
    pub fn line(&mut self, from: Point, to: Point, stroke: Stroke) {
        self.polyline(vec![from, to], stroke);
    }

    pub fn polyline(&mut self, points: Vec<Point>, stroke: Stroke) {
        self.items.push(Item::Path { points, closed: false, fill: None, stroke: Some(stroke) });
    }

    pub fn polygon(&mut self, points: Vec<Point>, fill: Option<Fill>, stroke: Option<Stroke>) {
        self.items.push(Item::Path { points, closed: true, fill, stroke });
    }

    pub fn rectangle(&mut self, min: Point, max: Point, fill: Option<Fill>, stroke: Option<Stroke>) {
        let corners = vec![min, Point::new(max.x, min.y), max, Point::new(min.x, max.y)];
        self.polygon(corners, fill, stroke);
    }

    pub fn circle(&mut self, centre: Point, radius_mm: f64, fill: Option<Fill>, stroke: Option<Stroke>) {
        self.items.push(Item::Circle { centre, radius_mm, fill, stroke });
    }

    pub fn text(&mut self, at: Point, text: impl Into<String>, look: Type) {
        self.turned_text(at, text, look, 0.0);
    }

    pub fn turned_text(&mut self, at: Point, text: impl Into<String>, look: Type, turn_deg: f64) {
        let text = text.into();
        if text.is_empty() {
            return;
        }
        let Type { size_mm, bold, color, anchor, halo } = look;
        self.items.push(Item::Text { at, text, size_mm, bold, color, anchor, turn_deg, halo });
    }

    /// Text set in lines no wider than `width_mm`; `at` is the anchor at the TOP of the first line.
    /// Returns the height used.
    pub fn paragraph(&mut self, at: Point, text: &str, look: Type, width_mm: f64) -> f64 {
        let lines = font::wrap(text, look.size_mm, look.bold, width_mm);
        for (i, line) in lines.iter().enumerate() {
            let baseline = at.y + (i as f64 * LEADING + 1.0) * look.size_mm;
            self.text(Point::new(at.x, baseline), line.as_str(), look);
        }
        lines.len() as f64 * look.leading()
    }

    /// Another figure's items, moved so that its upper left corner lies at `at`.
    pub fn place(&mut self, figure: &Figure, at: Point) {
        self.items.extend(figure.items.iter().map(|item| item.moved(at)));
    }

    pub fn finish(self, width_mm: f64, height_mm: f64) -> Figure {
        Figure { width_mm, height_mm, items: self.items }
    }
}

/// The point at `radius` from `centre` toward the azimuth, north up.
pub(super) fn toward(centre: Point, radius: f64, azimuth: Azimuth) -> Point {
    let (east, north) = azimuth.east_north();
    Point::new(centre.x + radius * east, centre.y - radius * north)
}

/// Points along the arc from azimuth `from_deg` clockwise to `to_deg`, close enough together that
/// the chords stay within 0.01 mm of the circle.
pub(super) fn arc(centre: Point, radius: f64, from_deg: f64, to_deg: f64) -> Vec<Point> {
    let step = 2.0 * (1.0 - 0.01 / radius.max(0.02)).acos().to_degrees();
    let n = ((to_deg - from_deg).abs() / step).ceil().max(1.0) as usize;
    (0..=n)
        .map(|i| {
            let deg = from_deg + (to_deg - from_deg) * i as f64 / n as f64;
            toward(centre, radius, Azimuth::from_deg(deg))
        })
        .collect()
}

/// The sector between two radii and two azimuths; a wedge when `inner` is 0.
pub(super) fn sector(centre: Point, inner: f64, outer: f64, from_deg: f64, to_deg: f64) -> Vec<Point> {
    let mut points = arc(centre, outer, from_deg, to_deg);
    if inner > 0.0 {
        points.extend(arc(centre, inner, to_deg, from_deg));
    } else {
        points.push(centre);
    }
    points
}

/// An arrow head with its tip at `tip`, pointing to the azimuth.
pub(super) fn arrow_head(tip: Point, length: f64, azimuth: Azimuth) -> Vec<Point> {
    let back = toward(tip, length, azimuth.reversed());
    let side = |turn: f64| toward(back, 0.42 * length, azimuth.rotated(turn));
    vec![tip, side(90.0), toward(tip, 0.75 * length, azimuth.reversed()), side(-90.0)]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn north_is_up_and_east_is_right() {
        let centre = Point::new(10.0, 10.0);
        let north = toward(centre, 5.0, Azimuth::from_deg(0.0));
        let east = toward(centre, 5.0, Azimuth::from_deg(90.0));
        assert_close!(north.y, 5.0, 1e-12);
        assert_close!(east.x, 15.0, 1e-12);
    }

    #[test]
    fn arcs_stay_on_the_circle() {
        let points = arc(Point::new(0.0, 0.0), 20.0, 350.0, 380.0);
        for pair in points.windows(2) {
            let middle = Point::new(0.5 * (pair[0].x + pair[1].x), 0.5 * (pair[0].y + pair[1].y));
            assert_close!(middle.distance(Point::new(0.0, 0.0)), 20.0, 0.0101);
        }
    }

    #[test]
    fn placing_moves_everything_inside_clips_too() {
        let mut inner = Sketch::default();
        inner.circle(Point::new(1.0, 1.0), 1.0, None, None);
        let clip = Item::Clip { min: Point::new(0.0, 0.0), max: Point::new(2.0, 2.0), items: inner.items };
        let mut outer = Sketch::default();
        outer.place(&Figure { width_mm: 2.0, height_mm: 2.0, items: vec![clip] }, Point::new(10.0, 20.0));
        let Item::Clip { min, items, .. } = &outer.items[0] else { panic!("clip kept") };
        assert_eq!(*min, Point::new(10.0, 20.0));
        assert!(matches!(items[0], Item::Circle { centre, .. } if centre == Point::new(11.0, 21.0)));
    }
}

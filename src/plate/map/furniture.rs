//! Scale bar, true-north arrow, hatching of missing ground.

use crate::ground::{LengthUnit, LocalFrame, Place, Point};

use super::view::Sheet;
use crate::plate::sketch::{Sketch, Type};
use crate::plate::{Item, TextAnchor, Theme, font, numbers};

/// A scale bar of round length.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct ScaleBar {
    pub length_mm: f64,
    pub label: String,
}

/// The bar for lengths along the image's rows at the frame's centre, about a quarter of the map
/// wide. `None` where the place has no local frame.
pub(super) fn scale_bar(sheet: &Sheet, place: &Place) -> Option<ScaleBar> {
    let frame = place.local_frame(sheet.covers.centre())?;
    let per_mm = frame.length(1.0, 0.0) / sheet.scale()[0];
    let length = round_length(0.3 * sheet.width() * per_mm);
    if length <= 0.0 {
        return None;
    }
    let label = match place.unit() {
        LengthUnit::Metre if length >= 1000.0 => format!("{} km", numbers::plain(length / 1000.0, 3)),
        LengthUnit::Metre => format!("{} m", numbers::plain(length, 4)),
        LengthUnit::Pixel => format!("{} px", numbers::plain(length, 4)),
    };
    Some(ScaleBar { length_mm: length / per_mm, label })
}

/// The largest of 1, 2, 4, 5, 8 times a power of ten that is not above `value`; 0 for 0.
fn round_length(value: f64) -> f64 {
    let coarse = numbers::round_down(value);
    let decade = if coarse > 0.0 { 10f64.powf(coarse.log10().floor()) } else { return 0.0 };
    let finer = [8.0, 4.0].into_iter().map(|s| s * decade).find(|l| *l <= value);
    finer.map_or(coarse, |l| l.max(coarse))
}

/// The bar from `at` to the right, its label and, where `room_mm` allows, what it holds for after it.
pub(super) fn draw_scale_bar(sketch: &mut Sketch, bar: &ScaleBar, at: Point, room_mm: f64, theme: &Theme) {
    let height = 1.0;
    let edge = theme.stroke(theme.ink, theme.widths.thin);
    let piece = bar.length_mm / 4.0;
    for i in 0..4 {
        let x = at.x + f64::from(i) * piece;
        let fill = if i % 2 == 0 { theme.ink } else { theme.paper };
        sketch.rectangle(Point::new(x, at.y), Point::new(x + piece, at.y + height), Some(fill), Some(edge));
    }
    let size = theme.text.small;
    let base = at.y + 0.5 * height + 0.5 * font::CAP_HEIGHT * size;
    let x = at.x + bar.length_mm + 1.4;
    sketch.text(Point::new(x, base), bar.label.as_str(), Type::new(size, theme.ink).bold());
    let after = x + font::text_width(&bar.label, size, true) + 1.4;
    let notes = ["along image rows at the map’s centre", "along image rows"];
    let fits = |note: &&str| after - at.x + font::text_width(note, size, false) <= room_mm;
    if let Some(note) = notes.into_iter().find(fits) {
        sketch.text(Point::new(after, base), note, Type::new(size, theme.ink_soft));
    }
}

/// The direction of true north on the page at a pixel.
pub(super) fn north(sheet: &Sheet, place: &Place, pixel: Point) -> Option<Point> {
    let frame: LocalFrame = place.local_frame(pixel)?;
    sheet.direction(&frame, (0.0, 1.0))
}

/// A needle in a disc of paper, its letter beyond the tip.
pub(super) fn draw_north(sketch: &mut Sketch, direction: Point, centre: Point, radius: f64, theme: &Theme) {
    let ground = theme.halo.with_alpha(225);
    sketch.circle(centre, radius, Some(ground), Some(theme.stroke(theme.over_image, theme.widths.hair)));
    let along = |s: f64, side: f64| {
        Point::new(
            centre.x + radius * (s * direction.x - side * direction.y),
            centre.y + radius * (s * direction.y + side * direction.x),
        )
    };
    let tip = along(0.3, 0.0);
    let stroke = theme.stroke(theme.over_image, theme.widths.thin);
    sketch.polygon(vec![tip, along(-0.76, 0.28), along(-0.56, 0.0)], Some(theme.over_image), Some(stroke));
    sketch.polygon(vec![tip, along(-0.76, -0.28), along(-0.56, 0.0)], None, Some(stroke));
    let size = 0.46 * radius;
    let letter = along(0.62, 0.0);
    let look = Type::new(size, theme.over_image).bold().anchored(TextAnchor::Middle);
    sketch.text(Point::new(letter.x, letter.y + 0.5 * font::CAP_HEIGHT * size), "N", look);
}

/// Slanted thin lines over the whole frame; the image above hides them where it has values.
pub(super) fn hatching(sheet: &Sheet, theme: &Theme) -> Vec<Item> {
    let mut sketch = Sketch::default();
    sketch.rectangle(sheet.min, sheet.max, Some(theme.paper), None);
    let stroke = theme.stroke(theme.rule, theme.widths.thin);
    let mut offset = 1.0;
    while offset < sheet.width() + sheet.height() {
        let from = Point::new(sheet.min.x, sheet.min.y + offset);
        let to = Point::new(sheet.min.x + offset, sheet.min.y);
        sketch.line(from, to, stroke);
        offset += 1.8;
    }
    sketch.items
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::{Body, Bounds};

    fn sheet() -> Sheet {
        Sheet {
            min: Point::new(0.0, 0.0),
            max: Point::new(100.0, 60.0),
            covers: Bounds { min: Point::new(0.0, 0.0), max: Point::new(1000.0, 600.0) },
        }
    }

    #[test]
    fn the_bar_is_round_and_to_scale() {
        // 25 m pixels at 10 px/mm: 250 m a millimetre.
        let place = Place::plane([25.0, 25.0], 0.0, Body::earth()).expect("a place");
        let bar = scale_bar(&sheet(), &place).expect("a bar");
        assert_eq!(bar.label, "5 km");
        assert_close!(bar.length_mm, 20.0, 1e-9);
        let pixels = scale_bar(&sheet(), &Place::pixels(0.0)).expect("a bar");
        assert_eq!((pixels.label.as_str(), pixels.length_mm.round()), ("200 px", 20.0));
        assert_eq!([430.0, 0.55, 9999.0, 0.0].map(round_length), [400.0, 0.5, 8000.0, 0.0]);
    }

    #[test]
    fn north_turns_with_the_raster() {
        let place = Place::plane([25.0, 25.0], 90.0, Body::earth()).expect("a place");
        let north = north(&sheet(), &place, Point::new(500.0, 300.0)).expect("north");
        assert_close!(north.x, -1.0, 1e-12, "image-up is east, so north is left");
    }
}

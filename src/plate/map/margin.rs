//! The printed-map margin: neat line, graticule ticks with true longitudes and latitudes where the
//! raster is georeferenced, metres or pixels where it is not.

use crate::ground::{Frame, LengthUnit, Place, Point};

use super::view::Sheet;
use crate::plate::sketch::{Sketch, Type};
use crate::plate::{TextAnchor, Theme, font, numbers};

/// Room the margin takes outside the frame: left, top, right, bottom.
pub(super) const ROOM: [f64; 4] = [5.2, 1.6, 1.6, 4.6];

/// A graticule line crossing the frame.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Tick {
    pub at: Point,
    pub label: String,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Side {
    Left,
    Top,
    Right,
    Bottom,
}

const SIDES: [Side; 4] = [Side::Left, Side::Top, Side::Right, Side::Bottom];

/// What is read off along the frame.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Reading {
    Longitude,
    Latitude,
    /// Along columns or rows from the raster's corner, metres or pixels.
    Column,
    Row,
}

/// Samples along one side between which crossings are looked for.
const SAMPLES: usize = 240;

pub(super) fn draw(sketch: &mut Sketch, sheet: &Sheet, place: &Place, theme: &Theme) {
    let line = theme.stroke(theme.ink, theme.widths.thin);
    sketch.rectangle(sheet.min, sheet.max, None, Some(line));
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    for side in SIDES {
        let ticks = ticks(sheet, place, side);
        let mut free = f64::NEG_INFINITY;
        for tick in ticks {
            let (out, reach) = (outward(side), 1.1);
            let end = Point::new(tick.at.x + reach * out.x, tick.at.y + reach * out.y);
            sketch.line(tick.at, end, line);
            let half = 0.5 * font::text_width(&tick.label, look.size_mm, false);
            let along = if side == Side::Bottom { tick.at.x } else { tick.at.y };
            if along - half < free {
                continue;
            }
            match side {
                Side::Bottom => {
                    let x = tick.at.x.clamp(sheet.min.x + half - 3.0, sheet.max.x - half + 1.0);
                    sketch.text(Point::new(x, sheet.max.y + 1.5 + look.size_mm), tick.label, look);
                }
                Side::Left => {
                    let y = tick.at.y.clamp(sheet.min.y + half - 1.0, sheet.max.y - half + 3.0);
                    sketch.turned_text(Point::new(sheet.min.x - 1.9, y), tick.label, look, -90.0);
                }
                Side::Top | Side::Right => continue,
            }
            free = along + half + 2.0;
        }
    }
}

fn outward(side: Side) -> Point {
    match side {
        Side::Left => Point::new(-1.0, 0.0),
        Side::Top => Point::new(0.0, -1.0),
        Side::Right => Point::new(1.0, 0.0),
        Side::Bottom => Point::new(0.0, 1.0),
    }
}

/// The point at `share` along a side, left to right or top to bottom.
fn on_side(sheet: &Sheet, side: Side, share: f64) -> Point {
    let (x, y) = (sheet.min.x + share * sheet.width(), sheet.min.y + share * sheet.height());
    match side {
        Side::Left => Point::new(sheet.min.x, y),
        Side::Right => Point::new(sheet.max.x, y),
        Side::Top => Point::new(x, sheet.min.y),
        Side::Bottom => Point::new(x, sheet.max.y),
    }
}

/// The value read at a place on the page; longitudes follow `near` without jumps.
fn read(sheet: &Sheet, place: &Place, reading: Reading, at: Point, near: Option<f64>) -> Option<f64> {
    let pixel = sheet.pixel(at);
    match reading {
        Reading::Latitude => place.lonlat_of(pixel).map(|p| p.lat),
        Reading::Longitude => place.lonlat_of(pixel).map(|p| match near {
            Some(near) => p.lon + 360.0 * ((near - p.lon) / 360.0).round(),
            None => p.lon,
        }),
        Reading::Column => Some(pixel.x * step_size(place)[0]),
        Reading::Row => Some(pixel.y * step_size(place)[1]),
    }
}

/// Metres, or pixels, of one column and one row where there is no georeference.
fn step_size(place: &Place) -> [f64; 2] {
    match place.frame {
        Frame::Plane { .. } => {
            let a = &place.affine;
            [a.a.hypot(a.d), a.b.hypot(a.e)]
        }
        _ => [1.0, 1.0],
    }
}

/// Where round values cross one side, in order along it.
fn ticks(sheet: &Sheet, place: &Place, side: Side) -> Vec<Tick> {
    let level = matches!(side, Side::Top | Side::Bottom);
    let reading = match (place.is_georeferenced(), level) {
        (false, true) => Reading::Column,
        (false, false) => Reading::Row,
        // The reading that changes more along the level sides; the other one upright.
        (true, level) if level == longitude_is_level(sheet, place) => Reading::Longitude,
        (true, _) => Reading::Latitude,
    };
    let mut samples: Vec<(f64, Option<f64>)> = Vec::with_capacity(SAMPLES + 1);
    let mut near = None;
    for i in 0..=SAMPLES {
        let share = i as f64 / SAMPLES as f64;
        let value = read(sheet, place, reading, on_side(sheet, side, share), near);
        near = value.or(near);
        samples.push((share, value));
    }
    let length = if level { sheet.width() } else { sheet.height() };
    let Some(step) = step(&samples, length) else { return Vec::new() };
    let mut found = Vec::new();
    for pair in samples.windows(2) {
        let (&(from, Some(a)), &(to, Some(b))) = (&pair[0], &pair[1]) else { continue };
        let (first, last) = ((a.min(b) / step).ceil() as i64, (a.max(b) / step).floor() as i64);
        // More than a few lines between two samples: a pole lies on the frame.
        for k in (first..=last).take(4) {
            let value = k as f64 * step;
            if value == b && to < 1.0 {
                continue;
            }
            let share = crossing(sheet, place, reading, side, (from, a), (to, b), value);
            found.push((share, value));
        }
    }
    found.sort_by(|x, y| x.0.total_cmp(&y.0));
    found
        .into_iter()
        .map(|(share, value)| Tick {
            at: on_side(sheet, side, share),
            label: label(value, reading, place, step),
        })
        .collect()
}

/// Bisection to a thousandth of the line's width on any page.
fn crossing(
    sheet: &Sheet,
    place: &Place,
    reading: Reading,
    side: Side,
    (mut from, a): (f64, f64),
    (mut to, b): (f64, f64),
    value: f64,
) -> f64 {
    let rising = b > a;
    for _ in 0..24 {
        let middle = 0.5 * (from + to);
        let Some(read) = read(sheet, place, reading, on_side(sheet, side, middle), Some(a)) else { break };
        if (read < value) == rising { from = middle } else { to = middle }
    }
    0.5 * (from + to)
}

/// Whether longitude changes more along the level sides than along the upright ones.
fn longitude_is_level(sheet: &Sheet, place: &Place) -> bool {
    let change = |a: Point, b: Point| -> f64 {
        let lon = |p| place.lonlat_of(sheet.pixel(p)).map(|l| l.lon);
        lon(a).zip(lon(b)).map_or(0.0, |(a, b)| ((b - a + 540.0).rem_euclid(360.0) - 180.0).abs())
    };
    let middle = |side| on_side(sheet, side, 0.5);
    let level = change(middle(Side::Left), middle(Side::Right)) / sheet.width();
    let upright = change(middle(Side::Top), middle(Side::Bottom)) / sheet.height();
    level >= upright
}

/// A round step that gives a tick every 25 to 60 mm.
fn step(samples: &[(f64, Option<f64>)], length_mm: f64) -> Option<f64> {
    let values = || samples.iter().filter_map(|s| s.1);
    let (low, high) = values().fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)));
    let range = high - low;
    if !(range > 0.0 && range.is_finite()) {
        return None;
    }
    let wanted = (length_mm / 28.0).max(2.0);
    Some(numbers::round_down(range / wanted * 1.2))
}

fn label(value: f64, reading: Reading, place: &Place, step: f64) -> String {
    let decimals = (-step.log10().floor()).clamp(0.0, 6.0) as usize;
    match reading {
        Reading::Latitude | Reading::Longitude => {
            let value = match reading {
                Reading::Longitude => (value + 180.0).rem_euclid(360.0) - 180.0,
                _ => value,
            };
            let text = numbers::fixed(value.abs(), decimals);
            let letter = match (reading, value) {
                (_, v) if v.abs() < 0.5 * step => "",
                (Reading::Longitude, v) if v > 0.0 => " E",
                (Reading::Longitude, _) => " W",
                (_, v) if v > 0.0 => " N",
                _ => " S",
            };
            format!("{text}°{letter}")
        }
        Reading::Column | Reading::Row => match place.unit() {
            LengthUnit::Metre if value >= 10_000.0 => format!("{} km", numbers::plain(value / 1000.0, 3)),
            unit => format!("{} {}", numbers::plain(value, 3), unit.symbol()),
        },
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::{Affine, Body, Bounds, LatitudeKind};

    fn sheet(width: f64, height: f64) -> Sheet {
        Sheet {
            min: Point::new(10.0, 10.0),
            max: Point::new(110.0, 110.0),
            covers: Bounds { min: Point::new(0.0, 0.0), max: Point::new(width, height) },
        }
    }

    #[test]
    fn ticks_stand_where_the_degree_lines_cross() {
        // 0.01° pixels from 20° E, 5° N.
        let affine = Affine { a: 0.01, b: 0.0, c: 20.0, d: 0.0, e: -0.01, f: 5.0 };
        let place = Place::new(
            affine,
            Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::default() },
            Body::earth(),
        )
        .expect("a place");
        let sheet = sheet(1000.0, 1000.0);
        let bottom = ticks(&sheet, &place, Side::Bottom);
        assert!(bottom.len() >= 3, "{bottom:?}");
        for tick in &bottom {
            let lon: f64 = tick.label.trim_end_matches("° E").parse().expect("a longitude");
            assert_close!(tick.at.x, 10.0 + (lon - 20.0) * 10.0, 1e-3, "{}", tick.label);
        }
        assert!(ticks(&sheet, &place, Side::Left).iter().any(|t| t.label == "0°"), "the equator");
    }

    #[test]
    fn longitudes_run_across_the_antimeridian() {
        let affine = Affine { a: 0.01, b: 0.0, c: 175.0, d: 0.0, e: -0.01, f: 5.0 };
        let place = Place::new(
            affine,
            Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::default() },
            Body::earth(),
        )
        .expect("a place");
        let labels: Vec<String> =
            ticks(&sheet(1000.0, 1000.0), &place, Side::Bottom).into_iter().map(|t| t.label).collect();
        assert!(
            labels.iter().any(|l| l.ends_with('W')) && labels.iter().any(|l| l.ends_with('E')),
            "{labels:?}"
        );
    }

    #[test]
    fn without_georeference_the_margin_counts_pixels_or_metres() {
        let sheet = sheet(1000.0, 1000.0);
        let labels = |place: &Place| -> Vec<String> {
            ticks(&sheet, place, Side::Bottom).into_iter().map(|t| t.label).collect()
        };
        let pixels = labels(&Place::pixels(0.0));
        assert!(pixels.contains(&"200 px".to_owned()), "{pixels:?}");
        let plane = Place::plane([25.0, 25.0], 40.0, Body::earth()).expect("a place");
        assert!(labels(&plane).iter().any(|l| l.ends_with("km")), "{:?}", labels(&plane));
    }
}

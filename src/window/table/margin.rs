//! The printed-map margin as numbers: where the ticks stand and what they say, where north is, how
//! long the scale bar is. Found by walking the visible frame's edge, so that it holds in any
//! projection and in rotated rasters.

use egui::{Pos2, Rect, Vec2, pos2};

use crate::ground::{Frame, LengthUnit, LonLat, Place, Point};

use super::lens::Lens;

/// Points between samples along an edge.
const SAMPLE: f32 = 6.0;
/// Least distance of labelled ticks, points.
const LABEL_APART: f64 = 92.0;
/// Lines of one family that are looked for inside the frame.
const MOST_LINES: f64 = 64.0;
/// Longest scale bar, points; the shortest is two fifths of it.
const LONGEST_BAR: f64 = 160.0;

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    Top,
    Bottom,
    Left,
    Right,
}

/// What a family of ticks counts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    Longitude,
    Latitude,
    /// Map coordinates, metres.
    Easting,
    Northing,
    Column,
    Row,
}

/// A tick on the frame.
#[derive(Clone, Debug, PartialEq)]
pub struct Tick {
    pub side: Side,
    pub at: Pos2,
    /// Unit vector along the line of constant value, pointing into the frame.
    pub inward: Vec2,
    pub label: String,
}

/// The ticks round the frame, and the graticule they belong to.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Graticule {
    pub ticks: Vec<Tick>,
    /// Where two labelled lines cross within the frame.
    pub crosses: Vec<Cross>,
}

/// A crossing, with unit vectors along both lines.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cross {
    pub at: Pos2,
    pub arms: [Vec2; 2],
}

/// A bar of round length.
#[derive(Clone, Debug, PartialEq)]
pub struct ScaleBar {
    /// Screen points.
    pub length: f32,
    pub label: String,
}

impl Side {
    pub const ALL: [Self; 4] = [Self::Top, Self::Bottom, Self::Left, Self::Right];

    pub fn is_level(self) -> bool {
        matches!(self, Self::Top | Self::Bottom)
    }

    /// Ends of the side on `frame`, left to right or top to bottom.
    fn ends(self, frame: Rect) -> (Pos2, Pos2) {
        match self {
            Self::Top => (frame.left_top(), frame.right_top()),
            Self::Bottom => (frame.left_bottom(), frame.right_bottom()),
            Self::Left => (frame.left_top(), frame.left_bottom()),
            Self::Right => (frame.right_top(), frame.right_bottom()),
        }
    }

    /// Unit vector out of the frame.
    pub fn outward(self) -> Vec2 {
        match self {
            Self::Top => Vec2::UP,
            Self::Bottom => Vec2::DOWN,
            Self::Left => Vec2::LEFT,
            Self::Right => Vec2::RIGHT,
        }
    }
}

impl Quantity {
    /// The two quantities of a place: the one that counts across, the one that counts along.
    fn pair(place: &Place) -> [Self; 2] {
        match place.frame {
            Frame::Projected { .. } | Frame::Geographic { .. } => [Self::Longitude, Self::Latitude],
            Frame::Plane { .. } => [Self::Easting, Self::Northing],
            Frame::Pixels { .. } => [Self::Column, Self::Row],
        }
    }

    fn at(self, place: &Place, pixel: Point) -> Option<f64> {
        match self {
            Self::Longitude => place.lonlat_of(pixel).map(|at| at.lon),
            Self::Latitude => place.lonlat_of(pixel).map(|at| at.lat),
            Self::Easting => Some(place.map_of(pixel).x),
            Self::Northing => Some(place.map_of(pixel).y),
            Self::Column => Some(pixel.x),
            Self::Row => Some(pixel.y),
        }
    }

    /// The pixel where this quantity is `x` and its partner `y`.
    fn pixel_of(self, place: &Place, x: f64, y: f64, near: Point) -> Option<Point> {
        match self {
            Self::Longitude | Self::Latitude => place.pixel_of_lonlat(LonLat { lon: x, lat: y }, near),
            Self::Easting | Self::Northing => place.pixel_of_map(Point::new(x, y)),
            Self::Column | Self::Row => Some(Point::new(x, y)),
        }
    }

    fn is_angle(self) -> bool {
        matches!(self, Self::Longitude | Self::Latitude)
    }

    /// `value` as the margin writes it; `step` decides the decimals.
    fn label(self, value: f64, step: f64) -> String {
        let decimals = |step: f64| (-step.log10()).ceil().clamp(0.0, 9.0) as usize;
        match self {
            Self::Longitude => {
                let lon = (value + 180.0).rem_euclid(360.0) - 180.0;
                let half = if lon.abs() < 1e-12 || lon <= -180.0 {
                    ""
                } else if lon > 0.0 {
                    " E"
                } else {
                    " W"
                };
                format!("{:.*}°{half}", decimals(step), lon.abs())
            }
            Self::Latitude => {
                let half = if value.abs() < 1e-12 {
                    ""
                } else if value > 0.0 {
                    " N"
                } else {
                    " S"
                };
                format!("{:.*}°{half}", decimals(step), value.abs())
            }
            // A value counted from the map's origin may be −0.
            Self::Easting | Self::Northing if step >= 1000.0 => format!("{:.0} km", value / 1000.0 + 0.0),
            Self::Easting | Self::Northing => format!("{:.*} m", decimals(step), value + 0.0),
            Self::Column | Self::Row => format!("{:.*}", decimals(step), value + 0.0),
        }
    }
}

/// The margin of the frame. Opposite sides count the same quantity: the one that changes most along
/// them.
pub fn graticule(place: &Place, lens: &Lens) -> Graticule {
    let walks = Side::ALL.map(|side| {
        let samples = walk(side, lens.frame);
        Quantity::pair(place).map(|quantity| (quantity, values(quantity, place, lens, &samples)))
    });
    let change = |side: usize, which: usize| total_change(&walks[side][which].1);
    // Straight: across on the level sides. Turned (the raster lies on its side): the other way.
    let straight = (change(0, 0) + change(1, 0)) * (change(2, 1) + change(3, 1));
    let turned = (change(0, 1) + change(1, 1)) * (change(2, 0) + change(3, 0));
    let first = usize::from(turned > straight);
    let mut ticks = Vec::new();
    let mut steps = [None; 2];
    for (index, side) in Side::ALL.into_iter().enumerate() {
        let which = if side.is_level() { first } else { 1 - first };
        let partner = if index % 2 == 0 { index + 1 } else { index - 1 };
        let length = if side.is_level() { lens.frame.width() } else { lens.frame.height() };
        let rate = 0.5 * (change(index, which) + change(partner, which)) / f64::from(length.max(1.0));
        let (quantity, values) = &walks[index][which];
        let Some(step) = round_up(rate * LABEL_APART, quantity.is_angle()) else { continue };
        steps[which] = Some(step);
        for (t, multiple) in crossings(values, step) {
            let (from, to) = side.ends(lens.frame);
            let at = from + (to - from) * (t / (values.len() - 1) as f64) as f32;
            let along = line_direction(*quantity, place, lens, at).unwrap_or(side.outward());
            let inward = if along.dot(side.outward()) > 0.0 { -along } else { along };
            ticks.push(Tick { side, at, inward, label: quantity.label(multiple as f64 * step, step) });
        }
    }
    let crosses = match steps {
        [Some(a), Some(b)] => crosses(place, lens, [a, b], &walks),
        _ => Vec::new(),
    };
    Graticule { ticks, crosses }
}

/// A quantity and its values along one side.
type Walk = (Quantity, Vec<Option<f64>>);

/// Crossings of the two families of lines, found by going back from value to pixel.
fn crosses(place: &Place, lens: &Lens, steps: [f64; 2], walks: &[[Walk; 2]; 4]) -> Vec<Cross> {
    // The lines that pass some side; a line that closes inside the frame (round a pole) is left out.
    let multiples = |which: usize| {
        let seen = walks.iter().flat_map(|pair| pair[which].1.iter().flatten());
        let (low, high) = seen.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(*v), h.max(*v)));
        let range = (low / steps[which]).ceil()..=(high / steps[which]).floor();
        let count = (range.end() - range.start() + 1.0).clamp(0.0, MOST_LINES) as usize;
        (0..count).map(move |i| (range.start() + i as f64) * steps[which])
    };
    let [first, second] = Quantity::pair(place);
    let mut found = Vec::new();
    for x in multiples(0) {
        for y in multiples(1) {
            let Some(pixel) = first.pixel_of(place, x, y, lens.centre) else { continue };
            let at = lens.to_screen(pixel);
            if !lens.frame.shrink(8.0).contains(at) {
                continue;
            }
            let arms = [first, second].map(|quantity| line_direction(quantity, place, lens, at));
            if let [Some(a), Some(b)] = arms {
                found.push(Cross { at, arms: [a, b] });
            }
        }
    }
    found
}

/// Screen unit vector to true north at the middle of the frame; `None` where there is no north.
pub fn north(place: &Place, lens: &Lens) -> Option<Vec2> {
    let (dcol, drow) = place.local_frame(lens.centre)?.pixel(0.0, 1.0);
    let (x, y) = (dcol * lens.per_col, drow * lens.per_row);
    let length = x.hypot(y);
    (length.is_finite() && length > 0.0).then(|| Vec2::new((x / length) as f32, (y / length) as f32))
}

/// A level bar of round ground length at the middle of the frame.
pub fn scale_bar(place: &Place, lens: &Lens) -> Option<ScaleBar> {
    let per_point = place.local_frame(lens.centre)?.length(1.0 / lens.per_col, 0.0);
    let longest = per_point * LONGEST_BAR;
    let decade = 10f64.powf(longest.log10().floor());
    let length = [5.0, 2.0, 1.0].into_iter().map(|m| m * decade).find(|l| *l <= longest)?;
    let label = match place.unit() {
        LengthUnit::Pixel => format!("{} px", number(length)),
        LengthUnit::Metre if length >= 1000.0 => format!("{} km", number(length / 1000.0)),
        LengthUnit::Metre => format!("{} m", number(length)),
    };
    Some(ScaleBar { length: (length / per_point) as f32, label })
}

/// A round number without needless decimals.
fn number(value: f64) -> String {
    let decimals = (-value.log10()).ceil().clamp(0.0, 9.0) as usize;
    format!("{value:.decimals$}")
}

fn walk(side: Side, frame: Rect) -> Vec<Pos2> {
    let (from, to) = side.ends(frame);
    let steps = ((to - from).length() / SAMPLE).ceil().max(8.0) as usize;
    (0..=steps).map(|i| from + (to - from) * (i as f32 / steps as f32)).collect()
}

/// Values along a walk; longitudes run on past ±180°.
fn values(quantity: Quantity, place: &Place, lens: &Lens, walk: &[Pos2]) -> Vec<Option<f64>> {
    let mut last: Option<f64> = None;
    walk.iter()
        .map(|at| {
            let mut value = quantity.at(place, lens.to_pixel(*at)).filter(|v| v.is_finite())?;
            if let (Quantity::Longitude, Some(last)) = (quantity, last) {
                value += 360.0 * ((last - value) / 360.0).round();
            }
            last = Some(value);
            Some(value)
        })
        .collect()
}

fn total_change(values: &[Option<f64>]) -> f64 {
    values.windows(2).filter_map(|pair| Some((pair[1]? - pair[0]?).abs())).sum()
}

/// Where the values pass a multiple of `step`: position in samples, and which multiple.
fn crossings(values: &[Option<f64>], step: f64) -> Vec<(f64, i64)> {
    let mut found = Vec::new();
    for (i, pair) in values.windows(2).enumerate() {
        let (Some(a), Some(b)) = (pair[0], pair[1]) else { continue };
        let (low, high) = (a.min(b) / step, a.max(b) / step);
        let mut multiple = low.ceil();
        // Half open, so that a value exactly on a sample is found once.
        while multiple < high {
            found.push((i as f64 + (multiple * step - a) / (b - a), multiple as i64));
            multiple += 1.0;
        }
    }
    found
}

/// The smallest round step ≥ `value`: 1, 2, 5 × 10ⁿ; angles above 5° go 10, 15, 30, 45, 90.
fn round_up(value: f64, angle: bool) -> Option<f64> {
    if !(value.is_finite() && value > 0.0) {
        return None;
    }
    if angle && value > 5.0 {
        return [10.0, 15.0, 30.0, 45.0, 90.0].into_iter().find(|step| *step >= value);
    }
    let decade = 10f64.powf(value.log10().floor());
    let step = [1.0, 2.0, 5.0, 10.0].into_iter().map(|m| m * decade).find(|s| *s >= value * (1.0 - 1e-9));
    Some(step.unwrap_or(10.0 * decade))
}

/// Unit screen vector along the line of constant `quantity` through `at`.
fn line_direction(quantity: Quantity, place: &Place, lens: &Lens, at: Pos2) -> Option<Vec2> {
    const H: f32 = 2.0;
    let value = |dx: f32, dy: f32| quantity.at(place, lens.to_pixel(pos2(at.x + dx, at.y + dy)));
    let difference = |a: Option<f64>, b: Option<f64>| -> Option<f64> {
        let d = a? - b?;
        Some(if quantity == Quantity::Longitude { d - 360.0 * (d / 360.0).round() } else { d })
    };
    let gx = difference(value(H, 0.0), value(-H, 0.0))?;
    let gy = difference(value(0.0, H), value(0.0, -H))?;
    let length = gx.hypot(gy);
    // At right angles to the gradient.
    (length > 0.0).then(|| Vec2::new((-gy / length) as f32, (gx / length) as f32))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::{Affine, Body, LatitudeKind};
    use egui::vec2;

    const DEGREES: Frame = Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::Planetographic };

    fn lens(centre: Point, scale: f64) -> Lens {
        Lens::new(Rect::from_min_size(pos2(0.0, 0.0), vec2(800.0, 600.0)), centre, scale, 1.0)
    }

    /// 0.01° pixels from 10° E 20° N.
    fn geographic() -> Place {
        let affine = Affine { a: 0.01, b: 0.0, c: 10.0, d: 0.0, e: -0.01, f: 20.0 };
        Place::new(affine, DEGREES, Body::earth()).expect("a place")
    }

    fn ticks_of(place: &Place, lens: &Lens) -> Vec<Tick> {
        graticule(place, lens).ticks
    }

    #[test]
    fn crosses_stand_where_lines_meet() {
        let lens = lens(Point::new(450.0, 300.0), 1.0);
        let crosses = graticule(&geographic(), &lens).crosses;
        // Eight meridians and five parallels, less those that meet on the frame itself.
        assert!((30..=40).contains(&crosses.len()), "{}", crosses.len());
        for cross in crosses {
            let at = geographic().lonlat_of(lens.to_pixel(cross.at)).expect("on the body");
            assert_close!(at.lon, at.lon.round(), 1e-4, "longitude of {cross:?}");
            assert_close!(at.lat, at.lat.round(), 1e-4, "latitude of {cross:?}");
            assert_close!(f64::from(cross.arms[0].dot(cross.arms[1])), 0.0, 1e-6, "right angles");
        }
    }

    fn labels(ticks: &[Tick], side: Side) -> Vec<&str> {
        ticks.iter().filter(|t| t.side == side).map(|t| t.label.as_str()).collect()
    }

    #[test]
    fn ticks_stand_on_round_degrees() {
        // 8° across 800 points: one degree is 100 points.
        let lens = lens(Point::new(450.0, 310.0), 1.0);
        let ticks = ticks_of(&geographic(), &lens);
        assert_eq!(
            labels(&ticks, Side::Top),
            ["11° E", "12° E", "13° E", "14° E", "15° E", "16° E", "17° E", "18° E"]
        );
        assert_eq!(labels(&ticks, Side::Left), ["19° N", "18° N", "17° N", "16° N", "15° N", "14° N"]);
        for tick in &ticks {
            let pixel = lens.to_pixel(tick.at);
            let at = geographic().lonlat_of(pixel).expect("on the body");
            let value = if tick.side.is_level() { at.lon } else { at.lat };
            assert_close!(value, value.round(), 1e-4, "{tick:?}");
        }
    }

    #[test]
    fn labels_get_the_decimals_they_need() {
        let close = lens(Point::new(1200.0, 300.0), 200.0);
        // 4 columns of 0.01° over 800 points.
        let ticks = ticks_of(&geographic(), &close);
        assert_eq!(labels(&ticks, Side::Bottom)[..2], ["21.980° E", "21.985° E"]);
        assert_eq!(Quantity::Longitude.label(190.0, 10.0), "170° W");
        assert_eq!(Quantity::Longitude.label(-0.0, 1.0), "0°");
        assert_eq!(Quantity::Latitude.label(-12.5, 0.5), "12.5° S");
        assert_eq!(Quantity::Easting.label(-3000.0, 1000.0), "-3 km");
    }

    #[test]
    fn longitude_runs_on_across_the_date_line() {
        let affine = Affine { a: 0.01, b: 0.0, c: 176.0, d: 0.0, e: -0.01, f: 4.0 };
        let place = Place::new(affine, DEGREES, Body::earth()).expect("a place");
        let ticks = ticks_of(&place, &lens(Point::new(400.0, 300.0), 1.0));
        let top = labels(&ticks, Side::Top);
        assert!(top.windows(2).any(|w| w == ["180°", "179° W"]), "{top:?}");
    }

    #[test]
    fn a_raster_on_its_side_swaps_the_sides() {
        // Columns run north, rows run east.
        let affine = Affine { a: 0.0, b: 0.01, c: 10.0, d: 0.01, e: 0.0, f: 20.0 };
        let place = Place::new(affine, DEGREES, Body::earth()).expect("a place");
        let lens = lens(Point::new(400.0, 300.0), 1.0);
        let ticks = ticks_of(&place, &lens);
        assert!(labels(&ticks, Side::Top).iter().all(|l| l.ends_with('N')), "{ticks:?}");
        assert!(labels(&ticks, Side::Left).iter().all(|l| l.ends_with('E')), "{ticks:?}");
        let north = north(&place, &lens).expect("a north");
        assert_close!(f64::from((north - vec2(1.0, 0.0)).length()), 0.0, 1e-6, "north is to the right");
    }

    #[test]
    fn ticks_lean_with_the_meridians() {
        // Image-up is 20° east of north in map space: meridians lean.
        let (sin, cos) = 20f64.to_radians().sin_cos();
        let affine = Affine { a: 0.01 * cos, b: 0.01 * sin, c: 10.0, d: 0.01 * sin, e: -0.01 * cos, f: 1.0 };
        let place = Place::new(affine, DEGREES, Body::earth()).expect("a place");
        let lens = lens(Point::new(400.0, 300.0), 1.0);
        let tick = ticks_of(&place, &lens).into_iter().find(|t| t.side == Side::Top).expect("a tick");
        let lean = f64::from(tick.inward.x.atan2(tick.inward.y)).to_degrees();
        assert_close!(lean.abs(), 20.0, 0.3, "lean of {tick:?}");
        assert!(tick.inward.y > 0.0, "into the frame: {tick:?}");
    }

    #[test]
    fn pixels_and_planes_have_plain_numbers() {
        let at = lens(Point::new(400.0, 300.0), 1.0);
        let pixel_ticks = ticks_of(&Place::pixels(0.0), &at);
        assert_eq!(labels(&pixel_ticks, Side::Top)[..3], ["0", "100", "200"]);
        assert_eq!(labels(&pixel_ticks, Side::Left)[..3], ["0", "100", "200"]);
        let plane = Place::plane([50.0, 50.0], 0.0, Body::earth()).expect("a plane");
        let plane_ticks = ticks_of(&plane, &at);
        assert_eq!(labels(&plane_ticks, Side::Bottom)[..3], ["0 km", "5 km", "10 km"]);
    }

    #[test]
    fn the_bar_has_a_round_length_near_its_aim() {
        let plane = Place::plane([7.3, 7.3], 33.0, Body::earth()).expect("a plane");
        for scale in [0.01, 0.037, 0.2, 1.0, 9.0, 64.0] {
            let lens = lens(Point::new(0.0, 0.0), scale);
            let bar = scale_bar(&plane, &lens).expect("a bar");
            assert!((60.0..=160.0).contains(&bar.length), "{bar:?} at {scale}");
            let (value, unit) = bar.label.split_once(' ').expect("number and unit");
            let metres = value.parse::<f64>().expect("a number") * if unit == "km" { 1000.0 } else { 1.0 };
            // The bar's length on the screen times metres a point.
            assert_close!(f64::from(bar.length) * 7.3 / scale, metres, 1e-3 * metres, "{bar:?}");
            let mantissa = metres / 10f64.powf(metres.log10().floor());
            assert!([1.0, 2.0, 5.0, 10.0].iter().any(|m| (mantissa - m).abs() < 1e-6), "{bar:?}");
        }
    }

    #[test]
    fn north_turns_with_the_raster() {
        let lens = lens(Point::new(0.0, 0.0), 1.0);
        for deg in [0.0, 30.0, 200.0] {
            // Image-up points to `deg`, so north lies `deg` counter-clockwise of up.
            let north = north(&Place::pixels(deg), &lens).expect("a north");
            let angle = f64::from(north.x).atan2(f64::from(-north.y)).to_degrees();
            assert_close!((angle + deg + 180.0).rem_euclid(360.0), 180.0, 1e-4, "north when up is {deg}°");
        }
    }
}

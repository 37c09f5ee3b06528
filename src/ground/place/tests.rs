//! Places: round trips, frames against geodesics, what the user overrides.

use super::*;
use crate::assert_close;
use proptest::prelude::*;

const SMALL: BodyShape = BodyShape { equatorial_m: 1_420_000.0, polar_m: 1_420_000.0 };

fn projected(definition: &str, shape: BodyShape, affine: Affine) -> Place {
    let full = format!("{definition} +a={} +b={}", shape.equatorial_m, shape.polar_m);
    let projection = Projection::new(&full, shape).expect("usable");
    Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, Body::unnamed(shape)).expect("place")
}

fn geographic(affine: Affine, shape: BodyShape, latitude: LatitudeKind) -> Place {
    Place::new(affine, Frame::Geographic { unit_deg: 1.0, latitude }, Body::unnamed(shape)).expect("place")
}

/// Frame steps against short geodesics between the pixel's neighbours.
fn frame_error(place: &Place, pixel: Point, step: f64) -> (f64, f64) {
    let frame = place.local_frame(pixel).expect("frame");
    let (mut turn, mut stretch) = (0.0f64, 0.0f64);
    for (dc, dr) in [(1.0, 0.0), (0.0, 1.0), (0.6, -0.8)] {
        let end = |sign: f64| {
            let (c, r) = (pixel.x + 0.5 * sign * step * dc, pixel.y + 0.5 * sign * step * dr);
            place.lonlat_of(Point::new(c, r)).expect("inside")
        };
        let line = place.body.shape.geodesic(end(-1.0), end(1.0));
        let middle = line.azimuth.rotated(0.5 * line.back_azimuth.reversed().turn_from(line.azimuth));
        turn = turn.max(frame.azimuth(dc, dr).turn_from(middle).abs());
        stretch = stretch.max((step * frame.length(dc, dr) / line.length_m - 1.0).abs());
    }
    (turn, stretch)
}

#[test]
fn image_up_points_to_the_stated_north() {
    let place = Place::pixels(30.0);
    let frame = place.local_frame(Point::new(5.0, 5.0)).expect("pixels have a frame");
    assert_close!(frame.azimuth(0.0, -1.0).deg(), 30.0, 1e-12, "up");
    assert_close!(frame.azimuth(1.0, 0.0).deg(), 120.0, 1e-12, "right");
    assert!(!frame.is_mirrored());
}

#[test]
fn pixel_and_ground_steps_invert() {
    let frame = Place::plane([2.0, 3.0], 17.0, Body::earth())
        .map(|place| place.local_frame(Point::new(0.0, 0.0)))
        .expect("place")
        .expect("frame");
    let (e, n) = frame.ground(1.5, -2.5);
    let (c, r) = frame.pixel(e, n);
    assert_close!(c, 1.5, 1e-12, "column");
    assert_close!(r, -2.5, 1e-12, "row");
}

#[test]
fn a_raster_from_zero_to_a_full_turn_finds_both_halves() {
    // 1° pixels, column 0 at longitude 0, on both kinds of frame.
    let degree = Affine { a: 1.0, b: 0.0, c: 0.0, d: 0.0, e: -1.0, f: 90.0 };
    let metre = SMALL.equatorial_m.to_radians();
    let plate = Affine { a: metre, b: 0.0, c: 0.0, d: 0.0, e: -metre, f: 90.0 * metre };
    let centre = Point::new(180.0, 90.0);
    for place in
        [geographic(degree, SMALL, LatitudeKind::Planetographic), projected("+proj=eqc", SMALL, plate)]
    {
        let at = place.lonlat_of(Point::new(270.5, 40.0)).expect("inside");
        assert_close!(at.lon, -89.5, 1e-9, "longitude");
        let back = place.pixel_of_lonlat(at, centre).expect("inside");
        assert_close!(back.x, 270.5, 1e-7, "column");
        assert_close!(back.y, 40.0, 1e-7, "row");
        let frame = place.local_frame(Point::new(180.0, 90.0)).expect("the antimeridian has a frame");
        assert_close!(frame.azimuth(1.0, 0.0).deg(), 90.0, 1e-6, "east at the antimeridian");
    }
}

#[test]
fn over_the_antimeridian_in_a_projection() {
    let affine = Affine { a: 100.0, b: 0.0, c: -5e4, d: 0.0, e: -100.0, f: 5e4 };
    let place = projected("+proj=tmerc +lon_0=180", Body::mars().shape, affine);
    for col in [0.0, 499.99, 500.0, 500.01, 1000.0] {
        let pixel = Point::new(col, 300.0);
        let at = place.lonlat_of(pixel).expect("inside");
        let back = place.pixel_of_lonlat(at, Point::new(500.0, 500.0)).expect("inside");
        assert_close!(back.distance(pixel), 0.0, 1e-5, "column {col}");
        let (turn, stretch) = frame_error(&place, pixel, 1.0);
        assert!(turn < 1e-4 && stretch < 1e-6, "column {col}: {turn}° {stretch}");
    }
}

#[test]
fn frames_reach_the_pole() {
    let affine = Affine { a: 1.0, b: 0.0, c: -100.0, d: 0.0, e: -1.0, f: 100.0 };
    let place = projected("+proj=stere +lat_0=90 +lon_0=0", SMALL, affine);
    // South of the pole on the central meridian, image-up is north; beyond the pole, south.
    let below = place.local_frame(Point::new(100.0, 100.5)).expect("half a metre from the pole");
    assert_close!(
        below.azimuth(0.0, -1.0).turn_from(crate::ground::Azimuth::from_deg(0.0)),
        0.0,
        1e-3,
        "below"
    );
    let beyond = place.local_frame(Point::new(100.0, 80.0)).expect("twenty metres beyond");
    assert_close!(beyond.azimuth(0.0, -1.0).deg(), 180.0, 1e-3, "beyond");
    assert_close!(beyond.pixel_area(), 1.0, 1e-6, "area");
}

#[test]
fn the_user_overrides_in_order() {
    let affine = Affine { a: 10.0, b: 0.0, c: 0.0, d: 0.0, e: -10.0, f: 0.0 };
    let file = projected("+proj=eqc", Body::mars().shape, affine);
    let halvane = Body::halvane();

    let kept = Place::settled(Some(&file), None, Some(45.0), Some(&halvane)).expect("settled");
    assert_eq!(kept.frame, file.frame, "a file that knows north keeps it");
    assert_eq!((kept.body.name.as_str(), kept.body.shape), ("Halvane", file.body.shape));

    let sized = Place::settled(Some(&file), Some([2.0, 2.0]), Some(45.0), Some(&halvane)).expect("settled");
    assert_eq!(sized.frame, Frame::Plane { north_deg: 45.0 });
    assert_eq!(sized.body.shape, halvane.shape);

    let bare = Place::settled(None, None, Some(-20.0), None).expect("settled");
    let up = bare.local_frame(Point::new(0.0, 0.0)).expect("frame").azimuth(0.0, -1.0);
    assert_close!(up.deg(), 340.0, 1e-12, "image-up");

    assert_eq!(Place::settled(None, Some([0.0, 1.0]), None, None), Err(PlaceError::PixelSize(0.0)));
    assert!(matches!(Place::settled(None, None, Some(f64::NAN), None), Err(PlaceError::North(_))));
}

#[test]
fn north_of_a_rotated_plane_is_that_of_the_image() {
    let (sin, cos) = 20f64.to_radians().sin_cos();
    let affine = Affine { a: cos, b: sin, c: 0.0, d: sin, e: -cos, f: 0.0 };
    let file = Place::new(affine, Frame::Plane { north_deg: 0.0 }, Body::earth()).expect("place");
    let place = Place::settled(Some(&file), None, Some(70.0), None).expect("settled");
    let up = place.local_frame(Point::new(0.0, 0.0)).expect("frame").azimuth(0.0, -1.0);
    assert_close!(up.deg(), 70.0, 1e-9, "image-up");
}

#[test]
fn west_longitudes_mirror_azimuths() {
    // Columns count up toward the west: image-right is true west.
    let affine = Affine { a: 0.5, b: 0.0, c: 10.0, d: 0.0, e: -0.5, f: 20.0 };
    let file = geographic(affine, SMALL, LatitudeKind::Planetographic);
    let place = file.with_west_longitudes().expect("mirrored");
    assert_close!(place.lonlat_of(Point::new(0.0, 0.0)).expect("inside").lon, -10.0, 1e-12, "longitude");
    let (was, now) = (
        file.local_frame(Point::new(3.0, 3.0)).expect("frame").azimuth(1.0, -1.0),
        place.local_frame(Point::new(3.0, 3.0)).expect("frame").azimuth(1.0, -1.0),
    );
    assert_close!(now.deg(), 360.0 - was.deg(), 1e-12, "az → −az");

    let metres = Affine { a: 100.0, b: 0.0, c: 0.0, d: 0.0, e: -100.0, f: 0.0 };
    let map = projected("+proj=sinu +lon_0=30", SMALL, metres).with_west_longitudes().expect("rebuilt");
    assert_close!(map.lonlat_of(Point::new(0.0, 0.0)).expect("inside").lon, -30.0, 1e-9, "centre");
}

#[test]
fn latitudes_of_the_other_kind_move_north_on_an_ellipsoid() {
    let affine = Affine { a: 0.1, b: 0.0, c: 0.0, d: 0.0, e: -0.1, f: 44.661_768_05 };
    let place = geographic(affine, Body::mars().shape, LatitudeKind::Planetographic);
    let moved = place.with_latitude(LatitudeKind::Planetocentric);
    assert_close!(moved.lonlat_of(Point::new(0.0, 0.0)).expect("inside").lat, 45.0, 1e-5, "latitude");
}

#[test]
fn a_description_says_where_up_is() {
    let affine = Affine { a: -30.0, b: 0.0, c: 5e5, d: 0.0, e: 30.0, f: 5.8e6 };
    let place = projected("+proj=utm +zone=33", Body::earth().shape, affine);
    let text = place.description(Point::new(10.0, 10.0));
    assert!(
        text.starts_with("UTM zone 33N; unnamed body, ellipsoid 6378.137 × 6356.752 km; pixels of 30.01"),
        "{text}"
    );
    assert!(text.ends_with("image-up lies at azimuth 179.998°") || text.contains("azimuth 179.99"), "{text}");
}

fn any_affine(scale: f64) -> impl Strategy<Value = Affine> {
    // Rotation, anisotropy, shear and mirroring about a centre pixel (500, 400).
    (0.0..360.0f64, 0.3..3.0f64, -0.7..0.7f64, any::<bool>(), -1.0..1.0f64, -1.0..1.0f64).prop_map(
        move |(turn, ratio, shear, mirror, x, y)| {
            let (sin, cos) = turn.to_radians().sin_cos();
            let flip = if mirror { -1.0 } else { 1.0 };
            let (a, d) = (scale * cos, scale * sin);
            let (b, e) =
                (scale * (flip * ratio * sin + shear * cos), scale * (shear * sin - flip * ratio * cos));
            let (cx, cy) = (x * 300.0 * scale, y * 300.0 * scale);
            Affine { a, b, c: cx - a * 500.0 - b * 400.0, d, e, f: cy - d * 500.0 - e * 400.0 }
        },
    )
}

proptest! {
    #[test]
    fn pixels_come_back_and_frames_follow_geodesics(
        affine in any_affine(100.0), kind in 0usize..9, col in 0.0..1000.0f64, row in 0.0..800.0f64,
    ) {
        let definition = [
            "+proj=eqc +lat_ts=40", "+proj=sinu +lon_0=25", "+proj=tmerc +lat_0=50", "+proj=stere +lat_0=-90",
            "+proj=stere +lat_0=90 +lon_0=45", "+proj=laea +lat_0=35 +lon_0=200", "+proj=lcc +lat_1=20 +lat_2=50 +lat_0=35",
            "+proj=aea +lat_1=20 +lat_2=50 +lat_0=35", "+proj=ortho +lat_0=60 +lon_0=-170",
        ][kind];
        let shape = if kind == 8 { SMALL } else { Body::mars().shape };
        let place = projected(definition, shape, affine);
        let pixel = Point::new(col, row);
        let Some(at) = place.lonlat_of(pixel) else { return Ok(()) };
        let back = place.pixel_of_lonlat(at, Point::new(500.0, 400.0)).expect("came from inside");
        prop_assert!(back.distance(pixel) < 1e-4, "{definition} {at:?} {back:?}");
        if at.lat.abs() < 89.9 {
            // A tenth of a pixel: near a pole even short geodesics turn.
            let (turn, stretch) = frame_error(&place, pixel, 0.1);
            prop_assert!(turn < 1e-3 && stretch < 1e-5, "{definition} {at:?}: {turn}° {stretch}");
        }
    }

    #[test]
    fn geographic_frames_follow_geodesics(
        affine in any_affine(1e-3), lon in 0.0..360.0f64, lat in -70.0..70.0f64, centric in any::<bool>(),
    ) {
        let latitude = if centric { LatitudeKind::Planetocentric } else { LatitudeKind::Planetographic };
        let moved = Affine { c: affine.c + lon, f: affine.f + lat, ..affine };
        let place = geographic(moved, Body::mars().shape, latitude);
        let pixel = Point::new(480.0, 410.0);
        let at = place.lonlat_of(pixel).expect("inside");
        let back = place.pixel_of_lonlat(at, Point::new(500.0, 400.0)).expect("inside");
        prop_assert!(back.distance(pixel) < 1e-6);
        let (turn, stretch) = frame_error(&place, pixel, 2.0);
        prop_assert!(turn < 1e-3 && stretch < 1e-6, "{at:?}: {turn}° {stretch}");
    }
}

//! Map projections and geodesics: section J of the check list (pyproj 3.7.2 / PROJ 9.5.1, and the
//! published line Flinders Peak – Buninyong).

use ventifact::assert_close;
use ventifact::ground::{
    Affine, Body, BodyShape, Frame, LatitudeKind, LocalFrame, LonLat, Place, Point, Projection,
};

/// A north-up raster of 1 map metre pixels, and its frame at a position.
fn frame_at(definition: &str, shape: BodyShape, lon: f64, lat: f64) -> LocalFrame {
    let axes = format!("{definition} +a={} +b={}", shape.equatorial_m, shape.polar_m);
    let projection = Projection::new(&axes, shape).expect("projection");
    let affine = Affine { a: 1.0, b: 0.0, c: 0.0, d: 0.0, e: -1.0, f: 0.0 };
    let place = Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, Body::unnamed(shape))
        .expect("place");
    let pixel = place.pixel_of_lonlat(LonLat { lon, lat }, Point::new(0.0, 0.0)).expect("inside");
    place.local_frame(pixel).expect("frame")
}

/// True azimuth and true/grid length of a grid azimuth.
fn true_of_grid(frame: &LocalFrame, grid_deg: f64) -> (f64, f64) {
    let (sin, cos) = grid_deg.to_radians().sin_cos();
    (frame.azimuth(sin, -cos).deg(), frame.length(sin, -cos))
}

/// Grid convergence: true = grid + convergence. Degrees in [−180, 180).
fn convergence(frame: &LocalFrame) -> f64 {
    (frame.azimuth(0.0, -1.0).deg() + 180.0).rem_euclid(360.0) - 180.0
}

const SPHERE: BodyShape = BodyShape { equatorial_m: 2_575_000.0, polar_m: 2_575_000.0 };

#[test]
fn j01_flinders_peak_to_buninyong() {
    // GDA technical manual, published to 1 mm and 0.01″; GRS 80 ellipsoid.
    let a = 6_378_137.0;
    let grs80 = BodyShape { equatorial_m: a, polar_m: a * (1.0 - 1.0 / 298.257_222_101) };
    let line = grs80.geodesic(
        LonLat { lon: 144.424_867_888_888_89, lat: -37.951_033_416_666_67 },
        LonLat { lon: 143.926_495_527_777_77, lat: -37.652_821_138_888_89 },
    );
    assert_close!(line.length_m, 54_972.271, 1e-3, "length");
    assert_close!(line.azimuth.deg(), 306.868_158_333_333_3, 5e-6, "azimuth there");
    assert_close!(line.back_azimuth.deg(), 127.173_630_555_555_56, 5e-6, "azimuth back");
}

#[test]
fn j03_geodesic_on_a_sphere() {
    let line = BodyShape::sphere(3_396_190.0)
        .geodesic(LonLat { lon: 137.0, lat: -5.0 }, LonLat { lon: 138.0, lat: -4.0 });
    assert_close!(line.azimuth.deg(), 44.951_874_73, 1e-7, "azimuth");
    assert_close!(line.length_m, 83_697.432_783, 1e-5, "length");
}

#[test]
fn j04_j11_equirectangular_at_60() {
    let frame = frame_at("+proj=eqc", SPHERE, 12.0, 60.0);
    let (azimuth, ratio) = true_of_grid(&frame, 45.0);
    assert_close!(azimuth, 26.565_051_18, 1e-6, "azimuth");
    assert_close!(ratio, 0.790_569_42, 1e-6, "length");
    // k and h are map metres per ground metre along the parallel and the meridian.
    assert_close!(1.0 / frame.length(1.0, 0.0), 2.0, 1e-6, "k");
    assert_close!(1.0 / frame.length(0.0, 1.0), 1.0, 1e-6, "h");
}

#[test]
fn j05_equirectangular_true_at_45() {
    let frame = frame_at("+proj=eqc +lat_ts=45", SPHERE, 0.0, 60.0);
    assert_close!(1.0 / frame.length(1.0, 0.0), std::f64::consts::SQRT_2, 1e-6, "k");
    assert_close!(1.0 / frame.length(0.0, 1.0), 1.0, 1e-6, "h");
}

#[test]
fn j06_sinusoidal_at_40_east_50_north() {
    let frame = frame_at("+proj=sinu", SPHERE, 40.0, 50.0);
    let rows = [(0.0, 28.137_867, 1.134_024_22), (45.0, 56.913_716_09, 1.295_301_27), (90.0, 90.0, 1.0)];
    for (grid, azimuth, ratio) in rows {
        let got = true_of_grid(&frame, grid);
        // The check list allows 1e-4 (its own values are from finite differences).
        assert_close!(got.0, azimuth, 1e-4, "azimuth of grid {grid}");
        assert_close!(got.1, ratio, 1e-4, "length of grid {grid}");
    }
}

#[test]
fn j07_polar_stereographic_at_75() {
    for (definition, lat, want) in
        [("+proj=stere +lat_0=90", 75.0, 70.0), ("+proj=stere +lat_0=-90", -75.0, -70.0)]
    {
        let frame = frame_at(definition, SPHERE, 70.0, lat);
        assert_close!(1.0 / frame.length(0.0, 1.0), 1.017_332_38, 1e-6, "k at {lat}");
        assert_close!(convergence(&frame), want, 1e-6, "convergence at {lat}");
    }
}

#[test]
fn j07_polar_stereographic_of_earth() {
    // SCIENCE J2: EPSG:3031 at (45, −80) k .980214, −45°; EPSG:3413 at (−45, 75) .986664, 0°.
    let earth = Body::earth().shape;
    let south = frame_at("+proj=stere +lat_0=-90 +lat_ts=-71 +lon_0=0", earth, 45.0, -80.0);
    assert_close!(1.0 / south.length(0.0, 1.0), 0.980_214, 5e-7, "k");
    assert_close!(convergence(&south), -45.0, 1e-6, "convergence");
    let north = frame_at("+proj=stere +lat_0=90 +lat_ts=70 +lon_0=-45", earth, -45.0, 75.0);
    assert_close!(1.0 / north.length(0.0, 1.0), 0.986_664, 5e-7, "k");
    assert_close!(convergence(&north), 0.0, 1e-6, "convergence");
}

#[test]
fn j08_utm_33() {
    let rows = [(17.0, 52.0, 1.576_266, 0.999_831_406_5), (12.5, -30.0, 1.250_604_3, 1.000_317_582_1)];
    for (lon, lat, want, k) in rows {
        let frame = frame_at("+proj=utm +zone=33", Body::earth().shape, lon, lat);
        assert_close!(convergence(&frame), want, 1e-6, "convergence at {lon}, {lat}");
        assert_close!(1.0 / frame.length(0.0, 1.0), k, 1e-6, "scale at {lon}, {lat}");
        assert_close!(1.0 / frame.length(1.0, 0.0), k, 1e-6, "scale across at {lon}, {lat}");
    }
}

#[test]
fn j10_planetographic_45_to_planetocentric() {
    let a = 3_396_190.0;
    let shape = BodyShape { equatorial_m: a, polar_m: a * (1.0 - 1.0 / 169.894_447_2) };
    assert_close!(shape.planetocentric(45.0), 44.661_768_05, 1e-7, "planetocentric");
    assert_close!(
        LatitudeKind::Planetocentric.of_planetographic(shape, 45.0),
        44.661_768_05,
        1e-7,
        "by kind"
    );
}

//! Crest lines on ground that is not a plane of square pixels, and on pictures too large to hold.

use ventifact::assert_close;
use ventifact::ground::{
    Affine, Axis, Body, Frame, Grid, LatitudeKind, LocalFrame, Place, Point, Polygon, Polyline, Seed, Work,
};
use ventifact::science::crest::{
    CrestLine, CrestModel, CrestOrigin, CrestSettings, Crests, End, Frames, SpacingSettings, defects, detect,
    detect_on_ground, length_rose, numbers, spacing,
};
use ventifact::science::scene::{CrestScene, CrestShading, CrestTruth, speckle, speckled};

fn line(points: Vec<Point>) -> CrestLine {
    CrestLine {
        line: Polyline(points),
        confidence: 1.0,
        ends: [End::Border; 2],
        bridged_px: 0.0,
        model: CrestModel::BrightRidge,
        origin: CrestOrigin::Traced,
        accepted: false,
        by_hand_px: 0.0,
    }
}

/// Mean distance of traced lines from the truth by length, after `there`.
fn off(truth: &CrestTruth, crests: &Crests, there: impl Fn(Point) -> Point) -> f64 {
    let nearest = |p: Point| {
        truth.lines.iter().filter_map(|l| l.nearest(p)).fold(f64::INFINITY, |m, n| m.min(n.distance))
    };
    let (mut sum, mut length) = (0.0, 0.0);
    for w in crests.lines.iter().flat_map(|l| l.line.0.windows(2)) {
        let (a, b) = (there(w[0]), there(w[1]));
        let count = a.distance(b).ceil().max(1.0);
        for k in 0..count as usize {
            let t = (k as f64 + 0.5) / count;
            sum += nearest(Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))) * a.distance(b) / count;
        }
        length += a.distance(b);
    }
    sum / f64::max(length, 1e-9)
}

const SCENE: CrestScene = CrestScene {
    width: 480,
    height: 480,
    spacing: 32.0,
    swing: 6.0,
    wavelength: 300.0,
    ending_every: 3,
    forking_every: 3,
    shading: CrestShading::Ridge { width: 4.0 },
    ground: 1.0,
    contrast: 0.6,
};

/// Means of blocks of `cols` × `rows` pixels.
fn blocks(image: &Grid<f32>, cols: usize, rows: usize) -> Grid<f32> {
    Grid::from_fn(image.width() / cols, image.height() / rows, |col, row| {
        let sum: f32 = (0..rows)
            .flat_map(|j| (0..cols).map(move |i| (i, j)))
            .map(|(i, j)| image.at(col * cols + i, row * rows + j))
            .sum();
        sum / (cols * rows) as f32
    })
}

/// Pixels twice as high as wide, and twice as wide as high, under 16 looks: crests lie a tenth of the finer side
/// off where they do on square ones, with the same ends and forks.
#[test]
fn pixels_that_are_not_square() {
    let truth = SCENE.truth();
    let noise = speckle(480, 480, 16.0, &mut Seed(3).stream("crest.speckle", 0));
    let image = speckled(&SCENE.draw(&truth), &noise);
    let settings =
        CrestSettings { logarithm: true, spacing_px: Some(SCENE.spacing), ..CrestSettings::default() };
    let square = detect(&image, &Polygon::rectangle(480.0, 480.0), &settings, &Work::quiet()).unwrap();
    let square = off(&truth, &square, |p| p);
    for [cols, rows] in [[1, 2], [2, 1]] {
        let squeezed = blocks(&image, cols, rows);
        let patch = Polygon::rectangle(squeezed.width() as f64, squeezed.height() as f64);
        let pixel = [10.0 * cols as f64, 10.0 * rows as f64];
        let crests = detect_on_ground(&squeezed, &patch, pixel, &settings, 1 << 24, &Work::quiet()).unwrap();
        let there = |p: Point| Point::new(p.x * cols as f64, p.y * rows as f64);
        let (off, d) = (off(&truth, &crests, there), defects(&crests.lines, &crests.junctions, 1.0, None));
        println!(
            "{cols}×{rows}: off {off:.3} (square {square:.3}), ends {} of {}, forks {} of {}",
            d.ends,
            truth.ends.len(),
            d.forks,
            truth.forks.len()
        );
        assert!(off <= square + 0.1, "{cols} × {rows}: {off} px off, {square} on square pixels");
        let near = |got: usize, want: usize| got.abs_diff(want) as f64 <= 0.1 * want as f64;
        assert!(near(d.ends, truth.ends.len()) && near(d.forks, truth.forks.len()), "{d:?}");
        assert_close!(crests.side_px, 1.0, 1e-12, "nothing is averaged");
    }
}

/// A picture with more cells than may be held is averaged: crests stay where they are, to a tenth of the scale.
#[test]
fn a_picture_too_large_is_averaged() {
    let truth = SCENE.truth();
    let image = SCENE.draw(&truth);
    let patch = Polygon::rectangle(480.0, 480.0);
    let settings = CrestSettings { spacing_px: Some(SCENE.spacing), ..CrestSettings::default() };
    let whole = detect(&image, &patch, &settings, &Work::quiet()).unwrap();
    let most = 480 * 480 / 4;
    let crests = detect_on_ground(&image, &patch, [1.0; 2], &settings, most, &Work::quiet()).unwrap();
    assert_close!(crests.side_px, 2.0, 1e-9, "side");
    assert_close!(crests.scales_px[0], whole.scales_px[0], 1e-9, "the same scale on the ground");
    assert_eq!(crests.lines.len(), whole.lines.len());
    assert_eq!(crests.junctions.len(), whole.junctions.len());
    let (before, off) = (off(&truth, &whole, |p| p), off(&truth, &crests, |p| p));
    println!("off {before:.3} px on the whole picture, {off:.3} px averaged");
    assert!(off <= 0.1 * whole.scales_px[0], "{off} px off");
}

/// Crests along parallels and meridians of a map in degrees, four degrees wide, at latitude 60°: lengths,
/// directions, area and spacing are those on the sphere, not those of the middle's frame.
#[test]
fn a_map_in_degrees_is_no_plane() {
    let mut body = Body::earth();
    body.shape.polar_m = body.shape.equatorial_m;
    let radius = body.shape.equatorial_m;
    // A hundred pixels a degree; the upper left corner at 62° N, 10° E.
    let affine = Affine { a: 0.01, b: 0.0, c: 10.0, d: 0.0, e: -0.01, f: 62.0 };
    let frame = Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::Planetographic };
    let place = Place::new(affine, frame, body).unwrap();
    let patch = Polygon::rectangle(400.0, 400.0);
    let frames = Frames::new(&place, Point::new(200.0, 200.0)).expect("a place");
    let degree = radius.to_radians();

    let along = |y: f64| line((0..=40).map(|i| Point::new(10.0 * f64::from(i), y)).collect());
    let parallels = [along(0.0), along(400.0)];
    let n = numbers(&parallels, &patch, &frames);
    let want = 4.0 * degree * (62f64.to_radians().cos() + 58f64.to_radians().cos());
    assert_close!(n.total_length / want, 1.0, 1e-6, "length of two parallels");
    let zone = radius * radius * 4f64.to_radians() * (62f64.to_radians().sin() - 58f64.to_radians().sin());
    assert_close!(n.area / zone, 1.0, 1e-3, "area between them");
    let (axis, together) = n.azimuth.expect("lines");
    assert_close!(axis.separation(Axis::from_deg(90.0)), 0.0, 1e-6, "they run east everywhere");
    assert_close!(together, 1.0, 1e-9, "and all of them");

    let up = |x: f64| line((0..=40).map(|i| Point::new(x, 10.0 * f64::from(i))).collect());
    let meridians: Vec<CrestLine> = (0..9).map(|i| up(0.2 + 49.95 * f64::from(i))).collect();
    let n = numbers(&meridians, &patch, &frames);
    assert_close!(n.azimuth.expect("lines").1, 1.0, 1e-9, "meridians run north");
    let rose = length_rose(&meridians, &frames, 10.0);
    assert_close!(rose[0] + rose[17], 1.0, 1e-9, "rose");
    // The middle's own frame says so too, but errs in length by the cosine of the latitude.
    let flat: LocalFrame = frames.middle();
    let one = [along(0.0)];
    let (round, plane) =
        (numbers(&one, &patch, &frames).total_length, numbers(&one, &patch, flat).total_length);
    assert_close!(
        plane / round,
        60f64.to_radians().cos() / 62f64.to_radians().cos(),
        1e-6,
        "the frame's error"
    );
    // Half a degree apart, the outer ones close to the border, whose cuts then tell nothing: the middle quantile is that of latitude 60°, the others those of 61° and 59°.
    let settings = SpacingSettings { step: 0.01 * degree, longest: 3.0 * degree, own_beyond: degree };
    let got = spacing(&meridians, &patch, &frames, settings, &Work::quiet()).unwrap();
    for (k, latitude) in [(0, 61.0f64), (1, 60.0), (2, 59.0)] {
        let want = 0.4995 * degree * latitude.to_radians().cos();
        assert_close!(got.quartiles[k].unwrap() / want, 1.0, 3e-3, "quartile {k}");
    }
}

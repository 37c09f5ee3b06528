//! The pen of crests on drawn dunes: it keeps to one crest among many, whatever the model, and picks find it.

use std::f64::consts::TAU;

use proptest::prelude::{ProptestConfig, prop, prop_assert, proptest};
use rand::Rng as _;

use ventifact::assert_close;
use ventifact::ground::{Grid, Point, Polyline, Seed, Work};
use ventifact::science::crest::{CrestModel, Pen};

/// Height of the crest numbered `k` above column `x`: waves as long as two spacings are high and ten apart.
fn course(k: f64, spacing: f64, x: f64) -> f64 {
    spacing * (k + 0.5) + spacing * (TAU * x / (20.0 * spacing)).sin()
}

/// Dunes of a spacing under noise: ridges half a spacing wide, or slopes that end in a step.
fn dunes(size: [usize; 2], spacing: f64, slip: bool, noise: f64) -> Grid<f32> {
    let mut rng = Seed(11).stream("dunes", 0);
    Grid::from_fn(size[0], size[1], |c, r| {
        let (x, y) = (c as f64 + 0.5, r as f64 + 0.5);
        let phase = (y - course(0.0, spacing, x)) / spacing;
        let tone = if slip {
            // Falls from crest to crest, and rises within two pixels at each.
            let share = phase.rem_euclid(1.0) * spacing;
            if share < 2.0 { share / 2.0 } else { 1.0 - (share - 2.0) / (spacing - 2.0) }
        } else {
            (TAU * phase).cos().max(0.0)
        };
        (100.0 + 20.0 * tone + noise * 2.45 * (rng.random::<f64>() + rng.random::<f64>() - 1.0)) as f32
    })
}

/// Mean and greatest distance of points of a way from a crest, which lies `beyond` its course.
fn off(way: &Polyline, k: f64, spacing: f64, beyond: f64) -> (f64, f64) {
    let curve: Vec<Point> = (0..30_000)
        .map(|i| 0.1 * f64::from(i))
        .map(|x| Point::new(x, course(k, spacing, x) + beyond))
        .collect();
    let curve = Polyline(curve);
    let away: Vec<f64> = way.0.iter().map(|p| curve.nearest(*p).unwrap().distance).collect();
    (away.iter().sum::<f64>() / away.len() as f64, away.iter().copied().fold(0.0, f64::max))
}

#[test]
fn a_thousand_pixels_along_one_crest() {
    let work = Work::quiet();
    for (spacing, slip, noise) in
        [(12.0, false, 4.0), (30.0, false, 0.0), (30.0, false, 12.0), (40.0, true, 4.0), (40.0, true, 0.0)]
    {
        let picture = dunes([1200, 300], spacing, slip, noise);
        let (model, scale, beyond) = match slip {
            true => (CrestModel::SlipFace, spacing / 20.0, 1.0),
            false => (CrestModel::BrightRidge, spacing / 7.0, 0.0),
        };
        let pen = Pen::of(&picture, Some(model), Some(scale), false, &work).unwrap();
        let k = (150.0 / spacing).floor();
        let pick = |x: f64| Point::new(x, course(k, spacing, x) + 2.0);
        let [from, to] = [pick(80.0), pick(1080.0)].map(|p| pen.snapped(p));
        let way = pen.field().way(from, to, &work).unwrap().expect("a way");
        let line = pen.line(&way);
        let (mean, most) = off(&line, k, spacing, beyond);
        println!("spacing {spacing}, slip {slip}, noise {noise}: off by {mean:.2} px, at most {most:.2}");
        assert_close!(mean, 0.0, 0.5, "mean distance, spacing {spacing}, slip {slip}, noise {noise}");
        assert_close!(most, 0.0, 3.0, "greatest distance, spacing {spacing}, slip {slip}, noise {noise}");
        assert_eq!((line.0[0], *line.0.last().unwrap()), (from, to));
        assert!(line.0.len() < 400, "{} points", line.0.len());
    }
}

#[test]
fn model_and_scale_are_found_where_none_is_given() {
    let work = Work::quiet();
    for (slip, scales) in [(false, 2.0..8.0), (true, 1.0..4.0)] {
        let pen = Pen::of(&dunes([600, 400], 30.0, slip, 2.0), None, None, false, &work).unwrap();
        assert_eq!(pen.model() == CrestModel::SlipFace, slip);
        assert!(scales.contains(&pen.scale_px()), "{}", pen.scale_px());
        let pick = Point::new(300.0, course(6.0, 30.0, 300.0) + 1.5);
        assert!(pen.snapped(pick).distance(pick) < 3.0 && pen.snapped(pick) != pick);
    }
}

#[test]
fn stop_is_heeded_and_missing_ground_is_walked_round() {
    let stopped = Work::quiet();
    stopped.stop();
    assert!(Pen::of(&dunes([300, 300], 30.0, false, 1.0), None, None, false, &stopped).is_err());
    let mut picture = dunes([300, 300], 30.0, false, 1.0);
    picture.mask_where(|c, r| !(140..160).contains(&c) || r > 250);
    let pen = Pen::of(&picture, Some(CrestModel::BrightRidge), Some(4.0), false, &Work::quiet()).unwrap();
    let way = pen.field().way(Point::new(20.0, 100.0), Point::new(280.0, 100.0), &Work::quiet()).unwrap();
    let line = way.expect("round the gap").line;
    assert!(line.0.iter().all(|p| !(140.0..160.0).contains(&p.x) || p.y >= 251.0));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    #[test]
    fn any_picture_is_ground_or_none(
        width in 0usize..24,
        height in 0usize..24,
        values in prop::collection::vec(prop::sample::select(vec![f32::NAN, 0.0, 1.0, 5.0, f32::INFINITY, -3e30]), 24 * 24),
        scale in prop::option::of(-1.0..90.0f64),
        logarithm in prop::bool::ANY,
    ) {
        let picture = Grid::from_fn(width, height, |c, r| values[r * 24 + c]);
        let work = Work::quiet();
        let pen = Pen::of(&picture, None, scale, logarithm, &work).unwrap();
        let (from, to) = (Point::new(1.5, 1.5), Point::new(width as f64 - 1.5, height as f64 - 1.5));
        prop_assert!(pen.snapped(Point::new(f64::NAN, -1.0)).x.is_nan());
        if let Some(way) = pen.field().way(pen.snapped(from), pen.snapped(to), &work).unwrap() {
            prop_assert!(pen.line(&way).0.iter().all(|p| p.x.is_finite() && p.y.is_finite()));
        }
    }
}

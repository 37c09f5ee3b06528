//! The pen on drawn channels whose lengths are known, on noise, and on ground that is missing.

use std::f64::consts::TAU;
use std::sync::Arc;

use rand::Rng as _;

use ventifact::assert_close;
use ventifact::ground::{Grid, Point, Polyline, Seed, Work};
use ventifact::numeric::least_path::{CostField, Way};
use ventifact::science::channel::chance::{chance, null_costs};
use ventifact::science::channel::detect::ChannelTone;
use ventifact::science::channel::pen;

/// A picture with a dark or bright band of a width along a curve given by its points, soft over a pixel.
fn drawn(size: [usize; 2], curve: &[Point], width: f64, depth: f64, noise: f64, seed: u64) -> Grid<f32> {
    let mut away = vec![f64::INFINITY; size[0] * size[1]];
    let reach = (0.5 * width).ceil() as isize + 2;
    for p in curve {
        for r in (p.y as isize - reach).max(0)..(p.y as isize + reach + 1).min(size[1] as isize) {
            for c in (p.x as isize - reach).max(0)..(p.x as isize + reach + 1).min(size[0] as isize) {
                let far = p.distance(Point::new(c as f64 + 0.5, r as f64 + 0.5));
                let cell = &mut away[r as usize * size[0] + c as usize];
                *cell = cell.min(far);
            }
        }
    }
    let mut rng = Seed(seed).stream("drawn", 0);
    Grid::from_fn(size[0], size[1], |c, r| {
        let cover = (0.5 * width + 0.5 - away[r * size[0] + c]).clamp(0.0, 1.0);
        let speckle = noise * 2.45 * (rng.random::<f64>() + rng.random::<f64>() - 1.0);
        (100.0 - depth * cover + speckle) as f32
    })
}

/// Points of an arc or spiral r = r₀ + r₁ φ about the centre, a tenth of a pixel apart, with its length.
fn spiral(centre: Point, r0: f64, r1: f64, turns: f64) -> (Vec<Point>, f64) {
    let mut points = Vec::new();
    let (mut phi, mut length) = (0.0, 0.0);
    while phi < TAU * turns {
        let r = r0 + r1 * phi;
        points.push(Point::new(centre.x + r * phi.cos(), centre.y + r * phi.sin()));
        phi += 0.1 / r.hypot(r1);
        length += 0.1;
    }
    (points, length)
}

/// Ways between picks that stand at most `apart` pixels from one another along the curve, joined.
fn traced(picture: &Grid<f32>, tone: ChannelTone, curve: &[Point], apart: f64) -> Way {
    let ground = pen::ground(picture, tone, [2.0, 40.0], &Work::quiet()).unwrap();
    let pieces = ((curve.len() as f64 * 0.1) / apart).ceil() as usize;
    let picks: Vec<Point> = (0..=pieces).map(|i| curve[i * (curve.len() - 1) / pieces]).collect();
    let mut whole = Way { line: Polyline(Vec::new()), length_px: 0.0, cost: 0.0, cost_per_px: 0.0 };
    for pair in picks.windows(2) {
        let way = ground.way(pair[0], pair[1], &Work::quiet()).unwrap().expect("a way");
        whole.line.0.extend(way.line.0);
        whole.length_px += way.length_px;
        whole.cost += way.cost;
    }
    whole.cost_per_px = whole.cost / whole.length_px;
    whole
}

fn farthest_from(curve: &[Point], way: &Way) -> f64 {
    let near = |p: &Point| curve.iter().step_by(4).map(|q| p.distance(*q)).fold(f64::INFINITY, f64::min);
    way.line.0.iter().map(near).fold(0.0, f64::max)
}

/// Steps from cell to cell would add 5.5 % on average (H. Minkowski's bound for eight neighbours).
#[test]
fn lengths_of_circles_and_spirals_are_true_within_one_percent() {
    let centre = Point::new(300.3, 300.8);
    let mut worst: f64 = 0.0;
    for (r0, r1, turns, width) in [
        (60.0, 0.0, 0.8, 3.0),
        (120.0, 0.0, 0.9, 6.0),
        (250.0, 0.0, 0.9, 8.0),
        (250.0, 0.0, 0.6, 20.0),
        (40.0, 8.0, 4.0, 4.0),
        (60.0, 12.0, 2.5, 12.0),
    ] {
        for noise in [0.0, 8.0] {
            let (curve, length) = spiral(centre, r0, r1, turns);
            let picture = drawn([600, 600], &curve, width, 40.0, noise, 7);
            let way = traced(
                &picture,
                ChannelTone::Dark,
                &curve,
                if noise > 0.0 { 1.2 * r0.max(100.0) } else { 3.5 * r0 },
            );
            let error = way.length_px / length - 1.0;
            println!(
                "r {r0} + {r1} φ, {turns} turns, {width} px wide, noise {noise}: {:+.3} %, off by {:.2} px",
                100.0 * error,
                farthest_from(&curve, &way)
            );
            worst = worst.max(error.abs());
        }
    }
    assert_close!(worst, 0.0, 0.01, "relative error of length");
}

/// Where every cell costs the same the way is straight, whatever its bearing.
#[test]
fn open_ground_is_crossed_in_a_straight_line() {
    for size in [200, 900] {
        let ground = CostField::new(size, size, &vec![2.0; size * size]);
        let middle = 0.5 * size as f64;
        for deg in (0..360).step_by(17) {
            let (sin, cos) = f64::from(deg).to_radians().sin_cos();
            let to = Point::new(middle + 0.45 * size as f64 * cos, middle + 0.45 * size as f64 * sin);
            let from = Point::new(middle, middle);
            let way = ground.way(from, to, &Work::quiet()).unwrap().unwrap();
            let true_length = from.distance(to);
            assert_close!(way.length_px / true_length, 1.0, 0.005, "length toward {deg}°, {size} cells");
            assert_close!(way.cost, 2.0 * way.length_px, 1e-3, "cost toward {deg}°");
            assert_eq!((way.line.0[0], *way.line.0.last().unwrap()), (from, to));
        }
    }
}

/// The course chosen on squares and refined costs little more than the one found pixel by pixel.
#[test]
fn ways_and_live_ways_agree_and_reach_their_ends() {
    let (curve, _) = spiral(Point::new(450.0, 400.0), 80.0, 25.0, 1.9);
    let picture = drawn([1000, 800], &curve, 5.0, 30.0, 12.0, 3);
    let ground = Arc::new(pen::ground(&picture, ChannelTone::Dark, [2.0, 40.0], &Work::quiet()).unwrap());
    let ways = ground.ways_from(curve[50], &Work::quiet()).unwrap().unwrap();
    for i in [900, 4000, curve.len() - 1] {
        let live = ways.to(curve[i], &Work::quiet()).unwrap().unwrap();
        let fixed = ground.way(curve[50], curve[i], &Work::quiet()).unwrap().unwrap();
        assert_eq!(live, fixed, "to point {i}");
        assert!(farthest_from(&curve, &fixed) < 2.5, "off by {}", farthest_from(&curve, &fixed));
    }
}

#[test]
fn bright_channels_and_either_kind_are_followed_too() {
    let (curve, length) = spiral(Point::new(150.0, 150.0), 100.0, 0.0, 0.7);
    for (depth, tone) in
        [(-30.0, ChannelTone::Bright), (-30.0, ChannelTone::EdgePair), (30.0, ChannelTone::EdgePair)]
    {
        let picture = drawn([300, 300], &curve, 5.0, depth, 5.0, 11);
        let way = traced(&picture, tone, &curve, 1e9);
        assert_close!(way.length_px / length, 1.0, 0.015, "{tone:?} at {depth}");
        assert!(farthest_from(&curve, &way) < 2.0);
    }
}

/// A wall of missing pixels is walked round; ground cut in two has no way; a pick on nothing has none.
#[test]
fn missing_pixels_are_never_crossed() {
    for size in [120usize, 700] {
        let mut picture = Grid::from_fn(size, size, |c, r| ((c * 7 + r * 13) % 5) as f32);
        let wall = size / 2;
        picture.mask_where(|c, r| c != wall || r < size / 10);
        let tone = ChannelTone::Dark;
        let ground = pen::ground(&picture, tone, [2.0, 10.0], &Work::quiet()).unwrap();
        let (from, to) =
            (Point::new(5.5, size as f64 - 5.5), Point::new(size as f64 - 5.5, size as f64 - 5.5));
        let way = ground.way(from, to, &Work::quiet()).unwrap().expect("round the wall");
        assert!(way.line.0.iter().all(|p| picture.is_valid(p.x as usize, p.y as usize)));
        assert!(way.line.0.iter().any(|p| p.y < size as f64 / 10.0 + 1.0));
        let on_wall = Point::new(wall as f64 + 0.5, size as f64 - 2.0);
        assert_eq!(ground.way(from, on_wall, &Work::quiet()), Ok(None));
        assert_eq!(ground.way(Point::new(-1.0, 4.0), to, &Work::quiet()), Ok(None));
        assert_eq!(ground.way(from, Point::new(f64::NAN, 4.0), &Work::quiet()), Ok(None));
        picture.mask_where(|c, _| c != wall);
        let cut = pen::ground(&picture, tone, [2.0, 10.0], &Work::quiet()).unwrap();
        assert_eq!(cut.way(from, to, &Work::quiet()), Ok(None));
    }
}

#[test]
fn odd_pictures_do_no_harm() {
    let work = Work::quiet();
    for (w, h) in [(0, 0), (1, 1), (2, 1), (1, 40), (3, 3)] {
        for value in [0.0, f32::NAN, f32::INFINITY, f32::MAX] {
            let ground =
                pen::ground(&Grid::filled(w, h, value), ChannelTone::EdgePair, [2.0, 40.0], &work).unwrap();
            let p = Point::new(0.5, 0.5);
            let way = ground.way(p, Point::new(w as f64 - 0.5, h as f64 - 0.5), &work).unwrap();
            assert_eq!(way.is_some(), w > 0 && value.is_finite(), "{w} × {h} of {value}");
            assert!(null_costs(&ground, 10.0, 3, Seed(1), &work).unwrap().len() <= 3);
        }
    }
}

/// A drawn channel stands out against random ways; a way over noise between clicked places does not.
#[test]
fn a_channel_is_told_from_chance() {
    let (curve, _) = spiral(Point::new(250.0, 250.0), 200.0, 0.0, 0.5);
    let picture = drawn([500, 500], &curve, 5.0, 40.0, 15.0, 5);
    let work = Work::quiet();
    let ground = pen::ground(&picture, ChannelTone::Dark, [2.0, 40.0], &work).unwrap();
    let null = null_costs(&ground, 300.0, 59, Seed(1), &work).unwrap();
    let way = ground.way(curve[0], curve[curve.len() - 1], &work).unwrap().unwrap();
    let p = chance(&null, way.cost_per_px).unwrap();
    let median = null[null.len() / 2];
    println!("channel {:.2}, random {median:.2} a pixel, p {p:.3}", way.cost_per_px);
    assert!(p <= 0.05 && way.cost_per_px < 0.8 * median, "p {p}, {} of {median}", way.cost_per_px);

    let noise = drawn([500, 500], &[], 5.0, 0.0, 15.0, 6);
    let ground = pen::ground(&noise, ChannelTone::Dark, [2.0, 40.0], &work).unwrap();
    let null = null_costs(&ground, 300.0, 99, Seed(1), &work).unwrap();
    let others = null_costs(&ground, 300.0, 99, Seed(2), &work).unwrap();
    let small = others.iter().filter(|q| chance(&null, **q).unwrap() <= 0.1).count();
    assert!(small <= 22, "{small} of 99 ways over noise have p below 0.1");
}

#[test]
fn a_stopped_pen_stops() {
    let work = Work::quiet();
    let ground = Arc::new(CostField::new(400, 400, &vec![1.0; 160_000]));
    work.stop();
    assert!(ground.ways_from(Point::new(2.0, 2.0), &work).is_err());
    assert!(pen::ground(&Grid::filled(50, 50, 1.0), ChannelTone::Dark, [2.0, 9.0], &work).is_err());
}

/// There and back is the same way at the same cost, but for the scheme's own error; where two ways are as cheap, or a
/// bend is as sharp as a pixel, one in eight may differ by more.
#[test]
fn a_way_costs_the_same_backwards() {
    const CASES: u64 = 24;
    let mut off = Vec::new();
    for seed in 0..CASES {
        let mut rng = Seed(seed).stream("waves", 0);
        let waves: Vec<[f64; 3]> = (0..8)
            .map(|_| [rng.random::<f64>() - 0.5, rng.random::<f64>() - 0.5, TAU * rng.random::<f64>()])
            .collect();
        let wave =
            |w: &[f64; 3], c: usize, r: usize| (0.8 * (w[0] * c as f64 + w[1] * r as f64) + w[2]).sin();
        let picture = Grid::from_fn(100, 100, |c, r| waves.iter().map(|w| wave(w, c, r)).sum::<f64>() as f32);
        let ground = pen::ground(&picture, ChannelTone::Bright, [3.0, 12.0], &Work::quiet()).unwrap();
        let mut pick = || 5.0 + 85.0 * rng.random::<f64>();
        let (a, b) = (Point::new(50.2, 49.7), Point::new(pick(), pick()));
        let there = ground.way(a, b, &Work::quiet()).unwrap().unwrap();
        let back = ground.way(b, a, &Work::quiet()).unwrap().unwrap();
        let ends = ground.cost(a).unwrap() + ground.cost(b).unwrap();
        let apart = (there.cost - back.cost).abs();
        if apart >= 0.1 * there.cost.max(back.cost) + ends {
            off.push((seed, there.cost, back.cost));
        }
    }
    println!("{} of {CASES} ways cost another way back: {off:?}", off.len());
    assert!(off.len() <= 3, "{off:?}");
}

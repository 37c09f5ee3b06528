//! Measures of networks: symmetries, bias on stepped forks, patterns, and agreement of what is the same.

use proptest::prelude::*;
use rand::Rng as _;

use ventifact::assert_close;
use ventifact::ground::{
    Body, FlowSense, Network, NetworkNode, Place, Point, Polyline, Reach, ReachOrigin, Seed, Work,
    ground_distance,
};
use ventifact::science::network::compare::compare;
use ventifact::science::network::density::{density, inflation_of};
use ventifact::science::network::hierarchy::{horton, order_counts, streams, tokunaga};
use ventifact::science::network::junctions::{Junctions, junctions};
use ventifact::science::network::pattern::{PATTERN_NAMES, Pattern, pattern};
use ventifact::science::network::profile::{ProfileAsk, profiles};
use ventifact::science::network::scaling::{flint, hack};

#[path = "../bench/drainage_kinds.rs"]
mod drainage_kinds;
use drainage_kinds::{KINDS, Kind, draw};

const ASK: ProfileAsk = ProfileAsk { theta: None, theta_reference: 0.45, slope_drop_m: None, most: 100 };

fn plane() -> Place {
    Place::plane([1.0, 1.0], 0.0, Body::earth()).expect("a plane")
}

fn reach(from: usize, to: usize, line: Vec<Point>) -> Reach {
    let line = Polyline(line);
    Reach {
        from,
        to,
        length: line.length(),
        line,
        sense: FlowSense::of_elevation(),
        order: None,
        width: None,
        stations: Vec::new(),
        origin: ReachOrigin::Elevation,
        confidence: 1.0,
    }
}

/// Every point moved by `f`, lengths measured anew.
fn moved(network: &Network, f: impl Fn(Point) -> Point) -> Network {
    network.clone().on_ground(&plane(), 1.0, f)
}

fn junctions_of(network: &Network, place: &Place, chord: f64) -> Junctions {
    junctions(network, place, chord, Seed(1), &Work::quiet()).expect("nobody stops")
}

fn pattern_of(network: &Network, place: &Place) -> Pattern {
    pattern(network, &junctions_of(network, place, 8.0), place, None)
}

/// A fork of true angle `deg` turned by `turn`, laid on cells: branches that share cells are one channel from there
/// on, as routing would have it.
fn fork(deg: f64, turn: f64, skew: f64, random: &mut impl rand::Rng) -> Network {
    let far = |azimuth: f64, r: f64| (r * azimuth.sin(), r * azimuth.cos());
    let half = 0.5 * deg.to_radians();
    let apex = (random.random::<f64>(), random.random::<f64>());
    let from_apex = |azimuth: f64, r: f64| {
        let (x, y) = far(turn + azimuth, r);
        (apex.0 + x, apex.1 + y)
    };
    let cell = |p: (f64, f64)| (p.0.floor() as i64, p.1.floor() as i64);
    // From each head toward the true apex, in the line of true cells.
    let way = |from: (f64, f64), to: (f64, f64)| {
        let steps = 4000;
        let mut cells: Vec<(i64, i64)> = Vec::new();
        for k in 0..=steps {
            let t = f64::from(k) / f64::from(steps);
            let c = cell((from.0 + t * (to.0 - from.0), from.1 + t * (to.1 - from.1)));
            if cells.last() != Some(&c) {
                cells.push(c);
            }
        }
        // Corners are cut, as steps to eight neighbours do.
        let mut i = 1;
        while i + 1 < cells.len() {
            let (a, b) = (cells[i - 1], cells[i + 1]);
            if (a.0 - b.0).abs() <= 1 && (a.1 - b.1).abs() <= 1 {
                cells.remove(i);
            } else {
                i += 1
            }
        }
        cells
    };
    let heads = [from_apex(half + skew, 40.0), from_apex(-half + skew, 40.0)];
    let mut trunk = way(heads[0], apex);
    let below = way(apex, from_apex(std::f64::consts::PI + skew, 40.0));
    trunk.extend(below.into_iter().skip(1));
    let branch = way(heads[1], apex);
    // The branch ends where it touches the trunk's cells, or a neighbour of one.
    let touch = |c: &(i64, i64)| trunk.iter().position(|t| (t.0 - c.0).abs() <= 1 && (t.1 - c.1).abs() <= 1);
    let end = branch.iter().position(|c| touch(c).is_some()).expect("they meet");
    let joint =
        trunk.iter().position(|t| *t == branch[end]).or_else(|| touch(&branch[end])).expect("a joint");
    let point = |c: &(i64, i64)| Point::new(c.0 as f64 + 0.5, c.1 as f64 + 0.5);
    let mut side: Vec<Point> = branch[..=end].iter().map(point).collect();
    if branch[end] != trunk[joint] {
        side.push(point(&trunk[joint]));
    }
    let main: Vec<Point> = trunk[..=joint].iter().map(point).collect();
    let out: Vec<Point> = trunk[joint..].iter().map(point).collect();
    let nodes = [main[0], side[0], out[0], out[out.len() - 1]];
    Network {
        nodes: nodes.into_iter().map(|at| NetworkNode { at, elevation_m: None }).collect(),
        reaches: vec![reach(0, 2, main), reach(1, 2, side), reach(2, 3, out)],
    }
    .ordered()
}

/// Forks of 60, 72 and 90° on cells at random azimuths: with chords of 10 cells the mean is right within 2°.
#[test]
fn stepped_forks_have_their_angle_on_average() {
    let mut random = Seed(7).stream("forks", 0);
    for deg in [60.0, 72.0, 90.0] {
        let count = 600;
        let errors: Vec<f64> = (0..count)
            .filter_map(|_| {
                let turn = random.random::<f64>() * std::f64::consts::TAU;
                let skew = (random.random::<f64>() - 0.5) * 0.8;
                let n = fork(deg, turn, skew, &mut random);
                junctions_of(&n, &plane(), 10.0).angles.first().map(|a| a.angle_deg - deg)
            })
            .collect();
        let mean = errors.iter().sum::<f64>() / errors.len() as f64;
        let sd = (errors.iter().map(|e| (e - mean).powi(2)).sum::<f64>() / errors.len() as f64).sqrt();
        println!("{deg}°: mean error {mean:.2}°, standard deviation {sd:.2}°, {} forks", errors.len());
        assert!(errors.len() > 9 * count / 10);
        assert_close!(mean, 0.0, 2.0, "mean error at {deg}°");
        assert!(sd < 8.0, "{sd}");
    }
}

/// Probabilities tell simulated networks apart on draws that gave no moments.
#[test]
fn fresh_draws_of_each_kind_are_told_apart() {
    for (k, kind) in KINDS.into_iter().enumerate() {
        let all: Vec<[f64; 5]> = (0..20)
            .filter_map(|i| pattern_of(&draw(kind, Seed(3), i), &Place::pixels(0.0)).probabilities)
            .collect();
        let right = all.iter().filter(|p| (0..5).all(|j| p[j] <= p[k])).count();
        println!("{}: {right} of {}", PATTERN_NAMES[k], all.len());
        assert!(all.len() >= 15 && right * 10 >= all.len() * 8, "{kind:?}: {right} of {}", all.len());
        assert!(all.iter().all(|p| (p.iter().sum::<f64>() - 1.0).abs() < 1e-9));
    }
}

#[test]
fn loops_and_few_links_have_features_but_no_hierarchy() {
    let mut n = draw(Kind::Parallel, Seed(5), 0);
    // A second way between two nodes makes a loop, and no order below it.
    let (from, to, line) = (n.reaches[0].from, n.reaches[0].to, n.reaches[0].line.0.clone());
    n.reaches.push(reach(from, to, line));
    let n = n.ordered();
    let p = pattern_of(&n, &Place::pixels(0.0));
    assert!(p.probabilities.is_some() && p.features.alignment > 0.3);
    let area = density(&n, 1e4, 1.0).expect("an area");
    assert!(area.frequency.is_none() && area.density > 0.0);
    let few = Network { nodes: n.nodes.clone(), reaches: n.reaches[..5].to_vec() };
    let p = pattern_of(&few, &Place::pixels(0.0));
    assert!(p.too_few && p.probabilities.is_none());
    let circle = Network {
        nodes: n.nodes[..2].to_vec(),
        reaches: vec![reach(0, 1, vec![Point::new(0.0, 0.0); 2]), reach(1, 0, vec![Point::new(0.0, 0.0); 2])],
    };
    for odd in [Network::default(), circle.ordered()] {
        let p = pattern_of(&odd, &Place::pixels(0.0));
        assert!(p.too_few && p.probabilities.is_none());
        assert!(hack(&odd).is_none() && flint(&odd, None).is_none() && tokunaga(&odd).is_none());
        assert!(horton(&order_counts(&odd)).is_none() && streams(&odd).is_empty());
        assert_eq!(profiles(&odd, &ASK), (Vec::new(), None));
        assert_eq!(junctions_of(&odd, &plane(), 10.0).angles.len(), 0);
        assert_eq!(inflation_of(&odd, &plane()), 1.0);
        assert_eq!(compare(&odd, &odd, 1.0, |a, b| ground_distance(&plane(), a, b)).found, 0.0);
    }
}

/// The same network is the same; a shift beyond the tolerance is not; exchanged ends are another sense.
#[test]
fn agreement_of_a_network_with_itself_and_its_shifts() {
    let n = draw(Kind::Dendritic, Seed(5), 1);
    let distance = |a: Point, b: Point| ground_distance(&plane(), a, b);
    let same = compare(&n, &n, 2.0, distance);
    assert_close!(same.found, 1.0, 1e-12, "found");
    assert_close!(same.confirmed, 1.0, 1e-12, "confirmed");
    assert_close!(same.mean_distance, 0.0, 1e-9, "distance");
    assert_eq!((same.same_sense, same.same_order), (Some(1.0), Some(1.0)));
    assert_eq!(same.junctions, [n.junctions().len(); 3]);
    assert_close!(same.lengths[0], n.length(), 1e-9, "length");
    // Straight channels 30 pixels apart, shifted by 3 across.
    let line = |i: usize| vec![Point::new(0.0, 30.0 * i as f64), Point::new(200.0, 30.0 * i as f64)];
    let node = |at| NetworkNode { at, elevation_m: None };
    let parallel = Network {
        nodes: (0..4).flat_map(line).map(node).collect(),
        reaches: (0..4).map(|i| reach(2 * i, 2 * i + 1, line(i))).collect(),
    };
    let shifted = moved(&parallel, |p| Point::new(p.x, p.y + 3.0));
    assert_eq!(compare(&parallel, &shifted, 2.9, distance).found, 0.0);
    let near = compare(&parallel, &shifted, 3.1, distance);
    assert_close!(near.found, 1.0, 1e-9, "within the tolerance");
    assert_close!(near.mean_distance, 3.0, 1e-9, "mean distance");
    let half = Network { reaches: shifted.reaches[..2].to_vec(), ..shifted };
    let part = compare(&half, &parallel, 3.1, distance);
    assert_close!(part.found, 0.5, 1e-9, "half is found");
    assert_close!(part.confirmed, 1.0, 1e-9, "all is confirmed");
    let against =
        Network { reaches: parallel.reaches.iter().map(Reach::reversed).collect(), ..parallel.clone() };
    // Both ends and evidence are exchanged: the same water.
    assert_eq!(compare(&parallel, &against, 1.0, distance).same_sense, Some(1.0));
    let mut up = parallel.clone();
    up.reaches.iter_mut().for_each(|r| r.sense = r.sense.reversed());
    assert_eq!(compare(&parallel, &up, 1.0, distance).same_sense, Some(0.0));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(12))]

    /// Lengths times k: density over k, the same ratios, angles and patterns.
    #[test]
    fn scale_changes_lengths_only(index in 0u64..1000, k in 0.2..5.0f64) {
        let n = draw(Kind::Dendritic, Seed(9), index);
        let big = moved(&n, |p| Point::new(k * p.x, k * p.y));
        let (a, b) = (density(&n, 1e4, 1.0).unwrap(), density(&big, 1e4 * k * k, 1.0).unwrap());
        assert_close!(b.density * k / a.density, 1.0, 1e-9, "density");
        assert_close!(inflation_of(&big, &plane()), inflation_of(&n, &plane()), 1e-9, "inflation");
        let (a, b) = (order_counts(&n), order_counts(&big));
        for (a, b) in a.iter().zip(&b) {
            prop_assert_eq!(a.streams, b.streams);
            assert_close!(b.mean_length / a.mean_length, k, 1e-9 * k, "stream length");
        }
        if let (Some(a), Some(b)) = (horton(&a), horton(&b)) {
            assert_close!(a.length.value, b.length.value, 1e-9 * a.length.value, "R_L");
        }
        let (a, b) = (junctions_of(&n, &plane(), 8.0), junctions_of(&big, &plane(), 8.0 * k));
        prop_assert_eq!(a.angles.len(), b.angles.len());
        for (a, b) in a.angles.iter().zip(&b.angles) {
            assert_close!(a.angle_deg, b.angle_deg, 1e-6, "angle");
        }
    }

    /// A place turned by some angle turns azimuths and leaves angles; a mirrored one exchanges left and right.
    #[test]
    fn turning_the_ground_turns_azimuths_and_leaves_angles(index in 0u64..1000, turn in 0.0..360.0f64) {
        let n = draw(Kind::Trellis, Seed(9), index);
        let turned = Place::plane([1.0, 1.0], turn, Body::earth()).unwrap();
        let (a, b) = (junctions_of(&n, &plane(), 8.0), junctions_of(&n, &turned, 8.0));
        prop_assert_eq!(a.angles.len(), b.angles.len());
        for (a, b) in a.angles.iter().zip(&b.angles) {
            assert_close!(a.angle_deg, b.angle_deg, 1e-9, "angle");
            assert_close!(b.toward[0].turn_from(a.toward[0].rotated(turn)), 0.0, 1e-9, "azimuth");
        }
        let (a, b) = (pattern_of(&n, &plane()), pattern_of(&n, &turned));
        assert_close!(a.features.alignment, b.features.alignment, 1e-9, "alignment");
        assert_close!(a.features.crossing, b.features.crossing, 1e-9, "crossing");
        assert_close!(a.features.radial.unwrap(), b.features.radial.unwrap(), 1e-9, "radial");
        let mirrored = moved(&n, |p| Point::new(-p.x, p.y));
        let (a, b) = (junctions_of(&n, &plane(), 8.0), junctions_of(&mirrored, &plane(), 8.0));
        for (a, b) in a.angles.iter().zip(&b.angles) {
            assert_close!(a.angle_deg, b.angle_deg, 1e-6, "mirrored angle");
            assert_close!(a.turns_deg[0], b.turns_deg[1], 1e-6, "left becomes right");
        }
    }
}

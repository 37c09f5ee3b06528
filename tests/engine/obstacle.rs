//! The obstacle test on fields with known truth: symmetries, intervals, and the null.

#[path = "../bench/outcrops.rs"]
#[allow(dead_code, reason = "the bench takes all of it, the suite a part")]
mod outcrops;

use outcrops::{ANNULUS, Kind, Scene, score};
use rayon::prelude::*;
use ventifact::assert_close;
use ventifact::ground::{Axis, Point, Seed, Work};
use ventifact::science::obstacle::{Ellipse, Field, Node, Obliquity, TestSettings, estimate, test};

const SCENE: Scene = Scene {
    size: 40,
    outcrop: Ellipse { centre: Point::new(19.3, 20.4), major: 4.5, minor: 3.0, turn: 0.5 },
    phi_deg: Some(30.0),
    kind: Kind::Exponential { length: 3.0 },
    related_deg: 6.0,
    noise_deg: 2.0,
};

/// What an outcrop tells on some nodes.
fn told(nodes: Vec<Node>, outcrop: Ellipse) -> Obliquity {
    let field = Field::of(nodes, &[outcrop], ANNULUS.outer).expect("a trend");
    estimate(&field, &outcrop, &ANNULUS).expect("a fit").obliquity(field.crest_se_deg)
}

fn turned(p: Point, by: f64) -> Point {
    let (sin, cos) = by.sin_cos();
    Point::new(cos * p.x - sin * p.y, sin * p.x + cos * p.y)
}

#[test]
fn turning_everything_changes_nothing() {
    let nodes = SCENE.draw(3);
    let want = told(nodes.clone(), SCENE.outcrop);
    let by = 1.1f64;
    let moved = nodes
        .into_iter()
        // Places turn counter-clockwise, axes are counted clockwise.
        .map(|n| Node { at: turned(n.at, by), axis: n.axis.rotated(-by.to_degrees()), ..n })
        .collect();
    let o = SCENE.outcrop;
    let got = told(moved, Ellipse { centre: turned(o.centre, by), turn: o.turn + by, ..o });
    assert_close!(got.signed_deg, want.signed_deg, 1e-3, "φ");
    assert_close!(got.amplitude, want.amplitude, 1e-4, "amplitude");
}

#[test]
fn a_mirrored_field_has_the_opposite_obliquity() {
    let nodes = SCENE.draw(4);
    let want = told(nodes.clone(), SCENE.outcrop);
    let mirrored = nodes
        .into_iter()
        .map(|n| Node { at: Point::new(-n.at.x, n.at.y), axis: Axis::from_deg(-n.axis.deg()), ..n })
        .collect();
    let o = SCENE.outcrop;
    let shape = Ellipse { centre: Point::new(-o.centre.x, o.centre.y), turn: -o.turn, ..o };
    let got = told(mirrored, shape);
    assert_close!(got.signed_deg, -want.signed_deg, 1e-3, "φ");
    assert_close!(got.amplitude, want.amplitude, 1e-4, "amplitude");
}

#[test]
fn a_map_in_other_units_changes_nothing() {
    let nodes = SCENE.draw(5);
    let want = told(nodes.clone(), SCENE.outcrop);
    let scaled =
        nodes.into_iter().map(|n| Node { at: Point::new(80.0 * n.at.x, 80.0 * n.at.y), ..n }).collect();
    let o = SCENE.outcrop;
    let shape = Ellipse { centre: Point::new(80.0 * o.centre.x, 80.0 * o.centre.y), ..o }.scaled(80.0);
    let got = told(scaled, shape);
    assert_close!(got.signed_deg, want.signed_deg, 1e-3, "φ");
    assert_close!(got.half_deg.unwrap(), want.half_deg.unwrap(), 1e-2, "half width");
}

/// A circle and an ellipse in related noise; 40 draws of each truth. The bench runs more.
#[test]
fn known_obliquities_are_found_and_their_intervals_hold_them() {
    let mut covered = Vec::new();
    for outcrop in [Ellipse::circle(SCENE.outcrop.centre, 3.7), SCENE.outcrop] {
        for phi in [0.0, 30.0, 60.0, 90.0] {
            let scene = Scene { outcrop, phi_deg: Some(phi), ..SCENE };
            let outcomes: Vec<_> = (0..40).into_par_iter().map(|i| scene.run(i, 0)).collect();
            let s = score(&outcomes, phi);
            println!("truth {phi}: {s:?}");
            assert_close!(s.bias_deg, 0.0, 2.0, "truth {phi}°, mean");
            assert_close!(s.amplitude, 1.0, 0.1, "truth {phi}°, amplitude");
            covered.push(s.covered);
        }
    }
    // 320 draws: the share has a standard deviation of 1.2 %.
    let share = covered.iter().sum::<f64>() / covered.len() as f64;
    assert!((0.90..=0.985).contains(&share), "intervals hold the truth in {share:.3} of the draws");
}

/// Nodes taken as samples would hold the truth far less often: what the correlation is for.
#[test]
fn intervals_of_independent_nodes_would_be_too_narrow() {
    let outcomes: Vec<_> = (0..20).map(|i| SCENE.run(i, 0)).collect();
    let worth = outcomes.iter().map(|o| o.estimate.n_eff / o.estimate.n as f64).sum::<f64>() / 20.0;
    assert!(worth < 0.5, "nodes are worth {worth:.2} samples each");
}

/// Without a turn p lies below a level about as often as the level says, and few decide anything.
#[test]
fn ground_without_a_turn_is_no_decision() {
    let scene = Scene { phi_deg: None, related_deg: 3.0, ..SCENE };
    let outcomes: Vec<_> = (0..120).into_par_iter().map(|i| scene.run(500 + i, 0)).collect();
    let below = |level: f64| outcomes.iter().filter(|o| o.pattern_p <= level).count() as f64 / 120.0;
    println!("p below 5, 10, 50 %: {:.3} {:.3} {:.3}", below(0.05), below(0.1), below(0.5));
    assert!(below(0.05) <= 0.12, "below 5 %: {}", below(0.05));
    assert!((0.35..=0.65).contains(&below(0.5)), "below 50 %: {}", below(0.5));
    let decided = outcomes.iter().filter(|o| o.undecided.is_none()).count();
    assert!(decided <= 12, "{decided} of 120 decide");
}

#[test]
fn the_same_bits_for_one_thread_and_two_and_a_prompt_stop() {
    let field = Field::of(SCENE.draw(9), &[SCENE.outcrop], ANNULUS.outer).unwrap();
    let settings =
        TestSettings { annulus: ANNULUS, virtual_count: 60, homogeneous: true, least_amplitude: 0.3 };
    let run = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| test(&field, &[SCENE.outcrop], 0, &settings, 1.0, Seed(1), &Work::quiet()))
    };
    assert_eq!(format!("{:?}", run(1)), format!("{:?}", run(2)));
    let work = Work::quiet();
    work.stop();
    assert!(test(&field, &[SCENE.outcrop], 0, &settings, 1.0, Seed(1), &work).is_err());
}

/// More bedforms on one side, and p only where the patch has room for enough independent places.
#[test]
fn the_dipole_points_where_bedforms_are_and_a_full_patch_gives_no_p() {
    let mut nodes = SCENE.draw(11);
    let crest = Field::of(nodes.clone(), &[SCENE.outcrop], 3.0).unwrap().crest;
    let (east, north) = crest.azimuth().east_north();
    let c = SCENE.outcrop.centre;
    for n in &mut nodes {
        if (n.at.x - c.x) * east + (n.at.y - c.y) * north < 0.0 {
            n.presence = 0.2;
        }
    }
    let field = Field::of(nodes, &[SCENE.outcrop], 3.0).unwrap();
    let settings =
        TestSettings { annulus: ANNULUS, virtual_count: 999, homogeneous: false, least_amplitude: 0.3 };
    let outcome =
        test(&field, &[SCENE.outcrop], 0, &settings, 1.0, Seed(1), &Work::quiet()).unwrap().unwrap();
    let dipole = outcome.dipole.unwrap();
    assert!(dipole.toward.turn_from(crest.azimuth()).abs() < 10.0, "{dipole:?}, crest {crest:?}");
    let null = outcome.null.unwrap();
    assert!(null.p.is_none() && null.dipole_p.is_none(), "{null:?}");
}

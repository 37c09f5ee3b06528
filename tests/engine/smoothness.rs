//! Rough ground passes; enlarged, faceted, terraced and filled ground is told apart.

use rand::Rng as _;
use ventifact::ground::{
    FlowSense, Grid, Network, NetworkNode, Point, Polyline, Reach, ReachOrigin, Seed, Work,
};
use ventifact::science::drainage::smoothness::{Smoothness, smoothness};
use ventifact::science::scene::reach;

const SIZE: usize = 257;

/// Self-affine ground by midpoint displacement (Fournier, Fussell & Carpenter 1982), H = 0.7.
fn rough() -> Grid<f32> {
    let mut random = Seed(5).stream("test", 0);
    let mut z = vec![0.0f64; SIZE * SIZE];
    let (mut step, mut size) = (SIZE - 1, 200.0);
    while step > 1 {
        let half = step / 2;
        let mut set = |c: usize, r: usize, around: [(isize, isize); 4], z: &mut Vec<f64>| {
            let near: Vec<f64> = around
                .iter()
                .filter_map(|(dx, dy)| {
                    let (c, r) = (c.checked_add_signed(*dx)?, r.checked_add_signed(*dy)?);
                    (c < SIZE && r < SIZE).then(|| z[r * SIZE + c])
                })
                .collect();
            z[r * SIZE + c] = near.iter().sum::<f64>() / near.len() as f64 + random.random_range(-size..size);
        };
        let h = half as isize;
        for r in (half..SIZE).step_by(step) {
            for c in (half..SIZE).step_by(step) {
                set(c, r, [(-h, -h), (h, -h), (-h, h), (h, h)], &mut z);
            }
        }
        for r in (0..SIZE).step_by(half) {
            for c in ((r + half) % step..SIZE).step_by(step) {
                set(c, r, [(-h, 0), (h, 0), (0, -h), (0, h)], &mut z);
            }
        }
        (step, size) = (half, size * 0.5f64.powf(0.7));
    }
    Grid::from_fn(SIZE, SIZE, |c, r| z[r * SIZE + c] as f32)
}

/// Four cells for one each way, by cubic convolution (Keys 1981) or linearly.
fn enlarged(z: &Grid<f32>, weights: impl Fn(f64) -> [f64; 4]) -> Grid<f32> {
    let n = 60;
    Grid::from_fn(4 * n, 4 * n, |c, r| {
        let (wx, wy) = (weights((c % 4) as f64 / 4.0), weights((r % 4) as f64 / 4.0));
        let (x, y) = (c / 4 + 20, r / 4 + 20);
        let at = |i: usize, j: usize| wx[i] * wy[j] * f64::from(z.at(x + i, y + j));
        (0..4).flat_map(|j| (0..4).map(move |i| at(i, j))).sum::<f64>() as f32
    })
}

fn cubic(t: f64) -> [f64; 4] {
    let near = |x: f64| 1.0 - 2.5 * x * x + 1.5 * x * x * x;
    let far = |x: f64| 2.0 - 4.0 * x + 2.5 * x * x - 0.5 * x * x * x;
    [far(1.0 + t), near(t), near(1.0 - t), far(2.0 - t)]
}

fn told(z: &Grid<f32>) -> (Smoothness, Vec<&'static str>) {
    let (found, cautions) = smoothness(z, z, &Network::default(), &Work::quiet()).unwrap();
    (found, cautions.iter().map(|c| c.code).collect())
}

#[test]
fn rough_ground_passes_and_enlarged_ground_does_not() {
    let z = rough();
    let (found, codes) = told(&z);
    assert_eq!((codes, found.resolved_cells, found.step_m), (vec![], Some(1), None));
    // D grows as h^2H, H = 0.7, from distance to distance.
    assert!(found.exponent.is_some_and(|e| (0.9..2.2).contains(&e)), "{found:?}");

    let (smooth, codes) = told(&enlarged(&z, cubic));
    assert_eq!(codes, ["elevation-too-smooth"], "{smooth:?}");
    assert!(smooth.resolved_cells.is_some_and(|cells| cells >= 2), "{smooth:?}");

    let (facets, codes) = told(&enlarged(&z, |t| [0.0, 1.0 - t, t, 0.0]));
    assert!(codes.contains(&"elevation-planar") && facets.planar_share > 0.2, "{facets:?} {codes:?}");
}

#[test]
fn terraces_are_told_with_their_step() {
    let gentle = rough().map(|z| (z / 40.0).round() * 0.5);
    let (found, codes) = told(&gentle);
    assert_eq!(found.step_m, Some(0.5));
    assert!(codes.contains(&"elevation-level") && found.level_share > 0.1, "{found:?}");
    // Rounding of a whole metre is no terrace on steep ground.
    let steep = rough().map(f32::round);
    assert_eq!((told(&steep).0.step_m, told(&steep).1), (Some(1.0), vec![]));
}

#[test]
fn a_network_on_filled_ground_is_told() {
    let given = rough();
    let mut raised = given.clone();
    raised.values_mut()[..SIZE * 60].iter_mut().for_each(|z| *z += 500.0);
    let down: Vec<Point> = (0..240).map(|r| Point::new(100.5, r as f64 + 0.5)).collect();
    let nodes = [down[0], down[239]].map(|at| NetworkNode { at, elevation_m: None });
    let reach = Reach {
        from: 0,
        to: 1,
        line: Polyline(down),
        length: 239.0,
        sense: FlowSense::of_elevation(),
        order: None,
        width: None,
        stations: Vec::new(),
        origin: ReachOrigin::Elevation,
        confidence: 1.0,
    };
    let network = Network { nodes: nodes.to_vec(), reaches: vec![reach] };
    let (found, cautions) = smoothness(&given, &raised, &network, &Work::quiet()).unwrap();
    assert!((found.on_fill_share - 59.5 / 239.0).abs() < 1e-12);
    assert_eq!(cautions.iter().map(|c| c.code).collect::<Vec<_>>(), ["network-on-fill"]);
}

#[test]
fn the_demo_and_degenerate_ground_give_no_false_alarm() {
    let (found, codes) = told(&reach::elevation(Seed(1)));
    assert_eq!((codes, found.step_m), (vec![], Some(0.1)), "{found:?}");
    for (width, height) in [(1, 1), (2, 3), (0, 0)] {
        let (found, _) = told(&Grid::filled(width, height, f32::NAN));
        assert_eq!((found.exponent, found.level_share), (None, 0.0));
    }
    assert_eq!(told(&Grid::filled(9, 9, 3.0)).1, ["elevation-level"]);
}

#[test]
fn threads_do_not_change_the_bits() {
    let z = rough();
    let run = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| told(&z).0)
    };
    assert_eq!(run(1), run(3));
}

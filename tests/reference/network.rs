//! Measures of networks against closed forms and printed numbers.

use ventifact::assert_close;
use ventifact::ground::{
    Body, FlowSense, Network, NetworkNode, Place, Point, Polyline, Reach, ReachOrigin, Seed, Station, Work,
};
use ventifact::science::network::density::{INFLATION_MEAN, density, inflation_at, inflation_of};
use ventifact::science::network::hierarchy::{bifurcation, horton, order_counts, streams, tokunaga};
use ventifact::science::network::hypsometry::hypsometry;
use ventifact::science::network::junctions::{howard_deg, junctions};
use ventifact::science::network::profile::{ProfileAsk, profiles, steepness};
use ventifact::science::network::scaling::{flint, hack};

const ASK: ProfileAsk = ProfileAsk { theta: None, theta_reference: 0.45, slope_drop_m: None, most: 100 };

/// A network from node places and lines between nodes; lengths in pixels.
fn network(nodes: &[(f64, f64)], lines: &[(usize, usize, Vec<Point>)]) -> Network {
    let at = |n: usize| Point::new(nodes[n].0, nodes[n].1);
    let reaches = lines.iter().map(|(from, to, between)| {
        let mut line = vec![at(*from)];
        line.extend(between);
        line.push(at(*to));
        let line = Polyline(line);
        Reach {
            from: *from,
            to: *to,
            length: line.length(),
            line,
            sense: FlowSense::of_elevation(),
            order: None,
            width: None,
            stations: Vec::new(),
            origin: ReachOrigin::Elevation,
            confidence: 1.0,
        }
    });
    let node = |n: usize| NetworkNode { at: at(n), elevation_m: None };
    Network { nodes: (0..nodes.len()).map(node).collect(), reaches: reaches.collect() }.ordered()
}

/// Places of a tree's nodes in a heap: `pairs` of (from, to), one pixel apart along x.
fn tree(pairs: &[(usize, usize)]) -> Network {
    let count = pairs.iter().map(|(a, b)| a.max(b) + 1).max().unwrap_or(0);
    let nodes: Vec<(f64, f64)> = (0..count).map(|n| (n as f64, 0.0)).collect();
    network(&nodes, &pairs.iter().map(|(a, b)| (*a, *b, Vec::new())).collect::<Vec<_>>())
}

/// A self-similar tree of order `most`: a stream of order j has T_k = a c^(k−1) side branches of order j − k.
fn self_similar(most: u32, a: usize, c: usize) -> Network {
    fn grow(order: u32, foot: usize, a: usize, c: usize, pairs: &mut Vec<(usize, usize)>, next: &mut usize) {
        let mut below = foot;
        for k in 1..order {
            for _ in 0..a * c.pow(k - 1) {
                let node = *next;
                *next += 1;
                pairs.push((node, below));
                grow(order - k, node, a, c, pairs, next);
                below = node;
            }
        }
        let top = *next;
        *next += 1;
        pairs.push((top, below));
        if order > 1 {
            grow(order - 1, top, a, c, pairs, next);
            grow(order - 1, top, a, c, pairs, next);
        }
    }
    let (mut pairs, mut next) = (Vec::new(), 1);
    grow(most, 0, a, c, &mut pairs, &mut next);
    tree(&pairs)
}

/// H11, Peckham 1995: R_B = ½((2 + c + a) + √((2 + c + a)² − 8c)). Tolerance 1e-8, absolute.
#[test]
fn bifurcation_from_side_branches() {
    assert_close!(bifurcation(1.0, 2.0), 4.0, 1e-8, "a 1, c 2");
    assert_close!(bifurcation(1.2, 2.5), 4.617_059_7, 1e-7, "a 1.2, c 2.5");
}

/// A tree built with T_k = 2^(k−1) gives those back, and stream numbers whose ratio tends to 4 (Peckham 1995).
#[test]
fn a_self_similar_tree_gives_its_own_numbers() {
    let network = self_similar(6, 1, 2);
    let found = tokunaga(&network).expect("side branches");
    assert_close!(found.a, 1.0, 1e-9, "a");
    assert_close!(found.c, 2.0, 1e-9, "c");
    assert_eq!(found.side_branches, [1.0, 2.0, 4.0, 8.0, 16.0]);
    let counts = order_counts(&network);
    // N_{w} = 2 N_{w+1} + Σ_k T_k N_{w+k}, from one stream of order 6 down.
    let numbers: Vec<usize> = counts.iter().map(|c| c.streams).collect();
    assert_eq!(numbers, [683, 171, 43, 11, 3, 1]);
    let horton = horton(&counts).expect("six orders");
    let ci = horton.bifurcation.ci95.expect("an interval");
    assert_close!(horton.bifurcation.value, 3.73, 0.05, "R_B by regression");
    assert!(ci[0] < horton.bifurcation.value && horton.bifurcation.value < ci[1] && ci[1] < 4.2, "{ci:?}");
    assert_eq!(streams(&network).iter().map(Vec::len).sum::<usize>(), network.reaches.len());
}

/// Rational: N = 64, 16, 4, 1 with lengths 1, 2, 4, 8 gives R_B = 4, R_L = 2 with no scatter.
#[test]
fn horton_ratios_of_a_perfect_progression() {
    let count = |order: u32| ventifact::science::network::hierarchy::OrderCount {
        order,
        streams: 4usize.pow(4 - order),
        mean_length: 2f64.powi(order as i32 - 1),
        mean_area_m2: Some(5f64.powi(order as i32)),
        mean_slope: Some(0.5f64.powi(order as i32)),
    };
    let all: Vec<_> = (1..=4).map(count).collect();
    let h = horton(&all).expect("four orders");
    for (ratio, want) in
        [(h.bifurcation, 4.0), (h.length, 2.0), (h.area.unwrap(), 5.0), (h.slope.unwrap(), 2.0)]
    {
        assert_close!(ratio.value, want, 1e-12, "ratio");
        let [low, high] = ratio.ci95.expect("an interval");
        assert_close!(low, want, 1e-9, "lower end");
        assert_close!(high, want, 1e-9, "upper end");
    }
    assert!(horton(&all[..2]).unwrap().bifurcation.ci95.is_none());
    assert!(horton(&all[..1]).is_none());
}

/// H12, Shreve 1966: C(2n − 1, n)/(2n − 1) topologically distinct networks of n sources: all are built here, and
/// the magnitude of each outlet is n. Over all of those with 6 sources the mean of N₁ over N₂ is what the count
/// of each (printed by Shreve: 1 … of order 3) gives.
#[test]
fn topologically_distinct_networks() {
    /// All binary trees with `n` leaves, as pairs of subtrees.
    #[derive(Clone)]
    enum Tree {
        Leaf,
        Fork(Box<Tree>, Box<Tree>),
    }
    fn all(n: usize) -> Vec<Tree> {
        if n == 1 {
            return vec![Tree::Leaf];
        }
        (1..n)
            .flat_map(|left| {
                let rights = all(n - left);
                all(left).into_iter().flat_map(move |l| {
                    rights.clone().into_iter().map(move |r| Tree::Fork(Box::new(l.clone()), Box::new(r)))
                })
            })
            .collect()
    }
    fn lay(tree: &Tree, foot: usize, next: &mut usize, pairs: &mut Vec<(usize, usize)>) {
        let node = *next;
        *next += 1;
        pairs.push((node, foot));
        if let Tree::Fork(left, right) = tree {
            lay(left, node, next, pairs);
            lay(right, node, next, pairs);
        }
    }
    for (n, want) in [(2usize, 1usize), (3, 2), (4, 5), (5, 14), (6, 42)] {
        let trees = all(n);
        assert_eq!(trees.len(), want, "{n} sources");
        let mut of_order_two = 0;
        for tree_of in &trees {
            let (mut pairs, mut next) = (Vec::new(), 1);
            lay(tree_of, 0, &mut next, &mut pairs);
            let network = tree(&pairs);
            let order = network.reaches[0].order.expect("an order");
            assert_eq!(order.shreve as usize, n);
            let counts = order_counts(&network);
            assert_eq!(counts[0].streams, n);
            of_order_two += usize::from(counts.len() == 2);
        }
        // Only one stream of order 2: each of the n − 2 further sources joins it from left or right.
        assert_eq!(of_order_two, 1 << (n - 2), "{n} sources, order 2");
    }
}

/// H13, Hack 1957: L = 1.4 A^0.6 in miles is 1.27291167 A^0.6 in kilometres: streams laid so give it back.
/// Tolerance 1e-6, absolute.
#[test]
fn hack_in_kilometres() {
    const MILE_KM: f64 = 1.609_344;
    let law = |area_km2: f64| 1.4 * (area_km2 / MILE_KM.powi(2)).powf(0.6) * MILE_KM;
    assert_close!(law(1.0), 1.272_911_67, 1e-6, "1 km²");
    assert_close!(law(100.0), 20.174_290_5, 1e-6, "100 km²");
    let mut n = Network::default();
    for i in 0..12usize {
        // From the divide itself.
        let area = 1.5f64.powi(i as i32);
        let (a, b) = (Point::new(0.0, i as f64), Point::new(law(area), i as f64));
        let mut one = network(&[(a.x, a.y), (b.x, b.y)], &[(0, 1, Vec::new())]);
        one.reaches[0].stations = vec![
            Station { at: a, area_m2: Some(0.0), ..Station::default() },
            Station { at: b, along: law(area), area_m2: Some(area), ..Station::default() },
        ];
        (one.reaches[0].from, one.reaches[0].to) = (2 * i, 2 * i + 1);
        n.nodes.extend(one.nodes);
        n.reaches.extend(one.reaches);
    }
    let law = hack(&n).expect("twelve streams");
    assert_close!(law.exponent, 0.6, 1e-9, "exponent");
    assert_close!(law.factor, 1.272_911_67, 1e-6, "factor");
    let ci = law.exponent_ci95.expect("twelve basins");
    assert_close!(ci[1] - ci[0], 0.0, 1e-9, "no scatter");
}

/// H14: S A^θ with A = 1e7 m², S = 0.05, θ = 0.45. Tolerance 1e-6, absolute.
#[test]
fn steepness_index() {
    assert_close!(steepness(0.05, 1e7, 0.45), 70.626_877_23, 1e-6, "k_sn");
}

/// A channel 10 km long below its head, A = 6.69 s^1.67 with s from 10 km at the outlet to 1 km at the top, with
/// `z` of χ-like distance; stations every `step` m.
fn channel(step: f64, z: impl Fn(f64) -> f64) -> Network {
    let count = (9000.0 / step) as usize;
    let mut n = network(&[(0.0, 0.0), (9000.0, 0.0)], &[(0, 1, Vec::new())]);
    n.reaches[0].stations = (0..=count)
        .map(|i| {
            let along = i as f64 * step;
            let s = 1000.0 + along;
            Station {
                at: Point::new(along, 0.0),
                along,
                elevation_m: Some(z(s)),
                area_m2: Some(6.69 * s.powf(1.67)),
                ..Station::default()
            }
        })
        .collect();
    n
}

/// χ from s down to 10 km at θ: ∫ (6.69 s^1.67)^−θ ds in closed form.
fn chi_of(s: f64, theta: f64) -> f64 {
    let m = 1.0 - 1.67 * theta;
    6.69f64.powf(-theta) * (10_000f64.powf(m) - s.powf(m)) / m
}

/// SCIENCE H7: 10 → 1 km with A₀ = 1 m², θ = 0.45: 7.35246; by trapezoids of 5 m within 1e-4.
#[test]
fn chi_of_a_power_law_basin() {
    assert_close!(chi_of(1000.0, 0.45), 7.35246, 5e-6, "closed form");
    let ask = ProfileAsk { theta: Some(0.45), ..ASK };
    let (profiles, _) = profiles(&channel(5.0, |s| -s), &ask);
    let top = profiles[0].stations.last().expect("stations");
    assert_close!(top.chi, 7.35246, 1e-4, "χ at 1 km");
    assert_close!(top.from_outlet_m, 9000.0, 1e-9, "distance");
}

/// A steady profile z = 200 + k_s χ (Perron & Royden 2013): θ and k_s come back.
#[test]
fn a_steady_profile_gives_back_its_concavity_and_steepness() {
    for (theta, ks) in [(0.45, 60.0), (0.3, 8.0), (0.6, 400.0)] {
        let n = channel(10.0, |s| 200.0 + ks * chi_of(s, theta));
        let (profiles, fit) = profiles(&n, &ASK);
        let fit = fit.expect("a fit");
        assert!(fit.found && profiles[0].is_trunk && profiles[0].knickpoints.is_empty());
        assert_close!(fit.theta, theta, 2e-3, "θ");
        assert_close!(fit.slope / ks, 1.0, 0.02, "k_s at θ {theta}");
        let [low, high] = fit.theta_range.expect("a range");
        assert!(low <= fit.theta && fit.theta <= high, "{low} {high}");
        let flint = flint(&n, Some(2.0)).expect("bins");
        assert_close!(flint.exponent, -theta, 0.03, "Flint's exponent");
        let same = ProfileAsk { theta_reference: theta, ..ASK };
        let (profiles, _) = ventifact::science::network::profile::profiles(&n, &same);
        let middle = &profiles[0].stations[profiles[0].stations.len() / 2];
        assert_close!(middle.ksn.expect("k_sn") / ks, 1.0, 0.02, "k_sn half way");
    }
}

/// H16: hypsometric integrals of a cone, a paraboloid and a plane, from 101 elevations at equal steps of area of a
/// gridded surface: within 0.005 (the grid's steps, and trapezoids of 1 %).
#[test]
fn hypsometric_integrals_of_gridded_surfaces() {
    let n = 400;
    let surface = |f: &dyn Fn(f64, f64) -> Option<f64>| {
        let mut z: Vec<f64> = (0..n * n)
            .filter_map(|i| {
                let at = |k: usize| (k as f64 + 0.5) / f64::from(n as u32) * 2.0 - 1.0;
                f(at(i % n), at(i / n))
            })
            .collect();
        z.sort_by(|a, b| b.total_cmp(a));
        let last = z.len() - 1;
        (0..=100).map(|k| z[k * last / 100]).collect::<Vec<_>>()
    };
    let disc = |r: f64, z: f64| (r <= 1.0).then_some(z);
    let cone = surface(&|x, y| disc(x.hypot(y), 1.0 - x.hypot(y)));
    let paraboloid = surface(&|x, y| disc(x.hypot(y), 1.0 - x * x - y * y));
    let plane = surface(&|x, _| Some(x));
    for (z, want, what) in [(cone, 1.0 / 3.0, "cone"), (paraboloid, 0.5, "paraboloid"), (plane, 0.5, "plane")]
    {
        let h = hypsometry(&z, 1e6, None).expect("relief");
        assert_close!(h.integral, want, 0.005, "{what}");
        assert_eq!((h.curve[0], h.curve[100]), ([0.0, 1.0], [1.0, 0.0]));
    }
}

/// H17: H = 1500 m, A = 5e6 m², L = 4000 m. Tolerance 1e-8, absolute.
#[test]
fn melton_and_relief_ratio() {
    let h = hypsometry(&[2000.0, 900.0, 500.0], 5e6, Some(4000.0)).expect("relief");
    assert_close!(h.melton, 0.670_820_39, 1e-8, "Melton");
    assert_close!(h.relief_ratio.expect("a trunk"), 0.375, 1e-8, "relief ratio");
    assert!(hypsometry(&[1.0, 1.0], 5e6, None).is_none());
}

/// Howard 1971: tan S_main / tan S_trib = ½ gives 60°.
#[test]
fn angle_of_entry_by_slopes() {
    assert_close!(howard_deg(0.01, 0.02).expect("an angle"), 60.0, 1e-9, "ratio ½");
    assert!(howard_deg(0.02, 0.01).is_none() && howard_deg(0.0, 0.01).is_none());
}

/// H18: 2π/5 = 72° (Devauchelle et al. 2012): a fork drawn so measures so at every chord, in true azimuths.
/// Tolerance 1e-9, absolute.
#[test]
fn a_fork_of_two_fifths_of_a_half_turn() {
    let half = std::f64::consts::PI / 5.0;
    let (sin, cos) = half.sin_cos();
    let n = network(
        &[
            (100.0 - 90.0 * sin, 100.0 - 90.0 * cos),
            (100.0 + 90.0 * sin, 100.0 - 90.0 * cos),
            (100.0, 100.0),
            (100.0, 190.0),
        ],
        &[(0, 2, vec![]), (1, 2, vec![]), (2, 3, vec![])],
    );
    let place = Place::plane([3.0, 3.0], 20.0, Body::earth()).expect("a plane");
    let found = junctions(&n, &place, 100.0, Seed(1), &Work::quiet()).expect("nobody stops");
    let angle = found.angles[0];
    assert_close!(angle.angle_deg, 72.0, 1e-9, "angle");
    // Water runs image-down, toward 200°; the branch from the image's right comes from the left of its way.
    assert_close!(angle.turns_deg[0], 36.0, 1e-9, "left turn");
    assert_close!(angle.turns_deg[1], 36.0, 1e-9, "right turn");
    assert_close!(angle.toward[0].deg(), 236.0, 1e-9, "the left branch leads");
    assert_eq!((found.by_chord.len(), found.too_short), (5, 0));
    assert!(found.by_chord.iter().all(|row| (row.mean_deg - 72.0).abs() < 1e-9 && row.ci95_deg.is_none()));
}

/// H10: 8-neighbour inflation, mean 1.0547856, greatest 1.0823922 at 22.5°. Tolerance 1e-6, absolute. A stepped
/// line measures what it steps, and density divides by it.
#[test]
fn what_steps_between_cells_overstate() {
    assert_close!(INFLATION_MEAN, 1.054_785_6, 1e-6, "mean");
    assert_close!(inflation_at(22.5), 1.082_392_2, 1e-6, "greatest");
    let mean = (0..9000).map(|i| inflation_at(f64::from(i) * 0.01 + 0.005)).sum::<f64>() / 9000.0;
    assert_close!(mean, INFLATION_MEAN, 1e-6, "mean over azimuths");
    for deg in [0.0, 10.0, 22.5, 35.0, 45.0, 67.5, 90.0f64] {
        let (sin, cos) = deg.to_radians().sin_cos();
        let cells = 400.0 / cos.max(sin);
        let steps = (cells * cos.max(sin)) as usize;
        let at = |k: usize| {
            let t = k as f64 / steps as f64 * cells;
            Point::new((t * cos).round() + 0.5, (t * sin).round() + 0.5)
        };
        let (a, b) = (at(0), at(steps));
        let n = network(&[(a.x, a.y), (b.x, b.y)], &[(0, 1, (1..steps).map(at).collect())]);
        assert_close!(n.length() / a.distance(b), inflation_at(deg), 2e-3, "steps at {deg}°");
        let place = Place::plane([1.0, 1.0], 0.0, Body::earth()).expect("a plane");
        let own = inflation_of(&n, &place);
        assert_close!(own, inflation_at(deg), 0.012, "inflation from the line itself at {deg}°");
        let d = density(&n, 1e4, own).expect("an area");
        assert_close!(d.density * 1e4 / a.distance(b), 1.0, 0.012, "length at {deg}°");
    }
    assert!(density(&Network::default(), 0.0, 1.0).is_none());
}

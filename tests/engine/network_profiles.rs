//! Profiles, concavity, knickpoints and Hack's law of networks that are made up with known truth and noise.

use rand::Rng as _;
use rand_distr::{Distribution as _, StandardNormal};

use ventifact::assert_close;
use ventifact::ground::{
    FlowSense, Network, NetworkNode, Point, Polyline, Reach, ReachOrigin, Seed, Station,
};
use ventifact::science::network::hierarchy::streams;
use ventifact::science::network::profile::{ProfileAsk, profiles};
use ventifact::science::network::scaling::hack;

const ASK: ProfileAsk = ProfileAsk { theta: None, theta_reference: 0.45, slope_drop_m: None, most: 100 };

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

/// A channel in χ-space: A = 6.69 s^1.67 from s = 21 km at the outlet to 1 km, z of χ at θ = 0.45 with noise of
/// `sd` metres correlated over `cells`, stations 30 m apart.
fn noisy(z_of_chi: impl Fn(f64) -> f64, sd: f64, cells: f64, random: &mut impl rand::Rng) -> Network {
    let step = 30.0;
    let count = (20_000.0 / step) as usize;
    let m = 1.0 - 1.67 * 0.45;
    let chi = |s: f64| 6.69f64.powf(-0.45) * (21_000f64.powf(m) - s.powf(m)) / m;
    let keep = (-1.0 / cells).exp();
    let mut e: f64 = StandardNormal.sample(random);
    let stations: Vec<Station> = (0..=count)
        .map(|i| {
            let along = i as f64 * step;
            let fresh: f64 = StandardNormal.sample(random);
            e = keep * e + (1.0 - keep * keep).sqrt() * fresh;
            Station {
                at: Point::new(along, 0.0),
                along,
                elevation_m: Some(z_of_chi(chi(1000.0 + along)) + sd * e),
                area_m2: Some(6.69 * (1000.0 + along).powf(1.67)),
                ..Station::default()
            }
        })
        .collect();
    let ends = [stations[0].at, stations[count].at];
    let mut line = reach(0, 1, ends.to_vec());
    line.length = stations[count].along;
    line.stations = stations;
    Network { nodes: ends.map(|at| NetworkNode { at, elevation_m: None }).to_vec(), reaches: vec![line] }
        .ordered()
}

/// On 200 straight noisy profiles breaks are told in no more than the level of 1 % allows (at most 6, a chance of
/// 0.5 %), whatever the correlation of the noise; a break of 2 in steepness is found at its place in most.
#[test]
fn knickpoints_are_found_where_they_are_and_seldom_where_not() {
    let ask = ProfileAsk { theta: Some(0.45), ..ASK };
    for (cells, least) in [(0.5, 190), (5.0, 150), (20.0, 80)] {
        let mut random = Seed(11).stream("profiles", cells as u64);
        let mut alarms = 0;
        let (mut found, mut off, mut extra) = (0, 0.0f64, 0);
        for _ in 0..200 {
            let straight = noisy(|chi| 60.0 * chi, 3.0, cells, &mut random);
            alarms += usize::from(!profiles(&straight, &ask).0[0].knickpoints.is_empty());
            let broken = noisy(|chi| 60.0 * chi + 60.0 * (chi - 6.0).max(0.0), 3.0, cells, &mut random);
            let knicks = &profiles(&broken, &ask).0[0].knickpoints;
            let m = 1.0 - 1.67 * 0.45;
            let s = (21_000f64.powf(m) - 6.0 * m * 6.69f64.powf(0.45)).powf(1.0 / m);
            if let Some(k) = knicks.iter().min_by(|a, b| a.p.total_cmp(&b.p)) {
                found += usize::from((k.ratio / 2.0).ln().abs() < 0.2);
                off = off.max((k.from_outlet_m - (21_000.0 - s)).abs());
                extra += knicks.len() - 1;
            }
        }
        println!(
            "noise over {cells} cells: {alarms} false alarms of 200, {found} found, off by {off:.0} m at most, {extra} more"
        );
        assert!(alarms <= 6, "{alarms} of 200");
        assert!(found >= least && off < 400.0 && extra <= 6, "{found} of 200, {off} m, {extra}");
    }
}

/// A trunk of 30 km with a tributary every 2 km, all steady at θ = 0.45 in χ, with correlated noise.
fn steady_basin(sd: f64, cells: f64, random: &mut impl rand::Rng) -> Network {
    const THETA: f64 = 0.45;
    let step = 100.0;
    let law = |length: f64| 6.69 * length.max(step).powf(1.67);
    let keep = (-1.0 / cells).exp();
    let mut e: f64 = 0.0;
    let mut n = Network::default();
    let (mut z, mut upper): (f64, Option<usize>) = (0.0, None);
    let count = 14;
    // From the outlet upward: a reach of trunk, then a tributary at its upper end.
    let trunk_area = |from_head: f64| law(from_head);
    let mut add = |n: &mut Network, to: usize, foot_z: f64, length: f64, head: f64, row: f64| {
        let cells = (length / step) as usize;
        let mut z = foot_z;
        let mut stations = Vec::new();
        for i in 1..=cells {
            let from_head = head + length - i as f64 * step;
            z += 100.0 * trunk_area(from_head + 0.5 * step).powf(-THETA) * step;
            let fresh: f64 = StandardNormal.sample(random);
            e = keep * e + (1.0 - keep * keep).sqrt() * fresh;
            stations.push(Station {
                at: Point::new(n.nodes[to].at.x - i as f64 * step, row),
                along: length - i as f64 * step,
                elevation_m: Some(z + sd * e),
                area_m2: Some(trunk_area(from_head)),
                ..Station::default()
            });
        }
        stations.reverse();
        n.nodes.push(NetworkNode { at: stations[0].at, elevation_m: None });
        let from = n.nodes.len() - 1;
        let mut r = reach(from, to, vec![stations[0].at, n.nodes[to].at]);
        r.length = length;
        r.stations = stations;
        n.reaches.push(r);
        (from, z)
    };
    n.nodes.push(NetworkNode { at: Point::default(), elevation_m: None });
    for k in 0..count {
        let head = 30_000.0 - 2000.0 * f64::from(k + 1);
        let (node, top) = add(&mut n, upper.unwrap_or(0), z, 2000.0, head, 0.0);
        (upper, z) = (Some(node), top);
        add(&mut n, node, z, 2000.0 + 0.2 * head, 500.0, 100.0 + f64::from(k));
    }
    n.ordered()
}

/// The concavity of steady basins with noise: least scatter is right on average, and the range holds the truth in
/// at least 34 of 40.
#[test]
fn concavity_of_noisy_basins_lies_in_its_range() {
    for cells in [0.5, 5.0] {
        let mut random = Seed(13).stream("basins", cells as u64);
        let (mut inside, mut sum, mut width, mut slope_inside) = (0, 0.0, 0.0, 0);
        for _ in 0..40 {
            let basin = steady_basin(10.0, cells, &mut random);
            let fit = profiles(&basin, &ASK).1.expect("a fit");
            let [low, high] = fit.theta_range.expect("a range");
            inside += usize::from(low <= 0.45 && 0.45 <= high);
            sum += fit.theta / 40.0;
            width += (high - low) / 40.0;
            let known = ProfileAsk { theta: Some(0.45), ..ASK };
            let [low, high] = profiles(&basin, &known).1.and_then(|f| f.slope_ci95).expect("an interval");
            slope_inside += usize::from(low <= 100.0 && 100.0 <= high);
        }
        println!(
            "noise over {cells} cells: mean θ {sum:.4}, range of {width:.4} holds it {inside}, slope {slope_inside} of 40"
        );
        assert_close!(sum, 0.45, 0.01, "mean θ");
        assert!(inside >= 34 && slope_inside >= 34, "{inside} and {slope_inside} of 40");
    }
}

/// Directed paths on a lattice that step down, or down and left, at random (Scheidegger 1967): from the channels alone
/// the exponent is that of the full lengths up to the divide, over the same basins, within 0.05.
#[test]
fn hack_of_a_directed_random_network() {
    let (width, height) = (400usize, 400usize);
    let (mut exponents, mut wanted) = (Vec::new(), Vec::new());
    for draw in 0..4 {
        let mut random = Seed(17).stream("directed", draw);
        let cells = width * height;
        let down: Vec<usize> = (0..cells)
            .map(|c| {
                let (x, y) = (c % width, c / width);
                let side = if random.random::<bool>() { 0 } else { width - 1 };
                if y + 1 == height { usize::MAX } else { (x + side) % width + (y + 1) * width }
            })
            .collect();
        let mut area = vec![1.0f64; cells];
        for c in 0..cells {
            if down[c] != usize::MAX {
                area[down[c]] += area[c];
            }
        }
        let mut length = vec![0.0f64; cells];
        for c in (0..cells).filter(|c| down[*c] != usize::MAX) {
            length[down[c]] = length[down[c]].max(length[c] + 1.0);
        }
        let channel = |c: usize| area[c] >= 10.0;
        // Area at the head of the longest channel, and the way to it.
        let (mut head, mut way) = (area.clone(), vec![0.0f64; cells]);
        for c in (0..cells).filter(|c| channel(*c) && down[*c] != usize::MAX) {
            if way[c] + 1.0 > way[down[c]] {
                (way[down[c]], head[down[c]]) = (way[c] + 1.0, head[c]);
            }
        }
        let mut above = vec![0; cells];
        (0..cells).filter(|c| channel(*c) && down[*c] != usize::MAX).for_each(|c| above[down[c]] += 1);
        // Rows are lengths; sideways steps do not count.
        let at = |c: usize| Point::new((c % width) as f64 * 1e-6, (c / width) as f64);
        let mut n = Network::default();
        let mut node_of = vec![usize::MAX; cells];
        let mut node = |c: usize, n: &mut Network| {
            if node_of[c] == usize::MAX {
                n.nodes.push(NetworkNode { at: at(c), elevation_m: None });
                node_of[c] = n.nodes.len() - 1;
            }
            node_of[c]
        };
        for first in (0..cells).filter(|c| channel(*c) && above[*c] != 1 && down[*c] != usize::MAX) {
            let mut line = vec![first];
            let mut c = first;
            loop {
                c = down[c];
                line.push(c);
                if above[c] != 1 || down[c] == usize::MAX {
                    break;
                }
            }
            let (from, to) = (node(first, &mut n), node(c, &mut n));
            let mut r = reach(from, to, line.iter().map(|c| at(*c)).collect());
            r.stations = line
                .iter()
                .enumerate()
                .map(|(i, c)| Station {
                    at: at(*c),
                    along: i as f64,
                    area_m2: Some(area[*c]),
                    ..Station::default()
                })
                .collect();
            n.reaches.push(r);
        }
        let n = n.ordered();
        let law = hack(&n).expect("streams");
        let full: Vec<[f64; 2]> = streams(&n)
            .iter()
            .filter_map(|s| {
                let stations = &n.reaches[s[s.len() - 1]].stations;
                let end = stations[stations.len() - 2].at;
                let c = end.y as usize * width + (end.x * 1e6).round() as usize;
                (area[c] >= 10.0 * head[c]).then(|| [area[c].ln(), (length[c] + 1.0).ln()])
            })
            .collect();
        let mean = |k: usize| full.iter().map(|r| r[k]).sum::<f64>() / full.len() as f64;
        let (x, y) = (mean(0), mean(1));
        let slope = full.iter().map(|r| (r[0] - x) * (r[1] - y)).sum::<f64>()
            / full.iter().map(|r| (r[0] - x).powi(2)).sum::<f64>();
        wanted.push(slope);
        let [low, high] = law.exponent_ci95.expect("an interval");
        println!(
            "Hack's exponent {:.3} [{low:.3}, {high:.3}], r² {:.3}; of full lengths {slope:.3}",
            law.exponent, law.r2
        );
        exponents.push(law.exponent);
    }
    let mean = |v: &[f64]| v.iter().sum::<f64>() / v.len() as f64;
    assert_close!(mean(&exponents), mean(&wanted), 0.05, "Hack's exponent");
}

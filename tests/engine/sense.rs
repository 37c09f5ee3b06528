//! The sense of flow on simulated trees and deltas: how often each kind of evidence is right, and whether
//! its probabilities mean what they say.

use rand::Rng as _;
use rand_chacha::ChaCha8Rng;
use rand_distr::{Distribution as _, StandardNormal};

use ventifact::ground::{
    FlowSense, Network, NetworkNode, Point, Polyline, Reach, ReachOrigin, Seed, SenseKind, Station, Width,
};
use ventifact::science::channel::sense::sense;

fn normal(rng: &mut ChaCha8Rng) -> f64 {
    StandardNormal.sample(rng)
}

/// What a simulated network shows.
#[derive(Clone, Copy)]
struct Shows {
    /// A delta: water enters at the root and parts.
    parting: bool,
    widths: bool,
}

/// A forking tree of up to `reaches` reaches from a root; `true` where a reach is written against the flow.
fn tree(seed: u64, reaches: usize, shows: Shows) -> (Network, Vec<bool>) {
    let mut rng = Seed(seed).stream("tree", 0);
    let mut nodes = vec![NetworkNode { at: Point::new(500.0, 0.0), elevation_m: None }];
    let mut found: Vec<Reach> = Vec::new();
    let mut against = Vec::new();
    // (node, bearing, width of the reach that leaves it away from the root)
    let mut tips = vec![(0usize, std::f64::consts::FRAC_PI_2, 24.0f64)];
    while found.len() + 2 <= reaches || found.is_empty() {
        let (node, bearing, width) = tips.remove(0);
        let length = 70.0 * (0.3 * normal(&mut rng)).exp();
        let start = nodes[node].at;
        let curve = 0.3 * normal(&mut rng);
        let points: Vec<Point> = (0..=20)
            .map(|i| {
                let t = f64::from(i) / 20.0;
                let turned = bearing + curve * t;
                Point::new(start.x + length * t * turned.cos(), start.y + length * t * turned.sin())
            })
            .collect();
        let end = nodes.len();
        nodes.push(NetworkNode { at: points[20], elevation_m: None });
        let widening = 0.1 + 0.12 * normal(&mut rng);
        let mut rough = 0.0;
        let stations: Vec<Station> = (0..=20)
            .map(|i| {
                rough = 0.6 * rough + 0.06 * normal(&mut rng);
                let t = f64::from(i) / 20.0;
                // Away from the root channels narrow, in trees and in deltas alike, but within a delta's
                // branches water has nowhere to come from.
                let trend = if shows.parting { 0.0 } else { -widening * (t - 0.5) };
                let width = Some(width * (trend + rough).exp()).filter(|_| shows.widths);
                Station { at: points[i as usize], along: length * t, width, ..Station::default() }
            })
            .collect();
        let away = Reach {
            from: node,
            to: end,
            line: Polyline(points.clone()),
            length,
            sense: FlowSense::default(),
            order: None,
            width: shows.widths.then_some(Width { mean: width, se: 0.05 * width }),
            stations,
            origin: ReachOrigin::Detected,
            confidence: 1.0,
        };
        // Away from the root is upstream in a tree, downstream in a delta; written either way.
        let written_away = rng.random::<bool>();
        against.push(written_away != shows.parting);
        found.push(if written_away { away } else { away.reversed() });
        let last = (points[20].y - points[18].y).atan2(points[20].x - points[18].x);
        let (left, right) = (0.55 + 0.2 * normal(&mut rng), 0.55 + 0.2 * normal(&mut rng));
        for turn in [left.abs(), -right.abs()] {
            let narrower = (-0.35 + 0.2 * normal(&mut rng)).exp().min(1.0);
            tips.push((end, last + turn, width * narrower));
        }
    }
    (Network { nodes, reaches: found }, against)
}

/// (right, all) reaches and, in five bins of probability ½ … 1, (sum of probability, right, all).
type Score = ((usize, usize), [(f64, usize, usize); 5]);

fn score(networks: &[(Network, Vec<bool>)], told: impl Fn(&Network, &[bool], u64) -> Network) -> Score {
    let (mut right, mut all) = (0, 0);
    let mut bins = [(0.0, 0, 0); 5];
    for (k, (network, against)) in networks.iter().enumerate() {
        let sensed = told(network, against, k as u64);
        for ((before, after), against) in network.reaches.iter().zip(&sensed.reaches).zip(against) {
            let turned = (before.from, before.to) != (after.from, after.to);
            let p = after.sense.probability();
            let good = turned == *against;
            right += usize::from(good);
            all += 1;
            let bin = &mut bins[(((p - 0.5) * 10.0) as usize).min(4)];
            *bin = (bin.0 + p, bin.1 + usize::from(good), bin.2 + 1);
        }
    }
    ((right, all), bins)
}

fn report(what: &str, ((right, all), bins): &Score) -> f64 {
    let share = *right as f64 / *all as f64;
    print!("{what}: {:.1} % right;", 100.0 * share);
    for (p, good, n) in bins.iter().filter(|b| b.2 > 0) {
        print!(" said {:.2}: {:.2} of {n};", p / *n as f64, *good as f64 / *n as f64);
    }
    println!();
    share
}

/// Beds that fall by 2 cm a pixel along the channels toward the root, or away from it, with bumps of the
/// ground on top; known at the points of the network's lines.
fn relief(network: &Network, seed: u64, parting: bool, bumps: f64) -> impl Fn(Point) -> Option<f64> + use<> {
    let mut rng = Seed(seed).stream("relief", 0);
    let waves: Vec<[f64; 3]> = (0..12)
        .map(|_| [0.12 * normal(&mut rng), 0.12 * normal(&mut rng), 6.3 * rng.random::<f64>()])
        .collect();
    // Nodes and reaches were made from the root outward.
    let mut far = vec![0.0; network.nodes.len()];
    let mut beds: Vec<(Point, f64)> = Vec::new();
    for reach in &network.reaches {
        let (near, end) = (reach.from.min(reach.to), reach.from.max(reach.to));
        far[end] = far[near] + reach.length;
        let count = reach.line.0.len() - 1;
        for (i, p) in reach.line.0.iter().enumerate() {
            let share = i as f64 / count as f64;
            let share = if reach.from == near { share } else { 1.0 - share };
            beds.push((*p, 0.02 * (far[near] + share * reach.length) * if parting { -1.0 } else { 1.0 }));
        }
    }
    move |p| {
        let bed = beds.iter().min_by(|a, b| a.0.distance(p).total_cmp(&b.0.distance(p)))?.1;
        let wave = |w: &[f64; 3]| (w[0] * p.x + w[1] * p.y + w[2]).sin();
        Some(bed + bumps * waves.iter().map(wave).sum::<f64>())
    }
}

#[test]
fn each_kind_of_evidence_is_right_as_often_as_it_says() {
    let of = |parting: bool, widths: bool| -> Vec<_> {
        (0..60).map(|seed| tree(seed + 1000, 31, Shows { parting, widths })).collect()
    };
    let plain = |network: &Network, _: &[bool], _: u64| sense(network.clone(), None, &[]).0;
    let arrow = |network: &Network, against: &[bool], _: u64| {
        let line = &network.reaches[0].line.0;
        let (a, b) = (line[8], line[12]);
        sense(network.clone(), None, &[if against[0] { [b, a] } else { [a, b] }]).0
    };
    let bare = report("trees, lines only", &score(&of(false, false), plain));
    let wide = report("trees, widths", &score(&of(false, true), plain));
    let pointed = report("trees, widths, an arrow on the trunk", &score(&of(false, true), arrow));
    let unpointed = report("deltas, widths", &score(&of(true, true), plain));
    let delta = report("deltas, widths, an arrow on the trunk", &score(&of(true, true), arrow));
    let line_delta = report("deltas, lines only, an arrow on the trunk", &score(&of(true, false), arrow));
    let falls = |parting: bool, bumps: f64| {
        move |network: &Network, _: &[bool], k: u64| {
            let relief = relief(network, k, parting, bumps);
            sense(network.clone(), Some(&relief), &[]).0
        }
    };
    let low = report("trees, elevation", &score(&of(false, false), falls(false, 0.1)));
    let rough = report("trees, rough elevation", &score(&of(false, false), falls(false, 1.0)));
    let low_delta = report("deltas, elevation, widths", &score(&of(true, true), falls(true, 0.1)));
    let mut mixed = Vec::new();
    for widths in [false, true] {
        mixed.extend(of(false, widths).into_iter().take(48));
        mixed.extend(of(true, widths).into_iter().take(6));
    }
    let mix = score(&mixed, plain);
    report("eight trees to a delta, lines or widths", &mix);
    for (p, good, n) in mix.1.iter().filter(|b| b.2 > 150) {
        let (said, found) = (p / *n as f64, *good as f64 / *n as f64);
        assert!((said - found).abs() < 0.13, "said {said}, found {found}");
    }
    assert!(bare > 0.95 && wide > 0.95 && pointed > 0.97, "{bare} {wide} {pointed}");
    assert!(unpointed < 0.5, "nothing tells a delta from a tree: {unpointed}");
    assert!(delta > 0.9 && line_delta > 0.85, "{delta} {line_delta}");
    assert!(low > 0.95 && rough > 0.85 && low_delta > 0.9, "{low} {rough} {low_delta}");
}

/// Without elevation or arrow the answer rests on the kind of network, and says no more than that.
#[test]
fn junctions_alone_are_never_sure() {
    let (network, _) = tree(5, 41, Shows { parting: false, widths: false });
    for reach in sense(network, None, &[]).0.reaches {
        let p = reach.sense.probability();
        assert!((0.5..0.93).contains(&p), "{p}");
    }
}

#[test]
fn nothing_only_comes_or_only_goes_and_arrows_rule() {
    for seed in 0..20 {
        let (network, against) = tree(seed, 25, Shows { parting: seed % 2 == 0, widths: true });
        let reach = (seed as usize * 7) % network.reaches.len();
        let line = &network.reaches[reach].line.0;
        let arrow = [line[14], line[9]];
        let far = [Point::new(-900.0, -900.0), Point::new(-905.0, -900.0)];
        let (sensed, lost) = sense(network.clone(), None, &[arrow, far]);
        assert_eq!(lost, vec![Point::new(-902.5, -900.0)]);
        assert_eq!(sensed.reaches[reach].from, network.reaches[reach].to, "the arrow points back");
        let kinds: Vec<SenseKind> = sensed.reaches[reach].sense.evidence.iter().map(|e| e.kind).collect();
        assert!(kinds.contains(&SenseKind::Stated));
        assert!(sensed.reaches[reach].sense.probability() > 0.9);
        let (into, out) = (sensed.incoming(), sensed.outgoing());
        for node in sensed.junctions() {
            assert!(!into[node].is_empty() && !out[node].is_empty(), "seed {seed}, node {node}");
        }
        assert!(sensed.downstream_sequence().is_some());
        assert_eq!(against.len(), sensed.reaches.len());
        // The answer does not depend on how reaches were written.
        let mut other = network.clone();
        other.reaches.iter_mut().step_by(2).for_each(|r| *r = r.reversed());
        let again = sense(other, None, &[arrow, far]).0;
        for (a, b) in sensed.reaches.iter().zip(&again.reaches) {
            let (p, q) = (a.sense.probability(), b.sense.probability());
            assert!((p - q).abs() < 1e-6 && ((a.from, a.to) == (b.from, b.to) || p < 0.501));
        }
    }
}

/// A braid: loops keep a common sense down the valley.
#[test]
fn braids_run_one_way() {
    let mut nodes = Vec::new();
    let mut reaches = Vec::new();
    let mut reach = |from: usize, to: usize, line: Vec<Point>| {
        let length = Polyline(line.clone()).length();
        reaches.push(Reach {
            from,
            to,
            line: Polyline(line),
            length,
            sense: FlowSense::default(),
            order: None,
            width: None,
            stations: Vec::new(),
            origin: ReachOrigin::Detected,
            confidence: 1.0,
        });
    };
    for i in 0..8usize {
        let x = 100.0 * i as f64;
        nodes.push(NetworkNode { at: Point::new(x, 0.0), elevation_m: None });
        if i == 0 {
            continue;
        }
        let before = x - 100.0;
        if i % 2 == 1 {
            reach(i - 1, i, vec![Point::new(before, 0.0), Point::new(x - 50.0, 0.0), Point::new(x, 0.0)]);
        } else {
            for side in [-30.0, 30.0] {
                let line = vec![
                    Point::new(before, 0.0),
                    Point::new(before + 40.0, side),
                    Point::new(x - 40.0, side),
                    Point::new(x, 0.0),
                ];
                if side > 0.0 {
                    reach(i, i - 1, line.into_iter().rev().collect());
                } else {
                    reach(i - 1, i, line);
                }
            }
        }
    }
    let network = Network { nodes, reaches };
    assert_eq!(network.loops(), 3);
    let arrow = [Point::new(40.0, 4.0), Point::new(60.0, 4.0)];
    let sensed = sense(network, None, &[arrow]).0;
    for (i, reach) in sensed.reaches.iter().enumerate() {
        assert!(reach.to > reach.from, "reach {i} runs {} → {}", reach.from, reach.to);
    }
    assert_eq!(sensed.loops(), 3);
}

#[test]
fn empty_and_odd_networks_do_no_harm() {
    assert_eq!(sense(Network::default(), None, &[]), (Network::default(), Vec::new()));
    let (mut network, _) = tree(1, 5, Shows { parting: false, widths: true });
    network.reaches[0].line.0.truncate(2);
    network.reaches[1].stations.clear();
    let end = network.reaches[2].from;
    network.reaches[2].to = end;
    network.reaches[3].line.0.iter_mut().for_each(|p| *p = Point::new(1.0, 1.0));
    let nothing = |_: Point| None;
    let nan = |_: Point| Some(f64::NAN);
    for elevation in [&nothing as &dyn Fn(Point) -> Option<f64>, &nan] {
        let sensed = sense(network.clone(), Some(elevation), &[[Point::default(); 2]]).0;
        assert!(sensed.reaches.iter().all(|r| r.sense.probability().is_finite()));
    }
}

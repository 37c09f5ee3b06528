//! Invented findings of channel networks on Sorrel Reach: a branching tree of 41 links routed over elevation, and
//! one traced on the image whose channels part and join again.

use ventifact::ground::{
    Caution, FlowSense, Grid, LengthUnit, Network, NetworkNode, Place, Point, Polygon, Polyline, Reach,
    ReachOrigin, SenseEvidence, SenseKind, Station, Width,
};
use ventifact::science::drainage::basins::Basin;
use ventifact::science::drainage::condition::{Changed, Conditioning};
use ventifact::science::drainage::extract::Channels;
use ventifact::science::drainage::heads::HeadRule;
use ventifact::science::drainage::routing::Router;
use ventifact::science::network::compare::Agreement;
use ventifact::science::network::density::Density;
use ventifact::science::network::hierarchy::{Horton, Tokunaga};
use ventifact::science::network::hypsometry::Hypsometry;
use ventifact::science::network::junctions::Junctions;
use ventifact::science::network::planform::Planform;
use ventifact::science::network::profile::ChiFit;
use ventifact::study::{DrainageFinding, Id, NetworkFinding, TracingFinding};

use super::river_measures::{
    Dice, drop_rows, flow, junctions, orders, pattern, planform, power, profiles, ratio,
};

/// Grows a tree upstream from `at`; `heads` channels begin above it.
fn grow(network: &mut Network, dice: &mut Dice, below: usize, toward_deg: f64, heads: usize) {
    let from = network.nodes[below].at;
    let length = 26.0 + 16.0 * (heads as f64).sqrt() + 18.0 * dice.roll();
    let turn = (3 * heads.min(3)) as f64;
    let mut line = vec![from];
    let (mut x, mut y) = (from.x, from.y);
    let steps = (length / 3.0) as usize;
    let phase = 6.0 * dice.roll();
    for k in 0..steps {
        let bend = 38.0 * (phase + k as f64 * 0.42).sin() + turn * (dice.roll() - 0.5);
        let (sin, cos) = (toward_deg + bend).to_radians().sin_cos();
        (x, y) = (x + 3.0 * sin, y - 3.0 * cos);
        line.push(Point::new(x, y));
    }
    line.reverse();
    network.nodes.push(NetworkNode { at: line[0], elevation_m: None });
    let node = network.nodes.len() - 1;
    network.reaches.push(reach(node, below, line, ReachOrigin::Elevation));
    if heads > 1 {
        let left = ((heads as f64 * (0.25 + 0.5 * dice.roll())).round() as usize).clamp(1, heads - 1);
        let spread = 30.0 + 14.0 * dice.roll();
        let share = left as f64 / heads as f64;
        grow(network, dice, node, toward_deg - spread * (1.25 - share), left);
        grow(network, dice, node, toward_deg + spread * (0.25 + share), heads - left);
    }
}

fn reach(from: usize, to: usize, line: Vec<Point>, origin: ReachOrigin) -> Reach {
    Reach {
        from,
        to,
        line: Polyline(line),
        length: 0.0,
        sense: FlowSense::of_elevation(),
        order: None,
        width: None,
        stations: Vec::new(),
        origin,
        confidence: 1.0,
    }
}

/// A tree of `heads` channel heads with its outlet at `outlet`, growing toward an azimuth.
pub fn tree(heads: usize, outlet: Point, toward_deg: f64, place: &Place) -> Network {
    let mut network =
        Network { nodes: vec![NetworkNode { at: outlet, elevation_m: None }], reaches: Vec::new() };
    grow(&mut network, &mut Dice(11), 0, toward_deg, heads);
    network.on_ground(place, 1.0, |p| p).ordered()
}

/// The tree from elevation.
pub fn tree_finding(place: &Place) -> NetworkFinding {
    let network = tree(21, Point::new(1010.0, 842.0), -42.0, place);
    let profiles = profiles(&network);
    let outline = Polygon {
        outer: [
            (1010.0, 850.0),
            (470.0, 780.0),
            (310.0, 520.0),
            (420.0, 240.0),
            (820.0, 190.0),
            (1090.0, 520.0),
        ]
        .map(|(x, y)| Point::new(x, y))
        .to_vec(),
        holes: Vec::new(),
    };
    let change = |col: usize, row: usize| {
        let hill = |x: f64, y: f64, r: f64| {
            let d = (col as f64 - x).hypot(row as f64 - y);
            if d < r { 3.0 * (1.0 - d / r) } else { 0.0 }
        };
        let cut = if row == 70 && (100..112).contains(&col) { -2.0 } else { 0.0 };
        (hill(88.0, 48.0, 7.0) + hill(120.0, 84.0, 4.0) + cut) as f32
    };
    let channels = Channels {
        rule: HeadRule::Area,
        threshold_m2: 1.4e6,
        is_proposed: true,
        proposed_m2: Some(1.4e6),
        drops: drop_rows(),
        half: tree(48, Point::new(1010.0, 842.0), -42.0, place),
        twice: tree(9, Point::new(1010.0, 842.0), -42.0, place),
        network: network.clone(),
    };
    NetworkFinding {
        id: Id(7),
        name: "Sorrel branches".into(),
        raster: Id(1),
        fingerprint: "73aa10e4c2".into(),
        unit: LengthUnit::Metre,
        area: 218.0e6,
        centre: place.lonlat_of(Point::new(700.0, 500.0)),
        factor: 2,
        drainage: Some(DrainageFinding {
            conditioning: Conditioning::BreachThenFill,
            changed: Changed {
                raised_cells: 410,
                cut_cells: 60,
                valid_cells: 240_000,
                raised_volume: 1.9e5,
                cut_volume: 4.1e3,
                deepest_fill: 3.0,
                deepest_cut: 2.0,
                sinks: 118,
                breached: 31,
                filled: 86,
                left_closed: 1,
            },
            change_map: Grid::from_fn(150, 112, change),
            change_map_at: Point::default(),
            change_map_px: 8.0,
            router: Router::DInfinity,
            channels,
            basins: vec![Basin {
                outlet: Point::new(1010.0, 842.0),
                node: Some(0),
                outline,
                area_m2: 171.0e6,
                touches_edge: false,
                elevations: Vec::new(),
            }],
            cells_area_m2: 218.0e6,
        }),
        tracing: None,
        orders: orders(&network),
        horton: Some(Horton {
            bifurcation: ratio(4.3, 3.1, 6.0),
            length: ratio(2.1, 1.4, 3.0),
            area: Some(ratio(4.2, 3.5, 5.1)),
            slope: Some(ratio(1.7, 1.2, 2.4)),
            orders: network.greatest_order().unwrap_or(0),
        }),
        tokunaga: Some(Tokunaga { a: 1.1, c: 2.2, side_branches: vec![1.1, 2.4], bifurcation: 4.28 }),
        density: Some(Density {
            length: network.length(),
            inflation: 1.05,
            area: 218e6,
            density: network.length() / 218e6,
            frequency: Some(21.0 / 218e6),
        }),
        hack: Some(power(1.6, 0.58, [1e5, 1.7e8], 0.97)),
        flint: Some(power(9.1, -0.44, [1e5, 1.7e8], 0.81)),
        chi: Some(ChiFit {
            theta: 0.45,
            found: true,
            theta_range: Some([0.36, 0.53]),
            scatter: (0..=18)
                .map(|i| 0.05 * f64::from(i))
                .map(|t| [t, 4.0 + 60.0 * (t - 0.45).powi(2) + 3.0 * (t - 0.45).abs()])
                .collect(),
            slope: 14.2,
            slope_ci95: Some([13.4, 15.1]),
            r2: 0.984,
        }),
        hypsometry: Some(Hypsometry {
            lowest_m: 212.0,
            highest_m: 655.0,
            mean_m: 384.0,
            integral: 0.388,
            curve: (0..=100)
                .map(|i| f64::from(i) / 100.0)
                .map(|a| [a, (1.0 - a).powf(1.35) * (1.0 - 0.25 * (3.1 * a).sin() * a)])
                .collect(),
            relief_ratio: Some(0.031),
            melton: 0.034,
        }),
        junctions: junctions(&network),
        pattern: pattern(&network, network.reaches.len()),
        planforms: vec![planform(&network)],
        flow: Ok(flow()),
        agreements: vec![(
            Id(8),
            "Traced channels".into(),
            Agreement {
                tolerance: 75.0,
                found: 0.91,
                confirmed: 0.84,
                mean_distance: 21.0,
                same_sense: Some(0.99),
                same_order: None,
                junctions: [18, 15, 20],
                lengths: [71_000.0, 78_000.0],
            },
        )],
        sentence: "Sorrel branches: 41 links of 78.1 km drain 171 km² to one outlet, order 4, drainage density 0.36 km/km² at \
                   a threshold of 1.4 km² that the constant-drop test proposes; bifurcation ratio 4.3 (3.1–6.0), junctions \
                   63° (58°–68°) at chords of 250 m; dendritic with probability 71 %."
            .into(),
        cautions: vec![Caution::new(
            "channels-smooth",
            "A routed network exists on every surface; overlay it on an image before it is read as channels.",
        )],
        profiles,
        network,
    }
}

/// Channels on the image: a trunk that parts and joins again, with a bridged gap, a traced and an unsure one.
pub fn traced_finding(place: &Place) -> NetworkFinding {
    let at = |x: f64, y: f64| Point::new(x, y);
    let nodes = [
        (210.0, 330.0),
        (360.0, 470.0),
        (620.0, 560.0),
        (800.0, 660.0),
        (1010.0, 842.0),
        (420.0, 260.0),
        (300.0, 700.0),
        (930.0, 420.0),
    ];
    let links: [(usize, usize, f64, ReachOrigin, f64, f64); 9] = [
        (0, 1, 18.0, ReachOrigin::Detected, 0.97, 2.0),
        (1, 2, 46.0, ReachOrigin::Detected, 0.95, 4.0),
        (1, 2, -44.0, ReachOrigin::Detected, 0.72, 0.2),
        (2, 3, 14.0, ReachOrigin::Bridged, 0.6, 3.5),
        (3, 4, -22.0, ReachOrigin::Detected, 0.99, 5.0),
        (5, 1, 16.0, ReachOrigin::Detected, 0.94, 3.2),
        (6, 2, 20.0, ReachOrigin::Detected, 0.44, 0.3),
        (7, 3, -20.0, ReachOrigin::Traced, 1.0, 20.0),
        (2, 4, 90.0, ReachOrigin::Detected, 0.81, 1.0),
    ];
    let line = |from: usize, to: usize, bulge: f64| -> Vec<Point> {
        let ((ax, ay), (bx, by)) = (nodes[from], nodes[to]);
        let (dx, dy) = (bx - ax, by - ay);
        let length = f64::hypot(dx, dy);
        (0..=60)
            .map(|k| f64::from(k) / 60.0)
            .map(|t| {
                let off = bulge * (std::f64::consts::PI * t).sin()
                    + 5.0 * (t * length / 13.0).sin() * t * (1.0 - t) * 4.0;
                at(ax + t * dx - off * dy / length, ay + t * dy + off * dx / length)
            })
            .collect()
    };
    let reaches = links
        .into_iter()
        .map(|(from, to, bulge, origin, confidence, ln_odds)| {
            let line = line(from, to, bulge);
            let stations =
                line.iter().map(|p| Station { at: *p, width: Some(4.0), ..Station::default() }).collect();
            let evidence = vec![SenseEvidence { kind: SenseKind::Widening, ln_odds }];
            Reach {
                confidence,
                sense: FlowSense { evidence },
                width: Some(Width { mean: 4.0, se: 0.3 }),
                stations,
                ..reach(from, to, line, origin)
            }
        })
        .collect();
    let nodes = nodes.map(|(x, y)| NetworkNode { at: at(x, y), elevation_m: None }).to_vec();
    let network = Network { nodes, reaches }.on_ground(place, 1.0, |p| p).ordered();
    let plan = planform(&network);
    NetworkFinding {
        id: Id(8),
        name: "Traced channels of the southern reach and its nameless northern tributaries".into(),
        fingerprint: "0be1".into(),
        factor: 1,
        drainage: None,
        tracing: Some(TracingFinding {
            floor: 4.1,
            widths_px: vec![2.0, 4.0, 8.0, 16.0],
            proposed_reaches: 11,
            struck_reaches: 3,
            bridged_gaps: 1,
            loops: network.loops(),
            lost_arrows: Vec::new(),
        }),
        orders: Vec::new(),
        horton: None,
        tokunaga: None,
        density: Some(Density {
            length: network.length(),
            inflation: 1.0,
            area: 218e6,
            density: network.length() / 218e6,
            frequency: None,
        }),
        hack: None,
        flint: None,
        profiles: Vec::new(),
        chi: None,
        hypsometry: None,
        junctions: Junctions { angles: Vec::new(), by_chord: Vec::new(), chord: 800.0, too_short: 4 },
        pattern: pattern(&network, network.reaches.len()),
        planforms: vec![Planform { wavelength_spectrum: None, ..plan }],
        flow: Err("the slope is not known: choose an elevation raster or state it".into()),
        agreements: Vec::new(),
        sentence: "Traced channels: 9 reaches of 47 km with 2 loops kept, so that no order is defined; sense told on 5 of 9 \
                   reaches."
            .into(),
        cautions: vec![Caution::new("look-bias", "Channels along the radar look may be missed.")],
        network,
        ..tree_finding(place)
    }
}

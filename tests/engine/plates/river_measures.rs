//! Invented measures of channel networks on Sorrel Reach.

use std::collections::BTreeMap;

use ventifact::ground::{Axis, Azimuth, Network, Point, Polyline, Reach};
use ventifact::science::drainage::heads::DropRow;
use ventifact::science::network::flow::{FlowAsk, PalaeoFlow, Range};
use ventifact::science::network::hierarchy::{OrderCount, Ratio};
use ventifact::science::network::junctions::{AtChord, JunctionAngle, Junctions};
use ventifact::science::network::pattern::{Pattern, PatternFeatures};
use ventifact::science::network::planform::{Meander, Planform, WidthStatistics};
use ventifact::science::network::profile::{Knickpoint, Profile, ProfileStation};
use ventifact::science::network::scaling::PowerLaw;

/// A sequence of numbers in [0, 1) that is the same everywhere.
pub struct Dice(pub u64);

impl Dice {
    pub fn roll(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 33) as f64 / (1u64 << 31) as f64
    }
}

/// Metres above the outlet, of a concave channel.
fn height(from_outlet: f64) -> f64 {
    212.0 + 0.9 * from_outlet.powf(0.62)
}

/// Distance to the outlet of each node, m.
fn distances(network: &Network) -> Vec<f64> {
    let mut far = vec![0.0; network.nodes.len()];
    for node in network.downstream_sequence().expect("a tree").into_iter().rev() {
        for reach in network.reaches.iter().filter(|r| r.from == node) {
            far[node] = far[reach.to] + reach.length;
        }
    }
    far
}

pub fn profiles(network: &Network) -> Vec<Profile> {
    let far = distances(network);
    let trunk = network.trunk();
    let out: BTreeMap<usize, usize> = network.reaches.iter().enumerate().map(|(i, r)| (r.from, i)).collect();
    let one = |head: usize| {
        let mut stations = Vec::new();
        let mut node = head;
        while let Some(i) = out.get(&node) {
            let reach = &network.reaches[*i];
            let magnitude = f64::from(reach.order.map_or(1, |o| o.shreve));
            let n = reach.line.0.len();
            for (k, at) in reach.line.0.iter().enumerate().take(n - 1) {
                let x = far[node] - reach.length * k as f64 / (n - 1) as f64;
                let step = if x > 7200.0 { 26.0 } else { 0.0 };
                let z = height(x) + step + 5.0 * ((x / 900.0) + head as f64).sin() * (x / 12_000.0);
                let area = 4e5 * magnitude + 120.0 * (reach.length * k as f64 / n as f64);
                stations.push(ProfileStation {
                    at: *at,
                    from_outlet_m: x,
                    elevation_m: z,
                    area_m2: area,
                    chi: 0.0,
                    slope: Some(0.56 * x.max(50.0).powf(-0.38)),
                    ksn: Some(40.0),
                });
            }
            node = reach.to;
        }
        stations.reverse();
        let mut chi = 0.0;
        let mut last = 0.0;
        for s in &mut stations {
            chi += (s.from_outlet_m - last) * s.area_m2.powf(-0.45);
            (last, s.chi) = (s.from_outlet_m, chi);
        }
        let is_trunk = trunk.first().is_some_and(|r| network.reaches[*r].from == head);
        let break_at = stations.iter().find(|s| s.from_outlet_m > 7200.0).copied();
        let knickpoint = |s: ProfileStation, p| Knickpoint {
            at: s.at,
            from_outlet_m: s.from_outlet_m,
            elevation_m: s.elevation_m,
            ratio: 1.9,
            p,
        };
        let mut knickpoints: Vec<Knickpoint> =
            break_at.filter(|_| is_trunk).map(|s| knickpoint(s, 0.004)).into_iter().collect();
        knickpoints.extend(
            stations
                .iter()
                .find(|s| s.from_outlet_m > 3000.0)
                .filter(|_| is_trunk)
                .map(|s| knickpoint(*s, 0.031)),
        );
        Profile { is_trunk, stations, knickpoints }
    };
    let mut all: Vec<Profile> = network.heads().into_iter().map(one).collect();
    all.sort_by_key(|p| !p.is_trunk);
    all
}

pub fn orders(network: &Network) -> Vec<OrderCount> {
    let most = network.greatest_order().unwrap_or(0);
    let of = |order: u32| {
        let is = |r: &&Reach| r.order.is_some_and(|o| o.strahler == order);
        let begins = |r: &&Reach| !network.reaches.iter().any(|u| u.to == r.from && is(&u));
        let streams = network.reaches.iter().filter(is).filter(begins).count();
        let length: f64 = network.reaches.iter().filter(is).map(|r| r.length).sum();
        OrderCount {
            order,
            streams,
            mean_length: length / streams as f64,
            mean_area_m2: Some(3e5 * 4.2f64.powi(order as i32 - 1)),
            mean_slope: Some(0.03 / f64::from(order)),
        }
    };
    (1..=most).map(of).collect()
}

pub fn ratio(value: f64, low: f64, high: f64) -> Ratio {
    Ratio { value, ci95: Some([low, high]) }
}

pub fn junctions(network: &Network) -> Junctions {
    let mut dice = Dice(5);
    let angle = |node: usize, dice: &mut Dice| JunctionAngle {
        at: network.nodes[node].at,
        node,
        angle_deg: 34.0 + 58.0 * 0.5 * (dice.roll() + dice.roll()),
        turns_deg: [20.0, 38.0],
        toward: [Azimuth::from_deg(120.0), Azimuth::from_deg(170.0)],
        orders: Some([1, 2]),
        howard_deg: Some(55.0),
    };
    let angles: Vec<JunctionAngle> = network.junctions().into_iter().map(|n| angle(n, &mut dice)).collect();
    let at = |chord, mean_deg: f64, half| AtChord {
        chord,
        n: angles.len(),
        mean_deg,
        ci95_deg: Some([mean_deg - half, mean_deg + half]),
        median_deg: mean_deg - 1.4,
    };
    Junctions {
        chord: 250.0,
        by_chord: vec![at(125.0, 67.1, 6.3), at(250.0, 63.0, 5.2), at(500.0, 58.8, 7.9)],
        angles,
        too_short: 1,
    }
}

pub fn flow() -> (FlowAsk, PalaeoFlow) {
    let range = |least, middle, greatest| Range { least, middle, greatest };
    let ask = FlowAsk {
        gravity: 1.35,
        width_m: [85.0, 130.0],
        width_to_depth: [10.0, 40.0],
        slope: [0.0011, 0.0024],
        friction: [0.03, 0.12],
        liquid_density: 1000.0,
        grain_density: 2650.0,
        shields: [0.03, 0.06],
        manning_earth: [0.025, 0.05],
    };
    let flow = PalaeoFlow {
        depth_m: range(2.1, 5.4, 13.0),
        velocity: range(0.5, 1.1, 2.4),
        froude: range(0.27, 0.41, 0.66),
        discharge: range(110.0, 640.0, 3900.0),
        discharge_by_width: range(210.0, 520.0, 1250.0),
        discharge_by_manning: range(60.0, 410.0, 2800.0),
        equivalent_manning: range(0.043, 0.071, 0.118),
        grain_m: range(0.024, 0.105, 0.6),
        shares: vec![("width over depth", 0.62), ("friction", 0.19), ("width", 0.11), ("slope", 0.08)],
    };
    (ask, flow)
}

pub fn planform(network: &Network) -> Planform {
    let reaches = network.trunk();
    let length: f64 = reaches.iter().map(|r| network.reaches[*r].length).sum();
    let points: Vec<Point> =
        reaches.iter().flat_map(|r| network.reaches[*r].line.0.iter().copied()).collect();
    let mean = |i: usize| {
        let (a, b) = (i.saturating_sub(12), (i + 12).min(points.len() - 1));
        let n = (b - a + 1) as f64;
        points[a..=b].iter().fold(Point::default(), |m, p| Point::new(m.x + p.x / n, m.y + p.y / n))
    };
    let wave = |wavelength, amplitude| Meander {
        wavelength,
        arc_wavelength: 1.3 * wavelength,
        ci95: Some([0.84 * wavelength, 1.17 * wavelength]),
        amplitude,
    };
    let along: Vec<[f64; 2]> = (0..400)
        .map(|i| f64::from(i) / 400.0 * length)
        .map(|x| [x, 58.0 + 0.0052 * x + 9.0 * (x / 310.0).sin() + 6.0 * (x / 77.0).cos()])
        .collect();
    Planform {
        reaches,
        length,
        valley: Polyline((0..points.len()).step_by(3).map(mean).collect()),
        valley_scale: 1900.0,
        valley_length: length / 1.21,
        sinuosity: 1.21,
        sinuosity_by_scale: vec![[950.0, 1.14], [1900.0, 1.21], [3800.0, 1.26]],
        wavelength_spectrum: Some(wave(1120.0, 84.0)),
        wavelength_inflections: Some(wave(1040.0, 79.0)),
        radius: Some([140.0, 210.0, 330.0]),
        bends: 17,
        width: Some(WidthStatistics {
            n: 400,
            n_eff: 41.0,
            mean: 101.0,
            mean_ci95: Some([95.2, 106.9]),
            quartiles: [81.0, 99.0, 121.0],
            along,
        }),
        wavelength_widths: Some(11.1),
    }
}

pub fn pattern(network: &Network, links: usize) -> Pattern {
    let rose: Vec<f64> = (0..18)
        .map(|i| {
            let d = Axis::from_deg(10.0 * f64::from(i) + 5.0).separation(Axis::from_deg(128.0));
            (-0.5 * (d / 24.0).powi(2)).exp() + 0.18
        })
        .collect();
    let total: f64 = rose.iter().sum();
    Pattern {
        links,
        too_few: links < 30,
        probabilities: (links >= 30).then_some([0.71, 0.14, 0.09, 0.05, 0.01]),
        features: PatternFeatures {
            alignment: 0.38,
            crossing: 0.12,
            mean_junction_deg: Some(63.0),
            right_angles: Some(0.15),
            short_across: Some(0.9),
            radial: network.greatest_order().map(|_| 0.11),
        },
        rose: rose.iter().map(|s| s / total).collect(),
        rose_bin_deg: 10.0,
        modes: vec![Axis::from_deg(128.0)],
    }
}

pub fn drop_rows() -> Vec<DropRow> {
    (0..14)
        .map(|i| {
            let threshold_m2 = 4e4 * 1.55f64.powi(i);
            let t = -9.5 + 2.1 * f64::from(i) - 0.09 * f64::from(i * i);
            DropRow {
                threshold_m2,
                first: (90 >> (i / 2), 31.0, 4.0),
                higher: (40 >> (i / 2), 38.0, 5.0),
                t: (i < 12).then_some(t),
                density: 0.004 / f64::from(i + 1),
            }
        })
        .collect()
}

/// y = factor · x^exponent with some scatter.
pub fn power(factor: f64, exponent: f64, [low, high]: [f64; 2], r2: f64) -> PowerLaw {
    let mut dice = Dice(3);
    let points = (0..220)
        .map(|i| low * (high / low).powf(f64::from(i) / 219.0))
        .map(|x| [x, factor * x.powf(exponent) * (1.6 * (1.0 - r2).sqrt() * (dice.roll() - 0.5)).exp()])
        .collect();
    PowerLaw { factor, exponent, exponent_ci95: Some([exponent - 0.03, exponent + 0.03]), r2, points }
}

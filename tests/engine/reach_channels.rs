//! The channels of the demo's elevation against their truth.

use ventifact::ground::{Body, Grid, Network, Place, Point, Seed, Work};
use ventifact::science::drainage::accumulate::area;
use ventifact::science::drainage::cells::Cells;
use ventifact::science::drainage::condition::{BreachLimits, Conditioning, condition};
use ventifact::science::drainage::d8::receivers;
use ventifact::science::drainage::extract::{ChannelAsk, Channels, channels};
use ventifact::science::drainage::heads::HeadRule;
use ventifact::science::drainage::routing::Router;
use ventifact::science::scene::reach;

/// The channels of an elevation raster with square cells.
fn routed(elevation: &Grid<f32>, size_m: f64, threshold_m2: Option<f64>) -> Channels {
    let work = Work::quiet();
    let place = Place::plane([size_m; 2], 0.0, Body::halvane()).unwrap();
    let cells = Cells::of(&place, elevation.width(), elevation.height()).unwrap();
    let limits = BreachLimits { depth_m: 20.0, cells: 50 };
    let conditioned = condition(elevation, &cells, Conditioning::FillSloped, limits, &[], &work).unwrap();
    let receivers = receivers(&conditioned, &cells, &work).unwrap();
    let area = area(&conditioned, &cells, Router::D8, &receivers, &work).unwrap();
    let ask = ChannelAsk {
        rule: HeadRule::Area,
        threshold_m2,
        outlets: Vec::new(),
        snap_cells: 5,
        curvature_scale_cells: 1.0,
    };
    channels(&conditioned.surface, &cells, &receivers, &area, &place, &ask, &work).unwrap().unwrap()
}

/// The network in mosaic pixels.
fn demo_network(seed: Seed) -> [Network; 3] {
    let step = reach::ELEVATION_STEP as f64;
    let mut elevation = reach::elevation(seed);
    let ground = reach::channel_ground();
    let centre = |col: usize, row: usize| Point::new((col as f64 + 0.5) * step, (row as f64 + 0.5) * step);
    elevation.mask_where(|col, row| ground.contains(centre(col, row)));
    let found = routed(&elevation, reach::PIXEL_M * step, Some(reach::CHANNEL_THRESHOLD_M2));
    let place = Place::pixels(0.0);
    [found.half, found.network, found.twice]
        .map(|n| n.on_ground(&place, step, |p| Point::new(p.x * step, p.y * step)).ordered())
}

#[test]
fn elevation_gives_the_true_network() {
    let truth = reach::network_truth();
    for seed in [1, 2, 3].map(Seed) {
        let [half, found, twice] = demo_network(seed);
        // The demo's own ground keeps its network over a factor of four.
        let own = (seed == Seed(1)).then_some(&half);
        for network in own.into_iter().chain([&found, &twice]) {
            let counts = [network.reaches.len(), network.heads().len(), network.junctions().len()];
            assert_eq!((counts, network.outlets().len()), ([9, 5, 4], 1), "{seed:?}");
            assert_eq!(network.greatest_order(), truth.greatest_order());
        }
        // Within 2 % once what cell paths overstate is taken off (H10 of the checks).
        let ratio = found.length() / 1.054_785_6 / truth.length();
        assert!((ratio - 1.0).abs() < 0.02, "{seed:?}: length {ratio} of the truth");
        // Every true reach has its own with the same order and sense, ends within 8 mosaic pixels = 4 cells. A
        // head begins lower by what the threshold takes to gather.
        for reach in &truth.reaches {
            let [from, to] = [reach.from, reach.to].map(|n| truth.nodes[n].at);
            let same = found.reaches.iter().filter(|r| {
                let [a, b] = [r.from, r.to].map(|n| found.nodes[n].at);
                a.distance(from) < 8.0 && b.distance(to) < 8.0
            });
            let orders: Vec<_> = same.map(|r| r.order).collect();
            assert_eq!(orders, [reach.order], "{seed:?}: {from:?} to {to:?}");
        }
    }
}

//! Networks on the table: what is drawn of them, what lies under the pointer, and that very large ones stay quick.

use std::sync::Arc;
use std::time::Instant;

use egui::Theme;
use egui_kittest::kittest::Queryable as _;
use ventifact::desk::{
    Charted, Command, Cursor, DrawCommand, Model, NetworkCommand, Tool, ViewCommand, apply, channels,
};
use ventifact::ground::{
    FlowSense, Grid, LengthUnit, Network, NetworkNode, Place, Point, Polyline, Reach, ReachOrigin,
    SenseEvidence, SenseKind,
};
use ventifact::study::{Id, NetworkEntry, NetworkFinding, fingerprint};

use super::harness::compare;
use super::{scene, table};

/// A tree of `depth` forks below its outlet: 2^depth heads, laid out in a box of pixels.
fn tree(depth: u32, [width, height]: [f64; 2]) -> Network {
    let mut network = Network::default();
    network.nodes.push(node(Point::new(0.5 * width, height)));
    let crown = Point::new(0.5 * width, 0.94 * height);
    grow(&mut network, depth, 0, crown, 0.25 * width, 0.46 * height, true);
    network.ordered()
}

fn node(at: Point) -> NetworkNode {
    NetworkNode { at, elevation_m: None }
}

/// A reach from `at` down to the node `to`, and above it two branches, forking by turns across and along.
fn grow(network: &mut Network, depth: u32, to: usize, at: Point, across: f64, along: f64, level: bool) {
    let from = network.nodes.len();
    network.nodes.push(node(at));
    let end = network.nodes[to].at;
    let line = (0..=12).map(|i| {
        let t = f64::from(i) / 12.0;
        let bow = 0.06 * (t * std::f64::consts::TAU).sin();
        let (dx, dy) = (end.x - at.x, end.y - at.y);
        Point::new(at.x + t * dx - bow * dy, at.y + t * dy + bow * dx)
    });
    let line = Polyline(line.collect());
    network.reaches.push(Reach {
        from,
        to,
        length: line.length(),
        line,
        sense: FlowSense { evidence: vec![SenseEvidence { kind: SenseKind::Widening, ln_odds: 2.5 }] },
        order: None,
        width: None,
        stations: Vec::new(),
        origin: ReachOrigin::Detected,
        confidence: 1.0,
    });
    if depth > 0 {
        for side in [-1.0, 1.0] {
            let next = if level {
                Point::new(at.x + side * across, at.y - 0.3 * along)
            } else {
                Point::new(at.x + side * 0.2 * across, at.y + side * along - 0.1 * along)
            };
            let (a, b) = if level { (0.5 * across, along) } else { (across, 0.5 * along) };
            grow(network, depth - 1, from, next, a, b, !level);
        }
    }
}

fn finding(id: Id, network: Network, fingerprint: String) -> NetworkFinding {
    NetworkFinding {
        id,
        name: "Channels 1".into(),
        raster: Id(1),
        fingerprint,
        unit: LengthUnit::Pixel,
        area: 1e6,
        centre: None,
        factor: 1,
        network,
        drainage: None,
        tracing: None,
        orders: Vec::new(),
        horton: None,
        tokunaga: None,
        density: None,
        hack: None,
        flint: None,
        profiles: Vec::new(),
        chi: None,
        hypsometry: None,
        junctions: Default::default(),
        pattern: Default::default(),
        planforms: Vec::new(),
        flow: Err("no width is known".into()),
        agreements: Vec::new(),
        sentence: "A tree of forks.".into(),
        cautions: Vec::new(),
    }
}

/// A plain of 900 × 700 pixels with the network on it, selected.
fn with(network: Network) -> (Model, Id) {
    let plain =
        Grid::from_fn(900, 700, |col, row| ((col as f32 * 0.05).sin() * (row as f32 * 0.04).cos()) * 0.2);
    let mut model = scene::desk(plain, Place::pixels(0.0), Vec::new());
    model.session.measures = false;
    let id = model.sheet.fresh_id();
    let entry = NetworkEntry::from_image(id, "Channels 1", Id(1));
    model.sheet.networks.push(entry.clone());
    let fingerprint = fingerprint::of_network(&model.sheet, &entry);
    let found = Ok(Arc::new(finding(id, network, fingerprint.clone())));
    model.session.results.take_network(id, Charted::new(found, fingerprint));
    apply(&mut model, Command::Network(NetworkCommand::Select(Some(id))));
    (model, id)
}

/// A small network with a bridged and a doubtful reach, and something said of each kind.
fn described() -> Model {
    let mut network = tree(4, [900.0, 700.0]);
    network.reaches[3].origin = ReachOrigin::Bridged;
    network.reaches[3].confidence = 0.8;
    network.reaches[18].confidence = 0.2;
    let struck = network.reaches[9].line.0[6];
    let (mut model, id) = with(network);
    apply(&mut model, Command::Network(NetworkCommand::Strike { id, at: struck }));
    let arrow = [Point::new(520.0, 560.0), Point::new(500.0, 630.0)];
    apply(&mut model, Command::Network(NetworkCommand::SetFlow { id, arrow }));
    let entry = model.sheet.networks[0].clone();
    let now = fingerprint::of_network(&model.sheet, &entry);
    let found = model.session.results.network(id).expect("a finding").clone();
    model.session.results.take_network(id, Charted::new(Ok(found), now));
    model
}

#[test]
fn a_network_by_day() {
    let mut harness = table::open(described(), [820.0, 620.0], Theme::Light);
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/network-by-day.png");
}

#[test]
fn a_network_by_night_with_a_reach_under_the_pointer() {
    let mut model = described();
    let pixel = model.session.results.network(model.sheet.networks[0].id).expect("found").network.reaches[1]
        .line
        .0[6];
    let cursor = Some(Cursor { raster: Id(1), pixel });
    apply(&mut model, Command::View(ViewCommand::Point(cursor)));
    let (_, reach) = channels::pointed_reach(&model).expect("a reach is under the pointer");
    assert_eq!(reach.order.map(|o| o.strahler), Some(4));
    let mut harness = table::open(model, [820.0, 620.0], Theme::Dark);
    let at = harness.get_by_role(egui::accesskit::Role::Canvas).rect().center();
    let camera = harness.state().model.camera().expect("open").1;
    let on = at
        + egui::vec2(
            ((pixel.x - camera.centre.x) * camera.scale) as f32,
            ((pixel.y - camera.centre.y) * camera.scale) as f32,
        );
    harness.hover_at(on);
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/network-by-night.png");
}

#[test]
fn a_click_on_a_reach_selects_its_network_and_strikes_it_with_that_tool() {
    let (mut model, id) = with(tree(4, [900.0, 700.0]));
    apply(&mut model, Command::Network(NetworkCommand::Select(None)));
    let mut harness = table::open(model, [820.0, 620.0], Theme::Light);
    let place =
        harness.state().model.session.results.network(id).expect("found").network.reaches[0].line.0[6];
    let camera = harness.state().model.camera().expect("open").1;
    let middle = harness.get_by_role(egui::accesskit::Role::Canvas).rect().center();
    let on = middle
        + egui::vec2(
            ((place.x - camera.centre.x) * camera.scale) as f32,
            ((place.y - camera.centre.y) * camera.scale) as f32,
        );
    table::click(&mut harness, on);
    assert_eq!(harness.state().model.view.network, Some(id));
    apply(&mut harness.state_mut().model, Command::Draw(DrawCommand::Take(Tool::Strike)));
    harness.run();
    table::click(&mut harness, on);
    let struck = |model: &Model| model.sheet.networks[0].image().map_or(0, |it| it.struck.len());
    assert_eq!(struck(&harness.state().model), 1);
    table::click(&mut harness, on);
    assert_eq!(struck(&harness.state().model), 0, "a second click brings it back");
}

/// 131 071 reaches of 13 points. What is drawn is bounded, so that a frame stays a frame also without
/// optimisation; the printed figure is what it took here.
#[test]
fn a_hundred_thousand_reaches_stay_quick() {
    let network = tree(16, [900.0, 700.0]);
    assert!(network.reaches.len() > 100_000);
    let (model, _) = with(network);
    let mut harness = table::open(model, [1200.0, 900.0], Theme::Light);
    table::rest(&mut harness);
    let mut slowest = 0.0f64;
    for step in 0..8 {
        let (raster, mut camera) = harness.state().model.camera().expect("open");
        camera.scale *= 1.3;
        camera.centre.x += f64::from(step);
        apply(&mut harness.state_mut().model, Command::View(ViewCommand::Look { raster, camera }));
        let start = Instant::now();
        harness.step();
        slowest = slowest.max(start.elapsed().as_secs_f64());
    }
    println!("slowest frame of a zoom over 131 071 reaches: {:.0} ms", 1e3 * slowest);
    assert!(slowest < 1.0, "{slowest} s a frame");
}

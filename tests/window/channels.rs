//! Channels in the window: a network from elevation whose outlet is picked and whose threshold is moved, and a
//! channel traced by pen on the mosaic.

use std::path::Path;

use egui::accesskit::Role;
use egui::{Key, Modifiers, Pos2, vec2};
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT as _, Queryable as _};
use ventifact::desk::{
    Camera, Command, DrawCommand, Model, Motif, NetworkCommand, Page, RasterCommand, SheetCommand, Standing,
    ViewCommand,
};
use ventifact::ground::Point;
use ventifact::science::scene::reach::{self, ELEVATION_STEP};
use ventifact::study::{Id, ImageKind};

use super::desk::{Desk, blank, click, click_at, demo_on_disk, give, key, open, wait};
use super::harness::compare;

fn model<'a>(harness: &'a Harness<'_, Desk>) -> &'a Model {
    harness.state().app().model()
}

/// Where a pixel of the raster on the table is on the screen.
fn on_table(harness: &Harness<'_, Desk>, at: Point) -> Pos2 {
    let (_, camera) = model(harness).camera().expect("a raster is open");
    let middle = harness.get_by_role(Role::Canvas).rect().center();
    let [x, y] = [(at.x - camera.centre.x) * camera.scale, (at.y - camera.centre.y) * camera.scale];
    middle + vec2(x as f32, y as f32)
}

fn look(harness: &mut Harness<'_, Desk>, centre: Point, scale: f64) {
    let raster = model(harness).shown_raster().expect("a raster").id;
    give(harness, Command::View(ViewCommand::Look { raster, camera: Camera { centre, scale } }));
}

fn at_rest(harness: &mut Harness<'_, Desk>) {
    wait(harness, "rest", |model| {
        let laid = model.session.rasters.values().filter_map(ventifact::desk::Opened::laid);
        model.session.jobs.is_idle() && laid.into_iter().all(|laid| laid.tiles.is_idle())
    });
    harness.run_steps(4);
}

fn picture(harness: &mut Harness<'_, Desk>, name: &str) {
    at_rest(harness);
    compare(&harness.render().expect("a picture"), &format!("tests/window/pictures/{name}.png"));
}

/// Greatest distance of the points of `line` from the truth.
fn off(line: &[Point], truth: &[Point]) -> f64 {
    let from_truth = |p: &Point| {
        let segment = |w: &[Point]| {
            let (dx, dy) = (w[1].x - w[0].x, w[1].y - w[0].y);
            let t = ((p.x - w[0].x) * dx + (p.y - w[0].y) * dy) / (dx * dx + dy * dy).max(1e-12);
            let t = t.clamp(0.0, 1.0);
            Point::new(w[0].x + t * dx, w[0].y + t * dy).distance(*p)
        };
        truth.windows(2).map(segment).fold(f64::INFINITY, f64::min)
    };
    line.iter().map(from_truth).fold(0.0, f64::max)
}

/// The trunk of the demo's dry channel from its second junction down, as it was made.
fn trunk() -> Vec<Point> {
    let reaches = reach::channels();
    reaches[6..9].iter().flat_map(|r| r.line.0.iter().copied()).collect()
}

#[test]
fn a_channel_is_traced_by_pen_backtracked_and_undone() {
    let (_folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    wait(&mut harness, "the mosaic", |model| model.shown_size().is_some());
    key(&mut harness, Modifiers::NONE, Key::I);
    let id = model(&harness).view.network.expect("the new network is selected");
    click(&mut harness, Role::CheckBox, "Propose channels, beside those traced");
    let traced =
        |model: &Model| model.sheet.network(id).and_then(|n| n.image()).expect("on an image").clone();
    assert!(!traced(model(&harness)).proposed, "only what is traced counts");
    look(&mut harness, Point::new(1010.0, 770.0), 1.7);
    key(&mut harness, Modifiers::NONE, Key::C);

    let truth = trunk();
    let (from, to) = (truth[0], truth[truth.len() - 1]);
    let to = Point::new(to.x - 15.0, to.y - 10.0);
    let at = on_table(&harness, from);
    click_at(&mut harness, at);
    assert_eq!(model(&harness).session.tracing.as_ref().map(|t| t.picks.len()), Some(1));
    // The way follows the pointer before anything is clicked there.
    let pointer = on_table(&harness, Point::new(1060.0, 800.0));
    harness.hover_at(pointer);
    let live = |model: &Model| model.session.tracing.as_ref().and_then(|t| t.live.clone());
    wait(&mut harness, "the way to the pointer", move |model| {
        live(model).is_some_and(|leg| leg.way.is_some())
    });
    let leg = live(model(&harness)).expect("a leg");
    assert!(off(&leg.line(), &truth) < 6.0, "the way is {:.1} px off the channel", off(&leg.line(), &truth));
    let moved = on_table(&harness, to);
    harness.hover_at(moved);
    wait(&mut harness, "the way to the moved pointer", move |model| {
        live(model).is_some_and(|leg| leg.to.distance(to) < 2.0)
    });
    wait(&mut harness, "the cost against chance", move |model| {
        live(model).is_some_and(|leg| leg.way.is_some_and(|way| way.cost_ratio.is_some()))
    });
    let cost = live(model(&harness)).and_then(|leg| leg.way?.cost_ratio).expect("a cost");
    assert!(cost < 1.0, "a channel is cheaper than chance: {cost}");
    picture(&mut harness, "pen-on-the-mosaic");
    click_at(&mut harness, moved);
    assert_eq!(model(&harness).session.tracing.as_ref().map(|t| t.picks.len()), Some(2));
    key(&mut harness, Modifiers::NONE, Key::Backspace);
    assert_eq!(model(&harness).session.tracing.as_ref().map(|t| t.picks.len()), Some(1), "backtracked");
    click_at(&mut harness, pointer);
    click_at(&mut harness, moved);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    wait(&mut harness, "the channel", move |model| traced(model).traced.len() == 1);
    let channel = traced(model(&harness)).traced[0].clone();
    assert_eq!(channel.picks.len(), 3);
    assert!(off(&channel.line.0, &truth) < 6.0, "{:.1} px off the channel", off(&channel.line.0, &truth));
    assert!(off(&truth[..truth.len() - 6], &channel.line.0) < 6.0, "all of the channel is followed");
    assert!(model(&harness).session.tracing.is_none(), "the pen is free for the next channel");

    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert!(traced(model(&harness)).traced.is_empty(), "undo takes the channel back");
    key(&mut harness, Modifiers::COMMAND | Modifiers::SHIFT, Key::Z);
    assert_eq!(traced(model(&harness)).traced.len(), 1, "redo brings it again");
    // It may lie below the edge of the bench.
    harness.get_by_role_and_label(Role::Button, "Remove: Traced channel 1, 3 picks").click_accesskit();
    harness.run_steps(3);
    assert!(traced(model(&harness)).traced.is_empty());
}

#[test]
fn a_channel_is_traced_by_keys_alone() {
    let (_folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    wait(&mut harness, "the mosaic", |model| model.shown_size().is_some());
    key(&mut harness, Modifiers::NONE, Key::I);
    let id = model(&harness).view.network.expect("selected");
    give(&mut harness, Command::Network(NetworkCommand::SetProposed { id, proposed: false }));
    look(&mut harness, trunk()[0], 1.7);
    key(&mut harness, Modifiers::NONE, Key::C);
    harness.get_by_role(Role::Canvas).focus();
    harness.run_steps(2);
    // The cross begins in the middle of the table.
    for step in [
        Key::ArrowRight,
        Key::Space,
        Key::ArrowRight,
        Key::ArrowRight,
        Key::ArrowDown,
        Key::Space,
        Key::Enter,
    ] {
        key(&mut harness, Modifiers::NONE, step);
    }
    wait(&mut harness, "the channel", move |model| {
        model.sheet.network(id).and_then(|n| n.image()).is_some_and(|it| it.traced.len() == 1)
    });
}

/// The label of the fact called `name` on the page.
fn fact(harness: &Harness<'_, Desk>, name: &str) -> String {
    let nodes = harness.query_all_by_role(Role::Label);
    let spoken = |node: egui_kittest::Node<'_>| {
        let node = node.accesskit_node();
        node.label().or(node.value())
    };
    let mut labels = nodes.filter_map(spoken);
    labels.find(|label| label.starts_with(&format!("{name}: "))).unwrap_or_default()
}

fn current(id: Id) -> impl Fn(&Model) -> bool {
    move |model| model.session.results.network_standing(id) == Standing::Current
}

#[test]
fn an_outlet_is_picked_the_threshold_moved_and_the_plate_written() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("sample-rasters/sorrel-reach-elevation.tif");
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Raster(RasterCommand::Open(path)));
    wait(&mut harness, "the elevation", |model| model.shown_size().is_some());
    let raster = model(&harness).sheet.rasters[0].id;
    key(&mut harness, Modifiers::NONE, Key::D);
    assert!(model(&harness).sheet.networks.is_empty(), "nobody has said that these are heights");
    give(&mut harness, Command::Raster(RasterCommand::Kind { id: raster, kind: ImageKind::Elevation }));
    key(&mut harness, Modifiers::NONE, Key::D);
    let id = model(&harness).view.network.expect("the new network is selected");
    assert_eq!(model(&harness).view.page, Page::Channels);
    wait(&mut harness, "the network", current(id));
    let everywhere = model(&harness).session.results.network(id).expect("measured").network.length();

    // The mouth of the channel, at the right edge.
    let mouth = trunk()[trunk().len() - 1];
    let mouth = Point::new(mouth.x / ELEVATION_STEP as f64 - 1.0, mouth.y / ELEVATION_STEP as f64);
    key(&mut harness, Modifiers::NONE, Key::T);
    let at = on_table(&harness, mouth);
    click_at(&mut harness, at);
    let outlets =
        |model: &Model| model.sheet.network(id).and_then(|n| n.elevation()).map_or(0, |it| it.outlets.len());
    assert_eq!(outlets(model(&harness)), 1);
    wait(&mut harness, "the network above the outlet", current(id));
    let finding = model(&harness).session.results.network(id).expect("measured").clone();
    assert!(finding.network.length() < everywhere, "only what drains through the outlet is left");
    let spoken = harness
        .get_all_by_role(Role::ListItem)
        .filter_map(|entry| entry.accesskit_node().label())
        .find(|label| label.starts_with("Drainage 1"))
        .expect("the ledger has an entry for the network");
    assert!(spoken.contains("order") && spoken.contains("km"), "{spoken}");
    key(&mut harness, Modifiers::NONE, Key::M);
    picture(&mut harness, "network-from-elevation");

    // Live: while the slider is in hand the numbers follow.
    let first = fact(&harness, "Threshold");
    let half = finding.drainage.as_ref().expect("from elevation").channels.half.length();
    let start = std::time::Instant::now();
    key(&mut harness, Modifiers::NONE, Key::Comma);
    wait(&mut harness, "the network at half the threshold", current(id));
    println!(
        "half the threshold, 600 × 450 cells: {:.0} ms to the new numbers",
        1e3 * start.elapsed().as_secs_f64()
    );
    let halved = model(&harness).session.results.network(id).expect("measured").network.length();
    assert!(
        (halved - half).abs() < 1e-6 * half,
        "half the threshold gives what was promised: {halved} {half}"
    );
    assert_ne!(fact(&harness, "Threshold"), first);
    let now = model(&harness).sheet.network(id).and_then(|n| n.elevation()?.threshold_m2).expect("stated");
    for step in 1..=4 {
        let m2 = Some(now * f64::from(1 + step));
        give(&mut harness, Command::Network(NetworkCommand::SetThreshold { id, m2 }));
        harness.run_steps(3);
    }
    give(&mut harness, Command::Draw(DrawCommand::Settle));
    wait(&mut harness, "the network at the last threshold", current(id));
    let sparse = model(&harness).session.results.network(id).expect("measured").network.length();
    assert!(sparse < halved, "a greater threshold leaves fewer channels");
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    let back = model(&harness).sheet.network(id).and_then(|n| n.elevation()?.threshold_m2);
    assert_eq!(back, Some(now), "the drag is one step");
    wait(&mut harness, "the network of before the drag", current(id));

    let plate = folder.path().join("drainage.svg");
    give(&mut harness, Command::View(ViewCommand::Page(Page::Plate)));
    let choice = ventifact::desk::PlateChoice { motif: Motif::Network, ..model(&harness).view.plate.clone() };
    give(&mut harness, Command::Plate(ventifact::desk::PlateCommand::Choose(choice)));
    click(&mut harness, Role::Button, "Export plate…");
    harness.get_by_role_and_label(Role::TextInput, "Path").focus();
    harness.run_steps(2);
    key(&mut harness, Modifiers::COMMAND, Key::A);
    harness.get_by_role_and_label(Role::TextInput, "Path").type_text(&plate.to_string_lossy());
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    wait(&mut harness, "the plate", |_| plate.is_file());
    let svg = std::fs::read_to_string(&plate).expect("the plate is text");
    assert!(svg.contains("<svg") && svg.contains("Drainage 1"), "{}", &svg[..200.min(svg.len())]);

    let everything = folder.path().join("handover");
    give(&mut harness, Command::Plate(ventifact::desk::PlateCommand::HandOver(everything.clone())));
    wait(&mut harness, "the hand-over", |model| model.session.jobs.is_idle());
    let names: Vec<String> = std::fs::read_dir(&everything)
        .expect("the folder is made")
        .filter_map(|entry| Some(entry.ok()?.file_name().to_string_lossy().into_owned()))
        .collect();
    assert!(names.iter().any(|name| name.contains("network")), "{names:?}");
}

/// The picture of a real valley with its network, and what a change of the threshold takes there; skipped without
/// the data.
#[test]
fn a_threshold_change_on_real_ground_is_quick() {
    let root = std::env::var_os("FIELD_DATA")
        .map_or_else(|| Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared/data"), Into::into);
    let path = root.join("elevation/fault_ridge_srtm3.tif");
    if !path.is_file() {
        eprintln!("skipped: no {}", path.display());
        return;
    }
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Raster(RasterCommand::Open(path)));
    wait(&mut harness, "the elevation", |model| model.shown_size().is_some());
    let raster = model(&harness).sheet.rasters[0].id;
    give(&mut harness, Command::Raster(RasterCommand::Kind { id: raster, kind: ImageKind::Elevation }));
    let start = std::time::Instant::now();
    key(&mut harness, Modifiers::NONE, Key::D);
    let id = model(&harness).view.network.expect("the new network is selected");
    wait(&mut harness, "the network", current(id));
    let size = model(&harness).shown_size().expect("open").1;
    println!("{size:?} cells: first network after {:.0} ms", 1e3 * start.elapsed().as_secs_f64());
    for _ in 0..2 {
        let start = std::time::Instant::now();
        key(&mut harness, Modifiers::NONE, Key::Period);
        wait(&mut harness, "the network at twice the threshold", current(id));
        println!("{size:?} cells: twice the threshold after {:.0} ms", 1e3 * start.elapsed().as_secs_f64());
    }
    at_rest(&mut harness);
    let picture = harness.render().expect("a picture");
    picture.save(std::env::temp_dir().join("window-fault-ridge.png")).expect("written");
}

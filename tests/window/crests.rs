//! Crests in the window: traced in a patch, rejected, joined, cut, drawn by pen, masked, taken back and handed
//! over, by pointer and by keys.

use std::path::{Path, PathBuf};

use egui::accesskit::Role;
use egui::{Key, Modifiers, Pos2, vec2};
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT as _, Queryable as _};
use rand::SeedableRng as _;
use ventifact::desk::{
    Camera, Command, CrestCommand, Model, Page, PlateCommand, RasterCommand, Standing, Tool, ViewCommand,
};
use ventifact::files::raster::write_tiff;
use ventifact::ground::{Point, Polyline};
use ventifact::science::crest::{CrestLine, CrestOrigin};
use ventifact::science::scene::{CrestScene, CrestShading, CrestTruth, speckle, speckled};
use ventifact::study::{CrestEntry, CrestsFinding, ImageKind, StrokeKind};

use super::desk::{Desk, blank, click_at, give, key, open, wait};

/// Wavy crests of which some end in pairs and some fork, 16 looks of speckle; with their truth.
fn forked_dunes(folder: &Path) -> (PathBuf, CrestTruth) {
    let scene = CrestScene {
        width: 480,
        height: 400,
        spacing: 24.0,
        swing: 5.0,
        wavelength: 310.0,
        ending_every: 4,
        forking_every: 5,
        shading: CrestShading::Ridge { width: 3.0 },
        ground: 1.0,
        contrast: 1.4,
    };
    let truth = scene.truth();
    let mut rng = rand_chacha::ChaCha8Rng::seed_from_u64(7);
    let looks = speckle(scene.width, scene.height, 16.0, &mut rng);
    let path = folder.join("forked-dunes.tif");
    write_tiff(&path, &speckled(&scene.draw(&truth), &looks), None).expect("the raster is written");
    (path, truth)
}

fn model<'a>(harness: &'a Harness<'_, Desk>) -> &'a Model {
    harness.state().app().model()
}

fn said<'a>(harness: &'a Harness<'_, Desk>) -> &'a CrestEntry {
    &model(harness).selected_patch().expect("a patch is selected").crests
}

fn found<'a>(harness: &'a Harness<'_, Desk>) -> &'a CrestsFinding {
    let id = model(harness).view.patch.expect("a patch is selected");
    model(harness).session.results.crests(id).expect("traced").finding().expect("there are crests")
}

fn measured(harness: &mut Harness<'_, Desk>) {
    let id = model(harness).view.patch.expect("a patch is selected");
    wait(harness, "the crests", move |model| {
        model.session.results.standing(id) == Standing::Current
            && model.session.results.crests_are_current(id)
    });
}

/// Where a pixel of the raster on the table is on the screen.
fn on_table(harness: &Harness<'_, Desk>, at: Point) -> Pos2 {
    let (_, camera) = model(harness).camera().expect("a raster is open");
    let middle = harness.get_by_role(Role::Canvas).rect().center();
    let [x, y] = [(at.x - camera.centre.x) * camera.scale, (at.y - camera.centre.y) * camera.scale];
    middle + vec2(x as f32, y as f32)
}

fn click_on(harness: &mut Harness<'_, Desk>, at: Point) {
    let at = on_table(harness, at);
    harness.hover_at(at);
    click_at(harness, at);
    // Long enough that the next click is not the second of a double click.
    harness.run_steps(40);
}

/// The line at a place, within a few pixels.
fn line_at(finding: &CrestsFinding, at: Point) -> Option<usize> {
    let near = finding.lines.iter().enumerate().filter_map(|(i, l)| Some((i, l.line.nearest(at)?.distance)));
    near.filter(|(_, d)| *d < 3.0).min_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
}

fn middle(line: &Polyline) -> Point {
    line.cut(&[0.5 * line.length()])[0].0.last().copied().expect("a line has points")
}

fn buttons(harness: &Harness<'_, Desk>, starting: &str) -> Vec<String> {
    let labels = harness.query_all_by_role(Role::Button).filter_map(|node| node.accesskit_node().label());
    labels.filter(|label| label.starts_with(starting)).collect()
}

/// The value of the row called `name` on the page.
fn fact(harness: &Harness<'_, Desk>, name: &str) -> String {
    let nodes = harness.query_all_by_role(Role::Label);
    let spoken = |node: egui_kittest::Node<'_>| {
        let node = node.accesskit_node();
        node.label().or(node.value())
    };
    let mut labels = nodes.filter_map(spoken);
    labels.find_map(|label| label.strip_prefix(&format!("{name}: ")).map(str::to_owned)).unwrap_or_default()
}

/// The desk on forked dunes with one patch, its crests traced, the page turned to them.
fn traced(folder: &Path) -> (Harness<'static, Desk>, CrestTruth) {
    let (path, truth) = forked_dunes(folder);
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Raster(RasterCommand::Open(path)));
    wait(&mut harness, "the raster", |model| model.shown_size().is_some());
    let raster = model(&harness).sheet.rasters[0].id;
    give(&mut harness, Command::Raster(RasterCommand::Kind { id: raster, kind: ImageKind::Radar }));
    key(&mut harness, Modifiers::COMMAND, Key::A);
    key(&mut harness, Modifiers::ALT, Key::Num5);
    assert_eq!(model(&harness).view.page, Page::Crests);
    measured(&mut harness);
    (harness, truth)
}

#[test]
fn crests_are_rejected_joined_cut_drawn_undone_and_handed_over() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let (mut harness, truth) = traced(folder.path());
    let first = found(&harness).clone();
    println!(
        "{} of {} crests traced, {} free ends",
        first.lines.len(),
        truth.lines.len(),
        first.defects.ends
    );
    assert!(first.lines.len() + 3 > truth.lines.len(), "{} lines", first.lines.len());
    assert!(fact(&harness, "Crests").contains("traced"), "{}", fact(&harness, "Crests"));

    // Reject: the line goes, its cross stays and is listed.
    key(&mut harness, Modifiers::SHIFT, Key::X);
    assert_eq!(model(&harness).session.tool, Tool::Reject);
    let gone = truth.lines[0].0[300];
    click_on(&mut harness, gone);
    assert_eq!(said(&harness).rejected.len(), 1);
    measured(&mut harness);
    assert_eq!(found(&harness).lines.len() + 1, first.lines.len());
    assert_eq!(line_at(found(&harness), gone), None, "the rejected line is out of the findings");
    assert_eq!(buttons(&harness, "Bring back: Rejected line at").len(), 1);

    // Join: the two crests that miss each other become one.
    let [left, right] = [truth.ends[0], truth.ends[1]];
    let apart = |harness: &Harness<'_, Desk>| {
        let by = |end: Point, dx: f64| line_at(found(harness), Point::new(end.x + dx, end.y));
        (by(left, -12.0), by(right, 12.0))
    };
    let (a, b) = apart(&harness);
    assert!(a.is_some() && b.is_some() && a != b, "two lines before: {a:?} {b:?}");
    let ends = found(&harness).defects.ends;
    key(&mut harness, Modifiers::SHIFT, Key::J);
    click_on(&mut harness, left);
    assert_eq!(model(&harness).session.tracing.as_ref().map(|t| t.picks.len()), Some(1));
    click_on(&mut harness, right);
    wait(&mut harness, "the join", |model| {
        model.selected_patch().is_some_and(|patch| patch.crests.strokes.len() == 1)
    });
    assert_eq!(said(&harness).strokes[0].kind, StrokeKind::Join);
    measured(&mut harness);
    let (a, b) = apart(&harness);
    assert!(a.is_some() && a == b, "one line after: {a:?} {b:?}");
    let joined = &found(&harness).lines[a.expect("joined")];
    assert_eq!(joined.origin, CrestOrigin::Edited);
    assert!(joined.by_hand_px > 20.0, "{} px by hand", joined.by_hand_px);
    assert_eq!(found(&harness).defects.ends + 2, ends, "a join takes two free ends away");

    // Draw where the line was rejected: the pen follows the ridge between two picks.
    key(&mut harness, Modifiers::SHIFT, Key::R);
    let [from, to] = [truth.lines[0].0[90], truth.lines[0].0[380]];
    click_on(&mut harness, from);
    let pointer = on_table(&harness, to);
    harness.hover_at(pointer);
    wait(&mut harness, "the way to the pointer", |model| {
        let live = model.session.tracing.as_ref().and_then(|tracing| tracing.live.as_ref());
        live.is_some_and(|leg| leg.way.is_some())
    });
    click_on(&mut harness, to);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    wait(&mut harness, "the drawn crest", |model| {
        model.selected_patch().is_some_and(|patch| patch.crests.strokes.len() == 2)
    });
    let drawn = said(&harness).strokes[1].clone();
    assert_eq!(drawn.kind, StrokeKind::Crest);
    let off = drawn
        .line
        .0
        .iter()
        .filter_map(|p| truth.lines[0].nearest(*p))
        .map(|n| n.distance)
        .fold(0.0, f64::max);
    println!("the pen is {off:.2} px off the ridge at most");
    assert!(off < 2.5, "the pen is {off} px off the ridge");
    measured(&mut harness);
    let line = line_at(found(&harness), gone).expect("the drawn line is among the findings");
    assert_eq!(found(&harness).lines[line].origin, CrestOrigin::Drawn);
    let crests = fact(&harness, "Crests");
    assert!(crests.contains("1 drawn") && crests.contains("1 edited"), "{crests}");

    // Undo and redo.
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_eq!(said(&harness).strokes.len(), 1, "undo takes the drawn crest away");
    key(&mut harness, Modifiers::COMMAND | Modifiers::SHIFT, Key::Z);
    assert_eq!(said(&harness).strokes.len(), 2);

    // Accept one by click, then all that are sure.
    key(&mut harness, Modifiers::SHIFT, Key::A);
    let kept =
        middle(&found(&harness).lines[line_at(found(&harness), truth.lines[3].0[200]).expect("a line")].line);
    click_on(&mut harness, kept);
    assert_eq!(said(&harness).accepted.len(), 1);
    measured(&mut harness);
    assert!(found(&harness).lines[line_at(found(&harness), kept).expect("there")].accepted);
    let id = model(&harness).view.patch.expect("selected");
    give(&mut harness, Command::Crest(CrestCommand::AcceptAbove { id, confidence: 0.0 }));
    measured(&mut harness);
    let unsaid = |line: &&CrestLine| !line.accepted && line.origin != CrestOrigin::Drawn;
    assert_eq!(found(&harness).lines.iter().filter(unsaid).count(), 0, "all traced lines are accepted");

    // Cut.
    let before = found(&harness).lines.len();
    key(&mut harness, Modifiers::SHIFT, Key::C);
    click_on(&mut harness, kept);
    measured(&mut harness);
    assert_eq!((said(&harness).cuts.len(), found(&harness).lines.len()), (1, before + 1));
    click_on(&mut harness, kept);
    assert_eq!(said(&harness).cuts.len(), 0, "a second click on the cut takes it back");

    // Mask the lower left corner: nothing is traced there.
    key(&mut harness, Modifiers::SHIFT, Key::M);
    for corner in [[2.0, 250.0], [150.0, 250.0], [150.0, 398.0], [2.0, 398.0]] {
        click_on(&mut harness, Point::from(corner));
    }
    key(&mut harness, Modifiers::NONE, Key::Enter);
    assert_eq!((said(&harness).masks.len(), model(&harness).session.tool), (1, Tool::Hand));
    measured(&mut harness);
    let masked = said(&harness).masks[0].clone();
    let inside = |line: &CrestLine| masked.contains(middle(&line.line));
    assert_eq!(found(&harness).lines.iter().filter(|line| inside(line)).count(), 0);

    // The rejected line comes back by its button on the page.
    let label = buttons(&harness, "Bring back: Rejected line at").remove(0);
    harness.get_by_role_and_label(Role::Button, &label).click_accesskit();
    harness.run_steps(3);
    assert!(said(&harness).rejected.is_empty());
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_eq!(said(&harness).rejected.len(), 1);
    measured(&mut harness);

    let everything = folder.path().join("handover");
    give(&mut harness, Command::Plate(PlateCommand::HandOver(everything.clone())));
    wait(&mut harness, "the hand-over", |model| model.session.jobs.is_idle());
    let files: Vec<PathBuf> = std::fs::read_dir(&everything)
        .expect("the folder is made")
        .filter_map(|entry| Some(entry.ok()?.path()))
        .collect();
    let text = |ending: &str| {
        let path = files.iter().find(|path| path.to_string_lossy().ends_with(ending));
        let path = path.unwrap_or_else(|| panic!("no {ending} among {files:?}"));
        std::fs::read_to_string(path).expect("text")
    };
    // A layer in degrees is written on Earth alone; the table always.
    let table = text("crests.csv");
    for origin in ["traced", "edited", "drawn"] {
        assert!(table.contains(origin), "no {origin} line in the table");
    }
}

/// Every tool of crests at the keyboard's cross.
#[test]
fn crests_are_edited_by_keys_alone() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let (mut harness, truth) = traced(folder.path());
    let raster = model(&harness).shown_raster().expect("a raster").id;
    let look = |harness: &mut Harness<'_, Desk>, centre: Point| {
        give(harness, Command::View(ViewCommand::Look { raster, camera: Camera { centre, scale: 2.0 } }));
        // The cross begins in the middle of the table once the tool is taken up anew.
        key(harness, Modifiers::NONE, Key::M);
        harness.get_by_role(Role::Canvas).focus();
        harness.run_steps(2);
    };
    let on = truth.lines[2].0[160];
    look(&mut harness, on);
    for (tool, count) in [
        (Key::X, (|it| it.rejected.len()) as fn(&CrestEntry) -> usize),
        (Key::X, |it| 1 - it.rejected.len()),
        (Key::A, |it| it.accepted.len()),
        (Key::C, |it| it.cuts.len()),
    ] {
        key(&mut harness, Modifiers::SHIFT, tool);
        key(&mut harness, Modifiers::SHIFT, Key::ArrowRight);
        key(&mut harness, Modifiers::NONE, Key::Space);
        assert_eq!(count(said(&harness)), 1, "{tool:?}");
    }
    key(&mut harness, Modifiers::SHIFT, Key::R);
    for step in [Key::Space, Key::ArrowRight, Key::ArrowRight, Key::ArrowRight, Key::Space, Key::Enter] {
        key(&mut harness, Modifiers::NONE, step);
    }
    wait(&mut harness, "the drawn crest", |model| {
        model.selected_patch().is_some_and(|patch| patch.crests.strokes.len() == 1)
    });
    key(&mut harness, Modifiers::SHIFT, Key::M);
    for step in [
        Key::Space,
        Key::ArrowRight,
        Key::ArrowRight,
        Key::Space,
        Key::ArrowDown,
        Key::ArrowDown,
        Key::Space,
        Key::Enter,
    ] {
        key(&mut harness, Modifiers::NONE, step);
    }
    assert_eq!(said(&harness).masks.len(), 1);
}

//! Crests on the table: how each kind is drawn, what lies under the pointer, and that very many stay quick.

use std::time::Instant;

use egui::{Pos2, Theme, vec2};
use egui_kittest::Harness;
use egui_kittest::kittest::Queryable as _;
use ventifact::desk::{
    Camera, Command, CrestCommand, Cursor, DrawCommand, Measured, Model, PatchCommand, SheetCommand, Tool,
    ViewCommand, apply, crests,
};
use ventifact::ground::{Grid, LengthUnit, LocalFrame, Place, Point, Polygon, Polyline, Work};
use ventifact::science::crest::{
    self, CrestLine, CrestModel, CrestOrigin, End, Fit, Junction, SpacingSettings,
};
use ventifact::study::{
    CrestStroke, CrestsFinding, Id, Patch, PatchFinding, PatternFinding, SpectrumFinding, StrokeKind,
    TrendFinding, fingerprint,
};

use super::harness::compare;
use super::scene;
use super::table::{self, Bench};

const PATCH: Id = Id(2);
const SIZE: [f32; 2] = [820.0, 620.0];

/// A line from column `from` to `to` about row `row`, as traced.
fn line(from: f64, to: f64, row: f64, confidence: f64) -> CrestLine {
    let steps = ((to - from) / 6.0).ceil() as usize;
    let at = |i: usize| {
        let x = from + (to - from) * i as f64 / steps as f64;
        Point::new(x, row + 5.0 * (0.03 * x).sin())
    };
    CrestLine {
        line: Polyline((0..=steps).map(at).collect()),
        confidence,
        ends: [End::Free; 2],
        bridged_px: 0.0,
        model: CrestModel::BrightRidge,
        origin: CrestOrigin::Traced,
        accepted: false,
        by_hand_px: 0.0,
    }
}

fn finding(lines: Vec<CrestLine>, junctions: Vec<Junction>, outline: &Polygon) -> CrestsFinding {
    let frame = LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };
    let numbers = crest::numbers(&lines, outline, frame);
    let transects = SpacingSettings { step: 40.0, longest: 400.0, own_beyond: 40.0 };
    // Transects of a hundred thousand lines would be half the test.
    let measured: &[CrestLine] = if lines.len() < 100 { &lines } else { &[] };
    let spacing =
        crest::spacing(measured, outline, frame, transects, &Work::quiet()).expect("nobody stops it");
    let defects = crest::defects(&lines, &junctions, numbers.total_length, spacing.quartiles[1]);
    CrestsFinding {
        model: CrestModel::BrightRidge,
        fits: vec![Fit { model: CrestModel::BrightRidge, skewness: 0.7 }],
        scale_px: 4.0,
        factor: 1.0,
        rose: Vec::new(),
        rose_bin_deg: 10.0,
        forks: None,
        forks_toward: None,
        spacings: [None, spacing.quartiles[1], spacing.stereology],
        lost_edits: Vec::new(),
        cautions: Vec::new(),
        lines,
        junctions,
        numbers,
        spacing,
        defects,
    }
}

/// Says that `crests` were traced in the patch as it stands.
fn trace(model: &mut Model, crests: CrestsFinding) {
    let patch = model.sheet.patch(PATCH).expect("the patch").clone();
    let made = fingerprint::of_patch(&model.sheet, &patch);
    let outcome = PatchFinding {
        id: PATCH,
        name: patch.name.clone(),
        raster: patch.raster,
        fingerprint: made.clone(),
        unit: LengthUnit::Pixel,
        area: patch.outline.area(),
        valid_fraction: 1.0,
        centre: None,
        trend: TrendFinding::default(),
        spectrum: SpectrumFinding::default(),
        verdicts: Vec::new(),
        backwards: None,
        sentence: String::new(),
        cautions: Vec::new(),
        birth: Vec::new(),
        crests: Ok(crests),
        pattern: PatternFinding::default(),
        obstacles: None,
    };
    let texture = fingerprint::of_texture(&model.sheet, &patch);
    let measured = Measured { outcome: Ok(outcome), fingerprint: made, exact: true, texture };
    model.session.results.take_patch(PATCH, measured);
    model.session.results.follow(&model.sheet);
}

/// A plain of 900 × 700 pixels whose patch has these crests.
fn with(lines: Vec<CrestLine>, junctions: Vec<Junction>) -> Model {
    let plain = Grid::from_fn(900, 700, |col, row| {
        let row = row as f32 - 5.0 * (0.03 * col as f32).sin();
        0.35 * (row * std::f32::consts::TAU / 60.0).cos() + 0.02 * (col as f32 * 1.7).sin()
    });
    let outline = Polygon::rectangle(800.0, 620.0).map(|p| Point::new(p.x + 50.0, p.y + 40.0));
    let patch = Patch::new(PATCH, "Dunes", Id(1), outline.clone());
    let mut model = scene::desk(plain, Place::pixels(0.0), vec![patch]);
    model.session.measures = false;
    apply(&mut model, Command::Patch(PatchCommand::Select(Some(PATCH))));
    trace(&mut model, finding(lines, junctions, &outline));
    model
}

/// One of each kind: sure and doubtful, accepted, edited, drawn, imported; a fork and free ends.
fn kinds() -> (Vec<CrestLine>, Vec<Junction>) {
    let cut = |line: CrestLine| CrestLine { ends: [End::Border; 2], ..line };
    let mut branch = line(430.0, 850.0, 152.0, 0.8);
    for p in &mut branch.line.0 {
        p.y -= 30.0 * (-(p.x - 430.0) / 40.0).exp() - 0.0;
    }
    let fork = branch.line.0[0];
    branch.ends = [End::Junction, End::Border];
    let lines = vec![
        cut(line(50.0, 850.0, 60.0, 1.0)),
        cut(line(50.0, 850.0, 120.0, 0.7)),
        branch,
        CrestLine { ends: [End::Border, End::Free], ..line(50.0, 340.0, 180.0, 0.15) },
        CrestLine { accepted: true, ..cut(line(50.0, 850.0, 240.0, 0.6)) },
        CrestLine { origin: CrestOrigin::Edited, by_hand_px: 90.0, ..cut(line(50.0, 850.0, 300.0, 0.8)) },
        CrestLine { origin: CrestOrigin::Drawn, by_hand_px: 800.0, ..line(120.0, 760.0, 360.0, 0.0) },
        CrestLine { origin: CrestOrigin::Imported, by_hand_px: 800.0, ..cut(line(50.0, 850.0, 420.0, 0.0)) },
        line(90.0, 420.0, 480.0, 0.5),
        line(520.0, 800.0, 480.0, 0.5),
        cut(line(50.0, 850.0, 540.0, 0.9)),
    ];
    (lines, vec![Junction { at: fork, through: 1, branches: vec![(2, 0)] }])
}

/// Kinds of lines with something said of each sort: a rejected line, a cut, a join, a mask.
fn described() -> Model {
    let (mut lines, junctions) = kinds();
    let mut model = with(lines.clone(), junctions.clone());
    let id = PATCH;
    let gone = lines[10].line.clone();
    let give = |model: &mut Model, command| apply(model, Command::Crest(command));
    give(&mut model, CrestCommand::Reject { id, at: gone.0[gone.0.len() / 2] });
    let at = lines[1].line.0[40];
    give(&mut model, CrestCommand::Cut { id, at });
    let bridge = lines[5].line.0[50..66].to_vec();
    let stroke = CrestStroke { kind: StrokeKind::Join, picks: Vec::new(), line: Polyline(bridge) };
    give(&mut model, CrestCommand::Lay { id, stroke });
    let outer = [[600.0, 560.0], [780.0, 575.0], [760.0, 650.0], [590.0, 640.0]].map(Point::from).to_vec();
    give(&mut model, CrestCommand::Mask { id, outline: Polygon { outer, holes: Vec::new() } });
    let outline = model.sheet.patch(id).expect("the patch").outline.clone();
    lines.truncate(10);
    trace(&mut model, finding(lines, junctions, &outline));
    model
}

fn on_screen(harness: &Harness<'_, Bench>, at: Point) -> Pos2 {
    let camera = harness.state().model.camera().expect("open").1;
    let middle = harness.get_by_role(egui::accesskit::Role::Canvas).rect().center();
    let [x, y] = [(at.x - camera.centre.x) * camera.scale, (at.y - camera.centre.y) * camera.scale];
    middle + vec2(x as f32, y as f32)
}

#[test]
fn crests_by_day() {
    let mut harness = table::open(described(), SIZE, Theme::Light);
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/crests-by-day.png");
}

#[test]
fn crests_by_night_with_one_under_the_pointer_and_an_end_to_join() {
    let mut model = described();
    apply(&mut model, Command::Draw(DrawCommand::Take(Tool::Join)));
    let mut harness = table::open(model, SIZE, Theme::Dark);
    let end = kinds().0[8].line.0.last().copied().expect("an end");
    let at = on_screen(&harness, Point::new(end.x - 2.0, end.y));
    harness.hover_at(at);
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/crests-by-night.png");
}

#[test]
fn what_lies_under_the_pointer_is_the_nearest_line_and_its_open_end() {
    let (lines, junctions) = kinds();
    let mut model = with(lines.clone(), junctions);
    let crested = model.session.results.crests(PATCH).expect("traced");
    let near = crested.near(Point::new(400.0, 243.0), 20.0).expect("a line is near");
    assert_eq!(near.line, 4);
    assert!(near.distance < 9.0 && crests::lies_on(near.at, &lines[4].line));
    assert_eq!(crested.near(Point::new(400.0, 210.0), 4.0), None);
    let free = lines[3].line.0.last().copied().expect("an end");
    let end = crested.end_near(Point::new(free.x + 3.0, free.y), 6.0).expect("an end is near");
    assert_eq!((end.line, end.end, end.at), (3, 1, free));
    // An end on another line goes on nowhere.
    assert_eq!(crested.end_near(lines[2].line.0[0], 4.0), None);
    let half = crests::middle(&lines[0].line).expect("a middle");
    assert!((half.x - 450.0).abs() < 12.0 && crests::lies_on(half, &lines[0].line));
    // Sure traced lines that nobody accepted: neither those by hand nor those accepted.
    assert_eq!(crested.unaccepted_from(0.79).count(), 4);

    let cursor = Some(Cursor { raster: Id(1), pixel: Point::new(400.0, 241.0) });
    apply(&mut model, Command::View(ViewCommand::Point(cursor)));
    model.session.viewport = [800.0, 600.0];
    assert_eq!(crests::pointed(&model).map(|(_, _, near)| near.line), Some(4));
}

#[test]
fn a_second_click_takes_a_mark_back_and_what_is_accepted_cannot_be_rejected_too() {
    let (lines, junctions) = kinds();
    let mut model = with(lines.clone(), junctions);
    model.session.viewport = [800.0, 600.0];
    let said = |model: &Model| model.sheet.patch(PATCH).expect("the patch").crests.clone();
    let take = |model: &mut Model, tool| apply(model, Command::Draw(DrawCommand::Take(tool)));
    let lay = |model: &mut Model, at| apply(model, Command::Draw(DrawCommand::Lay(at)));
    let [a, b] = [lines[0].line.0[20], lines[0].line.0[90]];
    take(&mut model, Tool::Accept);
    lay(&mut model, a);
    assert_eq!(said(&model).accepted.len(), 1);
    // Anywhere on the line takes it back, though nothing has been traced anew since.
    lay(&mut model, b);
    assert_eq!(said(&model).accepted.len(), 0);
    lay(&mut model, b);
    take(&mut model, Tool::Reject);
    lay(&mut model, a);
    assert_eq!((said(&model).accepted.len(), said(&model).rejected.len()), (0, 1));
    lay(&mut model, b);
    assert_eq!(said(&model).rejected.len(), 0, "the same line is brought back, wherever it is clicked");
    apply(&mut model, Command::Sheet(SheetCommand::Undo));
    assert_eq!(said(&model).rejected.len(), 1);
    // Where no line is, nothing changes and the user is told.
    lay(&mut model, Point::new(300.0, 210.0));
    assert_eq!(said(&model).rejected.len(), 1);
    assert!(model.session.notices.shown().iter().any(|n| n.text.contains("No crest line is so near")));
    // A line of one's own needs no acceptance, and rejecting it takes the stroke away.
    let stroke = CrestStroke { kind: StrokeKind::Crest, picks: Vec::new(), line: lines[6].line.clone() };
    apply(&mut model, Command::Crest(CrestCommand::Lay { id: PATCH, stroke }));
    take(&mut model, Tool::Accept);
    lay(&mut model, lines[6].line.0[30]);
    assert_eq!(said(&model).accepted.len(), 0);
    take(&mut model, Tool::Reject);
    lay(&mut model, lines[6].line.0[30]);
    assert_eq!((said(&model).strokes.len(), said(&model).rejected.len()), (0, 1));
}

#[test]
fn limits_that_exclude_everything_are_refused_and_lines_of_before_stay_while_traced_anew() {
    let (lines, junctions) = kinds();
    let mut model = with(lines, junctions);
    let limits = |limits| Command::Crest(CrestCommand::SetToneLimits { id: PATCH, limits });
    apply(&mut model, limits(Some([0.5, -0.5])));
    assert_eq!(model.sheet.patch(PATCH).expect("the patch").crests.tone_limits, None);
    apply(&mut model, limits(Some([-0.5, f64::MAX])));
    assert_eq!(model.sheet.patch(PATCH).expect("the patch").crests.tone_limits, Some([-0.5, f64::MAX]));
    assert!(!model.session.results.crests_are_current(PATCH));
    assert_eq!(model.session.results.crests(PATCH).map(|c| c.lines().len()), Some(11));
    assert!(model.session.results.knows_texture(&model.sheet, PATCH), "the trend is as it was");
    let name = |name: &str, deg: f64| PatchCommand::NamePopulation {
        id: PATCH,
        axis: ventifact::ground::Axis::from_deg(deg),
        name: name.into(),
    };
    for (words, deg) in [("Long ones", 84.0), ("Short ones", 172.0), ("Old long ones", 85.0), ("", 172.5)] {
        apply(&mut model, Command::Patch(name(words, deg)));
    }
    let names: Vec<String> =
        model.sheet.patch(PATCH).expect("the patch").populations.iter().map(|p| p.name.clone()).collect();
    assert_eq!(names, ["Old long ones"]);
}

/// 60 000 lines of some twenty points. What is drawn is bounded, so that a frame stays a frame also without
/// optimisation; the printed figure is what it took here.
#[test]
fn tens_of_thousands_of_crests_stay_quick() {
    let many = (0..60_000).map(|i| {
        let (col, row) = (f64::from(i % 200), f64::from(i / 200));
        let mut short = line(52.0 + 3.9 * col, 52.0 + 3.9 * col + 3.0, 50.0 + 2.0 * row, 0.6);
        let [a, b] = [short.line.0[0], short.line.0[1]];
        let at = |i: i32| {
            let t = f64::from(i) / 20.0;
            Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))
        };
        short.line = Polyline((0..=20).map(at).collect());
        short
    });
    let mut harness = table::open(with(many.collect(), Vec::new()), [1200.0, 900.0], Theme::Light);
    table::rest(&mut harness);
    let mut slowest = 0.0f64;
    for step in 0..8 {
        let (raster, camera) = harness.state().model.camera().expect("open");
        let centre = Point::new(camera.centre.x + f64::from(step), camera.centre.y);
        let camera = Camera { centre, scale: 1.3 * camera.scale };
        let model = &mut harness.state_mut().model;
        apply(model, Command::View(ViewCommand::Look { raster, camera }));
        let pixel = Point::new(400.0 + f64::from(step), 300.0);
        apply(model, Command::View(ViewCommand::Point(Some(Cursor { raster, pixel }))));
        let start = Instant::now();
        harness.step();
        slowest = slowest.max(start.elapsed().as_secs_f64());
    }
    println!("slowest frame of a zoom over 60 000 crests: {:.0} ms", 1e3 * slowest);
    assert!(slowest < 1.0, "{slowest} s a frame");
}

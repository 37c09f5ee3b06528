//! The table by itself: pointer and keys become commands, and one drag is one undo step.

use egui::{
    Event, Key, Modifiers, MouseWheelSource, MouseWheelUnit, PointerButton, Pos2, Rect, Role, Theme,
    TouchPhase, vec2,
};
use egui_kittest::Harness;
use egui_kittest::kittest::Queryable as _;
use ventifact::desk::{self, Command, DrawCommand, Model, PatchCommand, SheetCommand, Tool};
use ventifact::ground::{Grid, Place, Point, Polygon};
use ventifact::study::{Id, Patch};
use ventifact::window::table::{self, TableState};

use super::{harness, scene};

/// The table with the model behind it.
pub struct Bench {
    pub model: Model,
    table: TableState,
}

/// A harness with nothing but the table in it.
pub fn open(mut model: Model, size: [f32; 2], theme: Theme) -> Harness<'static, Bench> {
    model.view.theme = if theme == Theme::Dark { desk::Theme::Dark } else { desk::Theme::Light };
    let bench = Bench { model, table: TableState::default() };
    let show = |ui: &mut egui::Ui, bench: &mut Bench| {
        for command in table::show(ui, &bench.model, &mut bench.table) {
            desk::apply(&mut bench.model, command);
        }
    };
    let mut harness = harness::window(size, theme).build_ui_state(show, bench);
    rest(&mut harness);
    harness
}

impl Bench {
    /// Whether no texture is still being made.
    pub fn is_settled(&self) -> bool {
        self.table.is_settled()
    }
}

/// Runs until tiles and drawing have come to rest.
pub fn rest(harness: &mut Harness<'_, Bench>) {
    for _ in 0..3 {
        harness.run();
        scene::settle(&harness.state().model);
    }
    harness.run();
}

/// 400 × 300 pixels of slanted waves with one patch, ten pixels a corner step.
fn small() -> Harness<'static, Bench> {
    let waves = Grid::from_fn(400, 300, |col, row| ((col as f32 + 0.4 * row as f32) * 0.2).sin());
    let outline = Polygon {
        outer: [[50.0, 50.0], [150.0, 50.0], [150.0, 150.0], [50.0, 150.0]].map(Point::from).to_vec(),
        holes: vec![],
    };
    let patch = Patch::new(Id(2), "Waves", Id(1), outline);
    open(scene::desk(waves, Place::pixels(0.0), vec![patch]), [700.0, 560.0], Theme::Light)
}

fn give(harness: &mut Harness<'_, Bench>, command: Command) {
    desk::apply(&mut harness.state_mut().model, command);
    harness.run();
}

fn canvas(harness: &Harness<'_, Bench>) -> Rect {
    harness.get_by_role(Role::Canvas).rect()
}

/// Where a pixel of the small raster is on the screen.
fn at(harness: &Harness<'_, Bench>, x: f64, y: f64) -> Pos2 {
    let (_, camera) = harness.state().model.camera().expect("a raster is open");
    let from_middle =
        vec2(((x - camera.centre.x) * camera.scale) as f32, ((y - camera.centre.y) * camera.scale) as f32);
    canvas(harness).center() + from_middle
}

fn pixel(harness: &Harness<'_, Bench>, pos: Pos2) -> Point {
    let (_, camera) = harness.state().model.camera().expect("a raster is open");
    let from_middle = pos - canvas(harness).center();
    Point::new(
        camera.centre.x + f64::from(from_middle.x) / camera.scale,
        camera.centre.y + f64::from(from_middle.y) / camera.scale,
    )
}

fn button(pos: Pos2, button: PointerButton, pressed: bool) -> Event {
    Event::PointerButton { pos, button, pressed, modifiers: Modifiers::NONE }
}

pub fn click(harness: &mut Harness<'_, Bench>, pos: Pos2) {
    harness.hover_at(pos);
    harness.event(button(pos, PointerButton::Primary, true));
    harness.event(button(pos, PointerButton::Primary, false));
    harness.run();
    // Long enough that the next click is not the second of a double click.
    harness.run_steps(40);
}

fn drag(harness: &mut Harness<'_, Bench>, from: Pos2, to: Pos2) {
    harness.hover_at(from);
    harness.event(button(from, PointerButton::Primary, true));
    for step in 1..=5 {
        harness.hover_at(from + (to - from) * (step as f32 / 5.0));
    }
    harness.event(button(to, PointerButton::Primary, false));
    harness.run();
    harness.run_steps(40);
}

fn take(harness: &mut Harness<'_, Bench>, tool: Tool) {
    give(harness, Command::Draw(DrawCommand::Take(tool)));
}

fn outline(harness: &Harness<'_, Bench>, id: u32) -> Polygon {
    harness.state().model.sheet.patch(Id(id)).expect("the patch").outline.clone()
}

/// Places on the screen are whole points, so a pixel may be off by one point's worth.
fn assert_near(got: Point, want: [f64; 2], what: &str) {
    ventifact::assert_close!(got.distance(Point::from(want)), 0.0, 0.5, "{what}: {got:?}, want {want:?}");
}

#[test]
fn the_canvas_has_a_name() {
    let harness = small();
    let node = harness.get_by_role_and_label(Role::Canvas, "Table: Sorrel Reach mosaic");
    assert!(node.rect().width() > 600.0);
}

#[test]
fn a_polygon_is_clicked_and_closed_on_its_first_corner() {
    let mut harness = small();
    take(&mut harness, Tool::Polygon);
    for (x, y) in [(200.0, 100.0), (300.0, 100.0), (300.0, 200.0), (200.0, 100.0)] {
        let pos = at(&harness, x, y);
        click(&mut harness, pos);
    }
    let model = &harness.state().model;
    assert_eq!(model.sheet.patches.len(), 2, "draft: {:?}", model.session.draft);
    let outer = &model.sheet.patches[1].outline.outer;
    assert_eq!(outer.len(), 3);
    assert_near(outer[1], [300.0, 100.0], "the second corner");
    give(&mut harness, Command::Sheet(SheetCommand::Undo));
    assert_eq!(harness.state().model.sheet.patches.len(), 1);
}

#[test]
fn a_rectangle_is_dragged() {
    let mut harness = small();
    take(&mut harness, Tool::Rectangle);
    let (from, to) = (at(&harness, 220.0, 60.0), at(&harness, 320.0, 140.0));
    drag(&mut harness, from, to);
    let patches = &harness.state().model.sheet.patches;
    assert_eq!(patches.len(), 2);
    assert_near(patches[1].outline.outer[0], [220.0, 60.0], "where the drag began");
    assert_near(patches[1].outline.outer[2], [320.0, 140.0], "where it ended");
}

#[test]
fn a_click_selects_and_a_click_beside_deselects() {
    let mut harness = small();
    let inside = at(&harness, 70.0, 70.0);
    click(&mut harness, inside);
    assert_eq!(harness.state().model.view.patch, Some(Id(2)));
    let beside = at(&harness, 250.0, 250.0);
    click(&mut harness, beside);
    assert_eq!(harness.state().model.view.patch, None);
    harness.get_by_label("Patch Waves on the table").click_accesskit();
    harness.run();
    assert_eq!(harness.state().model.view.patch, Some(Id(2)));
}

#[test]
fn dragging_a_corner_is_one_undo_step() {
    let mut harness = small();
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(Id(2)))));
    take(&mut harness, Tool::Corners);
    let before = outline(&harness, 2);
    let corner = harness.get_by_label("Corner 3 of Waves").rect().center();
    let to = at(&harness, 200.0, 180.0);
    drag(&mut harness, corner, to);
    assert_near(outline(&harness, 2).outer[2], [200.0, 180.0], "the corner");
    let middle = at(&harness, 80.0, 80.0);
    drag(&mut harness, middle, middle + vec2(30.0, 0.0));
    assert!(outline(&harness, 2).outer[0].x > before.outer[0].x + 5.0, "the whole patch moves");
    give(&mut harness, Command::Sheet(SheetCommand::Undo));
    assert_near(outline(&harness, 2).outer[2], [200.0, 180.0], "after one undo");
    give(&mut harness, Command::Sheet(SheetCommand::Undo));
    assert_eq!(outline(&harness, 2), before, "after two");
}

#[test]
fn corners_are_added_moved_and_removed_by_keys() {
    let mut harness = small();
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(Id(2)))));
    take(&mut harness, Tool::Corners);
    harness.get_by_label("Corner 1 of Waves").focus();
    harness.run();
    harness.key_press(Key::Insert);
    harness.run();
    assert_eq!(outline(&harness, 2).outer[1], Point::new(100.0, 50.0), "half way to the next corner");
    harness.key_press(Key::ArrowLeft);
    harness.run();
    let moved = outline(&harness, 2).outer[0];
    assert!(moved.x < 50.0 && moved.y == 50.0, "{moved:?}");
    harness.key_press(Key::Delete);
    harness.run();
    assert_eq!(outline(&harness, 2).outer[0], Point::new(100.0, 50.0));
    assert_eq!(harness.state().model.sheet.patches.len(), 1, "the patch itself stays");
}

#[test]
fn a_double_click_on_an_edge_adds_a_corner() {
    let mut harness = small();
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(Id(2)))));
    take(&mut harness, Tool::Corners);
    let edge = at(&harness, 150.0, 90.0);
    harness.hover_at(edge);
    for pressed in [true, false, true, false] {
        harness.event(button(edge, PointerButton::Primary, pressed));
    }
    harness.run();
    let outer = outline(&harness, 2).outer;
    assert_eq!(outer.len(), 5);
    assert_near(outer[2], [150.0, 90.0], "between the second and the third");
}

#[test]
fn a_polygon_is_drawn_by_keys_alone() {
    let mut harness = small();
    take(&mut harness, Tool::Polygon);
    harness.get_by_role(Role::Canvas).focus();
    harness.run();
    for steps in [[(Key::ArrowRight, 5)], [(Key::ArrowDown, 6)], [(Key::ArrowLeft, 9)]] {
        for (key, count) in steps {
            (0..count).for_each(|_| harness.key_press(key));
        }
        harness.run();
        harness.key_press(Key::Space);
        harness.run();
    }
    give(&mut harness, Command::Draw(DrawCommand::Finish));
    let patches = &harness.state().model.sheet.patches;
    assert_eq!(patches.len(), 2, "draft: {:?}", harness.state().model.session.draft);
    let [a, b, c] = [0, 1, 2].map(|i| patches[1].outline.outer[i]);
    assert!(a.y < b.y && c.x < b.x && b.y == c.y, "{a:?} {b:?} {c:?}");
}

#[test]
fn the_wheel_zooms_about_the_pointer_and_fingers_pan() {
    let mut harness = small();
    let pos = at(&harness, 120.0, 220.0);
    harness.hover_at(pos);
    harness.run();
    let before = harness.state().model.camera().expect("open").1;
    let wheel = |unit, delta| Event::MouseWheel {
        unit,
        delta,
        phase: TouchPhase::Move,
        source: MouseWheelSource::Unknown,
        modifiers: Modifiers::NONE,
    };
    harness.event(wheel(MouseWheelUnit::Line, vec2(0.0, 3.0)));
    harness.run_steps(40);
    let zoomed = harness.state().model.camera().expect("open").1;
    assert!(zoomed.scale > 1.2 * before.scale, "{before:?} → {zoomed:?}");
    assert_near(pixel(&harness, pos), [120.0, 220.0], "under the pointer");
    harness.event(wheel(MouseWheelUnit::Point, vec2(24.0, -10.0)));
    harness.run_steps(40);
    let panned = harness.state().model.camera().expect("open").1;
    assert_eq!(panned.scale, zoomed.scale);
    let want = [zoomed.centre.x - 24.0 / zoomed.scale, zoomed.centre.y + 10.0 / zoomed.scale];
    assert_near(panned.centre, want, "the raster follows the fingers");
}

#[test]
fn dragging_the_hand_pans_and_the_cursor_is_told() {
    let mut harness = small();
    let (from, to) = (at(&harness, 300.0, 250.0), at(&harness, 340.0, 230.0));
    drag(&mut harness, from, to);
    // The pixel taken hold of is where it was let go; a click's worth of slack at the start.
    ventifact::assert_close!(
        pixel(&harness, to).distance(Point::new(300.0, 250.0)),
        0.0,
        1.0,
        "under the hand"
    );
    let cursor = harness.state().model.session.cursor.expect("the pointer is on the raster");
    assert_near(cursor.pixel, pixel(&harness, to).into(), "the cursor");
}

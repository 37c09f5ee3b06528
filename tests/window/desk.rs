//! The whole window, driven as a user would: by role and label, by pointer, by keys.

use std::path::PathBuf;
use std::time::{Duration, Instant};

use egui::accesskit::Role;
use egui::{Key, Modifiers, Pos2, vec2};
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT as _, Queryable as _};
use ventifact::desk::{
    Command, Dialog, Model, Page, PatchCommand, PickedRegime, SheetCommand, Standing, ViewCommand,
    WindCommand, listed,
};
use ventifact::ground::Work;
use ventifact::study::run::{Memo, run};
use ventifact::study::sheet_file::SheetFile;
use ventifact::study::{Patch, Sources, WindChoice, demo};
use ventifact::window::App;

use crate::harness::window;
use crate::scene::sorrel_reach;

/// The window and the model it starts with.
pub struct Desk {
    model: Option<Model>,
    app: Option<App>,
}

impl Desk {
    pub fn app(&self) -> &App {
        self.app.as_ref().expect("the first frame makes the application")
    }
}

/// A window of `size` points on `model`, with no system dialogs.
pub fn open(model: Model, size: [f32; 2]) -> Harness<'static, Desk> {
    let mut harness = window(size, egui::Theme::Light).build_ui_state(
        |ui, desk: &mut Desk| match &mut desk.app {
            Some(app) => {
                app.take_in(ui.ctx());
                app.show(ui);
            }
            // Fonts set in a frame are there in the next one.
            None => desk.app = desk.model.take().map(|model| App::new(ui.ctx(), model, false)),
        },
        Desk { model: Some(model), app: None },
    );
    harness.run_steps(3);
    harness
}

pub fn give(harness: &mut Harness<'_, Desk>, command: Command) {
    if let Some(app) = &mut harness.state_mut().app {
        app.give(command);
    }
    harness.run_steps(2);
}

/// Draws frames until `done`.
pub fn wait(harness: &mut Harness<'_, Desk>, what: &str, done: impl Fn(&Model) -> bool) {
    let end = Instant::now() + Duration::from_secs(120);
    while !done(harness.state().app().model()) {
        assert!(Instant::now() < end, "waited in vain for {what}");
        harness.step();
        std::thread::sleep(Duration::from_millis(10));
    }
    harness.run_steps(2);
}

pub fn key(harness: &mut Harness<'_, Desk>, modifiers: Modifiers, key: Key) {
    harness.key_press_modifiers(modifiers, key);
    harness.run_steps(3);
}

pub fn blank() -> Model {
    Model::new(std::sync::Arc::new(|| ()))
}

/// The demo laid out in a folder of its own, which goes when the guard is dropped.
pub fn demo_on_disk() -> (tempfile::TempDir, PathBuf) {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let sheet = demo::lay_out(folder.path()).expect("the demo is laid out");
    (folder, sheet)
}

pub fn click(harness: &mut Harness<'_, Desk>, role: Role, label: &str) {
    harness.get_by_role_and_label(role, label).click();
    harness.run_steps(3);
}

/// Presses and releases the pointer.
pub fn click_at(harness: &mut Harness<'_, Desk>, at: Pos2) {
    harness.drag_at(at);
    harness.run_steps(1);
    harness.drop_at(at);
    harness.run_steps(2);
}

#[test]
fn outline_a_patch_on_the_demo_see_numbers_undo_and_export_a_plate() {
    let (folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    wait(&mut harness, "the mosaic", |model| model.shown_size().is_some());
    let before = harness.state().app().model().sheet.patches.len();

    key(&mut harness, Modifiers::NONE, Key::R);
    let table = harness.get_by_role(Role::Canvas).rect();
    let centre = table.center();
    click_at(&mut harness, centre - vec2(110.0, 90.0));
    click_at(&mut harness, centre + vec2(60.0, 70.0));
    let model = harness.state().app().model();
    assert_eq!(model.sheet.patches.len(), before + 1, "two corners make a patch");
    let id = model.view.patch.expect("the new patch is selected");
    wait(&mut harness, "the new patch's numbers", move |model| {
        model.session.results.standing(id) == Standing::Current
    });
    let spoken = harness
        .get_all_by_role(Role::ListItem)
        .filter_map(|entry| entry.accesskit_node().label())
        .find(|label| label.starts_with("Patch 1"))
        .expect("the ledger has an entry for the new patch");
    assert!(spoken.contains('°') || spoken.contains("no preferred trend"), "{spoken}");

    let plate = folder.path().join("patch.svg");
    give(&mut harness, Command::View(ViewCommand::Page(Page::Plate)));
    click(&mut harness, Role::Button, "Export plate…");
    harness.get_by_role_and_label(Role::TextInput, "Path").focus();
    harness.run_steps(2);
    key(&mut harness, Modifiers::COMMAND, Key::A);
    harness.get_by_role_and_label(Role::TextInput, "Path").type_text(&plate.to_string_lossy());
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    wait(&mut harness, "the plate", |_| plate.is_file());
    let svg = std::fs::read_to_string(&plate).expect("the plate is text");
    assert!(svg.contains("<svg") && svg.contains("Patch 1"), "{}", &svg[..200.min(svg.len())]);

    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_eq!(harness.state().app().model().sheet.patches.len(), before, "undo takes the patch away");
}

#[test]
fn every_command_is_found_by_its_words_and_says_why_it_cannot_be_given() {
    let mut harness = open(blank(), [1280.0, 800.0]);
    for command in listed() {
        key(&mut harness, Modifiers::COMMAND, Key::K);
        let record = command.record();
        harness.get_by_role_and_label(Role::TextInput, "Find a command").type_text(record.label);
        harness.run_steps(3);
        assert!(
            harness.query_by_role_and_label(Role::MenuItem, record.label).is_some(),
            "{} is not in the finder",
            record.id
        );
        key(&mut harness, Modifiers::NONE, Key::Escape);
        assert!(harness.state().app().model().session.dialog.is_none(), "Escape closes the finder");
    }
}

#[test]
fn the_keyboard_alone_outlines_renames_and_deletes() {
    let mut model = sorrel_reach(0.0);
    model.session.measures = false;
    model.sheet.patches.clear();
    model.session.saved = model.sheet.clone();
    let mut harness = open(model, [1440.0, 900.0]);
    key(&mut harness, Modifiers::COMMAND, Key::A);
    assert_eq!(harness.state().app().model().sheet.patches.len(), 1, "Ctrl + A outlines the whole raster");
    key(&mut harness, Modifiers::COMMAND, Key::D);
    assert_eq!(harness.state().app().model().sheet.patches.len(), 2);
    key(&mut harness, Modifiers::ALT, Key::ArrowUp);
    key(&mut harness, Modifiers::NONE, Key::Delete);
    assert_eq!(harness.state().app().model().sheet.patches.len(), 1);
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_eq!(harness.state().app().model().sheet.patches.len(), 2, "the notice's promise: undo");
    for page in [Key::Num1, Key::Num4, Key::Num0, Key::Minus] {
        key(&mut harness, Modifiers::ALT, page);
    }
    assert_eq!(harness.state().app().model().view.page, Page::Plate);
    key(&mut harness, Modifiers::COMMAND, Key::N);
    assert!(harness.query_by_label("Unsaved changes").is_some(), "changes are not lost without a word");
    key(&mut harness, Modifiers::NONE, Key::Escape);
    assert_eq!(harness.state().app().model().sheet.patches.len(), 2);
}

#[test]
fn an_outcrop_is_outlined_named_deleted_and_brought_back() {
    let mut model = sorrel_reach(0.0);
    model.session.measures = false;
    model.session.saved = model.sheet.clone();
    let patches = model.sheet.patches.len();
    let mut harness = open(model, [1440.0, 900.0]);
    key(&mut harness, Modifiers::NONE, Key::U);
    let centre = harness.get_by_role(Role::Canvas).rect().center();
    for by in [vec2(-60.0, -40.0), vec2(60.0, -40.0), vec2(0.0, 60.0)] {
        click_at(&mut harness, centre + by);
    }
    key(&mut harness, Modifiers::NONE, Key::Enter);
    let sheet = &harness.state().app().model().sheet;
    assert_eq!((sheet.obstacles.len(), sheet.patches.len()), (1, patches), "an outcrop is no patch");
    let name = format!("Name of outcrop {}", sheet.obstacles[0].id.0);
    key(&mut harness, Modifiers::ALT, Key::Num9);
    assert_eq!(harness.state().app().model().view.page, Page::Obstacles);
    assert!(harness.query_by_role_and_label(Role::TextInput, &name).is_some(), "the page lists {name}");
    assert!(harness.query_by_role_and_label(Role::ListItem, "Outcrop Outcrop 1 on the table").is_some());
    key(&mut harness, Modifiers::COMMAND, Key::Delete);
    assert!(harness.state().app().model().sheet.obstacles.is_empty());
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_eq!(harness.state().app().model().sheet.obstacles.len(), 1);
}

/// Window and command line go through one executor and must give the same bits; written out with
/// every digit, since a missing cell of a picture is NaN and so equals nothing.
#[test]
fn the_window_finds_what_the_command_line_finds() {
    let (_folder, path) = demo_on_disk();
    let text = std::fs::read_to_string(&path).expect("the sheet is there");
    let sheet = SheetFile::parse(&text, path.parent().expect("a folder")).expect("a sheet").sheet;
    let want = run(&sheet, &Sources::open(&sheet), &Memo::default(), &Work::quiet()).expect("not stopped");

    let mut harness = open(blank(), [1280.0, 800.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(path)));
    wait(&mut harness, "all findings", |model| {
        let current = |p: &Patch| model.session.results.standing(p.id) == Standing::Current;
        !model.sheet.patches.is_empty()
            && model.sheet.patches.iter().all(current)
            && model.session.results.together().is_some()
            && model.session.results.networks_wanting(&model.sheet).is_empty()
    });
    let results = &harness.state().app().model().session.results;
    for patch in &want.patches {
        let got = results.patch(patch.id).expect("the window has measured it");
        assert_eq!(format!("{got:?}"), format!("{patch:?}"), "{}", patch.name);
    }
    for network in &want.networks {
        let got = results.network(network.id).expect("the window has measured it");
        assert_eq!(format!("{got:?}"), format!("{network:?}"), "{}", network.name);
    }
    assert_eq!(results.together(), Some(&want.together));
    for wind in &want.winds {
        let got = results.wind(wind.id).and_then(|w| w.outcome.as_ref().ok()).expect("the window has it");
        assert_eq!(format!("{got:?}"), format!("{wind:?}"), "{}", wind.name);
    }
}

#[test]
fn a_click_on_the_regime_map_picks_a_regime_and_the_ground_can_be_described() {
    let (_folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    wait(&mut harness, "the mosaic", |model| model.shown_size().is_some());
    let id = harness.state().app().model().sheet.patches[0].id;
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(id))));
    give(&mut harness, Command::View(ViewCommand::Page(Page::Regimes)));
    wait(&mut harness, "the regimes", move |model| {
        model.session.results.patch(id).is_some_and(|p| p.backwards.is_some())
    });
    let name = harness.state().app().model().sheet.patches[0].name.clone();
    let map = format!("Map of two-wind regimes of {name}");
    let rect = harness.get_by_role_and_label(Role::Image, &map).rect();
    let rose = format!("What the picked regime would make of {name}");
    assert!(harness.query_by_role_and_label(Role::Image, &rose).is_none(), "nothing is picked yet");
    click_at(&mut harness, rect.min + vec2(0.7 * rect.width(), 0.35 * rect.height()));
    let regime = harness.state().app().model().view.regime.expect("a click picks");
    assert!((100.0..150.0).contains(&regime.divergence_deg) && regime.ratio > 1.0, "{regime:?}");
    assert!(harness.query_by_role_and_label(Role::Image, &rose).is_some(), "what it would make is drawn");

    // A regime off the map is brought to its edge.
    let off = PickedRegime { divergence_deg: 200.0, ratio: 0.5 };
    give(&mut harness, Command::View(ViewCommand::Regime(Some(off))));
    let regime = harness.state().app().model().view.regime.expect("picked");
    assert_eq!((regime.divergence_deg, regime.ratio), (179.5, 1.0));

    let cover = ventifact::science::alignment::backwards::Cover::Starved;
    give(&mut harness, Command::Patch(PatchCommand::Cover { id, cover }));
    assert_eq!(harness.state().app().model().sheet.patches[0].cover, cover);
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_ne!(harness.state().app().model().sheet.patches[0].cover, cover, "undo takes it back");
}

/// A record is imported, then the threshold raised by typing: the dial and the sentence of the patch follow.
#[test]
fn an_imported_record_and_a_raised_threshold_move_the_verdict() {
    let (folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    wait(&mut harness, "the mosaic", |model| model.shown_size().is_some());
    let patch = harness.state().app().model().sheet.patches[0].id;
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(patch))));

    give(&mut harness, Command::Wind(WindCommand::Preview(folder.path().join(demo::REACH_MAST))));
    wait(&mut harness, "the preview", |model| {
        model.session.import.as_ref().is_some_and(|import| import.outcome.is_some())
    });
    // The dialog grows to its size over some frames.
    harness.run_steps(10);
    click(&mut harness, Role::Button, "Use this record");
    wait(&mut harness, "the record", |model| model.sheet.winds.len() == 3);
    let model = harness.state().app().model();
    let third = model.sheet.winds.last().expect("three records").id;
    assert_eq!(model.sheet.winds.len(), 3);
    give(
        &mut harness,
        Command::Patch(PatchCommand::JudgeBy { id: patch, winds: WindChoice::Chosen(vec![third]) }),
    );
    let verdict = move |model: &Model| {
        let current = model.session.results.standing(patch) == Standing::Current;
        let finding = model.session.results.patch(patch).filter(|_| current)?;
        let verdict = finding.verdicts.first().filter(|v| v.winds == third)?;
        Some((verdict.obliquity_deg?, finding.sentence.clone()))
    };
    wait(&mut harness, "the verdict by the new record", move |model| verdict(model).is_some());
    let (before, sentence) = verdict(harness.state().app().model()).expect("a verdict");
    assert!(before < 15.0 && sentence.contains("longitudinal"), "{sentence}");

    give(&mut harness, Command::View(ViewCommand::Page(Page::Winds)));
    let label = "Threshold friction velocity, metres per second";
    harness.get_by_role_and_label(Role::TextInput, label).focus();
    harness.run_steps(2);
    harness.get_by_role_and_label(Role::TextInput, label).type_text("0.21");
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    assert_eq!(harness.state().app().model().sheet.settings.wind.threshold_ustar, Some(0.21));
    wait(&mut harness, "the verdict by storms alone", move |model| {
        verdict(model).is_some_and(|(now, text)| now > 20.0 && text != sentence)
    });
    give(&mut harness, Command::View(ViewCommand::Page(Page::Verdict)));
    let name = harness.state().app().model().sheet.winds[2].name.clone();
    let dial = format!("Dial of obliquity by {name}");
    assert!(harness.query_by_role_and_label(Role::Image, &dial).is_some(), "the dial is drawn");
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert_eq!(harness.state().app().model().sheet.settings.wind.threshold_ustar, None, "undo");
}

/// Copies Halvane, puts the mast on the copy, and makes it heavier by typing: sand then starts later.
#[test]
fn an_own_body_changed_in_its_editor_moves_the_threshold_of_the_record_on_it() {
    let (_folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    let threshold = |model: &Model| {
        let record = model.shown_wind()?.id;
        let finding = model.session.results.wind(record)?.outcome.as_ref().ok()?;
        Some((finding.threshold_ustar, finding.sand.as_ref()?.body.clone()))
    };
    wait(&mut harness, "the winds", |model| threshold(model).is_some());
    let (before, _) = threshold(harness.state().app().model()).expect("a threshold");
    give(&mut harness, Command::View(ViewCommand::Page(Page::Winds)));
    assert!(
        harness.query_by_label("Iversen–White").is_some(),
        "the table of thresholds is on the winds page"
    );

    give(&mut harness, Command::View(ViewCommand::Open(Dialog::Bodies)));
    click(&mut harness, Role::ComboBox, "Add a body like");
    click(&mut harness, Role::Button, "Halvane");
    let own = harness.state().app().model().sheet.bodies[0].clone();
    assert_eq!(own.name, "Halvane, own");
    let id = harness.state().app().model().shown_wind().expect("a record").id;
    give(&mut harness, Command::Wind(WindCommand::Body { id, body: Some(own) }));
    harness.get_by_role_and_label(Role::TextInput, "Gravity, metres per second squared").focus();
    harness.run_steps(2);
    key(&mut harness, Modifiers::COMMAND, Key::A);
    harness.get_by_role_and_label(Role::TextInput, "Gravity, metres per second squared").type_text("4.4");
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    let heavy = harness.state().app().model().sheet.winds[0].body.clone().expect("a body");
    assert_eq!((heavy.name.as_str(), heavy.gravity), ("Halvane, own", Some(4.4)));
    wait(&mut harness, "the later threshold", move |model| {
        threshold(model).is_some_and(|(now, body)| body == "Halvane, own" && now > 1.2 * before)
    });
    give(&mut harness, Command::Sheet(SheetCommand::Undo));
    let back = harness.state().app().model().sheet.winds[0].body.clone().expect("a body");
    assert_eq!(back.gravity, Some(1.1), "undo reaches the copy of the record too");
}

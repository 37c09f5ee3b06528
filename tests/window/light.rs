//! Light and trend in the window: the flow texture, the light stated, bedforms laid in and stopped, two populations
//! named.

use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::time::{Duration, Instant};

use egui::accesskit::Role;
use egui::{Key, Modifiers, Theme};
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT as _, Queryable as _};
use rand::SeedableRng as _;
use ventifact::desk::{
    Command, Measured, Model, Page, PatchCommand, RasterCommand, Recovered, SettingCommand, SheetCommand,
    Slot, Standing, ViewCommand, apply,
};
use ventifact::files::raster::write_tiff;
use ventifact::ground::{Axis, Azimuth, Grid, LengthUnit};
use ventifact::science::scene::{speckle, speckled};
use ventifact::study::{
    Id, ImageKind, LightFinding, PatchFinding, PatternFinding, PlateauFinding, PopulationFinding,
    PopulationSource, RecoveredTrend, RecoveryFinding, RefitFinding, ScaleFinding, SettingValue,
    TrendFinding, fingerprint,
};

use super::desk::{Desk, blank, click, demo_on_disk, give, key, open, wait};
use super::harness::compare;
use super::table::Bench;
use super::{pictures, scene, table};

/// The table with the flow texture on, at rest.
fn flowing(turn_deg: f64, theme: Theme) -> Harness<'static, Bench> {
    let mut model = pictures::measured(scene::sorrel_reach(turn_deg));
    apply(&mut model, Command::View(ViewCommand::Flow));
    apply(&mut model, Command::Patch(PatchCommand::Select(Some(Id(2)))));
    let mut harness = table::open(model, [820.0, 620.0], theme);
    settle(&mut harness);
    harness
}

fn settle(harness: &mut Harness<'_, Bench>) {
    let end = Instant::now() + Duration::from_secs(60);
    harness.run();
    while !harness.state().is_settled() {
        assert!(Instant::now() < end, "the texture never came");
        std::thread::sleep(Duration::from_millis(5));
        harness.step();
    }
    harness.run();
}

#[test]
fn the_trend_as_a_texture_by_day() {
    let mut harness = flowing(0.0, Theme::Light);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/flow-by-day.png");
}

#[test]
fn the_trend_as_a_texture_by_night_turned_and_close() {
    let mut harness = flowing(25.0, Theme::Dark);
    let camera = ventifact::desk::Camera { centre: ventifact::ground::Point::new(420.0, 330.0), scale: 2.0 };
    harness.state_mut().model.view.cameras.insert(Id(1), camera);
    settle(&mut harness);
    table::rest(&mut harness);
    settle(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/flow-by-night.png");
}

/// No frame waits for the texture: while it is being made the table goes on with the one before.
#[test]
fn a_moving_view_keeps_its_texture_and_the_same_view_gives_the_same_one() {
    let mut harness = flowing(0.0, Theme::Light);
    let before = harness.render().expect("a picture");
    let (id, there) = harness.state().model.camera().expect("a raster is open");
    let moved = ventifact::desk::Camera {
        centre: ventifact::ground::Point::new(there.centre.x + 30.0, there.centre.y - 20.0),
        ..there
    };
    for camera in [moved, there] {
        harness.state_mut().model.view.cameras.insert(id, camera);
        settle(&mut harness);
        table::rest(&mut harness);
    }
    let after = harness.render().expect("a picture");
    assert_eq!(before.as_raw(), after.as_raw(), "there and back");
}

#[test]
fn a_key_turns_the_texture_on_and_off() {
    let mut model = pictures::measured(scene::sorrel_reach(0.0));
    model.session.measures = false;
    let mut harness = open(model, [1280.0, 800.0]);
    let shown = |harness: &mut Harness<'_, Desk>| {
        let end = Instant::now() + Duration::from_secs(60);
        loop {
            harness.run_steps(3);
            scene::settle(harness.state().app().model());
            if harness.state().app().is_settled() {
                harness.run_steps(2);
                return harness.render().expect("a picture");
            }
            assert!(Instant::now() < end, "the texture never came");
            std::thread::sleep(Duration::from_millis(5));
        }
    };
    let strokes = shown(&mut harness);
    key(&mut harness, Modifiers::NONE, Key::Z);
    assert!(harness.state().app().model().view.layers.flow);
    let texture = shown(&mut harness);
    let differ = strokes.pixels().zip(texture.pixels()).filter(|(a, b)| a != b).count();
    assert!(differ > 20_000, "{differ} pixels differ");
    key(&mut harness, Modifiers::NONE, Key::Z);
    assert_eq!(shown(&mut harness).as_raw(), strokes.as_raw(), "the strokes are back");
}

fn set(harness: &mut Harness<'_, Desk>, key: &'static str, value: u32) {
    let value = SettingValue::Whole(value);
    give(harness, Command::Setting(SettingCommand::Set { key, value }));
}

/// Whether an image on the page is called so.
fn shows(harness: &Harness<'_, Desk>, name: &str) -> bool {
    let mut images = harness.query_all_by_role(Role::Image);
    images.any(|image| image.accesskit_node().label().is_some_and(|label| label.starts_with(name)))
}

/// Whether a row of the page has this name.
fn tells(harness: &Harness<'_, Desk>, name: &str) -> bool {
    let mut labels = harness.query_all_by_role(Role::Label);
    labels.any(|node| {
        let node = node.accesskit_node();
        node.label().or(node.value()).is_some_and(|words| words.starts_with(name))
    })
}

fn standing(model: &Model, id: Id) -> Standing {
    model.session.results.recovery_standing(id)
}

#[test]
fn the_light_is_stated_bedforms_are_laid_in_and_the_work_is_stopped() {
    let (_folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    for (key, value) in [("recovery.trends", 12), ("recovery.repeats", 1), ("recovery.window_px", 128)] {
        set(&mut harness, key, value);
    }
    let patch = harness.state().app().model().sheet.patches[0].clone();
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(patch.id))));
    key(&mut harness, Modifiers::ALT, Key::Num3);
    assert_eq!(harness.state().app().model().view.page, Page::Light);

    // Without light nothing begins by itself.
    give(&mut harness, Command::Raster(RasterCommand::Light { id: patch.raster, from: None }));
    wait(&mut harness, "the numbers", |model| {
        model.session.results.standing(patch.id) == Standing::Current && model.session.jobs.is_idle()
    });
    assert_eq!(standing(harness.state().app().model(), patch.id), Standing::Unmeasured);
    assert!(harness.query_by_role_and_label(Role::Button, "Lay bedforms in").is_some());

    let field = "Light of this patch from, degrees";
    harness.get_by_role_and_label(Role::TextInput, field).focus();
    harness.run_steps(2);
    harness.get_by_role_and_label(Role::TextInput, field).type_text("300");
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    let light = harness.state().app().model().sheet.raster(patch.raster).and_then(|r| r.light_from);
    assert_eq!(light.map(Azimuth::deg), Some(300.0));
    wait(&mut harness, "bedforms laid in", |model| {
        matches!(standing(model, patch.id), Standing::Current | Standing::Failed)
    });
    let results = &harness.state().app().model().session.results;
    let outcome = results.recovered(patch.id).map(|recovered| recovered.outcome.as_ref().map(|_| ()));
    assert_eq!(outcome, Some(Ok(())), "bedforms are found again or not, but the test runs");
    assert!(shows(&harness, "Bedforms found again"), "the curve");
    assert!(tells(&harness, "Trend from light + 90°") && tells(&harness, "Laid in"));
    key(&mut harness, Modifiers::ALT, Key::Num2);
    assert!(shows(&harness, "Bedforms found again"), "the curve stands under the rose too");
    key(&mut harness, Modifiers::ALT, Key::Num3);

    // More work than anyone waits for, stopped; it stays stopped until it is asked for.
    set(&mut harness, "recovery.repeats", 200);
    assert!(
        tells(&harness, "out of date")
            || standing(harness.state().app().model(), patch.id) == Standing::OutOfDate
    );
    wait(&mut harness, "the work", |model| model.session.jobs.is_running(Slot::Recovery));
    click(&mut harness, Role::Button, "Stop laying in");
    wait(&mut harness, "the end of it", |model| model.session.jobs.is_idle());
    harness.run_steps(10);
    assert!(harness.state().app().model().session.jobs.is_idle(), "stopped work stays stopped");
    assert_eq!(standing(harness.state().app().model(), patch.id), Standing::OutOfDate);
    set(&mut harness, "recovery.repeats", 2);
    wait(&mut harness, "less work", |model| standing(model, patch.id) == Standing::Current);

    // Measuring goes first: an edit of the patch ends it. (Another number: the work of 200 stays stopped.)
    set(&mut harness, "recovery.repeats", 150);
    wait(&mut harness, "the work again", |model| model.session.jobs.is_running(Slot::Recovery));
    give(&mut harness, Command::Patch(PatchCommand::Select(None)));
    assert!(
        !harness.state().app().model().session.jobs.is_running(Slot::Recovery),
        "abandoned with its patch"
    );
}

/// A patch of two populations 56° apart, under light, with a recovery, made up.
pub fn two_populations() -> Model {
    let mut model = pictures::measured(scene::sorrel_reach(0.0));
    model.session.measures = false;
    model.sheet.rasters[0].light_from = Some(Azimuth::from_deg(96.0));
    model.sheet.patches.truncate(1);
    let patch = model.sheet.patches[0].clone();
    let print = fingerprint::of_patch(&model.sheet, &patch);
    let found = model.session.results.patch(patch.id).expect("measured").clone();
    let finding = PatchFinding { fingerprint: print.clone(), pattern: pattern(), ..told(found) };
    let texture = fingerprint::of_texture(&model.sheet, &patch);
    let measured = Measured { outcome: Ok(finding), fingerprint: print, exact: true, texture };
    model.session.results.take_patch(patch.id, measured);
    let fingerprint = fingerprint::of_recovery(&model.sheet, &patch);
    let outcome = Ok(Arc::new(recovery(patch.id)));
    model.session.results.take_recovery(patch.id, Recovered { outcome, fingerprint });
    model.session.results.follow(&model.sheet);
    apply(&mut model, Command::Patch(PatchCommand::Select(Some(patch.id))));
    model.session.saved = model.sheet.clone();
    model
}

fn told(found: PatchFinding) -> PatchFinding {
    let rose: Vec<f64> = (0..18)
        .map(|i| {
            if i == 7 {
                0.4
            } else if i == 1 {
                0.2
            } else {
                0.4 / 16.0
            }
        })
        .collect();
    let trend = TrendFinding {
        rose,
        rose_bin_deg: 10.0,
        density: (0..180).map(|_| 1.0 / 180.0).collect(),
        resultant_length: 0.31,
        n: found.trend.nodes.len(),
        n_all: found.trend.nodes.len(),
        ..population_trend(72.0, found.trend.clone())
    };
    let words = "Two populations of dunes, 72° and 16°, the finer across the broader ones.";
    PatchFinding { trend, sentence: words.into(), ..found }
}

fn population_trend(axis: f64, base: TrendFinding) -> TrendFinding {
    TrendFinding {
        defined: true,
        axis: Some(Axis::from_deg(axis)),
        ci95_half_deg: Some(2.4),
        ci95_source: "effective n",
        resultant_length: 0.83,
        n: 812,
        n_all: 1200,
        n_eff: 61.0,
        ..base
    }
}

fn pattern() -> PatternFinding {
    let scale = |i: usize| {
        let scale_px = 1.5 * 1.41f64.powi(i as i32);
        let broad = i >= 5;
        ScaleFinding {
            scale_px,
            spacing: 6.0 * scale_px * 50.0,
            coherence: if broad {
                0.5 - 0.04 * (i as f64 - 6.0).abs()
            } else {
                0.34 - 0.05 * (i as f64 - 2.0).abs()
            },
            share: 0.7,
            axis: Some(Axis::from_deg(if broad { 72.0 } else { 16.0 + 2.0 * i as f64 })),
            resultant_length: 0.6,
        }
    };
    let population = |name: &str, axis: f64, weight: f64, spacing: f64| PopulationFinding {
        name: name.into(),
        source: PopulationSource::Scale,
        weight,
        trend: population_trend(axis, TrendFinding::default()),
        spacing: Some(spacing),
        spacing_ci95: Some([0.93 * spacing, 1.08 * spacing]),
        crests: Err("not traced".into()),
        verdicts: Vec::new(),
        cautions: Vec::new(),
    };
    let plateau = |scales: [usize; 2], axis: f64, scale_px: f64| PlateauFinding {
        scales,
        axis: Axis::from_deg(axis),
        resultant_length: 0.7,
        scale_px,
    };
    PatternFinding {
        scales: (0..9).map(scale).collect(),
        plateaus: vec![plateau([0, 4], 16.0, 3.0), plateau([5, 8], 72.0, 11.7)],
        populations: vec![
            population("72° population", 72.0, 0.64, 1840.0),
            population("16° population", 16.0, 0.36, 610.0),
        ],
        light: Some(LightFinding {
            from: Azimuth::from_deg(96.0),
            from_bias_deg: Some(66.0),
            by_light: [1.0 / 3.0, 0.5],
            suspect: false,
            refit: Some(RefitFinding { axis: Axis::from_deg(74.5), resultant_length: 0.27, turn_deg: 2.5 }),
            near_light: [0.06, 0.08],
        }),
    }
}

fn recovery(patch: Id) -> RecoveryFinding {
    let trend = |i: u32| {
        let axis = Axis::from_deg(10.0 * f64::from(i));
        let shown = (axis.rad() - 96f64.to_radians()).sin().abs();
        let found = (8.0 * (1.4 * shown).min(1.0)).round() as u32;
        let p = f64::from(found) / 8.0;
        RecoveredTrend {
            trend: axis,
            tries: 8,
            found,
            probability_ci95: [(p - 0.28).max(0.0), (p + 0.2).min(1.0)],
            bias_deg: Some(5.0 * (2.0 * (axis.rad() - 96f64.to_radians())).sin()),
            spread_deg: Some(2.0 + 4.0 * (1.0 - shown)),
            share: 0.5 * shown,
            resultant_length: 0.7,
        }
    };
    RecoveryFinding {
        patch,
        name: "Long dunes".into(),
        fingerprint: String::new(),
        unit: LengthUnit::Metre,
        light_from: Some(Azimuth::from_deg(96.0)),
        spacing: 1840.0,
        height: 92.0,
        tone_per_slope: 1.9,
        defects: 0.1,
        window_px: 256,
        trends: (0..18).map(trend).collect(),
        uniform_resultant: 0.41,
        uniform_axis: Some(Axis::from_deg(6.0)),
        uniform_weighted: [0.33, 0.5],
        spread_deg: 9.0,
        missed: vec![[84.0, 108.0]],
        corrected: Some(RefitFinding { axis: Axis::from_deg(75.4), resultant_length: 0.31, turn_deg: 3.4 }),
        sentence: "Trends between 84° and 108° would have been missed here.".into(),
        cautions: Vec::new(),
    }
}

#[test]
fn each_population_is_told_and_may_be_named() {
    let mut harness = open(two_populations(), [1440.0, 2600.0]);
    key(&mut harness, Modifiers::ALT, Key::Num2);
    assert!(shows(&harness, "Trend and coherence against scale") && shows(&harness, "Populations"));
    let field = "Name of population 2";
    harness.get_by_role_and_label(Role::TextInput, field).focus();
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::End);
    harness.get_by_role_and_label(Role::TextInput, field).type_text(", fine");
    harness.run_steps(2);
    key(&mut harness, Modifiers::NONE, Key::Enter);
    let said = &harness.state().app().model().sheet.patches[0].populations;
    assert!(matches!(said.as_slice(), [p] if p.axis.deg() == 16.0 && p.name.ends_with(", fine")), "{said:?}");
    key(&mut harness, Modifiers::COMMAND, Key::Z);
    assert!(harness.state().app().model().sheet.patches[0].populations.is_empty(), "undo");
    keep(&mut harness, "trend");
    key(&mut harness, Modifiers::ALT, Key::Num3);
    assert!(shows(&harness, "Bedforms found again") && tells(&harness, "Trend less its bias"));
    keep(&mut harness, "light");
}

/// Draws frames until all work is done and all of it is on the screen.
fn at_rest(harness: &mut Harness<'_, Desk>) {
    let end = Instant::now() + Duration::from_secs(400);
    let mut quiet = 0;
    while quiet < 8 {
        assert!(Instant::now() < end, "the window never came to rest");
        harness.step();
        let app = harness.state().app();
        let (model, results) = (app.model(), &app.model().session.results);
        let done = model.session.jobs.is_idle()
            && results.wanting(&model.sheet).is_empty()
            && results.networks_wanting(&model.sheet).is_empty()
            && app.is_settled();
        scene::settle(model);
        quiet = if done { quiet + 1 } else { 0 };
        std::thread::sleep(Duration::from_millis(5));
    }
}

/// The window on the demo with this patch, page and more, for the documents.
fn pictured(patch: usize, page: Page, more: &[ViewCommand], path: &str) {
    let (_folder, sheet) = demo_on_disk();
    let mut harness = open(blank(), [1280.0, 800.0]);
    give(&mut harness, Command::Sheet(SheetCommand::Open(sheet)));
    let id = harness.state().app().model().sheet.patches[patch].id;
    give(&mut harness, Command::Patch(PatchCommand::Select(Some(id))));
    give(&mut harness, Command::View(ViewCommand::Page(page)));
    more.iter().for_each(|command| give(&mut harness, Command::View(command.clone())));
    at_rest(&mut harness);
    compare(&harness.render().expect("a picture"), path);
}

#[test]
fn the_light_page_on_the_demo() {
    pictured(0, Page::Light, &[], "docs/pictures/light-light-1280x800.png");
}

#[test]
fn the_flow_texture_on_the_demo() {
    let night = [ViewCommand::Flow, ViewCommand::Theme];
    pictured(1, Page::Trend, &night, "docs/pictures/flow-dark-1280x800.png");
}

/// Broad dunes with finer ones across them, 16 looks of speckle.
fn crossed_dunes(folder: &Path) -> PathBuf {
    let (width, height) = (520, 420);
    let mut rng = rand_chacha::ChaCha8Rng::seed_from_u64(11);
    let looks = speckle(width, height, 16.0, &mut rng);
    let wave = |col: usize, row: usize, normal: f64, spacing: f64, swing: f64| {
        let (sin, cos) = normal.to_radians().sin_cos();
        let (x, y) = (col as f64, -(row as f64));
        let (across, along) = (x * sin + y * cos, x * cos - y * sin);
        (std::f64::consts::TAU * (across + swing * (along / 70.0).sin()) / spacing).sin()
    };
    let tone = Grid::from_fn(width, height, |col, row| {
        let ln = 0.5 * wave(col, row, 160.0, 36.0, 3.0) + 0.4 * wave(col, row, 100.0, 12.0, 1.0);
        ln.exp() as f32
    });
    let path = folder.join("crossed-dunes.tif");
    write_tiff(&path, &speckled(&tone, &looks), None).expect("the raster is written");
    path
}

/// Whatever populations are told apart, the page says so, and names those it tells.
#[test]
fn superposed_dunes_are_told_on_the_trend_page() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = crossed_dunes(folder.path());
    let mut harness = open(blank(), [1440.0, 900.0]);
    give(&mut harness, Command::Raster(RasterCommand::Open(path)));
    wait(&mut harness, "the raster", |model| model.shown_size().is_some());
    let raster = harness.state().app().model().sheet.rasters[0].id;
    give(&mut harness, Command::Raster(RasterCommand::Kind { id: raster, kind: ImageKind::Radar }));
    key(&mut harness, Modifiers::COMMAND, Key::A);
    key(&mut harness, Modifiers::ALT, Key::Num2);
    at_rest(&mut harness);
    let model = harness.state().app().model();
    let id = model.view.patch.expect("a patch is selected");
    let found = model.session.results.patch(id).expect("measured");
    let axes: Vec<f64> = found.pattern.populations.iter().filter_map(|p| Some(p.trend.axis?.deg())).collect();
    println!("populations at {axes:?}");
    let near = |want: f64| axes.iter().any(|deg| Axis::from_deg(*deg).separation(Axis::from_deg(want)) < 5.0);
    assert!(axes.len() == 2 && near(70.0) && near(10.0), "populations at {axes:?}");
    for number in [1, 2] {
        let field = format!("Name of population {number}");
        assert!(harness.query_by_role_and_label(Role::TextInput, &field).is_some(), "{field}");
    }
    keep(&mut harness, "superposed");
}

/// Lays a picture aside to be looked at, when a folder for such is named.
fn keep(harness: &mut Harness<'_, Desk>, name: &str) {
    if let Some(folder) = std::env::var_os("VENTIFACT_LOOK") {
        let path = std::path::Path::new(&folder).join(format!("{name}.png"));
        harness.render().expect("a picture").save(path).expect("the picture can be written");
    }
}

//! One ground on two pictures: crests that moved, trends that turned, looks that show other trends, and rasters
//! that lie otherwise.

use std::f64::consts::TAU;
use std::path::Path;
use std::sync::Arc;

use rand::Rng as _;

use ventifact::assert_close;
use ventifact::desk::{Command, ComparisonCommand, Model, PatchCommand, SheetCommand, apply};
use ventifact::files::raster::write_tiff;
use ventifact::ground::{
    Affine, Axis, Azimuth, Body, Frame, Grid, LocalFrame, Place, Point, Polygon, Projection, Seed, Work,
};
use ventifact::science::scene::{DuneTexture, speckle, speckled};
use ventifact::study::check::problems;
use ventifact::study::run::{Memo, run_comparison};
use ventifact::study::{
    Comparison, ComparisonFinding, Id, ImageKind, Patch, RasterEntry, Sheet, Sources, handover,
};

const NORTH_UP: LocalFrame =
    LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };

/// A sheet with two radar pictures in `folder` and their comparison; lights as given.
fn sheet(folder: &Path, pictures: [&Grid<f32>; 2], lights: [Option<f64>; 2]) -> Sheet {
    let mut sheet = Sheet::empty("two pictures");
    for (i, picture) in pictures.into_iter().enumerate() {
        let (name, id) = (["then", "now"][i], Id(i as u32 + 1));
        let path = folder.join(format!("{name}.tif"));
        write_tiff(&path, picture, None).expect("writes");
        sheet.rasters.push(RasterEntry {
            id,
            name: name.into(),
            path,
            bands: Default::default(),
            kind: ImageKind::Radar,
            placement: Default::default(),
            tone: Default::default(),
            light_from: lights[i].map(Azimuth::from_deg),
        });
    }
    let (w, h) = (pictures[0].width() as f64, pictures[0].height() as f64);
    let outline = Polygon::rectangle(w - 8.0, h - 8.0).map(|p| Point::new(p.x + 4.0, p.y + 4.0));
    sheet.patches.push(Patch::new(Id(3), "Long dunes", Id(1), outline));
    let (name, years) = ("then and now".to_owned(), Some(2.0));
    sheet.comparisons.push(Comparison { id: Id(4), name, patch: Id(3), raster: Id(2), years });
    sheet
}

fn run(sheet: &Sheet, sources: &Sources) -> ComparisonFinding {
    let found = run_comparison(sheet, sources, Id(4), &Memo::default(), &Work::quiet()).expect("not stopped");
    (*found.expect("both show the ground")).clone()
}

fn compared(pictures: [&Grid<f32>; 2], lights: [Option<f64>; 2]) -> ComparisonFinding {
    let folder = tempfile::tempdir().expect("a folder");
    let sheet = sheet(folder.path(), pictures, lights);
    run(&sheet, &Sources::open(&sheet))
}

/// Dunes across the picture, `down` pixels lower, under speckle of its own.
fn dunes(down: usize, seed: u64) -> Grid<f32> {
    let dunes = DuneTexture { trend: Axis::from_deg(90.0), spacing: 20.0, spread_deg: 8.0, bandwidth: 0.15 };
    let large = dunes.sample(320, 330, NORTH_UP, &mut Seed(5).stream("moved", 0));
    lit(&Grid::from_fn(320, 320, |col, row| large.at(col, row + 10 - down)), 0.6, seed)
}

/// exp of a texture, under speckle of its own.
fn lit(texture: &Grid<f32>, strength: f32, seed: u64) -> Grid<f32> {
    let noise = speckle(texture.width(), texture.height(), 4.0, &mut Seed(seed).stream("two-pictures", 1));
    speckled(&texture.map(|v| (strength * v).exp()), &noise)
}

#[test]
fn crests_that_moved_are_followed_and_their_trend_stands() {
    for (seed, rows) in [(1, 1), (2, 3), (3, 6)] {
        let found = compared([&dunes(0, 2 * seed), &dunes(rows, 2 * seed + 1)], [None, None]);
        let down = rows as f64;
        let shift = found.shift.as_ref().expect("crests in both");
        let south = if shift.toward.deg() > 90.0 { 1.0 } else { -1.0 };
        let error = south * shift.median - down;
        println!(
            "{down} px: {} in {:?}, p {:.3}; {}",
            shift.median, shift.ci95, found.axes.tests[0].p, found.sentence
        );
        // Crests lean by 8°, and square to them a step down is some 0.99 as long. Coverage is the bench's.
        assert!(error.abs() < 0.4, "{down}: {error}");
        assert!(shift.ci95[1] - shift.ci95[0] < 1.2, "{:?}", shift.ci95);
        assert!(shift.chance.expect("rearranged").p <= 0.05);
        assert!(!found.axes.differ, "{:?}", found.axes);
        assert!(found.sentence.contains("a year"), "{}", found.sentence);
        assert_eq!(found.axes.tests[0].name, "paired difference");
    }
}

#[test]
fn a_field_that_turned_by_eight_degrees_is_found_to() {
    let texture = |deg: f64| {
        let dunes =
            DuneTexture { trend: Axis::from_deg(deg), spacing: 12.0, spread_deg: 9.0, bandwidth: 0.15 };
        dunes.sample(320, 320, NORTH_UP, &mut Seed(8).stream("turned", 0))
    };
    let found = compared([&lit(&texture(60.0), 0.6, 1), &lit(&texture(68.0), 0.6, 2)], [None, None]);
    println!("{:?}\n{}", found.axes, found.sentence);
    assert!(found.axes.differ);
    let [low, high] = found.axes.difference_ci95_deg.expect("two means");
    assert!(low <= 8.0 && 8.0 <= high && high - low < 8.0, "{low} {high}");
}

/// Waves of all trends alike, each as strong as the light from `light` shows it; the ground is the same for all.
fn uniform_under(light: f64) -> Grid<f32> {
    const WAVES: usize = 180;
    let mut random = Seed(60).stream("uniform", 0);
    let mut field = vec![0.0f64; 320 * 320];
    for wave in 0..WAVES {
        let trend = Axis::from_deg(180.0 * wave as f64 / WAVES as f64);
        let shows = trend.separation(Azimuth::from_deg(light).axis()).to_radians().sin();
        let (e, n) = trend.perpendicular().azimuth().east_north();
        let (k, phase) = (TAU / random.random_range(10.0..14.0), random.random_range(0.0..TAU));
        for (i, v) in field.iter_mut().enumerate() {
            let (x, y) = ((i % 320) as f64, -((i / 320) as f64));
            *v += shows * (2.0 / WAVES as f64).sqrt() * (k * (x * e + y * n) + phase).cos();
        }
    }
    Grid::from_parts(320, 320, field.iter().map(|v| *v as f32).collect(), None)
}

#[test]
fn what_two_looks_show_of_one_even_field_is_put_down_to_the_looks() {
    let pictures = [lit(&uniform_under(20.0), 0.7, 5), lit(&uniform_under(80.0), 0.7, 6)];
    let found = compared([&pictures[0], &pictures[1]], [Some(20.0), Some(80.0)]);
    println!("{:?}\n{}", found.axes, found.sentence);
    assert!(found.axes.differ);
    let looks = found.looks.expect("both looks are known");
    assert_close!(looks.apart_deg, 60.0, 1e-9, "angle of the looks");
    assert!(looks.may_explain, "{looks:?}");
    assert!(
        found.sentence.contains("the looks stand 60° apart, which alone can make such a difference"),
        "{}",
        found.sentence
    );
}

#[test]
fn rasters_that_lie_otherwise_show_one_ground() {
    let shape = Body::halvane().shape;
    let definition = format!("+proj=eqc +a={0} +b={0}", shape.equatorial_m);
    // Pixels of 10 m, and of 14 m on a grid turned by 25°; both have the middle of pixel (0, 0) in one place.
    let (sin, cos) = 25f64.to_radians().sin_cos();
    let steps = [[10.0, 0.0, 0.0, -10.0], [14.0 * cos, 14.0 * sin, 14.0 * sin, -14.0 * cos]];
    let dunes = DuneTexture { trend: Axis::from_deg(40.0), spacing: 150.0, spread_deg: 8.0, bandwidth: 0.15 };
    let picture = |i: usize, looks: u64| {
        let [a, b, d, e] = steps[i];
        let frame = LocalFrame { east_per_col: a, east_per_row: b, north_per_col: d, north_per_row: e };
        lit(&dunes.draw(360, 360, frame, &mut Seed(9).stream("lie", 0)), 0.6, looks)
    };
    let folder = tempfile::tempdir().expect("a folder");
    let sheet = sheet(folder.path(), [&picture(0, 1), &picture(1, 2)], [Some(130.0), Some(130.0)]);
    let mut sources = Sources::open(&sheet);
    for (i, [a, b, d, e]) in steps.into_iter().enumerate() {
        let affine = Affine { a, b, c: -0.5 * (a + b), d, e, f: -0.5 * (d + e) };
        let projection = Projection::new(&definition, shape).expect("a projection");
        let frame = Frame::Projected { projection, unit_m: 1.0 };
        sources.rasters.get_mut(&Id(i as u32 + 1)).expect("open").place =
            Place::new(affine, frame, Body::halvane()).expect("a place");
    }
    let found = run(&sheet, &sources);
    println!("{:?} {:?}\n{}", found.axes, found.shift, found.sentence);
    assert!(found.overlap > 0.3 && found.overlap < 0.95, "{}", found.overlap);
    assert!(found.cautions.iter().any(|c| c.code == "overlap"));
    assert!(!found.axes.differ, "{:?}", found.axes.tests);
    let shift = found.shift.expect("crests in both");
    assert!(shift.median.abs() < 4.0, "a third of a pixel: {} {:?}", shift.median, shift.ci95);
    // The crests of the second lie on the first raster.
    let inside = |p: &Point| (-5.0..365.0).contains(&p.x) && (-5.0..365.0).contains(&p.y);
    assert!(found.crests[1].iter().flat_map(|l| &l.line.0).all(inside));
}

#[test]
fn what_cannot_be_compared_says_why() {
    let folder = tempfile::tempdir().expect("a folder");
    let (a, b) = (Grid::filled(40, 40, 1.0f32), Grid::filled(40, 30, 1.0f32));
    let mut sheet = sheet(folder.path(), [&a, &b], [None, None]);
    let sources = Sources::open(&sheet);
    let said = |sheet: &Sheet| {
        problems(sheet, &sources)
            .into_iter()
            .filter(|p| p.what == "comparison then and now")
            .map(|p| p.why)
            .collect::<Vec<_>>()
    };
    let refused = |sheet: &Sheet| {
        run_comparison(sheet, &sources, Id(4), &Memo::default(), &Work::quiet())
            .expect("not stopped")
            .unwrap_err()
    };
    assert!(said(&sheet)[0].contains("they differ in size"), "{:?}", said(&sheet));
    assert!(refused(&sheet).contains("they differ in size"));
    sheet.comparisons[0].raster = Id(1);
    assert_eq!(said(&sheet), ["it holds a patch against its own raster"]);
    sheet.comparisons[0].raster = Id(77);
    assert!(refused(&sheet).contains("raster 77"));
    sheet.comparisons[0].patch = Id(78);
    sheet.comparisons[0].years = Some(0.0);
    assert_eq!(said(&sheet).len(), 3, "{:?}", said(&sheet));
    assert!(refused(&sheet).contains("patch 78"));
}

#[test]
fn plain_ground_gives_a_result_in_words_and_is_handed_over() {
    let folder = tempfile::tempdir().expect("a folder");
    let plain = Grid::filled(64, 64, 1.0f32);
    let sheet = sheet(folder.path(), [&plain, &plain], [None, Some(10.0)]);
    let sources = Sources::open(&sheet);
    let findings =
        ventifact::study::run::run(&sheet, &sources, &Memo::default(), &Work::quiet()).expect("not stopped");
    let found = &findings.comparisons[0];
    assert!(found.shift.is_err() && !found.axes.differ, "{found:?}");
    assert!(found.sentence.contains("no bedforms are claimed"), "{}", found.sentence);
    let text = handover::findings_json(&sheet, &findings);
    let json: serde_json::Value = serde_json::from_str(&text).expect("valid");
    let member = &json["comparisons"][0];
    assert_eq!(member["patch_name"], "Long dunes");
    assert!(member["movement"]["refused"].is_string(), "{member}");
    let written = handover::write_all(folder.path(), &sheet, &sources, &findings, &[]).expect("written");
    assert!(written.contains(&"comparisons.csv".to_owned()), "{written:?}");
}

#[test]
fn comparisons_are_added_named_dated_and_deleted_and_undo_brings_them_back() {
    let folder = tempfile::tempdir().expect("a folder");
    let plain = Grid::filled(40, 40, 1.0f32);
    let mut model = Model::new(Arc::new(|| ()));
    model.session.measures = false;
    model.sheet = sheet(folder.path(), [&plain, &plain], [None, None]);
    model.sheet.comparisons.clear();
    let give = |model: &mut Model, command: ComparisonCommand| apply(model, Command::Comparison(command));
    give(&mut model, ComparisonCommand::Add { raster: None });
    assert!(model.sheet.comparisons.is_empty(), "no patch is selected");
    apply(&mut model, Command::Patch(PatchCommand::Select(Some(Id(3)))));
    give(&mut model, ComparisonCommand::Add { raster: None });
    let id = model.sheet.comparisons[0].id;
    assert_eq!((model.sheet.comparisons[0].patch, model.sheet.comparisons[0].raster), (Id(3), Id(2)));
    assert_eq!(model.sheet.comparisons[0].name, "Long dunes on now");
    give(&mut model, ComparisonCommand::Add { raster: None });
    give(&mut model, ComparisonCommand::Add { raster: Some(Id(1)) });
    assert_eq!(model.sheet.comparisons.len(), 1, "no other raster is left, and its own is none");
    give(&mut model, ComparisonCommand::SetYears { id, years: Some(0.0) });
    assert_eq!(model.sheet.comparisons[0].years, None);
    give(&mut model, ComparisonCommand::SetYears { id, years: Some(-3.5) });
    assert_eq!(model.sheet.comparisons[0].years, Some(-3.5));
    give(&mut model, ComparisonCommand::Rename { id, name: "back in time".into() });
    assert_eq!(model.sheet.comparisons[0].name, "back in time");
    apply(&mut model, Command::Patch(PatchCommand::Delete));
    assert!(model.sheet.comparisons.is_empty(), "its patch is gone");
    apply(&mut model, Command::Sheet(SheetCommand::Undo));
    assert_eq!(model.sheet.comparisons.len(), 1);
    give(&mut model, ComparisonCommand::Delete(id));
    assert!(model.sheet.comparisons.is_empty());
    apply(&mut model, Command::Sheet(SheetCommand::Undo));
    assert_eq!(model.sheet.comparisons[0].name, "back in time");
}

//! Crests of a patch from the raster to the files: traced, edited, drawn with the pen, imported, handed over.

use std::f64::consts::TAU;
use std::path::Path;

use ventifact::assert_close;
use ventifact::files::raster::{Bands, write_tiff};
use ventifact::ground::{Bounds, Grid, Point, Polygon, Polyline, Work};
use ventifact::science::crest::{CrestModel, CrestOrigin};
use ventifact::study::crest_edits::{crest_lines, strokes_in};
use ventifact::study::handover::write_all;
use ventifact::study::pen::Pen;
use ventifact::study::run::{Memo, run};
use ventifact::study::{
    CrestStroke, CrestsFinding, Findings, Id, ImageKind, Patch, Placement, RasterEntry, Sheet, Sources,
    StrokeKind, Tone,
};

const SPACING: f64 = 16.0;

/// Where the crest numbered `k` runs.
fn course(k: f64, x: f64) -> f64 {
    SPACING * (k + 0.5) + 4.0 * (TAU * x / 150.0).sin()
}

fn dunes() -> Grid<f32> {
    Grid::from_fn(320, 240, |c, r| {
        let (x, y) = (c as f64 + 0.5, r as f64 + 0.5);
        let grain = ((c * 7919 + r * 104_729) % 97) as f64 / 97.0;
        (100.0 + 30.0 * (TAU * (y - course(0.0, x)) / SPACING).cos().max(0.0) + 3.0 * grain) as f32
    })
}

/// A sheet with one raster of 2 m pixels and one patch on it.
fn sheet(folder: &Path) -> Sheet {
    let path = folder.join("dunes.tif");
    write_tiff(&path, &dunes(), None).unwrap();
    let mut sheet = Sheet::empty("dunes");
    sheet.rasters.push(RasterEntry {
        id: Id(1),
        name: "dunes".into(),
        path,
        bands: Bands::One(0),
        kind: ImageKind::Optical,
        placement: Placement { pixel_m: Some([2.0, 2.0]), north_deg: Some(0.0), body: None },
        tone: Tone::default(),
        light_from: None,
    });
    let outline = Polygon::rectangle(280.0, 200.0).map(|p| Point::new(p.x + 20.0, p.y + 20.0));
    sheet.patches.push(Patch::new(Id(2), "Field", Id(1), outline));
    sheet
}

fn findings(sheet: &Sheet) -> Findings {
    run(sheet, &Sources::open(sheet), &Memo::default(), &Work::quiet()).unwrap()
}

fn crests(sheet: &Sheet) -> CrestsFinding {
    findings(sheet).patches[0].crests.clone().expect("crests")
}

fn codes(crests: &CrestsFinding) -> Vec<&str> {
    crests.cautions.iter().map(|c| c.code).collect()
}

/// Crest `k` between two columns, drawn by hand.
fn drawn(kind: StrokeKind, k: f64, columns: std::ops::Range<u32>) -> CrestStroke {
    let line = columns.map(|x| Point::new(f64::from(x), course(k, f64::from(x)))).collect();
    CrestStroke { kind, picks: Vec::new(), line: Polyline(line) }
}

#[test]
fn all_numbers_are_those_of_the_edited_lines() {
    let folder = tempfile::tempdir().unwrap();
    let mut sheet = sheet(folder.path());
    let before = crests(&sheet);
    assert!(before.lines.iter().all(|l| l.origin == CrestOrigin::Traced && l.by_hand_px == 0.0));
    assert!(!codes(&before).contains(&"crests-by-hand"), "{:?}", codes(&before));

    // The longest is taken out, by a point a little beside it.
    let longest = before.lines.iter().max_by(|a, b| a.line.length().total_cmp(&b.line.length())).unwrap();
    let middle = longest.line.0[longest.line.0.len() / 2];
    sheet.patches[0].crests.rejected.push(Point::new(middle.x, middle.y + 2.0));
    let without = crests(&sheet);
    assert_eq!(without.numbers.count, before.numbers.count - 1);
    let ground = 2.0 * longest.line.length();
    assert_close!(before.numbers.total_length - without.numbers.total_length, ground, 1e-6, "length");
    assert!(without.spacing.stereology > before.spacing.stereology);

    // And drawn again in part; one more edit finds nothing.
    let k = ((middle.y - SPACING / 2.0) / SPACING).round();
    sheet.patches[0].crests.strokes.push(drawn(StrokeKind::Crest, k, 60..200));
    sheet.patches[0].crests.cuts.push(Point::new(5.0, 5.0));
    let again = crests(&sheet);
    let own = again.lines.iter().find(|l| l.origin == CrestOrigin::Drawn).expect("the drawn one");
    assert_close!(own.by_hand_px, own.line.length(), 1e-9, "by hand, full-resolution pixels");
    assert_close!(own.line.length(), sheet.patches[0].crests.strokes[0].line.length(), 1e-6, "length");
    assert_eq!(again.lost_edits, [Point::new(5.0, 5.0)]);
    assert!(codes(&again).contains(&"crests-by-hand") && codes(&again).contains(&"crest-edits-lost"));

    // Nothing but the drawn one.
    sheet.patches[0].crests.drawn_only = true;
    sheet.patches[0].crests.rejected.clear();
    sheet.patches[0].crests.cuts.clear();
    let alone = crests(&sheet);
    assert_eq!((alone.lines.len(), alone.fits.len()), (1, 0));
    assert!(codes(&alone).contains(&"crests-only-drawn"));
    sheet.patches[0].crests.strokes.clear();
    let refused = findings(&sheet).patches[0].crests.clone().unwrap_err();
    assert_eq!(refused, "only what is drawn counts, and nothing is drawn");
}

#[test]
fn the_pen_follows_a_crest_of_the_raster() {
    let folder = tempfile::tempdir().unwrap();
    let sheet = sheet(folder.path());
    let sources = Sources::open(&sheet);
    let (entry, open, work) = (&sheet.rasters[0], &sources.rasters[&Id(1)], Work::quiet());
    let window = Bounds { min: Point::new(30.0, 40.0), max: Point::new(310.0, 200.0) };
    let lay = |model, scale| Pen::lay_crests(open, entry, window, model, scale, &work).unwrap();
    for pen in [lay(Some(CrestModel::BrightRidge), Some(SPACING / 7.0)), lay(None, None)] {
        let [from, to] = [50.0, 290.0].map(|x| Point::new(x, course(6.0, x) + 2.5));
        let way = pen.way(from, to, &work).unwrap().expect("a way");
        for p in &way.line.0 {
            assert_close!(p.y, course(6.0, p.x), 1.0, "at {p:?}");
        }
        assert_eq!((way.cost_ratio, way.p), (None, None));
        let ways = pen.ways_from(from, &work).unwrap().expect("passable");
        assert_eq!(ways.from(), from);
        assert_eq!(ways.to(to, &work).unwrap().expect("a way").line, way.line);
    }
}

#[test]
fn crests_handed_over_are_read_again() {
    let folder = tempfile::tempdir().unwrap();
    let mut sheet = sheet(folder.path());
    sheet.patches[0].crests.strokes.push(drawn(StrokeKind::Import, 5.25, 40..120));
    let sources = Sources::open(&sheet);
    let found = findings(&sheet);
    let out = folder.path().join("out");
    std::fs::create_dir(&out).unwrap();
    let written = write_all(&out, &sheet, &sources, &found, &[]).unwrap();
    assert!(written.contains(&"crests.csv".to_owned()), "{written:?}");
    let crests = found.patches[0].crests.as_ref().unwrap();
    let table = std::fs::read_to_string(out.join("crests.csv")).unwrap();
    assert_eq!(table.lines().count(), crests.lines.len() + 1);
    assert_eq!(table.lines().filter(|row| row.contains(",imported,")).count(), 1);
    let json: serde_json::Value =
        serde_json::from_str(&std::fs::read_to_string(out.join("findings.json")).unwrap()).unwrap();
    let member = &json["patches"][0]["crests"];
    assert_eq!(member["origins"]["imported"], 1);
    assert_eq!(member["junctions"].as_array().unwrap().len(), crests.junctions.len());
    assert!(member["spacings"]["area_over_length"].is_f64() && member["rose"]["shares"].is_array());

    // Trend strokes and patches of the package are left alone.
    let read = crest_lines(&out.join("findings.gpkg"), &sources.rasters[&Id(1)]).unwrap();
    assert_eq!(read.shapes.len(), crests.lines.len());
    for (shape, line) in read.shapes.iter().zip(&crests.lines) {
        assert_close!(shape.line.length(), line.line.length(), 1e-6, "{}", shape.label);
    }
    assert_eq!(strokes_in(&read, &sheet.patches[0]).1, 0);
}

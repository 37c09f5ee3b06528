//! Real ground measured: what is known about it within 10° or so must come out, with its cautions.

use std::path::Path;

use ventifact::files::georef::GeoTags;
use ventifact::files::raster::{Bands, Limits, Raster, Window, write_tiff};
use ventifact::files::wind_table;
use ventifact::ground::{Axis, Azimuth, Body, Grid, Point, Polygon, Work};
use ventifact::science::axial::mean::{Resultant, doubled};
use ventifact::study::run::{Memo, run};
use ventifact::study::{
    Findings, Id, ImageKind, Patch, PatchFinding, Placement, RasterEntry, Sheet, Sources, Tone, WindEntry,
};

use crate::field_data;

fn sheet(path: &Path, patches: &[(&str, Polygon)]) -> Sheet {
    let mut sheet = Sheet::empty("field");
    sheet.rasters.push(RasterEntry {
        id: Id(1),
        name: "raster".into(),
        path: path.to_owned(),
        bands: Bands::default(),
        kind: ImageKind::Optical,
        placement: Placement::default(),
        tone: Tone::default(),
        light_from: None,
    });
    for (name, outline) in patches {
        let id = sheet.fresh_id();
        sheet.patches.push(Patch::new(id, *name, Id(1), outline.clone()));
    }
    sheet
}

fn measured(sheet: &Sheet) -> Findings {
    let sources = Sources::open(sheet);
    let findings = run(sheet, &sources, &Memo::default(), &Work::quiet()).unwrap();
    assert_eq!(findings.failures, vec![]);
    for patch in &findings.patches {
        let codes: Vec<_> = patch.cautions.iter().map(|c| c.code).collect();
        println!("{} {codes:?}", patch.sentence);
    }
    findings
}

fn patch<'a>(findings: &'a Findings, name: &str) -> &'a PatchFinding {
    findings.patches.iter().find(|p| p.name == name).expect("the patch was measured")
}

fn rectangle(cols: (f64, f64), rows: (f64, f64)) -> Polygon {
    Polygon::rectangle(cols.1 - cols.0, rows.1 - rows.0).map(|p| Point::new(p.x + cols.0, p.y + rows.0))
}

fn has(finding: &PatchFinding, code: &str) -> bool {
    finding.cautions.iter().any(|c| c.code == code)
}

#[test]
fn ridges_turn_with_the_channel_bend() {
    let Some(data) = field_data("ridges_turn_with_the_channel_bend") else { return };
    let path = data.join("ridged-channel/ridged_channel_gray.png");
    let spots = [
        ("west", rectangle((900.0, 1500.0), (1000.0, 1500.0))),
        ("east", rectangle((2000.0, 2700.0), (1300.0, 1600.0))),
    ];
    let findings = measured(&sheet(&path, &spots));
    for (name, want) in [("west", 14.0), ("east", 7.0)] {
        let finding = patch(&findings, name);
        let axis = finding.trend.axis.expect("a trend");
        assert!(axis.separation(Axis::from_deg(want)) <= 5.0, "{name}: {axis:?}, known about {want}");
        assert!(finding.spectrum.spacing.is_some(), "{name}: no spacing");
        assert!(has(finding, "north-assumed"), "{name}");
    }
}

#[test]
fn coastal_dunes_trend_with_wide_intervals_and_the_sea_is_doubted() {
    let Some(data) = field_data("coastal_dunes_trend_with_wide_intervals_and_the_sea_is_doubted") else {
        return;
    };
    let sea = Polygon {
        outer: [(860.0, 3.0), (1198.0, 3.0), (1198.0, 150.0), (1120.0, 118.0), (1000.0, 62.0), (930.0, 28.0)]
            .map(|(x, y)| Point::new(x, y))
            .to_vec(),
        holes: Vec::new(),
    };
    let inland = [
        ("middle", rectangle((640.0, 900.0), (280.0, 560.0))),
        ("south", rectangle((560.0, 900.0), (500.0, 680.0))),
        ("centre", rectangle((420.0, 900.0), (300.0, 520.0))),
        ("sea", sea),
    ];
    let mut sheet = sheet(&data.join("coastal-dunefield/coastal_dunefield_landsat8_30m.tif"), &inland);
    sheet.rasters[0].light_from = Some(Azimuth::from_deg(44.2));
    let record = data.join("wind/hourly_typical_year_west_texas_a.csv");
    sheet.winds.push(WindEntry {
        id: sheet.fresh_id(),
        name: "West Texas".into(),
        import: wind_table::guess(&record).unwrap().import,
        path: record,
        height_m: 10.0,
        roughness_m: 1e-3,
        body: Some(Body::earth()),
        at: None,
    });
    let findings = measured(&sheet);
    for name in ["middle", "south", "centre"] {
        let finding = patch(&findings, name);
        let (axis, half) =
            (finding.trend.axis.expect("a trend"), finding.trend.ci95_half_deg.expect("an interval"));
        // Known: crests about 157–177°, figures good to 10°.
        assert!(axis.separation(Axis::from_deg(167.0)) <= 20.0, "{name}: {axis:?}");
        assert!(half >= 4.0, "{name}: ± {half}° is too sure of barchanoid dunes");
        let verdict = &finding.verdicts[0];
        assert!(verdict.probabilities.is_some(), "{name}: {:?}", verdict.refused);
        assert!(verdict.cautions.iter().any(|c| c.code == "low-ratio"), "{name}: {:?}", verdict.cautions);
    }
    let sea = patch(&findings, "sea");
    let axis = sea.trend.axis.expect("the faint texture has an orientation");
    assert!(axis.separation(Axis::from_deg(103.5)) <= 10.0, "{axis:?}");
    assert!(has(sea, "faint-texture"), "{:?}", sea.cautions);
}

/// The river bed lies in a rotated, nearly south-up grid; the same ground resampled to north-up must
/// give the same true azimuth.
#[test]
fn a_rotated_raster_and_the_same_ground_north_up_agree() {
    let Some(data) = field_data("a_rotated_raster_and_the_same_ground_north_up_agree") else { return };
    let path = data.join("crest-truth/riverbed_5892_gray_rotated.tif");
    let raster = Raster::open(&path, &Limits::default()).unwrap();
    let (width, height) = (raster.info().width, raster.info().height);
    let window = Window { col: 0, row: 0, width, height };
    let pixels = raster.read(0, window, &Bands::default(), &Work::quiet()).unwrap();
    let place = &raster.info().georeference.as_ref().expect("it is georeferenced").place;
    let inset = rectangle((3.0, width as f64 - 3.0), (3.0, height as f64 - 3.0));

    // A north-up grid of the same pixel size around the same ground, cubic between pixels.
    let size = place.affine.determinant().abs().sqrt();
    let corners = Polygon::rectangle(width as f64, height as f64).map(|p| place.map_of(p));
    let bounds = corners.bounds().unwrap();
    let (cols, rows) = ((bounds.width() / size).ceil() as usize, (bounds.height() / size).ceil() as usize);
    let to_map = |p: Point| Point::new(bounds.min.x + size * p.x, bounds.max.y - size * p.y);
    let mut upright = Grid::from_fn(cols, rows, |col, row| {
        let at = to_map(Point::new(col as f64 + 0.5, row as f64 + 0.5));
        place.pixel_of_map(at).and_then(|p| cubic(&pixels, p)).unwrap_or(f32::NAN)
    });
    let values = upright.values().to_vec();
    upright.mask_where(|col, row| values[row * cols + col].is_finite());
    let folder = tempfile::tempdir().unwrap();
    let upright_path = folder.path().join("upright.tif");
    let tags = GeoTags {
        pixel_scale: vec![size, size, 0.0],
        tie_points: vec![0.0, 0.0, 0.0, bounds.min.x, bounds.max.y, 0.0],
        key_directory: vec![1, 1, 0, 3, 1024, 0, 1, 1, 1025, 0, 1, 1, 3072, 0, 1, 32614],
        ..GeoTags::default()
    };
    write_tiff(&upright_path, &upright, Some(&tags)).unwrap();
    let moved = inset.map(|p| {
        let m = place.map_of(p);
        Point::new((m.x - bounds.min.x) / size, (bounds.max.y - m.y) / size)
    });

    let rotated = measured(&sheet(&path, &[("river bed", inset)]));
    let upright = measured(&sheet(&upright_path, &[("river bed", moved)]));
    let (a, b) = (&rotated.patches[0], &upright.patches[0]);
    // The interval is so wide that no line may be drawn; the mean of the nodes is compared.
    let mean = |finding: &PatchFinding| {
        let passed = finding.trend.nodes.iter().filter(|n| n.significant);
        let axes: Vec<Axis> = passed.map(|n| n.axis).collect();
        Resultant::of(&doubled(&axes), None).axis()
    };
    let (axis_a, axis_b) = (mean(a), mean(b));
    println!("rotated {:.2}°, north-up {:.2}°", axis_a.deg(), axis_b.deg());
    assert!(axis_a.separation(axis_b) <= 0.5, "rotated {axis_a:?}, north-up {axis_b:?}");
    for finding in [a, b] {
        assert!(has(finding, "weak-alignment"), "{:?}", finding.cautions);
    }
}

/// Catmull–Rom between the sixteen pixels around a point; `None` at the rim.
fn cubic(grid: &Grid<f32>, p: Point) -> Option<f32> {
    let (x, y) = (p.x - 0.5, p.y - 0.5);
    let (col, row) = (x.floor(), y.floor());
    if col < 1.0 || row < 1.0 || col + 2.0 >= grid.width() as f64 || row + 2.0 >= grid.height() as f64 {
        return None;
    }
    let weights = |t: f64| {
        let (t2, t3) = (t * t, t * t * t);
        [
            -0.5 * t + t2 - 0.5 * t3,
            1.0 - 2.5 * t2 + 1.5 * t3,
            0.5 * t + 2.0 * t2 - 1.5 * t3,
            -0.5 * t2 + 0.5 * t3,
        ]
    };
    let (across, down) = (weights(x - col), weights(y - row));
    let mut sum = 0.0;
    for (j, wy) in down.iter().enumerate() {
        for (i, wx) in across.iter().enumerate() {
            sum += wx * wy * f64::from(grid.at(col as usize + i - 1, row as usize + j - 1));
        }
    }
    Some(sum as f32)
}

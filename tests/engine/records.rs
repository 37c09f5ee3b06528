//! Wind records in bulk: a grid imported near two patches, and the demo's record thinned.

use ventifact::desk::{Import, Pick};
use ventifact::files::netcdf::Netcdf;
use ventifact::ground::{Azimuth, Body, LonLat, Work};
use ventifact::study::sheet_file::SheetFile;
use ventifact::study::{Id, Sheet, Sources, WindChoice, demo, judges, sources, winds};

use crate::netcdf_writer::grid;

fn demo_on_disk() -> (tempfile::TempDir, Sheet) {
    let folder = tempfile::tempdir().expect("a folder");
    let path = demo::lay_out(folder.path()).expect("the demo");
    let text = std::fs::read_to_string(&path).expect("the sheet");
    let sheet = SheetFile::parse(&text, folder.path()).expect("a sheet").sheet;
    (folder, sheet)
}

/// Forty cells by a year of hours, each cell with winds of its own direction.
#[test]
fn a_grid_of_forty_cells_becomes_records_near_two_patches() {
    let (folder, mut sheet) = demo_on_disk();
    let open = Sources::open(&sheet);
    let place = &open.rasters[&sheet.rasters[0].id].place;
    sheet.patches.retain(|p| p.name.starts_with("Corridor") || p.name.starts_with("Long"));
    assert_eq!(sheet.patches.len(), 2, "two patches of the demo");
    let centres: Vec<LonLat> =
        sheet.patches.iter().map(|p| judges::centre(p, Some(place)).expect("a centre")).collect();
    let [a, b] = centres[..] else { panic!("two centres") };
    // Five rows by eight columns about both, longitudes from 0 to 360.
    let reach = 1.5 * (a.lon - b.lon).abs().max((a.lat - b.lat).abs());
    let (lon, lat) = (0.5 * (a.lon + b.lon), 0.5 * (a.lat + b.lat));
    let step = reach / 4.0;
    let lats: Vec<f32> = (0..5).map(|i| (lat + step * (2.0 - f64::from(i))) as f32).collect();
    let lons: Vec<f32> =
        (0..8).map(|j| (lon + step * (f64::from(j) - 3.5)).rem_euclid(360.0) as f32).collect();
    let toward = |i: usize, j: usize| 9.0 * (8 * i + j) as f64;
    let layout = grid(2, true, 8760, &lats, &lons, |t, i, j| {
        let speed = 1.5 + 1.5 * (t as f64 / 37.0).sin().abs() + 0.5 * (t % 24) as f64 / 24.0;
        let (east, north) = Azimuth::from_deg(toward(i, j)).east_north();
        (speed * east, speed * north)
    });
    let path = folder.path().join("cells.nc");
    std::fs::write(&path, layout.bytes()).expect("written");

    let mut import = Import::of_file(&path, Some(Body::halvane()), &centres).expect("an import");
    assert_eq!((import.stands.len(), import.chosen.len()), (40, 2));
    import.choose(&Pick::Nearest(3), &centres);
    assert!((4..=6).contains(&import.chosen.len()), "{:?}", import.chosen);
    import.choose(&Pick::Nearest(1), &centres);
    sheet.winds = import.into_entries(Id(50));
    for patch in &mut sheet.patches {
        patch.winds = WindChoice::Nearest;
    }
    let text = SheetFile::new(sheet.clone(), serde_json::Value::Null).render(folder.path());
    assert_eq!(SheetFile::parse(&text, folder.path()).expect("it reads").sheet, sheet);
    let mut taken = Vec::new();
    for (patch, centre) in sheet.patches.iter().zip(&centres) {
        let found = judges::of_patch(&sheet, patch, Some(place));
        let [id] = found.records[..] else { panic!("one judge: {found:?}") };
        let entry = sheet.wind(id).expect("on the sheet");
        let distance = judges::distance(entry, *centre, &place.body).expect("it has a place");
        // Half a diagonal of a cell.
        let cell = std::f64::consts::FRAC_1_SQRT_2 * step.to_radians() * place.body.shape.equatorial_m;
        assert!(distance <= 1.001 * cell, "{}: {distance} m of {cell}", patch.name);
        let record = sources::read_wind(entry).expect("a record");
        let study = winds::study(&sheet, entry, &record, &Work::quiet()).expect("a study");
        let drift = study.finding.flux.toward.expect("sand moves");
        println!(
            "{}: {} at {:?}, {:.0} m away, sand toward {:.2}°",
            patch.name,
            entry.name,
            entry.at,
            distance,
            drift.deg()
        );
        let index = {
            let mut file = Netcdf::open(&path).expect("open");
            let cells = file.winds().expect("winds").cells;
            let cell = cells.iter().find(|c| c.at == entry.at).expect("the cell");
            (cell.index[0] as usize, cell.index[1] as usize)
        };
        let off = drift.turn_from(Azimuth::from_deg(toward(index.0, index.1))).abs();
        ventifact::assert_close!(off, 0.0, 0.1, "{}", patch.name);
        assert_eq!(study.finding.rows, 8760);
        taken.push(id);
    }
    assert_ne!(taken[0], taken[1], "each patch has its own cell");
}

/// Issue: the record thinned to six-hourly moves RDP/DP by a printed amount.
#[test]
fn the_reach_mast_read_every_six_hours() {
    let (_folder, sheet) = demo_on_disk();
    let entry = sheet.winds.iter().find(|w| w.name == "Reach mast").expect("the mast");
    let record = sources::read_wind(entry).expect("a record");
    let study = winds::study(&sheet, entry, &record, &Work::quiet()).expect("a study");
    let thinning = study.finding.thinning.as_ref().expect("sand moves");
    println!("{}", thinning.six_hourly().expect("an hourly record"));
    let six = thinning.every(6.0).expect("six-hourly");
    let (ratio, range) = (thinning.ratio.expect("drift"), six.ratio.expect("drift in every phase"));
    assert_eq!(six.phases, 6);
    assert_eq!(Some(ratio), study.finding.flux.ratio);
    assert!(range.low < ratio && ratio < range.high, "{range:?} about {ratio}");
    assert!(range.high - range.low < 0.1, "an autoregressive wind of 20 hours is well seen every six");
    let calendar = study.finding.calendar.as_ref().expect("a calendar");
    assert_eq!(calendar.months.len(), 12);
    // The two seasons of the truth: toward 34° in winter, 145° in summer, swinging by 16°.
    for (month, toward) in [(0, 34.0), (6, 145.0)] {
        let drift = &calendar.months[month].drift;
        let off = drift.toward.map_or(f64::NAN, |t| t.turn_from(Azimuth::from_deg(toward)).abs());
        let half = drift.toward_ci95_half_deg.expect("an interval");
        assert!(off <= half + 10.0, "{}: {off}° off, ± {half}°", calendar.months[month].name);
    }
}

//! Every raster of the reader-stress data against figures that general-purpose readers gave
//! (`make_look_table.py` made `look_table.json`): size, type, bands, no data, levels, place, pixels.

use std::path::Path;

use serde_json::Value;
use ventifact::assert_close;
use ventifact::files::raster::{Bands, Limits, Raster, RasterError, Window};
use ventifact::ground::{Frame, Grid, Point, Work};

use crate::field_data;

const TABLE: &str = include_str!("look_table.json");

#[test]
fn every_reader_stress_file_has_the_expected_header_and_pixels() {
    let Some(root) = field_data("look table") else { return };
    let table: Value = serde_json::from_str(TABLE).expect("the table is JSON");
    let table = table.as_object().expect("one entry per file");
    assert_eq!(table.len(), 33, "files in the table");
    for (name, want) in table {
        if want.get("unreadable").is_some() {
            continue;
        }
        let path = root.join("reader-stress").join(name);
        let raster = Raster::open(&path, &Limits::default()).unwrap_or_else(|e| panic!("{name}: {e}"));
        header(name, &raster, want);
        pixels(name, &raster, want);
    }
}

fn header(name: &str, raster: &Raster, want: &Value) {
    let info = raster.info();
    assert_eq!(info.width as u64, want["width"], "{name}: width");
    assert_eq!(info.height as u64, want["height"], "{name}: height");
    assert_eq!(info.sample.name(), want["sample"], "{name}: sample type");
    assert_eq!(info.bands.len(), want["bands"].as_array().expect("bands").len(), "{name}: bands");
    let levels: Vec<Value> = info.levels.iter().map(|l| serde_json::json!([l.width, l.height])).collect();
    assert_eq!(Value::from(levels), want["levels"], "{name}: levels");
    match (&info.nodata, &want["nodata"]) {
        (None, Value::Null) => {}
        (Some(got), Value::String(nan)) => assert!(got.is_nan() && nan == "nan", "{name}: nodata {got}"),
        (Some(got), want) => {
            let want = want.as_f64().unwrap_or_else(|| panic!("{name}: nodata {got}, want {want}"));
            assert_close!(*got, want, 1e-7 * want.abs(), "{name}: nodata");
        }
        (got, want) => panic!("{name}: nodata {got:?}, want {want}"),
    }
}

fn pixels(name: &str, raster: &Raster, want: &Value) {
    let info = raster.info();
    let lossy = want["lossy"] == true;
    for (band, want) in want["bands"].as_array().expect("bands").iter().enumerate() {
        let whole = Window::whole(info.width, info.height);
        let grid = raster
            .read(0, whole, &Bands::One(band), &Work::quiet())
            .unwrap_or_else(|e| panic!("{name} band {band}: {e}"));
        let what = format!("{name} band {}", band + 1);
        let valid = grid.valid_count();
        assert_eq!(valid as u64, want["valid"], "{what}: valid pixels");
        let mask: Vec<u8> = (0..grid.len()).map(|i| u8::from(grid.mask().is_none_or(|m| m[i]))).collect();
        assert_eq!(u64::from(libdeflater::crc32(&mask)), want["mask_crc32"], "{what}: mask");
        if !lossy {
            let bytes: Vec<u8> = grid
                .values()
                .iter()
                .zip(&mask)
                .flat_map(|(v, ok)| if *ok == 1 { v.to_le_bytes() } else { [0; 4] })
                .collect();
            assert_eq!(u64::from(libdeflater::crc32(&bytes)), want["crc32"], "{what}: pixels");
        }
        // Decoders of lossy pictures may differ by a level here and there, not on average.
        let (sum, sum_col, sum_row) = sums(&grid);
        let each =
            if lossy { 0.5 } else { 1e-9 * want["sum"].as_f64().unwrap_or(0.0).abs() / valid.max(1) as f64 };
        let number = |key: &str| want[key].as_f64().unwrap_or_else(|| panic!("{what}: no {key}"));
        let bound = each * valid as f64;
        assert_close!(sum, number("sum"), bound, "{what}: sum");
        assert_close!(sum_col, number("sum_col"), bound * info.width as f64, "{what}: column-weighted sum");
        assert_close!(sum_row, number("sum_row"), bound * info.height as f64, "{what}: row-weighted sum");
    }
}

fn sums(grid: &Grid<f32>) -> (f64, f64, f64) {
    let mut sums = (0.0, 0.0, 0.0);
    for row in 0..grid.height() {
        for col in 0..grid.width() {
            let v = f64::from(grid.get(col, row).unwrap_or(0.0));
            sums.0 += v;
            sums.1 += v * (col + 1) as f64;
            sums.2 += v * (row + 1) as f64;
        }
    }
    sums
}

#[test]
fn the_place_agrees_with_the_table() {
    let Some(root) = field_data("look table, place") else { return };
    let table: Value = serde_json::from_str(TABLE).expect("the table is JSON");
    for (name, want) in table.as_object().expect("one entry per file") {
        let want = &want["place"];
        if want["projection"].is_null() {
            continue;
        }
        let raster = Raster::open(&root.join("reader-stress").join(name), &Limits::default()).expect("opens");
        let info = raster.info();
        let Some(found) = &info.georeference else {
            let why = info.cautions.iter().find(|c| c.code == "georeference-unread");
            panic!("{name}: no georeference: {why:?}");
        };
        let a = found.place.affine;
        for (got, want) in
            [a.a, a.b, a.c, a.d, a.e, a.f].into_iter().zip(want["affine"].as_array().expect("six"))
        {
            let want = want.as_f64().expect("a number");
            assert_close!(got, want, 1e-9 * want.abs(), "{name}: affine");
        }
        let geographic = matches!(found.place.frame, Frame::Geographic { .. });
        assert_eq!(geographic, want["projection"] == "longlat", "{name}: {}", found.label);
        if let Some(code) = want["epsg"].as_u64() {
            assert_eq!(found.epsg.map(u64::from), Some(code), "{name}: EPSG code");
        }
        for (key, got) in [
            ("equatorial_m", found.place.body.shape.equatorial_m),
            ("polar_m", found.place.body.shape.polar_m),
        ] {
            // The formulas of EPSG:3857 are those of a sphere, whatever datum the code names.
            if key == "polar_m" && found.epsg == Some(3857) {
                continue;
            }
            assert_close!(got, want[key].as_f64().expect("a radius"), 0.01, "{name}: {key}");
        }
        let Some(middle) = want["middle_lonlat"].as_array() else { continue };
        let centre = Point::new(info.width as f64 / 2.0, info.height as f64 / 2.0);
        let got =
            found.place.lonlat_of(centre).unwrap_or_else(|| panic!("{name}: no longitude and latitude"));
        assert_close!(
            got.lon,
            middle[0].as_f64().expect("longitude"),
            1e-6,
            "{name}: longitude of the middle"
        );
        assert_close!(got.lat, middle[1].as_f64().expect("latitude"), 1e-6, "{name}: latitude of the middle");
    }
}

#[test]
fn the_corrupt_file_gives_an_error_that_names_the_tile() {
    let Some(root) = field_data("corrupt.tif") else { return };
    let path = root.join("reader-stress/georeferenced/corrupt.tif");
    let raster = Raster::open(&path, &Limits::default()).expect("its header is sound");
    let error = raster
        .read(0, Window::whole(1024, 1024), &Bands::One(0), &Work::quiet())
        .expect_err("a tile is broken");
    assert!(matches!(error, RasterError::Malformed { .. }), "{error}");
    assert!(error.to_string().contains("chunk"), "{error}");
}

#[test]
fn a_window_at_a_stored_level_is_what_the_level_holds() {
    let Some(root) = field_data("levels") else { return };
    let path = root.join("reader-stress/georeferenced/red.tif");
    let raster = Raster::open(&path, &Limits::default()).expect("opens");
    assert_eq!(raster.info().levels.len(), 3, "levels from the overview file beside it");
    let work = Work::quiet();
    let level = raster.read(1, Window::whole(32, 32), &Bands::One(0), &work).expect("reads");
    let reduced = raster.read_reduced(Window::whole(64, 64), 2, &Bands::One(0), &work).expect("reads");
    assert_eq!(level, reduced);
    assert!(raster.read(3, Window::whole(8, 8), &Bands::One(0), &work).is_err());
    assert!(raster.read(0, Window::whole(8, 8), &Bands::One(3), &work).is_err());
}

#[test]
fn pictures_without_georeference_open() {
    let Some(root) = field_data("pictures") else { return };
    for (file, format, size, bands) in [
        ("ridged-channel/ridged_channel_gray.png", "PNG", (2880, 1800), 1),
        ("linear-dunes/linear_dunes_and_drainage_landsat.jpg", "JPEG", (962, 830), 3),
        ("delta/delta_720p.jpg", "JPEG", (1280, 720), 3),
    ] {
        let raster = open(&root, file);
        let info = raster.info();
        assert_eq!(
            (info.format, (info.width, info.height), info.bands.len()),
            (format, size, bands),
            "{file}"
        );
        let grid = raster.read(
            0,
            Window { col: 100, row: 50, width: 300, height: 200 },
            &Bands::One(0),
            &Work::quiet(),
        );
        assert_eq!(grid.expect("reads").valid_count(), 60_000, "{file}");
        assert!(info.georeference.is_none());
    }
}

fn open(root: &Path, file: &str) -> Raster {
    Raster::open(&root.join(file), &Limits::default()).unwrap_or_else(|e| panic!("{file}: {e}"))
}

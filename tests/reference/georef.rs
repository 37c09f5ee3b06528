//! Georeferencing keys as general-purpose writers make them, against pyproj 3.7.2 (PROJ 9.5.1):
//! `georef_cases.py` made the table.

use serde_json::Value;
use ventifact::assert_close;
use ventifact::files::georef::{GeoTags, from_tiff};
use ventifact::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, write_geopackage};
use ventifact::ground::Point;

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().map(|list| list.iter().filter_map(Value::as_f64).collect()).unwrap_or_default()
}

fn tags(value: &Value) -> GeoTags {
    GeoTags {
        pixel_scale: numbers(&value["pixel_scale"]),
        tie_points: numbers(&value["tie_points"]),
        transformation: numbers(&value["transformation"]),
        key_directory: numbers(&value["key_directory"]).into_iter().map(|n| n as u16).collect(),
        double_params: numbers(&value["double_params"]),
        ascii_params: value["ascii_params"].as_str().unwrap_or("").to_owned(),
    }
}

#[test]
fn keys_of_many_systems_give_the_positions_pyproj_gives() {
    let cases: Vec<Value> = serde_json::from_str(include_str!("georef_cases.json")).expect("table");
    assert!(cases.len() > 80, "{} cases", cases.len());
    for case in &cases {
        let system = case["system"].as_str().expect("system");
        let found = from_tiff(&tags(&case["tags"]), 120, 80).unwrap_or_else(|e| panic!("{system}: {e}"));
        let found = found.unwrap_or_else(|| panic!("{system}: nothing found"));
        let axes = numbers(&case["axes"]);
        assert_close!(found.place.body.shape.equatorial_m, axes[0], 1e-4, "{system}: equatorial axis");
        assert_close!(found.place.body.shape.polar_m, axes[1], 1e-4, "{system}: polar axis");
        for point in case["points"].as_array().expect("points") {
            let [col, row, lon, lat] = numbers(point)[..] else { panic!("{system}: point") };
            let at = found.place.lonlat_of(Point::new(col, row));
            let at = at.unwrap_or_else(|| panic!("{system}: ({col}, {row}) lies outside"));
            // 5e-9° is half a millimetre on Earth. The projection crate's series for the authalic
            // latitude is coarser: 1.2e-7° (7 mm) on Mars, whose flattening is nearly twice Earth's.
            let equal_area = ["laea", "cea", "6933", "3035"].iter().any(|name| system.contains(name));
            let bound = if equal_area { 2e-7 } else { 5e-9 };
            assert_close!(
                (at.lon - lon + 540.0).rem_euclid(360.0) - 180.0,
                0.0,
                bound,
                "{system}: longitude"
            );
            assert_close!(at.lat, lat, bound, "{system}: latitude");
            let back = found.place.pixel_of_lonlat(at, Point::new(60.0, 40.0)).expect("inside");
            assert_close!(back.distance(Point::new(col, row)), 0.0, 1e-4, "{system}: pixel");
        }
    }
}

/// Writes the points of every case into one GeoPackage, in the raster's own system, with the
/// longitudes and latitudes pyproj gave as columns: `geopackage_readers.py` opens it with
/// general-purpose readers and compares.
#[test]
#[ignore = "writes a file for geopackage_readers.py"]
fn write_points_of_all_systems() {
    let cases: Vec<Value> = serde_json::from_str(include_str!("georef_cases.json")).expect("table");
    let layers = cases.iter().enumerate().map(|(index, case)| {
        let found = from_tiff(&tags(&case["tags"]), 120, 80).expect("sound").expect("something");
        let srs = Srs::of_place(&found.place, &found.label, found.epsg);
        let rows = case["points"].as_array().expect("points").iter().map(|point| {
            let [col, row, lon, lat] = numbers(point)[..] else { panic!("point") };
            let at = srs.geometry(&found.place, &Geometry::Point(Point::new(col, row)));
            Row { geometry: at, values: vec![lon.into(), lat.into()] }
        });
        Layer {
            name: format!("case {index}"),
            description: case["system"].as_str().expect("system").to_owned(),
            kind: GeometryKind::Point,
            columns: vec![Column::real("lon_deg"), Column::real("lat_deg")],
            rows: rows.collect(),
            srs,
        }
    });
    let path = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("systems.gpkg");
    write_geopackage(&path, &layers.collect::<Vec<_>>()).expect("written");
    println!("{}", path.display());
}

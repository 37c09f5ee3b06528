//! Lines read for rasters with and without a place.

use std::path::PathBuf;

use proptest::prelude::*;

use super::*;
use crate::assert_close;
use crate::files::layers::{GeometryKind, Layer, Row, Srs, write_geojson, write_geopackage};
use crate::ground::{Affine, Body, Frame, LonLat, Projection};

const SIZE: [usize; 2] = [100, 80];

fn sinusoidal() -> Place {
    let body = Body::halvane();
    let projection = Projection::new("+proj=sinu +lon_0=20 +a=1420000 +b=1420000", body.shape).unwrap();
    let centre = projection.to_map(LonLat { lon: 40.0, lat: 50.0 }).unwrap();
    let affine = Affine { a: 1e3, b: 0.0, c: centre.x - 5e4, d: 0.0, e: -1e3, f: centre.y + 4e4 };
    Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, body).unwrap()
}

fn file(folder: &tempfile::TempDir, text: &str) -> PathBuf {
    let path = folder.path().join("l.geojson");
    std::fs::write(&path, text).unwrap();
    path
}

fn collection(frame: &str, geometry: &str) -> String {
    format!(
        r#"{{"type":"FeatureCollection","frame":"{frame}","features":[
        {{"type":"Feature","properties":{{"name":"Long crest"}},"geometry":{geometry}}}]}}"#
    )
}

#[test]
fn parts_of_a_multi_line_are_lines() {
    let folder = tempfile::tempdir().unwrap();
    let geometry =
        r#"{"type":"MultiLineString","coordinates":[[[1,2],[1,2],[30,40]],[[5,5],[5,5]],[[500,1],[600,1]]]}"#;
    let import = read_lines(&file(&folder, &collection("pixel", geometry)), &Place::pixels(0.0), None, SIZE);
    let import = import.unwrap();
    let [shape] = &import.shapes[..] else { panic!("one line") };
    assert_eq!(shape.line.0, [Point::new(1.0, 2.0), Point::new(30.0, 40.0)]);
    assert_eq!(shape.label, "feature 1 “Long crest”");
    assert_eq!(
        import.notes,
        [
            "feature 1 “Long crest”: a line has no two distinct points and was left out",
            "1 of its lines lie outside the raster and were left out"
        ]
    );
}

#[test]
fn our_own_layers_come_back_on_any_body() {
    let folder = tempfile::tempdir().unwrap();
    let place = sinusoidal();
    let plane = Place::plane([2.0, 3.0], 30.0, Body::halvane()).unwrap();
    let line = Polyline(vec![Point::new(5.5, 6.5), Point::new(50.0, 70.0), Point::new(93.0, 20.25)]);
    for (place, srs) in [
        (&place, Srs::of_place(&place, "Sorrel Reach", None)),
        (&place, Srs::lonlat(&place.body)),
        (&plane, Srs::of_place(&plane, "", None)),
    ] {
        let layer = Layer {
            name: "crests".into(),
            description: String::new(),
            kind: GeometryKind::LineString,
            srs: srs.clone(),
            columns: Vec::new(),
            rows: vec![Row {
                geometry: srs.geometry(place, &Geometry::LineString(line.clone())),
                values: Vec::new(),
            }],
        };
        let package = folder.path().join("l.gpkg");
        write_geopackage(&package, std::slice::from_ref(&layer)).unwrap();
        let mut files = vec![package];
        if srs.is_lonlat() {
            files.push(folder.path().join("l.geojson"));
            write_geojson(&files[1], &layer).unwrap();
        }
        for file in files {
            let import = read_lines(&file, place, None, SIZE).unwrap();
            assert_eq!(import.notes, Vec::<String>::new());
            for p in &line.0 {
                let off = import.shapes[0].line.nearest(*p).unwrap().distance;
                assert_close!(off, 0.0, 1e-3, "{p:?} in {srs:?}");
            }
        }
    }
}

#[test]
fn what_is_wrong_is_named() {
    let folder = tempfile::tempdir().unwrap();
    let refused = |text: &str, place: &Place| {
        read_lines(&file(&folder, text), place, None, SIZE).unwrap_err().to_string()
    };
    let line = r#"{"type":"LineString","coordinates":[[1,2],[3,4]]}"#;
    let said = refused(&collection("lonlat", line), &Place::pixels(0.0));
    assert!(said.contains("feature 1 “Long crest”: its numbers are longitude and latitude"), "{said}");
    let far = r#"{"type":"LineString","coordinates":[[1,2],[3,95]]}"#;
    let said = refused(&collection("lonlat", far), &sinusoidal());
    assert!(said.contains("feature 1 “Long crest”: (3, 95) is no longitude and latitude"), "{said}");
    let broken = r#"{"type":"LineString","coordinates":[[1,2],["a",4]]}"#;
    let said = refused(&collection("pixel", broken), &sinusoidal());
    assert!(said.contains("feature 1 “Long crest”: the position [\"a\",4] is not two numbers"), "{said}");
    let square = r#"{"type":"Polygon","coordinates":[[[1,2],[3,4],[1,9],[1,2]]]}"#;
    assert!(refused(&collection("pixel", square), &sinusoidal()).contains("there is no line in it"));
    let off = r#"{"type":"LineString","coordinates":[[-9,-2],[-3,-4]]}"#;
    assert!(
        refused(&collection("pixel", off), &sinusoidal()).contains("none of its 1 lines touches the raster")
    );
}

proptest! {
    #[test]
    fn broken_text_is_an_error_or_a_line(cut in 0usize..300, at in 0usize..300, byte in any::<u8>()) {
        let folder = tempfile::tempdir().unwrap();
        let line = r#"{"type":"MultiLineString","coordinates":[[[1,2],[3,4]],[[30,40],[50,60],[70,1e9]]]}"#;
        let mut bytes = collection("lonlat", line).into_bytes();
        let at = at % bytes.len();
        bytes[at] = byte;
        bytes.truncate(bytes.len().min(cut + 1));
        let path = folder.path().join("l.geojson");
        std::fs::write(&path, bytes).unwrap();
        if let Ok(import) = read_lines(&path, &sinusoidal(), None, SIZE) {
            prop_assert!(import.shapes.iter().all(|s| s.line.0.len() >= 2));
        }
    }
}

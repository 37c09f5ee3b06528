//! Patches read for rasters with and without a place.

use std::path::PathBuf;

use proptest::prelude::*;

use super::*;
use crate::assert_close;
use crate::files::layers::{Column, GeometryKind, Layer, Row, Srs, Value, write_geojson, write_geopackage};
use crate::ground::{Affine, Body, Frame, LatitudeKind, LonLat, Projection};

struct Folder(tempfile::TempDir);

impl Folder {
    fn new() -> Self {
        Self(tempfile::tempdir().unwrap())
    }

    fn file(&self, name: &str, text: &str) -> PathBuf {
        let path = self.0.path().join(name);
        std::fs::write(&path, text).unwrap();
        path
    }
}

const SIZE: [usize; 2] = [100, 80];

/// A sinusoidal map on Halvane, 1 km pixels, centred on (40° E, 50° N).
fn sinusoidal() -> Place {
    let body = Body::halvane();
    let projection = Projection::new("+proj=sinu +lon_0=20 +a=1420000 +b=1420000", body.shape).unwrap();
    let centre = projection.to_map(LonLat { lon: 40.0, lat: 50.0 }).unwrap();
    let affine = Affine { a: 1e3, b: 0.0, c: centre.x - 5e4, d: 0.0, e: -1e3, f: centre.y + 4e4 };
    Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, body).unwrap()
}

/// Longitude and latitude on Halvane from 0° to 360°, 1° pixels.
fn whole_turn() -> Place {
    let affine = Affine { a: 1.0, b: 0.0, c: 0.0, d: 0.0, e: -1.0, f: 90.0 };
    let frame = Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::Planetographic };
    Place::new(affine, frame, Body::halvane()).unwrap()
}

fn collection(frame: &str, features: &str) -> String {
    format!(r#"{{"type":"FeatureCollection",{frame}"features":[{features}]}}"#)
}

fn feature(name: &str, rings: &str) -> String {
    format!(
        r#"{{"type":"Feature","properties":{{"name":"{name}","tags":["dune","a"]}},
        "geometry":{{"type":"Polygon","coordinates":{rings}}}}}"#
    )
}

const SQUARE: &str = "[[[10,10],[60,10],[60,40],[10,40],[10,10]]]";

#[test]
fn pixels_need_no_place() {
    let folder = Folder::new();
    let path = folder.file("p.geojson", &collection(r#""frame":"pixel","#, &feature("Corridor", SQUARE)));
    let import = read_patches(&path, &Place::pixels(0.0), None, SIZE).unwrap();
    assert_eq!(import.notes, Vec::<String>::new());
    let [shape] = &import.shapes[..] else { panic!("one patch") };
    assert_eq!((shape.name.as_str(), shape.tags.join("+")), ("Corridor", "dune+a".to_owned()));
    assert_eq!(shape.outline.area(), 1500.0);

    let silent = folder.file("q.geojson", &collection("", &feature("Corridor", SQUARE)));
    let error = read_patches(&silent, &Place::pixels(0.0), None, SIZE).unwrap_err().to_string();
    assert!(error.contains("feature 1 “Corridor”: its numbers are longitude and latitude"), "{error}");
    assert!(error.contains("\"frame\": \"pixel\""), "{error}");
}

#[test]
fn map_coordinates_follow_the_affine() {
    let place = Place::plane([2.0, 2.0], 0.0, Body::earth()).unwrap();
    let folder = Folder::new();
    let rings = "[[[20,-20],[120,-20],[120,-80],[20,-80],[20,-20]]]";
    let path = folder.file("p.geojson", &collection(r#""frame":"map","#, &feature("A", rings)));
    let import = read_patches(&path, &place, None, SIZE).unwrap();
    let bounds = import.shapes[0].outline.bounds().unwrap();
    assert_eq!((bounds.min, bounds.max), (Point::new(10.0, 10.0), Point::new(60.0, 40.0)));
}

#[test]
fn edges_in_longitude_and_latitude_bend_on_the_map() {
    let place = sinusoidal();
    let folder = Folder::new();
    let rings = "[[[30,42],[50,42],[50,58],[30,58],[30,42]]]";
    let path = folder.file("p.geojson", &collection("", &feature("A", rings)));
    let outline = &read_patches(&path, &place, None, SIZE).unwrap().shapes[0].outline;
    // The eastern edge would be 4.6 px off half-way if it stayed straight; 1° of latitude is 24.8 px.
    for i in 0..outline.outer.len() {
        let (a, b) = (outline.outer[i], outline.outer[(i + 1) % outline.outer.len()]);
        for t in [0.0, 0.25, 0.5, 0.75] {
            let at = place.lonlat_of(Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y))).unwrap();
            let shrink = at.lat.to_radians().cos();
            let off =
                (shrink * ((at.lon - 40.0).abs() - 10.0).abs()).min(((at.lat - 50.0).abs() - 8.0).abs());
            assert!(off < 0.3 / 24.8, "{at:?} is {off}° off");
        }
    }
}

#[test]
fn a_raster_over_a_whole_turn_takes_both_spellings_of_west() {
    let folder = Folder::new();
    for rings in ["[[[-100,0],[-80,0],[-80,10],[-100,10]]]", "[[[260,0],[280,0],[280,10],[260,10]]]"] {
        let path = folder.file("p.geojson", &collection("", &feature("A", rings)));
        let import = read_patches(&path, &whole_turn(), None, [360, 180]).unwrap();
        let bounds = import.shapes[0].outline.bounds().unwrap();
        assert_close!(bounds.min.x, 260.0, 1e-9, "left");
        assert_close!(bounds.max.x, 280.0, 1e-9, "right");
        assert_eq!(import.notes.len(), 1, "the open ring is mentioned");
    }
    // The whole world stays the whole world.
    let world = "[[[0,-80],[360,-80],[360,80],[0,80],[0,-80]]]";
    let path = folder.file("w.geojson", &collection("", &feature("W", world)));
    let import = read_patches(&path, &whole_turn(), None, [360, 180]).unwrap();
    assert_close!(import.shapes[0].outline.area(), 360.0 * 160.0, 1e-6, "area");
}

#[test]
fn parts_get_numbers_and_what_is_no_polygon_is_left_out() {
    let folder = Folder::new();
    let features = format!(
        r#"{{"type":"Feature","properties":{{"Name":"Twin","tags":"x, y"}},"geometry":{{"type":"MultiPolygon",
        "coordinates":[{SQUARE},[[[70,50],[90,50],[90,70],[70,50]]]]}}}},
        {{"type":"Feature","properties":{{}},"geometry":{{"type":"Point","coordinates":[1,2]}}}},
        {{"type":"Feature","properties":null,"geometry":null}},
        {}"#,
        feature("Far", "[[[500,500],[600,500],[600,600],[500,500]]]")
    );
    let path = folder.file("p.geojson", &collection(r#""frame":"pixel","#, &features));
    let import = read_patches(&path, &Place::pixels(0.0), None, SIZE).unwrap();
    let names: Vec<_> = import.shapes.iter().map(|shape| shape.name.as_str()).collect();
    assert_eq!(names, ["Twin 1", "Twin 2"]);
    assert_eq!(import.shapes[1].tags, ["x", "y"]);
    assert_eq!(
        import.notes,
        [
            "feature 2: a Point is no patch and was left out",
            "feature 3: it has no geometry and was left out",
            "feature 4 “Far”: “Far” lies outside the raster and was left out"
        ]
    );
}

#[test]
fn what_is_wrong_is_said() {
    let folder = Folder::new();
    let refused = |text: &str| {
        let path = folder.file("p.geojson", text);
        read_patches(&path, &sinusoidal(), None, SIZE).unwrap_err().to_string()
    };
    let pixel = r#""frame":"pixel","#;
    assert!(refused("{").contains("not valid JSON"));
    assert!(refused(r#"{"a":1}"#).contains("no GeoJSON"));
    assert!(refused(&collection(r#""frame":"feet","#, "")).contains("“feet”; expected “lonlat”"));
    assert!(refused(&collection(pixel, "")).contains("no polygon in it"));
    let crs = r#""crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"#;
    assert!(refused(&collection(crs, "")).contains("EPSG::32633"));
    assert!(refused(&collection("", &feature("N", "[[[10,95],[20,95],[20,80]]]"))).contains("(10, 95)"));
    assert!(refused(&collection(pixel, &feature("N", "[[[1,2],[3,\"x\"],[4,4]]]"))).contains("two numbers"));
    let far = feature("Far", "[[[500,500],[600,500],[600,600],[500,500]]]");
    assert!(refused(&collection(pixel, &far)).contains("none of its 1 polygons touches the raster"));
    let missing = read_patches(&folder.0.path().join("no.json"), &sinusoidal(), None, SIZE).unwrap_err();
    assert!(missing.to_string().contains("no.json"));
}

fn one_layer(srs: Srs, geometry: Geometry) -> Layer {
    Layer {
        name: "patches".to_owned(),
        description: "test".to_owned(),
        kind: GeometryKind::Polygon,
        srs,
        columns: vec![Column::text("name"), Column::text("tags")],
        rows: vec![Row {
            geometry: Some(geometry),
            values: vec![Value::from("Corridor"), Value::from("a, b")],
        }],
    }
}

#[test]
fn our_own_layers_come_back_on_any_body() {
    let folder = Folder::new();
    let path = folder.0.path().join("p.gpkg");
    let outline = Polygon {
        outer: Polygon::rectangle(60.0, 40.0)
            .outer
            .iter()
            .map(|p| Point::new(p.x + 5.0, p.y + 5.0))
            .collect(),
        holes: vec![vec![Point::new(20.0, 20.0), Point::new(30.0, 20.0), Point::new(30.0, 30.0)]],
    };
    let place = sinusoidal();
    let plane = Place::plane([2.0, 3.0], 30.0, Body::halvane()).unwrap();
    for (place, srs) in [
        (&place, Srs::of_place(&place, "Sorrel Reach", None)),
        (&place, Srs::lonlat(&place.body)),
        (&plane, Srs::of_place(&plane, "", None)),
    ] {
        let geometry = srs.geometry(place, &Geometry::Polygon(outline.clone())).unwrap();
        write_geopackage(&path, &[one_layer(srs.clone(), geometry)]).unwrap();
        let import = read_patches(&path, place, None, SIZE).unwrap();
        assert_eq!(import.notes, Vec::<String>::new());
        let [shape] = &import.shapes[..] else { panic!("one patch") };
        assert_eq!((shape.name.as_str(), shape.tags.len()), ("Corridor", 2));
        // Bent edges may differ by a fraction of a pixel over their length.
        let bound = if srs.is_lonlat() { 20.0 } else { 1e-6 };
        assert_close!(shape.outline.area(), outline.area(), bound, "area in {srs:?}");
    }
    let other = Srs::lonlat(&Body::mars());
    let geometry = Geometry::Polygon(outline);
    write_geopackage(&path, &[one_layer(other, geometry)]).unwrap();
    let error = read_patches(&path, &place, None, SIZE).unwrap_err().to_string();
    assert!(error.contains("layer “patches”: it is in “Mars longitude/latitude”"), "{error}");
}

#[test]
fn patches_written_in_pixels_come_back_exactly() {
    let folder = Folder::new();
    let path = folder.0.path().join("p.geojson");
    let shapes = vec![PatchShape {
        name: "Bare “plain”".to_owned(),
        tags: vec!["flat".to_owned()],
        outline: Polygon {
            outer: vec![Point::new(0.1, 0.2), Point::new(50.3, 1.0 / 3.0), Point::new(20.0, 60.7)],
            holes: Vec::new(),
        },
    }];
    write_patches(&path, &shapes).unwrap();
    let import = read_patches(&path, &sinusoidal(), None, SIZE).unwrap();
    assert_eq!((import.shapes[0].name.as_str(), &import.shapes[0].tags), ("Bare “plain”", &shapes[0].tags));
    // Winding may turn round; the points themselves are the same bits.
    let mut points = import.shapes[0].outline.outer.clone();
    points.sort_by(|p, q| p.x.total_cmp(&q.x));
    let mut want = shapes[0].outline.outer.clone();
    want.sort_by(|p, q| p.x.total_cmp(&q.x));
    assert_eq!(points, want);
}

#[test]
fn geojson_of_a_layer_comes_back() {
    let folder = Folder::new();
    let path = folder.0.path().join("p.geojson");
    let place = sinusoidal();
    let srs = Srs::lonlat(&place.body);
    let square = Polygon { outer: Polygon::rectangle(40.0, 40.0).outer, holes: Vec::new() };
    let geometry = srs.geometry(&place, &Geometry::Polygon(square)).unwrap();
    write_geojson(&path, &one_layer(srs, geometry.clone())).unwrap();
    let import = read_patches(&path, &place, None, SIZE).unwrap();
    assert_close!(import.shapes[0].outline.area(), 1600.0, 10.0, "area");
    let error = write_geojson(&path, &one_layer(Srs::Plane, geometry)).unwrap_err().to_string();
    assert!(error.contains("not in longitude and latitude"), "{error}");
}

proptest! {
    #[test]
    fn broken_text_is_an_error(cut in 0usize..400, at in 0usize..400, byte in any::<u8>()) {
        let folder = Folder::new();
        let mut bytes = collection("", &feature("Corridor", SQUARE)).into_bytes();
        let at = at % bytes.len();
        bytes[at] = byte;
        bytes.truncate(bytes.len().min(cut + 1));
        let path = folder.0.path().join("p.geojson");
        std::fs::write(&path, bytes).unwrap();
        let _ = read_patches(&path, &sinusoidal(), None, SIZE);
    }
}

proptest! {
    // Each case writes a database to the disk.
    #![proptest_config(ProptestConfig::with_cases(24))]

    #[test]
    fn a_broken_database_is_an_error(at in 0usize..40_000, bytes in prop::collection::vec(any::<u8>(), 1..40)) {
        let folder = Folder::new();
        let path = folder.0.path().join("p.gpkg");
        let square = Geometry::Polygon(Polygon::rectangle(40.0, 40.0));
        write_geopackage(&path, &[one_layer(Srs::Plane, square)]).unwrap();
        let mut file = std::fs::read(&path).unwrap();
        let at = at % (file.len() - bytes.len());
        file[at..at + bytes.len()].copy_from_slice(&bytes);
        std::fs::write(&path, file).unwrap();
        let plane = Place::plane([1.0, 1.0], 0.0, Body::earth()).unwrap();
        let _ = read_patches(&path, &plane, None, SIZE);
    }
}

//! GeoPackages read back through SQLite: what the standard asks for, and the geometries' bytes.

use rusqlite::Connection;

use super::*;
use crate::assert_close;
use crate::ground::{Affine, Body, Frame, LatitudeKind, Place, Projection};

fn utm() -> Place {
    let body = Body::earth();
    let axes = format!("+proj=utm +zone=33 +a={} +b={}", body.shape.equatorial_m, body.shape.polar_m);
    let projection = Projection::new(&axes, body.shape).unwrap();
    let affine = Affine { a: 30.0, b: 0.0, c: 5e5, d: 0.0, e: -30.0, f: 5.8e6 };
    Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, body).unwrap()
}

fn strokes(name: &str, srs: Srs) -> Layer {
    Layer {
        name: name.to_owned(),
        description: "Trend at the nodes".to_owned(),
        kind: GeometryKind::LineString,
        srs,
        columns: vec![Column::real("axis_deg"), Column::integer("n"), Column::text("note")],
        rows: vec![
            Row {
                geometry: Some(Geometry::LineString(Polyline(vec![
                    Point::new(1.0, 2.0),
                    Point::new(4.0, 6.0),
                ]))),
                values: vec![Value::from(14.5), Value::from(3), Value::from("it's \"so\"")],
            },
            Row { geometry: None, values: vec![Value::from(f64::NAN), Value::Missing, Value::Missing] },
        ],
    }
}

#[test]
fn the_file_is_what_the_standard_asks_for() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("out/layers.gpkg");
    let place = utm();
    let halvane = Srs::lonlat(&Body::halvane());
    let layers = [
        strokes("strokes", Srs::of_place(&place, "UTM zone 33N, WGS 84", Some(32633))),
        strokes("again", halvane.clone()),
        strokes("third \"one\"", halvane),
        strokes("plane", Srs::Plane),
        strokes("mars", Srs::lonlat(&Body::mars())),
    ];
    write_geopackage(&path, &layers).unwrap();
    write_geopackage(&path, &layers).unwrap();
    let database = Connection::open(&path).unwrap();
    let number = |sql: &str| database.query_row(sql, [], |row| row.get::<_, i64>(0)).unwrap();
    assert_eq!(number("PRAGMA application_id"), 0x4750_4B47);
    assert_eq!(number("PRAGMA user_version"), 10300);
    assert_eq!(number("SELECT count(*) FROM gpkg_spatial_ref_sys WHERE srs_id IN (-1, 0, 4326)"), 3);
    assert_eq!(number("SELECT count(*) FROM pragma_foreign_key_check"), 0);
    let ids: Vec<i64> = layers
        .iter()
        .map(|l| {
            let sql = "SELECT srs_id FROM gpkg_geometry_columns WHERE table_name = ?";
            database.query_row(sql, [&l.name], |row| row.get(0)).unwrap()
        })
        .collect();
    assert_eq!(ids, [32633, 100_000, 100_000, -1, 100_001]);
    let (organisation, definition): (String, String) = database
        .query_row(
            "SELECT organization, definition FROM gpkg_spatial_ref_sys WHERE srs_id = 100000",
            [],
            |row| Ok((row.get(0)?, row.get(1)?)),
        )
        .unwrap();
    assert_eq!(organisation, "NONE");
    assert!(definition.contains("SPHEROID[\"Halvane\",1420000,0]"), "{definition}");

    let extent: [f64; 4] = database
        .query_row(
            "SELECT min_x, min_y, max_x, max_y FROM gpkg_contents WHERE table_name = 'strokes'",
            [],
            |row| Ok([row.get(0)?, row.get(1)?, row.get(2)?, row.get(3)?]),
        )
        .unwrap();
    assert_eq!(extent, [1.0, 2.0, 4.0, 6.0]);
    let row = database
        .query_row("SELECT geom, axis_deg, n, note FROM strokes WHERE fid = 1", [], |row| {
            Ok((
                row.get::<_, Vec<u8>>(0)?,
                row.get::<_, f64>(1)?,
                row.get::<_, i64>(2)?,
                row.get::<_, String>(3)?,
            ))
        })
        .unwrap();
    assert_eq!((row.1, row.2, row.3.as_str()), (14.5, 3, "it's \"so\""));
    assert_eq!(wkb::decode(&row.0), Ok(layers[0].rows[0].geometry.clone()));
    assert_eq!(row.0[4..8], 32633i32.to_le_bytes());
    assert_eq!(
        number("SELECT count(*) FROM strokes WHERE geom IS NULL AND axis_deg IS NULL AND n IS NULL"),
        1
    );
    let left: Vec<_> = std::fs::read_dir(path.parent().unwrap()).unwrap().collect();
    assert_eq!(left.len(), 1, "no journal or temporary file stays");
}

#[test]
fn mistakes_of_the_caller_are_named_before_anything_is_written() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("l.gpkg");
    let refused = |layers: &[Layer]| write_geopackage(&path, layers).unwrap_err().to_string();
    let sound = strokes("a", Srs::Plane);
    assert!(refused(&[sound.clone(), strokes("A", Srs::Plane)]).contains("two layers are named “A”"));
    let mut twice = sound.clone();
    twice.columns[1].name = "GEOM".to_owned();
    assert!(refused(&[twice]).contains("column “GEOM” twice"));
    let mut short = sound.clone();
    short.rows[1].values.pop();
    assert_eq!(refused(&[short]), "layer “a”, row 2: 2 values for 3 columns");
    let mut wrong = sound.clone();
    wrong.rows[0].values[0] = Value::from("steep");
    assert!(refused(&[wrong]).contains("does not fit column axis_deg"));
    let mut point = sound;
    point.rows[0].geometry = Some(Geometry::Point(Point::new(0.0, 0.0)));
    assert!(refused(&[point]).contains("a Point in a layer of LineString"));
    assert!(!path.exists());
}

#[test]
fn shapes_over_the_antimeridian_stay_whole_and_bend_with_the_map() {
    let body = Body::halvane();
    let projection =
        Projection::new("+proj=laea +lat_0=60 +lon_0=180 +a=1420000 +b=1420000", body.shape).unwrap();
    let affine = Affine { a: 1e3, b: 0.0, c: -2e5, d: 0.0, e: -1e3, f: 2e5 };
    let place = Place::new(affine, Frame::Projected { projection, unit_m: 1.0 }, body.clone()).unwrap();
    let srs = Srs::lonlat(&body);
    let square = Polygon {
        outer: Polygon::rectangle(400.0, 400.0).outer,
        holes: vec![vec![Point::new(190.0, 190.0), Point::new(210.0, 190.0), Point::new(210.0, 210.0)]],
    };
    let Some(Geometry::Polygon(shape)) = srs.geometry(&place, &Geometry::Polygon(square)) else {
        panic!("inside the domain")
    };
    assert!(shape.outer.len() > 12, "{} vertices: the edges bend", shape.outer.len());
    let lons: Vec<f64> = shape.rings().flatten().map(|p| p.x).collect();
    let (least, most) = lons.iter().fold((f64::MAX, f64::MIN), |(a, b), x| (a.min(*x), b.max(*x)));
    assert!(
        most - least < 60.0 && (least..most).contains(&180.0) || (least..most).contains(&-180.0),
        "{least}..{most}"
    );
    // Every half-way point of the lon/lat edges lies on the square's outline to a tenth of a pixel.
    for i in 0..shape.outer.len() {
        let (a, b) = (shape.outer[i], shape.outer[(i + 1) % shape.outer.len()]);
        let middle = crate::ground::LonLat { lon: 0.5 * (a.x + b.x), lat: 0.5 * (a.y + b.y) };
        let p = place.pixel_of_lonlat(middle, Point::new(200.0, 200.0)).unwrap();
        let off = [p.x.abs(), p.y.abs(), (p.x - 400.0).abs(), (p.y - 400.0).abs()];
        assert_close!(off.into_iter().fold(f64::MAX, f64::min), 0.0, 0.11, "edge {i}");
    }
}

#[test]
fn a_raster_in_planetocentric_latitudes_is_written_planetographic() {
    let affine = Affine { a: 0.1, b: 0.0, c: 137.0, d: 0.0, e: -0.1, f: 44.661_768_05 };
    let frame = Frame::Geographic { unit_deg: 1.0, latitude: LatitudeKind::Planetocentric };
    let place = Place::new(affine, frame, Body::mars()).unwrap();
    let srs = Srs::of_place(&place, "Mars", None);
    assert_close!(srs.point(&place, Point::new(0.0, 0.0)).unwrap().y, 45.0, 1e-5, "latitude");
}

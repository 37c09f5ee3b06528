//! Ground sizes of a real elevation raster in longitude and latitude.

use ventifact::assert_close;
use ventifact::files::raster::{Limits, Raster};
use ventifact::ground::{BodyShape, Point};
use ventifact::science::drainage::cells::Cells;

use crate::field_data;

/// Area of an ellipsoid from the equator to planetographic latitude φ, over one radian of longitude: the authalic
/// integral b²/2 (sin φ/(1 − e² sin² φ) + artanh(e sin φ)/e).
fn zone(shape: BodyShape, lat_deg: f64) -> f64 {
    let e = (1.0 - (shape.polar_m / shape.equatorial_m).powi(2)).sqrt();
    let sin = lat_deg.to_radians().sin();
    0.5 * shape.polar_m.powi(2) * (sin / (1.0 - (e * sin).powi(2)) + (e * sin).atanh() / e)
}

#[test]
fn cells_of_an_elevation_raster_add_up_to_its_area_on_the_ellipsoid() {
    let Some(root) = field_data("drainage cells") else { return };
    let raster =
        Raster::open(&root.join("elevation/fault_ridge_srtm3.tif"), &Limits::default()).expect("a raster");
    let info = raster.info();
    let place = &info.georeference.as_ref().expect("a place").place;
    let (width, height) = (info.width, info.height);
    let corner =
        |col: usize, row: usize| place.lonlat_of(Point::new(col as f64, row as f64)).expect("a position");
    let (upper, lower) = (corner(0, 0), corner(width, height));
    let shape = place.body.shape;
    let want = (lower.lon - upper.lon).to_radians() * (zone(shape, upper.lat) - zone(shape, lower.lat));
    let cells = Cells::of(place, width, height).expect("ground sizes");
    let got = cells.area.iter().sum::<f64>() * width as f64;
    println!("{:.6} km² against {:.6} km²", got / 1e6, want / 1e6);
    assert_close!(got, want, 1e-3 * want, "area");
}

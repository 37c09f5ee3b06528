//! Reference systems as well-known text, first edition: the form a GeoPackage stores and
//! general-purpose readers accept, on bodies of any size.

use crate::ground::{Body, Frame, Place, Projection};

/// Longitude (east positive) and planetographic latitude in degrees on `body`.
pub(super) fn geographic(body: &Body, prime_meridian_deg: f64) -> String {
    let shape = body.shape;
    let inverse_flattening = if shape.is_sphere() { 0.0 } else { 1.0 / shape.flattening() };
    let name = plain(&body.name);
    format!(
        "GEOGCS[\"{name} longitude/latitude\",DATUM[\"{name}\",SPHEROID[\"{name}\",{a},{inverse_flattening}]],\
         PRIMEM[\"Reference meridian\",{prime_meridian_deg}],UNIT[\"degree\",0.0174532925199433]]",
        a = shape.equatorial_m,
    )
}

/// The projected system of a place; `None` for other frames and for projections without a name in
/// this notation.
pub(super) fn projected(place: &Place, name: &str) -> Option<String> {
    let Frame::Projected { projection, unit_m } = &place.frame else { return None };
    let (method, parameters) = method(projection)?;
    let origin = match projection.name() {
        "utm" => [500_000.0, if projection.text("south").is_some() { 10_000_000.0 } else { 0.0 }],
        _ => [projection.number("x_0").unwrap_or(0.0), projection.number("y_0").unwrap_or(0.0)],
    };
    let mut text = format!(
        "PROJCS[\"{}\",{},PROJECTION[\"{method}\"]",
        plain(name),
        geographic(&place.body, projection.prime_meridian())
    );
    for (key, value) in parameters {
        text.push_str(&format!(",PARAMETER[\"{key}\",{value}]"));
    }
    for (key, metres) in ["false_easting", "false_northing"].into_iter().zip(origin) {
        text.push_str(&format!(",PARAMETER[\"{key}\",{}]", metres / unit_m));
    }
    let unit = if *unit_m == 1.0 { "metre" } else { "map unit" };
    text.push_str(&format!(",UNIT[\"{unit}\",{unit_m}]"));
    if projection.name() == "webmerc" {
        text.push_str(
            ",EXTENSION[\"PROJ4\",\"+proj=merc +a=6378137 +b=6378137 +lat_ts=0 +lon_0=0 +x_0=0 +y_0=0 +k=1 \
             +units=m +nadgrids=@null +wktext +no_defs\"]",
        );
    }
    text.push(']');
    Some(text)
}

/// The method's name and its parameters.
fn method(projection: &Projection) -> Option<(&'static str, Vec<(&'static str, f64)>)> {
    let number = |key: &str| projection.number(key);
    let lon_0 = number("lon_0").unwrap_or(0.0);
    let lat_0 = number("lat_0").unwrap_or(0.0);
    let scale = number("k_0").or(number("k")).unwrap_or(1.0);
    let (lat_1, lat_2) = (number("lat_1"), number("lat_2"));
    let origin = |lat: f64| vec![("latitude_of_origin", lat), ("central_meridian", lon_0)];
    let origin_scale =
        |lat: f64| vec![("latitude_of_origin", lat), ("central_meridian", lon_0), ("scale_factor", scale)];
    let centre = || vec![("latitude_of_center", lat_0), ("longitude_of_center", lon_0)];
    let conic = |lat: &'static str, lon: &'static str| {
        Some(vec![
            ("standard_parallel_1", lat_1?),
            ("standard_parallel_2", lat_2.or(lat_1)?),
            (lat, lat_0),
            (lon, lon_0),
        ])
    };
    let found = match projection.name() {
        // South-pointing axes have no name of their own here.
        _ if projection.text("axis").is_some() => return None,
        "utm" => {
            let meridian = 6.0 * number("zone")? - 183.0;
            let parameters =
                vec![("latitude_of_origin", 0.0), ("central_meridian", meridian), ("scale_factor", 0.9996)];
            ("Transverse_Mercator", parameters)
        }
        "tmerc" | "etmerc" => ("Transverse_Mercator", origin_scale(lat_0)),
        "merc" => match number("lat_ts").filter(|lat| *lat != 0.0) {
            Some(parallel) => {
                ("Mercator_2SP", vec![("standard_parallel_1", parallel), ("central_meridian", lon_0)])
            }
            None => ("Mercator_1SP", origin_scale(0.0)),
        },
        "webmerc" => ("Mercator_1SP", vec![("central_meridian", lon_0), ("scale_factor", 1.0)]),
        "eqc" => {
            let parallel = number("lat_ts").unwrap_or(0.0);
            let parameters = vec![
                ("latitude_of_origin", lat_0),
                ("central_meridian", lon_0),
                ("standard_parallel_1", parallel),
            ];
            ("Equirectangular", parameters)
        }
        "sinu" => ("Sinusoidal", vec![("longitude_of_center", lon_0)]),
        "stere" if lat_0.abs() == 90.0 => {
            ("Polar_Stereographic", origin_scale(number("lat_ts").unwrap_or(lat_0)))
        }
        "stere" => ("Stereographic", origin_scale(lat_0)),
        "sterea" => ("Oblique_Stereographic", origin_scale(lat_0)),
        "laea" => ("Lambert_Azimuthal_Equal_Area", centre()),
        "aeqd" => ("Azimuthal_Equidistant", centre()),
        "lcc" if lat_2.is_some() => {
            ("Lambert_Conformal_Conic_2SP", conic("latitude_of_origin", "central_meridian")?)
        }
        "lcc" => ("Lambert_Conformal_Conic_1SP", origin_scale(lat_1.unwrap_or(lat_0))),
        "aea" => ("Albers_Conic_Equal_Area", conic("latitude_of_center", "longitude_of_center")?),
        "eqdc" => ("Equidistant_Conic", conic("latitude_of_center", "longitude_of_center")?),
        "ortho" => ("Orthographic", origin(lat_0)),
        "gnom" => ("Gnomonic", origin(lat_0)),
        "poly" => ("Polyconic", origin(lat_0)),
        "cea" => {
            let parallel = number("lat_ts").unwrap_or(0.0);
            let parameters = vec![("standard_parallel_1", parallel), ("central_meridian", lon_0)];
            ("Cylindrical_Equal_Area", parameters)
        }
        "moll" => ("Mollweide", vec![("central_meridian", lon_0)]),
        "robin" => ("Robinson", vec![("longitude_of_center", lon_0)]),
        "mill" => ("Miller_Cylindrical", vec![("latitude_of_center", 0.0), ("longitude_of_center", lon_0)]),
        "omerc" => {
            let azimuth = number("alpha")?;
            let name = if projection.text("no_uoff").is_some() {
                "Hotine_Oblique_Mercator"
            } else {
                "Hotine_Oblique_Mercator_Azimuth_Center"
            };
            let parameters = vec![
                ("latitude_of_center", lat_0),
                ("longitude_of_center", number("lonc")?),
                ("azimuth", azimuth),
                ("rectified_grid_angle", number("gamma").unwrap_or(azimuth)),
                ("scale_factor", scale),
            ];
            (name, parameters)
        }
        _ => return None,
    };
    Some(found)
}

/// Text that may stand between quotes here.
fn plain(text: &str) -> String {
    text.chars().filter(|c| *c != '"' && !c.is_control()).collect()
}

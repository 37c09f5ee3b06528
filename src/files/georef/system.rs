//! The reference system the keys describe: frame, body and name.

use crate::ground::{Affine, Body, BodyShape, Caution, Frame, LatitudeKind, Projection};

use super::epsg::{self, Coded};
use super::tags::USER_DEFINED;
use super::{GeoTags, GeorefError, method, units};

/// A reference system, and the affine into it (prime meridians move longitudes).
pub(super) struct System {
    pub frame: Frame,
    pub body: Body,
    pub affine: Affine,
    pub label: String,
    pub epsg: Option<u32>,
    pub cautions: Vec<Caution>,
}

/// The system the keys name; `None` when they name none.
pub(super) fn from_keys(tags: &GeoTags, affine: Affine) -> Result<Option<System>, GeorefError> {
    let projected =
        named(tags.code(3072)).is_some() || tags.code(3075).is_some() || conversion(tags).is_some();
    let geographic = tags.code(2048).is_some() || tags.number(2057)?.is_some();
    let system = match tags.code(1024) {
        Some(3) => return Err(GeorefError::Unsupported("geocentric coordinates have no map".to_owned())),
        Some(2) => geographic_system(tags, affine)?,
        Some(1) if !projected => return Ok(None),
        _ if projected => projected_system(tags, affine)?,
        _ if geographic => geographic_system(tags, affine)?,
        _ => return Ok(None),
    };
    Ok(Some(system))
}

/// A code that names something.
fn named(code: Option<u16>) -> Option<u16> {
    code.filter(|code| *code != 0 && *code != USER_DEFINED)
}

/// The UTM zone of key 3074: positive north, negative south.
fn conversion(tags: &GeoTags) -> Option<i32> {
    match tags.code(3074)? {
        code @ 16001..=16060 => Some(i32::from(code) - 16000),
        code @ 16101..=16160 => Some(16100 - i32::from(code)),
        _ => None,
    }
}

/// The ellipsoid and prime meridian under the map.
fn base(tags: &GeoTags, cautions: &mut Vec<Caution>) -> Result<(BodyShape, f64), GeorefError> {
    let coded = match named(tags.code(2048)).map(epsg::find) {
        Some(Ok(Coded::Geographic { shape, prime_meridian_deg })) => Some((shape, prime_meridian_deg)),
        Some(Err(error)) if tags.number(2057)?.is_none() => return Err(error),
        _ => None,
    };
    let stated = axes(tags)?;
    let shape = stated
        .or(coded.map(|(shape, _)| shape))
        .or(named(tags.code(2056)).and_then(units::ellipsoid))
        .or(named(tags.code(2050)).and_then(units::datum_ellipsoid));
    let shape = shape.unwrap_or_else(|| {
        cautions.push(Caution::new(
            "no-ellipsoid",
            "the file does not say which body it maps; Earth's WGS 84 ellipsoid is assumed",
        ));
        Body::earth().shape
    });
    let unit_deg = units::angular(tags)?;
    let meridian = match tags.number(2061)? {
        Some(angle) => angle * unit_deg,
        None => match named(tags.code(2051)) {
            Some(code) => units::prime_meridian(code).ok_or(GeorefError::UnknownMeridian(code))?,
            None => coded.map_or(0.0, |(_, meridian)| meridian),
        },
    };
    Ok((shape, meridian))
}

/// The axes the keys state in numbers.
fn axes(tags: &GeoTags) -> Result<Option<BodyShape>, GeorefError> {
    let unit_m = units::linear(tags, 2052, 2053)?.unwrap_or(1.0);
    let Some(equatorial) = tags.number(2057)? else { return Ok(None) };
    let shape = match (tags.number(2058)?, tags.number(2059)?) {
        (Some(polar), _) => BodyShape { equatorial_m: equatorial * unit_m, polar_m: polar * unit_m },
        (None, Some(inverse)) => units::flattened(equatorial * unit_m, inverse),
        (None, None) => BodyShape::sphere(equatorial * unit_m),
    };
    let sound = shape.polar_m > 0.0 && shape.equatorial_m >= shape.polar_m && shape.equatorial_m.is_finite();
    if sound {
        Ok(Some(shape))
    } else {
        Err(GeorefError::BadShape { equatorial_m: shape.equatorial_m, polar_m: shape.polar_m })
    }
}

fn geographic_system(tags: &GeoTags, affine: Affine) -> Result<System, GeorefError> {
    let mut cautions = Vec::new();
    let (shape, meridian) = base(tags, &mut cautions)?;
    let unit_deg = units::angular(tags)?;
    let body = Body::of_shape(shape);
    let latitude = latitude_kind(tags, &body, &mut cautions);
    let affine = Affine { c: affine.c + meridian / unit_deg, ..affine };
    let epsg = named(tags.code(2048)).map(u32::from);
    let label = label(tags, "longitude and latitude", &body, epsg);
    Ok(System { frame: Frame::Geographic { unit_deg, latitude }, body, affine, label, epsg, cautions })
}

/// Planetocentric only when the citation says so: the keys have no place for it.
fn latitude_kind(tags: &GeoTags, body: &Body, cautions: &mut Vec<Caution>) -> LatitudeKind {
    if body.shape.is_sphere() || body.name == "Earth" {
        return LatitudeKind::Planetographic;
    }
    let most = body.shape.flattening().to_degrees();
    let (kind, how) = if tags.ascii_params.to_lowercase().contains("ocentric") {
        (LatitudeKind::Planetocentric, "planetocentric, because its citation says so")
    } else {
        (LatitudeKind::Planetographic, "planetographic, because nothing says otherwise")
    };
    cautions.push(Caution::new(
        "latitude-kind",
        format!("latitudes on this ellipsoid are read as {how}; the other kind differs by up to {most:.2}°"),
    ));
    kind
}

fn projected_system(tags: &GeoTags, affine: Affine) -> Result<System, GeorefError> {
    let mut cautions = Vec::new();
    let code = named(tags.code(3072));
    let stated_unit = units::linear(tags, 3076, 3077)?;
    let coded = match code.map(epsg::find) {
        Some(Ok(Coded::Projected { definition, shape, unit_m })) => Some((definition, shape, unit_m)),
        Some(Ok(Coded::Geographic { .. })) => {
            return Err(GeorefError::Unsupported(format!(
                "the file names EPSG:{} as its projection, but that is not projected",
                code.unwrap_or(0)
            )));
        }
        Some(Err(error)) if tags.code(3075).is_none() => return Err(error),
        _ => None,
    };
    let (definition, shape, unit_m) = match coded {
        Some((definition, shape, unit_m)) => {
            if let Some(stated) = stated_unit.filter(|stated| (stated / unit_m - 1.0).abs() > 1e-5) {
                cautions.push(Caution::new(
                    "map-unit",
                    format!(
                        "the reference system counts in units of {unit_m} m, the file says {stated} m; the \
                         file's own unit is used"
                    ),
                ));
            }
            (definition, shape, stated_unit.unwrap_or(unit_m))
        }
        None => {
            let (shape, meridian) = base(tags, &mut cautions)?;
            let unit_m = stated_unit.unwrap_or(1.0);
            let core = match conversion(tags) {
                Some(zone) => utm(zone, shape),
                None => method::definition(tags, shape, unit_m, units::angular(tags)?, &mut cautions)?,
            };
            let meridian = if meridian == 0.0 { String::new() } else { format!(" +pm={meridian}") };
            (core + &meridian, shape, unit_m)
        }
    };
    let definition = if shape.is_sphere() {
        definition
    } else {
        definition.replace("+proj=tmerc", &format!("+proj={}", method::transverse(shape)))
    };
    let full = format!("{definition} +a={} +b={}", shape.equatorial_m, shape.polar_m);
    let projection =
        Projection::new(&full, shape).map_err(|error| GeorefError::Unsupported(error.to_string()))?;
    let body = Body::of_shape(shape);
    let epsg = code.map(u32::from);
    let label = label(tags, &projection.in_words(), &body, epsg);
    Ok(System { frame: Frame::Projected { projection, unit_m }, body, affine, label, epsg, cautions })
}

/// A UTM zone on any body; spheres need its parameters written out.
fn utm(zone: i32, shape: BodyShape) -> String {
    let meridian = 6 * zone.abs() - 183;
    let y_0 = if zone < 0 { 10_000_000 } else { 0 };
    if shape.is_sphere() {
        return format!("+proj=tmerc +lat_0=0 +lon_0={meridian} +k=0.9996 +x_0=500000 +y_0={y_0}");
    }
    format!("+proj=utm +zone={}{}", zone.abs(), if zone < 0 { " +south" } else { "" })
}

/// The system in words: the file's own citation, or what the projection is on which body.
fn label(tags: &GeoTags, words: &str, body: &Body, epsg: Option<u32>) -> String {
    if let Some(code @ (32601..=32660 | 32701..=32760)) = epsg {
        let side = if code < 32700 { 'N' } else { 'S' };
        return format!("UTM zone {}{side}, WGS 84 (EPSG:{code})", code % 100);
    }
    let cited = [3073, 1026, 2049].into_iter().filter_map(|key| tags.text(key)).map(citation);
    let cited =
        cited.into_iter().find(|text| !["", "unnamed", "unknown"].contains(&text.to_lowercase().as_str()));
    match (cited, epsg) {
        (Some(text), Some(code)) => format!("{text} (EPSG:{code})"),
        (None, Some(code)) => format!("{words} (EPSG:{code})"),
        (Some(text), None) => format!("{text}: {words}, {}", body.name),
        (None, None) => format!("{words}, {}", body.name),
    }
}

/// The name inside a citation such as "GCS Name = X|Datum = Y|".
fn citation(text: &str) -> String {
    let text = text.rsplit_once("Name = ").map_or(text, |(_, name)| name);
    let name = text.split('|').next().unwrap_or(text).trim();
    name.chars().filter(|c| !c.is_control()).take(120).collect()
}

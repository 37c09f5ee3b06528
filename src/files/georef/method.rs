//! Projections given by method and parameters (keys 3075 and 3078–3096).

use crate::ground::{BodyShape, Caution};

use super::{GeoTags, GeorefError};

/// The definition (without axes) of the projection the keys describe.
///
/// Lengths come in units of `unit_m` metres and angles in units of `unit_deg` degrees; writers
/// disagree on which of the origin keys a method uses, so each parameter takes the first present.
pub(super) fn definition(
    tags: &GeoTags,
    shape: BodyShape,
    unit_m: f64,
    unit_deg: f64,
    cautions: &mut Vec<Caution>,
) -> Result<String, GeorefError> {
    let method = tags.code(3075).ok_or(GeorefError::NoMethod)?;
    let first = |keys: &[u16]| -> Result<Option<f64>, GeorefError> {
        for key in keys {
            if let Some(value) = tags.number(*key)? {
                return Ok(Some(value));
            }
        }
        Ok(None)
    };
    let angle = |keys: &[u16]| Ok::<f64, GeorefError>(first(keys)?.unwrap_or(0.0) * unit_deg);
    let lon_0 = angle(&[3080, 3088, 3084, 3095])?;
    let lat_0 = angle(&[3081, 3089, 3085])?;
    let centre_lon = angle(&[3088, 3080, 3084])?;
    let centre_lat = angle(&[3089, 3081, 3085])?;
    let false_lon = angle(&[3084, 3080, 3088])?;
    let false_lat = angle(&[3085, 3081, 3089])?;
    let (lat_1, lat_2) = (angle(&[3078])?, angle(&[3079])?);
    let mut scale = first(&[3092, 3093])?.unwrap_or(1.0);
    if scale <= 0.0 {
        cautions.push(Caution::new(
            "scale-factor",
            format!("the file states a scale factor of {scale}, which no projection has; 1 is used"),
        ));
        scale = 1.0;
    }

    let core = match method {
        1 => format!("+proj={} +lat_0={lat_0} +lon_0={lon_0} +k={scale}", transverse(shape)),
        3 | 9815 => {
            let (azimuth, rectified) = (angle(&[3094])?, first(&[3096])?);
            let gamma = rectified.map_or(azimuth, |deg| deg * unit_deg);
            let origin = if method == 3 { " +no_uoff" } else { "" };
            format!(
                "+proj=omerc +lat_0={centre_lat} +lonc={centre_lon} +alpha={azimuth} +gamma={gamma} +k={scale}{origin}"
            )
        }
        7 => match first(&[3078])? {
            Some(parallel) => format!("+proj=merc +lat_ts={} +lon_0={lon_0}", parallel * unit_deg),
            None => format!("+proj=merc +lon_0={lon_0} +k={scale}"),
        },
        8 => format!("+proj=lcc +lat_1={lat_1} +lat_2={lat_2} +lat_0={false_lat} +lon_0={false_lon}"),
        9 => format!("+proj=lcc +lat_1={lat_0} +lat_0={lat_0} +lon_0={lon_0} +k={scale}"),
        10 => format!("+proj=laea +lat_0={centre_lat} +lon_0={centre_lon}"),
        11 => format!("+proj=aea +lat_1={lat_1} +lat_2={lat_2} +lat_0={lat_0} +lon_0={lon_0}"),
        12 => format!("+proj=aeqd +lat_0={centre_lat} +lon_0={centre_lon}"),
        13 => format!("+proj=eqdc +lat_1={lat_1} +lat_2={lat_2} +lat_0={lat_0} +lon_0={lon_0}"),
        14 => format!("+proj=stere +lat_0={centre_lat} +lon_0={centre_lon} +k={scale}"),
        15 => {
            let lon = angle(&[3095, 3080, 3088])?;
            let pole = if lat_0 < 0.0 { -90.0 } else { 90.0 };
            if lat_0.abs() > 89.999_999 {
                format!("+proj=stere +lat_0={pole} +lon_0={lon} +k={scale}")
            } else {
                format!("+proj=stere +lat_0={pole} +lat_ts={lat_0} +lon_0={lon}")
            }
        }
        16 => format!("+proj=sterea +lat_0={lat_0} +lon_0={lon_0} +k={scale}"),
        17 => {
            if !shape.is_sphere() {
                cautions.push(Caution::new(
                    "equirectangular-ellipsoid",
                    "the file puts an equirectangular map on an ellipsoid; it is read as spherical formulas of \
                     the equatorial radius on planetographic latitudes",
                ));
            }
            format!("+proj=eqc +lat_ts={lat_1} +lat_0={centre_lat} +lon_0={centre_lon}")
        }
        18 => format!("+proj=cass +lat_0={lat_0} +lon_0={lon_0}"),
        19 => format!("+proj=gnom +lat_0={centre_lat} +lon_0={centre_lon}"),
        20 => format!("+proj=mill +lon_0={centre_lon}"),
        21 => format!("+proj=ortho +lat_0={centre_lat} +lon_0={centre_lon}"),
        22 => format!("+proj=poly +lat_0={lat_0} +lon_0={lon_0}"),
        23 => format!("+proj=robin +lon_0={centre_lon}"),
        24 => format!("+proj=sinu +lon_0={centre_lon}"),
        27 => format!("+proj={} +axis=wsu +lat_0={lat_0} +lon_0={lon_0} +k={scale}", transverse(shape)),
        28 => format!("+proj=cea +lat_ts={lat_1} +lon_0={lon_0}"),
        other => return Err(GeorefError::Unsupported(unsupported(other))),
    };
    let length = |keys: &[u16]| Ok::<f64, GeorefError>(first(keys)?.unwrap_or(0.0) * unit_m);
    let (x_0, y_0) = if method == 8 {
        (length(&[3086, 3082, 3090])?, length(&[3087, 3083, 3091])?)
    } else {
        (length(&[3082, 3090, 3086])?, length(&[3083, 3091, 3087])?)
    };
    Ok(format!("{core} +x_0={x_0} +y_0={y_0}"))
}

/// The transverse Mercator exact far from its meridian exists on ellipsoids only.
pub(super) fn transverse(shape: BodyShape) -> &'static str {
    if shape.is_sphere() { "tmerc" } else { "etmerc" }
}

fn unsupported(method: u16) -> String {
    let name = match method {
        2 => "modified transverse Mercator for Alaska",
        4 => "Laborde oblique Mercator",
        5 => "Rosenmund oblique Mercator",
        6 => "spherical oblique Mercator",
        25 => "Van der Grinten",
        26 => "New Zealand map grid",
        _ => return format!("projection method {method} is not supported; state the pixel size instead"),
    };
    format!("the {name} projection (method {method}) is not supported; state the pixel size instead")
}

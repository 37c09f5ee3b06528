//! Codes of units, ellipsoids and prime meridians that georeferencing keys name (EPSG registry).

use crate::ground::BodyShape;

use super::tags::USER_DEFINED;
use super::{GeoTags, GeorefError};

/// Metres per unit of a length: code at `code_key`, its size at `size_key` when user-defined.
/// Metres when absent.
pub(super) fn linear(tags: &GeoTags, code_key: u16, size_key: u16) -> Result<Option<f64>, GeorefError> {
    let metres = match tags.code(code_key) {
        None | Some(0) => return Ok(None),
        Some(USER_DEFINED) => return size(tags, code_key, size_key).map(Some),
        Some(9001) => 1.0,
        Some(9002) => 0.3048,
        Some(9003) => 12.0 / 39.37,
        Some(9005) => 0.304_797_265_4,
        Some(9014) => 1.8288,
        Some(9030) => 1852.0,
        Some(9031) => 1.000_013_596_5,
        Some(9036) => 1000.0,
        Some(9093) => 1609.344,
        Some(9096) => 0.9144,
        Some(1025) => 1e-3,
        Some(1033) => 1e-2,
        Some(code) => return Err(GeorefError::UnknownUnit { key: code_key, code }),
    };
    Ok(Some(metres))
}

/// Degrees per unit of angle, from keys 2054 and 2055; degrees when absent.
pub(super) fn angular(tags: &GeoTags) -> Result<f64, GeorefError> {
    match tags.code(2054) {
        None | Some(0 | 9102 | 9122) => Ok(1.0),
        Some(USER_DEFINED) => Ok(size(tags, 2054, 2055)?.to_degrees()),
        Some(9101) => Ok(1f64.to_degrees()),
        Some(9103) => Ok(1.0 / 60.0),
        Some(9104) => Ok(1.0 / 3600.0),
        Some(9105 | 9106) => Ok(0.9),
        Some(9109) => Ok(1e-6_f64.to_degrees()),
        Some(code) => Err(GeorefError::UnknownUnit { key: 2054, code }),
    }
}

/// The size of a user-defined unit: metres, or radians.
fn size(tags: &GeoTags, code_key: u16, size_key: u16) -> Result<f64, GeorefError> {
    let size =
        tags.number(size_key)?.ok_or(GeorefError::UnknownUnit { key: code_key, code: USER_DEFINED })?;
    if size > 0.0 { Ok(size) } else { Err(GeorefError::BadNumber { key: size_key, value: size }) }
}

/// The ellipsoid of code `code` (key 2056).
pub(super) fn ellipsoid(code: u16) -> Option<BodyShape> {
    let (a, inverse_flattening) = match code {
        7001 => (6_377_563.396, 299.324_964_6),
        7004 => (6_377_397.155, 299.152_812_8),
        7007 => (6_378_249.2, 293.466_021_293_626_9),
        7008 => (6_378_206.4, 294.978_698_213_898),
        7011 => (6_378_249.2, 293.466_021_293_626_9),
        7012 => (6_378_249.145, 293.465),
        7015 => (6_377_276.345, 300.8017),
        7019 => (6_378_137.0, 298.257_222_101),
        7022 => (6_378_388.0, 297.0),
        7024 => (6_378_245.0, 298.3),
        7030 => (6_378_137.0, 298.257_223_563),
        7035 => return Some(BodyShape::sphere(6_371_000.0)),
        7036 | 7050 => (6_378_160.0, 298.247_167_427),
        7043 => (6_378_135.0, 298.26),
        7047 => return Some(BodyShape::sphere(6_370_997.0)),
        7048 => return Some(BodyShape::sphere(6_371_007.0)),
        7052 => return Some(BodyShape::sphere(6_370_997.0)),
        7059 => return Some(BodyShape::sphere(6_378_137.0)),
        _ => return None,
    };
    Some(flattened(a, inverse_flattening))
}

/// The ellipsoid of a datum (key 2050); 60xx codes are "based upon ellipsoid 70xx".
pub(super) fn datum_ellipsoid(code: u16) -> Option<BodyShape> {
    ellipsoid(match code {
        6001..=6060 => code + 1000,
        6258 | 6269 | 6171 | 6283 => 7019,
        6267 => 7008,
        6230 => 7022,
        6284 => 7024,
        6322 => 7043,
        6326 => 7030,
        _ => return None,
    })
}

/// The ellipsoid of equatorial radius and inverse flattening; 0 means a sphere.
pub(super) fn flattened(equatorial_m: f64, inverse_flattening: f64) -> BodyShape {
    if inverse_flattening == 0.0 {
        return BodyShape::sphere(equatorial_m);
    }
    BodyShape { equatorial_m, polar_m: equatorial_m * (1.0 - 1.0 / inverse_flattening) }
}

/// Longitude of a prime meridian (key 2051), degrees east of the reference meridian.
pub(super) fn prime_meridian(code: u16) -> Option<f64> {
    Some(match code {
        8901 => 0.0,
        8902 => -9.131_906_111_111_11,
        8903 => 2.337_229_166_666_67,
        8904 => -74.080_916_666_666_7,
        8905 => -3.687_938_888_888_89,
        8906 => 12.452_333_333_333_3,
        8907 => 7.439_583_333_333_33,
        8908 => 106.807_719_444_444,
        8909 => -17.666_666_666_666_7,
        8910 => 4.367_975,
        8911 => 18.058_277_777_777_8,
        8912 => 23.716_337_5,
        8913 => 10.722_916_666_666_7,
        _ => return None,
    })
}

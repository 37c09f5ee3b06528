//! Polygons and lines from GeoJSON (RFC 7946).

use std::path::Path;

use serde_json::{Map, Value as Json};

use crate::ground::{Point, Polygon, Polyline};

use super::super::{Geometry, LayerError};
use super::{Feature, Meaning, Wanted};

pub(super) fn features(
    path: &Path,
    bytes: &[u8],
    wanted: Wanted,
    notes: &mut Vec<String>,
) -> Result<Vec<Feature>, LayerError> {
    let (one, many, kinds) = wanted.words();
    // Some editors put a byte order mark first.
    let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
    let root: Json =
        serde_json::from_slice(bytes).map_err(|source| LayerError::Json { path: path.to_owned(), source })?;
    let content = |problem: String| LayerError::Content { path: path.to_owned(), problem };
    let meaning = meaning(&root).map_err(content)?;
    let list: Vec<&Json> = match text(&root, "type") {
        Some("FeatureCollection") => match root.get("features").and_then(Json::as_array) {
            Some(list) => list.iter().collect(),
            None => return Err(content("the feature collection has no list of features".to_owned())),
        },
        Some("Feature" | "Polygon" | "MultiPolygon" | "LineString" | "MultiLineString") => vec![&root],
        Some(other) => return Err(content(format!("a “{other}” holds no {many}; expected {kinds}"))),
        None => return Err(content("this is no GeoJSON: it has no “type”".to_owned())),
    };
    let mut found = Vec::new();
    for (index, feature) in list.into_iter().enumerate() {
        let (geometry, properties) = match text(feature, "type") {
            Some("Feature") => (feature.get("geometry"), feature.get("properties").and_then(Json::as_object)),
            _ => (Some(feature), None),
        };
        let name = properties.and_then(name);
        let label = match &name {
            Some(name) => format!("feature {} “{name}”", index + 1),
            None => format!("feature {}", index + 1),
        };
        let fail =
            |problem: String| LayerError::Feature { path: path.to_owned(), feature: label.clone(), problem };
        let Some(geometry) = geometry.filter(|geometry| !geometry.is_null()) else {
            notes.push(format!("{label}: it has no geometry and was left out"));
            continue;
        };
        let coordinates = geometry.get("coordinates").unwrap_or(&Json::Null);
        let read = match text(geometry, "type") {
            Some("Polygon") => Some(polygon(coordinates).map(Geometry::Polygon)),
            Some("MultiPolygon") => Some(several(coordinates, polygon).map(Geometry::MultiPolygon)),
            Some("LineString") => Some(line(coordinates).map(Geometry::LineString)),
            Some("MultiLineString") => Some(several(coordinates, line).map(Geometry::MultiLineString)),
            _ => None,
        };
        let shape = read.transpose().map_err(fail)?.filter(|shape| wanted.takes(shape.kind()));
        let Some(shape) = shape else {
            let kind = text(geometry, "type").unwrap_or("geometry without type");
            notes.push(format!("{label}: a {kind} is no {one} and was left out"));
            continue;
        };
        let tags = properties.map(tags).unwrap_or_default();
        found.push(Feature { label, name, tags, geometry: shape, meaning });
    }
    Ok(found)
}

/// What the numbers mean: the foreign member "frame", longitude and latitude without one.
fn meaning(root: &Json) -> Result<Meaning, String> {
    match root.get("frame") {
        None => {}
        Some(Json::String(frame)) => {
            return match frame.as_str() {
                "lonlat" => Ok(Meaning::LonLat),
                "map" => Ok(Meaning::Map),
                "pixel" => Ok(Meaning::Pixel),
                other => Err(format!("\"frame\" is “{other}”; expected “lonlat”, “map” or “pixel”")),
            };
        }
        Some(other) => return Err(format!("\"frame\" is {other}; expected “lonlat”, “map” or “pixel”")),
    }
    // An older edition of the format named another system here; guessing would misplace patches.
    match root.pointer("/crs/properties/name").and_then(Json::as_str) {
        Some(name) if !name.contains("CRS84") && !name.ends_with(":4326") => Err(format!(
            "its numbers are in “{name}”; if that is the raster's own system, say \"frame\": \"map\" instead of \
             \"crs\", otherwise export it in longitude and latitude"
        )),
        _ => Ok(Meaning::LonLat),
    }
}

fn text<'a>(json: &'a Json, key: &str) -> Option<&'a str> {
    json.get(key).and_then(Json::as_str)
}

fn array<'a>(json: &'a Json, what: &str) -> Result<&'a Vec<Json>, String> {
    json.as_array().ok_or_else(|| format!("its {what} are not a list"))
}

fn several<T>(json: &Json, part: impl Fn(&Json) -> Result<T, String>) -> Result<Vec<T>, String> {
    array(json, "parts")?.iter().map(part).collect()
}

fn line(json: &Json) -> Result<Polyline, String> {
    array(json, "positions")?.iter().map(position).collect::<Result<_, _>>().map(Polyline)
}

fn polygon(json: &Json) -> Result<Polygon, String> {
    let mut rings = Vec::new();
    for ring in array(json, "rings")? {
        rings.push(array(ring, "positions")?.iter().map(position).collect::<Result<Vec<_>, _>>()?);
    }
    let mut rings = rings.into_iter();
    let outer = rings.next().ok_or("a polygon has no ring")?;
    Ok(Polygon { outer, holes: rings.collect() })
}

fn position(json: &Json) -> Result<Point, String> {
    match json.as_array().map(Vec::as_slice) {
        Some([x, y, ..]) => match (x.as_f64(), y.as_f64()) {
            (Some(x), Some(y)) => Ok(Point::new(x, y)),
            _ => Err(format!("the position {json} is not two numbers")),
        },
        _ => Err(format!("the position {json} is not two numbers")),
    }
}

/// The property "name", however its writer capitalised it.
fn name(properties: &Map<String, Json>) -> Option<String> {
    let value = properties.get("name").or_else(|| {
        properties.iter().find(|(key, _)| key.eq_ignore_ascii_case("name")).map(|(_, value)| value)
    })?;
    match value {
        Json::String(text) => Some(text.trim().to_owned()).filter(|text| !text.is_empty()),
        Json::Number(number) => Some(number.to_string()),
        _ => None,
    }
}

/// The property "tags": a list of words, or words between commas.
fn tags(properties: &Map<String, Json>) -> Vec<String> {
    match properties.get("tags") {
        Some(Json::Array(list)) => list.iter().filter_map(Json::as_str).map(str::to_owned).collect(),
        Some(Json::String(text)) => super::split_tags(text),
        _ => Vec::new(),
    }
}

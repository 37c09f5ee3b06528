//! The GeoJSON writer (RFC 7946), for layers in longitude and latitude.

use std::path::Path;

use serde_json::{Map, Number, Value as Json, json};

use crate::files::save;
use crate::ground::Point;

use super::{Geometry, Layer, LayerError, Value, closed_rings, io_error};

/// Writes a layer as a feature collection with the foreign member `"frame": "lonlat"`, replacing
/// the file in one step. The format knows Earth only: offer it there.
///
/// # Errors
/// [`LayerError::Content`] when the layer is not in longitude and latitude, [`LayerError::Row`],
/// [`LayerError::Io`].
pub fn write_geojson(path: &Path, layer: &Layer) -> Result<(), LayerError> {
    if !layer.srs.is_lonlat() {
        let problem =
            format!("layer “{}” is not in longitude and latitude, which GeoJSON asks for", layer.name);
        return Err(LayerError::Content { path: path.to_owned(), problem });
    }
    layer.check()?;
    let features = layer.rows.iter().map(|row| {
        let properties: Map<String, Json> = layer
            .columns
            .iter()
            .zip(&row.values)
            .map(|(column, value)| (column.name.clone(), cell(value)))
            .collect();
        feature(row.geometry.as_ref(), properties)
    });
    save_collection(path, "lonlat", features.collect())
}

/// Saves features whose coordinates are in `frame`.
pub(super) fn save_collection(path: &Path, frame: &str, features: Vec<Json>) -> Result<(), LayerError> {
    let collection = json!({ "type": "FeatureCollection", "frame": frame, "features": features });
    let text = serde_json::to_vec_pretty(&collection)
        .map_err(|source| LayerError::Json { path: path.to_owned(), source })?;
    save::bytes(path, &text, None).map_err(|source| io_error(path, "writing the features", source))
}

pub(super) fn feature(geometry: Option<&Geometry>, properties: Map<String, Json>) -> Json {
    let shape = geometry.map_or(Json::Null, |geometry| {
        let (kind, coordinates) = match geometry {
            Geometry::Point(at) => ("Point", position(*at)),
            Geometry::LineString(line) => ("LineString", chain(&line.0)),
            Geometry::MultiLineString(lines) => {
                ("MultiLineString", lines.iter().map(|line| chain(&line.0)).collect())
            }
            Geometry::Polygon(polygon) => {
                ("Polygon", closed_rings(polygon).iter().map(|ring| chain(ring)).collect())
            }
            Geometry::MultiPolygon(parts) => {
                let part = |p| closed_rings(p).iter().map(|ring| chain(ring)).collect::<Json>();
                ("MultiPolygon", parts.iter().map(part).collect())
            }
        };
        json!({ "type": kind, "coordinates": coordinates })
    });
    json!({ "type": "Feature", "properties": properties, "geometry": shape })
}

fn position(at: Point) -> Json {
    json!([at.x, at.y])
}

fn chain(points: &[Point]) -> Json {
    points.iter().map(|p| position(*p)).collect()
}

fn cell(value: &Value) -> Json {
    match value {
        Value::Missing => Json::Null,
        Value::Text(text) => Json::String(text.clone()),
        Value::Real(number) => Number::from_f64(*number).map_or(Json::Null, Json::Number),
        Value::Integer(number) => json!(number),
    }
}

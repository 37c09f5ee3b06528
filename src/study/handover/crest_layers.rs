//! Crest lines handed over as a table and as map layers.

use super::crests::end_name;
use super::layers::Table;
use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::ground::{Axis, LengthUnit, Place, Point};
use crate::science::crest::{CrestLine, CrestOrigin, End};
use crate::study::{CrestsFinding, Findings, OpenRaster, PatchFinding, Sources};

/// The crests of patches, each with its patch and its number there, from 1.
fn all<'a>(
    patches: impl IntoIterator<Item = &'a PatchFinding>,
) -> impl Iterator<Item = (&'a PatchFinding, usize, &'a CrestLine)> {
    let lines = |p: &'a PatchFinding| {
        let lines = p.crests.iter().flat_map(|c| &c.lines).enumerate();
        lines.map(move |(n, line)| (p, n + 1, line))
    };
    patches.into_iter().flat_map(lines)
}

fn columns() -> Vec<Column> {
    vec![
        Column::text("patch"),
        Column::integer("crest"),
        Column::text("origin"),
        Column::integer("accepted"),
        Column::text("model"),
        Column::real("confidence"),
        Column::text("length_unit"),
        Column::real("length"),
        Column::real("by_hand"),
        Column::real("bridged"),
        Column::real("azimuth_deg"),
        Column::real("sinuosity"),
        Column::text("first_end"),
        Column::text("last_end"),
    ]
}

/// The numbers of one crest on the ground at its own middle. Confidence is missing where no detector had a say, the
/// azimuth and the sinuosity of a ring.
fn values(place: &Place, patch: &PatchFinding, number: usize, line: &CrestLine) -> Vec<Value> {
    let points = &line.line.0;
    let frame = points.get(points.len() / 2).and_then(|p| place.local_frame(*p));
    let apart = |a: Point, b: Point| frame.map(|f| f.length(b.x - a.x, b.y - a.y));
    let length: Option<f64> = points.windows(2).map(|w| apart(w[0], w[1])).sum();
    let share = |px: f64| length.map(|l| l * px / line.line.length().max(f64::MIN_POSITIVE));
    let ends = points.first().zip(points.last()).filter(|_| line.ends[0] != End::Closed);
    let chord = ends.and_then(|(a, b)| Some((apart(*a, *b)?, a, b))).filter(|(chord, ..)| *chord > 0.0);
    let axis = chord.zip(frame).map(|((_, a, b), f)| {
        let (east, north) = f.ground(b.x - a.x, b.y - a.y);
        Axis::from_east_north(east, north).deg()
    });
    let detected = matches!(line.origin, CrestOrigin::Traced | CrestOrigin::Edited);
    vec![
        Value::from(patch.name.as_str()),
        Value::Integer(number as i64),
        Value::from(line.origin.name()),
        Value::Integer(i64::from(line.accepted)),
        Value::from(line.model.name()),
        Value::from(detected.then_some(line.confidence)),
        Value::from(if patch.unit == LengthUnit::Metre { "m" } else { "px" }),
        Value::from(length),
        Value::from(share(line.by_hand_px)),
        Value::from(share(line.bridged_px)),
        Value::from(axis),
        Value::from(length.zip(chord).map(|(l, (chord, ..))| l / chord)),
        Value::from(end_name(line.ends[0])),
        Value::from(end_name(line.ends[1])),
    ]
}

/// One row a crest.
pub fn crest_table(findings: &Findings, sources: &Sources) -> Table {
    let rows = all(&findings.patches)
        .filter_map(|(patch, n, line)| {
            let open = sources.rasters.get(&patch.raster)?;
            Some(values(&open.place, patch, n, line))
        })
        .collect();
    Table { name: "crests", columns: columns(), rows }
}

/// The crest lines of one raster, and the places where they meet and end; nothing where there are none.
pub fn crest_layers(open: &OpenRaster, patches: &[&PatchFinding], srs: &Srs, suffix: &str) -> Vec<Layer> {
    let layers = [lines(open, patches, srs, suffix), points(open, patches, srs, suffix)];
    layers.into_iter().filter(|layer| !layer.rows.is_empty()).collect()
}

fn lines(open: &OpenRaster, patches: &[&PatchFinding], srs: &Srs, suffix: &str) -> Layer {
    let rows = all(patches.iter().copied()).map(|(patch, n, line)| Row {
        geometry: srs.geometry(&open.place, &Geometry::LineString(line.line.clone())),
        values: values(&open.place, patch, n, line),
    });
    Layer {
        name: format!("crests{suffix}"),
        description: "Crest lines by origin; confidence is the chance that a traced line is no texture, by lines of the wrong sense".into(),
        kind: GeometryKind::LineString,
        srs: srs.clone(),
        columns: columns(),
        rows: rows.collect(),
    }
}

/// Junctions, and the ends that are none.
fn points(open: &OpenRaster, patches: &[&PatchFinding], srs: &Srs, suffix: &str) -> Layer {
    let mut rows = Vec::new();
    for (patch, crests) in patches.iter().filter_map(|p| Some((*p, p.crests.as_ref().ok()?))) {
        for (at, kind, arms, crest) in places(crests) {
            rows.push(Row {
                geometry: srs.geometry(&open.place, &Geometry::Point(at)),
                values: vec![
                    Value::from(patch.name.as_str()),
                    Value::from(kind),
                    Value::Integer(arms as i64),
                    Value::Integer(crest as i64),
                ],
            });
        }
    }
    Layer {
        name: format!("crest_points{suffix}"),
        description: "Where crest lines fork, cross and end; crest is that which goes on or ends".into(),
        kind: GeometryKind::Point,
        srs: srs.clone(),
        columns: vec![
            Column::text("patch"),
            Column::text("kind"),
            Column::integer("arms"),
            Column::integer("crest"),
        ],
        rows,
    }
}

/// (place, kind, arms, number of the crest).
fn places(crests: &CrestsFinding) -> Vec<(Point, &'static str, usize, usize)> {
    let forks = crests.junctions.iter().map(|j| {
        let kind = if j.branches.len() == 1 { "fork" } else { "crossing" };
        (j.at, kind, j.branches.len() + 2, j.through + 1)
    });
    let ends = crests.lines.iter().enumerate().flat_map(|(n, line)| {
        let places = [line.line.0.first(), line.line.0.last()];
        let told = places.into_iter().zip(line.ends);
        told.filter(|(_, end)| !matches!(end, End::Junction | End::Closed))
            .filter_map(move |(at, end)| Some((*at?, end_name(end), 1, n + 1)))
    });
    forks.chain(ends).collect()
}

/// Crests in longitude and latitude, for GeoJSON; only for rasters on Earth.
pub fn lonlat_crests(findings: &Findings, sources: &Sources) -> Option<Layer> {
    let earth = crate::ground::Body::earth();
    let on_earth = |open: &&OpenRaster| open.place.is_georeferenced() && open.place.body.shape == earth.shape;
    let mut layers = sources.rasters.iter().filter(|(_, open)| on_earth(open)).map(|(id, open)| {
        let here: Vec<_> = findings.patches.iter().filter(|p| p.raster == *id).collect();
        lines(open, &here, &Srs::lonlat(&open.place.body), "")
    });
    let mut all = layers.next()?;
    all.rows.extend(layers.flat_map(|l| l.rows));
    (!all.rows.is_empty()).then_some(all)
}

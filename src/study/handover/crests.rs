//! Crest lines handed over: a member of `findings.json` and a map layer.

use serde_json::{Value as Json, json};

use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::science::crest::End;
use crate::study::{CrestsFinding, OpenRaster, PatchFinding};

/// The member `crests` of a patch; lengths in its unit.
pub fn json(crests: &Result<CrestsFinding, String>) -> Json {
    let c = match crests {
        Ok(c) => c,
        Err(why) => return json!({ "refused": why }),
    };
    let n = &c.numbers;
    json!({
        "model": c.model.name(), "scale_px": c.scale_px, "count": n.count, "length": n.total_length,
        "density": n.density, "mean_length": n.lengths.exponential_mean(), "plain_mean_length": n.plain_mean_length,
        "cut_by_border": n.lengths.cut, "axis_deg": n.azimuth.map(|(axis, _)| axis.deg()),
        "resultant_length": n.azimuth.map(|(_, r)| r), "sinuosity": n.sinuosity,
        "spacing": {
            "p25": c.spacing.quartiles[0], "median": c.spacing.quartiles[1], "p75": c.spacing.quartiles[2],
            "uncensored_median": c.spacing.uncensored_median, "stereology": c.spacing.stereology,
            "transects": c.spacing.transects.whole, "transects_cut": c.spacing.transects.cut,
        },
        "ends": c.defects.ends, "forks": c.defects.forks, "cut_ends": c.defects.cut_ends,
        "ends_per_length": c.defects.ends_per_length, "with_forks_per_length": c.defects.with_forks_per_length,
        "dimensionless": c.defects.dimensionless,
        "cautions": c.cautions,
    })
}

/// The crest lines of one raster; `None` where none was traced.
pub fn crest_layer(open: &OpenRaster, patches: &[&PatchFinding], srs: &Srs, suffix: &str) -> Option<Layer> {
    let end = |end: End| match end {
        End::Free => "free",
        End::Junction => "junction",
        End::Border => "border",
        End::Gap => "gap",
        End::Closed => "closed",
    };
    let rows: Vec<Row> = patches
        .iter()
        .flat_map(|p| p.crests.iter().flat_map(|c| &c.lines).map(move |line| (*p, line)))
        .map(|(patch, line)| Row {
            geometry: srs.geometry(&open.place, &Geometry::LineString(line.line.clone())),
            values: vec![
                Value::from(patch.name.as_str()),
                Value::from(line.model.name()),
                Value::from(line.confidence),
                Value::from(end(line.ends[0])),
                Value::from(end(line.ends[1])),
            ],
        })
        .collect();
    (!rows.is_empty()).then(|| Layer {
        name: format!("crests{suffix}"),
        description: "Crest lines; confidence is a share of evidence, no probability".into(),
        kind: GeometryKind::LineString,
        srs: srs.clone(),
        columns: vec![
            Column::text("patch"),
            Column::text("model"),
            Column::real("confidence"),
            Column::text("first_end"),
            Column::text("last_end"),
        ],
        rows,
    })
}

//! The obstacle test handed over: a member of `findings.json`, a table, and a layer of outcrops.

use serde_json::{Value as Json, json};

use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::science::obstacle::{Obliquity, Outcome};
use crate::study::{Findings, ObstacleFinding, ObstaclesFinding, OpenRaster, PatchFinding, Sheet, Sources};

use super::layers::Table;

/// The member `obstacles` of a patch.
pub fn json(found: &ObstaclesFinding, metres: bool) -> Json {
    json!({
        "crest_deg": found.crest.map(|a| a.deg()), "crest_se_deg": found.crest_se_deg, "regional": found.regional,
        "outcrops": found.outcrops.iter().map(|o| outcrop(o, metres)).collect::<Vec<_>>(),
        "combined": found.combined.as_ref().map(|c| json!({
            "count": c.count, "obliquity": obliquity(&c.obliquity), "undecided": found.combined_undecided,
            "b_s": c.b_s, "b_c": c.b_c, "se_s": c.se_s, "se_c": c.se_c, "tau2": c.tau2, "i2": c.i2,
            "scatter_p": c.scatter_p, "wrapping": c.wrapping, "sign_p": c.sign_p,
        })),
        "cautions": found.cautions,
    })
}

fn outcrop(o: &ObstacleFinding, metres: bool) -> Json {
    let test = o.outcome.as_ref().ok();
    let e = test.map(|t| &t.estimate);
    json!({
        "id": o.id, "name": o.name,
        "radius_m": metres.then_some(o.radius), "radius_px": (!metres).then_some(o.radius),
        "axis_ratio": o.shape.major / o.shape.minor,
        "refused": o.outcome.as_ref().err(),
        "obliquity": test.map(|t| obliquity(&t.obliquity)),
        "undecided": test.and_then(|t| t.undecided.as_ref()),
        "wind_axis_deg": o.wind.map(|a| a.deg()),
        "b_s": e.map(|e| e.b_s), "b_c": e.map(|e| e.b_c), "se_s": e.map(|e| e.se_s), "se_c": e.map(|e| e.se_c),
        "covariance": e.map(|e| e.covariance), "df": e.map(|e| e.df),
        "offset_deg": e.map(|e| e.offset_deg), "residual_deg": e.map(|e| e.residual_deg),
        "n": e.map(|e| e.n), "n_eff": e.map(|e| e.n_eff),
        "quadrupole": e.map(|e| json!({ "b_s": e.quadrupole.b_s, "b_c": e.quadrupole.b_c })),
        "pattern_p": test.map(|t| t.pattern_p),
        "over_radius": test.map_or(Vec::new(), |t| t.over_radius.iter().map(|r| json!({
            "factor": r.factor, "b_s": r.b_s, "b_c": r.b_c, "loss": r.loss,
        })).collect()),
        "best_radius": test.and_then(|t| t.best_radius),
        "dipole": o.dipole().map(|d| json!({
            "size": d.size, "toward_deg": o.more_toward.map(|a| a.deg()),
            "from_crest_deg": o.more_toward.map(|a| a.axis().separation(o.crest)), "sectors": d.sectors,
        })),
        "virtual": test.and_then(|t| t.null.as_ref()).map(|n| json!({
            "count": n.count, "independent": n.independent, "p": n.p, "dipole_p": n.dipole_p, "b_sd": n.b_sd,
        })),
    })
}

fn obliquity(o: &Obliquity) -> Json {
    json!({
        "deg": o.folded_deg(), "ci95_deg": o.interval_deg(), "signed_deg": o.signed_deg,
        "ci95_half_deg": o.half_deg, "amplitude": o.amplitude,
    })
}

/// One row an outcrop and patch.
pub fn obstacle_table(findings: &Findings) -> Table {
    let rows = findings.patches.iter().flat_map(|p| {
        p.obstacles.iter().flat_map(|found| &found.outcrops).map(|o| values(p, o)).collect::<Vec<_>>()
    });
    Table { name: "outcrops", columns: columns(), rows: rows.collect() }
}

/// The outcrops tested on one raster; `None` where there is none.
pub fn outcrop_layer(
    sheet: &Sheet,
    open: &OpenRaster,
    patches: &[&PatchFinding],
    srs: &Srs,
    suffix: &str,
) -> Option<Layer> {
    let rows: Vec<Row> = patches
        .iter()
        .flat_map(|p| p.obstacles.iter().flat_map(|found| &found.outcrops).map(move |o| (*p, o)))
        .filter_map(|(patch, o)| {
            let outline = sheet.obstacle(o.id)?.outline.clone();
            let geometry = srs.geometry(&open.place, &Geometry::Polygon(outline));
            Some(Row { geometry, values: values(patch, o) })
        })
        .collect();
    (!rows.is_empty()).then(|| Layer {
        name: format!("outcrops{suffix}"),
        description: "Outcrops with the obliquity that the turn of the crests round them tells".into(),
        kind: GeometryKind::Polygon,
        srs: srs.clone(),
        columns: columns(),
        rows,
    })
}

/// Outcrops in longitude and latitude, for GeoJSON; only for rasters on Earth.
pub fn lonlat_outcrops(sheet: &Sheet, findings: &Findings, sources: &Sources) -> Option<Layer> {
    let earth = crate::ground::Body::earth();
    let on_earth = |open: &&OpenRaster| open.place.is_georeferenced() && open.place.body.shape == earth.shape;
    let mut layers = sources.rasters.iter().filter(|(_, open)| on_earth(open)).filter_map(|(id, open)| {
        let patches: Vec<_> = findings.patches.iter().filter(|p| p.raster == *id).collect();
        outcrop_layer(sheet, open, &patches, &Srs::lonlat(&open.place.body), "")
    });
    let mut all = layers.next()?;
    all.rows.extend(layers.flat_map(|l| l.rows));
    Some(all)
}

fn columns() -> Vec<Column> {
    vec![
        Column::text("outcrop"),
        Column::text("patch"),
        Column::text("unit"),
        Column::real("radius"),
        Column::text("no_decision"),
        Column::real("obliquity_deg"),
        Column::real("obliquity_low_deg"),
        Column::real("obliquity_high_deg"),
        Column::real("signed_deg"),
        Column::real("wind_axis_deg"),
        Column::real("amplitude"),
        Column::real("b_s"),
        Column::real("b_c"),
        Column::real("se_s"),
        Column::real("se_c"),
        Column::integer("n"),
        Column::real("n_eff"),
        Column::real("pattern_p"),
        Column::real("virtual_p"),
        Column::real("dipole_size"),
        Column::real("dipole_toward_deg"),
        Column::real("dipole_p"),
    ]
}

fn values(patch: &PatchFinding, o: &ObstacleFinding) -> Vec<Value> {
    let test: Option<&Outcome> = o.outcome.as_ref().ok();
    let why = o.outcome.as_ref().err().or_else(|| test.and_then(|t| t.undecided.as_ref()));
    let [low, high] =
        test.and_then(|t| t.obliquity.interval_deg()).map_or([None, None], |interval| interval.map(Some));
    let e = test.map(|t| &t.estimate);
    let null = test.and_then(|t| t.null.as_ref());
    vec![
        Value::from(o.name.as_str()),
        Value::from(patch.name.as_str()),
        Value::from(patch.unit.symbol()),
        Value::from(o.radius),
        Value::from(why.map(String::as_str)),
        Value::from(test.map(|t| t.obliquity.folded_deg())),
        Value::from(low),
        Value::from(high),
        Value::from(test.map(|t| t.obliquity.signed_deg)),
        Value::from(o.wind.map(|a| a.deg())),
        Value::from(test.map(|t| t.obliquity.amplitude)),
        Value::from(e.map(|e| e.b_s)),
        Value::from(e.map(|e| e.b_c)),
        Value::from(e.map(|e| e.se_s)),
        Value::from(e.map(|e| e.se_c)),
        e.map_or(Value::Missing, |e| Value::Integer(e.n as i64)),
        Value::from(e.map(|e| e.n_eff)),
        Value::from(test.map(|t| t.pattern_p)),
        Value::from(null.and_then(|n| n.p)),
        Value::from(o.dipole().map(|d| d.size)),
        Value::from(o.more_toward.map(|a| a.deg())),
        Value::from(null.and_then(|n| n.dipole_p)),
    ]
}

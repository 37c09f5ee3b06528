//! Two pictures of one ground handed over: a member of `findings.json`, a table, and map layers.

use serde_json::{Value as Json, json};

use super::layers::Table;
use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::ground::{Axis, LengthUnit, Polyline};
use crate::science::crest::Shift;
use crate::study::{ComparisonFinding, Findings, OpenRaster};

/// The member `comparisons`.
pub fn comparisons(findings: &Findings) -> Json {
    findings.comparisons.iter().map(comparison).collect()
}

fn comparison(c: &ComparisonFinding) -> Json {
    let metres = c.unit == LengthUnit::Metre;
    let a = &c.axes;
    json!({
        "id": c.id, "name": c.name, "fingerprint": c.fingerprint,
        "patch": c.patch, "patch_name": c.patch_name, "rasters": c.rasters, "raster_names": c.raster_names,
        "length_unit": c.unit, "overlap": c.overlap, "years": c.years,
        "light_from_deg": c.light_from.map(|l| l.map(|l| l.deg())),
        "trends": c.trends.iter().map(|t| json!({
            "defined": t.defined, "axis_deg": t.axis.map(Axis::deg), "ci95_half_deg": t.ci95_half_deg,
            "resultant_length": t.resultant_length, "n": t.n, "n_eff": t.n_eff,
            "gradient_scale_px": t.gradient_scale_px,
        })).collect::<Vec<_>>(),
        "axes": {
            "n": a.n, "n_eff": a.n_eff, "difference_deg": a.difference_deg, "ci95_deg": a.difference_ci95_deg,
            "pairs": a.pairs.map(|(n, _)| n), "pairs_n_eff": a.pairs.map(|(_, n_eff)| n_eff),
            "tests": a.tests.iter().map(|t| json!({
                "name": t.name, "method": t.method, "statistic": t.statistic, "p": t.p, "remark": t.remark,
            })).collect::<Vec<_>>(),
            "differ": a.differ,
        },
        "looks": c.looks.map(|l| json!({
            "apart_deg": l.apart_deg, "refit_difference_deg": l.refit_deg, "may_explain": l.may_explain,
        })),
        "crests": c.crests.each_ref().map(|lines| json!({
            "count": lines.len(),
        })),
        "movement": match &c.shift {
            Ok(s) => movement(s, c.years, metres),
            Err(why) => json!({ "refused": why }),
        },
        "finding": c.sentence, "cautions": c.cautions,
    })
}

fn movement(s: &Shift, years: Option<f64>, metres: bool) -> Json {
    let unit = if metres { "m" } else { "px" };
    let mut out = json!({
        "toward_deg": s.toward.deg(), "crests": s.crests, "points": s.matched, "share": s.share,
        "by_chance": s.chance.map(|c| json!({ "share": c.share, "p": c.p })),
    });
    let mut put = |name: &str, value: Json| out[format!("{name}_{unit}")] = value;
    put("median", json!(s.median));
    put("ci95", json!(s.ci95));
    put("quartiles", json!(s.quartiles));
    put("alternatives", json!(s.alternatives));
    put("vector_east_north", json!(s.vector.map(|v| v.east_north)));
    put("vector_ci95", json!(s.vector.map(|v| v.ci95)));
    put("per_year", json!(years.map(|y| s.median / y)));
    put("per_year_ci95", json!(years.map(|y| per_year(s.ci95, y))));
    out
}

/// An interval over years, which may run backward.
fn per_year([low, high]: [f64; 2], years: f64) -> [f64; 2] {
    let [a, b] = [low / years, high / years];
    [a.min(b), a.max(b)]
}

/// One row a comparison.
pub fn comparison_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("name"),
        Column::text("patch"),
        Column::text("first_raster"),
        Column::text("second_raster"),
        Column::real("overlap"),
        Column::real("years"),
        Column::real("first_trend_deg"),
        Column::real("first_ci95_half_deg"),
        Column::real("second_trend_deg"),
        Column::real("second_ci95_half_deg"),
        Column::real("difference_deg"),
        Column::real("difference_low_deg"),
        Column::real("difference_high_deg"),
        Column::text("test"),
        Column::real("p"),
        Column::integer("differ"),
        Column::real("looks_apart_deg"),
        Column::integer("looks_may_explain"),
        Column::text("length_unit"),
        Column::real("moved"),
        Column::real("moved_low"),
        Column::real("moved_high"),
        Column::real("moved_toward_deg"),
        Column::real("moved_per_year"),
        Column::integer("crests_matched"),
        Column::real("share_matched"),
        Column::text("no_movement_because"),
        Column::text("finding"),
        Column::text("cautions"),
    ];
    Table { name: "comparisons", columns, rows: findings.comparisons.iter().map(values).collect() }
}

fn values(c: &ComparisonFinding) -> Vec<Value> {
    let ends = |interval: Option<[f64; 2]>| interval.map_or([None, None], |i| i.map(Some));
    let [low, high] = ends(c.axes.difference_ci95_deg);
    let shift = c.shift.as_ref().ok();
    let [least, most] = ends(shift.map(|s| s.ci95));
    let test = c.axes.tests.first();
    let codes: Vec<_> = c.cautions.iter().map(|c| c.code).collect();
    vec![
        Value::from(c.name.as_str()),
        Value::from(c.patch_name.as_str()),
        Value::from(c.raster_names[0].as_str()),
        Value::from(c.raster_names[1].as_str()),
        Value::from(c.overlap),
        Value::from(c.years),
        Value::from(c.trends[0].axis.map(Axis::deg)),
        Value::from(c.trends[0].ci95_half_deg),
        Value::from(c.trends[1].axis.map(Axis::deg)),
        Value::from(c.trends[1].ci95_half_deg),
        Value::from(c.axes.difference_deg),
        Value::from(low),
        Value::from(high),
        Value::from(test.map(|t| t.name)),
        Value::from(test.map(|t| t.p)),
        Value::Integer(i64::from(c.axes.differ)),
        Value::from(c.looks.map(|l| l.apart_deg)),
        c.looks.map_or(Value::Missing, |l| Value::Integer(i64::from(l.may_explain))),
        Value::from(c.unit.symbol()),
        Value::from(shift.map(|s| s.median)),
        Value::from(least),
        Value::from(most),
        Value::from(shift.map(|s| s.toward.deg())),
        Value::from(shift.and_then(|s| Some(s.median / c.years?))),
        shift.map_or(Value::Missing, |s| Value::Integer(s.crests as i64)),
        Value::from(shift.map(|s| s.share)),
        Value::from(c.shift.as_ref().err().map(String::as_str)),
        Value::from(c.sentence.as_str()),
        Value::from(codes.join(" ")),
    ]
}

/// The crests of the second pictures and the movements, on the raster the patches lie on.
pub fn comparison_layers(
    open: &OpenRaster,
    comparisons: &[&ComparisonFinding],
    srs: &Srs,
    suffix: &str,
) -> Vec<Layer> {
    let on_map = |line: &Polyline| srs.geometry(&open.place, &Geometry::LineString(line.clone()));
    let crests: Vec<Row> = comparisons
        .iter()
        .flat_map(|c| c.crests[1].iter().map(move |line| (*c, line)))
        .map(|(c, line)| Row {
            geometry: on_map(&line.line),
            values: vec![
                Value::from(c.name.as_str()),
                Value::from(c.raster_names[1].as_str()),
                Value::from(line.model.name()),
                Value::from(line.confidence),
            ],
        })
        .collect();
    let moves: Vec<Row> = comparisons
        .iter()
        .filter_map(|c| Some((*c, c.shift.as_ref().ok()?)))
        .flat_map(|(c, s)| s.arrows.iter().zip(&s.moves).map(move |(arrow, moved)| (c, arrow, *moved)))
        .map(|(c, arrow, moved)| Row {
            geometry: on_map(&Polyline(arrow.to_vec())),
            values: vec![
                Value::from(c.name.as_str()),
                Value::from(f64::from(moved)),
                Value::from(c.years.map(|y| f64::from(moved) / y)),
            ],
        })
        .collect();
    let layer = |name: &str, description: &str, columns, rows| Layer {
        name: format!("{name}{suffix}"),
        description: description.into(),
        kind: GeometryKind::LineString,
        srs: srs.clone(),
        columns,
        rows,
    };
    let all = [
        layer(
            "second_crests",
            "Crest lines of the second picture of a comparison",
            vec![
                Column::text("comparison"),
                Column::text("raster"),
                Column::text("model"),
                Column::real("confidence"),
            ],
            crests,
        ),
        layer(
            "crest_movements",
            "From points of the first crests to where they went, square to the crest; moved counts toward the comparison's forward side",
            vec![Column::text("comparison"), Column::real("moved"), Column::real("moved_per_year")],
            moves,
        ),
    ];
    all.into_iter().filter(|layer| !layer.rows.is_empty()).collect()
}

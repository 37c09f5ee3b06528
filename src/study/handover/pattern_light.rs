//! What light does to trends, handed over: members of `findings.json`, a table, and the caveat of a patch.

use serde_json::{Value as Json, json};

use crate::files::layers::{Column, Value};
use crate::ground::{Axis, Caution, LengthUnit};
use crate::study::{Findings, Id, LightFinding, RecoveryFinding, RefitFinding};

use super::layers::Table;

/// The member `light` of a patch.
pub fn light(light: Option<&LightFinding>) -> Json {
    json!(light.map(|l| json!({
        "from_deg": l.from.deg(), "from_bias_deg": l.from_bias_deg, "suspect": l.suspect,
        "resultant_by_contrast": l.by_light[0], "resultant_by_energy": l.by_light[1],
        "refit": refit(l.refit), "near_light": l.near_light[0], "near_light_expected": l.near_light[1],
    })))
}

/// The member `recoveries`, one a patch whose light is known.
pub fn recoveries(findings: &Findings) -> Json {
    json!(findings.recoveries.iter().map(recovery).collect::<Vec<_>>())
}

fn recovery(r: &RecoveryFinding) -> Json {
    let metres = r.unit == LengthUnit::Metre;
    let [(spacing_m, spacing_px), (height_m, height_px)] =
        [r.spacing, r.height].map(|v| if metres { (Some(v), None) } else { (None, Some(v)) });
    json!({
        "patch": r.patch, "name": r.name, "fingerprint": r.fingerprint,
        "light_from_deg": r.light_from.map(|from| from.deg()),
        "spacing_m": spacing_m, "spacing_px": spacing_px, "height_m": height_m, "height_px": height_px,
        "tone_per_slope": r.tone_per_slope, "defects": r.defects, "spread_deg": r.spread_deg,
        "window_px": r.window_px,
        "trends": r.trends.iter().map(|t| json!({
            "trend_deg": t.trend.deg(), "tries": t.tries, "found": t.found,
            "probability_ci95": t.probability_ci95, "bias_deg": t.bias_deg, "spread_deg": t.spread_deg,
            "share": t.share, "resultant_length": t.resultant_length,
        })).collect::<Vec<_>>(),
        "uniform_resultant": r.uniform_resultant, "uniform_axis_deg": r.uniform_axis.map(Axis::deg),
        "uniform_by_contrast": r.uniform_weighted[0], "uniform_by_energy": r.uniform_weighted[1],
        "missed_deg": r.missed, "corrected": refit(r.corrected),
        "finding": r.sentence, "cautions": r.cautions,
    })
}

fn refit(refit: Option<RefitFinding>) -> Json {
    json!(refit.map(|r| json!({
        "axis_deg": r.axis.deg(), "resultant_length": r.resultant_length, "turn_deg": r.turn_deg,
    })))
}

/// What a recovery adds to the cautions of its patch: nothing where every trend would have been found.
pub fn caveat(findings: &Findings, patch: Id) -> Option<Caution> {
    let found = findings.recoveries.iter().find(|r| r.patch == patch && !r.missed.is_empty())?;
    Some(Caution::new("recovery", found.sentence.as_str()))
}

/// One row a trend laid in.
pub fn recovery_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("patch"),
        Column::real("trend_deg"),
        Column::integer("tries"),
        Column::integer("found"),
        Column::real("probability_low"),
        Column::real("probability_high"),
        Column::real("bias_deg"),
        Column::real("spread_deg"),
        Column::real("share"),
        Column::real("resultant_length"),
    ];
    let rows = findings.recoveries.iter().flat_map(|r| r.trends.iter().map(move |t| (r, t))).map(|(r, t)| {
        vec![
            Value::from(r.name.as_str()),
            Value::from(t.trend.deg()),
            Value::from(i64::from(t.tries)),
            Value::from(i64::from(t.found)),
            Value::from(t.probability_ci95[0]),
            Value::from(t.probability_ci95[1]),
            Value::from(t.bias_deg),
            Value::from(t.spread_deg),
            Value::from(t.share),
            Value::from(t.resultant_length),
        ]
    });
    Table { name: "recovery", columns, rows: rows.collect() }
}

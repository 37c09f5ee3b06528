//! Trend by scale, plateaus and populations handed over: members of `findings.json`, tables and a map layer.

use serde_json::{Value as Json, json};

use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::study::{
    Findings, OpenRaster, PatchFinding, PlateauFinding, PopulationFinding, PopulationSource, ScaleFinding,
    Sheet,
};

use super::json::{trend, verdict};
use super::layers::Table;

/// The member `scales` of a patch; spacings in its unit.
pub fn scales(p: &PatchFinding) -> Json {
    let one = |s: &ScaleFinding| {
        json!({
            "scale_px": s.scale_px, "spacing": s.spacing, "coherence": s.coherence, "share": s.share,
            "axis_deg": s.axis.map(|a| a.deg()), "resultant_length": s.resultant_length,
        })
    };
    json!(p.pattern.scales.iter().map(one).collect::<Vec<_>>())
}

/// The member `plateaus` of a patch.
pub fn plateaus(p: &PatchFinding) -> Json {
    let one = |s: &PlateauFinding| {
        json!({
            "scales": s.scales, "axis_deg": s.axis.deg(), "resultant_length": s.resultant_length,
            "scale_px": s.scale_px,
        })
    };
    json!(p.pattern.plateaus.iter().map(one).collect::<Vec<_>>())
}

/// The member `populations` of a patch; lengths in its unit.
pub fn populations(p: &PatchFinding) -> Json {
    let one = |q: &PopulationFinding| {
        json!({
            "name": q.name, "source": source(q), "weight": q.weight, "trend": trend(&q.trend),
            "spacing": q.spacing, "spacing_ci95": q.spacing_ci95, "crests": super::crests::json(&q.crests),
            "verdicts": q.verdicts.iter().map(verdict).collect::<Vec<_>>(), "cautions": q.cautions,
        })
    };
    json!(p.pattern.populations.iter().map(one).collect::<Vec<_>>())
}

/// One word.
fn source(p: &PopulationFinding) -> &'static str {
    match p.source {
        PopulationSource::Mixture => "mixture",
        PopulationSource::Scale => "scale",
    }
}

/// One row a scale of a patch.
pub fn scale_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("patch"),
        Column::real("scale_px"),
        Column::real("spacing"),
        Column::real("coherence"),
        Column::real("share"),
        Column::real("axis_deg"),
        Column::real("resultant_length"),
        Column::integer("plateau"),
    ];
    let mut rows = Vec::new();
    for patch in &findings.patches {
        for (i, s) in patch.pattern.scales.iter().enumerate() {
            let plateau = patch.pattern.plateaus.iter().position(|p| p.scales[0] <= i && i <= p.scales[1]);
            rows.push(vec![
                Value::from(patch.name.as_str()),
                Value::from(s.scale_px),
                Value::from(s.spacing),
                Value::from(s.coherence),
                Value::from(s.share),
                Value::from(s.axis.map(|a| a.deg())),
                Value::from(s.resultant_length),
                plateau.map_or(Value::Missing, |p| Value::Integer(p as i64 + 1)),
            ]);
        }
    }
    Table { name: "scales", columns, rows }
}

/// One row a population of a patch.
pub fn population_table(findings: &Findings) -> Table {
    let each = findings.patches.iter().flat_map(|p| p.pattern.populations.iter().map(move |q| (p, q)));
    Table { name: "populations", columns: columns(), rows: each.map(|(p, q)| values(p, q)).collect() }
}

/// The outline of the patch with the numbers of each of its populations; `None` where no patch has any.
pub fn population_layer(
    sheet: &Sheet,
    open: &OpenRaster,
    patches: &[&PatchFinding],
    srs: &Srs,
    suffix: &str,
) -> Option<Layer> {
    let each = patches.iter().flat_map(|p| p.pattern.populations.iter().map(move |q| (*p, q)));
    let rows: Vec<Row> = each
        .filter_map(|(patch, population)| {
            let outline = sheet.patch(patch.id)?.outline.clone();
            let geometry = srs.geometry(&open.place, &Geometry::Polygon(outline));
            Some(Row { geometry, values: values(patch, population) })
        })
        .collect();
    (!rows.is_empty()).then(|| Layer {
        name: format!("populations{suffix}"),
        description: "Populations of bedforms, each with the outline of its patch; degrees from true north"
            .into(),
        kind: GeometryKind::Polygon,
        srs: srs.clone(),
        columns: columns(),
        rows,
    })
}

fn columns() -> Vec<Column> {
    vec![
        Column::text("patch"),
        Column::text("population"),
        Column::text("source"),
        Column::real("weight"),
        Column::real("trend_deg"),
        Column::real("trend_ci95_half_deg"),
        Column::real("resultant_length"),
        Column::real("spread_deg"),
        Column::integer("n"),
        Column::real("n_eff"),
        Column::real("scale_px"),
        Column::real("spacing"),
        Column::real("spacing_low"),
        Column::real("spacing_high"),
        Column::integer("crests"),
        Column::real("crest_length"),
        Column::text("verdicts"),
        Column::text("cautions"),
    ]
}

fn values(patch: &PatchFinding, p: &PopulationFinding) -> Vec<Value> {
    let [low, high] = p.spacing_ci95.map_or([None, None], |i| i.map(Some));
    let codes: Vec<_> = p.cautions.iter().map(|c| c.code).collect();
    let crests = p.crests.as_ref().ok();
    vec![
        Value::from(patch.name.as_str()),
        Value::from(p.name.as_str()),
        Value::from(source(p)),
        Value::from(p.weight),
        Value::from(p.trend.axis.map(|a| a.deg())),
        Value::from(p.trend.ci95_half_deg),
        Value::from(p.trend.resultant_length),
        Value::from(p.trend.spread_deg),
        Value::Integer(p.trend.n as i64),
        Value::from(p.trend.n_eff),
        Value::from(p.trend.gradient_scale_px),
        Value::from(p.spacing),
        Value::from(low),
        Value::from(high),
        crests.map_or(Value::Missing, |c| Value::Integer(c.lines.len() as i64)),
        Value::from(crests.map(|c| c.numbers.total_length)),
        Value::from(judged(p)),
        Value::from(codes.join(" ")),
    ]
}

/// "Sorrel mast: gross normal 72 %; …": the leading theory under each record.
fn judged(p: &PopulationFinding) -> String {
    let each = p.verdicts.iter().map(|v| match &v.refused {
        Some(why) => format!("{}: {why}", v.winds_name),
        None => {
            let best = v.theories.iter().max_by(|a, b| a.posterior.total_cmp(&b.posterior));
            let best = best.map_or(String::new(), |t| format!("{} {:.0} %", t.name, 100.0 * t.posterior));
            format!("{}: {best}", v.winds_name)
        }
    });
    each.collect::<Vec<_>>().join("; ")
}

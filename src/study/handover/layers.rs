//! Findings as rows: the tables and the map layers share their columns.

use std::collections::BTreeMap;

use super::comparisons::comparison_layers;
use super::crest_layers::crest_layers;
use super::network_layers::network_layers;
use super::obstacles::outcrop_layer;
use super::populations::population_layer;
use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::ground::{LengthUnit, Place, Point, Polyline};
use crate::study::{
    ComparisonFinding, Findings, Id, NetworkFinding, OpenRaster, PatchFinding, Sheet, Sources, VerdictFinding,
};

/// The columns of a table and its rows, without geometry.
pub struct Table {
    pub name: &'static str,
    pub columns: Vec<Column>,
    pub rows: Vec<Vec<Value>>,
}

/// One row a patch: the numbers of its finding.
pub fn patch_table(findings: &Findings) -> Table {
    Table {
        name: "patches",
        columns: patch_columns(),
        rows: findings.patches.iter().map(patch_values).collect(),
    }
}

/// One row a node: where the trend was measured, in pixels and, where there is one, on the globe.
pub fn node_table(findings: &Findings, sources: &Sources) -> Table {
    let columns = vec![
        Column::text("patch"),
        Column::real("col_px"),
        Column::real("row_px"),
        Column::real("lon_deg"),
        Column::real("lat_deg"),
        Column::real("axis_deg"),
        Column::real("coherence"),
        Column::integer("significant"),
    ];
    let mut rows = Vec::new();
    for patch in &findings.patches {
        let place = sources.rasters.get(&patch.raster).map(|open| &open.place);
        for node in &patch.trend.nodes {
            let lonlat = place.and_then(|p| p.lonlat_of(node.at));
            rows.push(vec![
                Value::from(patch.name.as_str()),
                Value::from(node.at.x),
                Value::from(node.at.y),
                Value::from(lonlat.map(|l| l.lon)),
                Value::from(lonlat.map(|l| l.lat)),
                Value::from(node.axis.deg()),
                Value::from(node.coherence),
                Value::Integer(i64::from(node.significant)),
            ]);
        }
    }
    Table { name: "nodes", columns, rows }
}

/// One row a verdict and theory.
pub fn verdict_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("patch"),
        Column::text("winds"),
        Column::text("refused"),
        Column::real("rdd_deg"),
        Column::real("rdp_over_dp"),
        Column::real("obliquity_deg"),
        Column::real("obliquity_low_deg"),
        Column::real("obliquity_high_deg"),
        Column::real("p_longitudinal"),
        Column::real("p_oblique"),
        Column::real("p_transverse"),
        Column::text("theory"),
        Column::real("theory_axis_deg"),
        Column::real("theory_toward_deg"),
        Column::real("theory_spread_deg"),
        Column::real("prior"),
        Column::real("posterior"),
        Column::real("ln_bayes_factor"),
    ];
    let mut rows = Vec::new();
    for patch in &findings.patches {
        for v in &patch.verdicts {
            let shared = verdict_values(patch, v);
            if v.theories.is_empty() {
                rows.push(shared.iter().cloned().chain(vec![Value::Missing; 7]).collect());
            }
            for t in &v.theories {
                let own = [
                    Value::from(t.name),
                    Value::from(t.axis.map(|a| a.deg())),
                    Value::from(t.toward.map(|a| a.deg())),
                    Value::from(t.spread_deg),
                    Value::from(t.prior),
                    Value::from(t.posterior),
                    Value::from(t.ln_bayes_factor),
                ];
                rows.push(shared.iter().cloned().chain(own).collect());
            }
        }
    }
    Table { name: "verdicts", columns, rows }
}

fn verdict_values(patch: &PatchFinding, v: &VerdictFinding) -> Vec<Value> {
    let [low, high] = v.obliquity_ci95_deg.map_or([None, None], |i| i.map(Some));
    let classes = v.probabilities.map_or([None; 3], |p| p.map(Some));
    let mut values = vec![
        Value::from(patch.name.as_str()),
        Value::from(v.winds_name.as_str()),
        Value::from(v.refused.as_deref()),
        Value::from(v.toward.map(|a| a.deg())),
        Value::from(v.ratio),
        Value::from(v.obliquity_deg),
        Value::from(low),
        Value::from(high),
    ];
    values.extend(classes.map(Value::from));
    values
}

/// One row a wind record and season (or the whole record).
pub fn wind_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("winds"),
        Column::text("season"),
        Column::text("measure"),
        Column::text("unit"),
        Column::real("total"),
        Column::real("resultant"),
        Column::real("ratio"),
        Column::real("toward_deg"),
        Column::real("toward_ci95_half_deg"),
    ];
    let mut rows = Vec::new();
    for wind in &findings.winds {
        let whole = std::iter::once(("whole record", wind.law.as_str(), &wind.flux));
        let dp = wind.fryberger.iter().map(|d| ("whole record", "drift potential", d));
        let seasons = wind.seasons.iter().map(|s| (s.name, wind.law.as_str(), &s.drift));
        for (season, measure, d) in whole.chain(dp).chain(seasons) {
            rows.push(vec![
                Value::from(wind.name.as_str()),
                Value::from(season),
                Value::from(measure),
                Value::from(d.unit),
                Value::from(d.total),
                Value::from(d.resultant),
                Value::from(d.ratio),
                Value::from(d.toward.map(|a| a.deg())),
                Value::from(d.toward_ci95_half_deg),
            ]);
        }
    }
    Table { name: "winds", columns, rows }
}

fn patch_columns() -> Vec<Column> {
    vec![
        Column::text("name"),
        Column::text("length_unit"),
        Column::real("area"),
        Column::real("valid_fraction"),
        Column::real("trend_deg"),
        Column::real("trend_ci95_half_deg"),
        Column::real("resultant_length"),
        Column::real("resultant_length_all"),
        Column::real("kappa_doubled"),
        Column::real("rayleigh_p"),
        Column::integer("n"),
        Column::real("n_eff"),
        Column::real("spectrum_trend_deg"),
        Column::real("spacing"),
        Column::real("spacing_low"),
        Column::real("spacing_high"),
        Column::real("spectrum_p"),
        Column::text("finding"),
        Column::text("cautions"),
    ]
}

fn patch_values(p: &PatchFinding) -> Vec<Value> {
    let [low, high] = p.spectrum.spacing_ci95.map_or([None, None], |i| i.map(Some));
    let codes: Vec<_> = p.cautions.iter().map(|c| c.code).collect();
    vec![
        Value::from(p.name.as_str()),
        Value::from(if p.unit == LengthUnit::Metre { "m" } else { "px" }),
        Value::from(p.area),
        Value::from(p.valid_fraction),
        Value::from(p.trend.axis.map(|a| a.deg())),
        Value::from(p.trend.ci95_half_deg),
        Value::from(p.trend.resultant_length),
        Value::from(p.trend.resultant_length_all),
        Value::from(p.trend.kappa_doubled),
        Value::from(p.trend.rayleigh_p),
        Value::Integer(p.trend.n as i64),
        Value::from(p.trend.n_eff),
        Value::from(p.spectrum.axis.map(|a| a.deg())),
        Value::from(p.spectrum.spacing),
        Value::from(low),
        Value::from(high),
        Value::from(p.spectrum.p),
        Value::from(p.sentence.as_str()),
        Value::from(codes.join(" ")),
    ]
}

/// Patches, trend strokes, outcrops and channels of every raster, in the raster's own reference system.
pub fn layers(sheet: &Sheet, findings: &Findings, sources: &Sources) -> Vec<Layer> {
    let mut by_raster: BTreeMap<Id, (Vec<&PatchFinding>, Vec<&NetworkFinding>)> = BTreeMap::new();
    for patch in &findings.patches {
        by_raster.entry(patch.raster).or_default().0.push(patch);
    }
    for network in &findings.networks {
        by_raster.entry(network.raster).or_default().1.push(network);
    }
    let many = by_raster.len() > 1;
    by_raster
        .into_iter()
        .filter_map(|(raster, on_it)| Some((raster, sources.rasters.get(&raster)?, on_it)))
        .flat_map(|(raster, open, (patches, networks))| {
            let suffix = if many { format!("_{}", raster.0) } else { String::new() };
            let srs = srs(open);
            let outcrops = outcrop_layer(sheet, open, &patches, &srs, &suffix);
            let own = [
                patch_layer(sheet, open, &patches, &srs, &suffix),
                stroke_layer(open, &patches, &srs, &suffix),
            ];
            // A raster with networks alone has no patch layers.
            let own = own.into_iter().filter(|_| !patches.is_empty());
            own.chain(outcrops)
                .chain(population_layer(sheet, open, &patches, &srs, &suffix))
                .chain(comparison_layers(open, &of_raster(findings, raster), &srs, &suffix))
                .chain(crest_layers(open, &patches, &srs, &suffix))
                .chain(network_layers(open, &networks, &srs, &suffix))
                .collect::<Vec<_>>()
        })
        .collect()
}

/// The comparisons whose patch lies on a raster.
fn of_raster(findings: &Findings, raster: Id) -> Vec<&ComparisonFinding> {
    findings.comparisons.iter().filter(|c| c.rasters[0] == raster).collect()
}

/// Patches in longitude and latitude, for GeoJSON; only for rasters on Earth.
pub fn lonlat_patches(sheet: &Sheet, findings: &Findings, sources: &Sources) -> Option<Layer> {
    let open = sources.rasters.values().find(|open| open.place.is_georeferenced())?;
    if open.place.body.shape != crate::ground::Body::earth().shape {
        return None;
    }
    let srs = Srs::lonlat(&open.place.body);
    let mut layers = sources.rasters.iter().filter(|(_, o)| o.place.body.shape == open.place.body.shape).map(
        |(id, open)| {
            let patches: Vec<_> = findings.patches.iter().filter(|p| p.raster == *id).collect();
            patch_layer(sheet, open, &patches, &srs, "")
        },
    );
    let mut all = layers.next()?;
    all.rows.extend(layers.flat_map(|l| l.rows));
    Some(all)
}

fn srs(open: &OpenRaster) -> Srs {
    let epsg = open.raster.info().georeference.as_ref().and_then(|g| g.epsg);
    Srs::of_place(&open.place, &open.label, epsg)
}

fn patch_layer(
    sheet: &Sheet,
    open: &OpenRaster,
    patches: &[&PatchFinding],
    srs: &Srs,
    suffix: &str,
) -> Layer {
    let rows = patches
        .iter()
        .filter_map(|finding| {
            let outline = sheet.patch(finding.id)?.outline.clone();
            let geometry = srs.geometry(&open.place, &Geometry::Polygon(outline));
            Some(Row { geometry, values: patch_values(finding) })
        })
        .collect();
    Layer {
        name: format!("patches{suffix}"),
        description: "Patches with trend and spacing; angles in degrees from true north".into(),
        kind: GeometryKind::Polygon,
        srs: srs.clone(),
        columns: patch_columns(),
        rows,
    }
}

/// A stroke a node that passed the noise floor, as long as the node step, along the trend.
fn stroke_layer(open: &OpenRaster, patches: &[&PatchFinding], srs: &Srs, suffix: &str) -> Layer {
    let mut rows = Vec::new();
    for patch in patches {
        for node in patch.trend.nodes.iter().filter(|n| n.significant) {
            let Some(line) = stroke(&open.place, node.at, node.axis.deg(), 0.8 * patch.trend.node_step_px)
            else {
                continue;
            };
            rows.push(Row {
                geometry: srs.geometry(&open.place, &Geometry::LineString(line)),
                values: vec![
                    Value::from(patch.name.as_str()),
                    Value::from(node.axis.deg()),
                    Value::from(node.coherence),
                ],
            });
        }
    }
    Layer {
        name: format!("trend_strokes{suffix}"),
        description: "Trend at the nodes that passed the noise floor; degrees from true north".into(),
        kind: GeometryKind::LineString,
        srs: srs.clone(),
        columns: vec![Column::text("patch"), Column::real("axis_deg"), Column::real("coherence")],
        rows,
    }
}

/// A segment of `length_px` pixels about `at` along a true azimuth, in pixel coordinates.
fn stroke(place: &Place, at: Point, azimuth_deg: f64, length_px: f64) -> Option<Polyline> {
    let (east, north) = crate::ground::Azimuth::from_deg(azimuth_deg).east_north();
    let (dx, dy) = place.local_frame(at)?.pixel(east, north);
    let scale = 0.5 * length_px / dx.hypot(dy);
    let (dx, dy) = (dx * scale, dy * scale);
    Some(Polyline(vec![Point::new(at.x - dx, at.y - dy), Point::new(at.x + dx, at.y + dy)]))
}

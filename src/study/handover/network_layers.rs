//! Channel networks as tables and map layers: reaches, nodes, basins, stations, junctions, the constant-drop test.

use crate::files::layers::{Column, Geometry, GeometryKind, Layer, Row, Srs, Value};
use crate::ground::{LengthUnit, Reach};
use crate::study::{Findings, NetworkFinding, OpenRaster, Sources};

use super::layers::Table;
use super::networks::evidence;

/// One row a network.
pub fn network_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("network"),
        Column::text("source"),
        Column::text("length_unit"),
        Column::real("area"),
        Column::integer("reaches"),
        Column::integer("heads"),
        Column::integer("junctions"),
        Column::integer("loops"),
        Column::real("length"),
        Column::integer("greatest_order"),
        Column::real("density"),
        Column::real("bifurcation"),
        Column::real("threshold_m2"),
        Column::real("theta"),
        Column::real("hypsometric_integral"),
        Column::real("junction_mean_deg"),
        Column::real("junction_low_deg"),
        Column::real("junction_high_deg"),
        Column::real("junction_chord"),
        Column::real("trunk_sinuosity"),
        Column::text("finding"),
        Column::text("cautions"),
    ];
    let row = |n: &NetworkFinding| {
        let at_chord = n.junctions.by_chord.iter().find(|c| c.chord == n.junctions.chord);
        let [low, high] = at_chord.and_then(|c| c.ci95_deg).map_or([None; 2], |i| i.map(Some));
        let codes: Vec<_> = n.cautions.iter().map(|c| c.code).collect();
        vec![
            Value::from(n.name.as_str()),
            Value::from(n.source_in_words()),
            Value::from(unit(n)),
            Value::from(n.area),
            Value::Integer(n.network.reaches.len() as i64),
            Value::Integer(n.network.heads().len() as i64),
            Value::Integer(n.network.junctions().len() as i64),
            Value::Integer(n.network.loops() as i64),
            Value::from(n.network.length()),
            Value::from(n.network.greatest_order().map(i64::from)),
            Value::from(n.density.map(|d| d.density)),
            Value::from(n.horton.map(|h| h.bifurcation.value)),
            Value::from(n.drainage.as_ref().map(|d| d.channels.threshold_m2)),
            Value::from(n.chi.as_ref().map(|c| c.theta)),
            Value::from(n.hypsometry.as_ref().map(|h| h.integral)),
            Value::from(at_chord.map(|c| c.mean_deg)),
            Value::from(low),
            Value::from(high),
            Value::from(n.junctions.chord),
            Value::from(n.planforms.first().map(|p| p.sinuosity)),
            Value::from(n.sentence.as_str()),
            Value::from(codes.join(" ")),
        ]
    };
    Table { name: "networks", columns, rows: findings.networks.iter().map(row).collect() }
}

/// One row a reach.
pub fn reach_table(findings: &Findings) -> Table {
    let rows = findings
        .networks
        .iter()
        .flat_map(|n| n.network.reaches.iter().enumerate().map(move |(i, reach)| reach_values(n, i, reach)));
    Table { name: "reaches", columns: reach_columns(), rows: rows.collect() }
}

/// One row a station of a long profile, from the outlet up.
pub fn profile_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("network"),
        Column::integer("profile"),
        Column::integer("is_trunk"),
        Column::real("col_px"),
        Column::real("row_px"),
        Column::real("from_outlet_m"),
        Column::real("elevation_m"),
        Column::real("area_m2"),
        Column::real("chi_m"),
        Column::real("slope"),
        Column::real("ksn"),
    ];
    let mut rows = Vec::new();
    for n in &findings.networks {
        for (i, profile) in n.profiles.iter().enumerate() {
            rows.extend(profile.stations.iter().map(|s| {
                vec![
                    Value::from(n.name.as_str()),
                    Value::Integer(i as i64),
                    Value::Integer(i64::from(profile.is_trunk)),
                    Value::from(s.at.x),
                    Value::from(s.at.y),
                    Value::from(s.from_outlet_m),
                    Value::from(s.elevation_m),
                    Value::from(s.area_m2),
                    Value::from(s.chi),
                    Value::from(s.slope),
                    Value::from(s.ksn),
                ]
            }));
        }
    }
    Table { name: "profiles", columns, rows }
}

/// One row a place where a width was measured.
pub fn width_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("network"),
        Column::integer("reach"),
        Column::text("length_unit"),
        Column::real("col_px"),
        Column::real("row_px"),
        Column::real("along"),
        Column::real("width"),
    ];
    let mut rows = Vec::new();
    for n in &findings.networks {
        for (i, reach) in n.network.reaches.iter().enumerate() {
            rows.extend(reach.stations.iter().filter(|s| s.width.is_some()).map(|s| {
                vec![
                    Value::from(n.name.as_str()),
                    Value::Integer(i as i64),
                    Value::from(unit(n)),
                    Value::from(s.at.x),
                    Value::from(s.at.y),
                    Value::from(s.along),
                    Value::from(s.width),
                ]
            }));
        }
    }
    Table { name: "widths", columns, rows }
}

/// One row a junction.
pub fn junction_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("network"),
        Column::real("col_px"),
        Column::real("row_px"),
        Column::real("chord"),
        Column::real("angle_deg"),
        Column::real("first_toward_deg"),
        Column::real("second_toward_deg"),
        Column::integer("first_order"),
        Column::integer("second_order"),
        Column::real("howard_deg"),
    ];
    let mut rows = Vec::new();
    for n in &findings.networks {
        rows.extend(n.junctions.angles.iter().map(|j| {
            let orders = j.orders.map_or([None; 2], |o| o.map(|o| Some(i64::from(o))));
            vec![
                Value::from(n.name.as_str()),
                Value::from(j.at.x),
                Value::from(j.at.y),
                Value::from(n.junctions.chord),
                Value::from(j.angle_deg),
                Value::from(j.toward[0].deg()),
                Value::from(j.toward[1].deg()),
                Value::from(orders[0]),
                Value::from(orders[1]),
                Value::from(j.howard_deg),
            ]
        }));
    }
    Table { name: "junctions", columns, rows }
}

/// One row a threshold of the constant-drop test.
pub fn drop_table(findings: &Findings) -> Table {
    let columns = vec![
        Column::text("network"),
        Column::real("threshold_m2"),
        Column::integer("first_order_streams"),
        Column::real("first_order_mean_drop_m"),
        Column::integer("higher_order_streams"),
        Column::real("higher_order_mean_drop_m"),
        Column::real("t"),
        Column::real("density_per_m"),
    ];
    let mut rows = Vec::new();
    for n in &findings.networks {
        for d in n.drainage.iter().flat_map(|d| &d.channels.drops) {
            rows.push(vec![
                Value::from(n.name.as_str()),
                Value::from(d.threshold_m2),
                Value::Integer(d.first.0 as i64),
                Value::from(d.first.1),
                Value::Integer(d.higher.0 as i64),
                Value::from(d.higher.1),
                Value::from(d.t),
                Value::from(d.density),
            ]);
        }
    }
    Table { name: "constant-drop", columns, rows }
}

/// Reaches, nodes and basins of the networks on one raster; empty layers are left out.
pub fn network_layers(
    open: &OpenRaster,
    networks: &[&NetworkFinding],
    srs: &Srs,
    suffix: &str,
) -> Vec<Layer> {
    let all = [
        reaches(open, networks, srs, suffix),
        nodes(open, networks, srs, suffix),
        basins(open, networks, srs, suffix),
    ];
    all.into_iter().filter(|layer| !layer.rows.is_empty()).collect()
}

/// Reaches in longitude and latitude, for GeoJSON; only for rasters on Earth.
pub fn lonlat_reaches(findings: &Findings, sources: &Sources) -> Option<Layer> {
    let earth = crate::ground::Body::earth();
    let on_earth = |open: &&OpenRaster| open.place.is_georeferenced() && open.place.body.shape == earth.shape;
    let mut layers = sources.rasters.iter().filter(|(_, open)| on_earth(open)).map(|(id, open)| {
        let here: Vec<_> = findings.networks.iter().filter(|n| n.raster == *id).collect();
        reaches(open, &here, &Srs::lonlat(&open.place.body), "")
    });
    let mut all = layers.next()?;
    all.rows.extend(layers.flat_map(|l| l.rows));
    (!all.rows.is_empty()).then_some(all)
}

fn reaches(open: &OpenRaster, networks: &[&NetworkFinding], srs: &Srs, suffix: &str) -> Layer {
    let mut rows = Vec::new();
    for n in networks {
        for (i, reach) in n.network.reaches.iter().enumerate() {
            rows.push(Row {
                geometry: srs.geometry(&open.place, &Geometry::LineString(reach.line.clone())),
                values: reach_values(n, i, reach),
            });
        }
    }
    Layer {
        name: format!("reaches{suffix}"),
        description: "Channel reaches, drawn downstream as far as the sense is known".into(),
        kind: GeometryKind::LineString,
        srs: srs.clone(),
        columns: reach_columns(),
        rows,
    }
}

fn nodes(open: &OpenRaster, networks: &[&NetworkFinding], srs: &Srs, suffix: &str) -> Layer {
    let mut rows = Vec::new();
    for n in networks {
        let (into, out) = (n.network.incoming(), n.network.outgoing());
        for (i, node) in n.network.nodes.iter().enumerate() {
            let kind = match (into[i].len(), out[i].len()) {
                (0, _) => "head",
                (_, 0) => "outlet",
                (1, 1) => "change",
                (_, 1) => "junction",
                _ => "parting",
            };
            rows.push(Row {
                geometry: srs.geometry(&open.place, &Geometry::Point(node.at)),
                values: vec![
                    Value::from(n.name.as_str()),
                    Value::Integer(i as i64),
                    Value::from(kind),
                    Value::from(node.elevation_m),
                ],
            });
        }
    }
    Layer {
        name: format!("channel_nodes{suffix}"),
        description: "Heads, junctions, partings and outlets of the channels".into(),
        kind: GeometryKind::Point,
        srs: srs.clone(),
        columns: vec![
            Column::text("network"),
            Column::integer("node"),
            Column::text("kind"),
            Column::real("elevation_m"),
        ],
        rows,
    }
}

fn basins(open: &OpenRaster, networks: &[&NetworkFinding], srs: &Srs, suffix: &str) -> Layer {
    let mut rows = Vec::new();
    for n in networks {
        for basin in n.drainage.iter().flat_map(|d| &d.basins).filter(|b| b.outline.outer.len() >= 3) {
            rows.push(Row {
                geometry: srs.geometry(&open.place, &Geometry::Polygon(basin.outline.clone())),
                values: vec![
                    Value::from(n.name.as_str()),
                    Value::from(basin.area_m2),
                    Value::Integer(i64::from(basin.touches_edge)),
                ],
            });
        }
    }
    Layer {
        name: format!("basins{suffix}"),
        description: "Ground that drains through each outlet".into(),
        kind: GeometryKind::Polygon,
        srs: srs.clone(),
        columns: vec![Column::text("network"), Column::real("area_m2"), Column::integer("touches_edge")],
        rows,
    }
}

fn unit(n: &NetworkFinding) -> &'static str {
    if n.unit == LengthUnit::Metre { "m" } else { "px" }
}

fn reach_columns() -> Vec<Column> {
    vec![
        Column::text("network"),
        Column::integer("reach"),
        Column::integer("from_node"),
        Column::integer("to_node"),
        Column::text("length_unit"),
        Column::real("length"),
        Column::integer("strahler"),
        Column::integer("shreve"),
        Column::real("width"),
        Column::real("width_se"),
        Column::real("upper_elevation_m"),
        Column::real("lower_elevation_m"),
        Column::real("area_m2"),
        Column::real("p_downstream"),
        Column::text("sense_evidence"),
        Column::text("origin"),
        Column::real("confidence"),
    ]
}

fn reach_values(n: &NetworkFinding, index: usize, reach: &Reach) -> Vec<Value> {
    let elevation = |node: usize| n.network.nodes.get(node).and_then(|n| n.elevation_m);
    vec![
        Value::from(n.name.as_str()),
        Value::Integer(index as i64),
        Value::Integer(reach.from as i64),
        Value::Integer(reach.to as i64),
        Value::from(unit(n)),
        Value::from(reach.length),
        Value::from(reach.order.map(|o| i64::from(o.strahler))),
        Value::from(reach.order.map(|o| i64::from(o.shreve))),
        Value::from(reach.width.map(|w| w.mean)),
        Value::from(reach.width.map(|w| w.se)),
        Value::from(elevation(reach.from)),
        Value::from(elevation(reach.to)),
        Value::from(reach.stations.last().and_then(|s| s.area_m2)),
        Value::from(reach.sense.probability()),
        Value::from(evidence(reach).as_str()),
        Value::from(reach.origin.in_words()),
        Value::from(reach.confidence),
    ]
}

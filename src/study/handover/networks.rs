//! Channel networks in `findings.json`.

use serde_json::{Value, json};

use crate::ground::{LengthUnit, Reach};
use crate::science::network::compare::Agreement;
use crate::science::network::flow::{PalaeoFlow, Range};
use crate::science::network::hierarchy::Ratio;
use crate::science::network::pattern::PATTERN_NAMES;
use crate::science::network::planform::{Meander, Planform};
use crate::science::network::scaling::PowerLaw;
use crate::study::{DrainageFinding, Findings, NetworkFinding, TracingFinding};

/// The member `networks`.
pub fn networks(findings: &Findings) -> Value {
    findings.networks.iter().map(network).collect()
}

fn network(n: &NetworkFinding) -> Value {
    let metres = n.unit == LengthUnit::Metre;
    let f = &n.network;
    json!({
        "id": n.id, "name": n.name, "raster": n.raster, "fingerprint": n.fingerprint,
        "source": n.source_in_words(), "length_unit": n.unit,
        "area_m2": metres.then_some(n.area), "area_px": (!metres).then_some(n.area),
        "centre_lonlat_deg": n.centre.map(|c| [c.lon, c.lat]),
        "pixels_per_measured_pixel": n.factor,
        "reaches": f.reaches.len(), "heads": f.heads().len(), "junctions": f.junctions().len(),
        "outlets": f.outlets().len(), "loops": f.loops(), "length": f.length(),
        "greatest_order": f.greatest_order(),
        "drainage": n.drainage.as_ref().map(drainage),
        "tracing": n.tracing.as_ref().map(tracing),
        "orders": n.orders.iter().map(|o| json!({
            "order": o.order, "streams": o.streams, "mean_length": o.mean_length,
            "mean_area_m2": o.mean_area_m2, "mean_slope": o.mean_slope,
        })).collect::<Vec<_>>(),
        "horton": n.horton.as_ref().map(|h| json!({
            "bifurcation": ratio(&h.bifurcation), "length": ratio(&h.length),
            "area": h.area.as_ref().map(ratio), "slope": h.slope.as_ref().map(ratio), "orders": h.orders,
        })),
        "tokunaga": n.tokunaga.as_ref().map(|t| json!({
            "a": t.a, "c": t.c, "side_branches": t.side_branches, "bifurcation": t.bifurcation,
        })),
        "density": n.density.map(|d| json!({
            "per_unit_length": d.density, "length": d.length, "inflation": d.inflation, "area": d.area,
            "frequency": d.frequency,
        })),
        "hack": n.hack.as_ref().map(power), "flint": n.flint.as_ref().map(power),
        "chi": n.chi.as_ref().map(|c| json!({
            "theta": c.theta, "found": c.found, "theta_range": c.theta_range, "slope": c.slope,
            "slope_ci95": c.slope_ci95, "r2": c.r2, "scatter": c.scatter,
        })),
        "knickpoints": n.profiles.iter().flat_map(|p| &p.knickpoints).map(|k| json!({
            "col_px": k.at.x, "row_px": k.at.y, "from_outlet_m": k.from_outlet_m, "elevation_m": k.elevation_m,
            "ratio": k.ratio, "p": k.p,
        })).collect::<Vec<_>>(),
        "hypsometry": n.hypsometry.as_ref().map(|h| json!({
            "lowest_m": h.lowest_m, "highest_m": h.highest_m, "mean_m": h.mean_m, "integral": h.integral,
            "relief_ratio": h.relief_ratio, "melton": h.melton, "curve": h.curve,
        })),
        "junction_angles": {
            "chord": n.junctions.chord, "n": n.junctions.angles.len(), "too_short": n.junctions.too_short,
            "by_chord": n.junctions.by_chord.iter().map(|c| json!({
                "chord": c.chord, "n": c.n, "mean_deg": c.mean_deg, "ci95_deg": c.ci95_deg,
                "median_deg": c.median_deg,
            })).collect::<Vec<_>>(),
        },
        "pattern": pattern(n),
        "planforms": n.planforms.iter().map(planform).collect::<Vec<_>>(),
        "palaeo_flow": palaeo_flow(n),
        "agreements": n.agreements.iter().map(|(id, name, a)| agreement(id.0, name, a)).collect::<Vec<_>>(),
        "finding": n.sentence, "cautions": n.cautions,
    })
}

fn drainage(d: &DrainageFinding) -> Value {
    let c = &d.changed;
    let rows = d.channels.drops.iter().map(|row| {
        json!({
            "threshold_m2": row.threshold_m2, "streams": [row.first.0, row.higher.0],
            "mean_drop_m": [row.first.1, row.higher.1], "sd_drop_m": [row.first.2, row.higher.2],
            "t": row.t, "density_per_m": row.density,
        })
    });
    let count = |n: &crate::ground::Network| json!({ "reaches": n.reaches.len(), "length": n.length(), "greatest_order": n.greatest_order() });
    json!({
        "conditioning": d.conditioning, "router": d.router, "heads": d.channels.rule,
        "valid_cells": c.valid_cells, "raised_cells": c.raised_cells, "cut_cells": c.cut_cells,
        "raised_volume_m3": c.raised_volume, "cut_volume_m3": c.cut_volume,
        "deepest_fill_m": c.deepest_fill, "deepest_cut_m": c.deepest_cut,
        "sinks": c.sinks, "breached": c.breached, "filled": c.filled, "left_closed": c.left_closed,
        "cells_area_m2": d.cells_area_m2,
        "threshold_m2": d.channels.threshold_m2, "threshold_is_proposed": d.channels.is_proposed,
        "proposed_threshold_m2": d.channels.proposed_m2,
        "constant_drop": rows.collect::<Vec<_>>(),
        "at_half_threshold": count(&d.channels.half), "at_twice_threshold": count(&d.channels.twice),
        "basins": d.basins.iter().map(|b| json!({
            "outlet_px": b.outlet, "area_m2": b.area_m2, "touches_edge": b.touches_edge,
        })).collect::<Vec<_>>(),
    })
}

fn tracing(t: &TracingFinding) -> Value {
    json!({
        "floor": t.floor, "widths_px": t.widths_px, "proposed_reaches": t.proposed_reaches,
        "struck_reaches": t.struck_reaches, "bridged_gaps": t.bridged_gaps, "lost_arrows_px": t.lost_arrows,
    })
}

fn ratio(r: &Ratio) -> Value {
    json!({ "value": r.value, "ci95": r.ci95 })
}

fn power(p: &PowerLaw) -> Value {
    json!({ "factor": p.factor, "exponent": p.exponent, "exponent_ci95": p.exponent_ci95, "r2": p.r2 })
}

fn pattern(n: &NetworkFinding) -> Value {
    let p = &n.pattern;
    let named = p.probabilities.map(|shares| {
        PATTERN_NAMES
            .iter()
            .zip(shares)
            .map(|(name, share)| ((*name).to_owned(), json!(share)))
            .collect::<serde_json::Map<_, _>>()
    });
    let f = &p.features;
    json!({
        "links": p.links, "too_few": p.too_few, "probabilities": named,
        "modes_deg": p.modes.iter().map(|a| a.deg()).collect::<Vec<_>>(),
        "features": {
            "alignment": f.alignment, "crossing": f.crossing, "mean_junction_deg": f.mean_junction_deg,
            "right_angles": f.right_angles, "short_across": f.short_across, "radial": f.radial,
        },
    })
}

fn planform(p: &Planform) -> Value {
    let meander = |m: &Meander| {
        json!({
            "wavelength": m.wavelength, "arc_wavelength": m.arc_wavelength, "ci95": m.ci95, "amplitude": m.amplitude,
        })
    };
    json!({
        "reaches": p.reaches, "length": p.length, "valley_length": p.valley_length,
        "valley_scale": p.valley_scale, "sinuosity": p.sinuosity, "sinuosity_by_scale": p.sinuosity_by_scale,
        "meander_by_spectrum": p.wavelength_spectrum.as_ref().map(meander),
        "meander_by_inflections": p.wavelength_inflections.as_ref().map(meander),
        "bend_radius_quartiles": p.radius, "bends": p.bends, "wavelength_in_widths": p.wavelength_widths,
        "width": p.width.as_ref().map(|w| json!({
            "n": w.n, "n_eff": w.n_eff, "mean": w.mean, "mean_ci95": w.mean_ci95, "quartiles": w.quartiles,
        })),
    })
}

fn range(r: &Range) -> Value {
    json!([r.least, r.middle, r.greatest])
}

fn palaeo_flow(n: &NetworkFinding) -> Value {
    let (ask, flow) = match &n.flow {
        Err(why) => return json!({ "refused": why }),
        Ok(both) => both,
    };
    let PalaeoFlow {
        depth_m,
        velocity,
        froude,
        discharge,
        discharge_by_width,
        discharge_by_manning,
        grain_m,
        shares,
        ..
    } = flow;
    json!({
        "gravity_m_per_s2": ask.gravity, "width_m": ask.width_m, "width_to_depth": ask.width_to_depth,
        "slope": ask.slope, "friction": ask.friction, "liquid_density_kg_per_m3": ask.liquid_density,
        "grain_density_kg_per_m3": ask.grain_density, "critical_shields": ask.shields,
        "depth_m": range(depth_m), "velocity_m_per_s": range(velocity), "froude": range(froude),
        "discharge_m3_per_s": range(discharge), "discharge_by_width_m3_per_s": range(discharge_by_width),
        "discharge_by_manning_m3_per_s": range(discharge_by_manning), "grain_m": range(grain_m),
        "shares_of_spread": shares.iter().map(|(name, share)| json!({ "of": name, "share": share })).collect::<Vec<_>>(),
    })
}

fn agreement(id: u32, name: &str, a: &Agreement) -> Value {
    json!({
        "with": id, "name": name, "tolerance": a.tolerance, "found": a.found, "confirmed": a.confirmed,
        "mean_distance": a.mean_distance, "same_sense": a.same_sense, "same_order": a.same_order,
        "junctions": a.junctions, "lengths": a.lengths,
    })
}

/// A reach's ends and evidence of its sense in one text: `elevation +20.0, widening -0.4`.
pub fn evidence(reach: &Reach) -> String {
    let pieces = reach.sense.evidence.iter().map(|e| format!("{} {:+.1}", e.kind.in_words(), e.ln_odds));
    pieces.collect::<Vec<_>>().join(", ")
}

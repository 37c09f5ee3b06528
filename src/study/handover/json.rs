//! `findings.json`: the numbers of a run, versioned, SI units in the names, angles in degrees from
//! true north. `docs/findings.md` describes every member.

use serde_json::{Value, json};

use super::sand;
use crate::ground::{Axis, Caution, LengthUnit};
use crate::study::{
    DriftFinding, Findings, PatchFinding, RasterFinding, Sheet, SpectrumFinding, TogetherFinding,
    TrendFinding, VerdictFinding, WindFinding,
};

use super::comparisons::comparisons;
use super::networks::networks;
use super::pattern_light;
use super::populations;
use super::records;
use super::regimes::backwards;

/// The version of the layout.
pub const FORMAT: u32 = 1;

/// The whole document, with a final newline.
pub fn findings_json(sheet: &Sheet, findings: &Findings) -> String {
    let document = json!({
        "format": FORMAT,
        "program": { "name": "ventifact", "version": env!("CARGO_PKG_VERSION") },
        "sheet_fingerprint": findings.sheet_fingerprint,
        "seed": sheet.seed,
        "rasters": findings.rasters.iter().map(raster).collect::<Vec<_>>(),
        "winds": findings.winds.iter().map(wind).collect::<Vec<_>>(),
        "patches": findings.patches.iter().map(|p| patch(p, findings)).collect::<Vec<_>>(),
        "together": together(&findings.together),
        "regimes": findings.together.regimes.iter().map(backwards).collect::<Vec<_>>(),
        "networks": networks(findings),
        "recoveries": pattern_light::recoveries(findings),
        "comparisons": comparisons(findings),
        "errors": findings.failures.iter().map(|f| json!({ "what": f.what, "why": f.why })).collect::<Vec<_>>(),
    });
    let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
    text.push('\n');
    text
}

fn raster(r: &RasterFinding) -> Value {
    json!({
        "id": r.id, "name": r.name, "path": r.path, "width": r.width, "height": r.height, "bands": r.bands,
        "sample": r.sample, "pixel_m": r.pixel_m, "body": r.body, "projection": r.projection,
        "nodata": r.nodata.map(number_or_name), "valid_fraction": r.valid_fraction,
        "cautions": cautions(&r.cautions),
    })
}

/// JSON has no NaN: the nodata value is then given by name.
fn number_or_name(x: f64) -> Value {
    if x.is_finite() { json!(x) } else { json!(x.to_string()) }
}

fn cautions(list: &[Caution]) -> Value {
    json!(list)
}

fn degrees(axis: Option<Axis>) -> Value {
    json!(axis.map(Axis::deg))
}

fn patch(p: &PatchFinding, findings: &Findings) -> Value {
    let metres = p.unit == LengthUnit::Metre;
    let caveats: Vec<_> = p.cautions.iter().cloned().chain(pattern_light::caveat(findings, p.id)).collect();
    json!({
        "id": p.id, "name": p.name, "raster": p.raster, "fingerprint": p.fingerprint,
        "length_unit": p.unit,
        "area_m2": metres.then_some(p.area), "area_px": (!metres).then_some(p.area),
        "valid_fraction": p.valid_fraction,
        "centre_lonlat_deg": p.centre.map(|c| [c.lon, c.lat]),
        "trend": trend(&p.trend), "spectrum": spectrum(&p.spectrum, metres),
        "verdicts": p.verdicts.iter().map(verdict).collect::<Vec<_>>(),
        "backwards": p.backwards.as_ref().map(backwards),
        "birth": p.birth.iter().map(sand::birth).collect::<Vec<_>>(),
        "finding": p.sentence, "cautions": caveats,
        "light": pattern_light::light(p.pattern.light.as_ref()),
        "crests": super::crests::json(&p.crests),
        "scales": populations::scales(p), "plateaus": populations::plateaus(p),
        "populations": populations::populations(p),
        "obstacles": p.obstacles.as_ref().map(|o| super::obstacles::json(o, metres)),
    })
}

pub(super) fn trend(t: &TrendFinding) -> Value {
    json!({
        "defined": t.defined, "axis_deg": degrees(t.axis), "ci95_half_deg": t.ci95_half_deg,
        "ci95_source": t.ci95_source,
        "resultant_length": t.resultant_length, "resultant_length_all": t.resultant_length_all, "kappa_doubled": t.kappa_doubled, "spread_deg": t.spread_deg,
        "n": t.n, "n_all": t.n_all, "n_eff": t.n_eff, "rayleigh_p": t.rayleigh_p,
        "modes": t.modes.iter().map(|m| json!({
            "axis_deg": m.axis.deg(), "weight": m.weight, "kappa_doubled": m.kappa_doubled,
        })).collect::<Vec<_>>(),
        "gradient_scale_px": t.gradient_scale_px, "integration_scale_px": t.integration_scale_px,
        "node_step_px": t.node_step_px, "coherence_floor": t.coherence_floor,
    })
}

fn spectrum(s: &SpectrumFinding, metres: bool) -> Value {
    let (spacing_m, spacing_px) = if metres { (s.spacing, None) } else { (None, s.spacing) };
    let (ci_m, ci_px) = if metres { (s.spacing_ci95, None) } else { (None, s.spacing_ci95) };
    json!({
        "defined": s.defined, "axis_deg": degrees(s.axis), "axis_ci95_half_deg": s.axis_ci95_half_deg,
        "spacing_m": spacing_m, "spacing_ci95_m": ci_m, "spacing_px": spacing_px, "spacing_ci95_px": ci_px,
        "p": s.p, "spread_deg": s.spread_deg, "windows": s.windows, "windows_with_peak": s.windows_with_peak,
        "window_px": s.window_px, "cycles_per_window": s.cycles,
    })
}

pub(super) fn verdict(v: &VerdictFinding) -> Value {
    let classes = |p: [f64; 3]| json!({ "longitudinal": p[0], "oblique": p[1], "transverse": p[2] });
    json!({
        "winds": v.winds, "winds_name": v.winds_name, "refused": v.refused,
        "rdd_deg": v.toward.map(|a| a.deg()), "rdp_over_dp": v.ratio,
        "obliquity_deg": v.obliquity_deg, "ci95_deg": v.obliquity_ci95_deg,
        "probabilities": v.probabilities.map(classes), "priors": classes(v.class_priors),
        "alignment_strength": v.alignment_strength,
        "elongation": v.elongation.map(|e| json!({
            "toward_deg": e.toward.deg(), "separation_deg": e.separation_deg, "ci95_deg": e.ci95_deg,
            "p_within_margin": e.within_margin,
        })),
        "building": {
            "crossed": v.building.crossed, "extended": v.building.extended, "stated": v.building.stated,
            "random": v.building.random,
        },
        "supply_ln": v.supply_ln, "growth_ratio": v.growth_ratio,
        "migration": v.migration.iter().map(|m| json!({
            "trend_deg": m.trend.deg(), "share": m.share, "toward_deg": m.toward.map(|a| a.deg()),
        })).collect::<Vec<_>>(),
        "flips": v.flips.iter().map(|f| json!({
            "parameter": f.parameter, "now": f.now, "at": f.at, "change": f.change, "reach": f.reach,
        })).collect::<Vec<_>>(),
        "theories": v.theories.iter().map(|t| json!({
            "name": t.name, "method": t.method, "axis_deg": degrees(t.axis),
            "toward_deg": t.toward.map(|a| a.deg()), "extends": t.extends, "strength": t.strength,
            "ties_deg": t.ties.iter().map(|a| a.deg()).collect::<Vec<_>>(), "spread_deg": t.spread_deg,
            "equivalence": t.equivalence.map(|e| json!({
                "p": e.p, "ci90_deg": e.ci90, "equivalent": e.equivalent,
            })),
            "prior": t.prior, "posterior": t.posterior, "ln_bayes_factor": t.ln_bayes_factor,
        })).collect::<Vec<_>>(),
        "cautions": cautions(&v.cautions),
    })
}

fn wind(w: &WindFinding) -> Value {
    json!({
        "id": w.id, "name": w.name, "rows": w.rows, "used": w.used, "calm": w.calm,
        "set_aside": w.set_aside.iter().map(|s| json!({ "code": s.code, "count": s.count, "text": s.text })).collect::<Vec<_>>(),
        "span_unix_s": w.span, "interval_s": w.interval_s,
        "drift_potential": w.fryberger.as_ref().map(drift), "flux": drift(&w.flux), "law": w.law,
        "threshold_ustar_m_per_s": w.threshold_ustar, "threshold_speed_m_per_s": w.threshold_speed_at_height,
        "seasons": w.seasons.iter().map(|s| json!({ "name": s.name, "flux": drift(&s.drift) })).collect::<Vec<_>>(),
        "storm_speed_m_per_s": w.storm_speed, "strongest_season": w.season,
        "sensitivity": w.sensitivity.iter().map(|s| json!({
            "law": s.law, "threshold": s.threshold, "threshold_ustar_m_per_s": s.threshold_ustar,
            "ratio": s.drift.ratio, "toward_deg": s.drift.toward.map(|a| a.deg()), "total": s.drift.total,
            "unit": s.drift.unit,
        })).collect::<Vec<_>>(),
        "sand": w.sand.as_ref().map(sand::sand),
        "calendar": w.calendar.as_ref().map(records::calendar),
        "thinning": w.thinning.as_ref().map(records::thinning),
        "rounding": records::rounding(&w.rounding),
        "gusts": w.gusts.as_ref().map(|g| json!({ "rows": g.rows, "factor": g.factor, "flux_at_most": drift(&g.drift) })),
        "cautions": cautions(&w.cautions),
    })
}

fn together(t: &TogetherFinding) -> Value {
    json!({
        "joint": t.joint.iter().map(|j| json!({
            "winds": j.winds, "winds_name": j.winds_name, "finding": j.sentence,
            "trends": j.trends.iter().map(|t| json!({
                "name": t.name, "axis_deg": t.axis.deg(), "supply_ln": t.supply_ln,
            })).collect::<Vec<_>>(),
            "theories": j.theories.iter().map(|t| json!({
                "name": t.name, "posterior": t.posterior, "ln_bayes_factor": t.ln_bayes_factor,
            })).collect::<Vec<_>>(),
        })).collect::<Vec<_>>(),
        "discoveries": t.discoveries.iter().map(|d| json!({
            "patch": d.patch, "name": d.name, "p": d.p, "q": d.q, "claimed": d.claimed,
        })).collect::<Vec<_>>(),
    })
}

pub(super) fn drift(d: &DriftFinding) -> Value {
    json!({
        "unit": d.unit, "total": d.total, "resultant": d.resultant, "ratio": d.ratio, "ratio_ci95": d.ratio_ci95,
        "toward_deg": d.toward.map(|a| a.deg()), "toward_ci95_half_deg": d.toward_ci95_half_deg,
    })
}

//! The sand of a wind record and the birth of a spacing, in `findings.json`.

use serde_json::{Value, json};

use crate::study::{BirthFinding, Doubtful, SandFinding};

pub fn sand(s: &SandFinding) -> Value {
    json!({
        "body": s.body, "air_density_kg_per_m3": s.air.density, "air_viscosity_pa_s": s.air.viscosity,
        "gravity_m_per_s2": s.gravity,
        "thresholds": s.thresholds.iter().map(|t| json!({
            "law": t.law, "method": t.method, "ustar_m_per_s": doubtful(t.ustar),
            "speed_at_mast_m_per_s": doubtful(t.speed_at_mast), "speed_at_10_m_m_per_s": doubtful(t.speed_at_10_m),
        })).collect::<Vec<_>>(),
        "settling_m_per_s": s.settling_m_s, "saturation_length_m": s.saturation_length_m,
        "first_waves": s.first_waves.iter().map(|w| json!({
            "rule": w.rule, "wavelength_m": w.wavelength_m, "shortest_m": w.shortest_m,
        })).collect::<Vec<_>>(),
        "first_wave_m": s.first_wave_m, "shortest_wave_m": s.shortest_wave_m,
    })
}

pub fn birth(b: &BirthFinding) -> Value {
    json!({
        "winds": b.winds, "winds_name": b.winds_name, "standing": b.standing.key(), "ratio": b.ratio,
        "finding": b.sentence,
    })
}

fn doubtful(d: Doubtful) -> Value {
    json!({ "value": d.value, "low": d.low, "high": d.high })
}

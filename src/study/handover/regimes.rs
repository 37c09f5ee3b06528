//! The two-wind regimes in `findings.json`.

use serde_json::{Value, json};

use crate::ground::Axis;
use crate::science::alignment::backwards::Regimes;
use crate::study::BackwardsFinding;

/// One map with what it rests on; `docs/findings.md` describes every member.
pub fn backwards(found: &BackwardsFinding) -> Value {
    let r = &found.regimes;
    let classes = |p: [f64; 3]| json!({ "longitudinal": p[0], "oblique": p[1], "transverse": p[2] });
    let interval = |of: &dyn Fn(f64) -> f64| json!([of(0.025), of(0.5), of(0.975)]);
    // The map is worth its room only where it differs from the prior.
    let map: Option<Vec<f64>> =
        found.tells().then(|| r.map.iter().map(|share| (share * 1e7).round() / 1e7).collect());
    json!({
        "name": found.name, "patches": found.patches,
        "trends": found.trends.iter().map(|(name, o)| json!({
            "name": name, "axis_deg": Axis::deg(o.axis), "kappa_mean_doubled": o.kappa, "cover": o.cover,
            "sense": o.sense,
        })).collect::<Vec<_>>(),
        "flux_up": r.flux_up.iter().map(|(ratio, p)| json!({ "ratio": ratio, "probability": p })).collect::<Vec<_>>(),
        "divergence_deg": interval(&|q| r.divergence_quantile(q)),
        "rdp_over_dp": interval(&|q| r.ratio_quantile(q, false)),
        "rdp_over_dp_prior": interval(&|q| r.ratio_quantile(q, true)),
        "drift_arcs95_deg": found.drift_arcs().iter().map(|a| [a.from_deg, a.span_deg]).collect::<Vec<_>>(),
        "probabilities": classes(r.classes), "priors": classes(r.class_priors),
        "map_bits": r.map_bits, "drift_bits": r.resultant_bits,
        "ln_bayes_factor": r.ln_bayes_factor, "ln_fit": r.ln_fit,
        "map": map, "map_columns": Regimes::COLUMNS, "map_rows": Regimes::ROWS,
        "forks": found.fork_counts().iter().map(|([with, against], p)| json!({ "with": with, "against": against, "p": p })).collect::<Vec<_>>(),
        "cautions": r.cautions,
    })
}

//! The regimes page without drawing: what a picked regime of two winds would make of a patch.

use crate::plate::numbers;
use crate::science::alignment::backwards::{Implied, Lie, implied, likeliest_lie};
use crate::study::{BackwardsFinding, Settings, arc_words};

use super::facts::Fact;
use super::view::PickedRegime;

/// A regime laid on the ground as fits a patch best.
#[derive(Clone, Debug, PartialEq)]
pub struct Laid {
    pub lie: Lie,
    pub implied: Implied,
}

/// The likeliest lie of `picked` under the trends found, and what it would make there.
pub fn laid(found: &BackwardsFinding, settings: &Settings, picked: PickedRegime) -> Laid {
    let PickedRegime { divergence_deg, ratio } = picked;
    let flux_up = settings.backwards.flux_up;
    let lie = likeliest_lie(&found.observed(), &found.settings, divergence_deg, ratio, flux_up);
    let turn = if lie.clockwise { divergence_deg } else { -divergence_deg };
    Laid { lie, implied: implied(lie.dominant, turn, ratio, flux_up) }
}

/// One line for the pointer over the map.
pub fn readout(found: &BackwardsFinding, settings: &Settings, at: PickedRegime) -> String {
    let Laid { implied, .. } = laid(found, settings, at);
    let trend =
        implied.bed.first().map_or_else(|| "–".into(), |a| format!("{:.0}°", a.deg().round() % 180.0));
    format!(
        "divergence {:.0}°, N {:.2}: RDP/DP {:.2}, trend {trend}, obliquity {:.0}°",
        at.divergence_deg,
        at.ratio,
        implied.resultant.map_or(0.0, |r| r.1),
        implied.obliquity_deg
    )
}

/// What the trends told.
pub fn facts(found: &BackwardsFinding) -> Vec<Fact> {
    let r = &found.regimes;
    let method = "alignment.backwards";
    let range = |low: f64, middle: f64, high: f64, decimals: usize, unit: &str| {
        let f = |v| numbers::fixed(v, decimals);
        format!("{}{unit} ({}{unit} to {}{unit})", f(middle), f(low), f(high))
    };
    let divergence = |q| r.divergence_quantile(q);
    let ratio = |q| r.ratio_quantile(q, false);
    let arcs: Vec<String> = found.drift_arcs().iter().map(arc_words).collect();
    let classes: Vec<String> = ["longitudinal", "oblique", "transverse"]
        .iter()
        .zip(r.classes.iter().zip(r.class_priors))
        .map(|(name, (p, prior))| {
            format!("{name} {} (map: {})", numbers::percent(*p), numbers::percent(prior))
        })
        .collect();
    let mut facts = vec![
        Fact {
            label: "Drift toward",
            value: arcs.join(" or "),
            hint: "Shortest arcs that hold 95 % of the chance of the resultant's azimuth.",
            method,
        },
        Fact {
            label: "RDP/DP",
            value: range(ratio(0.025), ratio(0.5), ratio(0.975), 2, ""),
            hint: "Median and 95 % of the resultant over the total drift.",
            method,
        },
        Fact {
            label: "Divergence",
            value: range(divergence(0.025), divergence(0.5), divergence(0.975), 0, "°"),
            hint: "Median and 95 % of the angle between the two winds.",
            method,
        },
        Fact {
            label: "Classes",
            value: classes.join(", "),
            hint: "Obliquity of gross transport to the resultant; in brackets the areas of the map, a choice of prior and no frequency in nature.",
            method,
        },
        Fact {
            label: "Told by the trends",
            value: format!(
                "{} bits of divergence and ratio, {} of the drift",
                numbers::fixed(r.map_bits, 2),
                numbers::fixed(r.resultant_bits, 2)
            ),
            hint: "How far the trends moved the map and the drift's azimuth from the prior; 0 is not at all.",
            method,
        },
    ];
    for ([with, against], p) in found.fork_counts() {
        facts.push(Fact {
            label: "Forks",
            value: format!("{with} for the sense, {against} against: p = {}", numbers::p_value(p)),
            hint: "Two-sided chance of a count as uneven from a toss of a coin.",
            method: "alignment.forks",
        });
    }
    facts
}

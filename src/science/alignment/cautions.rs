//! What weakens a verdict that is valid.

use crate::ground::Caution;

use super::foresight::Foresight;
use super::judge::{TheoryJudgement, VerdictSettings};
use super::theory::{Prediction, Theory};

/// Weaknesses of the winds themselves.
pub(super) fn of_regime(foresight: &Foresight, strength: f64, settings: &VerdictSettings) -> Vec<Caution> {
    let mut cautions = Vec::new();
    if !foresight.drawn {
        cautions.push(Caution::new(
            "winds-taken-as-certain",
            "The record cannot be resampled: the prediction carries the model error only.",
        ));
    }
    match foresight.drift {
        None => cautions.push(Caution::new(
            "no-resultant",
            "The flows cancel: there is no resultant, and no obliquity to it.",
        )),
        Some((_, ratio)) if ratio < 0.3 => cautions.push(Caution::new(
            "low-ratio",
            format!(
                "Only {:.0} % of the sand motion is left after cancelling: the resultant stands for little.",
                100.0 * ratio
            ),
        )),
        Some(_) => {}
    }
    cautions.extend(Theory::ALL.iter().zip(&foresight.whole).filter_map(|(t, p)| rivals(*t, p.as_ref()?)));
    if strength < 2.0 * settings.least_strength {
        cautions.push(Caution::new(
            "low-strength",
            format!("Alignment strength {strength:.2}: the winds hardly prefer a trend."),
        ));
    }
    cautions
}

/// Other ways a theory allows that count for at least a fifth of it.
fn rivals(theory: Theory, prediction: &Prediction) -> Option<Caution> {
    let others: Vec<String> = prediction.ways[1..]
        .iter()
        .filter(|way| way.share >= 0.2)
        .map(|way| format!("{:.0}°", way.axis.deg()))
        .collect();
    (!others.is_empty()).then(|| {
        Caution::new(
            "tied-trends",
            format!(
                "“{}” predicts {} as well as {:.0}°; both are weighed.",
                theory.name(),
                others.join(", "),
                prediction.main().axis.deg()
            ),
        )
    })
}

/// Weaknesses of what the theories say. Only theories with a hundredth of the weight are looked at.
pub(super) fn of_theories(
    theories: &[TheoryJudgement],
    clouds: &[Vec<Option<Prediction>>],
    settings: &VerdictSettings,
) -> Vec<Caution> {
    let mut cautions = Vec::new();
    for (theory, cloud) in theories.iter().zip(clouds).filter(|(t, _)| t.posterior >= 0.01) {
        let Some(axis) = theory.axis() else { continue };
        let strays =
            |p: &Option<Prediction>| p.as_ref().is_none_or(|p| p.main().axis.separation(axis) > 30.0);
        let far = cloud.iter().filter(|p| strays(p)).count();
        if far * 10 > cloud.len() {
            cautions.push(Caution::new(
                "unsteady-prediction",
                format!(
                    "In {:.0} % of the draws “{}” predicts a trend more than 30° from that of the record.",
                    100.0 * far as f64 / cloud.len() as f64,
                    theory.name()
                ),
            ));
        }
    }
    let mut ranked: Vec<&TheoryJudgement> = theories.iter().collect();
    ranked.sort_by(|a, b| b.posterior.total_cmp(&a.posterior));
    cautions.extend(same_prediction(&ranked, settings.margin_deg));
    if let [first, second, ..] = ranked[..]
        && first.posterior < 3.0 * second.posterior
    {
        cautions.push(Caution::new(
            "undecided",
            format!(
                "“{}” ({:.0} %) and “{}” ({:.0} %) stay close: the verdict between them is open.",
                first.name(),
                100.0 * first.posterior,
                second.name(),
                100.0 * second.posterior
            ),
        ));
    }
    cautions
}

/// Theories that say the same as the leading one.
fn same_prediction(ranked: &[&TheoryJudgement], margin: f64) -> Option<Caution> {
    let leader = ranked.first()?;
    let axis = leader.axis()?;
    let same: Vec<String> = ranked[1..]
        .iter()
        .filter_map(|t| t.axis().map(|other| (t, other.separation(axis))))
        .filter(|(t, apart)| t.prior > 0.0 && *apart < margin)
        .map(|(t, apart)| format!("“{}” ({apart:.0}° away)", t.name()))
        .collect();
    (!same.is_empty()).then(|| {
        Caution::new(
            "same-prediction",
            format!(
                "These winds cannot tell “{}” from {}: the predicted trends are too near each other.",
                leader.name(),
                same.join(", ")
            ),
        )
    })
}

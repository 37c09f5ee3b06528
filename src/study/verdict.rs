//! A patch's trend judged by the records it is held against.

use crate::ground::{Stopped, Work};
use crate::numeric::bessel;
use crate::science::alignment::{self, Judgement, Refusal, TrendEvidence};

use super::winds::WindStudy;
use super::{Sheet, TheoryFinding, TrendFinding, VerdictFinding};

/// One verdict, or the words of its refusal.
///
/// # Errors
/// [`Stopped`].
pub fn verdict(
    sheet: &Sheet,
    trend: &TrendFinding,
    winds: &WindStudy,
    work: &Work,
) -> Result<VerdictFinding, Stopped> {
    let refused = |why: String| VerdictFinding {
        winds: winds.finding.id,
        winds_name: winds.finding.name.clone(),
        refused: Some(why),
        toward: winds.finding.flux.toward,
        ratio: winds.finding.flux.ratio,
        obliquity_deg: None,
        obliquity_ci95_deg: None,
        probabilities: None,
        class_priors: alignment::obliquity::RANDOM,
        theories: Vec::new(),
        alignment_strength: None,
        cautions: Vec::new(),
    };
    if winds.regime.iter().all(|flow| flow.weight == 0.0) {
        return Ok(refused("no drift, no verdict: no wind of the record moves sand".into()));
    }
    let Some(evidence) = evidence(trend) else {
        return Ok(refused("the patch has no preferred trend to judge".into()));
    };
    let s = &sheet.settings.verdict;
    let settings = alignment::VerdictSettings {
        model_error_deg: s.model_error_deg,
        tail_share: s.tail_share,
        priors: s.priors.to_vec(),
        margin_deg: s.margin_deg,
        least_strength: s.least_strength,
    };
    match alignment::judge(&evidence, &winds.regime, &winds.draws, &settings, work) {
        Ok(judgement) => Ok(finding(winds, judgement)),
        Err(Refusal::Stopped(stopped)) => Err(stopped),
        Err(refusal) => Ok(refused(refusal.to_string())),
    }
}

/// Concentration of the mean axis: κ_obs = n_eff κ A(κ), of the doubled angle (Fisher 1993).
fn evidence(trend: &TrendFinding) -> Option<TrendEvidence> {
    let kappa = trend.kappa_doubled?;
    Some(TrendEvidence {
        axis: trend.axis.filter(|_| trend.defined)?,
        kappa_mean: trend.n_eff * kappa * bessel::ratio(kappa),
        // An interval of all axes leaves the mean as good as unknown.
        half_ci: trend.ci95_half_deg.unwrap_or(90.0),
    })
}

fn finding(winds: &WindStudy, j: Judgement) -> VerdictFinding {
    VerdictFinding {
        winds: winds.finding.id,
        winds_name: winds.finding.name.clone(),
        refused: None,
        toward: j.toward,
        ratio: j.ratio,
        obliquity_deg: j.obliquity_deg,
        obliquity_ci95_deg: j.obliquity_ci95_deg,
        probabilities: j.probabilities,
        class_priors: j.class_priors,
        theories: j
            .theories
            .into_iter()
            .map(|t| TheoryFinding {
                name: t.name,
                method: t.method,
                axis: t.axis,
                ties: t.ties,
                spread_deg: t.spread_deg,
                prior: t.prior,
                posterior: t.posterior,
                ln_bayes_factor: t.ln_bayes_factor,
                cloud_deg: t.cloud_deg,
            })
            .collect(),
        alignment_strength: Some(j.alignment_strength),
        cautions: j.cautions,
    }
}

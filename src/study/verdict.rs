//! A patch's trend judged by the records it is held against.

use crate::ground::{Stopped, Work};
use crate::numeric::bessel;
use crate::science::alignment::{
    self, Judgement, RANDOM_AXIS, Theory, TheoryJudgement, TrendEvidence, together,
};

use super::winds::WindStudy;
use super::{
    ModeFinding, Patch, PopulationFinding, Sheet, TheoryFinding, TrendFinding, VerdictFinding,
    VerdictSettings, what_if,
};

/// One verdict, or the words of its refusal.
///
/// # Errors
/// [`Stopped`].
pub fn verdict(
    sheet: &Sheet,
    patch: &Patch,
    trend: &TrendFinding,
    winds: &WindStudy,
    work: &Work,
) -> Result<VerdictFinding, Stopped> {
    if winds.foresight.strength.is_none() {
        return Ok(refused(winds, "no drift, no verdict: no wind of the record moves sand".into()));
    }
    let Some(evidence) = evidence(trend) else {
        return Ok(refused(winds, "the patch has no preferred trend to judge".into()));
    };
    let settings = settings(&sheet.settings.verdict);
    match alignment::judge(&evidence, &winds.foresight, patch.stated_axis, &settings) {
        Ok(judgement) => {
            let mut found = finding(winds, judgement);
            found.supply_ln = together(&[evidence], &winds.foresight, &settings).supply.first().copied();
            let leader = found.theories.iter().max_by(|a, b| a.posterior.total_cmp(&b.posterior));
            let leads = leader.map_or(RANDOM_AXIS, |t| t.name);
            found.flips = what_if::flips(&evidence, patch.stated_axis, leads, winds, &settings, work)?;
            Ok(found)
        }
        Err(refusal) => Ok(refused(winds, refusal.to_string())),
    }
}

/// The settings as the family takes them.
pub fn settings(s: &VerdictSettings) -> alignment::VerdictSettings {
    alignment::VerdictSettings {
        model_error_deg: s.model_error_deg,
        tail_share: s.tail_share,
        priors: s.priors.weights(),
        margin_deg: s.margin_deg,
        least_strength: s.least_strength,
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

/// Every trend of a patch, named: its populations where it has some; else the modes of its nodes where two or more
/// hold a tenth each; else its mean.
pub fn evidences(
    name: &str,
    trend: &TrendFinding,
    populations: &[PopulationFinding],
) -> Vec<(String, TrendEvidence)> {
    if populations.len() > 1 {
        let one = |p: &PopulationFinding| Some((format!("{name}, {}", p.name), evidence(&p.trend)?));
        return populations.iter().filter_map(one).collect();
    }
    let heavy: Vec<&ModeFinding> = trend.modes.iter().filter(|m| m.weight >= 0.1).collect();
    if heavy.len() < 2 {
        return evidence(trend).map(|e| (name.to_owned(), e)).into_iter().collect();
    }
    let of_mode = |mode: &&ModeFinding| {
        let (kappa, n) = (mode.kappa_doubled, trend.n_eff * mode.weight);
        let evidence =
            TrendEvidence { axis: mode.axis, kappa_mean: n * kappa * bessel::ratio(kappa), half_ci: 0.0 };
        (format!("{name}, trend at {:.0}°", mode.axis.deg()), evidence)
    };
    heavy.iter().map(of_mode).collect()
}

fn refused(winds: &WindStudy, why: String) -> VerdictFinding {
    VerdictFinding {
        winds: winds.finding.id,
        winds_name: winds.finding.name.clone(),
        refused: Some(why),
        toward: winds.finding.flux.toward,
        ratio: winds.finding.flux.ratio,
        obliquity_deg: None,
        obliquity_ci95_deg: None,
        probabilities: None,
        class_priors: alignment::obliquity::RANDOM,
        elongation: None,
        theories: Vec::new(),
        building: alignment::Building::default(),
        supply_ln: None,
        growth_ratio: winds.foresight.growth_ratio,
        migration: winds.foresight.migration.clone(),
        alignment_strength: None,
        flips: Vec::new(),
        cautions: Vec::new(),
    }
}

fn finding(winds: &WindStudy, j: Judgement) -> VerdictFinding {
    VerdictFinding {
        refused: None,
        toward: j.toward,
        ratio: j.ratio,
        obliquity_deg: j.obliquity_deg,
        obliquity_ci95_deg: j.obliquity_ci95_deg,
        probabilities: j.probabilities,
        class_priors: j.class_priors,
        elongation: j.elongation,
        theories: j.theories.into_iter().map(theory).collect(),
        building: j.building,
        alignment_strength: Some(j.alignment_strength),
        cautions: j.cautions,
        ..refused(winds, String::new())
    }
}

fn theory(t: TheoryJudgement) -> TheoryFinding {
    TheoryFinding {
        name: t.theory.map_or(RANDOM_AXIS, Theory::name),
        method: t.theory.map_or("", Theory::method),
        extends: t.theory.is_some_and(Theory::extends),
        axis: t.axis(),
        toward: t.ways.first().and_then(|way| way.toward),
        ties: t.ways.iter().skip(1).map(|way| way.axis).collect(),
        strength: t.strength,
        spread_deg: t.spread_deg,
        equivalence: t.equivalence,
        prior: t.prior,
        posterior: t.posterior,
        ln_bayes_factor: t.ln_bayes_factor,
        cloud_deg: t.cloud_deg,
    }
}

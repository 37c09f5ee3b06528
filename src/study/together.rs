//! What the patches say together: one theory for all trends under the same winds, and the tests for a
//! preferred trend with false discoveries controlled.

use std::sync::Arc;

use crate::science::alignment::equivalence::false_discovery;
use crate::science::alignment::{RANDOM_AXIS, Theory, TrendEvidence, together as weigh};

use super::backwards;
use super::verdict::{evidences, settings};
use super::winds::WindStudy;
use super::{Discovery, JointFinding, JointTheory, JointTrend, PatchFinding, Sheet, TogetherFinding};

/// Weighs all patches of a sheet.
pub fn together(sheet: &Sheet, patches: &[&PatchFinding], winds: &[Arc<WindStudy>]) -> TogetherFinding {
    TogetherFinding {
        joint: winds.iter().filter_map(|record| joint(sheet, patches, record)).collect(),
        discoveries: discoveries(patches),
        regimes: backwards::joint(sheet, patches),
    }
}

fn joint(sheet: &Sheet, patches: &[&PatchFinding], winds: &WindStudy) -> Option<JointFinding> {
    let judged = |p: &&&PatchFinding| {
        let own = p.verdicts.iter().chain(p.pattern.populations.iter().flat_map(|q| &q.verdicts));
        own.into_iter().any(|v| v.winds == winds.finding.id && v.refused.is_none())
    };
    let trends: Vec<(String, TrendEvidence)> = patches
        .iter()
        .filter(judged)
        .flat_map(|p| evidences(&p.name, &p.trend, &p.pattern.populations))
        .collect();
    if trends.len() < 2 {
        return None;
    }
    let evidence: Vec<TrendEvidence> = trends.iter().map(|(_, e)| *e).collect();
    let weighed = weigh(&evidence, &winds.foresight, &settings(&sheet.settings.verdict));
    let names = Theory::ALL.iter().map(|t| t.name()).chain([RANDOM_AXIS]);
    let theories: Vec<JointTheory> = names
        .zip(weighed.posteriors.iter().zip(&weighed.ln_bayes_factors))
        .map(|(name, (posterior, ln_bayes_factor))| JointTheory {
            name,
            posterior: *posterior,
            ln_bayes_factor: *ln_bayes_factor,
        })
        .collect();
    let leader = theories.iter().max_by(|a, b| a.posterior.total_cmp(&b.posterior))?;
    let sentence = format!(
        "If one theory made all {} trends under {}, it is “{}” ({:.0} %).",
        trends.len(),
        winds.finding.name,
        leader.name,
        100.0 * leader.posterior
    );
    let trend = |((name, evidence), supply_ln): ((String, TrendEvidence), f64)| JointTrend {
        name,
        axis: evidence.axis,
        supply_ln,
    };
    Some(JointFinding {
        winds: winds.finding.id,
        winds_name: winds.finding.name.clone(),
        trends: trends.into_iter().zip(weighed.supply).map(trend).collect(),
        sentence,
        theories,
    })
}

/// Patches too small to be tested take no part.
fn discoveries(patches: &[&PatchFinding]) -> Vec<Discovery> {
    let tested: Vec<(&PatchFinding, f64)> =
        patches.iter().filter_map(|p| Some((*p, p.trend.rayleigh_p?))).collect();
    let p: Vec<f64> = tested.iter().map(|(_, p)| *p).collect();
    tested
        .iter()
        .zip(false_discovery(&p))
        .map(|((patch, p), q)| Discovery {
            patch: patch.id,
            name: patch.name.clone(),
            p: *p,
            q,
            claimed: patch.trend.defined,
        })
        .collect()
}

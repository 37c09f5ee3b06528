//! Backwards: which two-wind regimes could have made a patch's trend, or the trends of several patches
//! together, with no wind record.

use crate::ground::{Azimuth, Stopped, Work};
use crate::science::alignment::TrendEvidence;
use crate::science::alignment::backwards::{
    self, Arc, BackwardsSettings, Observed, Regimes, WindPrior, arcs, fork_p,
};
use crate::science::alignment::likelihood::{axial_sd_of_kappa, kappa_of_axial_sd};

use super::verdict::evidences;
use super::{Id, Patch, PatchFinding, PopulationFinding, Sheet, TrendFinding};

/// The regimes consistent with one patch, or with several.
#[derive(Clone, Debug, PartialEq)]
pub struct BackwardsFinding {
    /// What was held together: the patch, the tag, or "all patches".
    pub name: String,
    pub patches: Vec<Id>,
    /// Every trend that counted, named.
    pub trends: Vec<(String, Observed)>,
    pub settings: BackwardsSettings,
    pub regimes: Regimes,
}

impl BackwardsFinding {
    pub fn observed(&self) -> Vec<Observed> {
        self.trends.iter().map(|t| t.1).collect()
    }

    /// Shortest arcs that hold 95 % of the chance of the drift's azimuth.
    pub fn drift_arcs(&self) -> Vec<Arc> {
        arcs(&self.regimes.resultant, 0.95)
    }

    /// p of each fork count stated, two-sided.
    pub fn fork_counts(&self) -> Vec<([u32; 2], f64)> {
        let counts = self.trends.iter().filter_map(|(_, o)| o.sense?.forks);
        counts.map(|[a, b]| ([a, b], fork_p(a, b))).collect()
    }

    /// Whether the trends told anything about divergence and ratio.
    pub fn tells(&self) -> bool {
        !self.regimes.cautions.iter().any(|c| c.code == "regimes-untold")
    }
}

/// The regimes of one patch; `None` without a trend.
///
/// # Errors
/// [`Stopped`].
pub fn of_patch(
    sheet: &Sheet,
    patch: &Patch,
    trend: &TrendFinding,
    populations: &[PopulationFinding],
    work: &Work,
) -> Result<Option<BackwardsFinding>, Stopped> {
    let trends = trends(patch, trend, populations);
    if trends.is_empty() {
        return Ok(None);
    }
    finding(sheet, patch.name.clone(), vec![patch.id], trends, work).map(Some)
}

/// A patch and its trends by name.
type Judged<'a> = (&'a Patch, Vec<(String, Observed)>);

/// The regimes of patches that share a tag, or of all when no tag joins two with a trend. Takes some
/// ten milliseconds a group.
pub fn joint(sheet: &Sheet, found: &[&PatchFinding]) -> Vec<BackwardsFinding> {
    let judged: Vec<Judged> = found
        .iter()
        .filter_map(|f| sheet.patch(f.id).map(|p| (p, trends(p, &f.trend, &f.pattern.populations))))
        .filter(|(_, trends)| !trends.is_empty())
        .collect();
    let mut tags: Vec<&String> = judged.iter().flat_map(|(p, _)| &p.tags).collect();
    tags.sort();
    tags.dedup();
    let mut groups: Vec<(String, Vec<_>)> = tags
        .into_iter()
        .map(|tag| (tag.clone(), judged.iter().filter(|(p, _)| p.tags.contains(tag)).collect::<Vec<_>>()))
        .filter(|(_, members)| members.len() >= 2)
        .collect();
    if groups.is_empty() && judged.len() >= 2 {
        groups.push(("all patches".into(), judged.iter().collect()));
    }
    let of_group = |(name, members): (String, Vec<&Judged>)| {
        let ids = members.iter().map(|(p, _)| p.id).collect();
        let trends = members.iter().flat_map(|(_, t)| t.clone()).collect();
        finding(sheet, name, ids, trends, &Work::quiet()).ok()
    };
    groups.into_iter().filter_map(of_group).collect()
}

fn finding(
    sheet: &Sheet,
    name: String,
    patches: Vec<Id>,
    trends: Vec<(String, Observed)>,
    work: &Work,
) -> Result<BackwardsFinding, Stopped> {
    let settings = settings(sheet);
    let observed: Vec<Observed> = trends.iter().map(|t| t.1).collect();
    let regimes = backwards::backwards(&observed, &settings, work)?;
    Ok(BackwardsFinding { name, patches, trends, settings, regimes })
}

fn settings(sheet: &Sheet) -> BackwardsSettings {
    let (b, v) = (&sheet.settings.backwards, &sheet.settings.verdict);
    let mut flux_up = vec![b.least_flux_up, b.flux_up, b.greatest_flux_up];
    flux_up.dedup();
    BackwardsSettings {
        flux_up,
        // Without any error of the model a map of finite cells would miss every regime.
        model_error_deg: v.model_error_deg.max(1.0),
        tail_share: v.tail_share,
        wind: b
            .wind_from_deg
            .map(|from| WindPrior { toward: Azimuth::from_deg(from).reversed(), sd_deg: b.wind_sd_deg }),
    }
}

/// The trends of a patch with its cover; a stated sense goes to the trend it lies nearest.
fn trends(patch: &Patch, trend: &TrendFinding, populations: &[PopulationFinding]) -> Vec<(String, Observed)> {
    let found = evidences(&patch.name, trend, populations);
    let nearest = patch.sense.and_then(|sense| {
        let off = |e: &TrendEvidence| e.axis.separation(sense.toward.axis());
        let least = |a: &usize, b: &usize| off(&found[*a].1).total_cmp(&off(&found[*b].1));
        (0..found.len()).min_by(least)
    });
    let observed = |(k, (name, e)): (usize, &(String, TrendEvidence))| {
        let sd = axial_sd_of_kappa(e.kappa_mean).max(e.half_ci / 1.96);
        let one = Observed {
            axis: e.axis,
            kappa: e.kappa_mean.min(kappa_of_axial_sd(sd)),
            cover: patch.cover,
            sense: patch.sense.filter(|_| nearest == Some(k)),
        };
        (name.clone(), one)
    };
    found.iter().enumerate().map(observed).collect()
}

/// What a sentence says where no wind record judges the patch.
pub fn clause(found: &BackwardsFinding) -> String {
    let r = &found.regimes;
    if !found.tells() {
        return "without a wind record its trend alone leaves divergence and strength ratio of two winds open"
            .into();
    }
    let arcs: Vec<String> = found.drift_arcs().iter().map(arc_words).collect();
    format!(
        "without a wind record, two winds {:.0}° to {:.0}° apart with RDP/DP {:.2} to {:.2} and a drift toward {} would make it (95 %)",
        r.divergence_quantile(0.025),
        r.divergence_quantile(0.975),
        r.ratio_quantile(0.025, false),
        r.ratio_quantile(0.975, false),
        arcs.join(" or ")
    )
}

/// "20° to 64°", or "any azimuth".
pub fn arc_words(arc: &Arc) -> String {
    if arc.span_deg >= 360.0 {
        return "any azimuth".into();
    }
    let to = Azimuth::from_deg(arc.from_deg + arc.span_deg);
    format!("{:.0}° to {:.0}°", arc.from_deg.floor(), to.deg().ceil())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Axis, Polygon};
    use crate::science::alignment::backwards::{Cover, Sense, SenseKind, implied};

    fn trend(deg: f64) -> TrendFinding {
        TrendFinding {
            defined: true,
            axis: Some(Axis::from_deg(deg)),
            ci95_half_deg: Some(4.0),
            kappa_doubled: Some(6.0),
            n_eff: 60.0,
            ..TrendFinding::default()
        }
    }

    fn sheet(covers: &[Cover]) -> Sheet {
        let mut sheet = Sheet::empty("t");
        for (k, cover) in covers.iter().enumerate() {
            let name = format!("Patch {k}");
            let mut patch = Patch::new(Id(k as u32 + 1), name, Id(100), Polygon::rectangle(9.0, 9.0));
            patch.cover = *cover;
            sheet.patches.push(patch);
        }
        sheet
    }

    #[test]
    fn one_trend_says_so_and_none_has_no_finding() {
        let sheet = sheet(&[Cover::Unknown]);
        let quiet = Work::quiet();
        let found =
            of_patch(&sheet, &sheet.patches[0], &trend(40.0), &[], &quiet).expect("run").expect("a trend");
        assert!(!found.tells() && clause(&found).contains("leaves divergence"), "{}", clause(&found));
        let none = of_patch(&sheet, &sheet.patches[0], &TrendFinding::default(), &[], &quiet).expect("run");
        assert_eq!(none, None);
    }

    #[test]
    fn a_known_wind_and_a_sense_narrow_it_and_the_interval_caps_the_evidence() {
        let truth = implied(Azimuth::from_deg(40.0), 120.0, 2.0, 1.6);
        let finger = truth.finger.expect("a finger");
        let mut sheet = sheet(&[Cover::Starved]);
        sheet.settings.backwards.wind_from_deg = Some(220.0);
        sheet.settings.backwards.wind_sd_deg = 15.0;
        sheet.patches[0].sense = Some(Sense {
            toward: finger,
            evidence: SenseKind::Forks,
            chance_right: 0.9,
            forks: Some([14, 3]),
        });
        let trend = trend(finger.axis().deg());
        let found =
            of_patch(&sheet, &sheet.patches[0], &trend, &[], &Work::quiet()).expect("run").expect("a trend");
        assert!(found.tells(), "{:?}", found.regimes.map_bits);
        let text = clause(&found);
        assert!(text.contains("drift toward"), "{text}");
        assert!((axial_sd_of_kappa(found.trends[0].1.kappa) - 4.0 / 1.96).abs() < 0.01, "capped");
        assert_eq!(found.fork_counts()[0].0, [14, 3]);
    }
}

//! The one face of the family: a measured trend and a wind regime in, a verdict or a refusal out.

use crate::ground::{Axis, Azimuth, Caution, SandFlow, Stopped, Work};

use super::equivalence::{Equivalence, equivalence};
use super::gross_normal::{GrossNormal, gross_normal};
use super::likelihood::{Weighing, axial_sd_of_kappa, kappa_of_axial_sd, posteriors};
use super::obliquity::{Obliquity, RANDOM};
use super::resultant::resultant;
use super::theory::Theory;

/// A measured mean trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendEvidence {
    pub axis: Axis,
    /// Concentration of the mean axis (not of the axes), of the doubled angle: n_eff κ A(κ).
    pub kappa_mean: f64,
    /// Half width of its 95 % interval, degrees; where it is wider than `kappa_mean` says, it rules.
    pub half_ci: f64,
}

/// How theories are weighed.
#[derive(Clone, Debug, PartialEq)]
pub struct VerdictSettings {
    /// Axial standard deviation by which a right theory may still miss, degrees.
    pub model_error_deg: f64,
    /// Share of each prediction spread over all axes.
    pub tail_share: f64,
    /// Prior weights in the order of [`Theory::ALL`], then the random axis.
    pub priors: Vec<f64>,
    /// Margin within which two axes count as the same, degrees.
    pub margin_deg: f64,
    /// Alignment strength below which a predicted trend means nothing.
    pub least_strength: f64,
}

/// A trend judged by a wind regime.
#[derive(Clone, Debug, PartialEq)]
pub struct Judgement {
    /// Where the sand goes on balance; `None` when the flows cancel.
    pub toward: Option<Azimuth>,
    /// Resultant over total flow.
    pub ratio: Option<f64>,
    pub obliquity_deg: Option<f64>,
    /// Equal-tailed 95 % interval, from trend error and wind draws together.
    pub obliquity_ci95_deg: Option<[f64; 2]>,
    /// Longitudinal, oblique, transverse.
    pub probabilities: Option<[f64; 3]>,
    /// The same for an axis drawn at random.
    pub class_priors: [f64; 3],
    /// The theories in the order of [`Theory::ALL`], then the random axis.
    pub theories: Vec<TheoryJudgement>,
    pub alignment_strength: f64,
    pub cautions: Vec<Caution>,
}

/// One theory weighed.
#[derive(Clone, Debug, PartialEq)]
pub struct TheoryJudgement {
    pub name: &'static str,
    /// Id of its method record; empty for the random axis.
    pub method: &'static str,
    /// Predicted by the whole record.
    pub axis: Option<Axis>,
    pub ties: Vec<Axis>,
    /// Axial standard deviation of the predictions of the draws, degrees.
    pub spread_deg: Option<f64>,
    pub prior: f64,
    pub posterior: f64,
    pub ln_bayes_factor: f64,
    /// Predictions of the draws as angles from the record's resultant, at most 200 of them.
    pub cloud_deg: Vec<f32>,
    /// Whether the trend agrees with the prediction within the margin.
    pub equivalence: Option<Equivalence>,
}

/// Why no verdict is given.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Refusal {
    #[error("no drift: no wind of the record moves sand, so there is nothing to judge the trend by")]
    NoDrift,
    #[error(
        "the winds prefer no trend: alignment strength {strength:.3} is below {least}, so a predicted trend would mean nothing"
    )]
    Weak { strength: f64, least: f64 },
    #[error("the setting {setting} is {value}; it must lie {range}")]
    Setting { setting: &'static str, value: f64, range: &'static str },
    #[error(transparent)]
    Stopped(#[from] Stopped),
}

/// Predictions kept for show.
const SHOWN: usize = 200;

/// Judges a measured trend by a regime and its bootstrap draws.
///
/// Without draws the regime is taken as certain, and a caution says so.
///
/// # Errors
/// [`Refusal`] when there is no drift, the winds prefer no trend, a setting is out of range, or on
/// stop.
pub fn judge(
    evidence: &TrendEvidence,
    regime: &[SandFlow],
    draws: &[Vec<SandFlow>],
    settings: &VerdictSettings,
    work: &Work,
) -> Result<Judgement, Refusal> {
    check(settings)?;
    let across = gross_normal(regime).ok_or(Refusal::NoDrift)?;
    let strength = across.strength();
    if strength < settings.least_strength {
        return Err(Refusal::Weak { strength, least: settings.least_strength });
    }
    let net = resultant(regime);
    let mut cautions = regime_cautions(&across, net, settings);

    work.phase("judging theories", draws.len() as u64);
    let alone = [regime.to_vec()];
    let draws = if draws.is_empty() {
        cautions.push(Caution::new(
            "winds-taken-as-certain",
            "The record cannot be resampled: the prediction carries the model error only.",
        ));
        &alone[..]
    } else {
        draws
    };
    let mut drifts = Vec::with_capacity(draws.len());
    let mut clouds = vec![Vec::with_capacity(draws.len()); Theory::ALL.len()];
    for draw in draws {
        work.advance(1)?;
        drifts.extend(resultant(draw).map(|(toward, _)| toward.axis()));
        for (theory, cloud) in Theory::ALL.iter().zip(&mut clouds) {
            cloud.push(theory.predict(draw));
        }
    }

    let blur = (evidence.half_ci / 1.96).max(axial_sd_of_kappa(evidence.kappa_mean));
    let weighing = Weighing {
        trend: evidence.axis,
        kappa_observed: evidence.kappa_mean.min(kappa_of_axial_sd(blur)),
        kappa_model: kappa_of_axial_sd(settings.model_error_deg),
        tail_share: settings.tail_share,
    };
    let mut theories: Vec<TheoryJudgement> = Theory::ALL
        .iter()
        .zip(&clouds)
        .zip(&settings.priors)
        .map(|((theory, cloud), prior)| weigh(*theory, cloud, *prior, regime, net, blur, &weighing, settings))
        .collect();
    theories.push(TheoryJudgement {
        name: "random axis",
        method: "",
        axis: None,
        ties: Vec::new(),
        spread_deg: None,
        prior: settings.priors[Theory::ALL.len()],
        posterior: 0.0,
        ln_bayes_factor: 0.0,
        cloud_deg: Vec::new(),
        equivalence: None,
    });
    let sum: f64 = settings.priors.iter().sum();
    let factors: Vec<f64> = theories.iter().map(|t| t.ln_bayes_factor).collect();
    for (theory, posterior) in theories.iter_mut().zip(posteriors(&settings.priors, &factors)) {
        theory.posterior = posterior;
        theory.prior /= sum;
    }
    cautions.extend(theory_cautions(&theories, &clouds, settings));

    let obliquity = net.filter(|_| !drifts.is_empty()).map(|(toward, _)| {
        (evidence.axis.separation(toward.axis()), Obliquity::of(evidence.axis, blur, &drifts))
    });
    Ok(Judgement {
        toward: net.map(|n| n.0),
        ratio: net.map(|n| n.1),
        obliquity_deg: obliquity.as_ref().map(|o| o.0),
        obliquity_ci95_deg: obliquity.as_ref().map(|(_, o)| [o.quantile(0.025), o.quantile(0.975)]),
        probabilities: obliquity.as_ref().map(|(_, o)| o.classes()),
        class_priors: RANDOM,
        theories,
        alignment_strength: strength,
        cautions,
    })
}

fn check(settings: &VerdictSettings) -> Result<(), Refusal> {
    let wrong = |setting, value, range| Err(Refusal::Setting { setting, value, range });
    if !(settings.model_error_deg > 0.0 && settings.model_error_deg <= 45.0) {
        return wrong("model error", settings.model_error_deg, "above 0 and at most 45 degrees");
    }
    if !(settings.tail_share > 0.0 && settings.tail_share <= 1.0) {
        return wrong("tail share", settings.tail_share, "above 0 and at most 1");
    }
    if settings.priors.len() != Theory::ALL.len() + 1 {
        return wrong(
            "number of priors",
            settings.priors.len() as f64,
            "at the number of theories and one more",
        );
    }
    if let Some(bad) = settings.priors.iter().find(|p| !(p.is_finite() && **p >= 0.0)) {
        return wrong("prior", *bad, "at or above 0");
    }
    if settings.priors.iter().sum::<f64>() <= 0.0 {
        return wrong("sum of priors", 0.0, "above 0");
    }
    if !(settings.margin_deg > 0.0 && settings.margin_deg <= 45.0) {
        return wrong("margin", settings.margin_deg, "above 0 and at most 45 degrees");
    }
    Ok(())
}

#[expect(clippy::too_many_arguments, reason = "one call, all of it the judge's own state")]
fn weigh(
    theory: Theory,
    cloud: &[Vec<Axis>],
    prior: f64,
    regime: &[SandFlow],
    net: Option<(Azimuth, f64)>,
    blur: f64,
    weighing: &Weighing,
    settings: &VerdictSettings,
) -> TheoryJudgement {
    let mut predicted = theory.predict(regime);
    let axis = (!predicted.is_empty()).then(|| predicted.remove(0));
    let spread_deg = spread(cloud);
    let step = cloud.len().div_ceil(SHOWN).max(1);
    let cloud_deg = net.map_or_else(Vec::new, |(toward, _)| {
        let shown = cloud.iter().step_by(step).flatten();
        shown.map(|axis| axis.separation(toward.axis()) as f32).collect()
    });
    TheoryJudgement {
        name: theory.name(),
        method: theory.method(),
        equivalence: axis.map(|axis| {
            let se = f64::hypot(blur, spread_deg.unwrap_or(0.0)).max(1e-9);
            equivalence(weighing.trend.turn_from(axis), se, settings.margin_deg)
        }),
        axis,
        ties: predicted,
        spread_deg,
        prior,
        posterior: 0.0,
        ln_bayes_factor: weighing.ln_bayes_factor(cloud),
        cloud_deg,
    }
}

/// Axial standard deviation of the first predictions of a cloud, degrees.
fn spread(cloud: &[Vec<Axis>]) -> Option<f64> {
    let (mut n, mut c, mut s) = (0usize, 0.0, 0.0);
    for axis in cloud.iter().filter_map(|axes| axes.first()) {
        n += 1;
        c += axis.doubled().cos();
        s += axis.doubled().sin();
    }
    if n < 2 {
        return None;
    }
    let length = f64::hypot(c, s) / n as f64;
    Some((-0.5 * length.min(1.0).ln()).sqrt().to_degrees()).filter(|sd| sd.is_finite())
}

fn regime_cautions(
    across: &GrossNormal,
    net: Option<(Azimuth, f64)>,
    settings: &VerdictSettings,
) -> Vec<Caution> {
    let mut cautions = Vec::new();
    match net {
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
    if !across.ties.is_empty() {
        let listed: Vec<String> = across.ties.iter().map(|a| format!("{:.1}°", a.deg())).collect();
        cautions.push(Caution::new(
            "tied-trends",
            format!(
                "Gross transport is as great across {} as across {:.1}°.",
                listed.join(", "),
                across.axis.deg()
            ),
        ));
    }
    let strength = across.strength();
    if strength < 2.0 * settings.least_strength {
        cautions.push(Caution::new(
            "low-strength",
            format!("Alignment strength {strength:.2}: the winds hardly prefer a trend."),
        ));
    }
    cautions
}

fn theory_cautions(
    theories: &[TheoryJudgement],
    clouds: &[Vec<Vec<Axis>>],
    settings: &VerdictSettings,
) -> Vec<Caution> {
    let mut cautions = Vec::new();
    for (theory, cloud) in theories.iter().zip(clouds) {
        let Some(axis) = theory.axis else { continue };
        let far = cloud.iter().filter(|axes| axes.first().is_none_or(|a| a.separation(axis) > 30.0)).count();
        if far * 10 > cloud.len() {
            cautions.push(Caution::new(
                "unsteady-prediction",
                format!(
                    "In {:.0} % of the draws \"{}\" predicts a trend more than 30° from that of the record.",
                    100.0 * far as f64 / cloud.len() as f64,
                    theory.name
                ),
            ));
        }
    }
    for (i, a) in theories.iter().enumerate() {
        for b in &theories[i + 1..] {
            if let (Some(p), Some(q)) = (a.axis, b.axis)
                && p.separation(q) < settings.margin_deg
            {
                cautions.push(Caution::new(
                    "same-prediction",
                    format!(
                        "\"{}\" and \"{}\" predict trends only {:.0}° apart: these winds cannot tell them apart.",
                        a.name,
                        b.name,
                        p.separation(q)
                    ),
                ));
            }
        }
    }
    let mut ranked: Vec<&TheoryJudgement> = theories.iter().collect();
    ranked.sort_by(|a, b| b.posterior.total_cmp(&a.posterior));
    if let [first, second, ..] = ranked[..]
        && first.posterior < 3.0 * second.posterior
    {
        cautions.push(Caution::new(
            "undecided",
            format!(
                "\"{}\" ({:.0} %) and \"{}\" ({:.0} %) are both live.",
                first.name,
                100.0 * first.posterior,
                second.name,
                100.0 * second.posterior
            ),
        ));
    }
    cautions
}

#[cfg(test)]
mod tests {
    use super::*;

    fn settings() -> VerdictSettings {
        VerdictSettings {
            model_error_deg: 5.0,
            tail_share: 0.05,
            priors: vec![1.0; 4],
            margin_deg: 15.0,
            least_strength: 0.1,
        }
    }

    fn flows(winds: &[(f64, f64)]) -> Vec<SandFlow> {
        winds.iter().map(|&(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight }).collect()
    }

    fn evidence(deg: f64) -> TrendEvidence {
        TrendEvidence { axis: Axis::from_deg(deg), kappa_mean: 400.0, half_ci: 3.0 }
    }

    #[test]
    fn nil_drift_and_even_winds_are_refused() {
        let quiet = Work::quiet();
        assert_eq!(judge(&evidence(0.0), &[], &[], &settings(), &quiet), Err(Refusal::NoDrift));
        let even: Vec<(f64, f64)> = (0..72).map(|k| (5.0 * f64::from(k), 1.0)).collect();
        let refused = judge(&evidence(0.0), &flows(&even), &[], &settings(), &quiet);
        assert!(matches!(refused, Err(Refusal::Weak { strength, .. }) if strength < 0.01), "{refused:?}");
    }

    #[test]
    fn a_trend_along_a_single_wind_is_longitudinal() {
        let regime = flows(&[(30.0, 1.0)]);
        let draws: Vec<Vec<SandFlow>> = (0..41).map(|k| flows(&[(20.0 + 0.5 * f64::from(k), 1.0)])).collect();
        let verdict =
            judge(&evidence(32.0), &regime, &draws, &settings(), &Work::quiet()).expect("a verdict");
        crate::assert_close!(verdict.obliquity_deg.expect("one"), 2.0, 1e-9, "obliquity");
        assert!(verdict.probabilities.expect("some")[0] > 0.95);
        let along = &verdict.theories[1];
        assert!(along.posterior > 0.8 && along.ln_bayes_factor > 1.0, "{along:?}");
        assert!(verdict.theories[0].ln_bayes_factor < -2.9);
        crate::assert_close!(
            verdict.theories.iter().map(|t| t.posterior).sum::<f64>(),
            1.0,
            1e-12,
            "posteriors"
        );
    }

    #[test]
    fn winds_that_cancel_have_a_trend_but_no_obliquity() {
        let verdict =
            judge(&evidence(90.0), &flows(&[(0.0, 1.0), (180.0, 1.0)]), &[], &settings(), &Work::quiet())
                .expect("a verdict");
        assert!(verdict.toward.is_none() && verdict.obliquity_deg.is_none());
        assert!(verdict.theories[2].posterior > 0.5);
        assert!(verdict.theories[0].axis.is_none() && verdict.theories[0].ln_bayes_factor == 0.0);
    }

    #[test]
    fn turning_trend_and_winds_together_changes_nothing() {
        let winds = [(10.0, 3.0), (140.0, 2.0), (250.0, 1.0)];
        let turned = winds.map(|(d, q)| (d + 77.0, q));
        let a = judge(&evidence(60.0), &flows(&winds), &[], &settings(), &Work::quiet()).expect("a verdict");
        let b =
            judge(&evidence(137.0), &flows(&turned), &[], &settings(), &Work::quiet()).expect("a verdict");
        for (p, q) in a.theories.iter().zip(&b.theories) {
            crate::assert_close!(p.ln_bayes_factor, q.ln_bayes_factor, 1e-9, "{}", p.name);
        }
        crate::assert_close!(a.obliquity_deg.expect("one"), b.obliquity_deg.expect("one"), 1e-9, "obliquity");
    }

    #[test]
    fn a_bad_setting_is_named_and_stop_is_heard() {
        let regime = flows(&[(30.0, 1.0)]);
        let bad = VerdictSettings { tail_share: 0.0, ..settings() };
        let refused = judge(&evidence(0.0), &regime, &[], &bad, &Work::quiet()).expect_err("refused");
        assert!(refused.to_string().contains("tail share"), "{refused}");
        let work = Work::quiet();
        work.stop();
        let stopped = judge(&evidence(0.0), &regime, &[], &settings(), &work);
        assert_eq!(stopped, Err(Refusal::Stopped(Stopped)));
    }
}

//! The one face of the family: a measured trend and what the theories foresee in, a verdict or a refusal
//! out.

use crate::ground::{Axis, Azimuth, Caution};

use super::cautions;
use super::equivalence::{Equivalence, equivalence};
use super::foresight::Foresight;
use super::likelihood::{Weighing, axial_sd_of_kappa, kappa_of_axial_sd, ln_bayes_factor, posteriors};
use super::obliquity::{Obliquity, RANDOM};
use super::theory::{Prediction, Theory, Way};

/// A measured mean trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendEvidence {
    pub axis: Axis,
    /// Concentration of the mean axis (not of the axes), of the doubled angle: n_eff κ A(κ).
    pub kappa_mean: f64,
    /// Half width of its 95 % interval, degrees; where it is wider than `kappa_mean` says, it rules.
    pub half_ci: f64,
}

impl TrendEvidence {
    /// Standard error of the mean axis, degrees.
    pub fn blur(&self) -> f64 {
        (self.half_ci / 1.96).max(axial_sd_of_kappa(self.kappa_mean))
    }

    /// What the weighing of a theory needs of the trend.
    pub fn weighing(&self, settings: &VerdictSettings) -> Weighing {
        Weighing {
            trend: self.axis,
            kappa_observed: self.kappa_mean.min(kappa_of_axial_sd(self.blur())),
            kappa_model: kappa_of_axial_sd(settings.model_error_deg),
            tail_share: settings.tail_share,
        }
    }
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

/// All theories and chance alike, 5° of model error, a tail of 5 %, a margin of 15°.
impl Default for VerdictSettings {
    fn default() -> Self {
        Self {
            model_error_deg: 5.0,
            tail_share: 0.05,
            priors: vec![1.0; Theory::ALL.len() + 1],
            margin_deg: 15.0,
            least_strength: 0.1,
        }
    }
}

/// A trend judged by a regime.
#[derive(Clone, Debug, PartialEq)]
pub struct Judgement {
    /// Where the sand goes on balance; `None` when the flows cancel.
    pub toward: Option<Azimuth>,
    /// Resultant over total flow.
    pub ratio: Option<f64>,
    pub obliquity_deg: Option<f64>,
    /// Equal-tailed 95 % interval, from trend error and wind draws together.
    pub obliquity_ci95_deg: Option<[f64; 2]>,
    /// Longitudinal, oblique, transverse to the resultant.
    pub probabilities: Option<[f64; 3]>,
    /// The same for an axis drawn at random.
    pub class_priors: [f64; 3],
    /// The trend against the way crests extend, which is the test of "longitudinal".
    pub elongation: Option<Elongation>,
    /// The theories in the order of [`Theory::ALL`], then the random axis.
    pub theories: Vec<TheoryJudgement>,
    /// What the theories come to.
    pub building: Building,
    pub alignment_strength: f64,
    pub cautions: Vec<Caution>,
}

/// The trend against the elongation direction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Elongation {
    /// The end that grows, by the whole record.
    pub toward: Azimuth,
    pub separation_deg: f64,
    pub ci95_deg: [f64; 2],
    /// Chance that the trend lies within the margin of it.
    pub within_margin: f64,
}

/// Posterior of the ways crests are built, summed over theories.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Building {
    /// By sand that crosses them, as under full cover.
    pub crossed: f64,
    /// By extending along themselves, as on starved ground.
    pub extended: f64,
    pub stated: f64,
    pub random: f64,
}

/// One theory weighed.
#[derive(Clone, Debug, PartialEq)]
pub struct TheoryJudgement {
    /// `None` for the random axis.
    pub theory: Option<Theory>,
    /// Predicted by the whole record, the main way first; empty for the random axis, or when the
    /// theory predicts nothing.
    pub ways: Vec<Way>,
    /// How much better that trend is than others, in the theory's own measure.
    pub strength: Option<f64>,
    /// Axial standard deviation of the predictions of the draws, degrees.
    pub spread_deg: Option<f64>,
    /// Prior share among the theories that predict something.
    pub prior: f64,
    pub posterior: f64,
    pub ln_bayes_factor: f64,
    /// Predictions of the draws as angles from the record's resultant, at most 200 of them.
    pub cloud_deg: Vec<f32>,
    /// Whether the trend agrees with the prediction within the margin.
    pub equivalence: Option<Equivalence>,
}

impl TheoryJudgement {
    pub fn name(&self) -> &'static str {
        self.theory.map_or(RANDOM_AXIS, Theory::name)
    }

    pub fn axis(&self) -> Option<Axis> {
        self.ways.first().map(|way| way.axis)
    }
}

/// The name of the reference every theory is weighed against.
pub const RANDOM_AXIS: &str = "random axis";

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
}

/// Predictions kept for show.
const SHOWN: usize = 200;

/// Judges a measured trend by what the theories foresee; `stated` is the user's own axis.
///
/// Without draws the regime is taken as certain, and a caution says so.
///
/// # Errors
/// [`Refusal`] when there is no drift, the winds prefer no trend, or a setting is out of range.
pub fn judge(
    evidence: &TrendEvidence,
    foresight: &Foresight,
    stated: Option<Axis>,
    settings: &VerdictSettings,
) -> Result<Judgement, Refusal> {
    check(settings)?;
    let strength = foresight.strength.ok_or(Refusal::NoDrift)?;
    if strength < settings.least_strength {
        return Err(Refusal::Weak { strength, least: settings.least_strength });
    }
    let clouds = with_stated(foresight, stated);
    let theories = weigh(evidence, foresight, &clouds, settings);
    let blur = evidence.blur();
    let obliquity = foresight.drift.filter(|_| !foresight.drifts.is_empty()).map(|(toward, _)| {
        let uncertain = Obliquity::of(evidence.axis, blur, &foresight.drifts);
        (evidence.axis.separation(toward.axis()), uncertain)
    });
    let mut cautions = cautions::of_regime(foresight, strength, settings);
    cautions.extend(cautions::of_theories(&theories, &clouds, settings));
    Ok(Judgement {
        toward: foresight.drift.map(|d| d.0),
        ratio: foresight.drift.map(|d| d.1),
        obliquity_deg: obliquity.as_ref().map(|o| o.0),
        obliquity_ci95_deg: obliquity.as_ref().map(|(_, o)| [o.quantile(0.025), o.quantile(0.975)]),
        probabilities: obliquity.as_ref().map(|(_, o)| o.classes()),
        class_priors: RANDOM,
        elongation: elongation(evidence, foresight, settings.margin_deg),
        building: building(&theories),
        theories,
        alignment_strength: strength,
        cautions,
    })
}

/// The clouds of the foresight, the last one filled with the stated axis.
fn with_stated(foresight: &Foresight, stated: Option<Axis>) -> Vec<Vec<Option<Prediction>>> {
    let mut clouds = foresight.clouds.clone();
    if let (Some(axis), Some(last)) = (stated, clouds.last_mut()) {
        last.fill(Some(Prediction::of_axis(axis, 1.0)));
    }
    clouds
}

/// Theories that predict nothing in any draw are listed, but not weighed.
fn weigh(
    evidence: &TrendEvidence,
    foresight: &Foresight,
    clouds: &[Vec<Option<Prediction>>],
    settings: &VerdictSettings,
) -> Vec<TheoryJudgement> {
    let weighing = evidence.weighing(settings);
    let mut theories: Vec<TheoryJudgement> = Theory::ALL
        .iter()
        .zip(clouds)
        .zip(&foresight.whole)
        .zip(&settings.priors)
        .map(|(((theory, cloud), whole), prior)| {
            // The stated axis is in the cloud only.
            let whole = whole.as_ref().or_else(|| cloud.first().and_then(Option::as_ref));
            let whole = whole.filter(|_| cloud.iter().any(Option::is_some));
            let spread_deg = spread(cloud);
            let se = f64::hypot(evidence.blur(), spread_deg.unwrap_or(0.0)).max(1e-9);
            TheoryJudgement {
                theory: Some(*theory),
                ways: whole.map_or_else(Vec::new, |p| p.ways.clone()),
                strength: whole.map(|p| p.strength),
                spread_deg,
                prior: if whole.is_some() { *prior } else { 0.0 },
                posterior: 0.0,
                ln_bayes_factor: ln_bayes_factor(&[weighing], cloud),
                cloud_deg: shown(cloud, foresight.drift.map(|d| d.0)),
                equivalence: whole
                    .map(|p| equivalence(evidence.axis.turn_from(p.main().axis), se, settings.margin_deg)),
            }
        })
        .collect();
    theories.push(TheoryJudgement {
        theory: None,
        ways: Vec::new(),
        strength: None,
        spread_deg: None,
        prior: settings.priors[Theory::ALL.len()],
        posterior: 0.0,
        ln_bayes_factor: 0.0,
        cloud_deg: Vec::new(),
        equivalence: None,
    });
    let priors: Vec<f64> = theories.iter().map(|t| t.prior).collect();
    let factors: Vec<f64> = theories.iter().map(|t| t.ln_bayes_factor).collect();
    let sum: f64 = priors.iter().sum();
    for (theory, posterior) in theories.iter_mut().zip(posteriors(&priors, &factors)) {
        theory.posterior = posterior;
        theory.prior = if sum > 0.0 { theory.prior / sum } else { 0.0 };
    }
    theories
}

/// Obliquities of the draws' main predictions, thinned.
fn shown(cloud: &[Option<Prediction>], toward: Option<Azimuth>) -> Vec<f32> {
    let Some(toward) = toward else { return Vec::new() };
    let step = cloud.len().div_ceil(SHOWN).max(1);
    let main = cloud.iter().step_by(step).flatten().map(Prediction::main);
    main.map(|way| way.axis.separation(toward.axis()) as f32).collect()
}

/// Axial standard deviation of the main predictions of a cloud, degrees.
fn spread(cloud: &[Option<Prediction>]) -> Option<f64> {
    let (mut n, mut c, mut s) = (0usize, 0.0, 0.0);
    for way in cloud.iter().flatten().map(Prediction::main) {
        n += 1;
        c += way.axis.doubled().cos();
        s += way.axis.doubled().sin();
    }
    if n < 2 {
        return None;
    }
    let length = f64::hypot(c, s) / n as f64;
    Some((-0.5 * length.min(1.0).ln()).max(0.0).sqrt().to_degrees()).filter(|sd| sd.is_finite())
}

fn elongation(evidence: &TrendEvidence, foresight: &Foresight, margin: f64) -> Option<Elongation> {
    let at = Theory::ALL.iter().position(|t| *t == Theory::Fingering)?;
    let way = foresight.whole[at].as_ref()?.main();
    let axes: Vec<Axis> = foresight.clouds[at].iter().flatten().map(|p| p.main().axis).collect();
    let apart = Obliquity::of(evidence.axis, evidence.blur(), &axes);
    Some(Elongation {
        toward: way.toward?,
        separation_deg: evidence.axis.separation(way.axis),
        ci95_deg: [apart.quantile(0.025), apart.quantile(0.975)],
        within_margin: apart.below(margin),
    })
}

fn building(theories: &[TheoryJudgement]) -> Building {
    let mut sums = Building::default();
    for t in theories {
        *match t.theory {
            None => &mut sums.random,
            Some(Theory::Stated) => &mut sums.stated,
            Some(theory) if theory.extends() => &mut sums.extended,
            Some(_) => &mut sums.crossed,
        } += t.posterior;
    }
    sums
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Regime, SandFlow, Seed, Work};
    use crate::science::alignment::foresight::{FluxUp, foresee};

    fn regime(winds: &[(f64, f64)]) -> Regime {
        let flow = |&(deg, weight): &(f64, f64)| SandFlow { toward: Azimuth::from_deg(deg), weight };
        Regime { all: winds.iter().map(flow).collect(), ..Regime::default() }
    }

    fn foreseen(whole: &[(f64, f64)], draws: &[Regime]) -> Foresight {
        let flux_up = FluxUp { ratio: 1.6, doubt: 1.25 };
        foresee(&regime(whole), draws, flux_up, Seed(1), &Work::quiet()).expect("not stopped")
    }

    fn evidence(deg: f64) -> TrendEvidence {
        TrendEvidence { axis: Axis::from_deg(deg), kappa_mean: 400.0, half_ci: 3.0 }
    }

    fn of(verdict: &Judgement, theory: Theory) -> &TheoryJudgement {
        verdict.theories.iter().find(|t| t.theory == Some(theory)).expect("listed")
    }

    #[test]
    fn nil_drift_and_even_winds_are_refused() {
        let nil = judge(&evidence(0.0), &foreseen(&[], &[]), None, &VerdictSettings::default());
        assert_eq!(nil, Err(Refusal::NoDrift));
        let even: Vec<(f64, f64)> = (0..72).map(|k| (5.0 * f64::from(k), 1.0)).collect();
        let refused = judge(&evidence(0.0), &foreseen(&even, &[]), None, &VerdictSettings::default());
        assert!(matches!(refused, Err(Refusal::Weak { strength, .. }) if strength < 0.01), "{refused:?}");
    }

    #[test]
    fn a_trend_along_a_single_wind_is_longitudinal() {
        let draws: Vec<Regime> = (0..41).map(|k| regime(&[(20.0 + 0.5 * f64::from(k), 1.0)])).collect();
        let verdict =
            judge(&evidence(32.0), &foreseen(&[(30.0, 1.0)], &draws), None, &VerdictSettings::default())
                .expect("a verdict");
        crate::assert_close!(verdict.obliquity_deg.expect("one"), 2.0, 1e-9, "obliquity");
        assert!(verdict.probabilities.expect("some")[0] > 0.95);
        assert!(verdict.building.extended > 0.85, "{:?}", verdict.building);
        assert!(verdict.elongation.expect("one").within_margin > 0.95);
        assert!(of(&verdict, Theory::Along).ln_bayes_factor > 1.0);
        assert!(of(&verdict, Theory::Transverse).ln_bayes_factor < -2.9);
        let sums = verdict.theories.iter().fold((0.0, 0.0), |(p, q), t| (p + t.prior, q + t.posterior));
        crate::assert_close!(sums.0, 1.0, 1e-12, "priors");
        crate::assert_close!(sums.1, 1.0, 1e-12, "posteriors");
    }

    #[test]
    fn theories_that_predict_nothing_are_not_weighed() {
        let verdict = judge(
            &evidence(90.0),
            &foreseen(&[(0.0, 1.0), (180.0, 1.0)], &[]),
            None,
            &VerdictSettings::default(),
        )
        .expect("a verdict");
        assert!(verdict.toward.is_none() && verdict.obliquity_deg.is_none() && verdict.elongation.is_none());
        assert!(of(&verdict, Theory::GrossNormal).posterior > 0.4);
        for silent in [Theory::Transverse, Theory::Season, Theory::Stated] {
            let t = of(&verdict, silent);
            assert!(t.ways.is_empty() && t.prior == 0.0 && t.posterior == 0.0, "{t:?}");
        }
    }

    #[test]
    fn a_stated_axis_that_meets_the_trend_wins() {
        let winds = [(0.0, 1.0), (40.0, 1.0)];
        let stated = Some(Axis::from_deg(61.0));
        let verdict = judge(&evidence(60.0), &foreseen(&winds, &[]), stated, &VerdictSettings::default())
            .expect("a verdict");
        assert!(verdict.building.stated > 0.6, "{:?}", verdict.building);
        let equal = of(&verdict, Theory::Stated).equivalence.expect("tested");
        assert!(equal.equivalent, "{equal:?}");
    }

    #[test]
    fn turning_trend_and_winds_together_changes_nothing() {
        let winds = [(10.0, 3.0), (140.0, 2.0), (250.0, 1.0)];
        let turned = winds.map(|(d, q)| (d + 77.0, q));
        let a = judge(&evidence(60.0), &foreseen(&winds, &[]), None, &VerdictSettings::default())
            .expect("a verdict");
        let b = judge(&evidence(137.0), &foreseen(&turned, &[]), None, &VerdictSettings::default())
            .expect("a verdict");
        for (p, q) in a.theories.iter().zip(&b.theories) {
            crate::assert_close!(p.ln_bayes_factor, q.ln_bayes_factor, 1e-6, "{}", p.name());
        }
        crate::assert_close!(a.obliquity_deg.expect("one"), b.obliquity_deg.expect("one"), 1e-9, "obliquity");
    }

    #[test]
    fn a_bad_setting_is_named() {
        let bad = VerdictSettings { tail_share: 0.0, ..VerdictSettings::default() };
        let refused = judge(&evidence(0.0), &foreseen(&[(30.0, 1.0)], &[]), None, &bad).expect_err("refused");
        assert!(refused.to_string().contains("tail share"), "{refused}");
    }
}

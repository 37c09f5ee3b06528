//! What would change a verdict: each uncertain parameter moved alone, the others as stated, until the class
//! of obliquity or the leading theory turns.

use crate::ground::{Axis, Seed, Stopped, Work};
use crate::science::alignment::{
    self, FluxUp, Foresight, Judgement, RANDOM_AXIS, TrendEvidence, VerdictSettings, foresee,
};
use crate::science::wind::{Assumption, Law, Transport, WindAssessment};

use super::Flip;
use super::winds::WindStudy;

/// One parameter, moved.
#[derive(Clone, Debug, PartialEq)]
pub struct WhatIf {
    parameter: &'static str,
    /// As stated.
    now: String,
    /// The factor within which the parameter is known; `None` for a choice.
    doubt: Option<f64>,
    /// Outward from the stated value; two rows of cases for a number, below and above it.
    rows: Vec<Vec<Case>>,
}

/// A value of the parameter, and what the theories foresee under it.
#[derive(Clone, Debug, PartialEq)]
struct Case {
    at: String,
    /// Value over stated value; 1 for choices.
    factor: f64,
    foresight: Foresight,
}

/// Steps of one row, and the factor of a step: from a third to three times the value.
const STEPS: i32 = 22;
const STEP: f64 = 1.05;

/// The parameters of a record, moved one at a time. A threshold goes down to a third of the stated one, which
/// is as far as the record keeps its weak winds.
///
/// # Errors
/// [`Stopped`].
pub fn cases(
    a: &WindAssessment,
    flux_up: FluxUp,
    roughness_doubt: f64,
    seed: Seed,
    work: &Work,
) -> Result<Vec<WhatIf>, Stopped> {
    let stated = a.replay.mill().assumption();
    let under = |assumption: Assumption, flux_up: f64| {
        let regime = a.replay.regime(assumption);
        foresee(&regime, &[], FluxUp { ratio: flux_up, doubt: 1.0 }, seed, work)
    };
    let thresholds = a.sensitivity.iter().map(|s| s.threshold_ustar);
    let (low, high) = thresholds.fold((f64::INFINITY, 0.0f64), |(l, h), u| (l.min(u), h.max(u)));
    let speed = a.threshold_speed_at_height;
    let threshold = numbers(
        "threshold",
        |factor| format!("{:.1} m/s at the mast", speed * factor),
        (high / low).sqrt().max(1.1),
        |factor| under(Assumption { threshold_factor: factor, ..stated }, flux_up.ratio),
    )?;
    let roughness = numbers(
        "roughness",
        |factor| format!("{:.2} mm", 1000.0 * stated.roughness_m * factor),
        roughness_doubt,
        |factor| under(Assumption { roughness_m: stated.roughness_m * factor, ..stated }, flux_up.ratio),
    )?;
    let ratio = numbers(
        "flux-up ratio",
        |factor| format!("{:.2}", flux_up.ratio * factor),
        flux_up.doubt,
        |factor| under(stated, flux_up.ratio * factor),
    )?;
    let others = [Law::Bagnold, Law::Kawamura, Law::Lettau, Law::Kok].map(Transport::Physical);
    let law = |transport: Transport| -> Result<Vec<Case>, Stopped> {
        let foresight = under(Assumption { transport, ..stated }, flux_up.ratio)?;
        Ok(vec![Case { at: transport.label().to_owned(), factor: 1.0, foresight }])
    };
    let laws = WhatIf {
        parameter: "transport law",
        now: stated.transport.label().to_owned(),
        doubt: None,
        rows: if a.sensitivity.len() > 1 {
            others.into_iter().filter(|l| *l != stated.transport).map(law).collect::<Result<_, _>>()?
        } else {
            Vec::new()
        },
    };
    Ok(vec![threshold, roughness, ratio, laws])
}

/// A number moved down and up by factors.
fn numbers(
    parameter: &'static str,
    label: impl Fn(f64) -> String,
    doubt: f64,
    foresight: impl Fn(f64) -> Result<Foresight, Stopped>,
) -> Result<WhatIf, Stopped> {
    let row = |sense: i32| {
        let case = |step: i32| {
            let factor = STEP.powi(sense * step);
            Ok(Case { at: label(factor), factor, foresight: foresight(factor)? })
        };
        (1..=STEPS).map(case).collect::<Result<Vec<_>, Stopped>>()
    };
    Ok(WhatIf { parameter, now: label(1.0), doubt: Some(doubt), rows: vec![row(-1)?, row(1)?] })
}

/// What a verdict comes to, in the parts that may turn.
#[derive(Clone, Debug, PartialEq)]
enum Standing {
    Refused,
    Judged { class: Option<&'static str>, leader: &'static str, axis: Option<Axis>, extends: Option<bool> },
}

impl Standing {
    fn of(
        evidence: &TrendEvidence,
        foresight: &Foresight,
        stated: Option<Axis>,
        s: &VerdictSettings,
    ) -> Self {
        match alignment::judge(evidence, foresight, stated, s) {
            Err(_) => Self::Refused,
            Ok(j) => Self::of_judgement(&j),
        }
    }

    fn of_judgement(j: &Judgement) -> Self {
        let leader = j.theories.iter().max_by(|a, b| a.posterior.total_cmp(&b.posterior));
        Self::Judged {
            class: j.obliquity_deg.map(alignment::obliquity::class),
            leader: leader.map_or(RANDOM_AXIS, |t| t.name()),
            axis: leader.and_then(|t| t.axis()),
            extends: leader.and_then(|t| t.theory).map(|t| t.extends()),
        }
    }

    /// What turned between two standings, in words. Leaders that build crests in the same way and predict
    /// the same trend within `margin` are one, and a change to the theory that leads anyway, with the
    /// winds in doubt, is none.
    fn turned(&self, then: &Self, leads: &str, margin: f64) -> Option<String> {
        match (self, then) {
            (Self::Refused, Self::Refused) => None,
            (_, Self::Refused) => {
                Some("no verdict is left: the winds prefer no trend, or move no sand".into())
            }
            (Self::Refused, Self::Judged { leader, .. }) => Some(format!("“{leader}” would lead")),
            (
                Self::Judged { class, leader, axis, extends },
                Self::Judged { class: class2, leader: leader2, axis: axis2, extends: extends2 },
            ) => {
                let near = axis.zip(*axis2).is_none_or(|(a, b)| a.separation(b) <= margin);
                let same_leader = leader == leader2 || *leader2 == leads || (extends == extends2 && near);
                let mut parts = Vec::new();
                if class != class2
                    && let (Some(from), Some(to)) = (class, class2)
                {
                    parts.push(format!("{from} becomes {to}"));
                }
                if !same_leader {
                    parts.push(format!("“{leader2}” would lead"));
                }
                (!parts.is_empty()).then(|| parts.join(", "))
            }
        }
    }
}

/// The nearest changes of a verdict led by the theory `leads`, those within the parameter's doubt first.
///
/// # Errors
/// [`Stopped`].
pub fn flips(
    evidence: &TrendEvidence,
    stated: Option<Axis>,
    leads: &str,
    winds: &WindStudy,
    settings: &VerdictSettings,
    work: &Work,
) -> Result<Vec<Flip>, Stopped> {
    let point = winds.foresight.without_draws();
    let standing =
        |evidence: &TrendEvidence, foresight: &Foresight| Standing::of(evidence, foresight, stated, settings);
    let now = standing(evidence, &point);
    let mut flips = Vec::new();
    for what in &winds.what_if {
        for row in &what.rows {
            work.advance(0)?;
            let turned = row.iter().find_map(|case| {
                let change = now.turned(&standing(evidence, &case.foresight), leads, settings.margin_deg)?;
                Some((case, change))
            });
            flips.extend(turned.map(|(case, change)| Flip {
                parameter: what.parameter,
                now: what.now.clone(),
                at: case.at.clone(),
                change,
                reach: what.doubt.map(|doubt| case.factor.ln().abs() / doubt.max(1.01).ln()),
            }));
        }
    }
    let half = 1.96 * evidence.blur();
    for sense in [-1.0, 1.0] {
        work.advance(0)?;
        let turned = (1..=45).map(|step| sense * f64::from(step)).find_map(|turn| {
            let moved = TrendEvidence { axis: evidence.axis.rotated(turn), ..*evidence };
            let change = now.turned(&standing(&moved, &point), leads, settings.margin_deg)?;
            Some((turn, moved.axis, change))
        });
        flips.extend(turned.map(|(turn, axis, change)| Flip {
            parameter: "trend",
            now: format!("{:.0}°", evidence.axis.deg()),
            at: format!("{:.0}°", axis.deg()),
            change,
            reach: Some(turn.abs() / half.max(0.1)),
        }));
    }
    // Choices come last: they have no distance.
    flips.sort_by(|a, b| a.reach.unwrap_or(f64::MAX).total_cmp(&b.reach.unwrap_or(f64::MAX)));
    Ok(flips)
}

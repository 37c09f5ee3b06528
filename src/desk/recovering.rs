//! Injection and recovery in the background: for the selected patch, once all is measured and the light is known,
//! or once the user asks for it. It gives way to measuring and ends when another patch is looked at.

use std::sync::Arc;

use crate::ground::Stopped;
use crate::study::run::{run_recovery, run_winds};
use crate::study::{Id, RecoveryFinding, Sheet, fingerprint};

use super::measuring::{self, Round};
use super::{Answer, Model, Slot, Standing};

/// What came of laying bedforms into a patch.
#[derive(Debug)]
pub struct Recovered {
    /// The finding, or why there is none.
    pub outcome: Result<Arc<RecoveryFinding>, String>,
    /// Of what was asked.
    pub fingerprint: String,
}

/// What the recovery job is about, and what the user said of it.
#[derive(Debug, Default)]
pub struct Recovering {
    /// Fingerprint of what runs, or ran last.
    running: String,
    /// Fingerprint at which the user stopped it.
    stopped_at: Option<String>,
    /// Fingerprint for which the user asked, whether or not the light is known.
    asked: Option<String>,
}

impl Recovering {
    /// Starts nothing more until what is asked changes or the user asks.
    pub(super) fn pause(&mut self) {
        self.stopped_at = Some(self.running.clone());
        self.asked = None;
    }
}

/// Starts or ends what should; called after each command and each answer.
pub fn follow(model: &mut Model) {
    let wanted = wanted(model);
    let running = model.session.jobs.is_running(Slot::Recovery);
    match wanted {
        Some((_, print)) if running && model.session.recovering.running == print => {}
        Some((id, print)) => start(model, id, print),
        None if running => model.session.jobs.abandon(Slot::Recovery),
        None => {}
    }
}

/// The patch to lay bedforms into now, and the fingerprint of what will come of it.
fn wanted(model: &Model) -> Option<(Id, String)> {
    let session = &model.session;
    let waits = !session.measures
        || measuring::still_opening(model)
        || session.history.is_dragging()
        || session.jobs.is_running(Slot::Measure);
    let patch = model.selected_patch().filter(|_| !waits)?;
    if model.sheet.settings.recovery.trends == 0 || !session.results.standing(patch.id).is_current() {
        return None;
    }
    let print = fingerprint::of_recovery(&model.sheet, patch);
    let asked = session.recovering.asked.as_ref() == Some(&print);
    let lit = model.sheet.raster(patch.raster).is_some_and(|raster| raster.light_from.is_some());
    let stopped = session.recovering.stopped_at.as_ref() == Some(&print);
    let done = matches!(session.results.recovery_standing(patch.id), Standing::Current | Standing::Failed);
    ((asked || lit) && !stopped && !done).then_some((patch.id, print))
}

/// Bedforms are laid into the selected patch when all else is done, whether or not its light is known.
pub(super) fn ask(model: &mut Model) {
    let Some(patch) = model.selected_patch() else { return };
    let (id, print) = (patch.id, fingerprint::of_recovery(&model.sheet, patch));
    model.session.results.drop_recovery(id);
    model.session.recovering.stopped_at = None;
    model.session.recovering.asked = Some(print);
}

fn start(model: &mut Model, id: Id, print: String) {
    let label =
        format!("Laying bedforms into {}", model.sheet.patch(id).map_or("", |patch| patch.name.as_str()));
    let round = measuring::round(model, vec![id]);
    model.session.recovering.running.clone_from(&print);
    model.session.jobs.start(Slot::Recovery, label, move |work, post| {
        // Stopped: nothing of it stays.
        if let Ok(outcome) = recovered(&round, id, work) {
            post.answer(Answer::Recovery(id, Box::new(Recovered { outcome, fingerprint: print })));
        }
    });
}

fn recovered(
    round: &Round,
    id: Id,
    work: &crate::ground::Work,
) -> Result<Result<Arc<RecoveryFinding>, String>, Stopped> {
    let (sources, _) = round.sources();
    let memo = &round.kept.memo;
    // Both remembered from measuring.
    let (winds, _) = run_winds(&round.sheet, &sources, memo, work)?;
    run_recovery(&round.sheet, &sources, id, &winds, memo, work)
}

/// The recoveries that are as the sheet stands, in the order of its patches.
pub fn current(sheet: &Sheet, results: &super::Results) -> Vec<RecoveryFinding> {
    let is_current = |id: &Id| results.recovery_standing(*id).is_current();
    let ids = sheet.patches.iter().map(|patch| patch.id).filter(is_current);
    ids.filter_map(|id| results.recovery(id).map(|finding| (**finding).clone())).collect()
}

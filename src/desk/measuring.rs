//! Measuring in the background: a quick look at the patch in hand while it changes, then the exact
//! finding of every patch that is out of date.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, PoisonError};

use crate::ground::{Stopped, WindRecord, Work};
use crate::study::run::{Memo, run_patch, run_winds};
use crate::study::sources::read_wind;
use crate::study::together::together;
use crate::study::window::Detail;
use crate::study::winds::WindStudy;
use crate::study::{Failure, Id, OpenRaster, PatchFinding, Sheet, Sources, WindEntry, fingerprint};

use super::{Answer, Measured, Model, Opened, Post, Slot, Standing, WindResult};

/// What is kept between jobs, so that an edit measures only what it touches.
#[derive(Debug, Default)]
pub struct Kept {
    pub(super) memo: Memo,
    records: Mutex<HashMap<String, WindRecord>>,
}

/// What the measuring job is doing.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Task {
    /// A quick look at one patch; never interrupted, so that a drag shows something.
    Quick,
    /// Everything that is wanting, for the sheet of this fingerprint.
    Exact(String),
}

/// Starts what should run now; called after each command and each answer.
pub fn follow(model: &mut Model) {
    if !model.session.measures || still_opening(model) {
        return;
    }
    let running = model.session.jobs.is_running(Slot::Measure);
    let now = fingerprint::of_patches(&model.sheet);
    match &model.session.measuring {
        Some(Task::Quick) if running => return,
        Some(Task::Exact(sheet)) if running && *sheet == now => return,
        _ => {}
    }
    if model.session.stopped_at.as_ref() == Some(&now) {
        return;
    }
    let in_hand = model.selected_patch().map(|p| p.id);
    let standing = in_hand.map(|id| model.session.results.standing(id));
    let unseen = matches!(standing, Some(Standing::Unmeasured | Standing::OutOfDate));
    // After an edit of crests a quick look would show what is known already, and no crests.
    let known = in_hand.is_some_and(|id| model.session.results.knows_texture(&model.sheet, id));
    if let Some(id) = in_hand.filter(|_| unseen && !known) {
        start(model, Task::Quick, vec![id]);
    } else if !model.session.history.is_dragging() {
        let wanting = model.session.results.wanting(&model.sheet);
        let winds_wanting = !model.session.results.has_winds(&model.sheet);
        let together_wanting = model.session.results.together().is_none();
        if !wanting.is_empty() || winds_wanting || together_wanting {
            // The patch in hand comes first.
            let (first, rest): (Vec<_>, Vec<_>) = wanting.into_iter().partition(|id| Some(*id) == in_hand);
            start(model, Task::Exact(now), first.into_iter().chain(rest).collect());
        }
    }
}

pub(super) fn still_opening(model: &Model) -> bool {
    model.session.rasters.values().any(|opened| matches!(opened, Opened::Opening))
}

fn start(model: &mut Model, task: Task, patches: Vec<Id>) {
    let label = match (&task, patches.as_slice()) {
        (Task::Quick, _) => "A first look".to_owned(),
        (Task::Exact(_), [one]) => {
            format!("Measuring {}", model.sheet.patch(*one).map_or("", |p| p.name.as_str()))
        }
        (Task::Exact(_), []) => "Comparing patches".to_owned(),
        (Task::Exact(_), many) => format!("Measuring {} patches", many.len()),
    };
    let round = round(model, patches);
    let session = &mut model.session;
    let quick = task == Task::Quick;
    session.measuring = Some(task);
    session.jobs.start(Slot::Measure, label, move |work, post| {
        // Stopped: what was sent stays, the rest is still wanting.
        let _ = if quick { round.quick(work, post) } else { round.exact(work, post) };
    });
}

/// What a job takes along.
pub(super) fn round(model: &Model, patches: Vec<Id>) -> Round {
    Round {
        sheet: model.sheet.clone(),
        rasters: model.session.sources.clone(),
        kept: Arc::clone(&model.session.kept),
        patches,
    }
}

/// One job's view of the study.
pub(super) struct Round {
    pub(super) sheet: Sheet,
    rasters: std::collections::BTreeMap<Id, OpenRaster>,
    pub(super) kept: Arc<Kept>,
    patches: Vec<Id>,
}

impl Round {
    /// Without winds: they have no part in the trend.
    fn quick(&self, work: &Work, post: &Post<Answer>) -> Result<(), Stopped> {
        let sources = Sources { rasters: self.rasters.clone(), ..Sources::default() };
        self.patches.iter().try_for_each(|id| self.patch(*id, &sources, &[], Detail::Coarse, work, post))
    }

    fn exact(&self, work: &Work, post: &Post<Answer>) -> Result<(), Stopped> {
        let (sources, mut failures) = self.sources();
        let (winds, wrong) = run_winds(&self.sheet, &sources, &self.kept.memo, work)?;
        failures.extend(wrong);
        post.answer(Answer::Winds(self.judged_winds(&winds, &failures)));
        self.patches
            .iter()
            .try_for_each(|id| self.patch(*id, &sources, &winds, Detail::Exact, work, post))?;
        self.together(&sources, &winds, work, post)
    }

    /// What all patches say together; those measured before are remembered.
    fn together(
        &self,
        sources: &Sources,
        winds: &[Arc<WindStudy>],
        work: &Work,
        post: &Post<Answer>,
    ) -> Result<(), Stopped> {
        let mut found = Vec::new();
        for patch in &self.sheet.patches {
            let outcome =
                run_patch(&self.sheet, sources, patch.id, winds, Detail::Exact, &self.kept.memo, work)?;
            found.extend(outcome.ok());
        }
        let findings: Vec<&PatchFinding> = found.iter().map(Arc::as_ref).collect();
        let together = together(&self.sheet, &findings, winds);
        post.answer(Answer::Together(fingerprint::of_patches(&self.sheet), Box::new(together)));
        Ok(())
    }

    /// What came of each wind record, with the fingerprint of what was asked.
    fn judged_winds(&self, studies: &[Arc<WindStudy>], failures: &[Failure]) -> Vec<WindResult> {
        let outcome = |entry: &WindEntry| {
            let study = studies.iter().find(|study| study.finding.id == entry.id);
            let failure = failures.iter().find(|f| f.what == format!("wind record {}", entry.name));
            study.map(|study| study.finding.clone()).ok_or_else(|| {
                failure.map_or_else(|| "the record was not read".to_owned(), |f| f.why.clone())
            })
        };
        let result = |entry: &WindEntry| WindResult {
            id: entry.id,
            fingerprint: fingerprint::of_wind(&self.sheet, entry),
            outcome: outcome(entry),
        };
        self.sheet.winds.iter().map(result).collect()
    }

    fn patch(
        &self,
        id: Id,
        sources: &Sources,
        winds: &[Arc<WindStudy>],
        detail: Detail,
        work: &Work,
        post: &Post<Answer>,
    ) -> Result<(), Stopped> {
        let Some(patch) = self.sheet.patch(id) else { return Ok(()) };
        let outcome = run_patch(&self.sheet, sources, id, winds, detail, &self.kept.memo, work)?;
        let measured = Measured {
            outcome: outcome.map(|finding| (*finding).clone()),
            fingerprint: fingerprint::of_patch(&self.sheet, patch),
            exact: detail == Detail::Exact,
            texture: fingerprint::of_texture(&self.sheet, patch),
        };
        post.answer(Answer::Patch(id, Box::new(measured)));
        Ok(())
    }

    /// The open rasters and the wind records, read once for each way of reading them.
    pub(super) fn sources(&self) -> (Sources, Vec<Failure>) {
        let mut sources = Sources { rasters: self.rasters.clone(), ..Sources::default() };
        let mut failures = Vec::new();
        for entry in &self.sheet.winds {
            match self.kept.record(entry) {
                Ok(record) => {
                    sources.winds.insert(entry.id, record);
                }
                Err(why) => failures.push(Failure { what: format!("wind record {}", entry.name), why }),
            }
        }
        (sources, failures)
    }
}

impl Kept {
    fn record(&self, entry: &WindEntry) -> Result<WindRecord, String> {
        let key = format!("{} {:?}", entry.path.display(), entry.import);
        if let Some(known) = self.records.lock().unwrap_or_else(PoisonError::into_inner).get(&key) {
            return Ok(known.clone());
        }
        let record = read_wind(entry)?;
        self.records.lock().unwrap_or_else(PoisonError::into_inner).insert(key, record.clone());
        Ok(record)
    }
}

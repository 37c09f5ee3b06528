//! Comparing two pictures of one ground in the background, once patches are measured: whatever is out of date, that
//! of the selected patch first.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::ground::{Stopped, Work};
use crate::study::run::run_comparison;
use crate::study::{ComparisonFinding, Id, OpenRaster, Sheet, Sources, fingerprint};

use super::measuring::{self, Kept};
use super::{Answer, Model, Post, Slot};

/// The latest result of a comparison.
#[derive(Debug)]
pub struct Compared {
    /// The finding, or why there is none.
    pub outcome: Result<Arc<ComparisonFinding>, String>,
    /// Of what was compared, even when it failed.
    pub fingerprint: String,
}

/// What the comparing job is about, and where the user stopped it.
#[derive(Debug, Default)]
pub struct Comparing {
    running: Vec<String>,
    stopped_at: Option<Vec<String>>,
}

impl Comparing {
    /// Starts nothing more until what is wanting changes.
    pub(super) fn pause(&mut self) {
        self.stopped_at = Some(std::mem::take(&mut self.running));
    }
}

/// Starts what should run now; called after each command and each answer.
pub fn follow(model: &mut Model) {
    let session = &model.session;
    let waits = !session.measures
        || measuring::still_opening(model)
        || session.history.is_dragging()
        || session.jobs.is_running(Slot::Measure);
    if waits {
        return;
    }
    let wanting = session.results.comparisons_wanting(&model.sheet);
    let now: Vec<String> = wanting.iter().map(|(_, fingerprint)| fingerprint.clone()).collect();
    let all_in = |list: &[String]| now.iter().all(|fingerprint| list.contains(fingerprint));
    let stopped = session.comparing.stopped_at.as_deref().is_some_and(all_in);
    let running = session.jobs.is_running(Slot::Comparisons) && all_in(&session.comparing.running);
    if wanting.is_empty() || stopped || running {
        return;
    }
    let of_patch = |id: Id| model.sheet.comparison(id).map(|c| c.patch);
    let (first, rest): (Vec<_>, Vec<_>) =
        wanting.into_iter().partition(|(id, _)| of_patch(*id) == model.view.patch);
    start(model, first.into_iter().chain(rest).map(|(id, _)| id).collect(), now);
}

fn start(model: &mut Model, comparisons: Vec<Id>, fingerprints: Vec<String>) {
    let session = &mut model.session;
    let label = match comparisons.as_slice() {
        [one] => format!("Comparing {}", model.sheet.comparison(*one).map_or("", |c| c.name.as_str())),
        many => format!("Comparing {} pairs of pictures", many.len()),
    };
    let round = Round {
        sheet: model.sheet.clone(),
        rasters: session.sources.clone(),
        kept: Arc::clone(&session.kept),
        comparisons,
    };
    session.comparing = Comparing { running: fingerprints, stopped_at: None };
    session.jobs.start(Slot::Comparisons, label, move |work, post| {
        // Stopped: what was sent stays, the rest is still wanting.
        let _ = round.run(work, post);
    });
}

/// One job's view of the study.
struct Round {
    sheet: Sheet,
    rasters: BTreeMap<Id, OpenRaster>,
    kept: Arc<Kept>,
    comparisons: Vec<Id>,
}

impl Round {
    fn run(&self, work: &Work, post: &Post<Answer>) -> Result<(), Stopped> {
        let sources = Sources { rasters: self.rasters.clone(), ..Sources::default() };
        for id in &self.comparisons {
            let Some(entry) = self.sheet.comparison(*id) else { continue };
            let outcome = run_comparison(&self.sheet, &sources, *id, &self.kept.memo, work)?;
            let fingerprint = fingerprint::of_comparison(&self.sheet, entry);
            post.answer(Answer::Comparison(*id, Box::new(Compared { outcome, fingerprint })));
        }
        Ok(())
    }
}

/// The comparisons that are as the sheet stands, in its order.
pub fn current(sheet: &Sheet, results: &super::Results) -> Vec<ComparisonFinding> {
    let ids = sheet.comparisons.iter().map(|c| c.id);
    ids.filter(|id| results.comparison_standing(*id).is_current())
        .filter_map(|id| results.comparison(id).map(|finding| (**finding).clone()))
        .collect()
}

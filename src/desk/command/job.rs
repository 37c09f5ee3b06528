//! Stopping what runs in the background.

use crate::desk::{Model, Slot};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum JobCommand {
    Stop(Slot),
    StopAll,
    /// Forgets what was measured and measures everything again.
    MeasureAgain,
}

impl JobCommand {
    pub(super) const LISTED: &[Self] = &[Self::MeasureAgain, Self::StopAll];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Stop(_) => Record::new("job.stop", "Stop", "Ends this work; what is done stays."),
            Self::MeasureAgain => {
                Record::new("job.measure", "Measure again", "Measures every patch and network anew.")
                    .key("F5")
            }
            Self::StopAll => {
                Record::new("job.stop-all", "Stop all work", "Ends everything that runs.").ctrl("Period")
            }
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Stop(slot) if !model.session.jobs.is_running(*slot) => Some("it is over"),
            Self::StopAll if model.session.jobs.is_idle() => Some("nothing is running"),
            Self::MeasureAgain if model.sheet.patches.is_empty() && model.sheet.networks.is_empty() => {
                Some("the sheet has neither patch nor network")
            }
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Stop(slot) => stop(model, &[slot]),
            Self::StopAll => stop(model, &Slot::ALL),
            Self::MeasureAgain => {
                model.session.jobs.abandon(Slot::Measure);
                model.session.jobs.abandon(Slot::Networks);
                model.session.forget_measured();
            }
        }
    }
}

fn stop(model: &mut Model, slots: &[Slot]) {
    for slot in slots {
        model.session.jobs.stop(*slot);
    }
    // What was stopped stays stopped until the sheet changes.
    if slots.contains(&Slot::Measure) {
        model.session.pause_measuring(&model.sheet);
    }
    if slots.contains(&Slot::Networks) {
        model.session.pause_charting();
    }
}

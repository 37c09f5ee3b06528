//! Stopping what runs in the background.

use crate::desk::{Model, Slot};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum JobCommand {
    Stop(Slot),
    StopAll,
}

impl JobCommand {
    pub(super) const LISTED: &[Self] = &[Self::StopAll];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Stop(_) => Record::new("job.stop", "Stop", "Ends this work; what is done stays."),
            Self::StopAll => {
                Record::new("job.stop-all", "Stop all work", "Ends everything that runs.").ctrl("Period")
            }
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Stop(slot) if !model.session.jobs.is_running(*slot) => Some("it is over"),
            Self::StopAll if model.session.jobs.is_idle() => Some("nothing is running"),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Stop(slot) => model.session.jobs.stop(slot),
            Self::StopAll => Slot::ALL.into_iter().for_each(|slot| model.session.jobs.stop(slot)),
        }
    }
}

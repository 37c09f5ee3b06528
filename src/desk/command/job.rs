//! Stopping what runs in the background.

use crate::desk::{Model, Slot, recovering};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum JobCommand {
    Stop(Slot),
    StopAll,
    /// Forgets what was measured and measures everything again.
    MeasureAgain,
    /// Lays bedforms into the selected patch and seeks them again.
    Recover,
}

impl JobCommand {
    pub(super) const LISTED: &[Self] = &[Self::MeasureAgain, Self::Recover, Self::StopAll];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Stop(_) => Record::new("job.stop", "Stop", "Ends this work; what is done stays."),
            Self::MeasureAgain => {
                Record::new("job.measure", "Measure again", "Measures every patch and network anew.")
                    .key("F5")
            }
            Self::Recover => Record::new(
                "job.recover",
                "Lay bedforms in",
                "Lays bedforms of known trend into the selected patch and counts how many are found again.",
            ),
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
            Self::Recover if model.selected_patch().is_none() => Some("no patch is selected"),
            Self::Recover if model.sheet.settings.recovery.trends == 0 => {
                Some("the settings leave it out: no trend is laid in")
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
                model.session.jobs.abandon(Slot::Comparisons);
                model.session.jobs.abandon(Slot::Recovery);
                model.session.forget_measured();
            }
            Self::Recover => recovering::ask(model),
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
    if slots.contains(&Slot::Recovery) {
        model.session.recovering.pause();
    }
    if slots.contains(&Slot::Comparisons) {
        model.session.comparing.pause();
    }
}

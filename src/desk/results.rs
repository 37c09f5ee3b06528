//! What was measured, kept with the fingerprint of what made it: a result that the sheet has moved
//! away from is shown as out of date, never hidden.

use std::collections::BTreeMap;

use crate::study::{Failure, Id, PatchFinding, Sheet, TogetherFinding, WindEntry, WindFinding, fingerprint};

/// All results of the session.
#[derive(Debug, Default)]
pub struct Results {
    patches: BTreeMap<Id, Measured>,
    winds: BTreeMap<Id, WindResult>,
    /// What they say together, with the fingerprint of the sheet.
    together: Option<(String, TogetherFinding)>,
    /// Fingerprint of the sheet as it stands now.
    sheet_now: String,
    /// Fingerprints of the patches as the sheet stands now.
    now: BTreeMap<Id, String>,
}

/// The latest measurement of a patch.
#[derive(Debug)]
pub struct Measured {
    /// The finding, or why there is none.
    pub outcome: Result<PatchFinding, String>,
    /// Of what was measured, even when it failed.
    pub fingerprint: String,
    /// Measured on the full raster, not on the quick reduced one.
    pub exact: bool,
}

/// What came of a wind record.
#[derive(Debug)]
pub struct WindResult {
    pub id: Id,
    /// Of what was asked.
    pub fingerprint: String,
    pub outcome: Result<WindFinding, String>,
}

/// How far a patch's result may be relied on.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    Unmeasured,
    /// Exact, and the sheet is still as measured.
    Current,
    /// A quick look at a reduced raster; the exact one follows.
    Coarse,
    /// The sheet has moved on.
    OutOfDate,
    Failed,
}

impl Results {
    /// Takes note of how the sheet stands; call after each change of it.
    pub fn follow(&mut self, sheet: &Sheet) {
        self.now = sheet.patches.iter().map(|p| (p.id, fingerprint::of_patch(sheet, p))).collect();
        self.sheet_now = fingerprint::of_sheet(sheet);
        self.winds.retain(|id, _| sheet.wind(*id).is_some());
    }

    pub fn take_patch(&mut self, id: Id, measured: Measured) {
        self.patches.insert(id, measured);
    }

    pub fn take_wind(&mut self, result: WindResult) {
        self.winds.insert(result.id, result);
    }

    /// The finding of a patch, current or not.
    pub fn patch(&self, id: Id) -> Option<&PatchFinding> {
        self.patches.get(&id)?.outcome.as_ref().ok()
    }

    pub fn measured(&self, id: Id) -> Option<&Measured> {
        self.patches.get(&id)
    }

    pub fn take_together(&mut self, sheet: String, together: TogetherFinding) {
        self.together = Some((sheet, together));
    }

    /// What all patches say together, if that is as the sheet stands.
    pub fn together(&self) -> Option<&TogetherFinding> {
        self.together.as_ref().filter(|(of, _)| *of == self.sheet_now).map(|(_, together)| together)
    }

    pub fn wind(&self, id: Id) -> Option<&WindResult> {
        self.winds.get(&id)
    }

    /// Whether every wind record of the sheet is worked out as the sheet stands.
    pub fn has_winds(&self, sheet: &Sheet) -> bool {
        let current = |entry: &WindEntry| {
            self.winds.get(&entry.id).is_some_and(|r| r.fingerprint == fingerprint::of_wind(sheet, entry))
        };
        sheet.winds.iter().all(current)
    }

    pub fn standing(&self, id: Id) -> Standing {
        let Some(measured) = self.patches.get(&id) else { return Standing::Unmeasured };
        if self.now.get(&id) != Some(&measured.fingerprint) {
            return Standing::OutOfDate;
        }
        match (&measured.outcome, measured.exact) {
            (_, false) => Standing::Coarse,
            (Ok(_), true) => Standing::Current,
            (Err(_), true) => Standing::Failed,
        }
    }

    /// A text that changes whenever the result of a patch or its standing does.
    pub fn stamp(&self, id: Id) -> String {
        let of = self.patches.get(&id).map_or("", |measured| measured.fingerprint.as_str());
        format!("{}{:?}{of}", id.0, self.standing(id))
    }

    /// What failed, as the sheet stands.
    pub fn failures(&self, sheet: &Sheet) -> Vec<Failure> {
        let patches = sheet.patches.iter().filter_map(|p| {
            let why = self.patches.get(&p.id)?.outcome.as_ref().err()?.clone();
            Some(Failure { what: format!("patch {}", p.name), why })
        });
        let winds = sheet.winds.iter().filter_map(|w| {
            let why = self.winds.get(&w.id)?.outcome.as_ref().err()?.clone();
            Some(Failure { what: format!("wind record {}", w.name), why })
        });
        winds.chain(patches).collect()
    }

    /// Patches whose exact result is wanting, in the order of the sheet.
    pub fn wanting(&self, sheet: &Sheet) -> Vec<Id> {
        let done = |id| matches!(self.standing(id), Standing::Current | Standing::Failed);
        sheet.patches.iter().map(|p| p.id).filter(|id| !done(*id)).collect()
    }
}

impl Standing {
    pub fn is_current(self) -> bool {
        self == Self::Current
    }

    /// A word for the ledger; empty when there is nothing to say.
    pub fn remark(self) -> &'static str {
        match self {
            Self::Unmeasured => "not measured yet",
            Self::Current => "",
            Self::Coarse => "first look, exact follows",
            Self::OutOfDate => "out of date",
            Self::Failed => "failed",
        }
    }
}

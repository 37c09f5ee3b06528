//! What was measured, kept with the fingerprint of what made it: a result that the sheet has moved
//! away from is shown as out of date, never hidden.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::crests::Struck;
use super::{Compared, Crested, Recovered};
use crate::ground::{Bounds, Point, Polyline};
use crate::study::{
    ComparisonFinding, Failure, Id, NetworkFinding, PatchFinding, RecoveryFinding, Sheet, TogetherFinding,
    WindEntry, WindFinding, fingerprint,
};

/// All results of the session.
#[derive(Debug, Default)]
pub struct Results {
    patches: BTreeMap<Id, Measured>,
    crests: BTreeMap<Id, Crested>,
    struck: BTreeMap<Id, Struck>,
    winds: BTreeMap<Id, WindResult>,
    networks: BTreeMap<Id, Charted>,
    comparisons: BTreeMap<Id, Compared>,
    /// By patch.
    recoveries: BTreeMap<Id, Recovered>,
    /// What they say together, with the fingerprint of patches and winds.
    together: Option<(String, TogetherFinding)>,
    /// Fingerprint of patches and winds as the sheet stands now.
    sheet_now: String,
    /// Fingerprints of the patches, networks and comparisons as the sheet stands now.
    now: BTreeMap<Id, String>,
    /// Fingerprints of the recoveries as the sheet stands now, by patch.
    recoveries_now: BTreeMap<Id, String>,
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
    /// Of what makes the trend: an edit of crests alone leaves it as it is.
    pub texture: String,
}

/// The latest measurement of a network.
#[derive(Debug)]
pub struct Charted {
    /// The finding, or why there is none.
    pub outcome: Result<Arc<NetworkFinding>, String>,
    /// Of what was measured, even when it failed.
    pub fingerprint: String,
    /// The box of each reach, so that what is under the pointer is found at once.
    pub boxes: Vec<Bounds>,
    /// The network in small, for the ledger.
    pub sketch: Vec<Stick>,
}

/// A reach in small: its order (1 where undefined) and its line in a unit square, upper left first.
#[derive(Clone, Debug, PartialEq)]
pub struct Stick {
    pub order: u32,
    pub line: Vec<[f32; 2]>,
}

/// What came of a wind record.
#[derive(Debug)]
pub struct WindResult {
    pub id: Id,
    /// Of what was asked.
    pub fingerprint: String,
    pub outcome: Result<WindFinding, String>,
}

/// How far a result of a patch or network may be relied on.
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
        let patches = sheet.patches.iter().map(|p| (p.id, fingerprint::of_patch(sheet, p)));
        let networks = sheet.networks.iter().map(|n| (n.id, fingerprint::of_network(sheet, n)));
        let comparisons = sheet.comparisons.iter().map(|c| (c.id, fingerprint::of_comparison(sheet, c)));
        self.now = patches.chain(networks).chain(comparisons).collect();
        self.comparisons.retain(|id, _| sheet.comparison(*id).is_some());
        self.recoveries_now =
            sheet.patches.iter().map(|p| (p.id, fingerprint::of_recovery(sheet, p))).collect();
        self.recoveries.retain(|id, _| sheet.patch(*id).is_some());
        self.sheet_now = fingerprint::of_patches(sheet);
        self.winds.retain(|id, _| sheet.wind(*id).is_some());
        self.networks.retain(|id, _| sheet.network(*id).is_some());
        self.crests.retain(|id, _| sheet.patch(*id).is_some());
        for patch in &sheet.patches {
            if let Some(crested) = self.crests.get(&patch.id) {
                self.struck.entry(patch.id).or_default().follow(&patch.crests.rejected, crested);
            }
        }
    }

    pub fn take_patch(&mut self, id: Id, measured: Measured) {
        match &measured.outcome {
            // A quick look traces nothing: the lines of before stay.
            Ok(_) if !measured.exact => {}
            Ok(finding) => {
                self.crests.insert(id, Crested::new(finding));
            }
            Err(_) => {
                self.crests.remove(&id);
            }
        }
        self.patches.insert(id, measured);
    }

    pub fn take_network(&mut self, id: Id, charted: Charted) {
        self.networks.insert(id, charted);
    }

    pub fn take_comparison(&mut self, id: Id, compared: Compared) {
        self.comparisons.insert(id, compared);
    }

    /// The finding of a comparison, current or not.
    pub fn comparison(&self, id: Id) -> Option<&Arc<ComparisonFinding>> {
        self.comparisons.get(&id)?.outcome.as_ref().ok()
    }

    pub fn compared(&self, id: Id) -> Option<&Compared> {
        self.comparisons.get(&id)
    }

    /// How far the result of a comparison may be relied on.
    pub fn comparison_standing(&self, id: Id) -> Standing {
        match self.comparisons.get(&id) {
            None => Standing::Unmeasured,
            Some(compared) if self.now.get(&id) != Some(&compared.fingerprint) => Standing::OutOfDate,
            Some(compared) if compared.outcome.is_ok() => Standing::Current,
            Some(_) => Standing::Failed,
        }
    }

    /// Comparisons whose result is wanting, with the fingerprint it will have, in the order of the sheet.
    pub fn comparisons_wanting(&self, sheet: &Sheet) -> Vec<(Id, String)> {
        let done = |id| matches!(self.comparison_standing(id), Standing::Current | Standing::Failed);
        let now = |id: Id| Some((id, self.now.get(&id)?.clone()));
        sheet.comparisons.iter().map(|c| c.id).filter(|id| !done(*id)).filter_map(now).collect()
    }

    /// A text that changes whenever a comparison of a patch or its standing does.
    fn comparisons_stamp(&self, patch: Id) -> String {
        let mine =
            self.comparisons.iter().filter(|(_, c)| c.outcome.as_ref().is_ok_and(|f| f.patch == patch));
        mine.map(|(id, c)| format!("{}{:?}{}", id.0, self.comparison_standing(*id), c.fingerprint)).collect()
    }

    pub fn take_recovery(&mut self, id: Id, recovered: Recovered) {
        self.recoveries.insert(id, recovered);
    }

    /// Forgets what synthetic bedforms in a patch said.
    pub fn drop_recovery(&mut self, id: Id) {
        self.recoveries.remove(&id);
    }

    /// What synthetic bedforms in a patch say, current or not.
    pub fn recovery(&self, id: Id) -> Option<&Arc<RecoveryFinding>> {
        self.recoveries.get(&id)?.outcome.as_ref().ok()
    }

    pub fn recovered(&self, id: Id) -> Option<&Recovered> {
        self.recoveries.get(&id)
    }

    /// How far what synthetic bedforms in a patch say may be relied on.
    pub fn recovery_standing(&self, id: Id) -> Standing {
        match self.recoveries.get(&id) {
            None => Standing::Unmeasured,
            Some(recovered) if self.recoveries_now.get(&id) != Some(&recovered.fingerprint) => {
                Standing::OutOfDate
            }
            Some(recovered) if recovered.outcome.is_ok() => Standing::Current,
            Some(_) => Standing::Failed,
        }
    }

    pub fn take_wind(&mut self, result: WindResult) {
        self.winds.insert(result.id, result);
    }

    /// The finding of a patch, current or not.
    pub fn patch(&self, id: Id) -> Option<&PatchFinding> {
        self.patches.get(&id)?.outcome.as_ref().ok()
    }

    /// Whether the exact trend of a patch is known: since it was measured nothing but its crests was edited.
    pub fn knows_texture(&self, sheet: &Sheet, id: Id) -> bool {
        let measured = self.patches.get(&id).filter(|measured| measured.exact);
        let patch = sheet.patch(id);
        measured
            .zip(patch)
            .is_some_and(|(measured, patch)| measured.texture == fingerprint::of_texture(sheet, patch))
    }

    /// The crests of a patch as last traced, current or not.
    pub fn crests(&self, id: Id) -> Option<&Crested> {
        self.crests.get(&id)
    }

    /// The line rejected at a mark, if it was seen since the sheet was opened.
    pub fn rejected(&self, id: Id, mark: Point) -> Option<&Polyline> {
        self.struck.get(&id)?.line(mark)
    }

    /// Whether those crests are as the sheet stands.
    pub fn crests_are_current(&self, id: Id) -> bool {
        self.crests.get(&id).is_some_and(|crested| self.now.get(&id) == Some(&crested.fingerprint))
    }

    pub fn measured(&self, id: Id) -> Option<&Measured> {
        self.patches.get(&id)
    }

    /// The finding of a network, current or not.
    pub fn network(&self, id: Id) -> Option<&Arc<NetworkFinding>> {
        self.networks.get(&id)?.outcome.as_ref().ok()
    }

    pub fn charted(&self, id: Id) -> Option<&Charted> {
        self.networks.get(&id)
    }

    /// How far the result of a network may be relied on.
    pub fn network_standing(&self, id: Id) -> Standing {
        match self.networks.get(&id) {
            None => Standing::Unmeasured,
            Some(charted) if self.now.get(&id) != Some(&charted.fingerprint) => Standing::OutOfDate,
            Some(charted) if charted.outcome.is_ok() => Standing::Current,
            Some(_) => Standing::Failed,
        }
    }

    /// Networks whose result is wanting, with the fingerprint it will have, in the order of the sheet.
    pub fn networks_wanting(&self, sheet: &Sheet) -> Vec<(Id, String)> {
        let done = |id| matches!(self.network_standing(id), Standing::Current | Standing::Failed);
        let now = |id: Id| Some((id, self.now.get(&id)?.clone()));
        sheet.networks.iter().map(|n| n.id).filter(|id| !done(*id)).filter_map(now).collect()
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

    /// A text that changes whenever the result of a network or its standing does.
    pub fn network_stamp(&self, id: Id) -> String {
        let of = self.networks.get(&id).map_or("", |charted| charted.fingerprint.as_str());
        format!("{}{:?}{of}", id.0, self.network_standing(id))
    }

    /// A text that changes whenever the result of a patch or its standing does.
    pub fn stamp(&self, id: Id) -> String {
        let of = self.patches.get(&id).map_or("", |measured| measured.fingerprint.as_str());
        let compared = self.comparisons_stamp(id);
        format!("{}{:?}{of}{:?}{compared}", id.0, self.standing(id), self.recovery_standing(id))
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
        let networks = sheet.networks.iter().filter_map(|n| {
            let why = self.networks.get(&n.id)?.outcome.as_ref().err()?.clone();
            Some(Failure { what: format!("network {}", n.name), why })
        });
        let comparisons = sheet.comparisons.iter().filter_map(|c| {
            let why = self.comparisons.get(&c.id)?.outcome.as_ref().err()?.clone();
            Some(Failure { what: format!("comparison {}", c.name), why })
        });
        winds.chain(patches).chain(networks).chain(comparisons).collect()
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

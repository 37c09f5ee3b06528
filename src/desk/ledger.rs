//! What the ledger shows: one entry a patch, in words and figures.

use crate::plate::numbers;
use crate::study::{Id, Patch, PatchFinding, VerdictFinding};

use super::{Model, Standing};

/// One entry of the ledger.
#[derive(Debug)]
pub struct Entry<'a> {
    pub id: Id,
    pub name: &'a str,
    pub tags: &'a [String],
    pub selected: bool,
    pub standing: Standing,
    pub finding: Option<&'a PatchFinding>,
    /// The first verdict that was not refused.
    pub verdict: Option<&'a VerdictFinding>,
    /// `"62.3° ± 3.1°"`, `"no preferred trend"`, or why there is none.
    pub trend: String,
    /// `"412 m (395 to 431)"`; empty without a spacing.
    pub spacing: String,
}

/// The entries, in the order of the sheet.
pub fn entries(model: &Model) -> Vec<Entry<'_>> {
    model.sheet.patches.iter().map(|patch| entry(model, patch)).collect()
}

impl Entry<'_> {
    /// The entry in one line, for screen readers and tests.
    pub fn spoken(&self) -> String {
        let remark = self.standing.remark();
        let parts = [self.name, &self.trend, &self.spacing, remark];
        parts.iter().filter(|part| !part.is_empty()).copied().collect::<Vec<_>>().join(", ")
    }
}

fn entry<'a>(model: &'a Model, patch: &'a Patch) -> Entry<'a> {
    let results = &model.session.results;
    let finding = results.patch(patch.id);
    let failed = results.measured(patch.id).and_then(|m| m.outcome.as_ref().err());
    Entry {
        id: patch.id,
        name: &patch.name,
        tags: &patch.tags,
        selected: model.view.patch == Some(patch.id),
        standing: results.standing(patch.id),
        finding,
        verdict: finding.and_then(|f| f.verdicts.iter().find(|v| v.refused.is_none())),
        trend: finding.map(trend_words).or(failed.cloned()).unwrap_or_default(),
        spacing: finding.map(spacing_words).unwrap_or_default(),
    }
}

/// The trend with its interval, or that there is none.
pub fn trend_words(finding: &PatchFinding) -> String {
    finding.trend.axis.map_or_else(
        || "no preferred trend".to_owned(),
        |axis| numbers::axis_with_interval(axis, finding.trend.ci95_half_deg),
    )
}

fn spacing_words(finding: &PatchFinding) -> String {
    let spectrum = &finding.spectrum;
    spectrum
        .spacing
        .map(|spacing| numbers::length_with_interval(spacing, spectrum.spacing_ci95, finding.unit))
        .unwrap_or_default()
}

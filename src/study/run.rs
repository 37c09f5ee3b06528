//! The one executor. Window and command line both come through here, so they give the same bits.

use std::collections::HashMap;
use std::sync::{Arc, Mutex, PoisonError};

use crate::ground::{Stopped, Work};

use super::comparison::comparison;
use super::judges::{self, Judges};
use super::network::{Terrains, agreements, network_finding};
use super::patch::patch_finding;
use super::recovery::recovery;
use super::together::together;
use super::window::Detail;
use super::winds::{self, WindStudy};
use super::{
    ComparisonFinding, Failure, Findings, Id, NetworkEntry, NetworkFinding, OpenRaster, PatchFinding,
    RasterEntry, RasterFinding, RecoveryFinding, Sheet, Sources, fingerprint,
};

/// Results kept by fingerprint, so that an edit recomputes only what it touches. With or without
/// it a run gives the same bits.
#[derive(Debug, Default)]
pub struct Memo {
    winds: Mutex<HashMap<String, Arc<WindStudy>>>,
    patches: Mutex<HashMap<String, Arc<PatchFinding>>>,
    networks: Mutex<HashMap<String, Arc<NetworkFinding>>>,
    recoveries: Mutex<HashMap<String, Arc<RecoveryFinding>>>,
    comparisons: Mutex<HashMap<String, Arc<ComparisonFinding>>>,
    terrains: Terrains,
}

/// Everything the sheet asks for. A part that fails is named in `failures`; the rest is complete.
///
/// # Errors
/// [`Stopped`].
pub fn run(sheet: &Sheet, sources: &Sources, memo: &Memo, work: &Work) -> Result<Findings, Stopped> {
    let (winds, mut failures) = run_winds(sheet, sources, memo, work)?;
    failures.splice(0..0, sources.failures.iter().cloned());
    let mut patches = Vec::new();
    for patch in &sheet.patches {
        match run_patch(sheet, sources, patch.id, &winds, Detail::Exact, memo, work)? {
            Ok(finding) => patches.push((*finding).clone()),
            Err(why) => failures.push(Failure { what: format!("patch {}", patch.name), why }),
        }
    }
    let mut networks = Vec::new();
    for entry in &sheet.networks {
        match run_network(sheet, sources, entry.id, memo, work)? {
            Ok(finding) => networks.push((*finding).clone()),
            Err(why) => failures.push(Failure { what: format!("network {}", entry.name), why }),
        }
    }
    let (recoveries, refused) = run_recoveries(sheet, sources, &winds, memo, work)?;
    failures.extend(refused);
    let mut comparisons = Vec::new();
    for entry in &sheet.comparisons {
        match run_comparison(sheet, sources, entry.id, memo, work)? {
            Ok(finding) => comparisons.push((*finding).clone()),
            Err(why) => failures.push(Failure { what: format!("comparison {}", entry.name), why }),
        }
    }
    let rasters =
        sheet.rasters.iter().filter_map(|entry| Some(raster(entry, sources.rasters.get(&entry.id)?)));
    Ok(Findings {
        sheet_fingerprint: fingerprint::of_sheet(sheet),
        rasters: rasters.collect(),
        together: together(sheet, &patches.iter().collect::<Vec<_>>(), &winds),
        winds: winds.into_iter().map(|w| w.finding.clone()).collect(),
        patches,
        networks,
        recoveries,
        comparisons,
        failures,
    })
}

/// All wind records of the sheet.
///
/// # Errors
/// [`Stopped`].
pub fn run_winds(
    sheet: &Sheet,
    sources: &Sources,
    memo: &Memo,
    work: &Work,
) -> Result<(Vec<Arc<WindStudy>>, Vec<Failure>), Stopped> {
    let (mut studies, mut failures) = (Vec::new(), Vec::new());
    for entry in &sheet.winds {
        let Some(record) = sources.winds.get(&entry.id) else { continue };
        // Names stand in findings, so a renamed entry is computed anew.
        let key = format!("{} {}", fingerprint::of_wind(sheet, entry), entry.name);
        if let Some(known) = recall(&memo.winds, &key) {
            studies.push(known);
            continue;
        }
        match winds::study(sheet, entry, record, work) {
            Ok(study) => studies.push(keep(&memo.winds, key, study)),
            Err(error) => {
                let why = winds::in_words(error)?;
                failures.push(Failure { what: format!("wind record {}", entry.name), why });
            }
        }
    }
    Ok((studies, failures))
}

/// One patch, or in words why it cannot be measured.
///
/// # Errors
/// [`Stopped`].
pub fn run_patch(
    sheet: &Sheet,
    sources: &Sources,
    id: Id,
    winds: &[Arc<WindStudy>],
    detail: Detail,
    memo: &Memo,
    work: &Work,
) -> Result<Result<Arc<PatchFinding>, String>, Stopped> {
    let Some(patch) = sheet.patch(id) else { return Ok(Err(format!("the sheet has no patch {}", id.0))) };
    let Some(entry) = sheet.raster(patch.raster) else {
        return Ok(Err(format!("it lies on raster {}, which the sheet does not have", patch.raster.0)));
    };
    let Some(open) = sources.rasters.get(&patch.raster) else {
        return Ok(Err(format!("its raster “{}” is not open", entry.name)));
    };
    let exact = detail == Detail::Exact;
    let Judges { records, cautions } = judges::of_patch(sheet, patch, Some(&open.place));
    let judges: Vec<_> = winds.iter().filter(|w| records.contains(&w.finding.id)).collect();
    let names: Vec<_> = judges.iter().map(|w| w.finding.name.as_str()).collect();
    let key = format!("{} {} {}", fingerprint::of_patch(sheet, patch), patch.name, names.join(" "));
    if let Some(known) = recall(&memo.patches, &key).filter(|_| exact) {
        return Ok(Ok(known));
    }
    match patch_finding(sheet, patch, entry, open, &judges, detail, work)? {
        Ok(mut finding) => {
            finding.cautions.extend(cautions);
            Ok(Ok(if exact { keep(&memo.patches, key, finding) } else { Arc::new(finding) }))
        }
        Err(why) => Ok(Err(why)),
    }
}

/// Synthetic bedforms laid into one patch and sought again, whether or not its light is known; in words why that
/// cannot be done. The patch itself is measured first where the memo does not hold it.
///
/// # Errors
/// [`Stopped`].
pub fn run_recovery(
    sheet: &Sheet,
    sources: &Sources,
    id: Id,
    winds: &[Arc<WindStudy>],
    memo: &Memo,
    work: &Work,
) -> Result<Result<Arc<RecoveryFinding>, String>, Stopped> {
    let found = match run_patch(sheet, sources, id, winds, Detail::Exact, memo, work)? {
        Ok(found) => found,
        Err(why) => return Ok(Err(why)),
    };
    let patch = sheet.patch(id);
    let entry = patch.and_then(|patch| sheet.raster(patch.raster));
    let open = patch.and_then(|patch| sources.rasters.get(&patch.raster));
    let (Some(patch), Some(entry), Some(open)) = (patch, entry, open) else {
        return Ok(Err("its raster is not open".into()));
    };
    let key = format!("{} {}", fingerprint::of_recovery(sheet, patch), patch.name);
    if let Some(known) = recall(&memo.recoveries, &key) {
        return Ok(Ok(known));
    }
    let finding = recovery(sheet, patch, entry, open, &found, work)?;
    Ok(finding.map(|finding| keep(&memo.recoveries, key, finding)))
}

/// Bedforms laid into every patch that was measured and whose light is known, unless the settings leave that out.
fn run_recoveries(
    sheet: &Sheet,
    sources: &Sources,
    winds: &[Arc<WindStudy>],
    memo: &Memo,
    work: &Work,
) -> Result<(Vec<RecoveryFinding>, Vec<Failure>), Stopped> {
    let (mut found, mut failures) = (Vec::new(), Vec::new());
    if sheet.settings.recovery.trends == 0 {
        return Ok((found, failures));
    }
    let lit = |id| sheet.raster(id).is_some_and(|raster: &RasterEntry| raster.light_from.is_some());
    for patch in sheet.patches.iter().filter(|patch| lit(patch.raster)) {
        if run_patch(sheet, sources, patch.id, winds, Detail::Exact, memo, work)?.is_err() {
            continue;
        }
        match run_recovery(sheet, sources, patch.id, winds, memo, work)? {
            Ok(finding) => found.push((*finding).clone()),
            Err(why) => failures.push(Failure { what: format!("bedforms laid into {}", patch.name), why }),
        }
    }
    Ok((found, failures))
}

/// One channel network, or in words why it cannot be measured.
///
/// # Errors
/// [`Stopped`].
pub fn run_network(
    sheet: &Sheet,
    sources: &Sources,
    id: Id,
    memo: &Memo,
    work: &Work,
) -> Result<Result<Arc<NetworkFinding>, String>, Stopped> {
    let Some(entry) = sheet.network(id) else { return Ok(Err(format!("the sheet has no network {}", id.0))) };
    let this = match lone_network(sheet, sources, entry, memo, work)? {
        Ok(this) => this,
        Err(why) => return Ok(Err(why)),
    };
    let mut others = Vec::new();
    for other in sheet.networks.iter().filter(|other| other.id != id) {
        others.extend(lone_network(sheet, sources, other, memo, work)?.ok());
    }
    let others: Vec<&NetworkFinding> = others.iter().map(Arc::as_ref).collect();
    let mut finding = (*this).clone();
    finding.agreements = agreements(sheet, sources, &finding, &others);
    Ok(Ok(Arc::new(finding)))
}

/// A network by itself.
fn lone_network(
    sheet: &Sheet,
    sources: &Sources,
    entry: &NetworkEntry,
    memo: &Memo,
    work: &Work,
) -> Result<Result<Arc<NetworkFinding>, String>, Stopped> {
    let key = format!("{} {}", fingerprint::of_lone_network(sheet, entry), entry.name);
    if let Some(known) = recall(&memo.networks, &key) {
        return Ok(Ok(known));
    }
    let finding = network_finding(sheet, entry, sources, &memo.terrains, work)?;
    Ok(finding.map(|finding| keep(&memo.networks, key, finding)))
}

/// A patch held against the same ground on another raster, or in words why it cannot be.
///
/// # Errors
/// [`Stopped`].
pub fn run_comparison(
    sheet: &Sheet,
    sources: &Sources,
    id: Id,
    memo: &Memo,
    work: &Work,
) -> Result<Result<Arc<ComparisonFinding>, String>, Stopped> {
    let Some(entry) = sheet.comparison(id) else {
        return Ok(Err(format!("the sheet has no comparison {}", id.0)));
    };
    // Names stand in findings, so what is renamed is computed anew.
    let names = [
        sheet.patch(entry.patch).map(|p| (p.name.as_str(), sheet.raster(p.raster).map(|r| r.name.as_str()))),
        Some(("", sheet.raster(entry.raster).map(|r| r.name.as_str()))),
    ];
    let key = format!("{} {names:?}", fingerprint::of_comparison(sheet, entry));
    if let Some(known) = recall(&memo.comparisons, &key) {
        return Ok(Ok(known));
    }
    let finding = comparison(sheet, entry, sources, work)?;
    Ok(finding.map(|finding| keep(&memo.comparisons, key, finding)))
}

/// What a raster is, as used.
pub fn raster(entry: &RasterEntry, open: &OpenRaster) -> RasterFinding {
    let info = open.raster.info();
    let centre = crate::ground::Point::new(0.5 * info.width as f64, 0.5 * info.height as f64);
    let metres = open.place.unit() == crate::ground::LengthUnit::Metre;
    RasterFinding {
        id: entry.id,
        name: entry.name.clone(),
        path: entry.path.file_name().map_or(String::new(), |n| n.to_string_lossy().into_owned()),
        width: info.width,
        height: info.height,
        bands: info.bands.len(),
        sample: info.sample.name().to_owned(),
        pixel_m: open.place.local_frame(centre).filter(|_| metres).map(|f| f.pixel_size()),
        body: open.place.body.name.clone(),
        projection: open.label.clone(),
        nodata: info.nodata,
        valid_fraction: None,
        cautions: open.cautions.clone(),
    }
}

fn recall<T>(shelf: &Mutex<HashMap<String, Arc<T>>>, key: &str) -> Option<Arc<T>> {
    shelf.lock().unwrap_or_else(PoisonError::into_inner).get(key).cloned()
}

fn keep<T>(shelf: &Mutex<HashMap<String, Arc<T>>>, key: String, value: T) -> Arc<T> {
    let value = Arc::new(value);
    shelf.lock().unwrap_or_else(PoisonError::into_inner).insert(key, Arc::clone(&value));
    value
}

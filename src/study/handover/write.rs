//! Everything a run leaves in its folder, each file replaced in one step.

use std::path::{Path, PathBuf};

use crate::files::layers::{LayerError, write_csv, write_geojson, write_geopackage};
use crate::files::save;
use crate::study::{Findings, Sheet, Sources};

use super::comparisons::comparison_table;
use super::crest_layers::{crest_table, lonlat_crests};
use super::layers::{layers, lonlat_patches, node_table, patch_table, verdict_table, wind_table};
use super::network_layers::{
    drop_table, junction_table, lonlat_reaches, network_table, profile_table, reach_table, width_table,
};
use super::obstacles::{lonlat_outcrops, obstacle_table};
use super::pattern_light::recovery_table;
use super::populations::{population_table, scale_table};
use super::records::calendar_table;
use super::weighing::{flip_table, sensitivity_table, together_table};
use super::{bibtex, findings_json};

/// A file that could not be written.
#[derive(Debug, thiserror::Error)]
pub enum HandoverError {
    #[error("{path}: {source}", path = path.display())]
    Io { path: PathBuf, source: std::io::Error },
    #[error(transparent)]
    Layer(#[from] LayerError),
}

/// Writes findings, tables, layers, sources and the `extra` files (plates) into `folder`; returns
/// the names written, in order.
///
/// # Errors
/// [`HandoverError`] at the first file that cannot be written; those before it are whole.
pub fn write_all(
    folder: &Path,
    sheet: &Sheet,
    sources: &Sources,
    findings: &Findings,
    extra: &[(String, Vec<u8>)],
) -> Result<Vec<String>, HandoverError> {
    let mut written = Vec::new();
    let mut bytes = |name: &str, content: &[u8]| {
        let path = folder.join(name);
        save::bytes(&path, content, None).map_err(|source| HandoverError::Io { path, source })?;
        written.push(name.to_owned());
        Ok::<(), HandoverError>(())
    };
    bytes("findings.json", findings_json(sheet, findings).as_bytes())?;
    bytes("sources.bib", bibtex().as_bytes())?;
    for (name, content) in extra {
        bytes(name, content)?;
    }
    let tables = [
        patch_table(findings),
        node_table(findings, sources),
        verdict_table(findings),
        flip_table(findings),
        together_table(findings),
        wind_table(findings),
        sensitivity_table(findings),
        calendar_table(findings),
        obstacle_table(findings),
        scale_table(findings),
        population_table(findings),
        crest_table(findings, sources),
        recovery_table(findings),
        network_table(findings),
        reach_table(findings),
        profile_table(findings),
        width_table(findings),
        junction_table(findings),
        drop_table(findings),
        comparison_table(findings),
    ];
    for table in tables.iter().filter(|t| !t.rows.is_empty()) {
        let name = format!("{}.csv", table.name);
        write_csv(&folder.join(&name), &table.columns, &table.rows)?;
        written.push(name);
    }
    let layers = layers(sheet, findings, sources);
    if !layers.is_empty() {
        write_geopackage(&folder.join("findings.gpkg"), &layers)?;
        written.push("findings.gpkg".into());
    }
    if let Some(layer) = lonlat_patches(sheet, findings, sources) {
        write_geojson(&folder.join("patches.geojson"), &layer)?;
        written.push("patches.geojson".into());
    }
    if let Some(layer) = lonlat_outcrops(sheet, findings, sources) {
        write_geojson(&folder.join("outcrops.geojson"), &layer)?;
        written.push("outcrops.geojson".into());
    }
    if let Some(layer) = lonlat_crests(findings, sources) {
        write_geojson(&folder.join("crests.geojson"), &layer)?;
        written.push("crests.geojson".into());
    }
    if let Some(layer) = lonlat_reaches(findings, sources) {
        write_geojson(&folder.join("channels.geojson"), &layer)?;
        written.push("channels.geojson".into());
    }
    Ok(written)
}

//! Fingerprints: what made a result, in 64 hex digits. A result whose fingerprint differs from the
//! sheet's is out of date.

use serde_json::{Value, json};
use sha2::{Digest as _, Sha256};

use super::{Comparison, NetworkEntry, Patch, RasterEntry, Sheet, WindChoice, WindEntry};

/// SHA-256 of the sheet without what only changes how it looks (tone, notes) and without folders, so
/// that a colleague's copy elsewhere has the same fingerprint.
pub fn of_sheet(sheet: &Sheet) -> String {
    let rasters: Vec<_> = sheet.rasters.iter().map(raster).collect();
    let winds: Vec<_> = sheet.winds.iter().map(placed_wind).collect();
    digest(&json!([
        sheet.seed,
        rasters,
        sheet.patches,
        winds,
        sheet.settings,
        sheet.obstacles,
        sheet.networks,
        sheet.comparisons
    ]))
}

/// SHA-256 of all that makes what the patches and wind records say: the sheet without its networks.
pub fn of_patches(sheet: &Sheet) -> String {
    let rasters: Vec<_> = sheet.rasters.iter().map(raster).collect();
    let winds: Vec<_> = sheet.winds.iter().map(placed_wind).collect();
    digest(&json!([sheet.seed, rasters, sheet.patches, winds, of_bedforms(sheet), sheet.obstacles]))
}

/// SHA-256 of all that makes a patch's finding: its outline, its raster, the outcrops on it, the settings,
/// the winds it is judged by, the seed.
pub fn of_patch(sheet: &Sheet, patch: &Patch) -> String {
    digest(&json!([texture(sheet, patch), patch.crests, patch.populations]))
}

/// SHA-256 of all of that but what the user said of crests and populations, which leave trend, spacing and
/// verdicts of the whole patch as they are.
pub fn of_texture(sheet: &Sheet, patch: &Patch) -> String {
    digest(&texture(sheet, patch))
}

fn texture(sheet: &Sheet, patch: &Patch) -> Value {
    // Any record may become the nearest when it is moved, so all of them count there, with their places.
    let winds: Vec<_> = match &patch.winds {
        WindChoice::All | WindChoice::Nearest => sheet.winds.iter().map(placed_wind).collect(),
        WindChoice::Chosen(ids) => {
            sheet.winds.iter().filter(|w| ids.contains(&w.id)).map(placed_wind).collect()
        }
    };
    // Their names too: findings print them.
    let obstacles: Vec<_> = sheet.obstacles.iter().filter(|o| o.raster == patch.raster).collect();
    json!([
        obstacles,
        sheet.seed,
        patch.id,
        patch.outline,
        patch.stated_axis,
        patch.cover,
        patch.sense,
        sheet.raster(patch.raster).map(raster),
        patch.winds == WindChoice::Nearest,
        winds,
        of_bedforms(sheet)
    ])
}

/// SHA-256 of all that makes a network's finding: its own making, and the other networks it is compared with.
pub fn of_network(sheet: &Sheet, entry: &NetworkEntry) -> String {
    let all: Vec<_> = sheet.networks.iter().map(|n| (&n.name, of_lone_network(sheet, n))).collect();
    digest(&json!([of_lone_network(sheet, entry), all]))
}

/// SHA-256 of all that makes a network by itself: its ground, what was said and drawn, its rasters, the settings,
/// the seed.
pub fn of_lone_network(sheet: &Sheet, entry: &NetworkEntry) -> String {
    let heights = entry.image().and_then(|image| image.elevation);
    let rasters = [Some(entry.raster), heights].map(|id| id.and_then(|id| sheet.raster(id)).map(raster));
    let s = &sheet.settings;
    let settings = json!([s.drainage, s.channel, s.network, s.flow]);
    digest(&json!([sheet.seed, entry.id, entry.within, entry.source, rasters, settings]))
}

/// SHA-256 of all that makes the routed ground of a network, whatever its threshold and outlets.
pub fn of_terrain(sheet: &Sheet, entry: &NetworkEntry) -> String {
    let s = &sheet.settings.drainage;
    let closed = entry.elevation().map(|e| &e.closed);
    let how = json!([s.conditioning, s.breach_depth_m, s.breach_cells, s.router]);
    digest(&json!([sheet.raster(entry.raster).map(raster), entry.within, closed, how]))
}

/// SHA-256 of all that makes what synthetic bedforms in a patch say; its crests have no part in it.
pub fn of_recovery(sheet: &Sheet, patch: &Patch) -> String {
    digest(&json!([of_texture(sheet, patch), sheet.settings.recovery]))
}

/// SHA-256 of all that makes a comparison: its patch, the second raster, the settings.
pub fn of_comparison(sheet: &Sheet, entry: &Comparison) -> String {
    let patch = sheet.patch(entry.patch).map(|patch| of_patch(sheet, patch));
    digest(&json!([patch, entry, sheet.raster(entry.raster).map(raster), sheet.settings.compare]))
}

/// SHA-256 of all that makes a record's finding.
pub fn of_wind(sheet: &Sheet, entry: &WindEntry) -> String {
    let v = &sheet.settings.verdict;
    digest(&json!([sheet.seed, wind(entry), sheet.settings.wind, v.flux_up, v.flux_up_doubt]))
}

/// The settings that bear on patches; those of channels do not.
fn of_bedforms(sheet: &Sheet) -> Value {
    let s = &sheet.settings;
    json!([s.trend, s.spectrum, s.statistics, s.wind, s.verdict, s.obstacle, s.backwards, s.crest])
}

fn raster(r: &RasterEntry) -> Value {
    json!([r.id, r.path.file_name().map(|n| n.to_string_lossy()), r.bands, r.kind, r.placement, r.light_from])
}

fn wind(w: &WindEntry) -> Value {
    let file = w.path.file_name().map(|n| n.to_string_lossy());
    json!([w.id, file, w.import, w.height_m, w.roughness_m, w.body])
}

/// With its place, which chooses among records and is no part of what one says.
fn placed_wind(w: &WindEntry) -> Value {
    json!([wind(w), w.at])
}

fn digest(value: &Value) -> String {
    Sha256::digest(value.to_string()).iter().map(|byte| format!("{byte:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Polygon;
    use crate::study::Id;

    #[test]
    fn renaming_keeps_a_patch_current_and_moving_a_vertex_does_not() {
        let mut sheet = Sheet::empty("t");
        let patch = Patch::new(Id(1), "a", Id(2), Polygon::rectangle(10.0, 10.0));
        sheet.patches.push(patch.clone());
        let before = of_patch(&sheet, &patch);
        let renamed = Patch { name: "b".into(), ..patch.clone() };
        assert_eq!(of_patch(&sheet, &renamed), before);
        let mut moved = patch;
        moved.outline.outer[0].x += 1e-9;
        assert_ne!(of_patch(&sheet, &moved), before);
    }
}

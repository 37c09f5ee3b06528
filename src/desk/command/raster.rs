//! Rasters: opening, and what the user says about them.

use std::path::PathBuf;

use crate::desk::{Ask, MergeKey, Model, Purpose};
use crate::files::raster::Bands;
use crate::ground::Azimuth;
use crate::study::{Id, ImageKind, NetworkSource, Placement, RasterEntry, Tone};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum RasterCommand {
    AskOpen,
    /// Adds the raster at a path to the sheet and opens it.
    Open(PathBuf),
    /// Looks for the file at another path.
    Relocate {
        id: Id,
        path: PathBuf,
    },
    Rename {
        id: Id,
        name: String,
    },
    Read {
        id: Id,
        bands: Bands,
    },
    Kind {
        id: Id,
        kind: ImageKind,
    },
    Place {
        id: Id,
        placement: Placement,
    },
    Tone {
        id: Id,
        tone: Tone,
    },
    Light {
        id: Id,
        from: Option<Azimuth>,
    },
    /// Takes the raster and its patches off the sheet.
    Remove(Id),
}

impl RasterCommand {
    pub(super) const LISTED: &[Self] = &[Self::AskOpen];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::AskOpen => {
                Record::new("raster.open", "Open raster…", "Lays an image or elevation file on the table.")
                    .ctrl_shift("O")
            }
            Self::Open(_) => {
                Record::new("raster.add", "Open this raster", "Opens the raster at a path.").editing()
            }
            Self::Relocate { .. } => {
                Record::new("raster.relocate", "Find raster elsewhere", "Reads it from another path.")
                    .editing()
            }
            Self::Rename { .. } => {
                Record::new("raster.rename", "Rename raster", "Gives the raster another name.").editing()
            }
            Self::Read { .. } => {
                Record::new("raster.bands", "Choose bands", "One band, or a weighted mix.").editing()
            }
            Self::Kind { .. } => {
                Record::new("raster.kind", "Say what the pixels are", "Brightness, radar or heights.")
                    .editing()
            }
            Self::Place { .. } => {
                Record::new("raster.place", "State size, north, body", "Where the file is silent.").editing()
            }
            Self::Tone { .. } => {
                Record::new("raster.tone", "Change tone", "How it is shown; never touches a number.")
                    .editing()
            }
            Self::Light { .. } => {
                Record::new("raster.light", "State the light", "Where sun or radar looks from.").editing()
            }
            Self::Remove(_) => Record::new(
                "raster.remove",
                "Remove raster",
                "Takes it, its patches and networks off the sheet.",
            )
            .editing(),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        let gone = |id: &Id| model.sheet.raster(*id).is_none().then_some("the raster is gone");
        match self {
            Self::AskOpen | Self::Open(_) => None,
            Self::Relocate { id, .. }
            | Self::Rename { id, .. }
            | Self::Read { id, .. }
            | Self::Kind { id, .. }
            | Self::Place { id, .. }
            | Self::Tone { id, .. }
            | Self::Light { id, .. }
            | Self::Remove(id) => gone(id),
        }
    }

    pub(super) fn merge_key(&self) -> Option<MergeKey> {
        match self {
            Self::Tone { id, .. } => Some(MergeKey::Tone(*id)),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::AskOpen => model.session.ask = Some(Ask::new(Purpose::OpenRaster, "")),
            Self::Open(path) => add(model, path),
            Self::Relocate { id, path } => {
                change(model, id, |raster| raster.path = path);
                model.session.rasters.remove(&id);
            }
            Self::Rename { id, name } => change(model, id, |raster| raster.name = name),
            Self::Read { id, bands } => {
                change(model, id, |raster| raster.bands = bands);
                model.session.rasters.remove(&id);
            }
            Self::Kind { id, kind } => change(model, id, |raster| raster.kind = kind),
            Self::Place { id, placement } => {
                change(model, id, |raster| raster.placement = placement);
                model.session.rasters.remove(&id);
            }
            Self::Tone { id, tone } => change(model, id, |raster| raster.tone = tone),
            Self::Light { id, from } => change(model, id, |raster| raster.light_from = from),
            Self::Remove(id) => remove(model, id),
        }
    }
}

fn change(model: &mut Model, id: Id, f: impl FnOnce(&mut RasterEntry)) {
    if let Some(raster) = model.sheet.rasters.iter_mut().find(|r| r.id == id) {
        f(raster);
    }
}

fn add(model: &mut Model, path: PathBuf) {
    let id = model.sheet.fresh_id();
    let name = path.file_stem().map_or_else(|| "raster".into(), |stem| stem.to_string_lossy().into_owned());
    let path = std::path::absolute(&path).unwrap_or(path);
    model.sheet.rasters.push(RasterEntry {
        id,
        name,
        path,
        bands: Bands::default(),
        kind: ImageKind::default(),
        placement: Placement::default(),
        tone: Tone::default(),
        light_from: None,
    });
    model.view.raster = Some(id);
}

fn remove(model: &mut Model, id: Id) {
    let name = model.sheet.raster(id).map(|r| r.name.clone()).unwrap_or_default();
    model.sheet.rasters.retain(|r| r.id != id);
    model.sheet.patches.retain(|p| p.raster != id);
    let patches: Vec<Id> = model.sheet.patches.iter().map(|p| p.id).collect();
    model.sheet.comparisons.retain(|c| c.raster != id && patches.contains(&c.patch));
    model.sheet.obstacles.retain(|o| o.raster != id);
    model.sheet.networks.retain(|n| n.raster != id);
    for network in &mut model.sheet.networks {
        if let NetworkSource::Image(image) = &mut network.source {
            image.elevation.take_if(|elevation| *elevation == id);
        }
    }
    model.drop_lost_selection();
    model.session.notices.done_with_undo(format!("Removed {name}, its patches and networks"));
}

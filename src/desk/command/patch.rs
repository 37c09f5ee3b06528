//! Patches: outlines and what belongs to them.

use std::path::{Path, PathBuf};

use crate::desk::{Ask, MergeKey, Model, Purpose};
use crate::files::layers::read_patches;
use crate::ground::{Axis, Point, Polygon};
use crate::science::alignment::backwards::{Cover, Sense};
use crate::study::{Id, Patch, PopulationName, WindChoice};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum PatchCommand {
    Add {
        raster: Id,
        outline: Polygon,
    },
    /// Another outline for a patch; those of one drag are one undo step.
    Reshape {
        id: Id,
        outline: Polygon,
    },
    Rename {
        id: Id,
        name: String,
    },
    Tag {
        id: Id,
        tags: Vec<String>,
    },
    /// The wind records to judge by.
    JudgeBy {
        id: Id,
        winds: WindChoice,
    },
    /// How much sand lies between the bedforms.
    Cover {
        id: Id,
        cover: Cover,
    },
    /// Which way the sand goes, as read from the ground; `None` = nothing tells.
    Sense {
        id: Id,
        sense: Option<Sense>,
    },
    /// An axis to weigh like a theory, or none.
    StateAxis {
        id: Id,
        axis: Option<Axis>,
    },
    /// What the population of this trend is called; an empty name takes its name away.
    NamePopulation {
        id: Id,
        axis: Axis,
        name: String,
    },
    AskBring,
    /// Adds the outlines of a GeoPackage or GeoJSON file to the raster on the table.
    Bring(PathBuf),
    Select(Option<Id>),
    SelectNext,
    SelectPrevious,
    Whole,
    Duplicate,
    Delete,
}

impl PatchCommand {
    pub(super) const LISTED: &[Self] =
        &[Self::Whole, Self::AskBring, Self::SelectNext, Self::SelectPrevious, Self::Duplicate, Self::Delete];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Add { .. } => Record::new("patch.add", "Add patch", "Adds an outlined region.").editing(),
            Self::Reshape { .. } => {
                Record::new("patch.reshape", "Reshape patch", "Moves corners of an outline.").editing()
            }
            Self::Rename { .. } => {
                Record::new("patch.rename", "Rename patch", "Gives the patch another name.").editing()
            }
            Self::Tag { .. } => Record::new("patch.tag", "Tag patch", "Words to sort patches by.").editing(),
            Self::JudgeBy { .. } => {
                Record::new("patch.judge-by", "Judge by wind", "Which wind records the verdicts use.")
                    .editing()
            }
            Self::Cover { .. } => {
                Record::new("patch.cover", "Sand cover", "How much sand lies between the bedforms.").editing()
            }
            Self::Sense { .. } => Record::new(
                "patch.sense",
                "Sense of the sand",
                "Which way forks, tapering or obstacles point.",
            )
            .editing(),
            Self::StateAxis { .. } => Record::new(
                "patch.state-axis",
                "State an axis",
                "An axis known from elsewhere, weighed like a theory.",
            )
            .editing(),
            Self::NamePopulation { .. } => Record::new(
                "patch.name-population",
                "Name population",
                "What the bedforms of this trend are called.",
            )
            .editing(),
            Self::AskBring => Record::new(
                "patch.bring",
                "Bring in patches…",
                "Adds outlines from a GeoPackage or GeoJSON file to the raster on the table.",
            ),
            Self::Bring(_) => {
                Record::new("patch.bring-path", "Bring in patches", "Adds the outlines of a file.").editing()
            }
            Self::Select(_) => Record::new("patch.select", "Select patch", "Shows the patch on the bench."),
            Self::SelectNext => {
                Record::new("patch.next", "Next patch", "Selects the next entry of the ledger.")
                    .alt("ArrowDown")
            }
            Self::SelectPrevious => {
                Record::new("patch.previous", "Previous patch", "Selects the entry before.").alt("ArrowUp")
            }
            Self::Whole => {
                Record::new("patch.whole", "Patch of the whole raster", "Outlines everything on the table.")
                    .ctrl("A")
                    .editing()
            }
            Self::Duplicate => {
                Record::new("patch.duplicate", "Duplicate patch", "Copies the selected patch.")
                    .ctrl("D")
                    .editing()
            }
            Self::Delete => Record::new(
                "patch.delete",
                "Delete patch",
                "Removes the selected patch; undo brings it back.",
            )
            .key("Delete")
            .editing(),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Duplicate | Self::Delete if model.selected_patch().is_none() => {
                Some("no patch is selected")
            }
            Self::SelectNext | Self::SelectPrevious if model.sheet.patches.is_empty() => {
                Some("the sheet has no patch")
            }
            Self::Whole | Self::AskBring | Self::Bring(_) if model.shown_size().is_none() => {
                Some("no raster is open")
            }
            Self::Reshape { id, .. }
            | Self::Rename { id, .. }
            | Self::Tag { id, .. }
            | Self::JudgeBy { id, .. }
            | Self::Cover { id, .. }
            | Self::Sense { id, .. }
            | Self::StateAxis { id, .. }
            | Self::NamePopulation { id, .. }
                if model.sheet.patch(*id).is_none() =>
            {
                Some("the patch is gone")
            }
            _ => None,
        }
    }

    pub(super) fn merge_key(&self) -> Option<MergeKey> {
        match self {
            Self::Reshape { id, .. } => Some(MergeKey::Outline(*id)),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Add { raster, outline } => add(model, raster, outline),
            Self::Reshape { id, outline } => change(model, id, |patch| patch.outline = outline),
            Self::Rename { id, name } => change(model, id, |patch| patch.name = name),
            Self::Tag { id, tags } => change(model, id, |patch| patch.tags = tags),
            Self::JudgeBy { id, winds } => change(model, id, |patch| patch.winds = winds),
            Self::Cover { id, cover } => change(model, id, |patch| patch.cover = cover),
            Self::Sense { id, sense } => change(model, id, |patch| patch.sense = sense),
            Self::StateAxis { id, axis } => change(model, id, |patch| patch.stated_axis = axis),
            Self::NamePopulation { id, axis, name } => change(model, id, |patch| {
                name_population(&mut patch.populations, axis, name.trim());
            }),
            Self::AskBring => model.session.ask = Some(Ask::new(Purpose::BringPatches, "")),
            Self::Bring(path) => bring(model, &path),
            Self::Select(id) => select(model, id),
            Self::SelectNext => step(model, 1),
            Self::SelectPrevious => step(model, -1),
            Self::Whole => {
                if let Some((raster, [width, height])) = model.shown_size() {
                    add(model, raster, Polygon::rectangle(width as f64, height as f64));
                }
            }
            Self::Duplicate => duplicate(model),
            Self::Delete => delete(model),
        }
    }
}

fn bring(model: &mut Model, path: &Path) {
    let Some((raster, size)) = model.shown_size() else { return };
    let Some(open) = model.session.sources.get(&raster) else { return };
    let epsg = open.raster.info().georeference.as_ref().and_then(|g| g.epsg);
    let read = match read_patches(path, &open.place, epsg, size) {
        Ok(read) => read,
        Err(why) => {
            return model.session.notices.problem(format!("{} gives no patches: {why}", path.display()));
        }
    };
    let count = read.shapes.len();
    for shape in read.shapes {
        let (id, tags) = (model.sheet.fresh_id(), shape.tags);
        model.sheet.patches.push(Patch { tags, ..Patch::new(id, shape.name, raster, shape.outline) });
    }
    read.notes.iter().for_each(|note| model.session.notices.problem(note.as_str()));
    model.session.notices.done_with_undo(format!("Brought in {count} patches"));
}

/// Gives the population of this trend its name, in place of the one it had. Measured anew, its trend may
/// have moved a little since.
fn name_population(names: &mut Vec<PopulationName>, axis: Axis, name: &str) {
    names.retain(|known| known.axis.separation(axis) > 10.0);
    if !name.is_empty() {
        names.push(PopulationName { axis, name: name.to_owned() });
    }
}

fn change(model: &mut Model, id: Id, f: impl FnOnce(&mut Patch)) {
    if let Some(patch) = model.sheet.patches.iter_mut().find(|p| p.id == id) {
        f(patch);
    }
}

fn add(model: &mut Model, raster: Id, outline: Polygon) {
    let id = model.sheet.fresh_id();
    let name = free_name(model, "Patch");
    model.sheet.patches.push(Patch::new(id, name, raster, outline));
    select(model, Some(id));
}

/// Selects, and shows the raster the patch lies on.
fn select(model: &mut Model, id: Option<Id>) {
    let patch = id.and_then(|id| model.sheet.patch(id));
    model.view.patch = patch.map(|p| p.id);
    if let Some(raster) = patch.map(|p| p.raster) {
        model.view.raster = Some(raster);
    }
}

fn step(model: &mut Model, by: isize) {
    let patches = &model.sheet.patches;
    let count = patches.len() as isize;
    let at = patches.iter().position(|p| Some(p.id) == model.view.patch);
    let next = match at {
        Some(at) => (at as isize + by).rem_euclid(count),
        None if by > 0 => 0,
        None => count - 1,
    };
    let id = patches.get(next as usize).map(|p| p.id);
    select(model, id);
}

fn duplicate(model: &mut Model) {
    let Some(patch) = model.selected_patch().cloned() else { return };
    // Beside the original, by a tenth of its width, so that both can be seen.
    let shift = patch.outline.bounds().map_or(0.0, |b| 0.1 * b.width());
    let outline = patch.outline.map(|p| Point::new(p.x + shift, p.y + shift));
    let name = free_name(model, &patch.name);
    let id = model.sheet.fresh_id();
    model.sheet.patches.push(Patch { id, name, outline, ..patch });
    select(model, Some(id));
}

fn delete(model: &mut Model) {
    let Some(at) = model.sheet.patches.iter().position(|p| Some(p.id) == model.view.patch) else { return };
    let gone = model.sheet.patches.remove(at);
    model.sheet.comparisons.retain(|c| c.patch != gone.id);
    let next = model.sheet.patches.get(at).or(model.sheet.patches.last()).map(|p| p.id);
    select(model, next);
    model.session.notices.done_with_undo(format!("Deleted {}", gone.name));
}

/// `stem 2`, `stem 3`, … whichever no patch has.
fn free_name(model: &Model, stem: &str) -> String {
    let base = stem.trim_end_matches(|c: char| c.is_ascii_digit()).trim_end();
    let taken = |name: &str| model.sheet.patches.iter().any(|p| p.name == name);
    let mut number = 1;
    loop {
        let name = format!("{base} {number}");
        if !taken(&name) {
            return name;
        }
        number += 1;
    }
}

//! Wind records: reading a file with a preview, and what the user says about the mast.

use std::path::PathBuf;

use crate::desk::{Answer, Ask, Import, MergeKey, Model, Page, Pick, Purpose, Reading, Slot};
use crate::files::wind_table::WindImport;
use crate::ground::{Body, LonLat};
use crate::study::{Id, WindEntry};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum WindCommand {
    AskImport,
    /// Reads the head of a file, guesses how it is laid out, and shows a preview.
    Preview(PathBuf),
    /// Opens the preview of a record of the sheet again.
    Review(Id),
    /// Another reading of the file in the preview.
    Reread(WindImport),
    /// Other stations or cells of the file in the preview.
    Choose(Pick),
    /// Mast and name in the preview.
    Describe {
        name: String,
        height_m: f64,
        roughness_m: f64,
        body: Option<Body>,
    },
    /// Puts the record of the preview on the sheet.
    Accept,
    Forget,
    Rename {
        id: Id,
        name: String,
    },
    Mast {
        id: Id,
        height_m: f64,
        roughness_m: f64,
    },
    Body {
        id: Id,
        body: Option<Body>,
    },
    /// Where the record stands.
    Place {
        id: Id,
        at: Option<LonLat>,
    },
    Remove(Id),
}

impl WindCommand {
    pub(super) const LISTED: &[Self] = &[Self::AskImport];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::AskImport => Record::new(
                "wind.import",
                "Import winds…",
                "Reads a wind record and shows what it is taken for.",
            )
            .ctrl("I"),
            Self::Preview(_) => Record::new("wind.preview", "Preview winds", "Shows how a file is read."),
            Self::Review(_) => Record::new("wind.review", "Review reading…", "Shows the preview again."),
            Self::Reread(_) => {
                Record::new("wind.reread", "Read differently", "Changes how the file is read.")
            }
            Self::Choose(_) => {
                Record::new("wind.choose", "Choose cells", "Which stations or cells of the file to take.")
            }
            Self::Describe { .. } => {
                Record::new("wind.describe", "Describe the mast", "Height and roughness.")
            }
            Self::Accept => {
                Record::new("wind.accept", "Use this record", "Puts the record on the sheet.").editing()
            }
            Self::Forget => Record::new("wind.forget", "Cancel import", "Drops the preview."),
            Self::Rename { .. } => {
                Record::new("wind.rename", "Rename winds", "Gives the record another name.").editing()
            }
            Self::Mast { .. } => {
                Record::new("wind.mast", "Change mast", "Height of the mast and roughness of the ground.")
                    .editing()
            }
            Self::Body { .. } => {
                Record::new("wind.body", "Change body of the winds", "Whose air and gravity apply.").editing()
            }
            Self::Place { .. } => {
                Record::new("wind.place", "Place winds", "Longitude and latitude where the record stands.")
                    .editing()
            }
            Self::Remove(_) => {
                Record::new("wind.remove", "Remove winds", "Takes the record off the sheet.").editing()
            }
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Reread(_) | Self::Choose(_) | Self::Describe { .. } | Self::Accept | Self::Forget
                if model.session.import.is_none() =>
            {
                Some("no file is in the preview")
            }
            Self::Accept => model.session.import.as_ref().and_then(Import::hindrance),
            Self::Review(id)
            | Self::Rename { id, .. }
            | Self::Mast { id, .. }
            | Self::Body { id, .. }
            | Self::Place { id, .. }
            | Self::Remove(id)
                if model.sheet.wind(*id).is_none() =>
            {
                Some("the record is gone")
            }
            _ => None,
        }
    }

    pub(super) fn merge_key(&self) -> Option<MergeKey> {
        match self {
            Self::Mast { id, .. } => Some(MergeKey::Mast(*id)),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::AskImport => model.session.ask = Some(Ask::new(Purpose::ImportWinds, "")),
            Self::Preview(path) => {
                let (body, centres) = (model.wind_body(), model.patch_centres());
                preview(model, move || Import::of_file(&path, body, &centres));
            }
            Self::Review(id) => {
                if let Some(entry) = model.sheet.wind(id).cloned() {
                    preview(model, move || Import::of_entry(&entry));
                }
            }
            Self::Reread(how) => {
                if let Some(import) = &mut model.session.import {
                    import.import = how;
                }
                reread(model);
            }
            Self::Choose(pick) => {
                let centres = model.patch_centres();
                if let Some(import) = &mut model.session.import {
                    import.choose(&pick, &centres);
                }
                reread(model);
            }
            Self::Describe { name, height_m, roughness_m, body } => {
                if let Some(import) = &mut model.session.import {
                    import.name = name;
                    import.height_m = height_m;
                    import.roughness_m = roughness_m;
                    import.body = body;
                }
            }
            Self::Accept => accept(model),
            Self::Forget => model.session.import = None,
            Self::Rename { id, name } => change(model, id, |wind| wind.name = name),
            Self::Mast { id, height_m, roughness_m } => change(model, id, |wind| {
                wind.height_m = height_m;
                wind.roughness_m = roughness_m;
            }),
            Self::Place { id, at } => change(model, id, |wind| wind.at = at),
            Self::Body { id, body } => change(model, id, |wind| wind.body = body),
            Self::Remove(id) => {
                model.sheet.winds.retain(|w| w.id != id);
                for patch in &mut model.sheet.patches {
                    patch.winds = std::mem::take(&mut patch.winds).without(id);
                }
                model.drop_lost_selection();
                model.session.notices.done_with_undo("Removed the wind record");
            }
        }
    }
}

fn change(model: &mut Model, id: Id, f: impl FnOnce(&mut WindEntry)) {
    if let Some(wind) = model.sheet.winds.iter_mut().find(|w| w.id == id) {
        f(wind);
    }
}

/// Guesses and reads on a thread of its own; the preview opens with the guess.
fn preview(model: &mut Model, guess: impl FnOnce() -> Result<Import, String> + Send + 'static) {
    model.session.jobs.start(Slot::ReadWinds, "Reading the winds", move |_, post| {
        let import = guess();
        let way = import.as_ref().ok().map(|import| (import.path.clone(), import.import.clone()));
        post.answer(Answer::Preview(Box::new(import)));
        if let Some((path, how)) = way {
            post.answer(Answer::Reading(Reading::of(&path, &how)));
        }
    });
}

/// Reads the file in the preview as it is taken now.
fn reread(model: &mut Model) {
    let Some(import) = &mut model.session.import else { return };
    import.outcome = None;
    let (path, how) = (import.path.clone(), import.import.clone());
    model.session.jobs.start(Slot::ReadWinds, "Reading the winds", move |_, post| {
        post.answer(Answer::Cells(Import::cells_of(&path, &how)));
        post.answer(Answer::Reading(Reading::of(&path, &how)));
    });
}

fn accept(model: &mut Model) {
    let Some(import) = model.session.import.take() else { return };
    let entries = import.into_entries(model.sheet.fresh_id());
    model.view.wind = entries.first().map(|entry| entry.id);
    if entries.len() > 1 {
        let words = format!(
            "Added {} wind records; the winds page says whether all of them or the nearest judge a patch",
            entries.len()
        );
        model.session.notices.done_with_undo(words);
    }
    for entry in entries {
        match model.sheet.winds.iter_mut().find(|w| w.id == entry.id) {
            Some(known) => *known = entry,
            None => model.sheet.winds.push(entry),
        }
    }
    model.view.page = Page::Winds;
}

//! The plate: its motif, size and format, and handing things over.

use std::path::PathBuf;

use crate::desk::plates::{self, Subject};
use crate::desk::{Answer, Ask, Model, Motif, PlateChoice, Purpose, Slot};
use crate::plate::compose::file_stem;

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum PlateCommand {
    /// Another motif, width, format or resolution.
    Choose(PlateChoice),
    AskExport,
    Export(PathBuf),
    AskHandOver,
    /// Writes findings, tables, layers and plates into a folder.
    HandOver(PathBuf),
}

impl PlateCommand {
    pub(super) const LISTED: &[Self] = &[Self::AskExport, Self::AskHandOver];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Choose(_) => Record::new("plate.choose", "Choose plate", "Motif, width, format."),
            Self::AskExport => {
                Record::new("plate.export", "Export plate…", "Writes the plate as SVG, PNG or PDF.").ctrl("E")
            }
            Self::Export(_) => Record::new("plate.export-path", "Export plate here", "Writes it to a path."),
            Self::AskHandOver => Record::new(
                "plate.hand-over",
                "Hand everything over…",
                "Writes findings, tables, layers and every plate into a folder.",
            )
            .ctrl_shift("E"),
            Self::HandOver(_) => {
                Record::new("plate.hand-over-path", "Hand over here", "Writes everything into this folder.")
            }
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        let nothing = || {
            let results = &model.session.results;
            let patches = model.sheet.patches.iter().any(|p| results.standing(p.id).is_current());
            let networks = model.sheet.networks.iter().any(|n| results.network_standing(n.id).is_current());
            let measured = patches || networks;
            (!measured).then_some("nothing is measured as the sheet stands")
        };
        match self {
            Self::Choose(_) => None,
            Self::AskExport | Self::Export(_)
                if matches!(model.view.plate.motif, Motif::Patch | Motif::Crests) =>
            {
                let id = model.view.patch;
                let current = id.is_some_and(|id| model.session.results.standing(id).is_current());
                (!current).then_some("no selected patch is measured as the sheet stands")
            }
            Self::AskExport | Self::Export(_) if model.view.plate.motif == Motif::Network => {
                let id = model.view.network;
                let current = id.is_some_and(|id| model.session.results.network_standing(id).is_current());
                (!current).then_some("no selected network is measured as the sheet stands")
            }
            Self::AskExport | Self::Export(_) => model.shown_size().is_none().then_some("no raster is open"),
            Self::AskHandOver | Self::HandOver(_) => nothing(),
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Choose(choice) => {
                let clamped = |value: f64, [least, greatest]: [f64; 2]| value.clamp(least, greatest);
                model.view.plate = PlateChoice {
                    width_mm: clamped(choice.width_mm, PlateChoice::WIDTHS_MM),
                    dpi: clamped(choice.dpi, PlateChoice::DPI),
                    ..choice
                };
            }
            Self::AskExport => {
                let name = match model.view.plate.motif {
                    Motif::Patch | Motif::Crests => {
                        model.selected_patch().map_or("plate", |p| p.name.as_str())
                    }
                    Motif::Network => model.selected_network().map_or("plate", |n| n.name.as_str()),
                    Motif::Overview => model.shown_raster().map_or("plate", |r| r.name.as_str()),
                };
                let suggested = format!("{}.{}", file_stem(name), model.view.plate.format.ending());
                model.session.ask = Some(Ask::new(Purpose::ExportPlate, suggested));
            }
            Self::Export(path) => export(model, path),
            Self::AskHandOver => model.session.ask = Some(Ask::new(Purpose::HandOver, "handover")),
            Self::HandOver(folder) => hand_over(model, folder),
        }
    }
}

fn export(model: &mut Model, path: PathBuf) {
    let (subject, choice) = (Subject::of(model), model.view.plate.clone());
    let path = plates::with_ending(path, choice.format);
    model.session.jobs.start(Slot::Export, "Writing the plate", move |work, post| {
        let figure = subject.compose(&choice, work);
        let written = figure.and_then(|figure| plates::export(&figure, &choice, &path));
        post.answer(Answer::Written(written.map(|()| format!("Wrote {}", path.display()))));
    });
}

fn hand_over(model: &mut Model, folder: PathBuf) {
    let subject = Subject::of(model);
    model.session.jobs.start(Slot::Export, "Handing over", move |work, post| {
        let written = subject.hand_over(&folder, work);
        post.answer(Answer::Written(written.map(|n| format!("Wrote {n} files into {}", folder.display()))));
    });
}

//! Answers to "which file?".

use std::path::PathBuf;

use crate::desk::{Ask, Model, Purpose};

use super::{
    Command, CrestCommand, PatchCommand, PlateCommand, RasterCommand, Record, SheetCommand, WindCommand,
    apply,
};

#[derive(Clone, Debug, PartialEq)]
pub enum AskCommand {
    /// The path the user chose.
    Answer(PathBuf),
    /// No system dialog came: the in-window field takes over.
    Type,
    Cancel,
}

impl AskCommand {
    pub(super) fn record(&self) -> Record {
        match self {
            Self::Answer(_) => Record::new("ask.answer", "Use this path", "Goes on with the chosen file."),
            Self::Type => {
                Record::new("ask.type", "Type the path", "Types a path instead of choosing a file.")
            }
            Self::Cancel => Record::new("ask.cancel", "Cancel", "Chooses no file."),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        model.session.ask.is_none().then_some("no file was asked for")
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Type => {
                if let Some(ask) = &mut model.session.ask {
                    ask.typed = true;
                }
            }
            Self::Cancel => {
                model.session.ask = None;
                model.session.after_save = None;
            }
            Self::Answer(path) => {
                if let Some(Ask { purpose, .. }) = model.session.ask.take() {
                    apply(model, follow_up(purpose, path));
                }
            }
        }
    }
}

/// What is done with the path.
fn follow_up(purpose: Purpose, path: PathBuf) -> Command {
    match purpose {
        Purpose::OpenSheet => Command::Sheet(SheetCommand::Open(path)),
        Purpose::SaveSheet => Command::Sheet(SheetCommand::SaveAs(path)),
        Purpose::BringPatches => Command::Patch(PatchCommand::Bring(path)),
        Purpose::ImportCrests => Command::Crest(CrestCommand::Import(path)),
        Purpose::ExportPlate => Command::Plate(PlateCommand::Export(path)),
        Purpose::HandOver => Command::Plate(PlateCommand::HandOver(path)),
        Purpose::ImportWinds => Command::Wind(WindCommand::Preview(path)),
        Purpose::OpenRaster => Command::Raster(RasterCommand::Open(path)),
    }
}

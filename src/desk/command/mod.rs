//! Commands: each described once, and `apply`, the only door to the model.

mod ask;
mod body;
mod compare;
mod crest;
mod draw;
mod job;
mod network;
mod obstacle;
mod patch;
mod plate;
mod raster;
mod setting;
mod sheet;
mod view;
mod wind;

pub use ask::AskCommand;
pub use body::BodyCommand;
pub use compare::ComparisonCommand;
pub use crest::CrestCommand;
pub use draw::DrawCommand;
pub use job::JobCommand;
pub use network::NetworkCommand;
pub use obstacle::ObstacleCommand;
pub use patch::PatchCommand;
pub use plate::PlateCommand;
pub use raster::RasterCommand;
pub use setting::SettingCommand;
pub use sheet::SheetCommand;
pub use view::ViewCommand;
pub use wind::WindCommand;

use std::fmt;
use std::path::PathBuf;

use super::{MergeKey, Model, pen, plates};

/// Everything a user can ask for, by area.
#[derive(Clone, Debug, PartialEq)]
pub enum Command {
    Sheet(SheetCommand),
    Ask(AskCommand),
    Raster(RasterCommand),
    Patch(PatchCommand),
    Obstacle(ObstacleCommand),
    Network(NetworkCommand),
    Crest(CrestCommand),
    Comparison(ComparisonCommand),
    Draw(DrawCommand),
    Wind(WindCommand),
    Plate(PlateCommand),
    Setting(SettingCommand),
    Job(JobCommand),
    View(ViewCommand),
    Body(BodyCommand),
}

/// A command described once; buttons, keys, the finder, help and tests read this.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Record {
    /// Stable, `"patch.delete"`.
    pub id: &'static str,
    /// On buttons and in the finder; ends in `…` when more will be asked.
    pub label: &'static str,
    pub hint: &'static str,
    pub key: Option<Chord>,
    /// Changes the sheet, so that undo takes it back.
    pub editing: bool,
}

/// A key with its modifiers. `key` is a letter, a digit or a name such as `"Delete"`.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Chord {
    /// Ctrl, or ⌘ where that is the habit.
    pub command: bool,
    pub shift: bool,
    pub alt: bool,
    pub key: &'static str,
}

impl Record {
    const fn new(id: &'static str, label: &'static str, hint: &'static str) -> Self {
        Self { id, label, hint, key: None, editing: false }
    }

    const fn editing(self) -> Self {
        Self { editing: true, ..self }
    }

    const fn key(self, key: &'static str) -> Self {
        Self { key: Some(Chord { command: false, shift: false, alt: false, key }), ..self }
    }

    const fn shift(self, key: &'static str) -> Self {
        Self { key: Some(Chord { command: false, shift: true, alt: false, key }), ..self }
    }

    const fn ctrl(self, key: &'static str) -> Self {
        Self { key: Some(Chord { command: true, shift: false, alt: false, key }), ..self }
    }

    const fn ctrl_shift(self, key: &'static str) -> Self {
        Self { key: Some(Chord { command: true, shift: true, alt: false, key }), ..self }
    }

    const fn alt(self, key: &'static str) -> Self {
        Self { key: Some(Chord { command: false, shift: false, alt: true, key }), ..self }
    }
}

impl fmt::Display for Chord {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (held, name) in [(self.command, "Ctrl"), (self.shift, "Shift"), (self.alt, "Alt")] {
            if held {
                write!(f, "{name} + ")?;
            }
        }
        f.write_str(self.key)
    }
}

impl Command {
    /// What the command is called and which key it has.
    pub fn record(&self) -> Record {
        match self {
            Self::Sheet(c) => c.record(),
            Self::Ask(c) => c.record(),
            Self::Raster(c) => c.record(),
            Self::Patch(c) => c.record(),
            Self::Obstacle(c) => c.record(),
            Self::Network(c) => c.record(),
            Self::Crest(c) => c.record(),
            Self::Comparison(c) => c.record(),
            Self::Draw(c) => c.record(),
            Self::Wind(c) => c.record(),
            Self::Plate(c) => c.record(),
            Self::Setting(c) => c.record(),
            Self::Job(c) => c.record(),
            Self::View(c) => c.record(),
            Self::Body(c) => c.record(),
        }
    }

    /// Opening a file as what its ending says it is.
    pub fn of_file(path: PathBuf) -> Self {
        let ending = path.extension().map(|e| e.to_string_lossy().to_lowercase()).unwrap_or_default();
        match ending.as_str() {
            "csv" | "txt" | "dat" | "tsv" => Self::Wind(WindCommand::Preview(path)),
            "gpkg" | "geojson" => Self::Patch(PatchCommand::Bring(path)),
            "json" => Self::Sheet(SheetCommand::Open(path)),
            _ => Self::Raster(RasterCommand::Open(path)),
        }
    }

    /// Why the command cannot be given now; `None` when it can.
    pub fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Sheet(c) => c.refusal(model),
            Self::Ask(c) => c.refusal(model),
            Self::Raster(c) => c.refusal(model),
            Self::Patch(c) => c.refusal(model),
            Self::Obstacle(c) => c.refusal(model),
            Self::Network(c) => c.refusal(model),
            Self::Crest(c) => c.refusal(model),
            Self::Comparison(c) => c.refusal(model),
            Self::Draw(c) => c.refusal(model),
            Self::Wind(c) => c.refusal(model),
            Self::Plate(c) => c.refusal(model),
            Self::Setting(c) => c.refusal(model),
            Self::Job(c) => c.refusal(model),
            Self::View(c) => c.refusal(model),
            Self::Body(c) => c.refusal(model),
        }
    }

    /// Commands with equal keys that follow one another are one undo step.
    fn merge_key(&self) -> Option<MergeKey> {
        match self {
            Self::Raster(c) => c.merge_key(),
            Self::Patch(c) => c.merge_key(),
            Self::Network(c) => c.merge_key(),
            Self::Wind(c) => c.merge_key(),
            Self::Setting(c) => c.merge_key(),
            Self::Sheet(_)
            | Self::Ask(_)
            | Self::Obstacle(_)
            | Self::Crest(_)
            | Self::Comparison(_)
            | Self::Draw(_)
            | Self::Job(_)
            | Self::Plate(_)
            | Self::View(_)
            | Self::Body(_) => None,
        }
    }

    /// Whether the command says nothing about the sheet while a drag goes on (pointer moves).
    fn is_passive(&self) -> bool {
        matches!(self, Self::View(_))
    }
}

/// The commands that need no further data, in the order of the finder.
pub fn listed() -> Vec<Command> {
    let sheet = SheetCommand::LISTED.iter().cloned().map(Command::Sheet);
    let raster = RasterCommand::LISTED.iter().cloned().map(Command::Raster);
    let setting = SettingCommand::LISTED.iter().cloned().map(Command::Setting);
    let plate = PlateCommand::LISTED.iter().cloned().map(Command::Plate);
    let job = JobCommand::LISTED.iter().cloned().map(Command::Job);
    let wind = WindCommand::LISTED.iter().cloned().map(Command::Wind);
    let draw = DrawCommand::LISTED.iter().cloned().map(Command::Draw);
    let patch = PatchCommand::LISTED.iter().cloned().map(Command::Patch);
    let view = ViewCommand::LISTED.iter().cloned().map(Command::View);
    let obstacle = ObstacleCommand::LISTED.iter().cloned().map(Command::Obstacle);
    let network = NetworkCommand::LISTED.iter().cloned().map(Command::Network);
    let crest = CrestCommand::LISTED.iter().cloned().map(Command::Crest);
    let compare = ComparisonCommand::LISTED.iter().cloned().map(Command::Comparison);
    let making = sheet.chain(raster).chain(wind).chain(draw).chain(patch).chain(obstacle).chain(network);
    making.chain(crest).chain(compare).chain(plate).chain(setting).chain(job).chain(view).collect()
}

/// Does what `command` asks. The only way the sheet and the view change.
pub fn apply(model: &mut Model, command: Command) {
    if let Some(why) = command.refusal(model) {
        model.session.notices.problem(format!("{}: {why}", command.record().label));
        return;
    }
    let record = command.record();
    if record.editing {
        model.session.history.remember(&model.sheet, record.label, command.merge_key());
    } else if !command.is_passive() {
        model.session.history.settle();
    }
    let passive = command.is_passive();
    match command {
        Command::Sheet(c) => c.apply(model),
        Command::Ask(c) => c.apply(model),
        Command::Raster(c) => c.apply(model),
        Command::Patch(c) => c.apply(model),
        Command::Obstacle(c) => c.apply(model),
        Command::Network(c) => c.apply(model),
        Command::Crest(c) => c.apply(model),
        Command::Comparison(c) => c.apply(model),
        Command::Draw(c) => c.apply(model),
        Command::Wind(c) => c.apply(model),
        Command::Plate(c) => c.apply(model),
        Command::Setting(c) => c.apply(model),
        Command::Job(c) => c.apply(model),
        Command::View(c) => c.apply(model),
        Command::Body(c) => c.apply(model),
    }
    if record.editing {
        model.session.history.forget_if_unchanged(&model.sheet);
    }
    if passive {
        plates::follow(model);
        pen::follow(model);
    } else {
        model.keep_up();
    }
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeMap;

    use super::listed;

    #[test]
    fn listed_commands_have_their_own_id_label_and_key() {
        let mut seen = BTreeMap::new();
        for command in listed() {
            let record = command.record();
            assert!(!record.hint.is_empty(), "{} has no hint", record.id);
            let key = record.key.map(|chord| format!("{chord}"));
            for name in [Some(record.id.to_owned()), Some(record.label.to_owned()), key].into_iter().flatten()
            {
                if let Some(other) = seen.insert(name.clone(), record.id) {
                    assert_eq!(other, record.id, "“{name}” is used twice");
                }
            }
        }
    }
}

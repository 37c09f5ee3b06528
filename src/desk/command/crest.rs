//! Crests: what the user says and draws of those of a patch.

use std::path::{Path, PathBuf};

use crate::desk::channels::pointer_reach;
use crate::desk::crests::{self, Crested};
use crate::desk::{Ask, Model, Purpose, Tool};
use crate::ground::{Point, Polygon};
use crate::science::crest::{CrestModel, CrestOrigin};
use crate::study::crest_edits::import_crests;
use crate::study::{CrestEntry, CrestStroke, Id, StrokeKind};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum CrestCommand {
    /// What a crest looks like here; `None` = that of the settings, or what fits best.
    SetModel {
        id: Id,
        model: Option<CrestModel>,
    },
    /// Whether only what is drawn counts.
    SetDrawnOnly {
        id: Id,
        drawn_only: bool,
    },
    /// Ground that is no bedform.
    Mask {
        id: Id,
        outline: Polygon,
    },
    RemoveMask {
        id: Id,
        index: usize,
    },
    /// Tones outside are no ground to trace on.
    SetToneLimits {
        id: Id,
        limits: Option<[f64; 2]>,
    },
    /// The line at this point is no crest.
    Reject {
        id: Id,
        at: Point,
    },
    BringBack {
        id: Id,
        index: usize,
    },
    /// The line at this point was looked at and stands.
    Accept {
        id: Id,
        at: Point,
    },
    TakeBack {
        id: Id,
        index: usize,
    },
    /// Every traced line of at least this confidence, 0 to 1.
    AcceptAbove {
        id: Id,
        confidence: f64,
    },
    /// The line at this point is two.
    Cut {
        id: Id,
        at: Point,
    },
    Uncut {
        id: Id,
        index: usize,
    },
    /// A line drawn with the pen.
    Lay {
        id: Id,
        stroke: CrestStroke,
    },
    RemoveStroke {
        id: Id,
        index: usize,
    },
    /// All lines that came out of files.
    RemoveImported {
        id: Id,
    },
    AskImport,
    /// Adds the lines of a GeoPackage or GeoJSON file to the selected patch.
    Import(PathBuf),
}

impl CrestCommand {
    pub(super) const LISTED: &[Self] = &[Self::AskImport];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::SetModel { .. } => Record::new(
                "crest.model",
                "Model of a crest",
                "What a crest looks like here: a ridge of tone or a step of it.",
            )
            .editing(),
            Self::SetDrawnOnly { .. } => Record::new(
                "crest.drawn-only",
                "Trace crests",
                "Whether crests are traced by themselves, or only those drawn and imported count.",
            )
            .editing(),
            Self::Mask { .. } => Record::new(
                "crest.mask",
                "Add mask",
                "Ground that is no bedform: ponds, roads, seams. Nothing is traced on it.",
            )
            .editing(),
            Self::RemoveMask { .. } => {
                Record::new("crest.remove-mask", "Remove mask", "Traces on this ground again.").editing()
            }
            Self::SetToneLimits { .. } => Record::new(
                "crest.tone-limits",
                "Limits of tone",
                "Darker or brighter ground is not traced on.",
            )
            .editing(),
            Self::Reject { .. } => {
                Record::new("crest.reject", "Reject this line", "Takes a traced line out.").editing()
            }
            Self::BringBack { .. } => {
                Record::new("crest.bring-back", "Bring line back", "Takes the cross away.").editing()
            }
            Self::Accept { .. } => {
                Record::new("crest.accept", "Accept this line", "You looked at it and it stands.").editing()
            }
            Self::TakeBack { .. } => {
                Record::new("crest.take-back", "Take acceptance back", "The line is as traced again.")
                    .editing()
            }
            Self::AcceptAbove { .. } => Record::new(
                "crest.accept-above",
                "Accept all from this confidence on",
                "Marks every traced line that is at least as sure as looked at.",
            )
            .editing(),
            Self::Cut { .. } => {
                Record::new("crest.cut", "Cut this line", "Makes two lines of one.").editing()
            }
            Self::Uncut { .. } => Record::new("crest.uncut", "Undo cut", "The line is one again.").editing(),
            Self::Lay { .. } => {
                Record::new("crest.stroke", "Add drawn crest", "Keeps the line drawn with the pen.").editing()
            }
            Self::RemoveStroke { .. } => {
                Record::new("crest.remove-stroke", "Remove drawn crest", "Takes the line away.").editing()
            }
            Self::RemoveImported { .. } => Record::new(
                "crest.remove-imported",
                "Remove imported crests",
                "Takes all lines out of files away.",
            )
            .editing(),
            Self::AskImport => Record::new(
                "crest.import",
                "Import crests…",
                "Adds lines of a GeoPackage or GeoJSON file to the selected patch.",
            ),
            Self::Import(_) => {
                Record::new("crest.import-path", "Import crests", "Adds the lines of a file.").editing()
            }
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        if let Self::AskImport | Self::Import(_) = self {
            return model.crest_patch().is_none().then_some(NO_PATCH);
        }
        let Some(patch) = self.subject().and_then(|id| model.sheet.patch(id)) else {
            return Some("the patch is gone");
        };
        let it = &patch.crests;
        match self {
            Self::SetToneLimits { limits: Some([least, most]), .. }
                if !(least.is_finite() && most.is_finite() && least < most) =>
            {
                Some("the lower limit must lie below the upper one")
            }
            Self::RemoveMask { index, .. } if *index >= it.masks.len() => Some("the mask is gone"),
            Self::BringBack { index, .. } if *index >= it.rejected.len() => Some("the cross is gone"),
            Self::TakeBack { index, .. } if *index >= it.accepted.len() => Some("the mark is gone"),
            Self::Uncut { index, .. } if *index >= it.cuts.len() => Some("the cut is gone"),
            Self::RemoveStroke { index, .. } if *index >= it.strokes.len() => Some("the line is gone"),
            Self::Lay { stroke, .. } if stroke.line.0.len() < 2 => Some("a crest needs two picks"),
            Self::AcceptAbove { id, .. } if model.session.results.crests(*id).is_none() => {
                Some("no crests are traced yet")
            }
            _ => None,
        }
    }

    /// The patch it is about, where the command names one.
    fn subject(&self) -> Option<Id> {
        match self {
            Self::AskImport | Self::Import(_) => None,
            Self::SetModel { id, .. }
            | Self::SetDrawnOnly { id, .. }
            | Self::Mask { id, .. }
            | Self::RemoveMask { id, .. }
            | Self::SetToneLimits { id, .. }
            | Self::Reject { id, .. }
            | Self::BringBack { id, .. }
            | Self::Accept { id, .. }
            | Self::TakeBack { id, .. }
            | Self::AcceptAbove { id, .. }
            | Self::Cut { id, .. }
            | Self::Uncut { id, .. }
            | Self::Lay { id, .. }
            | Self::RemoveStroke { id, .. }
            | Self::RemoveImported { id } => Some(*id),
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::SetModel { id, model: wanted } => change(model, id, |it| it.model = wanted),
            Self::SetDrawnOnly { id, drawn_only } => change(model, id, |it| it.drawn_only = drawn_only),
            Self::Mask { id, outline } => change(model, id, |it| it.masks.push(outline)),
            Self::RemoveMask { id, index } => change(model, id, |it| {
                it.masks.remove(index);
            }),
            Self::SetToneLimits { id, limits } => change(model, id, |it| it.tone_limits = limits),
            Self::Reject { id, at } => {
                // A line cannot be both: what was accepted of it is taken back.
                let line = model.session.results.crests(id).and_then(|c| c.line_at(at)).cloned();
                change(model, id, |it| {
                    it.accepted.retain(|mark| line.as_ref().is_none_or(|line| !crests::lies_on(*mark, line)));
                    it.rejected.push(at);
                });
            }
            Self::BringBack { id, index } => change(model, id, |it| {
                it.rejected.remove(index);
            }),
            Self::Accept { id, at } => change(model, id, |it| it.accepted.push(at)),
            Self::TakeBack { id, index } => change(model, id, |it| {
                it.accepted.remove(index);
            }),
            Self::AcceptAbove { id, confidence } => accept_above(model, id, confidence),
            Self::Cut { id, at } => change(model, id, |it| it.cuts.push(at)),
            Self::Uncut { id, index } => change(model, id, |it| {
                it.cuts.remove(index);
            }),
            Self::Lay { id, stroke } => change(model, id, |it| it.strokes.push(stroke)),
            Self::RemoveStroke { id, index } => change(model, id, |it| {
                it.strokes.remove(index);
            }),
            Self::RemoveImported { id } => change(model, id, |it| {
                it.strokes.retain(|stroke| stroke.kind != StrokeKind::Import);
            }),
            Self::AskImport => model.session.ask = Some(Ask::new(Purpose::ImportCrests, "")),
            Self::Import(path) => import(model, &path),
        }
    }

    /// What a click of the tools that cut, reject and accept asks for: the mark laid there, or the one that
    /// lies there taken away. `None`, and a word to the user, when there is no line.
    pub(super) fn of_click(model: &mut Model, tool: Tool, at: Point) -> Option<Self> {
        let patch = model.crest_patch()?;
        let (id, it, reach) = (patch.id, &patch.crests, pointer_reach(model));
        let crested = model.session.results.crests(id);
        let found = match tool {
            Tool::Reject => of_reject(id, it, crested, at, reach),
            Tool::Accept => of_accept(id, it, crested, at, reach),
            Tool::Cut => of_cut(id, it, crested, at, reach),
            _ => Err(NO_LINE),
        };
        found.inspect_err(|why| model.session.notices.problem(*why)).ok()
    }
}

/// Why the tools of crests lie idle.
pub(super) const NO_PATCH: &str = "no patch on the raster on the table is selected";
const NO_LINE: &str = "No crest line is so near.";
const BY_HAND: &str = "Only traced lines are accepted: this one is yours already.";

fn nearest(marks: &[Point], at: Point, reach: f64) -> Option<usize> {
    let near = marks.iter().enumerate().map(|(i, mark)| (i, mark.distance(at)));
    near.filter(|(_, d)| *d <= reach).min_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
}

fn of_reject(
    id: Id,
    it: &CrestEntry,
    crested: Option<&Crested>,
    at: Point,
    reach: f64,
) -> Result<CrestCommand, &'static str> {
    if let Some(index) = nearest(&it.rejected, at, reach) {
        return Ok(CrestCommand::BringBack { id, index });
    }
    let near = crested.and_then(|crested| crested.near(at, reach).map(|near| (near, crested)));
    // What was laid by hand lies under the lines found; of two as near it is the one that can go.
    let laid = crests::stroke_near(&it.strokes, at, reach);
    if let Some((index, _)) = laid.filter(|(_, d)| near.is_none_or(|(near, _)| *d <= near.distance + 0.5)) {
        return Ok(CrestCommand::RemoveStroke { id, index });
    }
    let (near, crested) = near.ok_or(NO_LINE)?;
    let line = &crested.lines()[near.line].line;
    let crossed = it.rejected.iter().position(|mark| crests::lies_on(*mark, line));
    Ok(match crossed {
        Some(index) => CrestCommand::BringBack { id, index },
        None => CrestCommand::Reject { id, at: near.at },
    })
}

fn of_accept(
    id: Id,
    it: &CrestEntry,
    crested: Option<&Crested>,
    at: Point,
    reach: f64,
) -> Result<CrestCommand, &'static str> {
    let Some((near, crested)) = crested.and_then(|c| Some((c.near(at, reach)?, c))) else {
        let lost = nearest(&it.accepted, at, reach).ok_or(NO_LINE)?;
        return Ok(CrestCommand::TakeBack { id, index: lost });
    };
    let line = &crested.lines()[near.line];
    let marked = it.accepted.iter().position(|mark| crests::lies_on(*mark, &line.line));
    match (marked, line.origin) {
        (Some(index), _) => Ok(CrestCommand::TakeBack { id, index }),
        (None, CrestOrigin::Drawn | CrestOrigin::Imported) => Err(BY_HAND),
        (None, CrestOrigin::Traced | CrestOrigin::Edited) => Ok(CrestCommand::Accept { id, at: near.at }),
    }
}

fn of_cut(
    id: Id,
    it: &CrestEntry,
    crested: Option<&Crested>,
    at: Point,
    reach: f64,
) -> Result<CrestCommand, &'static str> {
    if let Some(index) = nearest(&it.cuts, at, reach) {
        return Ok(CrestCommand::Uncut { id, index });
    }
    let near = crested.and_then(|crested| crested.near(at, reach)).ok_or(NO_LINE)?;
    Ok(CrestCommand::Cut { id, at: near.at })
}

fn change(model: &mut Model, id: Id, f: impl FnOnce(&mut CrestEntry)) {
    if let Some(patch) = model.sheet.patches.iter_mut().find(|p| p.id == id) {
        f(&mut patch.crests);
    }
}

fn accept_above(model: &mut Model, id: Id, confidence: f64) {
    let Some(crested) = model.session.results.crests(id) else { return };
    let marks: Vec<Point> =
        crested.unaccepted_from(confidence).filter_map(|line| crests::middle(&line.line)).collect();
    let count = marks.len();
    change(model, id, |it| it.accepted.extend(marks));
    model.session.notices.done_with_undo(match count {
        1 => "Accepted one line".to_owned(),
        count => format!("Accepted {count} lines"),
    });
}

fn import(model: &mut Model, path: &Path) {
    let Some(patch) = model.crest_patch() else { return };
    let Some(open) = model.session.sources.get(&patch.raster) else {
        return model.session.notices.problem("The raster of the patch is not open yet.");
    };
    let (id, name) = (patch.id, patch.name.clone());
    let read = match import_crests(path, open, patch) {
        Ok(read) => read,
        Err(why) => return model.session.notices.problem(format!("No crests were imported: {why}")),
    };
    let count = read.strokes.len();
    change(model, id, |it| it.strokes.extend(read.strokes));
    read.notes.iter().for_each(|note| model.session.notices.problem(note.as_str()));
    if count == 0 {
        return model.session.notices.problem(format!("No line of {} lies in {name}", path.display()));
    }
    let outside = match read.outside {
        0 => String::new(),
        outside => format!("; {outside} lie outside the patch"),
    };
    model.session.notices.done_with_undo(format!("Imported {count} lines into {name}{outside}"));
}

//! Outcrops: what stands in the way of the wind.

use crate::desk::Model;
use crate::ground::Polygon;
use crate::study::{Id, Obstacle};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum ObstacleCommand {
    Add {
        raster: Id,
        outline: Polygon,
    },
    Rename {
        id: Id,
        name: String,
    },
    Select(Option<Id>),
    SelectNext,
    /// Removes the selected outcrop.
    Delete,
}

impl ObstacleCommand {
    pub(super) const LISTED: &[Self] = &[Self::SelectNext, Self::Delete];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Add { .. } => {
                Record::new("obstacle.add", "Add outcrop", "Adds an outlined outcrop.").editing()
            }
            Self::Rename { .. } => {
                Record::new("obstacle.rename", "Rename outcrop", "Gives the outcrop another name.").editing()
            }
            Self::Select(_) => {
                Record::new("obstacle.select", "Select outcrop", "Shows the outcrop on the bench.")
            }
            Self::SelectNext => {
                Record::new("obstacle.next", "Next outcrop", "Selects the next outcrop of the raster.")
                    .key("J")
            }
            Self::Delete => Record::new(
                "obstacle.delete",
                "Delete outcrop",
                "Removes the selected outcrop; undo brings it back.",
            )
            .ctrl("Delete")
            .editing(),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Rename { id, .. } if model.sheet.obstacle(*id).is_none() => Some("the outcrop is gone"),
            Self::SelectNext if on_table(model).is_empty() => Some("no outcrop lies on this raster"),
            Self::Delete if model.selected_obstacle().is_none() => Some("no outcrop is selected"),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Add { raster, outline } => {
                let id = model.sheet.fresh_id();
                let name = free_name(model);
                model.sheet.obstacles.push(Obstacle { id, name, raster, outline });
                model.view.obstacle = Some(id);
            }
            Self::Rename { id, name } => {
                if let Some(obstacle) = model.sheet.obstacles.iter_mut().find(|o| o.id == id) {
                    obstacle.name = name;
                }
            }
            Self::Select(id) => model.view.obstacle = id.filter(|id| model.sheet.obstacle(*id).is_some()),
            Self::SelectNext => {
                let ids = on_table(model);
                let at = ids.iter().position(|id| Some(*id) == model.view.obstacle);
                model.view.obstacle = ids.get(at.map_or(0, |at| (at + 1) % ids.len())).copied();
            }
            Self::Delete => delete(model),
        }
    }
}

/// The outcrops of the raster on the table.
fn on_table(model: &Model) -> Vec<Id> {
    let raster = model.shown_raster().map(|r| r.id);
    model.sheet.obstacles.iter().filter(|o| Some(o.raster) == raster).map(|o| o.id).collect()
}

fn delete(model: &mut Model) {
    let Some(at) = model.sheet.obstacles.iter().position(|o| Some(o.id) == model.view.obstacle) else {
        return;
    };
    let gone = model.sheet.obstacles.remove(at);
    model.view.obstacle = None;
    model.session.notices.done_with_undo(format!("Deleted {}", gone.name));
}

/// `Outcrop 1`, `Outcrop 2`, … whichever none has.
fn free_name(model: &Model) -> String {
    let mut number = 1;
    loop {
        let name = format!("Outcrop {number}");
        if !model.sheet.obstacles.iter().any(|o| o.name == name) {
            return name;
        }
        number += 1;
    }
}

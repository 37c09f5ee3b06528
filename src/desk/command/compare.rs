//! Two pictures of one ground: a patch and another raster that shows it.

use crate::desk::Model;
use crate::study::{Comparison, Id};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum ComparisonCommand {
    /// Of the selected patch with another raster; `None` = the first it is not yet compared with.
    Add {
        raster: Option<Id>,
    },
    Rename {
        id: Id,
        name: String,
    },
    /// From the first to the second picture; `None` = not known.
    SetYears {
        id: Id,
        years: Option<f64>,
    },
    Delete(Id),
}

impl ComparisonCommand {
    pub(super) const LISTED: &[Self] = &[Self::Add { raster: None }];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Add { .. } => Record::new(
                "comparison.add",
                "Compare with another picture",
                "Holds the selected patch against the same ground on another raster: under another look, or at another time.",
            )
            .editing(),
            Self::Rename { .. } => {
                Record::new("comparison.rename", "Rename comparison", "Gives the comparison another name.")
                    .editing()
            }
            Self::SetYears { .. } => Record::new(
                "comparison.years",
                "Years between the pictures",
                "Time from the first to the second picture; below 0 when the second is older.",
            )
            .editing(),
            Self::Delete(_) => Record::new(
                "comparison.delete",
                "Delete comparison",
                "Removes the comparison; undo brings it back.",
            )
            .editing(),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        let gone = |id: &Id| model.sheet.comparison(*id).is_none().then_some("the comparison is gone");
        match self {
            Self::Add { .. } if model.selected_patch().is_none() => Some("no patch is selected"),
            Self::Add { raster: None } if first_other(model).is_none() => {
                Some("no other raster is left to compare it with")
            }
            Self::Add { raster: Some(id) } if model.sheet.raster(*id).is_none() => Some("the raster is gone"),
            Self::Add { raster: Some(id) } if model.selected_patch().is_some_and(|p| p.raster == *id) => {
                Some("the patch lies on that raster")
            }
            Self::Add { .. } => None,
            Self::SetYears { years: Some(y), .. } if !y.is_finite() || *y == 0.0 => {
                Some("years are a number other than 0")
            }
            Self::Rename { id, .. } | Self::SetYears { id, .. } | Self::Delete(id) => gone(id),
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Add { raster } => add(model, raster),
            Self::Rename { id, name } => change(model, id, |c| c.name = name),
            Self::SetYears { id, years } => change(model, id, |c| c.years = years),
            Self::Delete(id) => {
                let Some(at) = model.sheet.comparisons.iter().position(|c| c.id == id) else { return };
                let gone = model.sheet.comparisons.remove(at);
                model.session.notices.done_with_undo(format!("Deleted {}", gone.name));
            }
        }
    }
}

/// The first raster that the selected patch neither lies on nor is compared with.
fn first_other(model: &Model) -> Option<Id> {
    let patch = model.selected_patch()?;
    let taken = |id: Id| model.sheet.comparisons.iter().any(|c| c.patch == patch.id && c.raster == id);
    model.sheet.rasters.iter().map(|r| r.id).find(|id| *id != patch.raster && !taken(*id))
}

fn add(model: &mut Model, raster: Option<Id>) {
    let (Some(patch), Some(raster)) = (model.selected_patch(), raster.or_else(|| first_other(model))) else {
        return;
    };
    let second = model.sheet.raster(raster).map_or("", |r| r.name.as_str());
    let (patch, name) = (patch.id, format!("{} on {second}", patch.name));
    let id = model.sheet.fresh_id();
    model.sheet.comparisons.push(Comparison { id, name, patch, raster, years: None });
}

fn change(model: &mut Model, id: Id, f: impl FnOnce(&mut Comparison)) {
    if let Some(comparison) = model.sheet.comparisons.iter_mut().find(|c| c.id == id) {
        f(comparison);
    }
}

//! Bodies of one's own: what the program does not know by name, saved in the sheet.

use crate::desk::Model;
use crate::ground::Body;
use crate::study::Sheet;

use super::Record;

/// Own bodies are named by their place in the list of the sheet.
#[derive(Clone, Debug, PartialEq)]
pub enum BodyCommand {
    /// Adds a body; its name is made the only one of its kind.
    Add(Box<Body>),
    /// Changes a body, and every raster and wind record that lies on it.
    Change { at: usize, body: Box<Body> },
    /// Rasters and records on it keep its figures.
    Remove(usize),
}

impl BodyCommand {
    pub(super) fn record(&self) -> Record {
        match self {
            Self::Add(_) => {
                Record::new("body.add", "Add body", "Copies a body into the sheet, where it can be changed.")
                    .editing()
            }
            Self::Change { .. } => Record::new(
                "body.change",
                "Change body",
                "Its figures change in every raster and wind record that lies on it.",
            )
            .editing(),
            Self::Remove(_) => Record::new(
                "body.remove",
                "Remove body",
                "Takes the body off the list; rasters and records keep its figures.",
            )
            .editing(),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::Change { at, .. } | Self::Remove(at) if *at >= model.sheet.bodies.len() => {
                Some("the body is gone")
            }
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Add(body) => {
                let name = free_name(&model.sheet, &body.name);
                model.sheet.bodies.push(Body { name, ..*body });
            }
            Self::Change { at, body } => change(model, at, *body),
            Self::Remove(at) => {
                let body = model.sheet.bodies.remove(at);
                model.session.notices.done_with_undo(format!("Removed {}", body.name));
            }
        }
    }
}

/// `name`, or with the first number that makes it free.
fn free_name(sheet: &Sheet, name: &str) -> String {
    let taken = |name: &str| {
        Body::known().iter().any(|known| known.name == name) || sheet.bodies.iter().any(|b| b.name == name)
    };
    let stem = if taken(name) { format!("{name}, own") } else { name.to_owned() };
    let numbered = (2..).map(|n| format!("{stem} {n}"));
    std::iter::once(stem.clone()).chain(numbered).find(|name| !taken(name)).unwrap_or(stem)
}

/// The one place where an own body changes: in the list, and in the copies that rasters, records and the
/// preview hold. What cannot be is refused with the reason, and nothing changes.
fn change(model: &mut Model, at: usize, body: Body) {
    let sheet = &mut model.sheet;
    let others = sheet.bodies.iter().enumerate().filter(|(i, _)| *i != at).map(|(_, b)| b.name.as_str());
    let taken = Body::known().iter().any(|known| known.name == body.name)
        || others.into_iter().any(|name| name == body.name);
    let problem = if taken { Some("another body has this name".to_owned()) } else { body.problem() };
    if let Some(problem) = problem {
        model.session.notices.problem(format!("{}: {problem}", body.name));
        return;
    }
    let old = std::mem::replace(&mut sheet.bodies[at], body.clone());
    let rasters = sheet.rasters.iter_mut().map(|raster| &mut raster.placement.body);
    let winds = sheet.winds.iter_mut().map(|wind| &mut wind.body);
    let preview = model.session.import.iter_mut().map(|import| &mut import.body);
    for copy in rasters.chain(winds).chain(preview) {
        if copy.as_ref().is_some_and(|copy| copy.name == old.name) {
            *copy = Some(body.clone());
        }
    }
}

#[cfg(test)]
mod tests {
    use std::path::PathBuf;
    use std::sync::Arc;

    use super::BodyCommand;
    use crate::desk::{Command, Model, RasterCommand, SheetCommand, apply};
    use crate::ground::Body;
    use crate::study::Placement;

    fn give(model: &mut Model, command: BodyCommand) {
        apply(model, Command::Body(command));
    }

    fn own(model: &Model) -> Vec<&str> {
        model.sheet.bodies.iter().map(|body| body.name.as_str()).collect()
    }

    /// A raster that lies on a copy of Mars.
    fn on_own_mars() -> Model {
        let mut model = Model::new(Arc::new(|| ()));
        give(&mut model, BodyCommand::Add(Box::new(Body::mars())));
        apply(&mut model, Command::Raster(RasterCommand::Open(PathBuf::from("absent.tif"))));
        let raster = &model.sheet.rasters[0];
        let placement = Placement { body: Some(model.sheet.bodies[0].clone()), ..raster.placement.clone() };
        let id = raster.id;
        apply(&mut model, Command::Raster(RasterCommand::Place { id, placement }));
        model
    }

    #[test]
    fn a_copy_of_a_known_body_gets_a_name_of_its_own() {
        let mut model = Model::new(Arc::new(|| ()));
        for _ in 0..3 {
            give(&mut model, BodyCommand::Add(Box::new(Body::mars())));
        }
        assert_eq!(own(&model), ["Mars, own", "Mars, own 2", "Mars, own 3"]);
        give(&mut model, BodyCommand::Remove(1));
        assert_eq!(own(&model), ["Mars, own", "Mars, own 3"]);
        give(&mut model, BodyCommand::Remove(7));
        assert_eq!(own(&model).len(), 2);
    }

    #[test]
    fn a_change_reaches_the_rasters_on_the_body_and_undo_takes_it_back() {
        let mut model = on_own_mars();
        let body =
            Box::new(Body { gravity: Some(3.5), name: "north".into(), ..model.sheet.bodies[0].clone() });
        give(&mut model, BodyCommand::Change { at: 0, body });
        let copy = |model: &Model| model.sheet.rasters[0].placement.body.clone().expect("a body");
        assert_eq!((copy(&model).name.as_str(), copy(&model).gravity), ("north", Some(3.5)));
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert_eq!((copy(&model).name.as_str(), copy(&model).gravity), ("Mars, own", Some(3.71)));
        assert_eq!(own(&model), ["Mars, own"]);
    }

    #[test]
    fn an_impossible_body_or_a_taken_name_changes_nothing() {
        let mut model = on_own_mars();
        let before = model.sheet.clone();
        let mars = before.bodies[0].clone();
        for wrong in [
            Body { gravity: Some(-1.0), ..mars.clone() },
            Body { name: "Earth".into(), ..mars.clone() },
            Body { name: " ".into(), ..mars },
        ] {
            give(&mut model, BodyCommand::Change { at: 0, body: Box::new(wrong) });
            assert_eq!(model.sheet, before);
        }
    }
}

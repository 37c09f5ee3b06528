//! Outlining on the table, by pointer or by keyboard.

use crate::desk::{Draft, Model, Tool, Tracing, pen};
use crate::ground::{Point, Polygon};

use super::{Command, CrestCommand, NetworkCommand, ObstacleCommand, PatchCommand, Record, apply, crest};

#[derive(Clone, Debug, PartialEq)]
pub enum DrawCommand {
    Take(Tool),
    /// Lays a point, in pixels of the raster on the table.
    Lay(Point),
    /// Takes the last point away.
    Retract,
    Finish,
    Cancel,
    /// A drag has ended: the next change is an undo step of its own.
    Settle,
}

impl DrawCommand {
    pub(super) const LISTED: &[Self] = &[
        Self::Take(Tool::Hand),
        Self::Take(Tool::Polygon),
        Self::Take(Tool::Rectangle),
        Self::Take(Tool::Ellipse),
        Self::Take(Tool::Hole),
        Self::Take(Tool::Corners),
        Self::Take(Tool::Outcrop),
        Self::Take(Tool::Outlet),
        Self::Take(Tool::Lake),
        Self::Take(Tool::Pen),
        Self::Take(Tool::Strike),
        Self::Take(Tool::Arrow),
        Self::Take(Tool::Ridge),
        Self::Take(Tool::Join),
        Self::Take(Tool::Cut),
        Self::Take(Tool::Reject),
        Self::Take(Tool::Accept),
        Self::Take(Tool::Mask),
        Self::Finish,
        Self::Retract,
        Self::Cancel,
    ];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Take(tool) => tool_record(*tool),
            Self::Lay(_) => Record::new("draw.lay", "Lay a corner", "Adds a corner to the outline."),
            Self::Retract => {
                Record::new("draw.retract", "Take back a corner", "Removes the last corner or pick.")
                    .key("Backspace")
            }
            Self::Finish => Record::new(
                "draw.finish",
                "Close the outline",
                "Makes a patch of the outline; ends a traced channel or crest.",
            )
            .key("Enter"),
            Self::Cancel => {
                Record::new("draw.cancel", "Stop outlining", "Drops the outline and takes up the hand.")
                    .key("Escape")
            }
            Self::Settle => Record::new("draw.settle", "End of a drag", "Ends a drag as one undo step."),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        let (draft, tracing) = (model.session.draft.as_ref(), model.session.tracing.as_ref());
        match self {
            Self::Take(Tool::Hole | Tool::Corners) if model.selected_patch().is_none() => {
                Some("no patch is selected")
            }
            Self::Take(tool) if tool.draws() && model.shown_raster().is_none() => Some("no raster is open"),
            Self::Take(tool) if needs_network(*tool) && model.network_for(*tool).is_none() => {
                Some(if Tool::DRAINAGE.contains(tool) {
                    "no network from the elevation on the table is selected"
                } else {
                    "no network on the image on the table is selected"
                })
            }
            Self::Take(tool) if Tool::CRESTS.contains(tool) && model.crest_patch().is_none() => {
                Some(crest::NO_PATCH)
            }
            Self::Lay(_) if Tool::CRESTS.contains(&model.session.tool) && model.crest_patch().is_none() => {
                Some(crest::NO_PATCH)
            }
            Self::Lay(_)
                if needs_network(model.session.tool) && model.network_for(model.session.tool).is_none() =>
            {
                Some("the network of this tool is not on the table")
            }
            Self::Lay(_) if !model.session.tool.draws() || model.shown_raster().is_none() => {
                Some("no outlining tool is in hand")
            }
            Self::Retract if tracing.is_some() => None,
            Self::Finish if tracing.is_some() => {
                let whole = tracing.is_some_and(Tracing::is_whole);
                (!whole).then_some("a line needs two picks")
            }
            Self::Retract | Self::Finish if draft.is_none() => Some("no outline is under way"),
            Self::Finish if draft.and_then(Draft::finished).is_none() => {
                Some("an outline needs three corners that enclose some ground")
            }
            Self::Cancel if draft.is_none() && tracing.is_none() && model.session.tool == Tool::Hand => {
                Some("no outline is under way")
            }
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::Take(tool) => {
                model.session.tool = tool;
                model.session.draft = None;
                model.session.tracing = None;
                // Nobody works on what is not seen.
                model.view.layers.crests |= Tool::CRESTS.contains(&tool);
            }
            Self::Lay(point) => lay(model, point),
            Self::Retract if model.session.tracing.is_some() => pen::retract(model),
            Self::Finish if model.session.tracing.is_some() => pen::finish(model),
            Self::Retract => {
                if let Some(draft) = &mut model.session.draft {
                    draft.points.pop();
                }
                model.session.draft.take_if(|draft| draft.points.is_empty());
            }
            Self::Finish => finish(model),
            Self::Cancel => {
                // First the outline goes, then the tool.
                let under_way =
                    model.session.draft.take().is_some() || model.session.tracing.take().is_some();
                if !under_way {
                    model.session.tool = Tool::Hand;
                }
            }
            Self::Settle => {}
        }
    }
}

/// Whether the tool works on the selected network.
fn needs_network(tool: Tool) -> bool {
    Tool::DRAINAGE.contains(&tool) || Tool::CHANNELS.contains(&tool)
}

fn tool_record(tool: Tool) -> Record {
    match tool {
        Tool::Hand => Record::new("draw.hand", "Hand", "Moves the raster and selects patches.").key("M"),
        Tool::Polygon => {
            Record::new("draw.polygon", "Outline polygon", "Click corners; close with Enter.").key("P")
        }
        Tool::Rectangle => {
            Record::new("draw.rectangle", "Outline rectangle", "Two opposite corners.").key("R")
        }
        Tool::Ellipse => {
            Record::new("draw.ellipse", "Outline ellipse", "Two opposite corners of its box.").key("E")
        }
        Tool::Hole => {
            Record::new("draw.hole", "Cut a hole", "Outlines ground that does not belong to the patch.")
                .key("H")
        }
        Tool::Corners => {
            Record::new("draw.corners", "Edit corners", "Drag corners; click an edge to add one.").key("V")
        }
        Tool::Outcrop => Record::new(
            "draw.outcrop",
            "Outline outcrop",
            "Click round the foot of a rock in the way of the wind; close with Enter.",
        )
        .key("U"),
        Tool::Outlet => Record::new(
            "draw.outlet",
            "Pick outlet",
            "Click where the network ends; click an outlet to take it away.",
        )
        .key("T"),
        Tool::Lake => Record::new(
            "draw.lake",
            "Mark closed basin",
            "Outline a lake or basin that keeps its water; close with Enter.",
        )
        .key("L"),
        Tool::Pen => Record::new(
            "draw.pen",
            "Trace channel",
            "Click along a channel; Backspace takes a pick back, Enter ends the channel.",
        )
        .key("C"),
        Tool::Strike => Record::new(
            "draw.strike",
            "Strike reach",
            "Click a proposed reach that is no channel; click its cross to bring it back.",
        )
        .key("X"),
        Tool::Arrow => {
            Record::new("draw.arrow", "State the flow", "Two clicks beside a reach: the water went this way.")
                .key("A")
        }
        Tool::Ridge => Record::new(
            "draw.ridge",
            "Draw crest",
            "Click along a crest, from the end of a line to lengthen it; Enter ends it.",
        )
        .shift("R"),
        Tool::Join => {
            Record::new("draw.join", "Join crests", "Click the end of one line, then the end of another.")
                .shift("J")
        }
        Tool::Cut => Record::new(
            "draw.cut",
            "Cut crest",
            "Click a line to make two of it; click the cut to take it back.",
        )
        .shift("C"),
        Tool::Reject => Record::new(
            "draw.reject",
            "Reject crest",
            "Click a line that is no crest; click its cross to bring it back.",
        )
        .shift("X"),
        Tool::Accept => Record::new(
            "draw.accept",
            "Accept crest",
            "Click a line you looked at and let stand; click it again to take that back.",
        )
        .shift("A"),
        Tool::Mask => Record::new(
            "draw.mask",
            "Mask ground",
            "Outline ground that is no bedform: a pond, a road, a seam; close with Enter.",
        )
        .shift("M"),
    }
}

fn lay(model: &mut Model, point: Point) {
    let Some(raster) = model.shown_raster().map(|r| r.id) else { return };
    let tool = model.session.tool;
    if tool.traces() {
        return pen::pick(model, point);
    }
    if tool.takes_one() && Tool::CRESTS.contains(&tool) {
        if let Some(command) = CrestCommand::of_click(model, tool, point) {
            apply(model, Command::Crest(command));
        }
        return;
    }
    if tool.takes_one() {
        if let Some(command) = NetworkCommand::of_click(model, tool, point) {
            apply(model, Command::Network(command));
        }
        return;
    }
    let draft = model.session.draft.get_or_insert_with(|| Draft { tool, raster, points: Vec::new() });
    draft.points.push(point);
    if tool.takes_two() && draft.points.len() == 2 {
        apply(model, Command::Draw(DrawCommand::Finish));
    }
}

fn finish(model: &mut Model) {
    let Some(draft) = model.session.draft.take() else { return };
    let Some(ring) = draft.finished() else { return };
    let command = match (draft.tool, model.selected_patch()) {
        (Tool::Outcrop, _) => {
            let outline = Polygon { outer: ring, holes: Vec::new() };
            Command::Obstacle(ObstacleCommand::Add { raster: draft.raster, outline })
        }
        (Tool::Hole, Some(patch)) => {
            let mut outline = patch.outline.clone();
            outline.holes.push(ring);
            Command::Patch(PatchCommand::Reshape { id: patch.id, outline })
        }
        (Tool::Lake, _) => {
            let Some(id) = model.network_for(Tool::Lake).map(|n| n.id) else { return };
            let outline = Polygon { outer: ring, holes: Vec::new() };
            Command::Network(NetworkCommand::MarkClosed { id, outline })
        }
        (Tool::Mask, _) => {
            let Some(id) = model.crest_patch().map(|patch| patch.id) else { return };
            let outline = Polygon { outer: ring, holes: Vec::new() };
            Command::Crest(CrestCommand::Mask { id, outline })
        }
        (Tool::Arrow, _) => {
            let Some(id) = model.network_for(Tool::Arrow).map(|n| n.id) else { return };
            let (Some(from), Some(to)) = (ring.first(), ring.last()) else { return };
            Command::Network(NetworkCommand::SetFlow { id, arrow: [*from, *to] })
        }
        _ => {
            let outline = Polygon { outer: ring, holes: Vec::new() };
            Command::Patch(PatchCommand::Add { raster: draft.raster, outline })
        }
    };
    if draft.tool != Tool::Arrow {
        model.session.tool = Tool::Hand;
    }
    model.session.history.settle();
    apply(model, command);
    model.session.history.settle();
}

#[cfg(test)]
mod tests {
    use std::sync::Arc;

    use super::DrawCommand;
    use crate::desk::{
        Command, Laid, Model, ObstacleCommand, Opened, PatchCommand, SheetCommand, TileKey, TileReader,
        TileShelf, Tool, apply,
    };
    use crate::ground::{Grid, Place, Point, Work};
    use crate::study::{Id, ImageKind, RasterEntry};

    struct Blank;

    impl TileReader for Blank {
        fn size(&self) -> [usize; 2] {
            [100, 80]
        }

        fn read(&self, _: TileKey, _: &Work) -> Result<Grid<f32>, String> {
            Ok(Grid::filled(100, 80, 0.5))
        }
    }

    /// A desk with one raster of 100 × 80 pixels laid on the table.
    fn desk() -> Model {
        let mut model = Model::new(Arc::new(|| ()));
        model.sheet.rasters.push(RasterEntry {
            id: Id(1),
            name: "mosaic".into(),
            path: "mosaic.tif".into(),
            bands: Default::default(),
            kind: ImageKind::Optical,
            placement: Default::default(),
            tone: Default::default(),
            light_from: None,
        });
        let tiles = TileShelf::new(Arc::new(Blank), Arc::new(|| ()));
        let laid = Laid { size: [100, 80], place: Place::pixels(0.0), tiles };
        model.session.rasters.insert(Id(1), Opened::Open(Box::new(laid)));
        model
    }

    fn draw(model: &mut Model, tool: Tool, points: &[[f64; 2]]) {
        apply(model, Command::Draw(DrawCommand::Take(tool)));
        for point in points {
            apply(model, Command::Draw(DrawCommand::Lay(Point::from(*point))));
        }
    }

    #[test]
    fn a_polygon_closes_on_finish_and_undo_takes_it_back() {
        let mut model = desk();
        draw(&mut model, Tool::Polygon, &[[10.0, 10.0], [60.0, 10.0], [60.0, 50.0]]);
        apply(&mut model, Command::Draw(DrawCommand::Finish));
        assert_eq!(model.selected_patch().map(|p| p.name.as_str()), Some("Patch 1"));
        assert_eq!(model.session.tool, Tool::Hand);
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert!(model.sheet.patches.is_empty() && model.view.patch.is_none());
    }

    #[test]
    fn a_hole_goes_into_the_selected_patch_as_its_own_step() {
        let mut model = desk();
        draw(&mut model, Tool::Rectangle, &[[10.0, 10.0], [60.0, 50.0]]);
        draw(&mut model, Tool::Hole, &[[20.0, 20.0], [30.0, 20.0], [30.0, 30.0]]);
        apply(&mut model, Command::Draw(DrawCommand::Finish));
        assert_eq!(model.selected_patch().unwrap().outline.area(), 2000.0 - 50.0);
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert_eq!(model.selected_patch().unwrap().outline.area(), 2000.0);
    }

    #[test]
    fn an_outlined_outcrop_is_no_patch_and_can_be_renamed_deleted_and_brought_back() {
        let mut model = desk();
        draw(&mut model, Tool::Rectangle, &[[5.0, 5.0], [90.0, 70.0]]);
        draw(&mut model, Tool::Outcrop, &[[40.0, 30.0], [60.0, 30.0], [50.0, 45.0]]);
        apply(&mut model, Command::Draw(DrawCommand::Finish));
        assert_eq!((model.sheet.patches.len(), model.sheet.obstacles.len()), (1, 1));
        let id = model.sheet.obstacles[0].id;
        assert_ne!(id, model.sheet.patches[0].id);
        assert_eq!(model.selected_obstacle().map(|o| o.name.as_str()), Some("Outcrop 1"));
        let name = "Grey stack".to_owned();
        apply(&mut model, Command::Obstacle(ObstacleCommand::Rename { id, name }));
        apply(&mut model, Command::Obstacle(ObstacleCommand::Delete));
        assert!(model.sheet.obstacles.is_empty());
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert_eq!(model.sheet.obstacles[0].name, "Grey stack");
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert!(model.sheet.obstacles.is_empty() && model.sheet.patches.len() == 1);
    }

    #[test]
    fn two_drags_of_one_patch_are_two_steps() {
        let mut model = desk();
        draw(&mut model, Tool::Rectangle, &[[10.0, 10.0], [60.0, 50.0]]);
        let patch = model.selected_patch().unwrap().clone();
        for drag in 0..2 {
            for step in 1..4 {
                let by = f64::from(drag * 3 + step);
                let outline = patch.outline.map(|p| Point::new(p.x + by, p.y));
                apply(&mut model, Command::Patch(PatchCommand::Reshape { id: patch.id, outline }));
            }
            apply(&mut model, Command::Draw(DrawCommand::Settle));
        }
        let left = |model: &Model| model.selected_patch().unwrap().outline.outer[0].x;
        assert_eq!(left(&model), 16.0);
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert_eq!(left(&model), 13.0);
        apply(&mut model, Command::Sheet(SheetCommand::Undo));
        assert_eq!(left(&model), 10.0);
    }

    #[test]
    fn a_command_that_is_not_allowed_says_why_and_changes_nothing() {
        let mut model = Model::new(Arc::new(|| ()));
        apply(&mut model, Command::Draw(DrawCommand::Take(Tool::Polygon)));
        assert_eq!(model.session.tool, Tool::Hand);
        assert!(model.session.notices.shown()[0].text.contains("no raster is open"));
    }
}

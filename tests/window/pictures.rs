//! Pictures of the table, compared with those kept beside the tests. `UPDATE_PICTURES=1` writes
//! them anew; look at them before you commit them.

use egui::Theme;
use ventifact::desk::{Command, DrawCommand, Measured, Model, Opened, PatchCommand, Tool, apply};
use ventifact::ground::{Caution, Grid, LengthUnit, Place, Seed, Work};
use ventifact::science::orientation::{TensorSettings, trend_nodes};
use ventifact::science::scene::reach;
use ventifact::study::{
    Id, Node, Patch, PatchFinding, PatternFinding, SpectrumFinding, TrendFinding, fingerprint,
};

use super::harness::{self, compare};
use super::{scene, table};

const SIZE: [f32; 2] = [820.0, 620.0];

fn card(ui: &mut egui::Ui) {
    ui.heading("Sorrel Reach");
    ui.label("The long dunes trend 072° ± 3°.");
    ui.horizontal(|ui| {
        let _ = ui.button("Measure");
        ui.checkbox(&mut true, "Show strokes");
    });
    ui.add(egui::ProgressBar::new(0.6).text("60 %"));
}

#[test]
fn the_same_view_gives_the_same_bytes() {
    let picture =
        || harness::window([260.0, 120.0], Theme::Light).build_ui(card).render().expect("a picture");
    let (a, b) = (picture(), picture());
    assert_eq!(a.as_raw(), b.as_raw());
    let darkest = a.pixels().map(|p| p.0[0]).min();
    assert!(darkest < Some(120), "text must be dark on a light ground, darkest {darkest:?}");
}

/// Takes the trend of every patch, so that there are strokes to draw.
pub fn measured(mut model: Model) -> Model {
    let mosaic = reach::mosaic(Seed(1));
    let place = model.session.rasters.get(&Id(1)).and_then(Opened::laid).expect("laid").place.clone();
    for patch in model.sheet.patches.clone() {
        let fingerprint = fingerprint::of_patch(&model.sheet, &patch);
        let outcome = Ok(finding(&mosaic, &place, &patch, fingerprint.clone()));
        let texture = fingerprint::of_texture(&model.sheet, &patch);
        model.session.results.take_patch(patch.id, Measured { outcome, fingerprint, exact: true, texture });
    }
    model.session.results.follow(&model.sheet);
    model
}

fn finding(mosaic: &Grid<f32>, place: &Place, patch: &Patch, fingerprint: String) -> PatchFinding {
    let settings = TensorSettings {
        gradient_scale_px: 2.0,
        integration_scale_px: 8.0,
        node_step_px: 8.0,
        significance: 0.01,
        logarithm: true,
    };
    let field =
        trend_nodes(mosaic, &patch.outline, place, &settings, &Work::quiet()).expect("nobody stops it");
    let node = |n: &ventifact::science::orientation::TrendNode| Node {
        at: n.at,
        axis: n.axis,
        coherence: n.coherence,
        significant: n.significant,
    };
    PatchFinding {
        id: patch.id,
        name: patch.name.clone(),
        raster: patch.raster,
        fingerprint,
        unit: LengthUnit::Metre,
        area: patch.outline.area(),
        valid_fraction: 1.0,
        centre: None,
        trend: TrendFinding {
            nodes: field.nodes.iter().map(node).collect(),
            node_step_px: field.node_step_px,
            coherence_floor: field.coherence_floor,
            ..TrendFinding::default()
        },
        spectrum: SpectrumFinding::default(),
        verdicts: Vec::new(),
        backwards: None,
        sentence: String::new(),
        cautions: Vec::<Caution>::new(),
        birth: Vec::new(),
        crests: Err("not traced".into()),
        pattern: PatternFinding::default(),
        obstacles: None,
    }
}

#[test]
fn the_table_by_day() {
    let mut harness = table::open(measured(scene::sorrel_reach(0.0)), SIZE, Theme::Light);
    apply(&mut harness.state_mut().model, Command::Patch(PatchCommand::Select(Some(Id(2)))));
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/table-by-day.png");
}

#[test]
fn the_table_by_night_turned_and_out_of_date() {
    let mut harness = table::open(measured(scene::sorrel_reach(25.0)), SIZE, Theme::Dark);
    let model = &mut harness.state_mut().model;
    let outline =
        model.sheet.patches[1].outline.map(|p| ventifact::ground::Point::new(p.x - 20.0, p.y + 15.0));
    apply(model, Command::Patch(PatchCommand::Reshape { id: Id(3), outline }));
    apply(model, Command::Patch(PatchCommand::Select(Some(Id(3)))));
    apply(model, Command::Draw(DrawCommand::Take(Tool::Corners)));
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/table-by-night.png");
}

#[test]
fn pixels_close_up_and_an_outline_under_way() {
    let mut harness = table::open(measured(scene::sorrel_reach(0.0)), SIZE, Theme::Light);
    let model = &mut harness.state_mut().model;
    let camera = ventifact::desk::Camera { centre: ventifact::ground::Point::new(560.0, 860.0), scale: 5.0 };
    model.view.cameras.insert(Id(1), camera);
    apply(model, Command::Draw(DrawCommand::Take(Tool::Polygon)));
    for (x, y) in [(510.0, 820.0), (590.0, 815.0), (610.0, 850.0)] {
        apply(model, Command::Draw(DrawCommand::Lay(ventifact::ground::Point::new(x, y))));
    }
    table::rest(&mut harness);
    compare(&harness.render().expect("a picture"), "tests/window/pictures/table-close-up.png");
}

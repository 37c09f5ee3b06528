//! The body on the ground page: which one, its figures with their sources, and the way to one's own.

use egui::{ComboBox, Ui};

use crate::desk::{BodyCommand, Command, Dialog, Model, Opened, RasterCommand, ViewCommand, sand};
use crate::ground::Body;
use crate::study::{Placement, RasterEntry};
use crate::window::controls::{self, Commands, look, quiet};

/// The body the raster lies on, where the file does not say or says too little.
pub fn show(ui: &mut Ui, model: &Model, raster: &RasterEntry, out: &mut Commands) {
    let stated = raster.placement.body.as_ref();
    if let Some(body) = pick(ui, model, "Body", stated, "as in the file") {
        let placement = Placement { body, ..raster.placement.clone() };
        out.push(Command::Raster(RasterCommand::Place { id: raster.id, placement }));
    }
    let laid = model.session.rasters.get(&raster.id).and_then(Opened::laid).map(|laid| &laid.place.body);
    let Some(body) = laid.or(stated) else { return };
    controls::facts(ui, &look(model), &sand::body(body));
    ui.horizontal(|ui| {
        let copy = Command::Body(BodyCommand::Add(Box::new(body.clone())));
        quiet(ui, model, out, copy, "Copy to own bodies");
        quiet(ui, model, out, Command::View(ViewCommand::Open(Dialog::Bodies)), "Own bodies…");
    });
}

/// A choice among the bodies known by name and the sheet's own; `none` names the first choice. Gives what was
/// chosen when it differs.
pub fn pick(
    ui: &mut Ui,
    model: &Model,
    label: &str,
    stated: Option<&Body>,
    none: &str,
) -> Option<Option<Body>> {
    let shown = stated.map_or(none, |body| body.name.as_str());
    let mut chosen = stated.cloned();
    ui.horizontal(|ui| {
        ui.label(label).on_hover_text("Its gravity and air decide which wind moves sand.");
        let combo = ComboBox::from_id_salt(label).selected_text(shown).width(190.0).show_ui(ui, |ui| {
            ui.selectable_value(&mut chosen, None, none);
            for body in model.sheet.known_bodies() {
                let name = body.name.clone();
                if name != none {
                    ui.selectable_value(&mut chosen, Some(body), name);
                }
            }
        });
        combo.response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::ComboBox, true, label));
    });
    (chosen.as_ref() != stated).then_some(chosen)
}

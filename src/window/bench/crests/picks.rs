//! What the user said of the crests, entry by entry, each with the way to take it back.

use egui::{CollapsingHeader, Slider, Ui};

use crate::desk::{Command, CrestCommand, Crested, Model};
use crate::ground::{Point, Polygon};
use crate::plate::numbers;
use crate::study::{CrestEntry, CrestStroke, Id, Patch, StrokeKind};
use crate::window::controls::{Commands, caution, heading, look, quiet};

/// Groups with more entries are closed until they are opened.
const OPEN: usize = 6;

pub fn show(ui: &mut Ui, model: &Model, patch: &Patch, crested: Option<&Crested>, out: &mut Commands) {
    let (id, said) = (patch.id, &patch.crests);
    heading(ui, "Said by you");
    if let Some(crested) = crested {
        accept_above(ui, model, id, crested, out);
        let lost = crested.finding().map_or(0, |found| found.lost_edits.len());
        if lost > 0 {
            caution(ui, &look(model), &format!("{lost} of your marks found no line where they lie."));
        }
    }
    let mut list = List { ui, model, out };
    list.points("Rejected", "Rejected line", "Bring back", &said.rejected, |index| CrestCommand::BringBack {
        id,
        index,
    });
    list.points("Accepted", "Accepted line", "Take back", &said.accepted, |index| CrestCommand::TakeBack {
        id,
        index,
    });
    list.points("Cut", "Cut", "Undo", &said.cuts, |index| CrestCommand::Uncut { id, index });
    list.strokes(id, said);
    list.imported(id, said);
    list.group("Masked", said.masks.len(), |list| {
        for (index, mask) in said.masks.iter().enumerate() {
            list.row(&masked(index, mask), "Remove", CrestCommand::RemoveMask { id, index });
        }
    });
}

/// Accepts every line that is sure enough.
fn accept_above(ui: &mut Ui, model: &Model, id: Id, crested: &Crested, out: &mut Commands) {
    let kept = ui.make_persistent_id("confidence to accept from");
    let mut percent: f64 = ui.data(|data| data.get_temp(kept)).unwrap_or(80.0);
    ui.horizontal(|ui| {
        ui.label("Evidence from").on_hover_text("Of the traced lines you have not said anything of yet.");
        ui.spacing_mut().slider_width = 110.0;
        let slider = Slider::new(&mut percent, 0.0..=100.0).step_by(5.0).suffix(" %");
        let response = ui.add(slider);
        response.widget_info(|| egui::WidgetInfo::slider(true, percent, "Evidence to accept from"));
        let confidence = percent / 100.0;
        let count = crested.unaccepted_from(confidence).count();
        let command = Command::Crest(CrestCommand::AcceptAbove { id, confidence });
        ui.add_enabled_ui(count > 0, |ui| {
            quiet(ui, model, out, command, &format!("Accept {}", numbers::count(count)));
        });
    });
    ui.data_mut(|data| data.insert_temp(kept, percent));
}

struct List<'a> {
    ui: &'a mut Ui,
    model: &'a Model,
    out: &'a mut Commands,
}

impl List<'_> {
    /// A group with its count; long ones closed at first.
    fn group(&mut self, title: &str, count: usize, content: impl FnOnce(&mut List<'_>)) {
        if count == 0 {
            return;
        }
        let (model, out) = (self.model, &mut *self.out);
        CollapsingHeader::new(format!("{title} ({})", numbers::count(count)))
            .id_salt(title)
            .default_open(count <= OPEN)
            .show(self.ui, |ui| content(&mut List { ui, model, out }));
    }

    fn points(
        &mut self,
        title: &str,
        noun: &str,
        verb: &str,
        points: &[Point],
        back: impl Fn(usize) -> CrestCommand,
    ) {
        self.group(title, points.len(), |list| {
            for (index, at) in points.iter().enumerate() {
                list.row(&format!("{noun} at {}", place(*at)), verb, back(index));
            }
        });
    }

    /// Lines laid with the pen.
    fn strokes(&mut self, id: Id, said: &CrestEntry) {
        let drawn = || said.strokes.iter().enumerate().filter(|(_, s)| s.kind != StrokeKind::Import);
        self.group("Drawn", drawn().count(), |list| {
            for (index, stroke) in drawn() {
                list.row(&stroke_words(stroke), "Remove", CrestCommand::RemoveStroke { id, index });
            }
        });
    }

    /// Lines out of files; there may be thousands, so each can go and all can.
    fn imported(&mut self, id: Id, said: &CrestEntry) {
        let imported = || said.strokes.iter().enumerate().filter(|(_, s)| s.kind == StrokeKind::Import);
        self.group("Imported", imported().count(), |list| {
            list.row("All of them", "Remove", CrestCommand::RemoveImported { id });
            for (index, stroke) in imported() {
                list.row(&stroke_words(stroke), "Remove", CrestCommand::RemoveStroke { id, index });
            }
        });
    }

    fn row(&mut self, words: &str, verb: &str, command: CrestCommand) {
        self.ui.horizontal(|ui| {
            ui.label(words);
            let response = quiet(ui, self.model, self.out, Command::Crest(command), verb);
            let spoken = format!("{verb}: {words}");
            response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::Button, true, &spoken));
        });
    }
}

fn stroke_words(stroke: &CrestStroke) -> String {
    let at = stroke.line.0.first().map_or(String::new(), |at| format!(" at {}", place(*at)));
    match stroke.kind {
        StrokeKind::Crest => format!("Crest of {} picks{at}", stroke.picks.len()),
        StrokeKind::Join => format!("Join{at}"),
        StrokeKind::Extend => format!("Lengthened{at}"),
        StrokeKind::Import => format!("Imported line{at}"),
    }
}

fn masked(index: usize, mask: &Polygon) -> String {
    let at = mask.bounds().map_or(String::new(), |b| format!(" at {}", place(b.centre())));
    format!("Mask {}{at}", index + 1)
}

fn place(at: Point) -> String {
    format!("column {}, row {}", numbers::fixed(at.x, 0), numbers::fixed(at.y, 0))
}

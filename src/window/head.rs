//! The head: the sheet's title, the tools for outlining, and the door to every command.

use egui::{Align, Layout, RichText, Ui};

use super::controls::{Commands, button, look, quiet, toggle};
use super::theme;
use crate::desk::{Command, Dialog, DrawCommand, Model, SheetCommand, Tool, ViewCommand};

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    ui.horizontal(|ui| {
        let look = look(model);
        ui.label(RichText::new(&model.sheet.title).family(theme::bold()).size(17.0));
        if model.is_dirty() {
            ui.label(RichText::new("unsaved").small().color(theme::color(look.ink_soft)));
        }
        if !model.sheet.rasters.is_empty() {
            ui.add_space(24.0);
            tools(ui, model, out);
        }
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            button(ui, model, out, Command::View(ViewCommand::Open(Dialog::Finder)));
            quiet(ui, model, out, Command::View(ViewCommand::Theme), "Light / dark");
            quiet(ui, model, out, Command::View(ViewCommand::Open(Dialog::Settings)), "Settings");
            quiet(ui, model, out, Command::Sheet(SheetCommand::Save), "Save");
            quiet(ui, model, out, Command::Sheet(SheetCommand::Redo), "Redo");
            quiet(ui, model, out, Command::Sheet(SheetCommand::Undo), "Undo");
        });
    });
}

fn tools(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let drainage = Tool::DRAINAGE.into_iter().filter(|tool| model.network_for(*tool).is_some());
    let channels = Tool::CHANNELS.into_iter().filter(|tool| model.network_for(*tool).is_some());
    // Those of crests are on their page; here only the one in hand, so that one word is always underlined.
    let crests = Tool::CRESTS.into_iter().filter(|tool| model.session.tool == *tool);
    for tool in Tool::OUTLINING.into_iter().chain(drainage).chain(channels).chain(crests) {
        let word = match tool {
            Tool::Hand => "Move",
            Tool::Polygon => "Polygon",
            Tool::Rectangle => "Rectangle",
            Tool::Ellipse => "Ellipse",
            Tool::Hole => "Hole",
            Tool::Corners => "Corners",
            Tool::Outcrop => "Outcrop",
            Tool::Outlet => "Outlet",
            Tool::Lake => "Closed basin",
            Tool::Pen => "Trace",
            Tool::Strike => "Strike",
            Tool::Arrow => "Flow",
            Tool::Ridge => "Draw crest",
            Tool::Join => "Join",
            Tool::Cut => "Cut",
            Tool::Reject => "Reject",
            Tool::Accept => "Accept",
            Tool::Mask => "Mask",
        };
        let command = Command::Draw(DrawCommand::Take(tool));
        toggle(ui, model, out, command, word, model.session.tool == tool);
    }
}

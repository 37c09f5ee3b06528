//! The channels page: one network in the order of the reasoning – what it is, how the ground was made to drain,
//! where channels begin, then what is measured on them.

mod drainage;
mod measures;
mod picks;

use egui::{RichText, Ui};

use super::say;
use crate::desk::{
    Command, Dialog, DrawCommand, Model, NetworkCommand, Tool, ViewCommand, channel_facts, channels,
    planform_facts,
};
use crate::study::{NetworkEntry, NetworkSource};
use crate::window::controls::{self, Commands, button, caution, heading, line, look, quiet, rule, toggle};
use crate::window::theme;

/// Room for the reach under the pointer, so that the page does not jump as the pointer moves.
const POINTED_HEIGHT: f32 = 118.0;
/// Room for the standing of the result.
const STANDING_HEIGHT: f32 = 26.0;

pub fn show(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let look = look(model);
    ui.horizontal_wrapped(|ui| {
        button(ui, model, out, Command::Network(NetworkCommand::AddFromElevation));
        button(ui, model, out, Command::Network(NetworkCommand::AddFromImage));
    });
    let Some(network) = model.selected_network() else {
        say(ui, model, "Select a network in the ledger, or derive one from the raster on the table.");
        return;
    };
    head(ui, model, network, out);
    tools(ui, model, network, out);
    let results = &model.session.results;
    let standing = results.network_standing(network.id);
    if let NetworkSource::Elevation(_) = &network.source {
        drainage::threshold(ui, model, network, out);
    }
    // A line of its own height in any case: under a moving threshold it comes and goes.
    let top = ui.cursor().top();
    if !standing.remark().is_empty() {
        caution(ui, &look, standing.remark());
    }
    let used = ui.cursor().top() - top;
    ui.add_space((STANDING_HEIGHT - used).max(0.0));
    pointed(ui, model);
    let finding = match results.charted(network.id).map(|charted| &charted.outcome) {
        None => return picks::show(ui, model, network, out),
        Some(Err(why)) => {
            caution(ui, &look, why);
            return picks::show(ui, model, network, out);
        }
        Some(Ok(finding)) => finding,
    };
    heading(ui, "What it is");
    controls::facts(ui, &look, &channel_facts::about(finding));
    finding.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
    if let Some(drainage) = &finding.drainage {
        drainage::show(ui, model, finding, drainage);
    }
    if let Some(tracing) = &finding.tracing {
        heading(ui, "From the image");
        controls::facts(ui, &look, &channel_facts::tracing(tracing));
        if !tracing.lost_arrows.is_empty() {
            let words = format!("{} of your arrows found no reach beside them.", tracing.lost_arrows.len());
            caution(ui, &look, &words);
        }
    }
    picks::show(ui, model, network, out);
    measures::show(ui, model, finding);
}

/// Its name, and what can be done with it.
fn head(ui: &mut Ui, model: &Model, network: &NetworkEntry, out: &mut Commands) {
    let raster = model.sheet.raster(network.raster).map_or("", |r| r.name.as_str());
    let source = match &network.source {
        NetworkSource::Elevation(_) => "from elevation",
        NetworkSource::Image(_) => "from the image",
    };
    let ground = if network.within.is_some() { "within an outline" } else { "whole raster" };
    ui.horizontal(|ui| {
        if let Some(name) = line(ui, "Name of the network", &network.name, 170.0) {
            out.push(Command::Network(NetworkCommand::Rename { id: network.id, name }));
        }
        quiet(ui, model, out, Command::Network(NetworkCommand::Delete), "Delete");
        quiet(ui, model, out, Command::Network(NetworkCommand::SelectNext), "Next");
    });
    let soft = theme::color(look(model).ink_soft);
    ui.label(RichText::new(format!("{source} of {raster}, {ground}")).small().color(soft));
}

/// The tools that fit its source, and what is shown of it.
fn tools(ui: &mut Ui, model: &Model, network: &NetworkEntry, out: &mut Commands) {
    let tools: &[Tool] = match &network.source {
        NetworkSource::Elevation(_) => &Tool::DRAINAGE,
        NetworkSource::Image(_) => &Tool::CHANNELS,
    };
    ui.horizontal_wrapped(|ui| {
        for tool in tools {
            button(ui, model, out, Command::Draw(DrawCommand::Take(*tool)));
        }
    });
    let layers = model.view.layers;
    ui.horizontal_wrapped(|ui| {
        toggle(ui, model, out, Command::View(ViewCommand::Networks), "Channels shown", layers.networks);
        if network.elevation().is_some() {
            toggle(ui, model, out, Command::View(ViewCommand::Divides), "Divides", layers.divides);
            toggle(ui, model, out, Command::View(ViewCommand::Changes), "Changed ground", layers.changes);
        }
        quiet(ui, model, out, Command::View(ViewCommand::Open(Dialog::Settings)), "Settings…");
    });
    rule(ui, &look(model));
}

/// The reach under the pointer.
fn pointed(ui: &mut Ui, model: &Model) {
    heading(ui, "Under the pointer");
    let top = ui.cursor().top();
    if let Some(tracing) = &model.session.tracing {
        controls::facts(ui, &look(model), &planform_facts::tracing(tracing));
        let used = ui.cursor().top() - top;
        ui.add_space((POINTED_HEIGHT - used).max(0.0));
        return;
    }
    match channels::pointed_reach(model) {
        Some((finding, reach)) => controls::facts(ui, &look(model), &planform_facts::reach(finding, reach)),
        None => say(ui, model, "Point at a reach to see its order, width and which way the water went."),
    }
    let used = ui.cursor().top() - top;
    ui.add_space((POINTED_HEIGHT - used).max(0.0));
}

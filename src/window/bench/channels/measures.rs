//! What is measured on a network: hierarchy, profiles, junctions, pattern, planform, palaeo-flow, agreement.

use egui::{Grid, RichText, Ui};

use crate::desk::facts::Fact;
use crate::desk::{Model, channel_facts, planform_facts};
use crate::plate::numbers;
use crate::study::NetworkFinding;
use crate::window::bench::say;
use crate::window::controls::{self, caution, heading, look};
use crate::window::theme;

pub fn show(ui: &mut Ui, model: &Model, finding: &NetworkFinding) {
    hierarchy(ui, model, finding);
    section(ui, model, "Profile", &channel_facts::profile(finding));
    junctions(ui, model, finding);
    section(ui, model, "Pattern", &planform_facts::pattern(finding));
    for (number, planform) in (1..).zip(&finding.planforms) {
        let title = if number == 1 {
            "Planform of the trunk".to_owned()
        } else {
            format!("Planform of channel {number}")
        };
        section(ui, model, &title, &planform_facts::planform(finding, planform));
    }
    flow(ui, model, finding);
    for (_, name, agreement) in &finding.agreements {
        section(ui, model, &format!("Beside {name}"), &planform_facts::agreement(finding, agreement));
    }
}

fn section(ui: &mut Ui, model: &Model, title: &str, facts: &[Fact]) {
    if !facts.is_empty() {
        heading(ui, title);
        controls::facts(ui, &look(model), facts);
    }
}

/// Streams by order as a table, then the laws.
fn hierarchy(ui: &mut Ui, model: &Model, finding: &NetworkFinding) {
    heading(ui, "Hierarchy");
    if finding.orders.is_empty() {
        say(ui, model, "No reach has an order: flow divides everywhere, or there is no channel.");
    } else {
        let soft = theme::color(look(model).ink_soft);
        Grid::new("orders").num_columns(5).spacing([14.0, 4.0]).show(ui, |ui| {
            for title in ["order", "streams", "mean length", "mean area", "mean slope"] {
                ui.label(RichText::new(title).small().color(soft));
            }
            ui.end_row();
            for row in &finding.orders {
                ui.label(row.order.to_string());
                ui.label(row.streams.to_string());
                ui.label(numbers::length(row.mean_length, finding.unit, 3));
                ui.label(row.mean_area_m2.map_or("–".into(), channel_facts::square_metres));
                ui.label(row.mean_slope.map_or("–".into(), |slope| numbers::significant(slope, 2)));
                ui.end_row();
            }
        });
        ui.add_space(4.0);
    }
    controls::facts(ui, &look(model), &channel_facts::hierarchy(finding));
}

fn junctions(ui: &mut Ui, model: &Model, finding: &NetworkFinding) {
    heading(ui, "Junctions");
    if finding.junctions.angles.is_empty() {
        say(ui, model, "No junction has branches as long as the chord.");
        return;
    }
    controls::facts(ui, &look(model), &planform_facts::junctions(finding));
}

/// Ranges with their cautions; or why there are none.
fn flow(ui: &mut Ui, model: &Model, finding: &NetworkFinding) {
    heading(ui, "Palaeo-flow");
    match &finding.flow {
        Ok(flow) => {
            controls::facts(ui, &look(model), &planform_facts::flow(flow));
            for words in [
                "Ranges, not values: width is not depth, a valley is not a channel, and bankfull flow is not shown.",
                "Ground that looks dark or smooth need not have been full.",
            ] {
                caution(ui, &look(model), words);
            }
        }
        Err(why) => say(ui, model, &format!("No range of discharge: {why}.")),
    }
}

//! What is measured on a network: hierarchy, profiles, junctions, pattern, planform, palaeo-flow, agreement.

use std::sync::Arc;

use egui::{Grid, RichText, Ui};

use crate::desk::{Model, channel_facts, planform_facts};
use crate::plate::{
    chi_plot, flow_ranges, hypsometric_curve, junction_rose, link_rose, long_profile, network_compare,
    numbers, order_plot, pattern_bars, planform_sketch, slope_area, width_plot,
};
use crate::study::{Id, NetworkFinding};
use crate::window::bench::{figures, say};
use crate::window::controls::{self, caution, heading, look};
use crate::window::theme;

pub fn show(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    hierarchy(ui, model, finding);
    profile(ui, model, finding);
    junctions(ui, model, finding);
    pattern(ui, model, finding);
    planform(ui, model, finding);
    flow(ui, model, finding);
    beside(ui, model, finding);
}

/// Streams by order as a table, then the laws.
fn hierarchy(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    let look = look(model);
    heading(ui, "Hierarchy");
    if finding.orders.is_empty() {
        say(ui, model, "No reach has an order: flow divides everywhere, or there is no channel.");
    } else {
        if finding.orders.len() > 1 {
            figures::show(ui, &look, finding, "orders", "Streams, lengths and areas by order", order_plot);
        }
        let soft = theme::color(look.ink_soft);
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
    controls::facts(ui, &look, &channel_facts::hierarchy(finding));
}

/// Profiles and what they tell; only where heights are known.
fn profile(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    let look = look(model);
    if finding.profiles.is_empty() && finding.hypsometry.is_none() {
        return;
    }
    heading(ui, "Profile");
    if !finding.profiles.is_empty() {
        figures::show(ui, &look, finding, "profile", "Long profiles", long_profile);
        figures::show(ui, &look, finding, "chi", "Elevation over χ", chi_plot);
    }
    if finding.flint.is_some() {
        figures::show(ui, &look, finding, "slope-area", "Slope over area", slope_area);
    }
    if finding.hypsometry.is_some() {
        figures::show(ui, &look, finding, "hypsometry", "Hypsometric curve", hypsometric_curve);
    }
    controls::facts(ui, &look, &channel_facts::profile(finding));
}

fn junctions(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    heading(ui, "Junctions");
    if finding.junctions.angles.is_empty() {
        say(ui, model, "No junction has branches as long as the chord.");
        return;
    }
    figures::show(ui, &look(model), finding, "junctions", "Rose of junction angles", junction_rose);
    controls::facts(ui, &look(model), &planform_facts::junctions(finding));
}

fn pattern(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    heading(ui, "Pattern");
    if !finding.pattern.rose.is_empty() {
        figures::show(ui, &look(model), finding, "links", "Rose of link azimuths", link_rose);
    }
    if finding.pattern.probabilities.is_some() {
        figures::show(ui, &look(model), finding, "pattern", "Probability of each pattern", pattern_bars);
    }
    controls::facts(ui, &look(model), &planform_facts::pattern(finding));
}

/// The trunk with its figures, then the other long channels.
fn planform(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    let look = look(model);
    for (number, planform) in (1..).zip(&finding.planforms) {
        if number > 1 {
            heading(ui, &format!("Planform of channel {number}"));
        } else {
            heading(ui, "Planform of the trunk");
            figures::show(ui, &look, finding, "planform", "Trunk and valley line", planform_sketch);
            if planform.width.is_some() {
                figures::show(ui, &look, finding, "width", "Width along the trunk", width_plot);
            }
        }
        controls::facts(ui, &look, &planform_facts::planform(finding, planform));
    }
}

/// Ranges with their cautions; or why there are none.
fn flow(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    let look = look(model);
    heading(ui, "Palaeo-flow");
    match &finding.flow {
        Ok(flow) => {
            figures::show(ui, &look, finding, "flow", "Ranges of discharge and grain size", flow_ranges);
            controls::facts(ui, &look, &planform_facts::flow(flow));
            for words in [
                "Ranges, not values: width is not depth, a valley is not a channel, and bankfull flow is not shown.",
                "Ground that looks dark or smooth need not have been full.",
            ] {
                caution(ui, &look, words);
            }
        }
        Err(why) => say(ui, model, &format!("No range of discharge: {why}.")),
    }
}

/// The other networks of the same ground.
fn beside(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>) {
    if finding.agreements.is_empty() {
        return;
    }
    heading(ui, "Beside other networks");
    let results = &model.session.results;
    let same_raster = |id: &Id| results.network(*id).filter(|other| other.raster == finding.raster);
    let compare = |finding: &NetworkFinding, mm: f64, look: &crate::plate::Theme| {
        let agreements = finding.agreements.iter();
        let others: Vec<_> =
            agreements.filter_map(|(id, _, _)| Some((*id, same_raster(id)?.network.clone()))).collect();
        network_compare(finding, &others, mm, look)
    };
    figures::show(ui, &look(model), finding, "beside", "Agreement with other networks", compare);
    for (_, name, agreement) in &finding.agreements {
        ui.label(RichText::new(name).family(theme::bold()));
        controls::facts(ui, &look(model), &planform_facts::agreement(finding, agreement));
    }
}

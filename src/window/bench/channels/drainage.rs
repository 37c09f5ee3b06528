//! From elevation to channels: what conditioning changed, and the threshold with half, one and twice of it.

use std::sync::Arc;

use egui::{Grid, RichText, Slider, Ui};

use crate::desk::{Command, DrawCommand, Model, NetworkCommand, channel_facts, channels};
use crate::ground::Network;
use crate::plate::{drop_test, numbers, threshold_maps};
use crate::study::{DrainageFinding, NetworkEntry, NetworkFinding};
use crate::window::bench::figures;
use crate::window::controls::{self, Commands, heading, look, optional_number, quiet};
use crate::window::theme;

/// The threshold by slider, field and key; what is dragged is followed live.
pub fn threshold(ui: &mut Ui, model: &Model, network: &NetworkEntry, out: &mut Commands) {
    let Some(stated) = network.elevation().map(|it| it.threshold_m2) else { return };
    heading(ui, "Where channels begin");
    let set = |m2| Command::Network(NetworkCommand::SetThreshold { id: network.id, m2 });
    if let Some(now) = channels::threshold(model, network) {
        let mut m2 = now;
        let [low, high] = span(model, network, now);
        ui.spacing_mut().slider_width = (ui.available_width() - 20.0).max(80.0);
        let slider = Slider::new(&mut m2, low..=high).logarithmic(true).show_value(false);
        let response =
            ui.add(slider).on_hover_text("Area that must drain through a place for a channel to begin.");
        response.widget_info(|| egui::WidgetInfo::slider(true, m2, "Threshold of channels"));
        if m2 != now {
            out.push(set(Some(rounded(m2, 3))));
        }
        if response.drag_stopped() || response.lost_focus() {
            out.push(Command::Draw(DrawCommand::Settle));
        }
    }
    ui.horizontal(|ui| {
        let shown = stated.map(|m2| rounded(m2, 6));
        if let Some(typed) = optional_number(ui, "Threshold, square metres", shown, 110.0) {
            out.push(set(typed));
            out.push(Command::Draw(DrawCommand::Settle));
        }
        ui.label("m²").on_hover_text("Empty: that of the settings, or proposed by the constant-drop test.");
        quiet(ui, model, out, Command::Network(NetworkCommand::HalveThreshold), "½");
        quiet(ui, model, out, Command::Network(NetworkCommand::DoubleThreshold), "× 2");
        if stated.is_some() {
            quiet(ui, model, out, set(None), "As proposed");
        }
    });
}

/// Rounded to so many figures; finer than three no hand on a slider can mean it.
fn rounded(m2: f64, count: i32) -> f64 {
    let power = count - 1 - m2.log10().floor() as i32;
    let scale = 10f64.powi(power.abs());
    if power >= 0 { (m2 * scale).round() / scale } else { (m2 / scale).round() * scale }
}

/// What the slider spans: the thresholds of the test, and always the one in force.
fn span(model: &Model, network: &NetworkEntry, now: f64) -> [f64; 2] {
    let finding = model.session.results.network(network.id);
    let drops =
        finding.and_then(|f| f.drainage.as_ref()).map(|d| d.channels.drops.as_slice()).unwrap_or_default();
    let tested = drops.iter().map(|row| row.threshold_m2).filter(|m2| *m2 > 0.0);
    let ends = tested.fold([f64::INFINITY, 0.0], |[low, high]: [f64; 2], m2| [low.min(m2), high.max(m2)]);
    let [low, high] = if ends[0] < ends[1] { ends } else { [now / 100.0, now * 100.0] };
    [low.min(now), high.max(now)]
}

/// The report of conditioning and the three networks.
pub fn show(ui: &mut Ui, model: &Model, finding: &Arc<NetworkFinding>, drainage: &DrainageFinding) {
    let look = look(model);
    heading(ui, "Made to drain");
    controls::facts(ui, &look, &channel_facts::conditioning(drainage));
    heading(ui, "Threshold");
    controls::facts(ui, &look, &channel_facts::heads(drainage));
    figures::show(ui, &look, finding, "drops", "Constant-drop test by threshold", drop_test);
    let spoken = "Channels at half, one and twice the threshold";
    figures::show(ui, &look, finding, "thresholds", spoken, threshold_maps);
    let channels = &drainage.channels;
    let soft = theme::color(look.ink_soft);
    Grid::new("thresholds").num_columns(5).spacing([14.0, 4.0]).show(ui, |ui| {
        for title in ["threshold", "area", "order", "heads", "length"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        let rows =
            [("half", 0.5, &channels.half), ("one", 1.0, &channels.network), ("twice", 2.0, &channels.twice)];
        for (name, factor, network) in rows {
            row(ui, name, factor * channels.threshold_m2, network);
            ui.end_row();
        }
    });
}

fn row(ui: &mut Ui, name: &str, m2: f64, network: &Network) {
    ui.label(name);
    ui.label(channel_facts::square_metres(m2));
    ui.label(network.greatest_order().map_or("–".into(), |order| order.to_string()));
    ui.label(network.heads().len().to_string());
    ui.label(numbers::length(network.length(), crate::ground::LengthUnit::Metre, 3));
}

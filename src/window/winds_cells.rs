//! Which stations or cells of a file become records: the nearest to the patches, those in a box, or one
//! by one.

use egui::{RichText, ScrollArea, Ui};

use super::controls::{Commands, field_row, heading, line, look, number};
use super::theme;
use crate::desk::{Command, Import, LonLatBox, Model, Pick, Stand, WindCommand};
use crate::plate::numbers;

/// Longer lists show what is chosen alone.
const MOST_LISTED: usize = 300;

pub fn show(ui: &mut Ui, model: &Model, import: &Import, out: &mut Commands) {
    if import.stands.is_empty() {
        return;
    }
    heading(ui, "Stations or cells");
    ui.label(format!("{} in the file, {} chosen", import.stands.len(), import.chosen.len()));
    let mut choose = |pick| out.push(Command::Wind(WindCommand::Choose(pick)));
    field_row(ui, "Nearest to each patch", 140.0, |ui| {
        let now = import.chosen.len() as f64;
        if let Some(each) = number(ui, "How many nearest to each patch", now, 60.0) {
            choose(Pick::Nearest(each.clamp(1.0, 50.0) as usize));
        }
    });
    field_row(ui, "Inside a box", 140.0, |ui| {
        let typed = line(ui, "West, east, south and north of the box", "", 170.0);
        if let Some(area) = typed.and_then(|text| area(&text)) {
            choose(Pick::Inside(area));
        }
    });
    let soft = theme::color(look(model).ink_soft);
    ui.label(RichText::new("west east south north, degrees").small().color(soft));
    ScrollArea::vertical().id_salt("stands").max_height(150.0).show(ui, |ui| {
        let all = import.stands.len() <= MOST_LISTED;
        for (at, stand) in import.stands.iter().enumerate() {
            let mut taken = import.chosen.binary_search(&at).is_ok();
            if (all || taken) && ui.checkbox(&mut taken, words(stand)).changed() {
                choose(Pick::Turn(at));
            }
        }
    });
}

fn words(stand: &Stand) -> String {
    let degrees = |value| numbers::fixed(value, 2);
    let at = stand.at.map(|at| format!(" ({}°, {}°)", degrees(at.lon), degrees(at.lat)));
    format!("{}{}", stand.name, at.unwrap_or_default())
}

/// Four numbers divided by blanks.
fn area(text: &str) -> Option<LonLatBox> {
    let numbers: Option<Vec<f64>> =
        text.split_whitespace().map(|n| n.replace('−', "-").parse().ok()).collect();
    let [west, east, south, north] = numbers?[..] else { return None };
    (south <= north).then_some(LonLatBox { west, east, south, north })
}

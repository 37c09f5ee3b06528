//! The import of a wind record: what the file was taken for and why, its first rows, and what they
//! give; every guess can be changed.

use egui::{ComboBox, Context, Grid, RichText, ScrollArea, Ui};

use super::controls::{
    Commands, caution, field_row, heading, line, look, main_button, number, overlay, rule,
};
use super::{theme, winds_cells};
use crate::desk::{
    Command, DirectionSense, Import, Model, ReadRow, Reading, SpeedUnit, WindCommand, WindImport, WindLayout,
    ZeroDirection, facts,
};
use crate::plate::numbers;

const DELIMITERS: [(char, &str); 4] = [(',', "comma"), (';', "semicolon"), ('\t', "tab"), (' ', "blanks")];
const UNITS: [SpeedUnit; 4] =
    [SpeedUnit::MetrePerSecond, SpeedUnit::KilometrePerHour, SpeedUnit::MilePerHour, SpeedUnit::Knot];

pub fn show(ctx: &Context, model: &Model, import: &Import, out: &mut Commands) {
    let room = ctx.content_rect().size();
    let close = overlay(ctx, "import winds", (room.x - 120.0).clamp(640.0, 980.0), |ui| {
        ui.heading("Import winds");
        ui.label(
            RichText::new(import.path.to_string_lossy()).small().color(theme::color(look(model).ink_soft)),
        );
        rule(ui, &look(model));
        ScrollArea::vertical().max_height((room.y - 230.0).max(240.0)).show(ui, |ui| {
            ui.columns(2, |columns| {
                let [left, right] = columns else { return };
                way(left, import, out);
                winds_cells::show(left, model, import, out);
                mast(left, import, out);
                given(right, model, import);
                why(right, model, import);
            });
            if !import.cells.is_empty() {
                file(ui, model, import);
            }
        });
        rule(ui, &look(model));
        ui.horizontal(|ui| {
            main_button(ui, model, out, Command::Wind(WindCommand::Accept));
            if ui.button("Cancel").clicked() {
                out.push(Command::Wind(WindCommand::Forget));
            }
            if let Some(why) = import.hindrance() {
                ui.label(RichText::new(why).color(theme::color(look(model).ink_soft)));
            }
        });
    });
    if close {
        out.push(Command::Wind(WindCommand::Forget));
    }
}

/// How the file is read, each part a choice.
fn way(ui: &mut Ui, import: &Import, out: &mut Commands) {
    heading(ui, "Taken for");
    let mut how = import.import.clone();
    if matches!(how.layout, WindLayout::Grid { .. }) {
        layout(ui, import, &mut how);
        return;
    }
    choice(ui, "Columns divided by", &mut how.delimiter, DELIMITERS.into_iter());
    row(ui, "Header lines", |ui| {
        if let Some(lines) = number(ui, "Header lines", how.header_lines as f64, 60.0) {
            how.header_lines = lines.clamp(0.0, 10_000.0) as usize;
        }
    });
    choice(ui, "Speeds in", &mut how.speed_unit, UNITS.into_iter().map(|unit| (unit, unit.label())));
    let senses =
        [(DirectionSense::From, "where it blows from"), (DirectionSense::Toward, "where it goes to")];
    choice(ui, "Directions say", &mut how.direction, senses.into_iter());
    let zeros = [(ZeroDirection::North, "north"), (ZeroDirection::NoDirection, "calm or unknown")];
    choice(ui, "Direction 0 means", &mut how.zero_direction, zeros.into_iter());
    row(ui, "Codes for missing", |ui| {
        let now = how.missing.iter().map(f64::to_string).collect::<Vec<_>>().join(" ");
        if let Some(typed) = line(ui, "Codes for missing", &now, 130.0) {
            how.missing = typed.split_whitespace().filter_map(|code| code.parse().ok()).collect();
        }
    });
    layout(ui, import, &mut how);
    if how != import.import {
        out.push(Command::Wind(WindCommand::Reread(how)));
    }
}

fn layout(ui: &mut Ui, import: &Import, how: &mut WindImport) {
    let name = |column: usize| match import.column_names.get(column) {
        Some(name) if !name.is_empty() => format!("{} {name}", column + 1),
        _ => format!("column {}", column + 1),
    };
    let count = import.cells.iter().map(Vec::len).max().unwrap_or(0);
    match &mut how.layout {
        WindLayout::Series { time, speed, direction } => {
            let columns = || (0..count).map(|column| (column, name(column)));
            choice(ui, "Speed is in", speed, columns());
            choice(ui, "Direction is in", direction, columns());
            let none = std::iter::once((None, "none".to_owned()));
            let gusts = none.chain(columns().map(|(column, name)| (Some(column), name)));
            choice(ui, "Gusts are in", &mut how.gust, gusts);
            time_columns(ui, time);
        }
        WindLayout::Components { time, east, north } => {
            let columns = || (0..count).map(|column| (column, name(column)));
            choice(ui, "Toward east is in", east, columns());
            choice(ui, "Toward north is in", north, columns());
            time_columns(ui, time);
        }
        WindLayout::Grid { .. } => {
            ui.label("A grid: its variables and units say how it is read.");
        }
        WindLayout::Frequencies { sector, classes } => {
            choice(ui, "Sector is in", sector, (0..count).map(|column| (column, name(column))));
            for class in classes {
                row(ui, &name(class.column), |ui| {
                    if let Some(low) =
                        number(ui, &format!("From, column {}", class.column + 1), class.low, 50.0)
                    {
                        class.low = low;
                    }
                    ui.label("to");
                    if let Some(high) =
                        number(ui, &format!("To, column {}", class.column + 1), class.high, 50.0)
                    {
                        class.high = high;
                    }
                });
            }
        }
    }
}

fn time_columns(ui: &mut Ui, time: &mut Vec<usize>) {
    row(ui, "Time is in columns", |ui| {
        let now = time.iter().map(|c| (c + 1).to_string()).collect::<Vec<_>>().join(" ");
        if let Some(typed) = line(ui, "Time is in columns", &now, 130.0) {
            let columns = typed.split_whitespace().filter_map(|c| c.parse::<usize>().ok());
            *time = columns.filter_map(|c| c.checked_sub(1)).collect();
        }
    });
}

fn mast(ui: &mut Ui, import: &Import, out: &mut Commands) {
    heading(ui, "Mast");
    let (mut name, mut height_m, mut roughness_m) =
        (import.name.clone(), import.height_m, import.roughness_m);
    if import.stands.is_empty() {
        row(ui, "Name", |ui| {
            if let Some(typed) = line(ui, "Name of the record", &name, 160.0) {
                name = typed;
            }
        });
    }
    row(ui, "Height, m", |ui| {
        if let Some(typed) = number(ui, "Height of the mast, m", height_m, 60.0) {
            height_m = typed;
        }
    });
    row(ui, "Roughness, m", |ui| {
        if let Some(typed) = number(ui, "Roughness of the ground, m", roughness_m, 60.0) {
            roughness_m = typed;
        }
    });
    if (&name, height_m, roughness_m) != (&import.name, import.height_m, import.roughness_m) {
        let body = import.body.clone();
        out.push(Command::Wind(WindCommand::Describe { name, height_m, roughness_m, body }));
    }
}

/// What the file gives when read so.
fn given(ui: &mut Ui, model: &Model, import: &Import) {
    heading(ui, "Gives");
    match &import.outcome {
        None => {
            ui.label("Reading…");
        }
        Some(Err(why)) => caution(ui, &look(model), why),
        Some(Ok(reading)) => reading_rows(ui, model, reading),
    }
}

fn reading_rows(ui: &mut Ui, model: &Model, reading: &Reading) {
    ui.label(format!(
        "{} rows, {} with a speed, {} with a direction",
        reading.rows, reading.with_speed, reading.with_direction
    ));
    if let Some(fastest) = reading.fastest {
        ui.label(format!("Fastest: {} m/s", numbers::significant(fastest, 3)));
    }
    if let Some([first, last]) = reading.span {
        ui.label(format!("{} to {}", facts::clock(first), facts::clock(last)));
    }
    ui.add_space(6.0);
    let soft = theme::color(look(model).ink_soft);
    Grid::new("given").num_columns(4).spacing([16.0, 2.0]).show(ui, |ui| {
        for title in ["line", "time", "m/s", "from"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for row in reading.first.iter().take(8) {
            given_row(ui, row);
        }
    });
}

fn given_row(ui: &mut Ui, row: &ReadRow) {
    ui.label(row.line.to_string());
    ui.label(row.time.map_or_else(|| "–".into(), facts::clock));
    ui.label(row.speed.map_or_else(|| "–".into(), |speed| numbers::fixed(speed, 2)));
    ui.label(row.from.map_or_else(|| "–".into(), |from| format!("{}°", numbers::fixed(from.deg(), 0))));
    ui.end_row();
}

fn why(ui: &mut Ui, model: &Model, import: &Import) {
    heading(ui, "Why");
    let soft = theme::color(look(model).ink_soft);
    for reason in &import.reasons {
        ui.label(RichText::new(reason).small().color(soft));
    }
    import.cautions.iter().for_each(|c| caution(ui, &look(model), &c.text));
}

/// The first rows as they stand in the file; the header grey.
fn file(ui: &mut Ui, model: &Model, import: &Import) {
    heading(ui, "In the file");
    let look = look(model);
    ScrollArea::horizontal().show(ui, |ui| {
        Grid::new("cells").striped(true).spacing([14.0, 2.0]).show(ui, |ui| {
            for (at, cells) in import.cells.iter().take(14).enumerate() {
                let header = at < import.import.header_lines;
                let ink = theme::color(if header { look.ink_soft } else { look.ink });
                for cell in cells {
                    ui.label(RichText::new(cell).size(12.5).color(ink));
                }
                ui.end_row();
            }
        });
    });
}

fn row(ui: &mut Ui, label: &str, field: impl FnOnce(&mut Ui)) {
    field_row(ui, label, 140.0, field);
}

fn choice<T: PartialEq + Clone, L: Into<String>>(
    ui: &mut Ui,
    label: &str,
    value: &mut T,
    options: impl Iterator<Item = (T, L)>,
) {
    let options: Vec<(T, String)> = options.map(|(option, name)| (option, name.into())).collect();
    let shown = options.iter().find(|(option, _)| option == value).map_or("", |(_, name)| name.as_str());
    row(ui, label, |ui| {
        let combo = ComboBox::from_id_salt(label).selected_text(shown).width(170.0);
        let response = combo.show_ui(ui, |ui| {
            for (option, name) in &options {
                ui.selectable_value(value, option.clone(), name);
            }
        });
        response.response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::ComboBox, true, label));
    });
}

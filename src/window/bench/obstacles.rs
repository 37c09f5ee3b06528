//! The obstacles page: outcrops as wind vanes, each with its figure, and all in one table.

use egui::{Grid, RichText, Ui};

use super::{figure_mm, say};
use crate::desk::{Command, DrawCommand, Model, ObstacleCommand, Tool, facts};
use crate::plate::{numbers, obstacle, obstacles_together};
use crate::study::{Obstacle, ObstacleFinding, PatchFinding};
use crate::window::controls::{self, Commands, button, caution, heading, line, look, quiet, rule};
use crate::window::{figure, theme};

pub fn show(ui: &mut Ui, model: &Model, finding: Option<&PatchFinding>, out: &mut Commands) {
    let look = look(model);
    ui.horizontal_wrapped(|ui| {
        button(ui, model, out, Command::Draw(DrawCommand::Take(Tool::Outcrop)));
        button(ui, model, out, Command::Obstacle(ObstacleCommand::Delete));
    });
    list(ui, model, out);
    let Some(found) = finding.and_then(|f| f.obstacles.as_ref()) else {
        if finding.is_some_and(|f| model.session.results.standing(f.id).is_current()) {
            say(ui, model, "No outcrop stands in this patch: it must hold half of the ground round one.");
        }
        return;
    };
    heading(ui, "What they tell");
    table(ui, model, &found.outcrops, out);
    let mm = figure_mm(ui);
    let together = obstacles_together(found, mm, &look);
    if together.height_mm > 0.0 {
        ui.add_space(8.0);
        figure::show(ui, &together, theme::POINTS_PER_MM, "Obliquities of all outcrops, and together");
    }
    found.cautions.iter().for_each(|c| caution(ui, &look, &c.text));
    let chosen = found.outcrops.iter().find(|o| Some(o.id) == model.view.obstacle);
    if let Some(outcrop) = chosen.or(found.outcrops.first()) {
        one(ui, model, outcrop, mm);
    }
}

/// The outcrops of the raster on the table, each a name to edit and to select by.
fn list(ui: &mut Ui, model: &Model, out: &mut Commands) {
    let raster = model.shown_raster().map(|r| r.id);
    let here: Vec<&Obstacle> = model.sheet.obstacles.iter().filter(|o| Some(o.raster) == raster).collect();
    if here.is_empty() {
        say(
            ui,
            model,
            "Outline a rock that stands in the way of the wind: how the crests part round it tells the wind.",
        );
    }
    for obstacle in here {
        ui.horizontal(|ui| {
            let label = format!("Name of outcrop {}", obstacle.id.0);
            if let Some(name) = line(ui, &label, &obstacle.name, 170.0) {
                out.push(Command::Obstacle(ObstacleCommand::Rename { id: obstacle.id, name }));
            }
            let shown = model.view.obstacle == Some(obstacle.id);
            let word = if shown { "shown" } else { "Show" };
            quiet(ui, model, out, Command::Obstacle(ObstacleCommand::Select(Some(obstacle.id))), word);
        });
    }
}

/// One row an outcrop: what its crests do, how sure, against chance, and where bedforms are missing.
fn table(ui: &mut Ui, model: &Model, outcrops: &[ObstacleFinding], out: &mut Commands) {
    let soft = theme::color(look(model).ink_soft);
    Grid::new("outcrops").num_columns(5).spacing([10.0, 4.0]).show(ui, |ui| {
        for title in ["outcrop", "b", "to the wind", "p", "dipole"] {
            ui.label(RichText::new(title).small().color(soft));
        }
        ui.end_row();
        for o in outcrops {
            quiet(ui, model, out, Command::Obstacle(ObstacleCommand::Select(Some(o.id))), &o.name);
            row(ui, o);
            ui.end_row();
        }
    });
}

fn row(ui: &mut Ui, o: &ObstacleFinding) {
    let test = match &o.outcome {
        Ok(test) => test,
        Err(why) => {
            ui.label("–");
            ui.label("no test").on_hover_text(why);
            return;
        }
    };
    ui.label(numbers::fixed(test.estimate.b_s, 2))
        .on_hover_text("−1: crests along the wind wrap round; +1: crests across it.");
    match &test.undecided {
        Some(why) => ui.label("no decision").on_hover_text(why),
        None => {
            let half = test.obliquity.half_deg.unwrap_or(90.0);
            let text =
                format!("{}° ± {}°", numbers::fixed(test.obliquity.folded_deg(), 0), numbers::fixed(half, 0));
            ui.label(text).on_hover_text("Angle between crests and wind, with its 95 % interval.")
        }
    };
    let null = test.null.as_ref();
    let p = null.and_then(|n| n.p);
    ui.label(numbers::p_value(p.unwrap_or(test.pattern_p))).on_hover_text(if p.is_some() {
        "How often a virtual outcrop elsewhere in the patch turns the crests as much."
    } else {
        "By the estimate’s own error: the patch has too little room for virtual outcrops."
    });
    match (test.dipole, o.more_toward) {
        (Some(dipole), Some(toward)) => {
            let p =
                null.and_then(|n| n.dipole_p).map_or(String::new(), |p| format!(", {}", numbers::p_value(p)));
            let text =
                format!("{} to {}°{p}", numbers::fixed(dipole.size, 2), numbers::fixed(toward.deg(), 0));
            ui.label(text).on_hover_text("Size, and the side with more bedforms.");
        }
        _ => {
            ui.label("–");
        }
    }
}

/// The figure of one outcrop and its numbers.
fn one(ui: &mut Ui, model: &Model, outcrop: &ObstacleFinding, mm: f64) {
    let look = look(model);
    let s = &model.sheet.settings.obstacle;
    rule(ui, &look);
    heading(ui, &outcrop.name);
    let picture = obstacle(outcrop, [s.inner_radii, s.outer_radii], mm, &look);
    let spoken = format!("Crests and flow round {}", outcrop.name);
    figure::show(ui, &picture, theme::POINTS_PER_MM, &spoken);
    rule(ui, &look);
    controls::facts(ui, &look, &facts::obstacle(outcrop));
}

//! Notices over the lower right corner of the table.

use egui::{Align2, Area, Context, Frame, Id, Margin, Order, RichText, Stroke, vec2};

use super::controls::{Commands, look};
use super::theme;
use crate::desk::{Command, Model, NoticeKind, ViewCommand};

/// A message that something was done goes after this many seconds.
const SHOWN_S: f64 = 6.0;

pub fn show(ctx: &Context, model: &Model, out: &mut Commands, corner: egui::Pos2) {
    let notices = model.session.notices.shown();
    if notices.is_empty() {
        return;
    }
    let look = look(model);
    let area = Area::new(Id::unique("notices")).order(Order::Foreground).pivot(Align2::RIGHT_BOTTOM);
    area.fixed_pos(corner - vec2(14.0, 14.0)).show(ctx, |ui| {
        ui.set_max_width(380.0);
        for notice in notices {
            let problem = notice.kind == NoticeKind::Problem;
            let edge = theme::color(if problem { look.caution } else { look.rule });
            let frame = Frame::new()
                .fill(theme::color(look.paper))
                .stroke(Stroke::new(1.0, edge))
                .corner_radius(3.0)
                .inner_margin(Margin::symmetric(12, 8));
            frame.show(ui, |ui| {
                ui.label(RichText::new(&notice.text));
                ui.horizontal(|ui| {
                    if let Some(offer) = &notice.offer
                        && ui.button(Command::Sheet(offer.clone()).record().label).clicked()
                    {
                        out.push(Command::Sheet(offer.clone()));
                        out.push(Command::View(ViewCommand::Dismiss(notice.number)));
                    }
                    if ui.small_button("Dismiss").clicked() {
                        out.push(Command::View(ViewCommand::Dismiss(notice.number)));
                    }
                });
            });
            if !problem && is_over(ctx, notice.number) {
                out.push(Command::View(ViewCommand::Dismiss(notice.number)));
            }
        }
    });
}

/// Whether the notice has been on show long enough; asks to be drawn again when it will be.
fn is_over(ctx: &Context, number: u64) -> bool {
    let now = ctx.input(|input| input.time);
    let first =
        ctx.data_mut(|data| *data.get_temp_mut_or_insert_with(Id::unique(("notice", number)), || now));
    let left = SHOWN_S - (now - first);
    if left > 0.0 {
        ctx.request_repaint_after_secs(left as f32);
    }
    left <= 0.0
}

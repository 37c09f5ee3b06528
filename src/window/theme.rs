//! Paper and ink for the window: the plates' tokens as egui colours, fonts and spacing.

use std::sync::Arc;

use egui::style::{HandleShape, WidgetVisuals};
use egui::{
    Color32, Context, CornerRadius, FontData, FontDefinitions, FontFamily, FontId, Margin, Stroke, TextStyle,
    Visuals, vec2,
};

use crate::desk;
use crate::plate::{Rgba, Theme, font};

/// Points a millimetre of a figure at the window's reading distance.
pub const POINTS_PER_MM: f32 = 5.2;

/// The bold face.
pub fn bold() -> FontFamily {
    FontFamily::Name("bold".into())
}

/// The look the user chose.
pub fn of(theme: desk::Theme) -> Theme {
    match theme {
        desk::Theme::Light => Theme::light(),
        desk::Theme::Dark => Theme::dark(),
    }
}

/// A token as an egui colour.
pub fn color(Rgba([r, g, b, a]): Rgba) -> Color32 {
    Color32::from_rgba_unmultiplied(r, g, b, a)
}

/// Our own fonts, once at the start. egui's remain behind them for signs ours lack.
pub fn install_fonts(ctx: &Context) {
    let mut fonts = FontDefinitions::default();
    for (name, bytes) in [("text", font::REGULAR), ("bold", font::BOLD)] {
        fonts.font_data.insert(name.into(), Arc::new(FontData::from_static(bytes)));
    }
    let fallback = fonts.families.get(&FontFamily::Proportional).cloned().unwrap_or_default();
    let family = |name: &str| std::iter::once(name.to_owned()).chain(fallback.iter().cloned()).collect();
    fonts.families.insert(bold(), family("bold"));
    let text: Vec<String> = family("text");
    fonts.families.insert(FontFamily::Proportional, text);
    ctx.set_fonts(fonts);
}

/// Colours, type and spacing of one look. Setting the same look again costs nothing.
pub fn dress(ctx: &Context, theme: desk::Theme) {
    let look = of(theme);
    let known = egui::Id::unique("dressed");
    if ctx.data(|data| data.get_temp::<bool>(known)) == Some(look.is_dark) {
        return;
    }
    ctx.data_mut(|data| data.insert_temp(known, look.is_dark));
    ctx.set_theme(if look.is_dark { egui::Theme::Dark } else { egui::Theme::Light });
    ctx.global_style_mut(|style| {
        style.visuals = visuals(&look);
        style.text_styles = [
            (TextStyle::Small, FontId::proportional(12.0)),
            (TextStyle::Body, FontId::proportional(14.0)),
            (TextStyle::Button, FontId::proportional(14.0)),
            (TextStyle::Heading, FontId::new(17.0, bold())),
            (TextStyle::Monospace, FontId::monospace(13.0)),
        ]
        .into();
        style.spacing.item_spacing = vec2(8.0, 6.0);
        style.spacing.button_padding = vec2(8.0, 4.0);
        style.spacing.window_margin = Margin::same(18);
        style.spacing.menu_margin = Margin::same(8);
        style.spacing.interact_size = vec2(36.0, 24.0);
        style.spacing.slider_width = 150.0;
        style.spacing.tooltip_width = 320.0;
        style.spacing.scroll.floating = true;
        style.animation_time = 0.0;
        style.interaction.tooltip_delay = 0.35;
    });
}

fn visuals(look: &Theme) -> Visuals {
    let ink = color(look.ink);
    let rule = Stroke::new(1.0, color(look.rule));
    let mut v = if look.is_dark { Visuals::dark() } else { Visuals::light() };
    v.override_text_color = None;
    v.weak_text_color = Some(color(look.ink_soft));
    v.panel_fill = color(look.paper);
    v.window_fill = color(look.paper);
    v.window_stroke = rule;
    v.window_corner_radius = CornerRadius::same(3);
    v.menu_corner_radius = CornerRadius::same(3);
    v.extreme_bg_color = color(look.panel);
    v.text_edit_bg_color = Some(color(look.panel));
    v.faint_bg_color = color(look.panel);
    v.code_bg_color = color(look.panel);
    v.hyperlink_color = color(look.predicted);
    v.warn_fg_color = color(look.caution);
    v.error_fg_color = color(look.measured);
    v.selection.bg_fill = color(look.tint(look.measured, 0.18));
    v.selection.stroke = Stroke::new(1.0, ink);
    v.handle_shape = HandleShape::Circle;
    v.slider_trailing_fill = true;
    v.button_frame = true;
    let widget = |fill: Rgba, edge: Rgba, text: Color32| WidgetVisuals {
        bg_fill: color(fill),
        weak_bg_fill: color(fill),
        bg_stroke: Stroke::new(1.0, color(edge)),
        corner_radius: CornerRadius::same(3),
        fg_stroke: Stroke::new(1.0, text),
        expansion: 0.0,
    };
    v.widgets.noninteractive = widget(look.paper, look.rule, ink);
    v.widgets.inactive = widget(look.panel, look.rule, ink);
    v.widgets.hovered = widget(look.tint(look.ink, 0.12), look.ink_soft, ink);
    v.widgets.active = widget(look.tint(look.ink, 0.2), look.ink, ink);
    v.widgets.open = widget(look.panel, look.ink_soft, ink);
    v
}

//! The colours of the table, from the tokens that plates and window share.

use egui::Color32;

use crate::plate::Theme;
use crate::window::theme::color;

/// Colours by what they are for.
#[derive(Clone, Copy, Debug)]
pub struct Ink {
    /// The margin.
    pub paper: Color32,
    /// The ground beside the raster.
    pub ground: Color32,
    /// Where pixels are missing or not yet read.
    pub blank: Color32,
    pub rule: Color32,
    pub ink: Color32,
    pub soft: Color32,
    /// What is selected and measured, on paper.
    pub measured: Color32,
    /// The same over a raster, in either look.
    pub over_image: Color32,
    /// Lines over the raster and the halo round them, in either look.
    pub line: Color32,
    pub halo: Color32,
    /// Channels over the raster, in either look.
    pub water: Color32,
    /// Ground raised and cut by conditioning.
    pub raised: Color32,
    pub cut: Color32,
}

impl Ink {
    pub fn of(theme: &Theme) -> Self {
        Self {
            paper: color(theme.paper),
            ground: color(theme.tint(theme.ink, 0.09)),
            blank: color(theme.panel),
            rule: color(theme.rule),
            ink: color(theme.ink),
            soft: color(theme.ink_soft),
            measured: color(theme.measured),
            over_image: color(Theme::light().measured),
            line: color(theme.over_image),
            halo: color(theme.halo),
            water: color(Theme::light().water),
            raised: color(Theme::light().predicted),
            cut: color(Theme::light().measured),
        }
    }
}

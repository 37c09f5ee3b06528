//! How the user looks at the sheet: saved with it, never undone, never part of a number.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use crate::ground::{Bounds, Point};
use crate::plate::MapPoint;
use crate::study::Id;

use super::PlateChoice;

/// Saved beside the sheet; unknown or missing fields fall back to the default.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct View {
    pub theme: Theme,
    pub page: Page,
    /// The selected patch.
    pub patch: Option<Id>,
    /// The raster on the table; the first one when absent.
    pub raster: Option<Id>,
    /// The wind record on the bench; the patch's own or the first one when absent.
    pub wind: Option<Id>,
    /// One camera a raster; a raster without one is shown whole.
    pub cameras: BTreeMap<Id, Camera>,
    pub layers: Layers,
    pub plate: PlateChoice,
    /// The selected outcrop.
    pub obstacle: Option<Id>,
    /// The selected network.
    pub network: Option<Id>,
    /// The regime picked on the map.
    pub regime: Option<PickedRegime>,
}

#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Theme {
    #[default]
    Light,
    Dark,
}

/// The pages of the bench, in the order of the reasoning.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Page {
    Ground,
    #[default]
    Trend,
    Light,
    Spacing,
    Crests,
    Winds,
    Verdict,
    Regimes,
    Obstacles,
    Channels,
    Plate,
}

/// Where the table looks.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Camera {
    /// Full-resolution pixel in the middle of the table.
    pub centre: Point,
    /// Screen points a raster pixel.
    pub scale: f64,
}

/// What lies on the raster.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct Layers {
    pub strokes: bool,
    /// The trend as a flow texture, in place of strokes.
    pub flow: bool,
    /// Crest lines.
    pub crests: bool,
    pub outlines: bool,
    pub names: bool,
    pub graticule: bool,
    pub networks: bool,
    /// Outlines of drainage basins.
    pub divides: bool,
    /// What conditioning raised and cut.
    pub changes: bool,
}

impl Default for Layers {
    fn default() -> Self {
        Self {
            strokes: true,
            flow: false,
            crests: true,
            outlines: true,
            names: true,
            graticule: true,
            networks: true,
            divides: true,
            changes: false,
        }
    }
}

/// Two winds picked on the map of regimes.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct PickedRegime {
    /// Angle between them, degrees in (0, 180).
    pub divergence_deg: f64,
    /// Strength of the dominant over the other, 1 to 10.
    pub ratio: f64,
}

impl Default for PickedRegime {
    fn default() -> Self {
        Self { divergence_deg: 120.0, ratio: 2.0 }
    }
}

impl PickedRegime {
    /// The nearest regime on the map.
    pub fn within_map(self) -> Self {
        Self { divergence_deg: self.divergence_deg.clamp(0.5, 179.5), ratio: self.ratio.clamp(1.0, 10.0) }
    }

    pub fn from_map(point: MapPoint) -> Self {
        Self { divergence_deg: point.divergence_deg, ratio: point.ratio }
    }

    pub fn on_map(self) -> MapPoint {
        MapPoint { divergence_deg: self.divergence_deg, ratio: self.ratio }
    }
}

impl Theme {
    pub fn other(self) -> Self {
        match self {
            Self::Light => Self::Dark,
            Self::Dark => Self::Light,
        }
    }
}

impl Page {
    pub const ALL: [Self; 11] = [
        Self::Ground,
        Self::Trend,
        Self::Light,
        Self::Spacing,
        Self::Crests,
        Self::Winds,
        Self::Verdict,
        Self::Regimes,
        Self::Obstacles,
        Self::Channels,
        Self::Plate,
    ];

    pub fn label(self) -> &'static str {
        match self {
            Self::Ground => "Ground",
            Self::Trend => "Trend",
            Self::Light => "Light",
            Self::Spacing => "Spacing",
            Self::Crests => "Crests",
            Self::Winds => "Winds",
            Self::Verdict => "Verdict",
            Self::Obstacles => "Obstacles",
            Self::Regimes => "Regimes",
            Self::Channels => "Channels",
            Self::Plate => "Plate",
        }
    }

    /// The page `step` further on, round the corner.
    pub fn turned(self, step: isize) -> Self {
        let at = Self::ALL.iter().position(|p| *p == self).unwrap_or(0) as isize;
        Self::ALL[(at + step).rem_euclid(Self::ALL.len() as isize) as usize]
    }
}

impl Camera {
    /// Screen points a raster pixel: from 2⁻¹⁴ (a 10⁷ pixel raster on a screen) to 64.
    pub const SCALES: [f64; 2] = [1.0 / 16_384.0, 64.0];

    /// Shows `bounds` (pixels) whole in a table of `viewport` points, with a little air.
    pub fn fitting(bounds: Bounds, viewport: [f64; 2]) -> Self {
        let across = viewport[0] / bounds.width().max(1.0);
        let down = viewport[1] / bounds.height().max(1.0);
        let scale = (0.94 * across.min(down)).clamp(Self::SCALES[0], Self::SCALES[1]);
        Self { centre: bounds.centre(), scale }
    }

    /// Closer by `factor`, keeping the raster point under the screen offset `anchor` (points from
    /// the middle of the table) where it is.
    pub fn zoomed(self, factor: f64, anchor: [f64; 2]) -> Self {
        let scale = (self.scale * factor).clamp(Self::SCALES[0], Self::SCALES[1]);
        let shift = 1.0 / self.scale - 1.0 / scale;
        let centre = Point::new(self.centre.x + anchor[0] * shift, self.centre.y + anchor[1] * shift);
        Self { centre, scale }
    }

    /// Moved by a screen offset in points (the raster follows the hand).
    pub fn panned(self, by: [f64; 2]) -> Self {
        let centre = Point::new(self.centre.x - by[0] / self.scale, self.centre.y - by[1] / self.scale);
        Self { centre, ..self }
    }
}

#[cfg(test)]
mod tests {
    use super::{Camera, Page};
    use crate::ground::{Bounds, Point};

    #[test]
    fn zooming_keeps_the_point_under_the_pointer() {
        let camera = Camera { centre: Point::new(100.0, 50.0), scale: 2.0 };
        let anchor = [30.0, -12.0];
        let under = |c: Camera| (c.centre.x + anchor[0] / c.scale, c.centre.y + anchor[1] / c.scale);
        let zoomed = camera.zoomed(1.7, anchor);
        crate::assert_close!(under(zoomed).0, under(camera).0, 1e-9, "column under the pointer");
        crate::assert_close!(under(zoomed).1, under(camera).1, 1e-9, "row under the pointer");
    }

    #[test]
    fn a_fitted_raster_is_whole() {
        let bounds = Bounds { min: Point::new(0.0, 0.0), max: Point::new(4000.0, 1000.0) };
        let camera = Camera::fitting(bounds, [800.0, 600.0]);
        assert!(camera.scale * 4000.0 <= 800.0 && camera.scale * 1000.0 <= 600.0);
        assert_eq!(camera.centre, Point::new(2000.0, 500.0));
    }

    #[test]
    fn pages_turn_round_the_corner() {
        assert_eq!(Page::Plate.turned(1), Page::Ground);
        assert_eq!(Page::Ground.turned(-1), Page::Plate);
    }
}

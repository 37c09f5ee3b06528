//! Plates: findings as figures in millimetres, written as SVG, PNG and PDF. The window paints the
//! same figures, so that a rose looks the same on screen and in print.

mod bars;
mod caption;
mod channels;
mod chart;
pub mod compose;
mod contour;
mod crest_plate;
mod dial;
mod drift_calendar;
mod figure;
mod flips;
pub mod font;
mod implied;
pub mod map;
mod modes;
mod network_plate;
pub mod numbers;
mod obstacle;
mod overview_plate;
mod page;
mod patch_plate;
mod pattern;
mod profile;
mod regime_map;
mod rose;
mod sand_rose;
mod sketch;
mod spectrum;
mod theme;
mod words;
mod write;

pub use bars::{posterior_bars, verdict_bar};
pub use caption::Recipe;
pub use channels::{
    chi_plot, drop_test, flow_ranges, hack_plot, hypsometric_curve, junction_rose, link_rose, long_profile,
    network_compare, network_numbers, order_plot, pattern_bars, planform_sketch, slope_area, threshold_maps,
    width_plot,
};
pub use crest_plate::{CrestPlate, crest_plate, crest_sentence, crests_on_map};
pub use dial::{CLASS_LIMITS_DEG, CLASS_NAMES, dial};
pub use drift_calendar::drift_calendar;
pub use figure::{Figure, Fill, HALO, Item, Rgba, Stroke, TextAnchor};
pub use flips::flips;
pub use implied::implied_rose;
pub use modes::modes;
pub use network_plate::{NetworkPlate, network_plate};
pub use obstacle::{obstacle, obstacles_together};
pub use overview_plate::{OverviewPlate, overview_plate};
pub use patch_plate::{PatchPlate, patch_plate};
pub use pattern::{
    comparison_figure, crest_lengths, crest_numbers, crest_rose, defect_diagram, light_numbers,
    populations_figure, recovery_curve, recovery_ring, scale_sweep, spacing_survival,
};
pub use profile::profile;
pub use regime_map::{MapPoint, regime_at, regime_map};
pub use rose::{rose, small_rose, small_rose_of_populations};
pub use sand_rose::sand_rose;
pub use spectrum::spectrum;
pub use theme::{TextSizes, Theme, Widths};
pub use write::{PngSize, WriteError, pdf, png, rgba, svg};

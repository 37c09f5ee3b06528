//! Figures of channel networks: profiles, areas and slopes, junctions, orders, patterns, planform, flow. A part
//! that a finding lacks is said in words in its place.

mod chi;
mod compare;
mod drops;
mod flow;
mod junctions;
mod lines;
mod numbers_table;
mod orders;
mod pattern;
mod planform;
mod profiles;
mod scaling;

pub use chi::chi_plot;
pub use compare::network_compare;
pub use drops::{drop_test, threshold_maps};
pub use flow::flow_ranges;
pub use junctions::junction_rose;
pub use numbers_table::network_numbers;
pub use orders::order_plot;
pub use pattern::{link_rose, pattern_bars};
pub use planform::{planform_sketch, width_plot};
pub use profiles::{hypsometric_curve, long_profile};
pub use scaling::{hack_plot, slope_area};

pub(super) use lines::{Printable, order_width, printable};

use super::words::{SHAPE, area, brief, length_ruler, table, verdict_words, with_interval, words_only};

//! Figures of a bedform pattern: crest roses, spacing and length with what the border cut, defects, trend by scale,
//! populations, what would have been seen, and two pictures of one ground. A part that a finding lacks is said in
//! words in its place.

mod comparison;
mod crest_rose;
mod defects;
mod lengths;
mod light;
mod numbers_table;
mod populations;
mod recovery;
mod recovery_ring;
mod scales;
mod spacing;
mod survival;

pub use comparison::comparison_figure;
pub(super) use comparison::{crests_moved, trends_compared};
pub use crest_rose::crest_rose;
pub use defects::defect_diagram;
pub use lengths::crest_lengths;
pub use light::light_numbers;
pub use numbers_table::crest_numbers;
pub use populations::populations_figure;
pub use recovery::recovery_curve;
pub use recovery_ring::recovery_ring;
pub use scales::scale_sweep;
pub use spacing::spacing_survival;

use crate::ground::LengthUnit;

use super::words::brief;

/// How many of something there are along a length of one unit: per km, or per 1000 px.
fn per_length(density: f64, unit: LengthUnit) -> String {
    match unit {
        LengthUnit::Metre => format!("{} per km", brief(1000.0 * density)),
        LengthUnit::Pixel => format!("{} per 1000 px", brief(1000.0 * density)),
    }
}

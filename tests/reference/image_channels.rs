//! Channels on images (checks I06).

use ventifact::assert_close;
use ventifact::ground::{Grid, Work};
use ventifact::numeric::distance;
use ventifact::science::channel::width::width_of_mask;

/// I06: a strip of 21 cells has distance 11 in its middle (an independent exact Euclidean transform) and width 21.
#[test]
fn a_strip_of_21_cells_is_21_wide() {
    let mask = Grid::from_fn(80, 61, |_, row| (20..41).contains(&row));
    let distances = distance::to_empty(mask.values(), 80, &Work::quiet()).unwrap();
    assert_close!(f64::from(distances[30 * 80 + 40]), 11.0, 1e-9, "distance in the middle");
    let widths = width_of_mask(&mask, &Work::quiet()).unwrap();
    assert_close!(f64::from(widths.at(40, 30)), 21.0, 1e-9, "width");
    assert_eq!(widths.at(40, 5), 0.0);
}

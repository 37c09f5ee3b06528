//! Turning a raster by a quarter turns its populations and changes nothing else about them.

#[allow(dead_code, reason = "shared with the bench and the reference tests")]
#[path = "../bench/population_scenes.rs"]
mod population_scenes;

use population_scenes::{Lie, Two, found};
use ventifact::assert_close;
use ventifact::ground::Grid;

#[test]
fn a_quarter_turn_turns_populations_by_90_degrees() {
    let scene =
        Two { lie: Lie::Superposed, trend: 20.0, apart: 70.0, coarse: 1.0, looks: Some(4.0), seed: 4 };
    let image = scene.draw(360).image;
    let turned = Grid::from_fn(360, 360, |col, row| image.at(row, 359 - col));
    let (before, after) = (found(&image, true), found(&turned, true));
    assert_eq!((before.len(), after.len()), (2, 2));
    for (b, a) in before.iter().zip(&after) {
        assert!(b.axis.rotated(90.0).separation(a.axis) < 0.2, "{} and {}", b.axis.deg(), a.axis.deg());
        assert_close!(a.weight, b.weight, 0.01, "weight");
        assert_eq!(a.band, b.band);
    }
}

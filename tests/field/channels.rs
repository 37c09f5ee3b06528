//! Channels of a real delta: trunk, distributaries and loops.

use ventifact::files::raster::{Bands, Limits, Raster, Window};
use ventifact::ground::{Point, Work};
use ventifact::science::channel::detect::{ChannelTone, DetectSettings, detect};

use crate::field_data;

#[test]
fn the_delta_shows_trunk_and_distributaries_with_loops() {
    let Some(data) = field_data("the_delta_shows_trunk_and_distributaries_with_loops") else { return };
    let raster = Raster::open(&data.join("delta/delta_720p.jpg"), &Limits::default()).unwrap();
    let (width, height) = (raster.info().width, raster.info().height);
    let image =
        raster.read(0, Window { col: 0, row: 0, width, height }, &Bands::default(), &Work::quiet()).unwrap();
    let settings = DetectSettings {
        tone: ChannelTone::Bright,
        narrowest_px: 2.0,
        widest_px: 200.0,
        significance: 0.001,
        gap_widths: 6.0,
        spur_half_widths: 3.0,
        least_length_widths: 8.0,
    };
    let found = detect(&image, false, &settings, &Work::quiet()).unwrap().unwrap();
    println!(
        "{} reaches, {} loops, {} bridges",
        found.network.reaches.len(),
        found.network.loops(),
        found.bridged
    );
    let near = |x: f64, y: f64, within: f64| {
        let at = Point::new(x, y);
        found.network.reaches.iter().flat_map(|r| &r.line.0).any(|p| p.distance(at) <= within)
    };
    // Read off the picture: the trunk's middle, and places in distributaries of 3 to 40 px.
    let known = [
        (280.0, 150.0, 30.0),
        (240.0, 270.0, 30.0),
        (310.0, 600.0, 6.0),
        (757.0, 95.0, 4.0),
        (765.0, 190.0, 4.0),
        (404.0, 480.0, 4.0),
        (490.0, 577.0, 4.0),
        (930.0, 640.0, 4.0),
        (1145.0, 430.0, 4.0),
        (828.0, 300.0, 4.0),
        (650.0, 90.0, 4.0),
        (150.0, 350.0, 5.0),
        (560.0, 530.0, 5.0),
    ];
    let missed: Vec<_> = known.into_iter().filter(|(x, y, r)| !near(*x, *y, *r)).collect();
    assert!(missed.len() <= 1, "missed {missed:?}");
    assert!(found.network.loops() >= 5);
}

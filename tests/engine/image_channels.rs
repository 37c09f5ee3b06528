//! Networks proposed on images: truth found, noise left alone, turned with the image, whole on poor input.

#[path = "../bench/rivers.rs"]
mod rivers;

use ventifact::ground::{Grid, Network, Point, ReachOrigin, Seed, Work};
use ventifact::science::channel::detect::{ChannelTone, Detected, detect};
use ventifact::science::channel::width::measure;
use ventifact::science::scene::speckle;
use ventifact::science::scene::waterways::{Look, Waterways};

use rivers::settings;

fn dark(image: &Grid<f32>) -> Result<Detected, String> {
    detect(image, true, &settings(ChannelTone::Dark), &Work::quiet()).unwrap()
}

/// Share of the points of `one` within `near` of a line point of `other`.
fn met(one: &Network, other: &Network, near: f64) -> f64 {
    let points = |n: &Network| n.reaches.iter().flat_map(|r| r.line.0.clone()).collect::<Vec<Point>>();
    let (one, other) = (points(one), points(other));
    let hits = one.iter().filter(|p| other.iter().any(|q| q.distance(**p) <= near)).count();
    hits as f64 / one.len().max(1) as f64
}

#[test]
fn dark_and_bright_channels_of_many_widths_are_found_at_four_looks() {
    for (tone, widths) in [(0.38, &[40.0, 16.0, 8.0, 4.0, 2.0][..]), (1.0 / 0.38, &[8.0, 4.0, 2.0])] {
        let look = Look { tone, mixed: false, looks: Some(4.0), gap_px: 0.0 };
        for (size, seed) in [(640, 3), (800, 31), (800, 32)] {
            let score = rivers::run(size, widths, look, seed);
            println!("tone {tone:.2}, seed {seed}: {score:?}");
            assert!(score.recall >= 0.9 && score.precision >= 0.85, "tone {tone}, seed {seed}: {score:?}");
            assert!(score.loops >= 1, "the island is lost: {score:?}");
            for (width, share, bias) in score.by_width {
                assert!(share >= 0.8 && bias.abs() <= 0.5, "width {width}: {share} found, bias {bias}");
            }
        }
    }
}

#[test]
fn pure_speckle_holds_next_to_no_channels() {
    let found: usize = (0..3)
        .map(|seed| dark(&speckle(512, 512, 4.0, &mut Seed(seed).stream("engine.speckle", 0))))
        .map(|found| found.unwrap().network.reaches.len())
        .sum();
    assert!(found <= 2, "{found} reaches in 0.8 million pixels of noise");
}

#[test]
fn a_turned_image_gives_the_turned_network() {
    let look = Look { tone: 0.38, mixed: false, looks: Some(16.0), gap_px: 0.0 };
    let side = 384;
    let image = Waterways::draw(side, &[12.0, 6.0, 3.0], look, Seed(4)).image(look, Seed(4));
    // A quarter turn: column c, row r of the image comes from column r, row side − 1 − c.
    let turned = Grid::from_fn(side, side, |c, r| image.at(r, side - 1 - c));
    let (one, mut two) = (dark(&image).unwrap().network, dark(&turned).unwrap().network);
    for reach in &mut two.reaches {
        reach.line.0.iter_mut().for_each(|p| *p = Point::new(p.y, side as f64 - p.x));
    }
    let both = (met(&one, &two, 1.5), met(&two, &one, 1.5));
    assert!(both.0 > 0.95 && both.1 > 0.95, "{both:?}");
}

#[test]
fn a_gap_is_bridged_and_says_so() {
    let noise = speckle(400, 120, 16.0, &mut Seed(7).stream("engine.gap", 0));
    let image = Grid::from_fn(400, 120, |c, r| {
        let channel = (57..63).contains(&r) && !(185..215).contains(&c);
        noise.at(c, r) * if channel { 40.0 } else { 100.0 }
    });
    let found = dark(&image).unwrap();
    let bridges: Vec<_> = found.network.reaches.iter().filter(|r| r.origin == ReachOrigin::Bridged).collect();
    assert_eq!((found.bridged, bridges.len()), (1, 1));
    assert!(bridges[0].confidence > 0.6 && bridges[0].confidence < 1.0, "{}", bridges[0].confidence);
}

#[test]
fn missing_cells_are_no_channels_and_hide_none() {
    let noise = speckle(260, 260, 16.0, &mut Seed(6).stream("engine.missing", 0));
    let mut image =
        Grid::from_fn(260, 260, |c, r| noise.at(c, r) * if (100..108).contains(&c) { 40.0 } else { 100.0 });
    image.mask_where(|c, r| !((180..200).contains(&c) || ((100..108).contains(&r) && c > 120)));
    let network = dark(&image).unwrap().network;
    let off = network.reaches.iter().flat_map(|r| &r.line.0).filter(|p| (p.x - 104.0).abs() > 3.0).count();
    assert_eq!(off, 0, "{:?}", network.reaches.len());
    assert!(network.length() > 220.0);
}

#[test]
fn poor_input_gives_a_reason_or_nothing() {
    assert!(dark(&Grid::filled(50, 50, 3.0)).is_err());
    assert!(dark(&Grid::filled(1, 1, 3.0)).is_err());
    assert!(dark(&Grid::filled(40, 40, f32::NAN)).is_err());
    let mut empty = Grid::filled(30, 30, 1.0);
    empty.mask_where(|_, _| false);
    assert!(dark(&empty).is_err());
    assert!(dark(&Grid::from_fn(3, 2, |c, _| c as f32)).is_err());
    let mut none = Network::default();
    measure(&empty, &mut none, ChannelTone::Dark, 40.0, &Work::quiet()).unwrap();
    assert_eq!(none, Network::default());
}

#[test]
fn stop_is_heard() {
    let work = Work::quiet();
    work.stop();
    let image = speckle(200, 200, 4.0, &mut Seed(1).stream("engine.speckle", 1));
    assert!(detect(&image, true, &settings(ChannelTone::Dark), &work).is_err());
}

//! The pen on the sample mosaic: a window laid, a channel traced between picks, compared with its truth.

use std::path::Path;

use ventifact::ground::{Bounds, Point, Seed, Work};
use ventifact::science::channel::detect::ChannelTone;
use ventifact::science::scene::reach::channels;
use ventifact::study::pen::Pen;
use ventifact::study::{ChannelSettings, Sources, demo};

#[test]
fn the_dry_channel_of_the_mosaic_is_traced() {
    let sheet = demo::sheet(&Path::new(env!("CARGO_MANIFEST_DIR")).join("sample-rasters"));
    let sources = Sources::open(&sheet);
    let entry = &sheet.rasters[0];
    let open = &sources.rasters[&entry.id];
    let settings =
        ChannelSettings { tone: ChannelTone::Dark, narrowest_px: 2.0, widest_px: 10.0, ..Default::default() };
    let window = Bounds { min: Point::new(600.0, 500.0), max: Point::new(5000.0, 900.0) };
    let work = Work::quiet();
    let pen = Pen::lay(open, entry, window, &settings, &work).unwrap();
    assert_eq!(pen.factor(), 1.0);
    assert!(pen.covers(Point::new(700.0, 600.0)) && !pen.covers(Point::new(500.0, 600.0)));

    // Trunk of the truth: from a junction of order 2 down to the edge.
    let truth = channels();
    let trunk: Vec<Point> = truth.iter().filter(|r| r.order == 2).flat_map(|r| r.line.0.clone()).collect();
    let (from, to) = (trunk[0], trunk[trunk.len() - 2]);
    let way = pen.way(from, to, &work).unwrap().expect("a way");
    let near = |a: Point, b: Point| a.distance(b) < 1e-9;
    assert!(near(way.line.0[0], from) && near(*way.line.0.last().unwrap(), to));
    assert_eq!((way.cost_ratio, way.p), (None, None), "chance is not known yet");
    let away = |p: &Point| trunk.iter().map(|q| p.distance(*q)).fold(f64::INFINITY, f64::min);
    let far = way.line.0.iter().filter(|p| away(p) > 12.0).count();
    assert!(far * 20 < way.line.0.len(), "{far} of {} points are off the channel", way.line.0.len());

    pen.learn_chance(Seed(1), &work).unwrap();
    let ways = pen.ways_from(from, &work).unwrap().expect("passable");
    assert!(near(ways.from(), from));
    let live = ways.to(to, &work).unwrap().expect("a way");
    assert_eq!(live.line, way.line);
    let (ratio, p) = (live.cost_ratio.unwrap(), live.p.unwrap());
    println!("cost {ratio:.2} of random ways, p {p:.3}");
    assert!(ratio < 0.9 && p < 0.2, "ratio {ratio}, p {p}");
    assert!(pen.way(from, Point::new(-50.0, 2.0), &work).unwrap().is_none());
    let outside = Bounds { min: Point::new(-90.0, -90.0), max: Point::new(-5.0, -5.0) };
    assert!(Pen::lay(open, entry, outside, &settings, &work).is_err());
}

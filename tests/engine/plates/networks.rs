//! Plates of channel networks: every figure the same bytes twice, real text, words where a part is missing, nothing
//! off the page, and ten thousands of reaches still thin enough to print.

use ventifact::ground::{Bounds, Network, Place, Point, ReachOrigin};
use ventifact::plate::map::{MapNetwork, MapPatch, MapView, map, network_key};
use ventifact::plate::{
    Figure, Item, NetworkPlate, OverviewPlate, Theme, font, network_plate, overview_plate, pdf, svg,
};
use ventifact::plate::{
    chi_plot, drop_test, flow_ranges, hack_plot, hypsometric_curve, junction_rose, link_rose, long_profile,
    network_compare, network_numbers, order_plot, pattern_bars, planform_sketch, slope_area, threshold_maps,
    width_plot,
};
use ventifact::study::{Findings, Id, NetworkFinding};

use super::rivers::{traced_finding, tree, tree_finding};
use super::sorrel::{Reach, nodes, raster_finding, reach, recipe};
use super::{assert_inside, contact_sheet, keep, texts};

const WIDTH: f64 = 56.0;

type Draw = fn(&NetworkFinding, f64, &Theme) -> Figure;

const FIGURES: [(&str, Draw); 15] = [
    ("long profile", long_profile),
    ("chi", chi_plot),
    ("slope and area", slope_area),
    ("hack", hack_plot),
    ("drops", drop_test),
    ("junctions", junction_rose),
    ("width", width_plot),
    ("hypsometry", hypsometric_curve),
    ("orders", order_plot),
    ("pattern", pattern_bars),
    ("links", link_rose),
    ("planform", planform_sketch),
    ("flow", flow_ranges),
    ("thresholds", threshold_maps),
    ("numbers", network_numbers),
];

fn all(finding: &NetworkFinding, theme: &Theme) -> Vec<Figure> {
    let mut figures: Vec<Figure> = FIGURES.iter().map(|(_, draw)| draw(finding, WIDTH, theme)).collect();
    let other = traced_finding(&reach().place).network;
    figures.push(network_compare(finding, &[(Id(8), other)], WIDTH, theme));
    figures
}

fn said(figure: &Figure) -> String {
    texts(&figure.items).join(" ").replace('\n', " ")
}

#[test]
fn figures_of_networks_are_the_same_twice_and_have_every_glyph() {
    let place = reach().place;
    for (kind, finding) in [("tree", tree_finding(&place)), ("traced", traced_finding(&place))] {
        for (look, theme) in [("light", Theme::light()), ("dark", Theme::dark()), ("print", Theme::print())] {
            let page = contact_sheet(&all(&finding, &theme), 4, &theme);
            keep(&format!("networks-{kind}-{look}"), &page, 2000);
            assert!(svg(&page) == svg(&contact_sheet(&all(&finding, &theme), 4, &theme)), "SVG bytes differ");
            for text in texts(&page.items) {
                assert!(font::covers(&text), "no glyph for a character of {text:?}");
            }
        }
    }
}

#[test]
fn figures_of_a_tree_state_their_numbers() {
    let finding = tree_finding(&reach().place);
    let theme = Theme::print();
    let wanted: [(Draw, &[&str]); 9] = [
        (long_profile, &["trunk falls", "p = 0.031", "p = 0.004"]),
        (chi_plot, &["0.45 (0.36–0.53)", "0.984"]),
        (slope_area, &["−0.44 (−0.47 to −0.41)"]),
        (drop_test, &["1.4 km²", "proposed"]),
        (junction_rose, &["mean 63° (58°–68°)", "1 more left out", "125 m", "500 m"]),
        (order_plot, &["bifurcation 4.3 (3.1–6.0)", "does not tell"]),
        (pattern_bars, &["dendritic", "71 %"]),
        (planform_sketch, &["sinuosity 1.21", "smoothed over 1900 m"]),
        (flow_ranges, &["discharge, m³/s", "licensed practice", "62 %"]),
    ];
    for (draw, parts) in wanted {
        let said = said(&draw(&finding, 80.0, &theme));
        for part in parts {
            assert!(said.contains(part), "{part} in {said}");
        }
    }
}

#[test]
fn what_a_finding_lacks_is_said_and_not_drawn() {
    let theme = Theme::print();
    let place = reach().place;
    let traced = traced_finding(&place);
    let words: [(Draw, &str); 9] = [
        (long_profile, "No long profile"),
        (chi_plot, "No χ plot"),
        (slope_area, "No slope–area"),
        (drop_test, "not from elevation"),
        (junction_rose, "all 4 junctions"),
        (hypsometric_curve, "No hypsometric curve"),
        (order_plot, "part and join again"),
        (pattern_bars, "Too few links"),
        (flow_ranges, "the slope is not known"),
    ];
    for (draw, part) in words {
        let figure = draw(&traced, WIDTH, &theme);
        assert!(said(&figure).contains(part), "{part} in {}", said(&figure));
    }
    // Nothing at all: still figures, and none without height.
    let empty = NetworkFinding {
        network: Default::default(),
        planforms: Vec::new(),
        junctions: Default::default(),
        pattern: Default::default(),
        ..traced
    };
    for (name, draw) in FIGURES {
        let figure = draw(&empty, WIDTH, &theme);
        assert!(figure.height_mm > 0.0 && figure.height_mm.is_finite(), "{name}");
    }
}

fn plate_of(finding: &NetworkFinding, scene: &Reach, theme: &Theme) -> Figure {
    let covers = Bounds { min: Point::new(0.0, 0.0), max: Point::new(scene.size[0], scene.size[1]) };
    let view = MapView { picture: &scene.picture, covers, place: &scene.place };
    let (raster, recipe) = (raster_finding(), recipe());
    let nodes = nodes(&scene.outline);
    let dunes = MapPatch {
        name: "Long dunes",
        outline: &scene.outline,
        nodes: &nodes,
        rose: None,
        is_subject: false,
    };
    let others = [(Id(8), traced_finding(&scene.place).network)];
    let plate = NetworkPlate {
        finding,
        patches: vec![dunes],
        raster: &raster,
        view,
        others: &others,
        recipe: &recipe,
    };
    network_plate(&plate, 180.0, theme)
}

#[test]
fn network_plates_hold_together() {
    let scene = reach();
    let (tree, traced) = (tree_finding(&scene.place), traced_finding(&scene.place));
    let print = Theme::print();
    let plates = [
        ("network", plate_of(&tree, &scene, &print)),
        ("network-dark", plate_of(&tree, &scene, &Theme::dark())),
        ("network-traced", plate_of(&traced, &scene, &print)),
    ];
    for (name, plate) in &plates {
        keep(name, plate, 2126);
        for text in texts(&plate.items) {
            assert!(font::covers(&text), "{name}: no glyph for a character of {text:?}");
        }
        assert_inside(name, plate);
    }
    let whole = said(&plates[0].1);
    for part in [
        "Sorrel branches",
        "order 4",
        "divide",
        "raised",
        "Traced channels",
        "seed 1",
        "73aa10e4c2",
        "Horton",
        "D8",
    ] {
        assert!(whole.contains(part), "{part} in {whole}");
    }
    let traced = said(&plates[2].1);
    for part in ["gap bridged", "drawn by hand", "less sure", "part and join again"] {
        assert!(traced.contains(part), "{part} in {traced}");
    }
    assert!(!traced.contains("Hypsometry"), "nothing is asked of an image that elevation only tells");
    let again = plate_of(&tree, &scene, &print);
    assert!(pdf(&again) == pdf(&plates[0].1), "PDF bytes differ");
}

#[test]
fn the_overview_draws_its_networks_and_tells_them_in_a_table() {
    let scene = reach();
    let tree = tree_finding(&scene.place);
    let covers = Bounds { min: Point::new(0.0, 0.0), max: Point::new(scene.size[0], scene.size[1]) };
    let (raster, recipe) = (raster_finding(), recipe());
    let bare = MapNetwork { name: &tree.name, network: &tree.network, divides: Vec::new(), change: None };
    let findings = Findings { networks: vec![tree.clone()], ..Findings::default() };
    let plate = OverviewPlate {
        findings: &findings,
        raster: &raster,
        outlines: Vec::new(),
        networks: vec![bare],
        view: MapView { picture: &scene.picture, covers, place: &scene.place },
        recipe: &recipe,
    };
    let figure = overview_plate(&plate, 180.0, &Theme::print());
    keep("network-overview", &figure, 1500);
    assert_inside("network-overview", &figure);
    assert_eq!(channels(&figure).len(), tree.network.reaches.len());
    let said = said(&figure);
    for part in ["dendritic 71 %", "order 4", "channels-smooth", "Horton"] {
        assert!(said.contains(part), "{part} in {said}");
    }
    assert!(!said.contains("Small roses"), "no patch, no roses: {said}");
}

/// Channel lines of a map in the colour of water, with their widths and dashes.
fn channels(figure: &Figure) -> Vec<(f64, bool)> {
    let water = Theme::light().water;
    let inside = figure.items.iter().find_map(|i| match i {
        Item::Clip { items, .. } => Some(items),
        _ => None,
    });
    let line = |item: &Item| match item {
        Item::Path { stroke: Some(s), closed: false, .. } if s.color == water => {
            Some((s.width_mm, s.dash_mm.is_some()))
        }
        _ => None,
    };
    inside.expect("a map").iter().filter_map(line).collect()
}

fn mapped(network: &Network, scene: &Reach) -> Figure {
    let covers = Bounds { min: Point::new(0.0, 0.0), max: Point::new(scene.size[0], scene.size[1]) };
    let view = MapView { picture: &scene.picture, covers, place: &scene.place };
    let one = MapNetwork { name: "Branches", network, divides: Vec::new(), change: None };
    map(&view, &[], &[one], [110.0, 110.0], &Theme::print())
}

#[test]
fn lines_grow_with_order_and_bridged_gaps_are_dashed() {
    let scene = reach();
    let tree = tree_finding(&scene.place).network;
    let mut widths: Vec<f64> = channels(&mapped(&tree, &scene)).iter().map(|l| l.0).collect();
    assert_eq!(widths.len(), tree.reaches.len());
    widths.dedup();
    assert_eq!(
        widths.len() as u32,
        tree.greatest_order().expect("orders"),
        "one width an order, thin ones first"
    );
    let mut traced = traced_finding(&scene.place).network;
    traced.reaches.iter_mut().for_each(|r| r.confidence = 1.0);
    let dashed = channels(&mapped(&traced, &scene)).iter().filter(|l| l.1).count();
    let bridged = traced.reaches.iter().filter(|r| r.origin == ReachOrigin::Bridged).count();
    assert_eq!((dashed, bridged), (1, 1));
}

#[test]
fn a_sense_that_is_not_sure_has_no_head() {
    let scene = reach();
    let mut network = tree_finding(&scene.place).network;
    let covers = Bounds { min: Point::new(0.0, 0.0), max: Point::new(scene.size[0], scene.size[1]) };
    let view = MapView { picture: &scene.picture, covers, place: &scene.place };
    let heads = |network: &Network| {
        let one = MapNetwork { name: "", network, divides: Vec::new(), change: None };
        said(&network_key(&view, &[one], [110.0, 110.0], &Theme::print())).contains("flow")
    };
    assert!(heads(&network));
    network.reaches.iter_mut().for_each(|r| r.sense.evidence.clear());
    assert!(!heads(&network));
}

#[test]
fn a_crowd_of_reaches_is_thinned_to_what_print_holds() {
    let scene = Reach { place: Place::pixels(0.0), ..reach() };
    let mut network = tree(60_000, Point::new(600.0, 890.0), 0.0, &scene.place);
    // Squeezed onto the raster.
    let all = network.reaches.iter().flat_map(|r| r.line.0.iter().copied());
    let bounds = Bounds::of(all).expect("points");
    let fit = |p: &mut Point| {
        *p = Point::new(
            1200.0 * (p.x - bounds.min.x) / bounds.width(),
            900.0 * (p.y - bounds.min.y) / bounds.height(),
        );
    };
    network.reaches.iter_mut().for_each(|r| r.line.0.iter_mut().for_each(fit));
    network.nodes.iter_mut().for_each(|n| fit(&mut n.at));
    assert!(network.reaches.len() > 100_000);
    let started = std::time::Instant::now();
    let figure = mapped(&network, &scene);
    let took = started.elapsed();
    keep("networks-crowd", &figure, 1300);
    let drawn = channels(&figure).len();
    assert!((50..8000).contains(&drawn), "{drawn} lines");
    assert!(took.as_secs_f64() < 20.0, "{took:?} without optimisation");
}

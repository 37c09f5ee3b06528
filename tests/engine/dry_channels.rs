//! The demo's dry channels, from elevation and from the image, held against the truth they were made from.

use ventifact::ground::{Network, NetworkNode, Point, Polyline, ground_distance};
use ventifact::science::network::compare::{Agreement, compare};
use ventifact::science::scene::reach;
use ventifact::study::handover::findings_json;
use ventifact::study::{NetworkFinding, Sources};

use crate::demo::reach_findings;

fn network(source: &str) -> &'static NetworkFinding {
    let (_, findings, _) = reach_findings();
    findings.networks.iter().find(|n| n.source_in_words() == source).expect("the network was measured")
}

/// The truth on the pixels of the finding's raster.
fn truth(finding: &NetworkFinding) -> Network {
    let step = if finding.drainage.is_some() { reach::ELEVATION_STEP as f64 } else { 1.0 };
    let (sheet, ..) = reach_findings();
    let place = Sources::open(sheet).rasters[&finding.raster].place.clone();
    let truth = reach::network_truth();
    truth.on_ground(&place, 1.0, |p| Point::new(p.x / step, p.y / step)).ordered()
}

/// The finding against the truth within `pixels` of its raster.
fn against_truth(finding: &NetworkFinding, pixels: f64) -> Agreement {
    let (sheet, ..) = reach_findings();
    let place = Sources::open(sheet).rasters[&finding.raster].place.clone();
    let size = reach::PIXEL_M * if finding.drainage.is_some() { reach::ELEVATION_STEP as f64 } else { 1.0 };
    let got = compare(&finding.network, &truth(finding), pixels * size, |a, b| ground_distance(&place, a, b));
    println!("{}: {got:?}", finding.name);
    got
}

#[test]
fn channels_from_elevation_hold_the_truth() {
    let finding = network("elevation");
    println!("{}", finding.sentence);
    let got = against_truth(finding, 3.0);
    assert!(got.found >= 0.95, "found {:.3} of the true length", got.found);
    assert!(got.confirmed >= 0.90, "confirmed {:.3} of the found length", got.confirmed);
    assert!(got.same_sense >= Some(0.99) && got.same_order >= Some(0.95), "{got:?}");
    let [theirs, found, ours] = got.junctions;
    assert!(found == theirs && ours == theirs, "junctions {:?}", got.junctions);
    assert_eq!(finding.network.greatest_order(), reach::network_truth().ordered().greatest_order());
    let density = finding.density.expect("a length over an area");
    let length = density.length / density.inflation;
    ventifact::assert_close!(length / got.lengths[0], 1.0, 0.05, "length over the true length");
}

#[test]
fn channels_on_the_mosaic_hold_the_truth() {
    let finding = network("image");
    println!("{}", finding.sentence);
    let got = against_truth(finding, 3.0);
    assert!(got.found >= 0.9 && got.confirmed >= 0.85, "{got:?}");
    assert!(got.same_sense >= Some(0.95) && got.same_order >= Some(0.9), "{got:?}");
    ventifact::assert_close!(got.lengths[1] / got.lengths[0], 1.0, 0.1, "length over the true length");
    assert_eq!(finding.network.greatest_order(), reach::network_truth().ordered().greatest_order());
    let widths = finding.planforms[0].width.as_ref().expect("the trunk has widths");
    let [low, high] = widths.mean_ci95.expect("an interval");
    println!("trunk width {:.0} m ({low:.0} to {high:.0})", widths.mean);
}

#[test]
fn the_two_sources_agree_and_say_so_in_both_findings() {
    let (a, b) = (network("elevation"), network("image"));
    let [(with_b, _, ab)] = &a.agreements[..] else { panic!("one agreement: {:?}", a.agreements) };
    let [(with_a, _, ba)] = &b.agreements[..] else { panic!("one agreement: {:?}", b.agreements) };
    assert_eq!((*with_b, *with_a), (b.id, a.id));
    println!("{ab:?}\n{ba:?}");
    assert!(ab.found >= 0.85 && ab.confirmed >= 0.85, "{ab:?}");
    // The same comparison from the other side, on other pixels.
    ventifact::assert_close!(ab.found, ba.confirmed, 0.03, "found here, confirmed there");
    ventifact::assert_close!(ab.confirmed, ba.found, 0.03, "confirmed here, found there");
}

#[test]
fn networks_stand_in_the_document() {
    let (sheet, findings, _) = reach_findings();
    let document: serde_json::Value = serde_json::from_str(&findings_json(sheet, findings)).unwrap();
    let networks = document["networks"].as_array().unwrap();
    assert_eq!(networks.len(), 2);
    assert_eq!(networks[0]["source"], "elevation");
    assert!(networks[0]["drainage"]["constant_drop"].as_array().unwrap().len() > 3);
    assert!(networks[1]["palaeo_flow"]["discharge_m3_per_s"].is_array(), "{}", networks[1]["palaeo_flow"]);
    assert!(networks[1]["cautions"].to_string().contains("flow-ranges"));
}

/// Lines are moved with their nodes: a truth on other pixels still joins.
#[test]
fn the_truth_is_a_tree() {
    let truth = reach::network_truth().ordered();
    assert_eq!((truth.loops(), truth.outlets().len()), (0, 1));
    for reach in &truth.reaches {
        let Polyline(line) = &reach.line;
        let NetworkNode { at: head, .. } = truth.nodes[reach.from];
        let NetworkNode { at: mouth, .. } = truth.nodes[reach.to];
        assert!(line[0].distance(head) < 1e-9 && line[line.len() - 1].distance(mouth) < 1e-9);
    }
}

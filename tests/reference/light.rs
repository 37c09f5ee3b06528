//! What light does to trends, against the closed forms of SCIENCE B7 and against fields of known trend.

#[path = "../bench/lit.rs"]
mod lit;

use lit::{Lit, speckled_bedforms};
use ventifact::assert_close;
use ventifact::ground::{Axis, Azimuth, Grid};
use ventifact::science::scene::inject::Bedforms;
use ventifact::study::ImageKind;

/// B7: a field of all trends alike seen under one light has R̄ = ∫|sin| cos 2t / ∫|sin| = ⅓ by contrast and
/// ∫sin² cos 2t / ∫sin² = ½ by energy, along light + 90°.
#[test]
fn bedforms_of_all_trends_on_clean_ground_have_the_analytic_lengths() {
    let mut clean = Lit::new(&Grid::filled(200, 200, 80.0f32), ImageKind::Optical, Azimuth::from_deg(283.0));
    clean.sheet.settings.recovery.repeats = 8;
    clean.sheet.settings.recovery.spacing = Some(12.0);
    // Nearly one trend a field: where crests stray, those turned toward light + 90° outshine the others of a node.
    clean.sheet.settings.recovery.spread_deg = Some(3.0);
    // Even ground has no scatter that could set their strength.
    clean.sheet.settings.recovery.tone_per_slope = Some(20.0);
    let found = clean.recover();
    let [contrast, energy] = found.uniform_weighted;
    println!("R of a uniform field: by contrast got {contrast:.4}, want 0.3333 ± 0.03");
    println!("R of a uniform field: by energy got {energy:.4}, want 0.5 ± 0.03");
    println!("R of a uniform field: nodes alike got {:.4}", found.uniform_resultant);
    assert_close!(contrast, 1.0 / 3.0, 0.03, "by contrast");
    assert_close!(energy, 0.5, 0.03, "by energy");
    // Across the light nothing is missed, along it everything may be.
    let across = found.trends.iter().find(|t| t.trend.separation(Axis::from_deg(13.0)) < 1e-9).expect("13°");
    assert_eq!(across.found, across.tries, "{across:?}");
    assert!(across.bias_deg.expect("found").abs() < 2.0, "{across:?}");
}

/// Bedforms whose crests stray, 25° from the light: those turned toward light + 90° show better, so the mean
/// leans that way. Held to the trend laid in.
#[test]
fn the_reported_bias_corrects_a_biased_patch() {
    let light = Azimuth::from_deg(10.0);
    let (mut leans, mut left) = (Vec::new(), Vec::new());
    for (seed, trend) in [(1, 35.0), (2, -15.0), (3, 35.0)] {
        let truth = Axis::from_deg(trend);
        let bedforms = Bedforms {
            trend: truth,
            spacing: 10.0,
            height: 0.5,
            spread_deg: 10.0,
            defects: 0.1,
            lee_clockwise: true,
        };
        let mut patch =
            Lit::new(&speckled_bedforms(256, bedforms, light, 0.6, seed), ImageKind::Radar, light);
        patch.sheet.settings.recovery.repeats = 4;
        let measured = patch.measure().trend.axis.expect("a trend");
        let corrected = patch.recover().corrected.expect("a trend").axis;
        let (lean, rest) = (measured.turn_from(truth), corrected.turn_from(truth));
        println!(
            "trend {:.0}°: measured off by {lean:+.2}°, corrected {rest:+.2}°, want within 3°",
            truth.deg()
        );
        leans.push(lean.abs());
        left.push(rest.abs());
    }
    assert!(leans.iter().sum::<f64>() / 3.0 > 3.0, "no bias to correct: {leans:?}");
    assert!(left.iter().all(|off| *off <= 3.0), "{left:?}");
}

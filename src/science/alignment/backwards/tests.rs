//! The map against truth, symmetry, and what it must not claim.

use super::predictions::{DIVERGENCES, RATIOS};
use super::*;
use crate::ground::{Axis, Azimuth, Work};
use crate::science::alignment::gross_normal::{gross_normal, two_wind_obliquity, two_wind_ratio};

fn settings() -> BackwardsSettings {
    BackwardsSettings { flux_up: vec![0.0, 1.6, 2.0], model_error_deg: 5.0, tail_share: 0.05, wind: None }
}

fn seen(deg: f64, cover: Cover) -> Observed {
    Observed { axis: Axis::from_deg(deg), kappa: 400.0, cover, sense: None }
}

fn run(observed: &[Observed], settings: &BackwardsSettings) -> Regimes {
    backwards(observed, settings, &Work::quiet()).expect("not stopped")
}

#[test]
fn one_trend_with_a_free_wind_leaves_the_map_exactly_at_its_prior() {
    let even = 1.0 / (DIVERGENCES * RATIOS) as f64;
    for cover in Cover::ALL {
        for deg in [0.0, 33.3, 127.0] {
            let found = run(&[seen(deg, cover)], &settings());
            for share in &found.map {
                crate::assert_close!(*share, even, 1e-13, "{cover:?}, {deg}");
            }
            crate::assert_close!(found.ln_bayes_factor, 0.0, 1e-9, "no evidence either way");
            assert!(found.map_bits < 1e-9 && found.cautions.iter().any(|c| c.code == "regimes-untold"));
            for (class, prior) in found.classes.into_iter().zip(found.class_priors) {
                crate::assert_close!(class, prior, 2e-3, "classes stay");
            }
            // An axis cannot tell a drift from its opposite.
            for k in 0..180 {
                crate::assert_close!(found.resultant[k], found.resultant[k + 180], 1e-12, "sense");
            }
        }
    }
}

/// E06: an independent grid gave 0.03686, 0.28583, 0.67731.
#[test]
fn class_areas_of_the_map() {
    for (got, want) in class_areas().into_iter().zip([0.03686, 0.28583, 0.67731]) {
        crate::assert_close!(got, want, 2e-4, "area");
    }
}

#[test]
fn obliquity_and_its_inverse_round_trip_over_the_whole_map() {
    for i in 0..900 {
        let divergence = 90.05 + 0.1 * f64::from(i);
        for j in 1..=100 {
            let n = 10f64.powf(0.01 * f64::from(j));
            let phi = two_wind_obliquity(n, divergence);
            crate::assert_close!(two_wind_ratio(phi, divergence) / n, 1.0, 1e-9, "N {n}, γ {divergence}");
        }
    }
    for phi in [15.0, 30.0, 45.0, 75.0] {
        let curve = obliquity_curve(phi);
        assert!(curve.len() > 20, "{phi}: {}", curve.len());
        for [divergence, log_ratio] in curve.into_iter().filter(|p| p[0] > 90.0 && p[0] < 180.0) {
            let found = implied(Azimuth::from_deg(70.0), divergence, 10f64.powf(log_ratio), 0.0);
            crate::assert_close!(found.obliquity_deg, phi, 1e-9, "closed");
            let (toward, _) = found.resultant.expect("a drift");
            let searched = gross_normal(&found.flows).expect("a trend").axis.separation(toward.axis());
            crate::assert_close!(searched, phi, 1e-6, "searched at γ {divergence}");
        }
    }
}

/// The trends a true regime makes, measured without error.
fn made_by(divergence: f64, ratio: f64, dominant: f64) -> [Observed; 2] {
    let truth = implied(Azimuth::from_deg(dominant), divergence, ratio, 1.6);
    let finger = truth.finger.expect("a finger");
    [seen(truth.bed[0].deg(), Cover::Full), Observed { axis: finger.axis(), ..seen(0.0, Cover::Starved) }]
}

#[test]
fn two_populations_on_different_cover_tell_and_the_truth_lies_inside() {
    for (divergence, ratio, dominant) in [(120.0, 2.0, 40.0), (150.0, 1.3, 275.0), (60.0, 3.0, 10.0)] {
        let found = run(&made_by(divergence, ratio, dominant), &settings());
        assert!(found.map_bits > 0.3, "γ {divergence}: {} bits", found.map_bits);
        let cell = (divergence / 180.0 * DIVERGENCES as f64) as usize;
        let row = (ratio.log10() * RATIOS as f64) as usize;
        let share = found.map[row * DIVERGENCES + cell];
        assert!(share >= found.level(0.95), "γ {divergence}, N {ratio}: {share} < {}", found.level(0.95));
        // Averaged over the degree of the table, a perfect fit falls a little short of its peak.
        assert!(found.ln_fit > -0.1, "{}", found.ln_fit);
        assert!(!found.cautions.iter().any(|c| c.code == "no-regime-fits"));
        let lie = likeliest_lie(&made_by(divergence, ratio, dominant), &settings(), divergence, ratio, 1.6);
        let off = lie.dominant.axis().separation(Axis::from_deg(dominant));
        assert!(off < 2.0 && lie.clockwise, "{lie:?}");
        crate::assert_close!(found.map.iter().sum::<f64>(), 1.0, 1e-9, "map");
        crate::assert_close!(found.resultant.iter().sum::<f64>(), 1.0, 1e-9, "resultant");
    }
}

#[test]
fn a_sense_picks_one_drift_of_two() {
    let [bed, mut finger] = made_by(120.0, 2.0, 40.0);
    let truth = implied(Azimuth::from_deg(40.0), 120.0, 2.0, 1.6);
    let (drift, _) = truth.resultant.expect("a drift");
    let half = |r: &Regimes| -> f64 {
        let near = |k: &usize| Azimuth::from_deg(*k as f64).turn_from(drift).abs() < 90.0;
        (0..360).filter(near).map(|k| r.resultant[k]).sum()
    };
    crate::assert_close!(half(&run(&[bed, finger], &settings())), 0.5, 0.01, "without");
    let toward = truth.finger.expect("a finger");
    finger.sense = Some(Sense { toward, evidence: SenseKind::Tapering, chance_right: 0.95, forks: None });
    assert!(half(&run(&[bed, finger], &settings())) > 0.85);
    finger.sense = Some(Sense { toward, evidence: SenseKind::Tapering, chance_right: 0.5, forks: None });
    crate::assert_close!(half(&run(&[bed, finger], &settings())), 0.5, 0.01, "a toss tells nothing");
}

#[test]
fn turning_everything_by_whole_degrees_turns_the_drift_and_leaves_the_map() {
    let turned = |by: f64| {
        let mut all = made_by(120.0, 2.0, 40.0);
        for o in &mut all {
            o.axis = o.axis.rotated(by);
        }
        let wind = Some(WindPrior { toward: Azimuth::from_deg(30.0 + by), sd_deg: 40.0 });
        run(&all, &BackwardsSettings { wind, ..settings() })
    };
    let (a, b) = (turned(0.0), turned(77.0));
    for (p, q) in a.map.iter().zip(&b.map) {
        crate::assert_close!(*p, *q, 1e-12, "map");
    }
    for k in 0..360 {
        crate::assert_close!(a.resultant[k], b.resultant[(k + 77) % 360], 1e-12, "drift at {k}");
    }
    assert!(a.map_bits > 0.5, "{}", a.map_bits);
}

#[test]
fn trends_no_regime_makes_are_said_so() {
    // Full cover under one regime has one trend, so two at right angles contradict each other.
    let found = run(&[seen(10.0, Cover::Full), seen(100.0, Cover::Full)], &settings());
    assert!(found.cautions.iter().any(|c| c.code == "no-regime-fits"), "{:?}", found.cautions);
}

/// C11: 14 of 17, scipy binomtest: 0.0127.
#[test]
fn forks_against_chance() {
    crate::assert_close!(fork_p(14, 3), 0.012_726, 1e-6, "14 of 17");
    crate::assert_close!(fork_p(3, 14), 0.012_726, 1e-6, "3 of 17");
    assert_eq!((fork_p(0, 0), fork_p(4, 4)), (1.0, 1.0));
}

#[test]
fn arcs_hold_the_mass_and_cross_north() {
    let mut chances = vec![0.0; 360];
    for k in [358, 359, 0, 1, 178, 179] {
        chances[k] = 1.0 / 6.0;
    }
    let found = arcs(&chances, 0.95);
    assert_eq!(found.len(), 2);
    assert!(found.contains(&Arc { from_deg: 357.5, span_deg: 4.0 }), "{found:?}");
    assert_eq!(arcs(&[1.0 / 360.0; 360], 0.95), [Arc { from_deg: 0.0, span_deg: 360.0 }]);
}

#[test]
fn stop_is_heard() {
    let work = Work::quiet();
    work.stop();
    assert!(backwards(&[seen(0.0, Cover::Full)], &settings(), &work).is_err());
}

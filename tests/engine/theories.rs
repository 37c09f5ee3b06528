//! The three rules of alignment against brute force on random regimes, their limits and symmetries.

mod brute;

use brute::Brute;
use rand::Rng as _;
use rand_chacha::ChaCha8Rng;
use rayon::prelude::*;
use ventifact::ground::{Axis, Azimuth, SandFlow, Seed};
use ventifact::science::alignment::bed_instability::{bed_instability, growth};
use ventifact::science::alignment::discriminator::growth_discriminator;
use ventifact::science::alignment::fingering::{crest_transport, fingering};
use ventifact::science::alignment::gross_normal::gross_normal;
use ventifact::science::alignment::migration::migration;
use ventifact::science::alignment::resultant::resultant;

const REGIMES: u64 = 10_000;

/// A regime of 1 to 40 winds: in turn scattered, rounded to 10° (so that winds share azimuths and
/// balances fall on them), and rounded to the eight points with whole weights (so that trends tie).
fn regime(rng: &mut ChaCha8Rng, index: u64) -> (Vec<SandFlow>, f64) {
    let winds = rng.random_range(1..=40);
    let step = [0.0, 10.0, 45.0][index as usize % 3];
    let flows = (0..winds)
        .map(|_| {
            let deg: f64 = rng.random_range(0.0..360.0);
            let deg = if step > 0.0 { (deg / step).round() * step } else { deg };
            let weight = if step > 40.0 {
                f64::from(rng.random_range(1..4))
            } else {
                10f64.powf(rng.random_range(-2.0..1.0))
            };
            SandFlow { toward: Azimuth::from_deg(deg), weight }
        })
        .collect();
    (flows, if index.is_multiple_of(5) { 0.0 } else { rng.random_range(0.1..3.0) })
}

/// What is left of agreement: greatest separations of trends and fingers, in degrees, and how many
/// regimes tie or have several fingers.
#[derive(Clone, Copy, Debug, Default)]
struct Worst {
    gross: f64,
    bed: f64,
    finger: f64,
    tied: usize,
    several: usize,
}

impl Worst {
    fn with(self, o: Self) -> Self {
        Self {
            gross: self.gross.max(o.gross),
            bed: self.bed.max(o.bed),
            finger: self.finger.max(o.finger),
            tied: self.tied + o.tied,
            several: self.several + o.several,
        }
    }
}

/// The greatest separation between members of two sets of trends, each member with the nearest of
/// the other: 90 when one set is empty and the other is not.
fn apart(a: &[Axis], b: &[Axis]) -> f64 {
    let one_way = |a: &[Axis], b: &[Axis]| {
        let nearest = |x: &Axis| b.iter().map(|y| x.separation(*y)).fold(90.0, f64::min);
        a.iter().map(nearest).fold(0.0, f64::max)
    };
    one_way(a, b).max(one_way(b, a))
}

fn compare(flows: &[SandFlow], flux_up: f64) -> Worst {
    let total: f64 = flows.iter().map(|f| f.weight).sum();
    let gross = gross_normal(flows).expect("flow");
    let bed = bed_instability(flows, flux_up).expect("flow");
    let fingers = fingering(flows, flux_up);

    let (want, greatest) = Brute::new(flows, 0.0).fastest(1e-9);
    let got: Vec<Axis> = std::iter::once(gross.axis).chain(gross.ties).collect();
    assert!((gross.greatest / greatest - 1.0).abs() < 1e-9, "T {} or {greatest}", gross.greatest);
    let tied = got.len() > 1;
    let gross = apart(&got, &want);

    let brute = Brute::new(flows, flux_up);
    let (want, greatest) = brute.fastest(1e-9);
    assert!((bed.growth / greatest - 1.0).abs() < 1e-9, "σ {} or {greatest}", bed.growth);
    let got: Vec<Axis> = std::iter::once(bed.axis).chain(bed.ties).collect();
    let tied = tied || got.len() > 1;
    let bed = apart(&got, &want);

    // Balances that leave next to nothing along the crest are no fingers; the two searches may differ
    // on which side of the limit such a one falls.
    let faint = |a: &Azimuth| brute.along(a.rad()) < 1e-8 * total;
    let want: Vec<Azimuth> = brute.fingers().into_iter().filter(|a| !faint(a)).collect();
    let got: Vec<Azimuth> = fingers.iter().map(|f| f.toward).filter(|a| !faint(a)).collect();
    assert_eq!(got.len(), want.len(), "{flows:?}, Γ {flux_up}: fingers {got:?}, by brute force {want:?}");
    let nearest = |x: &Azimuth| want.iter().map(|y| x.turn_from(*y).abs()).fold(180.0, f64::min);
    let finger = got.iter().map(nearest).fold(0.0, f64::max);
    assert!(fingers.windows(2).all(|w| w[0].along >= w[1].along), "strongest first");
    Worst { gross, bed, finger, tied: usize::from(tied), several: usize::from(got.len() > 1) }
}

#[test]
fn all_three_equal_brute_force_on_ten_thousand_regimes() {
    let worst = (0..REGIMES)
        .into_par_iter()
        .map(|index| {
            let (flows, flux_up) = regime(&mut Seed(3).stream("theories", index), index);
            compare(&flows, flux_up)
        })
        .reduce(Worst::default, Worst::with);
    println!("{REGIMES} regimes: {worst:?}");
    assert!(worst.gross < 1e-3 && worst.bed < 1e-3 && worst.finger < 1e-3, "{worst:?}");
    assert!(worst.tied > 50 && worst.several > 100, "the regimes do not try ties: {worst:?}");
}

/// Runs `check` on a thousand regimes.
fn on_regimes(label: &str, mut check: impl FnMut(&[SandFlow], f64, &mut ChaCha8Rng)) {
    for index in 0..1000 {
        let mut rng = Seed(4).stream(label, index);
        let (flows, flux_up) = regime(&mut rng, 3 * index);
        check(&flows, flux_up, &mut rng);
    }
}

fn turned(flows: &[SandFlow], by: f64) -> Vec<SandFlow> {
    flows.iter().map(|f| SandFlow { toward: f.toward.rotated(by), ..*f }).collect()
}

#[test]
fn turning_all_winds_turns_all_answers() {
    on_regimes("turning", |flows, flux_up, rng| {
        let by = rng.random_range(0.0..360.0);
        let moved = turned(flows, by);
        let back = |a: Axis| a.rotated(-by);
        let (p, q) = (gross_normal(flows).expect("flow"), gross_normal(&moved).expect("flow"));
        assert!(back(q.axis).separation(p.axis) < 1e-6, "gross transport, {flows:?}");
        let (p, q) =
            (bed_instability(flows, flux_up).expect("flow"), bed_instability(&moved, flux_up).expect("flow"));
        assert!(back(q.axis).separation(p.axis) < 1e-6, "bed instability, {flows:?}");
        let (p, q) = (fingering(flows, flux_up), fingering(&moved, flux_up));
        assert_eq!(p.len(), q.len(), "fingers of {flows:?}");
        for (a, b) in p.iter().zip(&q) {
            assert!(b.toward.rotated(-by).turn_from(a.toward).abs() < 1e-6, "fingers of {flows:?}");
        }
        let (p, q) = (migration(flows, flux_up), migration(&moved, flux_up));
        assert!((p[0].share - q[0].share).abs() < 1e-6, "migration, {flows:?}");
        if let (Some(a), Some(b)) = (p[0].toward, q[0].toward) {
            assert!(b.rotated(-by).turn_from(a).abs() < 1e-6, "slip face, {flows:?}");
        }
    });
}

#[test]
fn without_flux_up_the_rules_are_gross_transport_and_the_resultant() {
    on_regimes("nil", |flows, _, _| {
        let gross = gross_normal(flows).expect("flow").axis;
        assert!(bed_instability(flows, 0.0).expect("flow").axis.separation(gross) < 1e-6, "{flows:?}");
        let fingers = fingering(flows, 0.0);
        let Some((toward, _)) = resultant(flows) else { return };
        assert_eq!(fingers.len(), 1, "{flows:?}");
        assert!(fingers[0].toward.turn_from(toward).abs() < 1e-6, "{flows:?}");
        let (near, far) = (bed_instability(flows, 1e-9).expect("flow"), fingering(flows, 1e-9));
        assert!((near.growth / growth(flows, 0.0, gross) - 1.0).abs() < 1e-8, "{flows:?}");
        assert!(far[0].toward.turn_from(toward).abs() < 1e-3, "{flows:?}");
    });
}

#[test]
fn with_endless_flux_up_the_bed_lies_across_the_mean_axis_of_the_winds() {
    on_regimes("endless", |flows, _, _| {
        let (c, s) = flows.iter().fold((0.0, 0.0), |(c, s), f| {
            let doubled = f.toward.axis().doubled();
            (c + f.weight * doubled.cos(), s + f.weight * doubled.sin())
        });
        let total: f64 = flows.iter().map(|f| f.weight).sum();
        // Where the winds hardly prefer an axis the limit is approached slowly.
        if f64::hypot(c, s) < 1e-2 * total {
            return;
        }
        let across = Axis::from_doubled(s.atan2(c)).perpendicular();
        let got = bed_instability(flows, 1e8).expect("flow").axis;
        assert!(got.separation(across) < 1e-3, "{} or {}, {flows:?}", got.deg(), across.deg());
        for finger in fingering(flows, 1e8) {
            let (left, right): (f64, f64) = flows.iter().fold((0.0, 0.0), |(l, r), f| {
                let s = (f.toward.rad() - finger.toward.rad()).sin();
                if s < 0.0 { (l + f.weight * s * s, r) } else { (l, r + f.weight * s * s) }
            });
            assert!((left - right).abs() < 1e-6 * total, "squares balance: {left}, {right}");
        }
    });
}

#[test]
fn ties_and_several_fingers_are_all_given() {
    let two = |n: f64, deg: f64| {
        vec![
            SandFlow { toward: Azimuth::from_deg(0.0), weight: n },
            SandFlow { toward: Azimuth::from_deg(deg), weight: 1.0 },
        ]
    };
    assert_eq!(gross_normal(&two(3.0, 90.0)).expect("flow").ties.len(), 1);
    assert_eq!(bed_instability(&two(1.0, 90.0), 1.6).expect("flow").ties.len(), 1);
    assert_eq!(migration(&two(1.0, 90.0), 1.6).len(), 2);
    let three: Vec<SandFlow> =
        [0.0, 120.0, 240.0].map(|d| SandFlow { toward: Azimuth::from_deg(d), weight: 1.0 }).into();
    let fingers = fingering(&three, 1.6);
    assert_eq!(fingers.len(), 3, "{fingers:?}");
    for finger in fingers {
        let (across, along) = crest_transport(&three, 1.6, finger.toward);
        assert!(across.abs() < 1e-9 && along > 0.0);
    }
    assert_eq!(bed_instability(&three, 1.6).expect("flow").ties.len(), 2);
}

#[test]
fn the_discriminator_is_a_share_and_does_not_turn() {
    on_regimes("discriminator", |flows, flux_up, rng| {
        let Some(share) = growth_discriminator(flows, flux_up) else { return };
        assert!((0.0..=1.0).contains(&share));
        let again = growth_discriminator(&turned(flows, rng.random_range(0.0..360.0)), flux_up);
        assert!((again.expect("a ratio") - share).abs() < 1e-6, "{flows:?}");
    });
}

//! Properties of injection and recovery: what turning everything, adding threads, running again and stopping do.

#[path = "../bench/lit.rs"]
mod lit;

use std::time::{Duration, Instant};

use lit::{Lit, speckled_bedforms};
use ventifact::assert_close;
use ventifact::ground::{Axis, Azimuth, Grid, Work};
use ventifact::science::scene::inject::Bedforms;
use ventifact::study::run::{Memo, run_recovery};
use ventifact::study::{Id, ImageKind, RecoveryFinding, Sources};

const BEDFORMS: fn() -> Bedforms = || Bedforms {
    trend: Axis::from_deg(60.0),
    spacing: 9.0,
    height: 0.45,
    spread_deg: 10.0,
    defects: 0.1,
    lee_clockwise: true,
};

fn lit(picture: &Grid<f32>, from: f64) -> Lit {
    let mut lit = Lit::new(picture, ImageKind::Radar, Azimuth::from_deg(from));
    lit.sheet.settings.recovery.trends = 12;
    lit.sheet.settings.recovery.repeats = 2;
    lit
}

fn picture() -> Grid<f32> {
    speckled_bedforms(128, BEDFORMS(), Azimuth::from_deg(20.0), 0.5, 4)
}

#[test]
fn a_quarter_turn_of_ground_and_light_turns_everything() {
    let picture = picture();
    let height = picture.height();
    // Clockwise, so that azimuths grow by 90°.
    let turned = Grid::from_fn(height, picture.width(), |col, row| picture.at(row, height - 1 - col));
    let refit = |lit: &Lit| lit.measure().pattern.light.and_then(|light| light.refit).expect("a trend").axis;
    let (before, after) = (lit(&picture, 20.0), lit(&turned, 110.0));
    assert!(refit(&after).separation(refit(&before).rotated(90.0)) < 0.5, "refit against the light");
    let (a, b) = (before.recover(), after.recover());
    assert_close!(b.tone_per_slope / a.tone_per_slope, 1.0, 5e-3, "strength");
    assert_close!(b.uniform_resultant, a.uniform_resultant, 0.05, "resultant");
    for trend in &a.trends {
        let other = b
            .trends
            .iter()
            .find(|t| t.trend.separation(trend.trend.rotated(90.0)) < 1e-6)
            .expect("the turned trend");
        assert_close!(other.share, trend.share, 0.08, "share at {}", trend.trend.deg());
        assert!(other.found.abs_diff(trend.found) <= 2, "{trend:?} {other:?}");
        if let (Some(x), Some(y)) = (trend.bias_deg, other.bias_deg) {
            assert_close!(x, y, 1.0, "bias at {}", trend.trend.deg());
        }
    }
    let turn = |r: &RecoveryFinding| r.corrected.expect("a trend").axis;
    assert!(turn(&b).separation(turn(&a).rotated(90.0)) < 0.5, "{:?} {:?}", turn(&a), turn(&b));
}

#[test]
fn threads_and_another_run_change_no_bit_and_another_seed_does() {
    let lit = lit(&picture(), 20.0);
    let with = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a pool");
        pool.install(|| lit.recover())
    };
    let one = with(1);
    assert_eq!(one, with(3));
    assert_eq!(one, lit.recover());
    let mut other = lit;
    other.sheet.seed = ventifact::ground::Seed(77);
    assert_ne!(one.trends, other.recover().trends);
}

#[test]
fn a_stop_is_heard_within_a_tenth_of_a_second() {
    let mut lit = lit(&picture(), 20.0);
    lit.sheet.settings.recovery.repeats = 50;
    let sources = Sources::open(&lit.sheet);
    let work = Work::quiet();
    let stopper = work.clone();
    let (sheet, memo) = (&lit.sheet, Memo::default());
    let (ended, asked) = std::thread::scope(|scope| {
        let job = scope.spawn(|| {
            let stopped = run_recovery(sheet, &sources, Id(2), &[], &memo, &work).is_err();
            (stopped, Instant::now())
        });
        while !(stopper.progress().phase == "injection" && stopper.progress().done > 2) {
            std::thread::sleep(Duration::from_millis(2));
        }
        let asked = Instant::now();
        stopper.stop();
        (job.join().expect("no panic"), asked)
    });
    assert!(ended.0, "ran to its end");
    let waited = ended.1.duration_since(asked);
    println!("stopped after {waited:?}");
    assert!(waited < Duration::from_millis(400), "{waited:?}");
}

#[test]
fn ground_too_small_or_without_pixels_is_named_and_not_measured() {
    let one = lit(&Grid::filled(1, 1, 1.0f32), 20.0);
    let sources = Sources::open(&one.sheet);
    let found = run_recovery(&one.sheet, &sources, Id(2), &[], &Memo::default(), &Work::quiet());
    let found = found.expect("not stopped").expect("a finding");
    assert_eq!(found.missed, [[0.0, 180.0]]);
    let mut fine = lit(&picture(), 20.0);
    fine.sheet.settings.recovery.spacing = Some(2.0);
    let sources = Sources::open(&fine.sheet);
    let why = run_recovery(&fine.sheet, &sources, Id(2), &[], &Memo::default(), &Work::quiet());
    assert!(why.expect("not stopped").expect_err("too fine").contains("finer"));
}

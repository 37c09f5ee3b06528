//! What can be trusted of crest lines: their confidence against known truth, and the choice of a model.

use ventifact::ground::{Grid, Point, Polygon, Seed, Work};
use ventifact::science::crest::{CrestModel, CrestSettings, Crests, detect};
use ventifact::science::scene::{CrestScene, CrestShading, CrestTruth, speckle, speckled};

/// Each line's confidence, length and share of length within two scales of a true crest.
fn judged(truth: &CrestTruth, crests: &Crests) -> Vec<(f64, f64, f64)> {
    let within = 2.0 * crests.scales_px[0];
    let judge = |points: &[Point]| {
        let (mut near, mut all) = (0.0, 0.0);
        for w in points.windows(2) {
            let d = w[0].distance(w[1]);
            let count = d.ceil().max(1.0) as usize;
            for k in 0..count {
                let t = (k as f64 + 0.5) / count as f64;
                let p = Point::new(w[0].x + t * (w[1].x - w[0].x), w[0].y + t * (w[1].y - w[0].y));
                let off = truth
                    .lines
                    .iter()
                    .filter_map(|l| l.nearest(p))
                    .fold(f64::INFINITY, |m, n| m.min(n.distance));
                all += d / count as f64;
                near += if off <= within { d / count as f64 } else { 0.0 };
            }
        }
        (all, near / f64::max(all, 1e-9))
    };
    let line = |l: &ventifact::science::crest::CrestLine| {
        let (length, share) = judge(&l.line.0);
        (l.confidence, length, share)
    };
    crests.lines.iter().map(line).collect()
}

/// Under 1, 4 and 16 looks, crests strong and faint: of lines said 0.9 and surer at least 85 % are true (half of
/// their length lies on a crest), and most true lines are said so where crests stand clear of speckle.
#[test]
fn lines_said_sure_are_true() {
    let mut table = [[0usize; 2]; 4];
    for shading in [CrestShading::Ridge { width: 4.0 }, CrestShading::SlipFace { blur: 1.5 }] {
        for looks in [1.0, 4.0, 16.0] {
            for contrast in [0.15, 0.3, 0.6] {
                let scene = CrestScene {
                    width: 400,
                    height: 400,
                    spacing: 32.0,
                    swing: 6.0,
                    wavelength: 300.0,
                    ending_every: 3,
                    forking_every: 4,
                    shading,
                    ground: 1.0,
                    contrast,
                };
                let truth = scene.truth();
                let stream = (100.0 * contrast) as u64 * 100 + looks as u64;
                let noise = speckle(400, 400, looks, &mut Seed(21).stream("crest.trust", stream));
                let image = speckled(&scene.draw(&truth), &noise);
                let settings = CrestSettings {
                    logarithm: true,
                    spacing_px: Some(scene.spacing),
                    ..CrestSettings::default()
                };
                let patch = Polygon::rectangle(400.0, 400.0);
                let crests = detect(&image, &patch, &settings, &Work::quiet()).unwrap();
                let lines = judged(&truth, &crests);
                let count = |least: f64, most: f64| {
                    let of: Vec<_> = lines.iter().filter(|l| l.0 >= least && l.0 < most).collect();
                    [of.len(), of.iter().filter(|l| l.2 >= 0.5).count()]
                };
                let bins = [count(0.0, 0.5), count(0.5, 0.8), count(0.8, 0.9), count(0.9, 1.1)];
                println!(
                    "{shading:?} {looks} looks, contrast {contrast}: {} σ {:.1} strong/floor {:.2}: lines, true by confidence < .5, .8, .9, above {bins:?}",
                    crests.model.name(),
                    crests.scales_px[0],
                    crests.strong / crests.floor
                );
                for (all, bin) in table.iter_mut().zip(bins) {
                    *all = [all[0] + bin[0], all[1] + bin[1]];
                }
                if looks == 16.0 && contrast == 0.6 {
                    let [sure, _] = bins[3];
                    assert!(2 * sure > lines.len(), "{sure} of {} sure on a clear picture", lines.len());
                }
            }
        }
    }
    println!("lines, true by confidence < .5, .5–.8, .8–.9, ≥ .9: {table:?}");
    let [sure, right] = table[3];
    assert!(sure >= 50, "{sure} lines said sure");
    assert!(right as f64 >= 0.85 * sure as f64, "{right} of {sure} are true");
    // It tells lines apart: the least sure are true less often.
    let [doubted, right] = table[0];
    assert!(
        doubted == 0 || (right as f64) < 0.95 * doubted as f64,
        "{right} of {doubted} doubted ones are true"
    );
}

/// A wave of no clear side is traced as bright ridges whatever its trend, phase and noise, and nothing is said to
/// stand out.
#[test]
fn a_wave_of_no_clear_side_is_always_bright_ridges() {
    for case in 0..12u64 {
        let mut random = Seed(8).stream("crest.wave", case);
        let angle = (17.0 * case as f64).to_radians();
        let (s, c) = angle.sin_cos();
        let noise = speckle(160, 160, 30.0, &mut random);
        let image = Grid::from_fn(160, 160, |col, row| {
            let phase = std::f64::consts::TAU * (col as f64 * c + row as f64 * s) / 20.0 + case as f64;
            (10.0 + 2.0 * phase.sin()) as f32 + noise.at(col, row)
        });
        for spacing_px in [Some(20.0), None] {
            let settings = CrestSettings { spacing_px, ..CrestSettings::default() };
            let crests =
                detect(&image, &Polygon::rectangle(160.0, 160.0), &settings, &Work::quiet()).unwrap();
            assert_eq!(crests.model, CrestModel::BrightRidge, "case {case}: {:?}", crests.fits);
            assert!(!crests.clear, "case {case}: {:?}", crests.fits);
            assert!(!crests.lines.is_empty());
        }
    }
}

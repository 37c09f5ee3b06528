//! Crest lines against closed forms and against fields whose crests are known.

use std::f64::consts::{FRAC_PI_2, PI};

use ventifact::assert_close;
use ventifact::ground::{Azimuth, Grid, LocalFrame, Point, Polygon, Polyline, Seed, Work};
use ventifact::science::crest::{
    CrestLine, CrestModel, CrestOrigin, CrestSettings, Crests, End, Junction, SpacingSettings, binomial_p,
    crossings, defects, detect, forks, numbers, spacing,
};
use ventifact::science::scene::{CrestScene, CrestShading, CrestTruth, speckle, speckled};

/// North up, one unit a pixel.
const PLAIN: LocalFrame =
    LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };

fn line(points: &[(f64, f64)], ends: [End; 2]) -> CrestLine {
    CrestLine {
        line: Polyline(points.iter().map(|(x, y)| Point::new(*x, *y)).collect()),
        confidence: 1.0,
        ends,
        bridged_px: 0.0,
        model: CrestModel::BrightRidge,
        origin: CrestOrigin::Traced,
        accepted: false,
        by_hand_px: 0.0,
    }
}

/// A bar of height h and half-width w has |r″| = (6√3/√(2π)) e^(−3/2) h/w² = 0.92508 h/w² at σ = w/√3
/// (SCIENCE C8), and its crest where the bar's middle is, to a hundredth of a pixel.
#[test]
fn a_bar_answers_as_the_closed_form_says() {
    let (w, h) = (6.0, 10.0);
    for middle in [60.0, 60.25, 60.5] {
        // Each pixel holds the mean of the bar over it.
        let cover = |col: usize| {
            let (from, to) = (col as f64, col as f64 + 1.0);
            (to.min(middle + w) - from.max(middle - w)).clamp(0.0, 1.0)
        };
        let image = Grid::from_fn(120, 40, |col, _| (h * cover(col)) as f32);
        let sigma = w / 3f64.sqrt();
        let (points, _) = crossings(&image, &[true; 4800], false, sigma, &Work::quiet()).unwrap();
        let crest: Vec<_> =
            points.iter().filter(|p| p.row == 20 && p.bright && (p.at.x - middle).abs() < w).collect();
        // A crest on the edge of two pixels may belong to both.
        assert!((1..=2).contains(&crest.len()), "{crest:?}");
        let want = 6.0 * 3f64.sqrt() / (2.0 * PI).sqrt() * (-1.5f64).exp() * h / (w * w);
        assert_close!(want, 0.92508 * h / (w * w), 1e-5, "the closed form");
        for point in crest {
            assert_close!(point.strength, want, 0.02 * want, "|r″| of the bar");
            assert_close!(point.at.x, middle, 0.01, "middle of the bar");
        }
    }
}

/// A step of height h blurred by σ has slope h/(√(2π) σ) where it is.
#[test]
fn a_step_answers_as_the_closed_form_says() {
    let (h, sigma, at) = (10.0, 3.0, 50.3);
    let image = Grid::from_fn(100, 40, |col, _| (h * (at - col as f64).clamp(0.0, 1.0)) as f32);
    let (points, moments) = crossings(&image, &[true; 4000], true, sigma, &Work::quiet()).unwrap();
    let crest: Vec<_> = points.iter().filter(|p| p.row == 20 && p.strength > 0.1).collect();
    assert_eq!(crest.len(), 1, "{crest:?}");
    assert_close!(crest[0].strength, h / ((2.0 * PI).sqrt() * sigma), 0.02, "slope");
    assert_close!(crest[0].at.x, at, 0.05, "place");
    assert_close!(moments.slip_sense().0.abs(), PI, 0.02, "bright to the left");
}

/// Parallel crests: transects and area over length both give the spacing; random directions π/2 of it
/// (checks C08).
#[test]
fn spacing_of_parallel_crests() {
    let lines: Vec<_> = (0..10)
        .map(|i| 10.0 + 20.0 * f64::from(i))
        .map(|y| line(&[(0.0, y), (300.0, y)], [End::Border; 2]))
        .collect();
    let patch = Polygon::rectangle(300.0, 200.0);
    let settings = SpacingSettings { step: 5.0, longest: 200.0, own_beyond: 10.0 };
    let got = spacing(&lines, &patch, PLAIN, settings, &Work::quiet()).unwrap();
    assert_close!(got.quartiles[1].unwrap(), 20.0, 1e-9, "median");
    assert_close!(got.stereology.unwrap(), 20.0, 1e-9, "area over length");
    assert_close!(
        got.random_direction.unwrap() / got.stereology.unwrap(),
        std::f64::consts::FRAC_PI_2,
        1e-9,
        "π/2"
    );
    assert_eq!(got.transects.whole, 2 * 9 * 60);
    assert_eq!(got.transects.cut, 2 * 60);
}

/// Lines of random direction thrown on a plane: the mean distance between them along any direction is
/// (π/2) A/ΣL, here counted along rows.
#[test]
fn random_lines_are_met_at_half_pi_times_area_over_length() {
    use rand::Rng as _;
    let mut random = Seed(7).stream("crest.needles", 0);
    let (side, length) = (400.0, 60.0);
    let (mut lines, mut met) = (Vec::new(), 0usize);
    for _ in 0..6000 {
        let (x, y) = (random.random_range(0.0..side), random.random_range(0.0..side));
        let (s, c) = random.random_range(0.0..PI).sin_cos();
        let (dx, dy) = (0.5 * length * c, 0.5 * length * s);
        lines.push(line(&[(x - dx, y - dy), (x + dx, y + dy)], [End::Free; 2]));
        // Rows are one apart; what sticks out at one edge stands for what would stick in at the other.
        met += ((y + dy).ceil() - (y - dy).ceil()).abs() as usize;
    }
    let settings = SpacingSettings { step: length, longest: 10.0, own_beyond: 1.0 };
    let got = spacing(&lines, &Polygon::rectangle(side, side), PLAIN, settings, &Work::quiet()).unwrap();
    let counted = side * side / met as f64;
    assert_close!(counted / got.random_direction.unwrap(), 1.0, 0.02, "counted over (π/2) A/ΣL");
    assert_close!(counted / got.stereology.unwrap(), FRAC_PI_2, 0.03, "counted over A/ΣL");
}

/// Spacings of exponential law seen through a patch only one and a half of them high: counting whole ones only
/// is far too short, the censored median is not. Each column of 10 pixels has crests of its own.
#[test]
fn censoring_removes_the_bias_of_a_small_patch() {
    use rand::Rng as _;
    let mut random = Seed(11).stream("crest.censoring", 0);
    let (mean, high, columns) = (20.0, 30.0, 1500);
    let mut lines = Vec::new();
    for column in 0..columns {
        let x = 10.0 * f64::from(column);
        let mut y = 0.0;
        loop {
            y += -mean * (1.0f64 - random.random::<f64>()).ln();
            if y >= high {
                break;
            }
            lines.push(line(&[(x, y), (x + 10.0, y)], [End::Border; 2]));
        }
    }
    let settings = SpacingSettings { step: 10.0, longest: 1000.0, own_beyond: 1.0 };
    let patch = Polygon::rectangle(10.0 * f64::from(columns), high);
    let got = spacing(&lines, &patch, PLAIN, settings, &Work::quiet()).unwrap();
    let truth = mean * 2f64.ln();
    let (censored, naive) = (got.quartiles[1].unwrap(), got.uncensored_median.unwrap());
    println!("true median {truth:.2}: whole spacings only {naive:.2}, censored {censored:.2}");
    assert!(naive < 0.7 * truth, "without censoring: {naive}");
    assert_close!(censored, truth, 0.08 * truth, "with censoring");
}

/// Kaplan–Meier of the classic remission times (6-MP arm of Freireich et al. 1963, as printed in most
/// textbooks): S(6) = 0.857, S(10) = 0.753, S(23) = 0.448, median 23.
#[test]
fn kaplan_meier_of_remission_times() {
    let whole = [6.0, 6.0, 6.0, 7.0, 10.0, 13.0, 16.0, 22.0, 23.0].map(|t| (t, true));
    let cut = [6.0, 9.0, 10.0, 11.0, 17.0, 19.0, 20.0, 25.0, 32.0, 32.0, 34.0, 35.0].map(|t| (t, false));
    let s = ventifact::science::crest::kaplan_meier(&[whole.as_slice(), cut.as_slice()].concat());
    let at = |t: f64| s.steps.iter().find(|step| step.0 == t).unwrap().1;
    assert_close!(at(6.0), 0.857, 5e-4, "S(6)");
    assert_close!(at(10.0), 0.753, 5e-4, "S(10)");
    assert_close!(at(23.0), 0.448, 5e-4, "S(23)");
    assert_eq!(s.quantile(0.5), Some(23.0));
}

/// checks C09: 14 of 17.
#[test]
fn fork_polarity() {
    assert_close!(binomial_p(14, 17), 0.012_725_830_1, 1e-9, "p of 14 in 17");
    assert_close!(binomial_p(0, 0), 1.0, 0.0, "p of nothing");
    // A stem from the east that opens to the west.
    let stem = line(&[(100.0, 50.0), (50.0, 50.0), (0.0, 40.0)], [End::Free; 2]);
    let branch = line(&[(50.0, 50.0), (0.0, 60.0)], [End::Junction, End::Free]);
    let junctions = [Junction { at: Point::new(50.0, 50.0), through: 0, branches: vec![(1, 0)] }];
    let lines = [stem, branch];
    let west = forks(&lines, &junctions, PLAIN, Azimuth::from_deg(270.0), 30.0);
    assert_eq!((west.toward, west.away, west.unclear), (1, 0, 0));
    let east = forks(&lines, &junctions, PLAIN, Azimuth::from_deg(90.0), 30.0);
    assert_eq!((east.toward, east.away), (0, 1));
    let north = forks(&lines, &junctions, PLAIN, Azimuth::from_deg(0.0), 30.0);
    assert_eq!(north.unclear, 1);
}

/// Both published conventions, forks apart, ends on the border not counted.
#[test]
fn defect_densities() {
    let lines = [
        line(&[(0.0, 10.0), (60.0, 10.0)], [End::Border, End::Free]),
        line(&[(70.0, 10.0), (110.0, 10.0)], [End::Free, End::Gap]),
        line(&[(0.0, 30.0), (100.0, 30.0)], [End::Border; 2]),
        line(&[(50.0, 30.0), (50.0, 45.0)], [End::Junction, End::Free]),
    ];
    let junctions = [Junction { at: Point::new(50.0, 30.0), through: 2, branches: vec![(3, 0)] }];
    let n = numbers(&lines, &Polygon::rectangle(200.0, 50.0), PLAIN);
    assert_close!(n.total_length, 215.0, 1e-9, "length");
    assert_close!(n.density, 215.0 / 10_000.0, 1e-12, "density");
    let d = defects(&lines, &junctions, n.total_length, Some(20.0));
    assert_eq!((d.ends, d.forks, d.cut_ends), (3, 1, 4));
    assert_eq!(d.ends_per_length.unwrap(), [3.0 / 215.0, 3.0 / 430.0]);
    assert_eq!(d.with_forks_per_length.unwrap(), [4.0 / 215.0, 4.0 / 430.0]);
    assert_close!(d.dimensionless.unwrap(), 3.0 * 20.0 / 215.0, 1e-12, "N λ/ΣL");
    // Two lines are cut of four; the censored mean is above the plain one.
    assert_eq!(n.lengths.cut, 3);
}

/// Mean distance of detected crests from true ones, and how many ends and forks there are.
fn compare(truth: &CrestTruth, crests: &Crests) -> (f64, usize, usize) {
    let (mut sum, mut length) = (0.0, 0.0);
    for found in &crests.lines {
        for w in found.line.0.windows(2) {
            let d = w[0].distance(w[1]);
            let steps = d.ceil().max(1.0);
            for k in 0..steps as usize {
                let t = (k as f64 + 0.5) / steps;
                let p = Point::new(w[0].x + t * (w[1].x - w[0].x), w[0].y + t * (w[1].y - w[0].y));
                let off = truth
                    .lines
                    .iter()
                    .filter_map(|l| l.nearest(p))
                    .fold(f64::INFINITY, |m, n| m.min(n.distance));
                sum += off * d / steps;
                length += d / steps;
            }
        }
    }
    let d = defects(&crests.lines, &crests.junctions, length, None);
    (sum / length, d.ends, d.forks + d.crossings)
}

fn scene(shading: CrestShading) -> CrestScene {
    CrestScene {
        width: 600,
        height: 640,
        spacing: 32.0,
        swing: 6.0,
        wavelength: 300.0,
        ending_every: 3,
        forking_every: 0,
        shading,
        ground: 1.0,
        contrast: 0.6,
    }
}

/// Under speckle: positions within 0.3 px at 16 looks; ends and forks within 10 % and spacing within 3 % down to
/// 4. What remains at 1 is printed.
#[test]
fn known_crests_are_found_through_speckle() {
    for shading in [CrestShading::Ridge { width: 4.0 }, CrestShading::SlipFace { blur: 1.5 }] {
        for (looks, ending_every, forking_every) in
            [(16.0, 0, 0), (16.0, 3, 0), (16.0, 3, 3), (4.0, 3, 3), (1.0, 3, 3)]
        {
            let scene = CrestScene { ending_every, forking_every, ..scene(shading) };
            let truth = scene.truth();
            let noise = speckle(600, 640, looks, &mut Seed(5).stream("crest.speckle", looks as u64));
            let image = speckled(&scene.draw(&truth), &noise);
            let patch = Polygon::rectangle(600.0, 640.0);
            let settings = CrestSettings {
                logarithm: true,
                spacing_px: Some(scene.spacing),
                ..CrestSettings::default()
            };
            let crests = detect(&image, &patch, &settings, &Work::quiet()).unwrap();
            let (off, ends, forks) = compare(&truth, &crests);
            let ground = SpacingSettings { step: 4.0, longest: 200.0, own_beyond: 16.0 };
            let got = spacing(&crests.lines, &patch, PLAIN, ground, &Work::quiet()).unwrap();
            let lines: Vec<_> = truth
                .lines
                .iter()
                .map(|l| CrestLine { line: l.clone(), ..line(&[], [End::Border; 2]) })
                .collect();
            let want = spacing(&lines, &patch, PLAIN, ground, &Work::quiet()).unwrap();
            let median = |s: &ventifact::science::crest::SpacingOnGround| s.quartiles[1].unwrap_or(f64::NAN);
            println!(
                "{shading:?} {looks} looks: {} by fit {:?} σ {:?}: {} lines of {}, off {off:.3} px, ends {ends} of {}, forks {forks} of {}, spacing {:.2} of {:.2}",
                crests.model.name(),
                crests.fits[0],
                crests.scales_px,
                crests.lines.len(),
                truth.lines.len(),
                truth.ends.len(),
                truth.forks.len(),
                median(&got),
                median(&want)
            );
            if looks >= 4.0 {
                let model = match shading {
                    CrestShading::Ridge { .. } => CrestModel::BrightRidge,
                    CrestShading::SlipFace { .. } => CrestModel::SlipFace,
                };
                assert_eq!(crests.model, model);
                if looks == 16.0 {
                    assert!(off <= 0.3, "mean position error {off} px");
                }
                let near = |got: usize, want: usize| got.abs_diff(want) as f64 <= 0.1 * want as f64;
                assert!(near(ends, truth.ends.len()), "ends {ends} of {}", truth.ends.len());
                assert!(near(forks, truth.forks.len()), "forks {forks} of {}", truth.forks.len());
                assert_close!(median(&got), median(&want), 0.03 * median(&want), "spacing median");
            }
        }
    }
}

/// A quarter turn of the picture turns the lines and changes nothing else; threads change no bit; what cannot be
/// traced gives no line.
#[test]
fn turning_threads_and_degenerate_pictures() {
    let scene = CrestScene { width: 200, height: 200, ..scene(CrestShading::SlipFace { blur: 1.5 }) };
    let noise = speckle(200, 200, 16.0, &mut Seed(9).stream("crest.speckle", 0));
    let image = speckled(&scene.draw(&scene.truth()), &noise);
    let patch = Polygon::rectangle(200.0, 200.0);
    let settings = CrestSettings { scale_px: Some(2.0), ..CrestSettings::default() };
    let run = |image: &Grid<f32>, threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a thread pool");
        pool.install(|| detect(image, &patch, &settings, &Work::quiet())).unwrap()
    };
    let one = run(&image, 1);
    assert_eq!(one, run(&image, 3));
    assert!(one.lines.len() > 4, "{}", one.lines.len());
    let turned = run(&Grid::from_fn(200, 200, |col, row| image.at(row, 199 - col)), 1);
    let length = |c: &Crests| c.lines.iter().map(|l| l.line.length()).sum::<f64>();
    assert_close!(length(&turned), length(&one), 0.02 * length(&one), "length after a quarter turn");
    let off: Vec<f64> = turned
        .lines
        .iter()
        .flat_map(|l| &l.line.0)
        .map(|p| Point::new(p.y, 200.0 - p.x))
        .map(|p| {
            one.lines.iter().filter_map(|l| l.line.nearest(p)).fold(f64::INFINITY, |m, n| m.min(n.distance))
        })
        .collect();
    let near = off.iter().filter(|d| **d < 1.0).count();
    assert!(near as f64 > 0.95 * off.len() as f64, "{near} of {}", off.len());

    let work = Work::quiet();
    let none = |image: &Grid<f32>| {
        let settings = CrestSettings::default();
        detect(image, &Polygon::rectangle(64.0, 64.0), &settings, &work).unwrap().lines
    };
    assert_eq!(none(&Grid::filled(0, 0, 0.0)), vec![]);
    assert_eq!(none(&Grid::filled(1, 1, 3.0)), vec![]);
    assert_eq!(none(&Grid::filled(64, 64, 3.0)), vec![]);
    assert_eq!(none(&Grid::filled(64, 64, f32::NAN)), vec![]);
    let mut missing = Grid::from_fn(64, 64, |c, r| (c * 31 + r * 17) as f32 % 13.0);
    missing.mask_where(|_, _| false);
    assert_eq!(none(&missing), vec![]);
    work.stop();
    assert!(detect(&image, &patch, &CrestSettings::default(), &work).is_err());
}

/// No line along the edge of missing ground, and crests that reach it are cut there, not ended.
#[test]
fn missing_ground_makes_no_crest() {
    let scene = CrestScene { ending_every: 0, ..scene(CrestShading::Ridge { width: 4.0 }) };
    let mut image = scene.draw(&scene.truth());
    image.mask_where(|col, _| !(280..320).contains(&col));
    // What lies under the mask must not matter.
    for row in 0..image.height() {
        for col in 280..320 {
            let i = row * image.width() + col;
            image.values_mut()[i] = 50.0;
        }
    }
    let settings = CrestSettings { scale_px: Some(4.0), ..CrestSettings::default() };
    let crests = detect(&image, &Polygon::rectangle(600.0, 640.0), &settings, &Work::quiet()).unwrap();
    assert!(crests.lines.len() >= 30, "{}", crests.lines.len());
    for l in &crests.lines {
        let wide = l.line.0.iter().map(|p| p.x).fold(f64::INFINITY, f64::min)
            ..=l.line.0.iter().map(|p| p.x).fold(0.0, f64::max);
        assert!(wide.end() - wide.start() > 200.0, "a line along the gap: {:?}", l.line.0);
        assert!(l.ends.contains(&End::Gap) && l.ends.contains(&End::Border), "{:?}", l.ends);
    }
}

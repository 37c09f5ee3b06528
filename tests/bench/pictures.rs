//! Two pictures of one ground: how often the tests of two fields err, what they find, and how often the interval of
//! a movement holds the truth. `cargo bench --bench pictures [-- fields repeats]`.

use std::collections::BTreeMap;

use rand::Rng;
use rand_distr::{Distribution as _, StandardNormal};

use ventifact::ground::{Axis, Grid, LocalFrame, Point, Polygon, Seed, Work};
use ventifact::science::axial::two_samples::{Pair, TwoSampleSettings, compare};
use ventifact::science::axial::{AxialSample, Nodes};
use ventifact::science::crest::{CrestModel, CrestSettings, ShiftSettings, detect, shift};
use ventifact::science::scene::{CrestScene, CrestShading, speckle, speckled};

fn main() {
    let repeats = std::env::args().filter_map(|a| a.parse().ok()).next().unwrap_or(100);
    println!("Two independent fields of correlated axes, {repeats} of each: share found to differ at 5 %");
    for (side, width, mean) in
        [(48, 1.0, 3.0), (48, 2.0, 3.0), (48, 1.0, 1.0), (48, 2.0, 1.0), (32, 1.5, 2.0)]
    {
        for turn in [0.0, 10.0] {
            axes(side, width, mean, turn, repeats);
        }
    }
    println!("\nCrests of 20 px spacing moved square to themselves, 4 looks, {repeats} of each");
    for (is_ridge, down) in [(true, 0.0), (true, 0.8), (true, 3.0), (true, 6.0), (false, 2.0)] {
        crests(is_ridge, down, repeats);
    }
}

/// A periodic Gaussian field of standard deviation 1, correlated as exp(−h²/4 width²).
fn smooth(side: usize, width: f64, random: &mut impl Rng) -> Vec<f64> {
    let white: Vec<f64> = (0..side * side).map(|_| StandardNormal.sample(random)).collect();
    let reach = (4.0 * width).ceil() as i64;
    let taps: Vec<f64> = (-reach..=reach).map(|i| (-0.5 * (i as f64 / width).powi(2)).exp()).collect();
    let norm = taps.iter().map(|t| t * t).sum::<f64>().sqrt();
    let pass = |from: &[f64], dx: i64, dy: i64| -> Vec<f64> {
        let wrap = |v: i64| v.rem_euclid(side as i64) as usize;
        (0..side * side)
            .map(|i| {
                let (x, y) = ((i % side) as i64, (i / side) as i64);
                let tap = |(k, t): (usize, &f64)| {
                    let off = k as i64 - reach;
                    t * from[wrap(y + off * dy) * side + wrap(x + off * dx)]
                };
                taps.iter().enumerate().map(tap).sum::<f64>() / norm
            })
            .collect()
    };
    pass(&pass(&white, 1, 0), 0, 1)
}

fn field(side: usize, width: f64, mean: f64, turn: f64, random: &mut impl Rng) -> Vec<Axis> {
    let (u, v) = (smooth(side, width, random), smooth(side, width, random));
    u.iter().zip(&v).map(|(u, v)| Axis::from_doubled(v.atan2(mean + u)).rotated(turn)).collect()
}

fn axes(side: usize, width: f64, mean: f64, turn: f64, repeats: u64) {
    let at: Vec<Point> = (0..side * side).map(|i| Point::new((i % side) as f64, (i / side) as f64)).collect();
    let nodes = Some(Nodes { at: &at, spacing: 1.0, kernel_sigma: 1.0 });
    let pairs: Vec<Pair> = (0..side * side).map(|i| [i, i]).collect();
    let settings = TwoSampleSettings { significance: 0.05, resamples: 200, permutations: 499 };
    let mut found: BTreeMap<&str, u64> = BTreeMap::new();
    let (mut worth, mut held, mut told) = (0.0, 0, 0);
    for repeat in 0..repeats {
        let mut random = Seed(77).stream("pictures.axes", repeat);
        let axes = [0.0, turn].map(|turn| field(side, width, mean, turn, &mut random));
        let [first, second] = axes.each_ref().map(|axes| AxialSample { axes, weights: None, nodes });
        let compared =
            compare(&first, &second, &pairs, settings, Seed(repeat), &Work::quiet()).expect("nobody stops");
        worth += compared.n_eff[0] / repeats as f64;
        for test in &compared.tests {
            *found.entry(test.name).or_default() += u64::from(test.p <= 0.05);
        }
        if let Some([low, high]) = compared.difference_ci95_deg {
            told += 1;
            held += u32::from(low <= turn && turn <= high);
        }
    }
    let shares: Vec<String> =
        found.iter().map(|(name, n)| format!("{name} {:.1} %", 100.0 * *n as f64 / repeats as f64)).collect();
    println!(
        "  {side}² nodes worth {worth:.0}, turned {turn}°: interval holds it in {held} of {told}; {}",
        shares.join(", ")
    );
}

fn picture(scene: &CrestScene, down: f64, seed: u64) -> Grid<f32> {
    let mut truth = scene.truth();
    truth.lines.iter_mut().flat_map(|line| &mut line.0).for_each(|p| p.y += down);
    let noise = speckle(scene.width, scene.height, 4.0, &mut Seed(seed).stream("pictures.crests", 0));
    speckled(&scene.draw(&truth), &noise)
}

fn crests(is_ridge: bool, down: f64, repeats: u64) {
    let (shading, contrast, model) = if is_ridge {
        (CrestShading::Ridge { width: 3.0 }, 1.0, CrestModel::BrightRidge)
    } else {
        (CrestShading::SlipFace { blur: 1.5 }, 0.6, CrestModel::SlipFace)
    };
    let scene = CrestScene {
        width: 320,
        height: 320,
        spacing: 20.0,
        swing: 5.0,
        wavelength: 170.0,
        ending_every: 5,
        forking_every: 4,
        shading,
        ground: 1.0,
        contrast,
    };
    let frame = LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };
    let settings =
        CrestSettings { spacing_px: Some(20.0), logarithm: true, model: Some(model), ..Default::default() };
    let (mut held, mut told, mut bias, mut width) = (0, 0, 0.0, 0.0);
    for repeat in 0..repeats {
        let lines = [(0.0, 2 * repeat), (down, 2 * repeat + 1)].map(|(down, seed)| {
            let image = picture(&scene, down, seed);
            let outline = Polygon::rectangle(320.0, 320.0);
            detect(&image, &outline, &settings, &Work::quiet()).expect("nobody stops")
        });
        let step = 2.0 * lines[0].scales_px[0];
        let ask = ShiftSettings { spacing: 20.0, reach: 10.0, step, resamples: 500, permutations: 0 };
        let [first, second] = &lines;
        let moved = shift(&first.lines, &second.lines, frame, ask, Seed(repeat), &Work::quiet())
            .expect("nobody stops");
        let Ok(moved) = moved else { continue };
        let want = if moved.toward.deg() > 90.0 { down } else { -down };
        told += 1;
        held += u32::from(moved.ci95[0] <= want && want <= moved.ci95[1]);
        bias += (moved.median - want) * want.signum();
        width += moved.ci95[1] - moved.ci95[0];
    }
    let n = f64::from(told.max(1));
    println!(
        "  {} moved {down} px: interval holds it in {held} of {told} ({:.0} %), mean error {:+.3} px, mean width {:.3} px",
        if is_ridge { "ridges" } else { "slip faces" },
        100.0 * f64::from(held) / n,
        bias / n,
        width / n
    );
}

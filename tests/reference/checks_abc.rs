//! Entries of the list of outside numbers, sections A, B and C, that other files test only in part: at the size the
//! list gives. Sources as stated there.

use rand::Rng as _;
use rand_distr::StandardNormal;
use rayon::prelude::*;
use ventifact::assert_close;
use ventifact::ground::{Axis, Grid, LocalFrame, Place, Point, Polygon, Seed, Work};
use ventifact::science::axial::kuiper::kuiper;
use ventifact::science::axial::mean::{Resultant, doubled};
use ventifact::science::axial::watson::tail;
use ventifact::science::crest::{binomial_p, crossings};
use ventifact::science::orientation::{TensorSettings, trend_nodes};
use ventifact::science::scene::{Grating, picture};

fn frame(place: &Place) -> LocalFrame {
    place.local_frame(Point::new(0.0, 0.0)).expect("plane")
}

fn nodes(image: &Grid<f32>, rho: f64, step: f64) -> Vec<(Axis, f64)> {
    let settings = TensorSettings {
        gradient_scale_px: 1.5,
        integration_scale_px: rho,
        node_step_px: step,
        significance: 0.01,
        logarithm: false,
    };
    let whole = Polygon::rectangle(image.width() as f64, image.height() as f64);
    let field =
        trend_nodes(image, &whole, &Place::pixels(0.0), &settings, &Work::quiet()).expect("not stopped");
    field.nodes.iter().map(|n| (n.axis, n.coherence)).collect()
}

/// A05: the Kuiper statistic comes with a p below 1 and above 0; R prints V* alone.
#[test]
fn a05_kuiper_p_falls_as_v_grows() {
    let even: Vec<f64> = (0..40).map(|i| std::f64::consts::TAU * f64::from(i) / 40.0).collect();
    let heap: Vec<f64> = even.iter().map(|phi| 0.5 * phi).collect();
    let ((low, p_low), (high, p_high)) = (kuiper(&even), kuiper(&heap));
    assert!(low < 1.902_977_455 && high > 1.902_977_455, "{low} {high}");
    assert!(p_low > 0.15 && p_high < 0.01, "{p_low} {p_high}");
}

/// A25: the critical values of Watson's two-sample U² by Stephens 1970, from the whole series.
#[test]
fn a25_critical_values_bracket_their_levels() {
    for (alpha, critical) in [(0.1, 0.151_765_57), (0.05, 0.186_880_82), (0.01, 0.268_415_89)] {
        // The list keeps the leading term only: 1e-6 in U² or 2e-5 in the level, whichever is met.
        assert_close!(tail(critical), alpha, 2e-5, "level at {critical}");
        assert!(tail(critical - 1e-4) > alpha && tail(critical + 1e-4) < alpha, "{critical}");
    }
}

/// A35: the scatter of the mean axis over independent fields of e-fold 8 px, 256², axial standard deviation 15°:
/// 0.7516° by 150 runs, theory 0.8308°; the list allows 0.09°.
#[test]
fn a35_scatter_of_the_mean_axis_over_fields() {
    const N: usize = 256;
    const SIGMA: f64 = 4.0;
    let reach = (3.5 * SIGMA).ceil() as usize;
    let kernel: Vec<f64> =
        (0..=2 * reach).map(|i| (-0.5 * ((i as f64 - reach as f64) / SIGMA).powi(2)).exp()).collect();
    let norm: f64 = kernel.iter().map(|x| x * x).sum();
    let runs = 150u64;
    let means: Vec<f64> = (0..runs)
        .into_par_iter()
        .map(|run| {
            let mut random = Seed(run).stream("a35 fields", 0);
            let m = N + 2 * reach;
            let noise: Vec<f32> =
                (0..m * m).map(|_| random.sample::<f64, _>(StandardNormal) as f32).collect();
            let mut rows = vec![0.0f32; m * N];
            for (out, row) in rows.chunks_exact_mut(N).zip(noise.chunks_exact(m)) {
                for (i, w) in kernel.iter().enumerate() {
                    out.iter_mut().zip(&row[i..]).for_each(|(o, x)| *o += *w as f32 * x);
                }
            }
            let mut axes = Vec::with_capacity(N * N);
            for y in 0..N {
                let mut line = vec![0.0f64; N];
                for (i, w) in kernel.iter().enumerate() {
                    line.iter_mut()
                        .zip(&rows[(y + i) * N..])
                        .for_each(|(o, x)| *o += w * f64::from(*x) / norm);
                }
                axes.extend(line.into_iter().map(|g| Axis::from_deg(15.0 * g)));
            }
            let mean = Resultant::of(&doubled(&axes), None).axis().deg();
            if mean > 90.0 { mean - 180.0 } else { mean }
        })
        .collect();
    let scatter = (means.iter().map(|m| m * m).sum::<f64>() / runs as f64).sqrt();
    assert_close!(scatter, 0.7516, 0.09, "SD of the mean axis, 150-run simulation");
}

/// B06 at the listed size, 256².
#[test]
fn b06_crest_azimuth_signs_at_the_listed_size() {
    let place = Place::pixels(0.0);
    for deg in [0.0, 30.0, 63.0, 117.0, 170.0] {
        let grating = Grating::new(Axis::from_deg(deg), 12.0);
        let image = picture(256, 256, frame(&place), |e, n| grating.tone(e, n));
        for (axis, _) in nodes(&image, 8.0, 32.0) {
            assert_close!(axis.separation(Axis::from_deg(deg)), 0.0, 0.01, "crest at {deg}°");
        }
    }
}

/// B09 at the listed size, 2048²: measured coherence .9498 ± .002.
#[test]
fn b09_coherence_of_a_wave_in_noise_at_the_listed_size() {
    let place = Place::pixels(0.0);
    let grating = Grating::new(Axis::from_deg(30.0), 12.0);
    let mut random = Seed(17).stream("b09", 0);
    let mut image = picture(2048, 2048, frame(&place), |e, n| grating.tone(e, n));
    image.values_mut().iter_mut().for_each(|v| *v += 0.5 * random.sample::<f32, _>(StandardNormal));
    let nodes = nodes(&image, 40.0, 128.0);
    let mean = nodes.iter().map(|n| n.1).sum::<f64>() / nodes.len() as f64;
    assert_close!(mean, 0.9498, 0.002, "measured coherence");
}

/// B15: a bar of half-width 3 answers most at σ = w/√3, with w²|r″|/h = 0.925082, found here by the detector
/// over a sweep of scales on a bar eight times as fine as its pixels.
#[test]
fn b15_the_detector_answers_a_bar_most_at_its_scale() {
    let (w, height) = (24.0, 10.0f64);
    let image = Grid::from_fn(320, 24, |col, _| {
        let (from, to) = (col as f64, col as f64 + 1.0);
        (height * (to.min(160.0 + w) - from.max(160.0 - w)).clamp(0.0, 1.0)) as f32
    });
    let answer = |sigma: f64| {
        let (points, _) = crossings(&image, &vec![true; 320 * 24], false, sigma, &Work::quiet()).unwrap();
        let near = points.iter().filter(|p| p.row == 12 && p.bright && (p.at.x - 160.0).abs() < 2.0);
        near.map(|p| p.strength).fold(0.0, f64::max) * w * w / height
    };
    let scales: Vec<f64> = (0..13).map(|i| w / 3f64.sqrt() * 1.02f64.powi(i - 6)).collect();
    let best = scales.iter().copied().max_by(|a, b| answer(*a).total_cmp(&answer(*b))).expect("scales");
    assert_close!(best * 3f64.sqrt() / w, 1.0, 0.021, "σ√3/w of the greatest answer");
    // The kernel ends at a few σ and is summed to zero again: to six thousandths.
    assert_close!(answer(w / 3f64.sqrt()), 0.925_082, 6e-3, "w²|r″|/h");
}

/// C09: the two-sided sign test, and its symmetry.
#[test]
fn c09_fork_test_is_symmetric() {
    assert_close!(binomial_p(14, 17), 0.012_725_830_1, 1e-9, "14 of 17");
    assert_close!(binomial_p(3, 17), binomial_p(14, 17), 1e-12, "3 of 17");
}

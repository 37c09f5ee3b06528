//! Axial statistics of correlated fields: effective numbers, block bootstraps, and how often
//! intervals cover and tests reject, on simulated fields of known truth.

use rand_distr::StandardNormal;
use rayon::prelude::*;
use ventifact::assert_close;
use ventifact::ground::{Axis, Point, Seed, Work};
use ventifact::science::axial::blocks::tiles;
use ventifact::science::axial::effective::effective_number;
use ventifact::science::axial::known_correlation::{self, area_exponential, area_gaussian};
use ventifact::science::axial::mean::{Resultant, doubled};
use ventifact::science::axial::{AxialSample, Nodes, Summary, SummarySettings, summarise};

/// White noise smoothed by a Gaussian, unit variance: correlation exp(−r²/4σ²).
fn smooth_noise(n: usize, sigma: f64, random: &mut impl rand::Rng) -> Vec<f64> {
    let r = (3.5 * sigma).ceil() as usize;
    let kernel: Vec<f64> =
        (0..=2 * r).map(|i| (-0.5 * ((i as f64 - r as f64) / sigma).powi(2)).exp()).collect();
    let norm: f64 = kernel.iter().map(|x| x * x).sum();
    let m = n + 2 * r;
    let noise: Vec<f64> = (0..m * m).map(|_| random.sample(StandardNormal)).collect();
    let mut rows = vec![0.0; m * n];
    for (out, row) in rows.chunks_exact_mut(n).zip(noise.chunks_exact(m)) {
        for (i, w) in kernel.iter().enumerate() {
            out.iter_mut().zip(&row[i..]).for_each(|(o, x)| *o += w * x);
        }
    }
    let mut field = vec![0.0; n * n];
    for (y, out) in field.chunks_exact_mut(n).enumerate() {
        for (i, w) in kernel.iter().enumerate() {
            out.iter_mut().zip(&rows[(y + i) * n..]).for_each(|(o, x)| *o += w * x / norm);
        }
    }
    field
}

/// A field of axes about 0°: the phase of a mean plus smoothed complex noise, at every `step`-th pixel.
#[derive(Clone, Copy, Debug)]
struct Scene {
    size: usize,
    sigma: f64,
    step: usize,
    /// A share of the variance has three times the smoothing: bedforms wander.
    wander: f64,
    /// Mean over the standard deviation of a noise component.
    mean: f64,
}

impl Scene {
    fn run(self, seed: Seed) -> Summary {
        let mut random = seed.stream("scene", 0);
        let mut component = || {
            let fine = smooth_noise(self.size, self.sigma, &mut random);
            if self.wander == 0.0 {
                return fine;
            }
            let broad = smooth_noise(self.size, 3.0 * self.sigma, &mut random);
            let (a, b) = ((1.0 - self.wander).sqrt(), self.wander.sqrt());
            fine.iter().zip(&broad).map(|(f, g)| a * f + b * g).collect()
        };
        let (cos, sin): (Vec<f64>, Vec<f64>) = (component(), component());
        let picks = || (0..self.size).step_by(self.step);
        let at: Vec<Point> =
            picks().flat_map(|y| picks().map(move |x| Point::new(x as f64, y as f64))).collect();
        let axis = |p: &Point| {
            let i = p.y as usize * self.size + p.x as usize;
            Axis::from_doubled(sin[i].atan2(self.mean + cos[i]))
        };
        let axes: Vec<Axis> = at.iter().map(axis).collect();
        let nodes = Nodes { at: &at, spacing: self.step as f64, kernel_sigma: self.sigma };
        let sample = AxialSample { axes: &axes, weights: None, nodes: Some(nodes) };
        let settings = SummarySettings { significance: 0.05, resamples: 400 };
        summarise(&sample, settings, seed, &Work::quiet()).expect("nobody stops")
    }

    /// Shares of `runs` in which the 95 % interval covers 0° and in which a trend is claimed.
    fn shares(self, runs: u64) -> (f64, f64) {
        let results: Vec<(bool, bool)> = (0..runs)
            .into_par_iter()
            .map(|run| {
                let s = self.run(Seed(run));
                let off = s.mean.expect("axes").separation(Axis::from_deg(0.0));
                (s.interval.half_deg.is_none_or(|h| off <= h), s.preferred)
            })
            .collect();
        let share = |count: usize| count as f64 / runs as f64;
        (share(results.iter().filter(|r| r.0).count()), share(results.iter().filter(|r| r.1).count()))
    }
}

#[test]
fn a33_effective_number_of_known_correlations() {
    let exact = known_correlation::effective_number(200, 200, |r| (-r / 5.0).exp());
    assert_close!(exact, 271.500_827_21, 1e-4, "200², L = 5, double sum with scipy");
    assert_close!(area_exponential(40_000.0, 5.0), 254.647_908_95, 1e-4, "area form");
    // SCIENCE A15: an AR(1) series is one row.
    let ar = |rho: f64| known_correlation::effective_number(100, 1, |k| rho.powf(k));
    assert_close!(ar(0.5), 33.784, 5e-4, "AR(1), ρ = 0.5");
    assert_close!(ar(0.9), 5.814, 5e-4, "AR(1), ρ = 0.9");
}

#[test]
fn the_estimate_finds_the_number_of_a_known_field() {
    // SCIENCE A15: 256², e-fold 8 px, true n_eff 326, single estimates 353 ± 90.
    let runs = 8;
    let truth = known_correlation::effective_number(256, 256, |r| (-r * r / 64.0).exp());
    let estimates: Vec<f64> = (0..runs)
        .into_par_iter()
        .map(|run| {
            let field = smooth_noise(256, 4.0, &mut Seed(run).stream("a15", 0));
            let axes: Vec<Axis> = field.iter().map(|g| Axis::from_deg(15.0 * g)).collect();
            let at: Vec<Point> =
                (0..256 * 256).map(|i| Point::new(f64::from(i % 256), f64::from(i / 256))).collect();
            effective_number(&doubled(&axes), None, &at, 1.0, 0.0, &Work::quiet())
                .expect("nobody stops")
                .mean
                .estimated
        })
        .collect();
    let mean = estimates.iter().sum::<f64>() / runs as f64;
    assert_close!(truth, area_gaussian(65_536.0, 8.0), 30.0, "double sum and area form");
    // Three standard errors of the mean of eight estimates that scatter by a quarter.
    assert_close!(mean / truth, 1.0, 0.27, "mean estimate over truth");
}

#[test]
fn a35_small_tiles_give_too_small_a_scatter() {
    let runs = 10u64;
    let sides = [8.0, 16.0, 32.0, 64.0];
    let at: Vec<Point> = (0..256 * 256).map(|i| Point::new(f64::from(i % 256), f64::from(i / 256))).collect();
    let per_run: Vec<[f64; 4]> = (0..runs)
        .into_par_iter()
        .map(|run| {
            let field = smooth_noise(256, 4.0, &mut Seed(run).stream("a35", 0));
            let axes: Vec<Axis> = field.iter().map(|g| Axis::from_deg(15.0 * g)).collect();
            let phi = doubled(&axes);
            let all = Resultant::of(&phi, None);
            // The variance a bootstrap of k tiles converges to, for small turns: Σ y²/R² with y the
            // sum across the mean of each tile.
            sides.map(|side| {
                let (sin, cos) = all.direction().sin_cos();
                let y2: f64 =
                    tiles(&phi, None, &at, side).iter().map(|t| (t.sin * cos - t.cos * sin).powi(2)).sum();
                0.5 * (y2.sqrt() / all.length()).to_degrees()
            })
        })
        .collect();
    let rows = [(0.405, 0.03), (0.599, 0.05), (0.71, 0.08), (0.722, 0.1)];
    for (k, (want, bound)) in rows.into_iter().enumerate() {
        let mean = per_run.iter().map(|r| r[k]).sum::<f64>() / runs as f64;
        assert_close!(
            mean,
            want,
            bound,
            "SD of the mean axis by tiles of {} px, 150-run simulation",
            sides[k]
        );
    }
    let theory = 15.0 / area_gaussian(65_536.0, 8.0).sqrt();
    assert_close!(theory, 0.830_837_74, 1e-6, "15°/√n_eff");
}

const SCENES: [(&str, Scene); 4] = [
    ("large", Scene { size: 128, sigma: 3.0, step: 3, wander: 0.0, mean: 2.0 }),
    ("small", Scene { size: 64, sigma: 3.0, step: 3, wander: 0.0, mean: 2.0 }),
    ("overlapping nodes", Scene { size: 64, sigma: 3.0, step: 1, wander: 0.0, mean: 2.0 }),
    ("wandering", Scene { size: 128, sigma: 3.0, step: 3, wander: 0.4, mean: 2.0 }),
];

#[test]
fn intervals_cover_and_noise_is_not_claimed() {
    // Quick variant: 100 runs, three standard errors (2.2 %) either way.
    let scene = SCENES[0].1;
    let (cover, _) = scene.shares(100);
    assert!((0.88..=1.0).contains(&cover), "covered {cover}");
    let (_, claimed) = Scene { mean: 0.0, ..scene }.shares(100);
    assert!(claimed <= 0.12, "claimed {claimed}");
}

#[test]
#[ignore = "takes minutes: 1000 simulated fields of each kind"]
fn intervals_cover_and_noise_is_not_claimed_at_length() {
    for (name, scene) in SCENES {
        let (cover, _) = scene.shares(1000);
        let (_, claimed) = Scene { mean: 0.0, ..scene }.shares(1000);
        println!("{name}: covered {:.1} %, claimed in noise {:.1} %", 100.0 * cover, 100.0 * claimed);
        assert!((0.93..=0.985).contains(&cover), "{name}: covered {cover}");
        assert!(claimed <= 0.072, "{name}: claimed {claimed}");
    }
}

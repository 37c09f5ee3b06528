//! Does the obstacle test recover 0, 30, 60 and 90°, do its intervals cover, and is its p uniform without a
//! turn? `cargo bench --bench obstacle`; goals: mean within 2°, coverage 90–97 %, p below 5/10/50 % in as many.

mod outcrops;

use outcrops::{Kind, Scene, score};
use rayon::prelude::*;
use ventifact::ground::Point;
use ventifact::science::obstacle::Ellipse;

const RUNS: u64 = 400;
const NULL_RUNS: u64 = 400;

fn main() {
    let middle = Point::new(29.3, 30.4);
    let round = Ellipse::circle(middle, 5.0);
    let long = Ellipse { centre: middle, major: 7.0, minor: 3.5, turn: 0.6 };
    let scene = |outcrop, kind, related_deg, noise_deg| Scene {
        size: 60,
        outcrop,
        phi_deg: None,
        kind,
        related_deg,
        noise_deg,
    };
    let scenes = [
        ("independent, 10°", scene(round, Kind::Independent, 0.0, 10.0)),
        ("Gaussian L = 3, 8° + 3°", scene(round, Kind::Gaussian { length: 3.0 }, 8.0, 3.0)),
        ("exponential L = 3, 8° + 3°", scene(round, Kind::Exponential { length: 3.0 }, 8.0, 3.0)),
        ("exponential L = 6, 10° + 3°", scene(round, Kind::Exponential { length: 6.0 }, 10.0, 3.0)),
        ("2:1 ellipse, exponential L = 3", scene(long, Kind::Exponential { length: 3.0 }, 8.0, 3.0)),
    ];
    for (name, scene) in scenes {
        println!("{name}");
        for phi in [0.0, 30.0, 60.0, 90.0] {
            let scene = Scene { phi_deg: Some(phi), ..scene };
            let outcomes: Vec<_> = (0..RUNS).into_par_iter().map(|i| scene.run(i, 0)).collect();
            let s = score(&outcomes, phi);
            println!(
                "  truth {phi:>2.0}°: error {:+.2}° (goal ± 2), SD {:.2}°, covered {:.1} % (goal 90–97), decided {:.1} %, amplitude {:.2}, n_eff {:.0} of {}",
                s.bias_deg,
                s.sd_deg,
                100.0 * s.covered,
                100.0 * s.decided,
                s.amplitude,
                s.n_eff,
                outcomes[0].estimate.n
            );
        }
    }
    for (name, scene) in [
        ("independent", scene(Ellipse::circle(middle, 3.0), Kind::Independent, 0.0, 10.0)),
        ("Gaussian L = 3", scene(Ellipse::circle(middle, 3.0), Kind::Gaussian { length: 3.0 }, 8.0, 3.0)),
        (
            "exponential L = 3",
            scene(Ellipse::circle(middle, 3.0), Kind::Exponential { length: 3.0 }, 8.0, 3.0),
        ),
        (
            "exponential L = 3, a = 4",
            scene(Ellipse::circle(middle, 4.0), Kind::Exponential { length: 3.0 }, 8.0, 3.0),
        ),
    ] {
        let outcomes: Vec<_> = (0..NULL_RUNS).into_par_iter().map(|i| scene.run(50_000 + i, 999)).collect();
        let by_rank: Vec<f64> = outcomes.iter().filter_map(|o| o.null.as_ref()?.p).collect();
        let by_error: Vec<f64> = outcomes.iter().map(|o| o.pattern_p).collect();
        let worth: f64 = outcomes.iter().filter_map(|o| Some(o.null.as_ref()?.independent)).sum::<f64>()
            / NULL_RUNS as f64;
        println!(
            "no turn, {name}: virtual outcrops worth {worth:.0} independent, p given in {} of {NULL_RUNS}",
            by_rank.len()
        );
        for (what, p) in [("by virtual outcrops", by_rank), ("by its own error", by_error)] {
            let below =
                |level: f64| 100.0 * p.iter().filter(|p| **p <= level).count() as f64 / p.len().max(1) as f64;
            println!(
                "  p {what}: below 5/10/50 % in {:.1}/{:.1}/{:.1} %, KS p {:.3}",
                below(0.05),
                below(0.1),
                below(0.5),
                uniform_p(&p)
            );
        }
    }
}

/// Kolmogorov–Smirnov p of uniformity (asymptotic series with Stephens' correction).
fn uniform_p(p: &[f64]) -> f64 {
    let mut sorted = p.to_vec();
    sorted.sort_by(f64::total_cmp);
    let n = sorted.len() as f64;
    let distance = sorted
        .iter()
        .enumerate()
        .map(|(i, p)| (p - i as f64 / n).max((i as f64 + 1.0) / n - p))
        .fold(0.0, f64::max);
    let x = distance * (n.sqrt() + 0.12 + 0.11 / n.sqrt());
    let sum: f64 = (1..100).map(|k| (-1f64).powi(k - 1) * (-2.0 * f64::from(k * k) * x * x).exp()).sum();
    (2.0 * sum).clamp(0.0, 1.0)
}

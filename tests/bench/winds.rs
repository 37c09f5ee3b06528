//! Twenty years of hourly winds, two thousand draws, every theory: how long does it take?
//!
//! `cargo bench --bench winds` prints seconds beside the time of a plain pass over the rows, so that the ratio can be
//! compared between machines, and how soon Stop is obeyed.

use std::time::{Duration, Instant};

use ventifact::ground::{Azimuth, Body, Seed, WindRecord, WindSample, Work};
use ventifact::science::alignment::{FluxUp, foresee};
use ventifact::science::wind::{Site, WindSettings, assess};

fn record() -> WindRecord {
    let mut state = 1u64;
    let mut random = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as f64 / (1u64 << 31) as f64
    };
    let mut weather = [0.0f64; 2];
    let samples = (0..20 * 8766)
        .map(|hour| {
            for w in &mut weather {
                *w = 0.95 * *w + 0.54 * (random() + random() + random() - 1.5);
            }
            let winter = (hour / 4383) % 2 == 0;
            WindSample {
                line: hour as u32 + 1,
                time: Some(3600 * hour as i64),
                speed: Some((6.5 + 2.5 * weather[0]).max(0.0)),
                from: Some(Azimuth::from_deg(if winter { 240.0 } else { 10.0 } + 25.0 * weather[1])),
                weight: 1.0,
            }
        })
        .collect();
    WindRecord { samples, is_table: false, gusts: Vec::new() }
}

fn main() {
    let record = record();
    let earth = Body::earth();
    let site =
        Site { height_m: 10.0, roughness_m: 1e-3, air: earth.air, gravity: earth.gravity, is_earth: true };
    let settings = WindSettings { resamples: 2000, ..WindSettings::default() };
    let whole = |work: &Work| {
        let found = assess(&record, &site, &settings, Seed(1), work).ok()?;
        let flux_up = FluxUp { ratio: 1.6, doubt: 1.25 };
        let assessed = Instant::now();
        let foresight = foresee(&found.regime, &found.draws, flux_up, Seed(1), work).ok()?;
        println!("  theories alone {:.2} s", assessed.elapsed().as_secs_f64());
        Some((found, foresight))
    };
    let from = Instant::now();
    let (found, foresight) = whole(&Work::quiet()).expect("a foresight");
    let seconds = from.elapsed().as_secs_f64();
    let moving = found.regime.all.len();
    println!(
        "{} rows, {} draws, {} theories: {seconds:.2} s (goal 5 s on two cores); {moving} directions move sand",
        found.rows,
        found.draws.len(),
        foresight.clouds.len()
    );
    let from = Instant::now();
    let sum: f64 = (0..100).flat_map(|_| &record.samples).filter_map(|s| s.speed).map(|v| v * v * v).sum();
    println!(
        "that is {:.0} times a hundred passes over the rows ({sum:.3e})",
        seconds / from.elapsed().as_secs_f64()
    );

    // Stop at nine moments of the work.
    let mut slowest = Duration::ZERO;
    for tenth in 1..10 {
        let work = Work::quiet();
        let late = std::thread::scope(|scope| {
            let runner = scope.spawn(|| whole(&work).is_none());
            std::thread::sleep(Duration::from_secs_f64(0.1 * f64::from(tenth) * seconds));
            let asked = Instant::now();
            work.stop();
            let _ = runner.join();
            asked.elapsed()
        });
        slowest = slowest.max(late);
    }
    println!("slowest answer to Stop: {} ms (goal 100 ms)", slowest.as_millis());
}

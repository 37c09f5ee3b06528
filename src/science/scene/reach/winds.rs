//! The invented winds of Sorrel Reach: a two-season record on the open reach, a one-sided record in
//! the corridor. Hourly, one year, direction FROM, metres per second at 10 m.

use rand_distr::{Distribution as _, StandardNormal};

use crate::ground::{Azimuth, Seed, WindRecord, WindSample};

/// One season's wind.
#[derive(Clone, Copy, Debug)]
pub struct Season {
    /// Where the strong wind carries sand, azimuth in degrees.
    pub toward_deg: f64,
    /// Standard deviation of its direction, degrees.
    pub swing_deg: f64,
    /// Mean and standard deviation of speed, m s⁻¹.
    pub speed: f64,
    pub gusts: f64,
}

/// The open reach: two winds about 110° apart, a steady one and a weaker one with storms. Fingers grow
/// near 76°, while a bed covered with sand would raise crests 25° away from that, so the trend tells the
/// two apart; and were only the storms strong enough, the second wind would rule.
pub const SEASONS: [Season; 2] = [
    Season { toward_deg: 34.0, swing_deg: 16.0, speed: 4.3, gusts: 0.5 },
    Season { toward_deg: 145.0, swing_deg: 16.0, speed: 3.1, gusts: 1.35 },
];

/// The corridor: the walls leave one direction.
pub const CORRIDOR: [Season; 2] = [
    Season { toward_deg: 66.0, swing_deg: 20.0, speed: 2.6, gusts: 1.2 },
    Season { toward_deg: 72.0, swing_deg: 20.0, speed: 2.1, gusts: 1.1 },
];

/// A one-year record's length, hours.
const HOURS: usize = 365 * 24;
/// 2001-01-01T00:00 in seconds since 1970: an invented calendar, counted like ours.
const START: i64 = 978_307_200;

/// The record of the mast on the open reach.
pub fn reach_record(seed: Seed) -> WindRecord {
    record(&SEASONS, seed.child("reach-mast"))
}

/// The record of the mast in the corridor.
pub fn corridor_record(seed: Seed) -> WindRecord {
    record(&CORRIDOR, seed.child("corridor-mast"))
}

/// Weather as first-order autoregressive noise in speed and direction (e-folding 20 h), the seasons
/// as halves of the year that change over a fortnight.
fn record(seasons: &[Season; 2], seed: Seed) -> WindRecord {
    let mut random = seed.stream("scene.reach.wind", 0);
    let keep = (-1.0f64 / 20.0).exp();
    let fresh = (1.0 - keep * keep).sqrt();
    let (mut speed_noise, mut turn_noise) = (0.0f64, 0.0f64);
    let samples = (0..HOURS)
        .map(|hour| {
            let mut normal = || -> f64 { StandardNormal.sample(&mut random) };
            speed_noise = keep * speed_noise + fresh * normal();
            turn_noise = keep * turn_noise + fresh * normal();
            let day = hour as f64 / 24.0;
            let season = &seasons[usize::from((91.0..273.5).contains(&(day + 7.0 * turn_noise.signum())))];
            let speed = (season.speed + season.gusts * speed_noise).max(0.0);
            let from = Azimuth::from_deg(season.toward_deg + 180.0 + season.swing_deg * turn_noise);
            WindSample {
                line: hour as u32 + 2,
                time: Some(START + 3600 * hour as i64),
                speed: Some((speed * 10.0).round() / 10.0),
                from: (speed >= 0.05).then_some(Azimuth::from_deg(from.deg().round())),
                weight: 1.0,
            }
        })
        .collect();
    WindRecord { samples, is_table: false, gusts: Vec::new() }
}

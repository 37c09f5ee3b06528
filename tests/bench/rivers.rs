//! How well a proposed network meets the truth of a synthetic scene.

use std::collections::HashMap;

use ventifact::ground::{Network, Point, Seed, Work};
use ventifact::science::channel::detect::{ChannelTone, DetectSettings, detect};
use ventifact::science::channel::width::measure;
use ventifact::science::scene::waterways::{Look, Waterways};

/// Greatest distance at which a line is where the truth is, pixels.
pub const NEAR: f64 = 2.0;

/// Lengths by place, and widths.
#[derive(Clone, Debug)]
pub struct Score {
    /// Share of the visible truth within [`NEAR`] of a found line.
    pub recall: f64,
    /// Share of the found length within [`NEAR`] of a true line.
    pub precision: f64,
    /// True width, share of it found, and mean of measured less true width.
    pub by_width: Vec<(f64, f64, f64)>,
    pub loops: usize,
}

pub fn settings(tone: ChannelTone) -> DetectSettings {
    DetectSettings {
        tone,
        narrowest_px: 2.0,
        widest_px: 60.0,
        significance: 0.001,
        gap_widths: 6.0,
        spur_half_widths: 3.0,
        least_length_widths: 8.0,
    }
}

/// Draws, proposes, measures widths and compares.
pub fn run(size: usize, widths: &[f64], look: Look, seed: u64) -> Score {
    let scene = Waterways::draw(size, widths, look, Seed(seed));
    let image = scene.image(look, Seed(seed));
    let tone = match (look.mixed, look.tone < 1.0) {
        (true, _) => ChannelTone::EdgePair,
        (false, true) => ChannelTone::Dark,
        (false, false) => ChannelTone::Bright,
    };
    let found =
        detect(&image, true, &settings(tone), &Work::quiet()).expect("not stopped").expect("two tones");
    let mut network = found.network;
    measure(&image, &mut network, tone, 60.0, &Work::quiet()).expect("not stopped");
    score(&scene, &network)
}

fn score(scene: &Waterways, network: &Network) -> Score {
    let mut pieces = Vec::new();
    for reach in &network.reaches {
        for pair in reach.line.0.windows(2) {
            let length = pair[0].distance(pair[1]);
            let count = (2.0 * length).ceil().max(1.0);
            for i in 0..count as usize {
                let t = (i as f64 + 0.5) / count;
                let at = Point::new(
                    pair[0].x + t * (pair[1].x - pair[0].x),
                    pair[0].y + t * (pair[1].y - pair[0].y),
                );
                pieces.push((at, length / count));
            }
        }
    }
    let found = Places::of(pieces.iter().map(|p| (p.0, 0.0)));
    let truth = Places::of(scene.channels.iter().flat_map(|c| c.line.0.iter().map(|p| (*p, c.width))));
    let visible = scene.visible();
    let hit = |p: &Point| found.near(*p).is_some();
    let share = |points: &[&(Point, f64)]| {
        points.iter().filter(|v| hit(&v.0)).count() as f64 / points.len().max(1) as f64
    };
    let length: f64 = pieces.iter().map(|p| p.1).sum();
    let right: f64 = pieces.iter().filter(|p| truth.near(p.0).is_some()).map(|p| p.1).sum();
    let mut widths: Vec<f64> = visible.iter().map(|v| v.1).collect();
    widths.sort_by(f64::total_cmp);
    widths.dedup();
    let stations: Vec<(f64, f64)> = network
        .reaches
        .iter()
        .flat_map(|r| &r.stations)
        .filter_map(|s| Some((truth.near(s.at)?, s.width?)))
        .collect();
    let by_width = widths
        .into_iter()
        .map(|width| {
            let here: Vec<&(Point, f64)> = visible.iter().filter(|v| v.1 == width).collect();
            let errors: Vec<f64> = stations.iter().filter(|s| s.0 == width).map(|s| s.1 - width).collect();
            (width, share(&here), errors.iter().sum::<f64>() / errors.len().max(1) as f64)
        })
        .collect();
    let recall = share(&visible.iter().collect::<Vec<_>>());
    Score { recall, precision: right / length.max(1e-9), by_width, loops: network.loops() }
}

/// Points looked up by place, each with a number.
struct Places(HashMap<(i64, i64), Vec<(Point, f64)>>);

impl Places {
    fn of(points: impl Iterator<Item = (Point, f64)>) -> Self {
        let mut cells: HashMap<_, Vec<_>> = HashMap::new();
        for (p, number) in points {
            cells.entry(Self::cell(p)).or_default().push((p, number));
        }
        Self(cells)
    }

    fn cell(p: Point) -> (i64, i64) {
        ((p.x / NEAR).floor() as i64, (p.y / NEAR).floor() as i64)
    }

    /// The number of the nearest point within [`NEAR`].
    fn near(&self, p: Point) -> Option<f64> {
        let (c, r) = Self::cell(p);
        let cells = (r - 1..=r + 1).flat_map(|r| (c - 1..=c + 1).map(move |c| (c, r)));
        cells
            .filter_map(|cell| self.0.get(&cell))
            .flatten()
            .map(|(q, number)| (q.distance(p), *number))
            .filter(|(d, _)| *d <= NEAR)
            .min_by(|a, b| a.0.total_cmp(&b.0))
            .map(|(_, number)| number)
    }
}

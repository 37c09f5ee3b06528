//! Images of channel networks with known lines, widths and loops: dark, bright or mixed, with speckle and gaps.

use std::f64::consts::TAU;

use rand::Rng as _;

use crate::ground::{Grid, Point, Polyline, Seed};

use super::speckle::speckle;

/// One channel between its head and the channel it runs into.
#[derive(Clone, Debug, PartialEq)]
pub struct Waterway {
    /// Centre line, about half a pixel between points.
    pub line: Polyline,
    /// Bank to bank, pixels.
    pub width: f64,
    /// Backscatter over that of the plain: below 1 dark, above 1 bright.
    pub tone: f64,
}

/// How a scene looks.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Look {
    /// Channel over plain; with `mixed`, every other channel has the inverse.
    pub tone: f64,
    pub mixed: bool,
    /// Looks of the speckle; none without.
    pub looks: Option<f64>,
    /// Length of the gap in the middle of each channel of the second width, pixels.
    pub gap_px: f64,
}

/// A network and where its channels are hidden.
#[derive(Clone, Debug, PartialEq)]
pub struct Waterways {
    pub size: usize,
    pub channels: Vec<Waterway>,
    gap_px: f64,
    gapped_width: f64,
}

/// From, to, and which of the widths.
type Straight = ((f64, f64), (f64, f64), usize);

/// Straight axes of the channels in shares of the scene's side: from, to, and which of the widths.
const AXES: [Straight; 8] = [
    ((0.50, 0.00), (0.50, 1.00), 0),
    ((0.02, 0.10), (0.50, 0.62), 1),
    ((0.98, 0.30), (0.50, 0.85), 1),
    ((0.30, 0.02), (0.26, 0.36), 2),
    ((0.66, 0.05), (0.788, 0.52), 2),
    ((0.04, 0.58), (0.38, 0.49), 3),
    ((0.97, 0.70), (0.644, 0.685), 3),
    ((0.05, 0.90), (0.50, 0.93), 4),
];

/// Tributaries of axes that meander: the axis they run into, and how far along it.
const INTO: [Option<(usize, f64)>; 8] = [
    None,
    Some((0, 0.62)),
    Some((0, 0.85)),
    Some((1, 0.5)),
    Some((2, 0.4)),
    Some((1, 0.75)),
    Some((2, 0.7)),
    Some((0, 0.93)),
];

impl Waterways {
    /// A network over `size` × `size` pixels. `widths` are those of the trunk, of the two that join it, and of
    /// theirs; the last is used for what is left. The fifth channel parts round an island and closes again.
    ///
    /// # Panics
    /// When `widths` is empty: a bug in the caller.
    pub fn draw(size: usize, widths: &[f64], look: Look, seed: Seed) -> Self {
        let mut random = seed.stream("scene.waterways", 0);
        let side = size as f64;
        let mut channels: Vec<Waterway> = Vec::new();
        for (i, (from, to, level)) in AXES.into_iter().enumerate() {
            let width = widths[level.min(widths.len() - 1)];
            let start = Point::new(from.0 * side, from.1 * side);
            let end = match INTO[i] {
                Some((into, share)) => {
                    let line: &[Point] = &channels[into].line.0;
                    line[((line.len() - 1) as f64 * share) as usize]
                }
                None => Point::new(to.0 * side, to.1 * side),
            };
            let tone = if look.mixed && i % 2 == 1 { 1.0 / look.tone } else { look.tone };
            let wave = (11.0 * width).clamp(60.0, 0.5 * side);
            let line = meander(start, end, wave, 0.1 * wave, random.random_range(0.0..TAU));
            channels.push(Waterway { line, width, tone });
        }
        let arm = {
            let host = &channels[4];
            let points = &host.line.0;
            let at = |share: f64| points[((points.len() - 1) as f64 * share) as usize];
            let bulge = 0.06 * side + 2.0 * host.width;
            Waterway { line: arc(at(0.2), at(0.75), bulge), width: host.width, tone: host.tone }
        };
        channels.push(arm);
        let gapped_width = widths[1.min(widths.len() - 1)];
        Self { size, channels, gap_px: look.gap_px, gapped_width }
    }

    /// Independent loops of the network.
    pub fn loops(&self) -> usize {
        1
    }

    /// Backscatter with soft banks, times speckle.
    pub fn image(&self, look: Look, seed: Seed) -> Grid<f32> {
        let mut tone = Grid::filled(self.size, self.size, 1.0f32);
        let mut cover = Grid::filled(self.size, self.size, 0.0f32);
        for channel in &self.channels {
            self.stamp(channel, &mut tone, &mut cover);
        }
        let Some(looks) = look.looks else { return tone };
        let grain = speckle(self.size, self.size, looks, &mut seed.stream("scene.waterways.speckle", 0));
        super::speckle::speckled(&tone, &grain)
    }

    /// Lays a channel over the image: where it covers more of a pixel than what is there, its tone counts.
    fn stamp(&self, channel: &Waterway, tone: &mut Grid<f32>, cover: &mut Grid<f32>) {
        let reach = 0.5 * channel.width + 1.0;
        let line = &channel.line.0;
        let mut near = std::collections::BTreeMap::new();
        for (i, p) in line.iter().enumerate() {
            if self.is_gap(channel, i) {
                continue;
            }
            let range = |v: f64| {
                let clamp = |x: f64| x.clamp(0.0, self.size as f64) as usize;
                clamp((v - reach).floor())..clamp((v + reach).ceil())
            };
            for row in range(p.y) {
                for col in range(p.x) {
                    let d = p.distance(Point::new(col as f64 + 0.5, row as f64 + 0.5));
                    let held: &mut f64 = near.entry((row, col)).or_insert(f64::INFINITY);
                    *held = held.min(d);
                }
            }
        }
        for ((row, col), d) in near {
            let share = (0.5 * channel.width + 0.5 - d).clamp(0.0, 1.0) as f32;
            let cell = row * self.size + col;
            if share > cover.values()[cell] {
                cover.values_mut()[cell] = share;
                tone.values_mut()[cell] = 1.0 + share * (channel.tone as f32 - 1.0);
            }
        }
    }

    fn is_gap(&self, channel: &Waterway, point: usize) -> bool {
        let middle = 0.5 * channel.line.0.len() as f64;
        channel.width == self.gapped_width && (point as f64 - middle).abs() * STEP < 0.5 * self.gap_px
    }

    /// Points of a channel's line that an observer could see: inside the image, outside gaps, and not within the
    /// channel it runs into or out of. With the channel's width.
    pub fn visible(&self) -> Vec<(Point, f64)> {
        let mut seen = Vec::new();
        for (i, channel) in self.channels.iter().enumerate() {
            for (k, p) in channel.line.0.iter().enumerate() {
                let inside = p.x > 0.0 && p.y > 0.0 && p.x < self.size as f64 && p.y < self.size as f64;
                let hidden =
                    |other: &Waterway| other.line.0.iter().any(|q| q.distance(*p) < 0.5 * other.width);
                let hosts =
                    self.channels.iter().enumerate().filter(|(j, o)| *j != i && o.width >= channel.width);
                if inside && !self.is_gap(channel, k) && !hosts.map(|(_, o)| o).any(hidden) {
                    seen.push((*p, channel.width));
                }
            }
        }
        seen
    }
}

/// Distance between points of a line, pixels.
const STEP: f64 = 0.5;

/// A wave of length `wave` and height `swing` about the straight line, quiet at both ends.
fn meander(from: Point, to: Point, wave: f64, swing: f64, phase: f64) -> Polyline {
    let length = from.distance(to);
    let (ux, uy) = ((to.x - from.x) / length, (to.y - from.y) / length);
    let count = (length / STEP).ceil() as usize;
    let at = |i: usize| {
        let s = length * i as f64 / count as f64;
        let quiet = (s / wave).min((length - s) / wave).min(1.0);
        let off = swing * quiet * (TAU * s / wave + phase).sin();
        Point::new(from.x + s * ux - off * uy, from.y + s * uy + off * ux)
    };
    Polyline((0..=count).map(at).collect())
}

/// Half a sine wave of height `bulge` to the right of the way.
fn arc(from: Point, to: Point, bulge: f64) -> Polyline {
    let length = from.distance(to);
    let (ux, uy) = ((to.x - from.x) / length, (to.y - from.y) / length);
    let count = (2.0 * length / STEP).ceil() as usize;
    let at = |i: usize| {
        let t = i as f64 / count as f64;
        let off = bulge * (0.5 * TAU * t).sin();
        Point::new(from.x + t * length * ux + off * uy, from.y + t * length * uy - off * ux)
    };
    Polyline((0..=count).map(at).collect())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_channel_is_as_dark_and_as_wide_as_stated() {
        let look = Look { tone: 0.4, mixed: false, looks: None, gap_px: 0.0 };
        let scene = Waterways::draw(400, &[20.0, 6.0], look, Seed(1));
        let image = scene.image(look, Seed(1));
        let row = 20;
        let dark: f64 = (150..250).map(|c| f64::from(1.0 - image.at(c, row)) / 0.6).sum();
        // Across a trunk that runs down with some slant.
        assert!((20.0..23.0).contains(&dark), "{dark}");
        crate::assert_close!(f64::from(image.valid_values().fold(1.0, f32::min)), 0.4, 1e-6, "floor");
        assert!(scene.visible().len() > 1000);
    }
}

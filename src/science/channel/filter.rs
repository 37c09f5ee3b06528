//! The kernels of one width, and what they give over a tile.

use std::f64::consts::TAU;

use crate::ground::Grid;
use crate::numeric::gauss::Kernel;
use crate::numeric::separable::{across_rows, along_row};
use crate::numeric::shift::{add_two, mix_two};

use super::detect::ChannelTone;
use super::response::{APART, DIRECTIONS, Strip, TILE, direction};

/// Where the tone beside the strip is taken, over half the width, and how far the middle must stand out from it at
/// least, over the response (0.56 for an ideal strip).
const BESIDE: f64 = 4.0 / 3.0;
const LEAST_LIFT: f32 = 0.25;
/// Half the taps along the strip reach so many scales out.
const TAPS_TO: f64 = 2.0;

/// The kernels of one width.
pub(super) struct Filter {
    tone: ChannelTone,
    smooth: Kernel,
    slope: Kernel,
    /// Step of the taps along the strip, cells, and their weights from the middle outwards.
    step: usize,
    taps: Vec<f32>,
    half: f64,
    /// How far ahead and behind the banks are sampled, cells.
    ahead: f64,
    /// √(2π) σ: makes the response to a step of 1 be 1.
    gain: f32,
    /// Cells needed around a tile for the banks, and for the banks and the taps.
    bank_margin: usize,
    margin: usize,
}

pub(super) struct Tile {
    pub width: usize,
    pub height: usize,
    pub amplitude: Vec<f32>,
    pub turn: Vec<u8>,
    /// Responses of single edges at some cells and directions: the noise is taken from them.
    pub edges: Vec<f32>,
}

impl Filter {
    pub(super) fn new(strip: &Strip, tone: ChannelTone) -> Self {
        let step = if strip.sigma >= 1.4 { 2 } else { 1 };
        let reach = (TAPS_TO * strip.along / step as f64).round().max(1.0) as usize;
        let bell = |k: usize| (-0.5 * ((k * step) as f64 / strip.along).powi(2)).exp();
        let sum = bell(0) + 2.0 * (1..=reach).map(bell).sum::<f64>();
        let ahead = APART * strip.along;
        let bank_margin = strip.half().hypot(ahead).ceil() as usize + 1;
        Self {
            tone,
            smooth: Kernel::gaussian(strip.sigma),
            slope: Kernel::derivative(strip.sigma),
            step,
            taps: (0..=reach).map(|k| (bell(k) / sum) as f32).collect(),
            half: strip.half(),
            ahead,
            gain: (TAU.sqrt() * strip.sigma) as f32,
            bank_margin,
            margin: bank_margin + reach * step + 1,
        }
    }

    pub(super) fn tile(&self, grid: &Grid<f32>, corner: (usize, usize)) -> Tile {
        let width = TILE.min(grid.width() - corner.0);
        let height = TILE.min(grid.height() - corner.1);
        let [gx, gy, level] = self.gradient(grid, corner, width, height);
        let mut tile = Tile {
            width,
            height,
            amplitude: vec![0.0; width * height],
            turn: vec![0; width * height],
            edges: Vec::new(),
        };
        let outer = width + 2 * self.margin;
        let inner = width + 2 * self.bank_margin;
        let mut steered = vec![0.0f32; gx.len()];
        let mut edge = vec![0.0f32; inner * (height + 2 * self.bank_margin)];
        for turn in 0..DIRECTIONS as u8 {
            let (cos, sin) = direction(turn);
            // ∂_n = −sin θ ∂_x + cos θ ∂_y
            mix_two(&mut steered, &gx, -sin as f32 * self.gain, &gy, cos as f32 * self.gain);
            self.along(&steered, outer, &mut edge, inner, (cos, sin));
            if turn % 3 == 1 {
                let rows = edge.chunks_exact(inner).skip(self.bank_margin).take(height).step_by(5);
                tile.edges.extend(rows.flat_map(|r| r[self.bank_margin..][..width].iter().step_by(5)));
            }
            self.banks(&edge, inner, &level, turn, &mut tile);
        }
        tile
    }

    /// Derivatives along rows and down columns, and the smoothed tone, over the tile and its margin; cells outside
    /// mirror those inside.
    fn gradient(
        &self,
        grid: &Grid<f32>,
        corner: (usize, usize),
        width: usize,
        height: usize,
    ) -> [Vec<f32>; 3] {
        let radius = self.smooth.radius();
        let (cols, rows) = (width + 2 * self.margin, height + 2 * self.margin);
        let before = (self.margin + radius) as isize;
        let mut line = vec![0.0f32; cols + 2 * radius];
        let mut smooth = vec![0.0f32; cols * (rows + 2 * radius)];
        let mut slope = smooth.clone();
        let source: Vec<usize> = (0..line.len())
            .map(|i| mirrored(corner.0 as isize + i as isize - before, grid.width()))
            .collect();
        for (i, (smooth, slope)) in
            smooth.chunks_exact_mut(cols).zip(slope.chunks_exact_mut(cols)).enumerate()
        {
            let row = mirrored(corner.1 as isize + i as isize - before, grid.height());
            let values = &grid.values()[row * grid.width()..][..grid.width()];
            line.iter_mut().zip(&source).for_each(|(v, s)| *v = values[*s]);
            along_row(&self.smooth, &line, smooth);
            along_row(&self.slope, &line, slope);
        }
        let down = |kernel: &Kernel, lines: &[f32]| {
            let lines: Vec<&[f32]> = lines.chunks_exact(cols).collect();
            let mut out = vec![0.0f32; cols * rows];
            for (i, out) in out.chunks_exact_mut(cols).enumerate() {
                across_rows(kernel, &lines[i..=i + 2 * radius], out);
            }
            out
        };
        [down(&self.smooth, &slope), down(&self.slope, &smooth), down(&self.smooth, &smooth)]
    }

    /// Averages along the strip: the taps lie on columns (or rows, for steep strips), linear between cells.
    fn along(&self, steered: &[f32], outer: usize, edge: &mut [f32], inner: usize, (cos, sin): (f64, f64)) {
        let shift = (self.margin - self.bank_margin) as isize;
        let steep = sin.abs() > cos.abs();
        let slant = if steep { cos / sin } else { sin / cos };
        // Taps one cell apart in a column or row are 1/|cos| or 1/|sin| apart along the strip.
        let stretch = if steep { sin.abs() } else { cos.abs() };
        let reach = ((self.taps.len() - 1) as f64 * stretch).round() as isize;
        let weight = |k: isize| {
            let at = k.unsigned_abs() as f64 / stretch;
            let low = (at as usize).min(self.taps.len() - 1);
            let high = (low + 1).min(self.taps.len() - 1);
            self.taps[low] + (at - low as f64) as f32 * (self.taps[high] - self.taps[low])
        };
        let sum: f32 = (-reach..=reach).map(weight).sum();
        let taps: Vec<(isize, isize, f32, f32)> = (-reach..=reach)
            .map(|k| {
                let main = k * self.step as isize;
                let side = main as f64 * slant;
                let low = side.floor();
                let part = (side - low) as f32;
                let w = weight(k) / sum;
                (main, low as isize, w * (1.0 - part), w * part)
            })
            .collect();
        for (r, out) in edge.chunks_exact_mut(inner).enumerate() {
            out.fill(0.0);
            for &(main, side, near, far) in &taps {
                let start = |col: isize, row: isize| {
                    ((r as isize + shift + row) * outer as isize + shift + col) as usize
                };
                let (a, b) = if steep {
                    (start(side, main), start(side + 1, main))
                } else {
                    (start(main, side), start(main, side + 1))
                };
                add_two(out, &steered[a..a + inner], near, &steered[b..b + inner], far);
            }
        }
    }

    /// The least of both banks before and behind each cell, where it beats what the tile holds.
    fn banks(&self, edge: &[f32], inner: usize, level: &[f32], turn: u8, tile: &mut Tile) {
        let (cos, sin) = direction(turn);
        let sample = |side: f64, ahead: f64, columns: usize, margin: usize| {
            let (side, ahead) = (side * self.half, ahead * self.ahead);
            let (dx, dy) = (ahead * cos - side * sin, ahead * sin + side * cos);
            let (c, r) = (dx.floor(), dy.floor());
            let (u, v) = ((dx - c) as f32, (dy - r) as f32);
            let margin = margin as isize;
            let from = (margin + r as isize) * columns as isize + margin + c as isize;
            (from as usize, [(1.0 - u) * (1.0 - v), u * (1.0 - v), (1.0 - u) * v, u * v])
        };
        let samples = [(1.0, 1.0), (1.0, -1.0), (-1.0, 1.0), (-1.0, -1.0)]
            .map(|(side, ahead)| sample(side, ahead, inner, self.bank_margin));
        let outer = tile.width + 2 * self.margin;
        let beside = [-BESIDE, BESIDE].map(|side| sample(side, 0.0, outer, self.margin));
        let mut lines = [const { Vec::new() }; 4];
        let mut sides = [vec![0.0f32; tile.width], vec![0.0f32; tile.width]];
        lines.iter_mut().for_each(|line| *line = vec![0.0f32; tile.width]);
        for r in 0..tile.height {
            for (out, (from, w)) in lines.iter_mut().zip(&samples) {
                let at = from + r * inner;
                mix_two(out, &edge[at..], w[0], &edge[at + 1..], w[1]);
                add_two(out, &edge[at + inner..], w[2], &edge[at + inner + 1..], w[3]);
            }
            for (out, (from, w)) in sides.iter_mut().zip(&beside) {
                let at = from + r * outer;
                mix_two(out, &level[at..], w[0], &level[at + 1..], w[1]);
                add_two(out, &level[at + outer..], w[2], &level[at + outer + 1..], w[3]);
            }
            let here = &level[(self.margin + r) * outer + self.margin..][..tile.width];
            let held = &mut tile.amplitude[r * tile.width..][..tile.width];
            let turns = &mut tile.turn[r * tile.width..][..tile.width];
            let [a, b, c, d] = &lines;
            for i in 0..held.len() {
                let lift = (here[i] - 0.5 * (sides[0][i] + sides[1][i])) / LEAST_LIFT;
                let dark = a[i].min(b[i]).min((-c[i]).min(-d[i]));
                let bright = (-a[i]).min(-b[i]).min(c[i].min(d[i]));
                // Between two bends the outer banks make a strip as well, but the ground in its middle is that outside.
                let dark = if -lift >= dark { dark } else { 0.0 };
                let bright = if lift >= bright { bright } else { 0.0 };
                let amplitude = match self.tone {
                    ChannelTone::Dark => dark,
                    ChannelTone::Bright => bright,
                    ChannelTone::EdgePair => dark.max(bright),
                };
                if amplitude > held[i] {
                    (held[i], turns[i]) = (amplitude, turn);
                }
            }
        }
    }
}

/// The cell that stands for one outside: reflection about the outer edge, as often as needed.
fn mirrored(at: isize, count: usize) -> usize {
    let period = 2 * count as isize;
    let folded = at.rem_euclid(period) as usize;
    if folded < count { folded } else { 2 * count - 1 - folded }
}

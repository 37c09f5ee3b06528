//! The smooth background of a power spectrum, from medians in rings of ground frequency.

use std::f64::consts::FRAC_1_SQRT_2;
use std::ops::Range;

use super::bins::{Bin, Bins};
use crate::ground::LocalFrame;

/// A ring is at least this wide (ratio of frequencies) and holds at least this many bins.
const RING_RATIO: f64 = 1.3;
const RING_BINS: usize = 24;

/// How far an axis line is followed to either side for its own median, and the stretch that shares
/// one, as ratios of frequencies.
const LINE_RATIO: f64 = 2.0;
const STRETCH_RATIO: f64 = 1.15;

/// Which bins make up each ring and each axis line; the same for all windows of a size.
#[derive(Clone, Debug)]
pub(super) struct Rings {
    /// Bins whose median is taken, and the mean ln f, of each ring.
    members: Vec<Vec<usize>>,
    middle: Vec<f64>,
    /// Bins on each axis line, by rising frequency (indices into `Bins::all`).
    lines: [Vec<usize>; 2],
    /// Stretches of each line that share one median.
    stretches: [Vec<Stretch>; 2],
}

/// Bins `own` of a line are held against the median of its bins `around` (both ranges of the line).
#[derive(Clone, Debug)]
struct Stretch {
    own: Range<usize>,
    around: Range<usize>,
}

impl Rings {
    /// With `texture` (the pixel wave vector of a texture already seen) only bins more than 45° from its
    /// direction on the ground stand for the background, so that a broad texture is not taken for it.
    pub fn new(bins: &Bins, frame: LocalFrame, texture: Option<[f64; 2]>) -> Self {
        let away = |bin: &Bin| {
            texture.is_none_or(|t| {
                let ((e, n), (te, tn)) =
                    (frame.gradient(bin.pixel[0], bin.pixel[1]), frame.gradient(t[0], t[1]));
                (e * te + n * tn).abs() < FRAC_1_SQRT_2 * e.hypot(n) * te.hypot(tn)
            })
        };
        let (mut members, mut middle) = (Vec::new(), Vec::new());
        let mut from = 0;
        for to in 1..=bins.all.len() {
            let wide = bins.all[to - 1].ln_f - bins.all[from].ln_f >= RING_RATIO.ln();
            // What is left at the end must make a ring of its own, or join the last one.
            let enough = to - from >= RING_BINS && bins.all.len() - to >= RING_BINS;
            if (wide && enough) || to == bins.all.len() {
                let ring = &bins.all[from..to];
                middle.push(ring.iter().map(|b| b.ln_f).sum::<f64>() / ring.len() as f64);
                let apart: Vec<usize> = (from..to).filter(|i| away(&bins.all[*i])).collect();
                members.push(if apart.len() >= RING_BINS / 3 { apart } else { (from..to).collect() });
                from = to;
            }
        }
        let lines = [0, 1].map(|line| {
            let on = |i: &usize| bins.all[*i].line == Some(line);
            (0..bins.all.len()).filter(on).collect::<Vec<usize>>()
        });
        let stretches = [0, 1].map(|line| {
            let on: &Vec<usize> = &lines[line];
            let ln_f = |i: &usize| bins.all[*i].ln_f;
            let mut stretches = Vec::new();
            let mut from = 0;
            while from < on.len() {
                let low = ln_f(&on[from]);
                let to = on.partition_point(|i| ln_f(i) < low + STRETCH_RATIO.ln());
                let around = on.partition_point(|i| ln_f(i) < low - LINE_RATIO.ln())
                    ..on.partition_point(|i| ln_f(i) <= low + LINE_RATIO.ln());
                stretches.push(Stretch { own: from..to, around });
                from = to;
            }
            stretches
        });
        Self { members, middle, lines, stretches }
    }

    /// Mean background power at every bin of `Bins::all`: median ÷ ln 2 of each ring, joined by straight
    /// lines in ln P over ln f. Bins on an axis line are held against the line's own median where
    /// that is higher: stripes and seams fill the whole line, a grating only one place on it.
    pub fn background(&self, bins: &Bins, power: &[f32], floor: f64, scratch: &mut Vec<f32>) -> Vec<f64> {
        let level: Vec<f64> = self
            .members
            .iter()
            .map(|ring| {
                let median = median_of(ring.iter().map(|i| power[bins.all[*i].index]), scratch);
                mean_of_median(median, floor).ln()
            })
            .collect();
        let mut ring = 0;
        let mut background: Vec<f64> = bins
            .all
            .iter()
            .map(|bin| {
                while ring + 2 < self.middle.len() && bin.ln_f > self.middle[ring + 1] {
                    ring += 1;
                }
                match self.middle.get(ring + 1) {
                    None => level[ring].exp(),
                    Some(next) => {
                        let t = (bin.ln_f - self.middle[ring]) / (next - self.middle[ring]);
                        (level[ring] + t * (level[ring + 1] - level[ring])).exp()
                    }
                }
            })
            .collect();
        for (line, stretches) in self.lines.iter().zip(&self.stretches) {
            for Stretch { own, around } in stretches {
                let powers = line[around.clone()].iter().map(|i| power[bins.all[*i].index]);
                let level = mean_of_median(median_of(powers, scratch), floor);
                for i in &line[own.clone()] {
                    background[*i] = background[*i].max(level);
                }
            }
        }
        background
    }
}

/// The mean of an exponential distribution of this median, not below `floor`.
fn mean_of_median(median: f32, floor: f64) -> f64 {
    (f64::from(median) / std::f64::consts::LN_2).max(floor)
}

fn median_of(values: impl Iterator<Item = f32>, scratch: &mut Vec<f32>) -> f32 {
    scratch.clear();
    scratch.extend(values);
    if scratch.is_empty() {
        return 0.0;
    }
    let middle = scratch.len() / 2;
    *scratch.select_nth_unstable_by(middle, f32::total_cmp).1
}

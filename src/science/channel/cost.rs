//! What a step costs the pen: little along channels, much beside them.

use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::separable::smooth_valid;
use crate::science::axial::sources::{DERIVED, at};

use super::detect::ChannelTone;

pub static METHOD: Method = Method {
    id: "channel.pen-cost",
    name: "Cost of a step from the multi-scale ridge response",
    question: "How much does the picture look like the middle of a channel here?",
    formula: "R = max over σ of σ^{2γ} max(0, ±λ); v = ln(1 + R/c) / ln(1 + R₁/c), at most 1; cost = 1/(ε + v)^p",
    symbols: &[
        Symbol { symbol: "σ", meaning: "scale, from the narrowest to the widest channel", unit: "px" },
        Symbol {
            symbol: "λ",
            meaning: "the outer eigenvalue of the Hessian of the picture smoothed by σ, + for dark, − for bright channels",
            unit: "tone px⁻²",
        },
        Symbol {
            symbol: "γ",
            meaning: "¾, at which a Gaussian ridge answers most at its own width",
            unit: "1",
        },
        Symbol {
            symbol: "c",
            meaning: "three times the median of the positive R, at least R₁/30",
            unit: "tone",
        },
        Symbol { symbol: "R₁", meaning: "99.5 % quantile of the positive R", unit: "tone" },
        Symbol {
            symbol: "ε, p",
            meaning: "0.1 and 2: a step beside channels costs up to 121 times one along the best",
            unit: "1",
        },
    ],
    assumptions: &["The median of the positive response is that of the ground between channels."],
    limits: &[
        "Two strong edges close together, as between bright dunes, answer as a channel does.",
        "Channels wider than the widest stated answer at their banks.",
    ],
    sources: &[
        Source {
            key: "lindeberg1998",
            authors: "Lindeberg, T.",
            year: 1998,
            title: "Edge detection and ridge detection with automatic scale selection",
            published: "International Journal of Computer Vision 30, 117–154",
            locator: "",
            read: Read::Memory,
        },
        at(
            DERIVED,
            "logarithm of the response: weak channels count beside strong ones, and the middle of a strong one stays its cheapest line",
        ),
    ],
};

const EPSILON: f32 = 0.1;
/// cost = 1/(ε + v)².
fn cost_of(v: f32) -> f32 {
    let s = EPSILON + v;
    1.0 / (s * s)
}

/// Standard deviation of a bar of width w is w/√12; a Gaussian of that spread answers it best.
const SCALE_OF_WIDTH: f64 = 0.288_675;
/// Neighbouring scales; a channel between two answers within 4 % of its best.
const SCALE_STEP: f64 = 1.6;
/// Smoothing that remains to be done on a picture reduced for a wide scale, reduced pixels.
const FINE_SCALE: f64 = 2.0;
/// Rows a task handles.
const STRIP: usize = 64;

/// The scales of channels between two widths, pixels.
pub(super) fn scales(widths_px: [f64; 2]) -> Vec<f64> {
    let sane = |w: f64| if w.is_finite() { (w * SCALE_OF_WIDTH).clamp(0.8, 64.0) } else { 2.0 };
    let (low, high) = (sane(widths_px[0].min(widths_px[1])), sane(widths_px[0].max(widths_px[1])));
    let count = ((high / low).ln() / SCALE_STEP.ln()).ceil().max(0.0) as usize;
    let step = if count > 0 { (high / low).powf(1.0 / count as f64) } else { 1.0 };
    (0..=count).map(|i| low * step.powi(i as i32)).collect()
}

/// Cost of a step in each cell, > 0; infinite in missing cells.
///
/// # Errors
/// [`Stopped`].
pub(super) fn costs(
    image: &Grid<f32>,
    tone: ChannelTone,
    widths_px: [f64; 2],
    work: &Work,
) -> Result<Vec<f32>, Stopped> {
    let mut image = image.clone();
    let finite: Vec<bool> = image.values().iter().map(|v| v.is_finite()).collect();
    let width = image.width();
    image.mask_where(|c, r| finite[r * width + c]);
    let response = response(&image, tone, widths_px, work)?;
    let mut positive: Vec<f32> = (0..response.len())
        .filter(|i| response[*i] > 0.0 && image.mask().is_none_or(|mask| mask[*i]))
        .map(|i| response[i])
        .collect();
    let mut quantile = |p: f64| {
        let k = (p * positive.len().saturating_sub(1) as f64) as usize;
        if positive.is_empty() { 0.0 } else { *positive.select_nth_unstable_by(k, f32::total_cmp).1 }
    };
    let strongest = quantile(0.995);
    let c = (3.0 * quantile(0.5)).max(strongest / 30.0);
    let whole = if c > 0.0 { (strongest / c).ln_1p() } else { 1.0 };
    let v = |r: f32| if c > 0.0 { ((r / c).ln_1p() / whole).min(1.0) } else { 0.0 };
    work.advance(0)?;
    let mask = image.mask();
    Ok(response
        .par_iter()
        .enumerate()
        .map(|(i, r)| if mask.is_none_or(|mask| mask[i]) { cost_of(v(*r)) } else { f32::INFINITY })
        .collect())
}

/// R of every cell.
fn response(
    image: &Grid<f32>,
    tone: ChannelTone,
    widths_px: [f64; 2],
    work: &Work,
) -> Result<Vec<f32>, Stopped> {
    let (width, height) = (image.width(), image.height());
    let mut best = vec![0.0f32; width * height];
    let mut reduced = (1usize, image.clone());
    for sigma in scales(widths_px) {
        while sigma / (2 * reduced.0) as f64 >= FINE_SCALE {
            reduced = (2 * reduced.0, halved(&reduced.1));
        }
        let (factor, picture) = (reduced.0 as f64, &reduced.1);
        // Means over squares of `factor` pixels have smoothed by (factor² − 1)/12 already.
        let left = (sigma * sigma - (factor * factor - 1.0) / 12.0).max(0.25).sqrt() / factor;
        let smooth = smooth_valid(picture, [left, left], work)?;
        let gain = (sigma.powf(1.5) / (factor * factor)) as f32;
        let answer = answers(&smooth, tone, gain);
        raise(&mut best, width, &answer, reduced.0);
        work.advance(0)?;
    }
    Ok(best)
}

/// Means of 2 × 2 cells over the valid ones.
fn halved(image: &Grid<f32>) -> Grid<f32> {
    let (width, height) = (image.width().div_ceil(2), image.height().div_ceil(2));
    let mut valid = vec![false; width * height];
    let mut values = vec![0.0f32; width * height];
    for row in 0..height {
        for col in 0..width {
            let cells = [(0, 0), (1, 0), (0, 1), (1, 1)];
            let (sum, n) = cells
                .iter()
                .filter_map(|(c, r)| image.get(2 * col + c, 2 * row + r))
                .fold((0.0, 0), |(sum, n), v| (sum + v, n + 1));
            if n > 0 {
                values[row * width + col] = sum / n as f32;
                valid[row * width + col] = true;
            }
        }
    }
    Grid::from_parts(width, height, values, Some(valid))
}

/// gain · max(0, ±λ) of every cell; second differences, the border's taken from the cell inside.
fn answers(smooth: &Grid<f32>, tone: ChannelTone, gain: f32) -> Grid<f32> {
    let (width, height) = (smooth.width(), smooth.height());
    let mut out = vec![0.0f32; width * height];
    if width < 3 || height < 3 {
        return Grid::from_parts(width, height, out, None);
    }
    let values = smooth.values();
    let mask = smooth.mask();
    out.par_chunks_mut(STRIP * width).enumerate().for_each(|(strip, out)| {
        for (i, out) in out.iter_mut().enumerate() {
            let (col, row) = (i % width, strip * STRIP + i / width);
            let at = row.clamp(1, height - 2) * width + col.clamp(1, width - 2);
            let around = [0, 1, 2].map(|r| [0, 1, 2].map(|c| at + r * width + c - width - 1));
            if mask.is_some_and(|mask| around.iter().flatten().any(|i| !mask[*i])) {
                continue;
            }
            let v = around.map(|line| line.map(|i| values[i]));
            let xx = v[1][0] + v[1][2] - 2.0 * v[1][1];
            let yy = v[0][1] + v[2][1] - 2.0 * v[1][1];
            let xy = 0.25 * (v[2][2] + v[0][0] - v[0][2] - v[2][0]);
            let (mean, half) = (0.5 * (xx + yy), (0.25 * (xx - yy) * (xx - yy) + xy * xy).sqrt());
            *out = gain
                * match tone {
                    ChannelTone::Dark => (mean + half).max(0.0),
                    ChannelTone::Bright => (half - mean).max(0.0),
                    ChannelTone::EdgePair => (mean + half).max(half - mean).max(0.0),
                };
        }
    });
    Grid::from_parts(width, height, out, None)
}

/// Raises `best` to the answers of a reduced picture, taken between its cells.
fn raise(best: &mut [f32], width: usize, answer: &Grid<f32>, factor: usize) {
    let values = answer.values();
    let (w, h) = (answer.width(), answer.height());
    best.par_chunks_mut(STRIP * width.max(1)).enumerate().for_each(|(strip, best)| {
        for (line, best) in best.chunks_mut(width).enumerate() {
            let row = strip * STRIP + line;
            if factor == 1 {
                best.iter_mut().zip(&values[row * w..]).for_each(|(b, v)| *b = b.max(*v));
                continue;
            }
            let place = |i: usize, most: usize| {
                let x = ((i as f32 + 0.5) / factor as f32 - 0.5).clamp(0.0, (most - 1) as f32);
                (x as usize, (x as usize + 1).min(most - 1), x.fract())
            };
            let (r0, r1, fr) = place(row, h);
            let (upper, lower) = (&values[r0 * w..][..w], &values[r1 * w..][..w]);
            for (col, b) in best.iter_mut().enumerate() {
                let (c0, c1, fc) = place(col, w);
                let top = upper[c0] + fc * (upper[c1] - upper[c0]);
                let bottom = lower[c0] + fc * (lower[c1] - lower[c0]);
                *b = b.max(top + fr * (bottom - top));
            }
        }
    });
}

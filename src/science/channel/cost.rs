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
    formula: "r_σ = max(0, σ²(±λ) − κσ|∂_n|); R = max over σ of r_σ²/(r_σ + t_σ); v = ln(1 + R/c) / ln(1 + R₁/c), at most 2; cost = 1/(ε + v)^p",
    symbols: &[
        Symbol {
            symbol: "σ",
            meaning: "scale: half the width, from the narrowest to the widest channel",
            unit: "px",
        },
        Symbol {
            symbol: "λ",
            meaning: "the outer eigenvalue of the Hessian of the picture smoothed by σ; + for dark, − for bright channels",
            unit: "tone px⁻²",
        },
        Symbol {
            symbol: "∂_n",
            meaning: "slope of the smoothed picture along that eigenvector, zero in the middle of a channel and steep at a lone bank",
            unit: "tone px⁻¹",
        },
        Symbol {
            symbol: "κ",
            meaning: "1.5: a lone bank answers with a twentieth of a channel of its contrast",
            unit: "1",
        },
        Symbol {
            symbol: "t_σ",
            meaning: "three times the median of the positive r_σ: what the ground between channels gives",
            unit: "tone",
        },
        Symbol { symbol: "R₁", meaning: "99.5 % quantile of the positive R", unit: "tone" },
        Symbol { symbol: "c", meaning: "R₁/10", unit: "tone" },
        Symbol {
            symbol: "ε, p",
            meaning: "0.15 and 3: a step beside channels costs 450 times one along a strong channel",
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

const EPSILON: f32 = 0.15;
/// cost = 1/(ε + v)³.
fn cost_of(v: f32) -> f32 {
    let s = EPSILON + v;
    1.0 / (s * s * s)
}

/// Greatest v: twice what the 99.5 % quantile gives, so that thin channels in a wide picture keep a middle.
const MOST_V: f32 = 2.0;
/// κ.
const BANK: f32 = 1.5;
/// A bar of width w has its greatest σ²λ at σ = w/2.
const SCALE_OF_WIDTH: f64 = 0.5;
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
    let strongest = quantile(&response, 0.995);
    let c = 0.1 * strongest;
    let whole = 10f32.ln_1p();
    let v = |r: f32| if c > 0.0 { ((r / c).ln_1p() / whole).min(MOST_V) } else { 0.0 };
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
        let mut answer = answers(&smooth, tone, (sigma / factor) as f32);
        let floor = 3.0 * quantile(answer.values(), 0.5);
        answer.values_mut().iter_mut().filter(|r| **r > 0.0).for_each(|r| *r *= *r / (*r + floor));
        raise(&mut best, width, &answer, reduced.0);
        work.advance(0)?;
    }
    Ok(best)
}

/// A quantile of the positive numbers, about: of every n-th where there are many; 0 for none.
fn quantile(numbers: &[f32], p: f64) -> f32 {
    const MOST: usize = 200_000;
    // An odd stride does not fall in with the rows.
    let stride = (numbers.len() / MOST) | 1;
    let mut positive: Vec<f32> = numbers.iter().step_by(stride).copied().filter(|v| *v > 0.0).collect();
    let k = (p * positive.len().saturating_sub(1) as f64) as usize;
    if positive.is_empty() { 0.0 } else { *positive.select_nth_unstable_by(k, f32::total_cmp).1 }
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

/// r_σ of every cell, σ in cells; central differences, the border's taken from the cell inside.
fn answers(smooth: &Grid<f32>, tone: ChannelTone, sigma: f32) -> Grid<f32> {
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
            let slope = (0.5 * (v[1][2] - v[1][0]), 0.5 * (v[2][1] - v[0][1]));
            let dark = || across(xx, xy, yy, slope, sigma);
            let bright = || across(-xx, -xy, -yy, slope, sigma);
            *out = match tone {
                ChannelTone::Dark => dark(),
                ChannelTone::Bright => bright(),
                ChannelTone::EdgePair => dark().max(bright()),
            };
        }
    });
    Grid::from_parts(width, height, out, None)
}

/// max(0, σ²λ − κσ|∂_n|) with λ the larger eigenvalue of the Hessian and n its vector, whose projector is
/// (H − μ)/(λ − μ), μ the smaller one.
#[inline]
fn across(xx: f32, xy: f32, yy: f32, (gx, gy): (f32, f32), sigma: f32) -> f32 {
    let (mean, half) = (0.5 * (xx + yy), (0.25 * (xx - yy) * (xx - yy) + xy * xy).sqrt());
    if mean + half <= 0.0 {
        return 0.0;
    }
    let square = gx * gx + gy * gy;
    let along = xx * gx * gx + 2.0 * xy * gx * gy + yy * gy * gy;
    let part = if half > 0.0 { (along - (mean - half) * square) / (2.0 * half) } else { square };
    (sigma * sigma * (mean + half) - BANK * sigma * part.max(0.0).sqrt()).max(0.0)
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

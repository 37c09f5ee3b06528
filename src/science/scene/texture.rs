//! The texture of a ground with its pattern taken out: what bedforms are laid into.

use std::f64::consts::{LN_2, PI};

use crate::ground::{Grid, LocalFrame, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::quantile::of_sorted;
use crate::numeric::separable::smooth_valid;
use crate::numeric::transform::{Transform, quick_size_above};

/// The record of the texture.
pub static METHOD: Method = Method {
    id: "scene.texture",
    name: "Texture without its pattern",
    question: "What would this ground look like without its own bedforms?",
    formula: "F ↦ F √min(1, B/P̄) for 1/2λ ≤ |f| ≤ 2.5/λ;  P̄ = mean of |F|² in a cell of a ring and 15° of direction;  B = lower quartile of P̄ over the ring's cells, over 1 − 0.67/√n;  before that |F|² > 8 median/ln 2 of its ring is put back to median/ln 2",
    symbols: &[
        Symbol {
            symbol: "F",
            meaning: "Fourier amplitude of the tone less its large-scale part",
            unit: "tone",
        },
        Symbol { symbol: "λ", meaning: "spacing of the pattern", unit: "m" },
        Symbol {
            symbol: "P̄, B",
            meaning: "power of a cell, and the background it is put back to",
            unit: "tone²",
        },
        Symbol { symbol: "n", meaning: "independent amplitudes of a cell", unit: "1" },
    ],
    assumptions: &[
        "a pattern is power in some directions that others of the same wave length lack",
        "noise, such as speckle, is alike in all directions at the wave lengths of the pattern",
    ],
    limits: &[
        "phases stay: sharp crests keep a faint trace, a blur of the sensor along one direction is lost within the band",
        "within two spacings of gaps and of the border some of the pattern is left",
        "bedforms without any preferred trend under even light are taken for texture",
    ],
    sources: &[Source {
        key: "ventifact-texture",
        authors: "this program",
        year: 2026,
        title: "A pattern put back to the background of its rings",
        published: "derived here, checked on patterns laid into speckle",
        locator: "",
        read: Read::Derived,
    }],
};

/// The band of the pattern, in cycles per spacing.
const BAND: [f64; 2] = [0.5, 2.5];
/// Ratio of frequencies over a ring, and sectors of direction.
const RING: f64 = 1.3;
const SECTORS: usize = 12;
/// Power over its ring's background from which one amplitude alone is put back.
const SINGLE: f64 = 8.0;
/// Highest frequency looked at, cycles per pixel.
const HIGHEST: f64 = 0.45;
/// Scale of what stays as large-scale tone, in spacings.
const LARGE: f64 = 1.0;

/// A ground without its pattern.
#[derive(Clone, Debug, PartialEq)]
pub struct Emptied {
    pub tone: Grid<f32>,
    /// Mean square of the pattern's tone.
    pub removed: f64,
}

/// Takes the pattern of `spacing` (ground unit of `frame`) out of `tone`; missing pixels stay missing, noise and
/// large-scale tone stay. A grid without valid pixels comes back as it is.
///
/// # Errors
/// [`Stopped`].
pub fn without_pattern(
    tone: &Grid<f32>,
    frame: LocalFrame,
    spacing: f64,
    work: &Work,
) -> Result<Emptied, Stopped> {
    let (width, height, valid) = (tone.width(), tone.height(), tone.valid_count());
    if valid == 0 {
        return Ok(Emptied { tone: tone.clone(), removed: 0.0 });
    }
    let spacing_px = frame.pixel_size().map(|s| spacing / s);
    let large = smooth_valid(tone, spacing_px.map(|s| LARGE * s), work)?;
    let fine: Vec<f64> = (0..tone.len())
        .map(|i| {
            let at = (i % width, i / width);
            tone.get(at.0, at.1).map_or(0.0, |v| f64::from(v) - f64::from(large.at(at.0, at.1)))
        })
        .collect();
    let margin = spacing_px.map(|s| s.ceil() as usize);
    let size = [quick_size_above(width + margin[0]), quick_size_above(height + margin[1])];
    let mut transform = Transform::forward(&fine, width, size[0], size[1], work)?;
    let before = transform.powers();
    let padding = (size[0] * size[1]) as f64 / (width * height) as f64;
    let gains = gains(&transform, &before, frame, spacing, padding, work)?;
    // Parseval: Σ x² = Σ|F|²/N.
    let lost: f64 = before.iter().zip(&gains).map(|(p, gain)| p * (1.0 - gain * gain)).sum();
    let removed = lost / (size[0] * size[1]) as f64 / valid as f64;
    transform.scale(&gains);
    let left = transform.back(work)?;
    let values = (0..tone.len())
        .map(|i| {
            let (col, row) = (i % width, i / width);
            (f64::from(large.at(col, row)) + left[row * size[0] + col]) as f32
        })
        .collect();
    Ok(Emptied { tone: Grid::from_parts(width, height, values, tone.mask().map(<[bool]>::to_vec)), removed })
}

/// What every amplitude is multiplied by.
fn gains(
    transform: &Transform,
    power: &[f64],
    frame: LocalFrame,
    spacing: f64,
    padding: f64,
    work: &Work,
) -> Result<Vec<f64>, Stopped> {
    let rings = ((BAND[1] / BAND[0]).ln() / RING.ln()).ceil() as usize;
    let mut cells: Vec<Vec<usize>> = vec![Vec::new(); rings * SECTORS];
    for index in 0..power.len() {
        if index.is_multiple_of(1 << 16) {
            work.advance(0)?;
        }
        let pixel = transform.frequency(index);
        let (east, north) = frame.gradient(pixel[0], pixel[1]);
        let cycles = east.hypot(north) * spacing;
        if pixel.iter().any(|p| p.abs() > HIGHEST) || !(BAND[0]..BAND[1]).contains(&cycles) {
            continue;
        }
        let ring = (((cycles / BAND[0]).ln() / RING.ln()) as usize).min(rings - 1);
        // k and −k lie in one sector, so that the field stays real.
        let turn = east.atan2(north).rem_euclid(PI) / PI;
        cells[ring * SECTORS + ((turn * SECTORS as f64) as usize).min(SECTORS - 1)].push(index);
    }
    let mut gains = vec![1.0; power.len()];
    for ring in cells.chunks_exact(SECTORS) {
        work.advance(0)?;
        let mut all: Vec<f64> = ring.iter().flatten().map(|i| power[*i]).collect();
        if all.is_empty() {
            continue;
        }
        let middle = all.len() / 2;
        let background = *all.select_nth_unstable_by(middle, f64::total_cmp).1 / LN_2;
        for i in ring.iter().flatten().filter(|i| power[**i] > SINGLE * background) {
            gains[*i] = (background / power[*i]).sqrt();
        }
        let mean = |cell: &Vec<usize>| {
            cell.iter().map(|i| power[*i] * gains[*i].powi(2)).sum::<f64>() / cell.len().max(1) as f64
        };
        let means: Vec<f64> = ring.iter().map(mean).collect();
        let mut filled: Vec<f64> =
            ring.iter().zip(&means).filter(|(cell, _)| !cell.is_empty()).map(|(_, m)| *m).collect();
        filled.sort_unstable_by(f64::total_cmp);
        // k and −k are one amplitude.
        let independent = all.len() as f64 / (2.0 * padding * filled.len() as f64);
        let level = of_sorted(&filled, 0.25) / (1.0 - 0.67 / independent.max(4.0).sqrt());
        for (cell, mean) in ring.iter().zip(&means).filter(|(_, mean)| **mean > level) {
            cell.iter().for_each(|i| gains[*i] *= (level / mean).sqrt());
        }
    }
    Ok(gains)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Axis, Seed};
    use crate::science::scene::{Grating, picture, speckle};

    const FRAME: LocalFrame =
        LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };

    /// ln of four-look speckle with a slope of tone.
    fn noise() -> Grid<f32> {
        let grain = speckle(200, 160, 4.0, &mut Seed(5).stream("test", 0));
        Grid::from_fn(200, 160, |c, r| grain.at(c, r).ln() + 0.004 * c as f32)
    }

    fn energy(grid: &Grid<f32>, other: &Grid<f32>) -> f64 {
        let n = grid.len() as f64;
        grid.values().iter().zip(other.values()).map(|(a, b)| f64::from(a - b).powi(2)).sum::<f64>() / n
    }

    #[test]
    fn a_grating_is_taken_out_and_noise_stays() {
        let noise = noise();
        let wave = Grating { amplitude: 0.8, ..Grating::new(Axis::from_deg(35.0), 9.0) };
        let pattern = picture(200, 160, FRAME, |e, n| wave.tone(e, n));
        let mixed = Grid::from_fn(200, 160, |c, r| noise.at(c, r) + pattern.at(c, r));
        let emptied = without_pattern(&mixed, FRAME, 9.0, &Work::quiet()).unwrap();
        let (own, left) = (0.32, energy(&emptied.tone, &noise));
        println!("grating of power {own}: left {left:.4}, said to be taken out {:.4}", emptied.removed);
        assert!(left < 0.12 * own, "{left}");
        crate::assert_close!(emptied.removed, own, 0.06, "power taken out");
    }

    #[test]
    fn noise_alone_is_hardly_touched_and_gaps_stay() {
        let mut noise = noise();
        noise.mask_where(|c, r| !(60..90).contains(&c) || r > 50);
        let emptied = without_pattern(&noise, FRAME, 9.0, &Work::quiet()).unwrap();
        assert_eq!(emptied.tone.mask(), noise.mask());
        println!("noise of variance 0.28: {:.4} taken out", emptied.removed);
        assert!(emptied.removed < 0.02, "{}", emptied.removed);
    }

    #[test]
    fn nothing_is_nothing() {
        let mut none = Grid::filled(3, 2, 1.0f32);
        none.mask_where(|_, _| false);
        assert_eq!(without_pattern(&none, FRAME, 9.0, &Work::quiet()).unwrap().removed, 0.0);
        let one = without_pattern(&Grid::filled(1, 1, 2.0f32), FRAME, 9.0, &Work::quiet()).unwrap();
        assert_eq!(one.tone.at(0, 0), 2.0);
    }
}

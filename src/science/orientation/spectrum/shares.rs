//! Whose is the variance of tone: the power above the background, given to the nearest of several waves.

use std::f64::consts::LN_2;

use crate::ground::{Axis, Grid, LocalFrame, Place, Point, Polygon, Stopped, Work};
use crate::numeric::fft::PowerPlan;

use super::super::gradient::Tone;
use super::Scale;
use super::bins::{Bin, Bins};
use super::windows::Scene;

/// A bin belongs to a wave within an octave and 45° of it, the nearest in units of these.
const NEAR_LN: f64 = 0.35;
const NEAR_DEG: f64 = 20.0;
const FAR_LN: f64 = LN_2;
const FAR_DEG: f64 = 45.0;
/// Bins further than this from every wave's normal stand for the background.
const AWAY_DEG: f64 = 30.0;
/// Width of a background ring, ln of the frequency, and the fewest bins in it.
const RING_LN: f64 = 0.25;
const RING_BINS: usize = 12;
/// Wavelengths of the longest wave a window holds, at least and if possible; windows looked at.
const FEWEST_CYCLES: f64 = 4.0;
const CYCLES: f64 = 6.0;
const MOST_WINDOWS: usize = 256;
const LARGEST: f64 = 1024.0;

/// A population as the spectrum sees it.
pub struct Wave {
    pub axis: Axis,
    /// Pixels of the finer ground direction.
    pub spacing_px: f64,
    /// Its texture at nodes all over the patch, 0 where it is not; pixel coordinates of the image, any unit.
    pub texture: Vec<(Point, f64)>,
}

/// Share of each wave in the variance of tone that stands above the background; `None` where the patch holds fewer than
/// four of the longest spacing, or nothing stands out. Tapered windows weigh the middle of the patch most: the ratio of
/// variance to texture is taken from them and the texture from all nodes.
///
/// # Errors
/// [`Stopped`].
pub fn variance_shares(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    logarithm: bool,
    waves: &[Wave],
    work: &Work,
) -> Result<Option<Vec<f64>>, Stopped> {
    let tone = if logarithm { Tone::logarithm(image) } else { Tone::Linear };
    let Some(scene) = Scene::new(image, patch, tone, place) else { return Ok(None) };
    let Some(frame) = place.local_frame(scene.centre()) else { return Ok(None) };
    let scale = Scale::new(frame);
    let longest = waves.iter().map(|w| w.spacing_px).fold(0.0, f64::max);
    let shortest = waves.iter().map(|w| w.spacing_px).fold(f64::INFINITY, f64::min);
    let extent = scene.extent();
    let room = (extent[0] as f64 * scale.pixel[0]).min(extent[1] as f64 * scale.pixel[1]).min(LARGEST);
    let mut side = (CYCLES * longest).min(room);
    let windows = loop {
        if side < FEWEST_CYCLES * longest || side.is_nan() {
            return Ok(None);
        }
        let windows = scene.windows(scale.window(side), MOST_WINDOWS, work)?;
        if !windows.origins.is_empty() {
            break windows;
        }
        side *= 0.9;
    };
    let band = [0.5 / (longest * scale.fine), 2.0 / (shortest * scale.fine)];
    let bins = Bins::new(windows.size, windows.size, frame, band);
    let owners: Vec<Option<usize>> = bins.all.iter().map(|b| owner(b, frame, waves, scale.fine)).collect();
    let plan = PowerPlan::new(windows.size[0], windows.size[1]);
    let mut power = vec![0.0f64; bins.all.len()];
    let mut within = vec![0.0f64; waves.len()];
    work.phase("spectrum: shares", windows.origins.len() as u64);
    scene.powers(
        &windows,
        &plan,
        work,
        |number, tapered, power| {
            let power: Vec<f64> =
                bins.all.iter().map(|b| f64::from(power[b.index]) / tapered.square).collect();
            let (corner, size) = (scene.corner(windows.origins[number]), windows.size);
            let texture: Vec<f64> = waves.iter().map(|w| tapered_mean(&w.texture, corner, size)).collect();
            (power, texture)
        },
        |(one, texture)| {
            power.iter_mut().zip(&one).for_each(|(p, o)| *p += o);
            within.iter_mut().zip(&texture).for_each(|(s, t)| *s += t);
        },
    )?;
    let background = background(&bins, &power, frame, waves);
    let mut sums = vec![0.0f64; waves.len()];
    for ((owner, power), background) in owners.iter().zip(&power).zip(&background) {
        if let Some(owner) = owner {
            sums[*owner] += power - background;
        }
    }
    for ((sum, wave), within) in sums.iter_mut().zip(waves).zip(&within) {
        let all = wave.texture.iter().map(|t| t.1).sum::<f64>() / wave.texture.len().max(1) as f64;
        *sum = if *within > 0.0 { (*sum * all / within).max(0.0) } else { sum.max(0.0) };
    }
    let all: f64 = sums.iter().sum();
    Ok((all > 0.0).then(|| sums.iter().map(|s| s / all).collect()))
}

/// Mean texture of the nodes in a window under the square of its taper.
fn tapered_mean(texture: &[(Point, f64)], corner: Point, size: [usize; 2]) -> f64 {
    let taper = |x: f64, n: usize| {
        let share = x / n as f64;
        if (0.0..1.0).contains(&share) { (std::f64::consts::PI * share).sin().powi(2) } else { 0.0 }
    };
    let (mut sum, mut weight) = (0.0, 0.0);
    for (at, value) in texture {
        let w = (taper(at.x - corner.x, size[0]) * taper(at.y - corner.y, size[1])).powi(2);
        sum += w * value;
        weight += w;
    }
    if weight > 0.0 { sum / weight } else { 0.0 }
}

/// The trend and ln of the ground frequency of a bin.
fn trend_of(bin: &Bin, frame: LocalFrame) -> Axis {
    let (east, north) = frame.gradient(bin.pixel[0], bin.pixel[1]);
    Axis::from_east_north(east, north).perpendicular()
}

fn owner(bin: &Bin, frame: LocalFrame, waves: &[Wave], fine: f64) -> Option<usize> {
    let trend = trend_of(bin, frame);
    let distance = |wave: &Wave| {
        let (ln, deg) = (bin.ln_f + (wave.spacing_px * fine).ln(), trend.separation(wave.axis));
        (ln.abs() <= FAR_LN && deg <= FAR_DEG).then(|| (ln / NEAR_LN).powi(2) + (deg / NEAR_DEG).powi(2))
    };
    let near = waves.iter().enumerate().filter_map(|(i, w)| Some((i, distance(w)?)));
    near.min_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
}

/// Mean power of bins away from all waves, in rings of frequency.
fn background(bins: &Bins, power: &[f64], frame: LocalFrame, waves: &[Wave]) -> Vec<f64> {
    let away = |b: &Bin| {
        let trend = trend_of(b, frame);
        b.line.is_none() && waves.iter().all(|w| trend.separation(w.axis) > AWAY_DEG)
    };
    let mut level = vec![0.0; bins.all.len()];
    let mut from = 0;
    let mut last = 0.0;
    for to in 1..=bins.all.len() {
        if to < bins.all.len() && bins.all[to].ln_f - bins.all[from].ln_f < RING_LN {
            continue;
        }
        let mut ring: Vec<f64> = (from..to).filter(|i| away(&bins.all[*i])).map(|i| power[i]).collect();
        if ring.len() >= RING_BINS {
            ring.sort_by(f64::total_cmp);
            // Several windows are summed, so the median is nearly the mean.
            last = ring[ring.len() / 2];
        }
        level[from..to].fill(last);
        from = to;
    }
    level
}

//! Numbers from windows fitted to the spacing: centre, intervals, spread, contrast, other peaks.

use crate::ground::{Axis, LocalFrame, Stopped, Work};
use crate::numeric::fft::PowerPlan;

use super::background::Rings;
use super::bins::{Bin, Bins};
use super::detect::{Survey, floor, ln_global_p, ratio_floor, ratios};
use super::locate::{Share, half_bin, log_parabola, scatter, settle, width};
use super::windows::{Scene, Windows};
use super::{Peak, Scale, Spectrum, SpectrumSettings, picture};

/// ln of the frequency ratio kept around the peak, and of the half octave moments are taken over.
const STRETCH: f64 = 0.42;
const HALF_OCTAVE: f64 = 0.5 * std::f64::consts::LN_2;

/// Standard deviation of the Hann taper's own peak, in bins of the window: √(⟨w′²⟩/⟨w²⟩)/2π.
const TAPER_BINS: f64 = 0.577_350_269;

/// Windows measured; they are set apart on larger patches.
const MOST_WINDOWS: usize = 1024;

/// Other peaks listed, and how much weaker than the first they may be.
const OTHERS: usize = 3;
const WEAKEST: f64 = 0.05;

/// What one window gives.
struct Reading {
    ratio: Vec<f32>,
    share: Share,
    /// Highest ratio near the peak.
    local: f32,
    level: f64,
    /// Variance of tone within half an octave of the peak.
    variance: f64,
}

/// All windows of the fitted size together.
pub(super) struct Mean {
    pub bins: Bins,
    pub frame: LocalFrame,
    /// Mean power over background at every bin of `bins.all`.
    pub ratio: Vec<f64>,
}

/// The part of the spectrum around the peak.
struct Stretch {
    from: usize,
    to: usize,
    /// Where the detection saw the peak, cycles per pixel.
    seen: [f64; 2],
}

/// Measures the peak that `best` detected, in windows of `size` fine pixels.
pub(super) fn measure(
    scene: &Scene,
    scale: &Scale,
    size: f64,
    best: &Survey,
    defined: bool,
    settings: &SpectrumSettings,
    work: &Work,
) -> Result<Spectrum, Stopped> {
    let window = scale.window(size);
    let windows = scene.windows(window, MOST_WINDOWS, work)?;
    let padded = window.map(|n| 2 * n);
    let seen = best.bins.all[best.peak];
    let mut band = scale.band(size, settings);
    // A window fitted to a long spacing may hold fewer than three cycles of it.
    band[0] = band[0].min((seen.ln_f - STRETCH).exp());
    let bins = Bins::new(window, padded, scale.frame, band).along(scale.frame, scale.trend);
    if windows.origins.is_empty() || bins.band().is_empty() {
        return Ok(Spectrum::default());
    }
    let stretch = Stretch {
        from: bins.all.partition_point(|b| b.ln_f < seen.ln_f - STRETCH),
        to: bins.all.partition_point(|b| b.ln_f <= seen.ln_f + STRETCH),
        seen: seen.pixel,
    };
    let rings = Rings::new(&bins, scale.frame, Some(seen.pixel));
    let plan = PowerPlan::new(padded[0], padded[1]);
    let mut ratio = vec![0.0f64; bins.all.len()];
    let mut readings = Vec::new();
    work.phase("spectrum: spacing and trend", windows.origins.len() as u64);
    scene.powers(
        &windows,
        &plan,
        work,
        |number, tapered, power| {
            let background = rings.background(&bins, power, floor(&bins, power), &mut Vec::new());
            let ratio = ratios(&bins, power, &background);
            let near = stretch.from..stretch.to;
            let mean = near.clone().map(|i| f64::from(power[bins.all[i].index])).sum::<f64>()
                / near.len().max(1) as f64;
            let excess = |i: usize| f64::from(power[bins.all[i].index]) - background[i];
            let half: f64 = near
                .clone()
                .filter(|i| (bins.all[*i].ln_f - seen.ln_f).abs() <= HALF_OCTAVE)
                .map(excess)
                .sum();
            Reading {
                local: near
                    .clone()
                    .filter(|i| close(&bins.all[*i], &stretch, &bins))
                    .map(|i| ratio[i])
                    .fold(0.0, f32::max),
                share: Share {
                    window: number,
                    frame: tapered.frame,
                    excess: near.map(|i| if mean > 0.0 { (excess(i) / mean) as f32 } else { 0.0 }).collect(),
                },
                ratio,
                level: tapered.level,
                variance: 2.0 * half / ((padded[0] * padded[1]) as f64 * tapered.square),
            }
        },
        |reading: Reading| {
            ratio.iter_mut().zip(&reading.ratio).for_each(|(s, r)| *s += f64::from(*r));
            readings.push(Reading { ratio: Vec::new(), ..reading });
        },
    )?;
    if readings.is_empty() {
        return Ok(Spectrum::default());
    }
    ratio.iter_mut().for_each(|r| *r /= readings.len() as f64);
    let mean = Mean { bins, frame: scale.frame, ratio };
    let independent = windows.independent();
    let peak = locate(&mean, &stretch, &windows, independent, readings, settings, scene.tone);
    let direction = peak.map(|(p, _)| p.axis);
    let others = match (defined, peak) {
        (true, Some((p, _))) => others(&mean, p, independent, size * scale.fine, settings.significance),
        _ => Vec::new(),
    };
    Ok(Spectrum {
        defined,
        others,
        p: None,
        windows: windows.origins.len(),
        windows_with_peak: peak.map_or(0, |(_, n)| n),
        window_px: size,
        cycles: peak.map(|(p, _)| size * scale.fine / p.spacing),
        picture: picture::north_up(&mean, settings.shortest_spacing_px * scale.fine),
        profile: direction.map_or_else(Vec::new, |axis| picture::profile(&mean, axis)),
        peak: peak.map(|(p, _)| p),
        cautions: Vec::new(),
    })
}

/// Within two bins of the window from where the peak was seen.
fn close(bin: &Bin, stretch: &Stretch, bins: &Bins) -> bool {
    (0..2).all(|i| (bin.pixel[i] - stretch.seen[i]).abs() * bins.window[i] as f64 <= 2.0)
}

/// The peak and the number of windows that show it on their own.
fn locate(
    mean: &Mean,
    stretch: &Stretch,
    windows: &Windows,
    independent: f64,
    readings: Vec<Reading>,
    settings: &SpectrumSettings,
    tone: super::Tone,
) -> Option<(Peak, usize)> {
    let bins = &mean.bins;
    let near = &bins.all[stretch.from..stretch.to];
    let sought = (stretch.from..stretch.to).filter(|i| bins.all[*i].sought);
    let top = sought.max_by(|a, b| mean.ratio[*a].total_cmp(&mean.ratio[*b]))?;
    let bin = ground_bin(bins, mean.frame);
    let tested = readings.len() as f64;
    let local = near.iter().filter(|b| close(b, stretch, bins)).count() as f64 * bins.independent()
        / bins.band().len() as f64;
    let local_floor = ratio_floor(local.max(1.0), settings.significance);
    let with_peak = readings.iter().filter(|r| f64::from(r.local) > local_floor).count();
    let variance = readings.iter().map(|r| r.variance).sum::<f64>() / tested;
    let level = match tone {
        super::Tone::Linear => (readings.iter().map(|r| r.level).sum::<f64>() / tested).abs(),
        super::Tone::Logarithm { .. } => 1.0,
    };
    let shares: Vec<Share> = readings.into_iter().map(|r| r.share).collect();
    let start = sub_bin(mean, stretch, top);
    let first = settle(&shares, near, start, 1.5 * bin).unwrap_or(start);
    let length = first[0].hypot(first[1]);
    let h = width(&shares, near, first).clamp(1.2 * bin, (0.35 * length).max(1.2 * bin));
    let centre = settle(&shares, near, first, h).unwrap_or(first);
    let frequency = centre[0].hypot(centre[1]);
    let cycles = frequency / bin;
    let ratio = mean.ratio[top];
    // Half-bin limit, the whole story for a few windows; otherwise the bound for one wave in noise.
    let limit = half_bin(cycles);
    let bound = 1.96 * (24.0 / (9.0 * ratio.max(1e-9))).sqrt()
        / (2.0 * std::f64::consts::PI * cycles)
        / independent.max(1.0).sqrt();
    let half = match scatter(&shares, near, windows, independent, centre, h) {
        Some(half) => half.map(|v| v.max(bound)),
        None => [limit.max(bound); 2],
    };
    let spacing = 1.0 / frequency;
    let peak = Peak {
        axis: Axis::from_east_north(centre[0], centre[1]).perpendicular(),
        axis_ci95_half_deg: half[0].to_degrees().min(90.0),
        spacing,
        spacing_ci95: [spacing * (-half[1]).exp(), spacing * half[1].exp()],
        ratio,
        spread_deg: spread(&shares, near, centre, TAPER_BINS / cycles),
        contrast: if level > 0.0 { variance.max(0.0).sqrt() / level } else { 0.0 },
    };
    Some((peak, with_peak))
}

/// One bin of the unpadded window on the ground, cycles per ground unit (windows are square there).
fn ground_bin(bins: &Bins, frame: LocalFrame) -> f64 {
    let step = |c: f64, r: f64| {
        let (e, n) = frame.gradient(c, r);
        e.hypot(n)
    };
    let [cols, rows] = bins.window.map(|n| n as f64);
    (step(1.0 / cols, 0.0) * step(0.0, 1.0 / rows)).sqrt()
}

/// Log-parabola through the mean ratio along both pixel axes, as a ground wave vector.
fn sub_bin(mean: &Mean, stretch: &Stretch, top: usize) -> [f64; 2] {
    let bins = &mean.bins;
    let here = bins.all[top].pixel;
    let step = [1.0 / bins.padded[0] as f64, 1.0 / bins.padded[1] as f64];
    let at = |offset: [f64; 2]| {
        let wanted = [here[0] + offset[0], here[1] + offset[1]];
        let same = |p: [f64; 2], sign: f64| (0..2).all(|i| (p[i] - sign * wanted[i]).abs() < 0.25 * step[i]);
        (stretch.from..stretch.to)
            .find(|i| same(bins.all[*i].pixel, 1.0) || same(bins.all[*i].pixel, -1.0))
            .map_or(0.0, |i| mean.ratio[i])
    };
    let middle = mean.ratio[top];
    let shift = [0, 1].map(|i| {
        let along = |s: f64| at([0, 1].map(|j| if i == j { s * step[j] } else { 0.0 }));
        log_parabola(along(-1.0), middle, along(1.0)) * step[i]
    });
    let (e, n) = mean.frame.gradient(here[0] + shift[0], here[1] + shift[1]);
    [e, n]
}

/// Axial standard deviation ½√(−2 ln R̄) of excess power over doubled direction within half an octave of
/// the peak, degrees, less `own` (radians) in quadrature.
fn spread(shares: &[Share], bins: &[Bin], centre: [f64; 2], own: f64) -> Option<f64> {
    let frequency = centre[0].hypot(centre[1]);
    let (mut sum, mut c, mut s) = (0.0, 0.0, 0.0);
    for share in shares {
        for (bin, excess) in bins.iter().zip(&share.excess) {
            let (e, n) = share.frame.gradient(bin.pixel[0], bin.pixel[1]);
            let f = e.hypot(n);
            if (f / frequency).ln().abs() <= HALF_OCTAVE {
                let x = f64::from(*excess);
                let (sin, cos) = (2.0 * e.atan2(n)).sin_cos();
                sum += x;
                c += x * cos;
                s += x * sin;
            }
        }
    }
    let length = c.hypot(s) / sum;
    if !(sum > 0.0 && length > 0.0) {
        return None;
    }
    let variance = -0.5 * length.min(1.0).ln();
    Some((variance - own * own).max(0.0).sqrt().to_degrees())
}

/// Further peaks of the mean ratio that pass the test and are told apart from stronger ones.
fn others(
    mean: &Mean,
    first: Peak,
    independent: f64,
    window: f64,
    significance: f64,
) -> Vec<(Axis, f64, f64)> {
    let bins = &mean.bins;
    let mut order: Vec<usize> = (bins.band_from..bins.band_to).filter(|i| bins.all[*i].sought).collect();
    order.sort_by(|a, b| mean.ratio[*b].total_cmp(&mean.ratio[*a]).then(a.cmp(b)));
    let mut taken: Vec<(Axis, f64, f64)> = vec![(first.axis, first.spacing, first.ratio)];
    for i in order {
        let ratio = mean.ratio[i];
        let passes = ln_global_p(ratio, independent, bins.independent()) <= significance.ln();
        if !passes || ratio < WEAKEST * first.ratio || taken.len() > OTHERS {
            break;
        }
        let (e, n) = mean.frame.gradient(bins.all[i].pixel[0], bins.all[i].pixel[1]);
        let (axis, spacing) = (Axis::from_east_north(e, n).perpendicular(), 1.0 / e.hypot(n));
        let apart = taken.iter().all(|(a, l, _)| {
            // Beyond the taper's main lobe of the other, and not one of its harmonics.
            let order = (l / spacing).round().max(1.0);
            let turn = axis.separation(*a).to_radians();
            let (across, along) = (turn.sin() / l, turn.cos() / l - 1.0 / (spacing * order));
            let lobe = 3.0 / window;
            across.abs() > lobe
                || along.abs() * order > lobe && turn.to_degrees() > 10.0
                || (order < 1.5 && (l / spacing).ln().abs() > 0.35)
        });
        if apart {
            taken.push((axis, spacing, ratio));
        }
    }
    taken.split_off(1)
}

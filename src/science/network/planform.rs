//! Planform of a channel: sinuosity, meanders, curvature, width.

use crate::ground::{Method, Network, Place, Point, Polyline, Station, Symbol};
use crate::numeric::quantile;
use crate::numeric::tail::student_two_sided;
use crate::science::axial::sources::{DERIVED, at};

use super::course::{Course, length};
use super::meanders::{LANGBEIN, bends, by_inflections, by_spectrum, radii};

pub static METHOD: Method = Method {
    id: "network.planform",
    name: "Sinuosity against a smoothed valley line",
    question: "How much longer is the channel than its valley?",
    formula: "K = L_channel / L_valley; valley line: the channel smoothed by a Gaussian of σ = scale/2 along itself; sine-generated θ = ω sin(2πs/M) has K = 1/J₀(ω)",
    symbols: &[
        Symbol { symbol: "L", meaning: "length of channel and valley line", unit: "m" },
        Symbol {
            symbol: "scale",
            meaning: "length below which bends belong to the channel, above which to the valley",
            unit: "m",
        },
        Symbol {
            symbol: "ω, M",
            meaning: "greatest direction and wavelength along the channel of the test curve",
            unit: "rad, m",
        },
    ],
    assumptions: &[
        "The channel is first cleaned of what is shorter than a few cells, since steps from cell to cell are not bends.",
    ],
    limits: &[
        "K depends on the scale: it is given for others too.",
        "The parts within one scale of either end do not count where the channel is longer than four, since the line is pinned there.",
        "n_eff of widths: n/(1 + 2Σρ_k) up to the first lag without correlation.",
    ],
    sources: &[LANGBEIN, at(DERIVED, "scale, ends and interval of the mean width")],
};

/// One channel path, outlet last.
#[derive(Clone, Debug, PartialEq)]
pub struct Planform {
    /// Reaches it is made of, downstream.
    pub reaches: Vec<usize>,
    /// In the unit of the raster's place, as all lengths here.
    pub length: f64,
    /// The line the valley takes, smoothed over `valley_scale`, in pixels.
    pub valley: Polyline,
    pub valley_scale: f64,
    pub valley_length: f64,
    /// Channel over valley length, without the parts within one scale of either end where there is enough
    /// between.
    pub sinuosity: f64,
    /// Sinuosity for other valley scales: (scale, sinuosity).
    pub sinuosity_by_scale: Vec<[f64; 2]>,
    /// From the spectrum of direction along the channel.
    pub wavelength_spectrum: Option<Meander>,
    /// Twice the spacing of inflections.
    pub wavelength_inflections: Option<Meander>,
    /// Radius of curvature at bends: median and quartiles.
    pub radius: Option<[f64; 3]>,
    pub bends: usize,
    pub width: Option<WidthStatistics>,
    /// Wavelength over width; near 11 in free meanders.
    pub wavelength_widths: Option<f64>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Meander {
    /// Along the valley.
    pub wavelength: f64,
    /// Along the channel.
    pub arc_wavelength: f64,
    pub ci95: Option<[f64; 2]>,
    /// Half the distance from side to side, across the valley.
    pub amplitude: f64,
}

#[derive(Clone, Debug, PartialEq)]
pub struct WidthStatistics {
    pub n: usize,
    pub n_eff: f64,
    pub mean: f64,
    pub mean_ci95: Option<[f64; 2]>,
    pub quartiles: [f64; 3],
    /// (distance from the head, width) along the path.
    pub along: Vec<[f64; 2]>,
}

/// Shares and multiples of the valley scale at which sinuosity is given too.
const SCALES: [f64; 7] = [0.25, 0.354, 0.5, 0.707, 1.0, 1.414, 2.0];
/// Cells over which a course is cleaned.
const CLEAN_CELLS: f64 = 2.0;
/// A path shorter than so many cells has no planform.
const LEAST_CELLS: f64 = 20.0;

/// The trunk first, then the longest other channels, `most` in all. The valley scale is `valley_scale_widths`
/// mean widths, or as many cells where no width is known; `cell` is the size of a cell in the unit of the
/// place. Where the senses run in a circle each reach stands for itself.
pub fn planforms(
    network: &Network,
    place: &Place,
    valley_scale_widths: f64,
    cell: f64,
    most: usize,
) -> Vec<Planform> {
    if !(cell > 0.0 && cell.is_finite() && valley_scale_widths > 0.0 && valley_scale_widths.is_finite()) {
        return Vec::new();
    }
    channels(network, most)
        .into_iter()
        .filter_map(|reaches| planform(network, reaches, place, valley_scale_widths, cell))
        .collect()
}

/// Chains of reaches: again and again the longest way down over reaches not yet taken.
fn channels(network: &Network, most: usize) -> Vec<Vec<usize>> {
    let Some(sequence) = network.downstream_sequence() else {
        let mut single: Vec<usize> = (0..network.reaches.len()).collect();
        let length = |r: &usize| network.reaches[*r].length;
        single.sort_by(|a, b| length(b).total_cmp(&length(a)).then(a.cmp(b)));
        return single.into_iter().take(most).map(|r| vec![r]).collect();
    };
    let out = network.outgoing();
    let mut taken = vec![false; network.reaches.len()];
    let mut chains = Vec::new();
    while chains.len() < most {
        let mut best: Vec<(f64, Option<usize>)> = vec![(0.0, None); network.nodes.len()];
        for node in sequence.iter().rev() {
            for &reach in out[*node].iter().filter(|r| !taken[**r]) {
                let way = network.reaches[reach].length + best[network.reaches[reach].to].0;
                if best[*node].1.is_none() || way > best[*node].0 {
                    best[*node] = (way, Some(reach));
                }
            }
        }
        let start = (0..best.len())
            .filter(|n| best[*n].1.is_some())
            .max_by(|a, b| best[*a].0.total_cmp(&best[*b].0).then(b.cmp(a)));
        let mut next = start.and_then(|node| best[node].1);
        if next.is_none() {
            break;
        }
        let mut chain = Vec::new();
        while let Some(reach) = next {
            taken[reach] = true;
            chain.push(reach);
            next = best[network.reaches[reach].to].1;
        }
        chains.push(chain);
    }
    chains
}

fn planform(
    network: &Network,
    reaches: Vec<usize>,
    place: &Place,
    valley_scale_widths: f64,
    cell: f64,
) -> Option<Planform> {
    let width = widths(network, &reaches);
    let scale = valley_scale_widths * width.as_ref().map_or(cell, |w| w.mean);
    let raw = Course::along(network, &reaches, place, 0.5 * cell)?;
    if raw.length() < LEAST_CELLS * cell {
        return None;
    }
    let course = raw.cleaned(CLEAN_CELLS * cell);
    let (valley, line) = course.valley(0.5 * scale);
    let sinuosity_at = |scale: f64, line: &[Point]| {
        let n = course.ground.len();
        let skip = (scale / course.step) as usize;
        let inner = if 4 * skip < n { skip..n - skip } else { 0..n };
        let valley = length(&line[inner.clone()]);
        if valley > 0.0 { length(&course.ground[inner]) / valley } else { f64::INFINITY }
    };
    let sinuosity = sinuosity_at(scale, &line);
    if !sinuosity.is_finite() {
        return None;
    }
    let by_scale = |share: &f64| {
        let scale = share * scale;
        [scale, sinuosity_at(scale, &course.valley(0.5 * scale).1)]
    };
    let wavelength_spectrum = by_spectrum(&course, &line, sinuosity);
    // Scatter makes inflections of its own; a sixteenth of the wavelength leaves its bends 99.5 % of their turn.
    let clean = wavelength_spectrum.map_or(0.0, |m| m.arc_wavelength / 16.0).max(2.0 * CLEAN_CELLS * cell);
    let calm = course.cleaned(clean);
    let bends = bends(&calm);
    let wavelength_inflections = by_inflections(&calm, &bends);
    let wavelength = wavelength_spectrum.or(wavelength_inflections).map(|m| m.wavelength);
    Some(Planform {
        length: course.length(),
        valley_scale: scale,
        valley_length: length(&line),
        valley,
        sinuosity,
        sinuosity_by_scale: SCALES.iter().map(by_scale).filter(|s| s[1].is_finite()).collect(),
        wavelength_spectrum,
        wavelength_inflections,
        radius: radii(&calm, &bends),
        bends: bends.len(),
        wavelength_widths: wavelength.zip(width.as_ref()).map(|(l, w)| l / w.mean),
        width,
        reaches,
    })
}

/// Widths along a path; `None` where none is known.
fn widths(network: &Network, reaches: &[usize]) -> Option<WidthStatistics> {
    let mut along = Vec::new();
    let mut start = 0.0;
    for reach in reaches.iter().map(|r| &network.reaches[*r]) {
        let known = |s: &Station| s.width.filter(|w| *w > 0.0 && w.is_finite()).map(|w| [start + s.along, w]);
        along.extend(reach.stations.iter().filter_map(known));
        start += reach.length;
    }
    let mut sorted: Vec<f64> = along.iter().map(|a| a[1]).collect();
    let n = sorted.len();
    if n == 0 {
        return None;
    }
    let mean = sorted.iter().sum::<f64>() / n as f64;
    let away: Vec<f64> = sorted.iter().map(|w| w - mean).collect();
    let variance = away.iter().map(|d| d * d).sum::<f64>();
    let mut related = 1.0;
    if variance > 0.0 {
        for lag in 1..n / 2 {
            let rho = away.iter().zip(&away[lag..]).map(|(a, b)| a * b).sum::<f64>() / variance;
            if rho <= 0.0 {
                break;
            }
            related += 2.0 * rho;
        }
    }
    let n_eff = (n as f64 / related).clamp(1.0, n as f64);
    let sd = (variance / (n as f64 - 1.0).max(1.0)).sqrt();
    let half = student_two_sided(0.95, (n_eff - 1.0).max(1.0)) * sd / n_eff.sqrt();
    Some(WidthStatistics {
        n,
        n_eff,
        mean,
        mean_ci95: (n_eff > 2.0).then_some([(mean - half).max(0.0), mean + half]),
        quartiles: quantile::of(&mut sorted, [0.25, 0.5, 0.75]),
        along,
    })
}

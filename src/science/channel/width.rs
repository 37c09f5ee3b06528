//! Banks and width along a channel, to a fraction of a pixel.

use crate::ground::{
    Grid, Method, Network, Point, Polyline, Reach, Read, Source, Station, Stopped, Symbol, Width, Work,
};
use crate::numeric::{distance, quantile};

use super::detect::ChannelTone;
use super::profile::{Banks, Profile, profiles};

/// The record of the width.
pub static METHOD: Method = Method {
    id: "channel.width",
    name: "Width between the banks",
    question: "How wide is the channel here, and how well is that known?",
    formula: "min over (l, r) of Σ (p − m)²,  m = b₁ | a | b₂ parted at l and r (or a, b ∗ box below 5 px);  x_bank = x₀ + ∫ (p − a)/(b − a) dx;  se = s √(2h/L)",
    symbols: &[
        Symbol {
            symbol: "p",
            meaning: "tone across the channel, averaged over ±h along it",
            unit: "unit of the image",
        },
        Symbol { symbol: "l, r", meaning: "banks, left and right", unit: "px" },
        Symbol { symbol: "a, b", meaning: "tone of the channel and of its sides", unit: "unit of the image" },
        Symbol { symbol: "s", meaning: "standard deviation of the widths along the reach", unit: "px" },
        Symbol {
            symbol: "h, L",
            meaning: "half of the averaged length, and length of the reach",
            unit: "px",
        },
    ],
    assumptions: &["one tone between the banks, one on either side", "pixels average the ground they cover"],
    limits: &[
        "below about 3 px width and depth of tone are hardly told apart",
        "near junctions one bank is open: such stations have no width",
    ],
    sources: &[
        Source {
            key: "tabatabai1984",
            authors: "Tabatabai, A. J.; Mitchell, O. R.",
            year: 1984,
            title: "Edge location to subpixel values in digital imagery",
            published: "IEEE Transactions on Pattern Analysis and Machine Intelligence 6, 188",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-width",
            authors: "this program",
            year: 2026,
            title: "Two parted levels across a channel, banks by area",
            published: "checked on simulated channels of 2 to 40 px",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Stations in a length of one width.
const STATIONS_A_WIDTH: f64 = 2.0;
/// How often a reach is measured again about the width found.
const TRIES: usize = 4;

/// Gives each reach stations about every half width (at least a pixel apart) with banks and width, and the reach
/// its mean width. It begins at the width the reach has, and where it has none at the most telling up to `widest_px`. Pixel coordinates of `image`; take the image itself, not its logarithm. Stations already there
/// are replaced; elevations and areas on them are lost.
///
/// # Errors
/// [`Stopped`].
pub fn measure(
    image: &Grid<f32>,
    network: &mut Network,
    tone: ChannelTone,
    widest_px: f64,
    work: &Work,
) -> Result<(), Stopped> {
    work.phase("Measuring widths", network.reaches.len() as u64);
    let places: Vec<Point> = network.junctions().into_iter().map(|n| network.nodes[n].at).collect();
    for reach in &mut network.reaches {
        along(image, reach, tone, widest_px, &places, work)?;
        work.advance(1)?;
    }
    Ok(())
}

fn along(
    image: &Grid<f32>,
    reach: &mut Reach,
    tone: ChannelTone,
    widest: f64,
    junctions: &[Point],
    work: &Work,
) -> Result<(), Stopped> {
    let known = reach.width.map(|w| w.mean).filter(|w| w.is_finite() && *w > 0.0);
    let about = match known {
        Some(width) => Some(width),
        None => about(image, &reach.line.0, tone, widest, work)?,
    };
    let Some(about) = about else {
        (reach.stations, reach.width) = (Vec::new(), None);
        return Ok(());
    };
    let mut about = about;
    let mut tries = 0;
    let (found, widths, stations) = loop {
        let half = averaged(about);
        let found = profiles(image, &reach.line.0, (about / STATIONS_A_WIDTH).max(1.0), about, half, work)?;
        let mut widths = Vec::new();
        let mut stations = Vec::new();
        for Profile { at, along, normal, values, step } in &found {
            let open = junctions.iter().any(|j| j.distance(*at) < 0.75 * about);
            let banks = if open { None } else { Banks::of(values, *step, about, tone) };
            let place = |d: f64| Point::new(at.x + d * normal.0, at.y + d * normal.1);
            widths.extend(banks.map(|b| b.width()));
            stations.push(Station {
                at: *at,
                along: *along,
                width: banks.map(|b| b.width()),
                // The normal points to the right of the way down.
                banks: banks.map(|b| [place(b.left), place(b.right)]),
                ..Station::default()
            });
        }
        // The search lies about the width given: where that was off, it is done again about what was found.
        let middle = if widths.is_empty() { about } else { quantile::median(&mut widths.clone()) };
        tries += 1;
        if tries > TRIES || (middle - about).abs() <= 0.1 * about {
            break (found, widths, stations);
        }
        about = middle;
    };
    let half = averaged(about);
    let count = widths.len() as f64;
    reach.width = (widths.len() > 1).then(|| {
        let mean = widths.iter().sum::<f64>() / count;
        let variance = widths.iter().map(|w| (w - mean).powi(2)).sum::<f64>() / (count - 1.0);
        let spacing = found.get(1).map_or(1.0, |p| p.along);
        let independent = (count * spacing / (2.0 * half)).clamp(1.0, count);
        Width { mean, se: (variance / independent).sqrt() }
    });
    reach.stations = stations;
    Ok(())
}

/// Half of the length over which profiles are averaged, for a channel about so wide.
pub(super) fn averaged(width: f64) -> f64 {
    (0.5 * width).max(8.0)
}

/// The width, among those up to `widest`, whose inside differs most from both sides along the whole line; `None`
/// when none does in the sense of `tone`.
fn about(
    image: &Grid<f32>,
    line: &[Point],
    tone: ChannelTone,
    widest: f64,
    work: &Work,
) -> Result<Option<f64>, Stopped> {
    const RATIO: f64 = 1.15;
    let widest = if widest.is_finite() { widest.max(2.0) } else { 2.0 };
    let length = Polyline(line.to_vec()).length();
    let every = profiles(image, line, (length / 200.0).max(1.0), widest, 0.5, work)?;
    let Some(first) = every.first() else { return Ok(None) };
    let (step, count) = (first.step, first.values.len());
    // Mean over the line, position by position.
    let mean: Vec<f64> = (0..count)
        .map(|i| {
            let seen = every.iter().map(|p| p.values[i]).filter(|v| v.is_finite());
            let (sum, n) = seen.fold((0.0, 0usize), |(s, n), v| (s + v, n + 1));
            if n > 0 { sum / n as f64 } else { f64::NAN }
        })
        .collect();
    let level = |from: f64, to: f64| {
        let inside = (0..count).filter(|i| {
            let x = (*i as f64 - (count / 2) as f64) * step;
            x >= from - 1e-9 && x <= to + 1e-9 && mean[*i].is_finite()
        });
        let (sum, n) = inside.fold((0.0, 0usize), |(s, n), i| (s + mean[i], n + 1));
        (n > 0).then(|| sum / n as f64)
    };
    let mut best: Option<(f64, f64)> = None;
    let mut width = 1.5;
    while width <= widest * 1.001 {
        let (near, far) = (0.6 * width + 0.3, width + 0.8);
        if let (Some(a), Some(l), Some(r)) =
            (level(-0.35 * width, 0.35 * width), level(-far, -near), level(near, far))
        {
            let contrast = match tone {
                ChannelTone::Dark => (l - a).min(r - a),
                ChannelTone::Bright => (a - l).min(a - r),
                ChannelTone::EdgePair => (l - a).min(r - a).max((a - l).min(a - r)),
            };
            let score = contrast * width.sqrt();
            if score > 0.0 && best.is_none_or(|b| score > b.0) {
                best = Some((score, width));
            }
        }
        width *= RATIO;
    }
    Ok(best.map(|b| b.1))
}

/// Width of a mask along its middle by the distance d to the nearest cell outside, pixels: 2d − 1, exact for
/// straight strips an odd number of cells wide. 0 outside the mask, infinite where there is no outside.
///
/// # Errors
/// [`Stopped`].
pub fn width_of_mask(mask: &Grid<bool>, work: &Work) -> Result<Grid<f32>, Stopped> {
    let distances = distance::to_empty(mask.values(), mask.width(), work)?;
    let widths = distances.iter().map(|d| (2.0 * d - 1.0).max(0.0)).collect();
    Ok(Grid::from_parts(mask.width(), mask.height(), widths, None))
}

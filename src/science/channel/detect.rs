//! Where the image shows channels: multi-scale response above the noise floor, thinned to a network.

use serde::{Deserialize, Serialize};

use crate::ground::{
    Caution, FlowSense, Grid, Method, Network, NetworkNode, Point, Polyline, Reach, ReachOrigin, Read,
    Source, Stopped, Symbol, Width, Work,
};
use crate::numeric::quantile;
use crate::numeric::thin::{around, thin};

use super::graph::{Sketch, Stretch};
use super::response::{DIRECTIONS, Response, all_above, direction, response};

/// The record of the proposal.
pub static METHOD: Method = Method {
    id: "channel.proposal",
    name: "Proposal of a channel network",
    question: "Which places of the response belong to one channel network, and how sure is each reach?",
    formula: "seeds z > t grow over z > 0.7 t;  simple cells go, lowest response first, crests stay;  lines stay where the tone differs from both sides by 0.4 of the step, islands where by 0.5;  F = N p (3p)^{n − 1}, p = M P(all four > z̄), n = length/(4√π s);  confidence 1/(1 + F);  bridges: exp(−2τg/π) to a line, exp(−η g² ψ₁ψ₂/π) to an end",
    symbols: &[
        Symbol { symbol: "z̄", meaning: "mean response over noise along the reach", unit: "1" },
        Symbol { symbol: "N", meaning: "independent places of the image", unit: "1" },
        Symbol { symbol: "n", meaning: "independent places along the reach", unit: "1" },
        Symbol {
            symbol: "F",
            meaning: "chains of noise places as long and as strong that the image holds by chance",
            unit: "1",
        },
        Symbol { symbol: "g", meaning: "gap", unit: "px" },
        Symbol {
            symbol: "τ, η",
            meaning: "length of lines and number of open ends per area",
            unit: "px⁻¹, px⁻²",
        },
        Symbol { symbol: "ψ", meaning: "angles at both ends of a bridge, at least 10°", unit: "rad" },
    ],
    assumptions: &[
        "a chain of noise has about three ways on at each place",
        "lines and ends that have nothing to do with each other lie at random",
    ],
    limits: &[
        "the confidence is a score: it tells a strip from noise, not a channel from another strip (a dune trough, a road, a fault, a row of clouds)",
        "stretches below a quarter of the contrast that half of the length reaches are left out as texture: faint channels beside strong ones are missed",
        "under radar, channels along the look direction show no lit and shaded bank: what is missing there may still exist",
        "channels nearer to each other than about their width become one",
    ],
    sources: &[
        Source {
            key: "canny1986",
            authors: "Canny, J.",
            year: 1986,
            title: "A computational approach to edge detection",
            published: "IEEE Transactions on Pattern Analysis and Machine Intelligence 8, 679",
            locator: "hysteresis",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-proposal",
            authors: "this program",
            year: 2026,
            title: "Chance chains and chance bridges in a field of independent places",
            published: "worked out here, checked on simulated speckle",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// How channels stand out.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum ChannelTone {
    /// Darker than their banks (smooth liquid or bed under radar).
    #[default]
    Dark,
    /// Brighter than their banks.
    Bright,
    /// A pair of edges of opposite sense, whatever lies between.
    EdgePair,
}

/// What to look for. Lengths in image pixels.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DetectSettings {
    pub tone: ChannelTone,
    pub narrowest_px: f64,
    pub widest_px: f64,
    /// Chance that a place of pure noise passes.
    pub significance: f64,
    /// Gaps up to so many widths are bridged.
    pub gap_widths: f64,
    /// Branches shorter than so many half-widths are pruned.
    pub spur_half_widths: f64,
    /// Lone pieces shorter than so many widths are dropped.
    pub least_length_widths: f64,
}

/// A proposed network and what it rests on.
#[derive(Clone, Debug, PartialEq)]
pub struct Detected {
    /// Pixel coordinates of the image; lengths in pixels, widths those of the best strips (a
    /// ladder of steps of 1.5) until they are measured.
    pub network: Network,
    /// z that a place had to pass, the greatest over the widths.
    pub floor: f64,
    /// Widths looked for.
    pub widths_px: Vec<f64>,
    /// Gaps bridged.
    pub bridged: usize,
    /// Response over its noise, 0 where nothing stands out or nothing is known.
    pub response: Grid<f32>,
    pub cautions: Vec<Caution>,
}

/// Share of the best response nearby that a place of a crest band must reach.
const BAND: f32 = 0.6;
/// Least tone of a radar image as a share of its mean, before the logarithm.
const LEAST_TONE: f64 = 1e-3;
/// Arms nearer to each other than so many widths are one channel.
const ISLAND: f64 = 1.6;
/// Standard deviation of a width taken from the ladder of strips, over the width: ln 1.5/√12.
const STRIP_SE: f64 = 0.12;
/// Ways on from a place of noise.
const WAYS: f64 = 3.0;

/// Proposes the channels of an image (a radar image is taken as its logarithm). The inner error says in words
/// why there is no proposal.
///
/// # Errors
/// [`Stopped`].
pub fn detect(
    image: &Grid<f32>,
    is_radar: bool,
    settings: &DetectSettings,
    work: &Work,
) -> Result<Result<Detected, String>, Stopped> {
    if image.valid_values().all(|v| !v.is_finite()) {
        return Ok(Err("the image has no valid cell here".into()));
    }
    let logarithm;
    let image = if is_radar {
        logarithm = logarithm_of(image);
        &logarithm
    } else {
        image
    };
    let widths = [settings.narrowest_px, settings.widest_px];
    let Some(response) = response(image, settings.tone, widths, settings.significance, work)? else {
        return Ok(Err("the image has one tone only here".into()));
    };
    if response.strips.is_empty() {
        return Ok(Err("the image is smaller than two widths of the narrowest channel looked for".into()));
    }
    let area = image.valid_count() as f64;
    let strength = |s: &Stretch| {
        let sum: f64 = s.line.iter().map(|p| response.step_at(cell_under(&response, *p))).sum();
        sum / s.line.len().max(1) as f64
    };
    let mut sketch = lines(&response, work)?;
    sketch.prune_spurs(settings.spur_half_widths);
    sketch.cut_unseen(image, settings.tone, &response, work)?;
    sketch = sketch.fill_false_islands(image, &response, |cells| width_along(&response, cells), work)?;
    sketch.prune_spurs(settings.spur_half_widths);
    sketch.drop_doubles(ISLAND, strength, work)?;
    sketch.drop_chance(|stretches| ln_chance(stretches, &response, area), work)?;
    sketch.drop_weak(strength);
    sketch.prune_spurs(settings.spur_half_widths);
    let width_at = |p: Point| response.strip_at(cell_under(&response, p)).width;
    sketch.bridge(settings.gap_widths, area, width_at, work)?;
    sketch.join_through();
    sketch.drop_doubles(ISLAND, strength, work)?;
    sketch.prune_spurs(settings.spur_half_widths);
    sketch.drop_lone(settings.least_length_widths);
    sketch.straighten_ends([image.width(), image.height()]);
    sketch.refine(&response, work)?;
    sketch.centre(image, settings.tone, work)?;
    let network = network(&sketch, &response, area);
    let bridged = network.reaches.iter().filter(|r| r.origin == ReachOrigin::Bridged).count();
    let cautions = cautions(&sketch, &response, area);
    Ok(Ok(Detected {
        network,
        floor: response.strips.iter().map(|s| s.floor).fold(0.0, f64::max),
        widths_px: response.strips.iter().map(|s| s.width).collect(),
        bridged,
        response: response.z,
        cautions,
    }))
}

fn logarithm_of(image: &Grid<f32>) -> Grid<f32> {
    let (sum, count) = image
        .valid_values()
        .filter(|v| v.is_finite() && *v > 0.0)
        .fold((0.0, 0usize), |(sum, count), v| (sum + f64::from(v), count + 1));
    let least = (LEAST_TONE * sum / count.max(1) as f64).max(f64::from(f32::MIN_POSITIVE)) as f32;
    image.map(|v| if v.is_nan() { v } else { v.max(least).ln() })
}

/// From the response to lines one cell wide, and from these to a sketch.
fn lines(response: &Response, work: &Work) -> Result<Sketch, Stopped> {
    work.phase("Following channels", 0);
    let columns = response.z.width();
    let heights = &response.excess;
    let (mut mask, crest) = bands(response, heights, work)?;
    close_small_holes(&mut mask, response, work)?;
    grow(&mut mask, response, work)?;
    thin(&mut mask, columns, heights, |cell| crest[cell], false, work)?;
    thin(&mut mask, columns, heights, |_| false, true, work)?;
    Sketch::of_lines(&mask, columns, |cells| width_along(response, cells), work)
}

/// Typical width of a line of cells.
fn width_along(response: &Response, cells: &[usize]) -> f64 {
    let mut widths: Vec<f64> = cells.iter().map(|c| response.strip_at(*c).width).collect();
    quantile::median(&mut widths)
}

/// Cells beyond the low threshold that are near the best across their strip, and those that are the best.
fn bands(response: &Response, heights: &[f32], work: &Work) -> Result<(Vec<bool>, Vec<bool>), Stopped> {
    let (columns, rows) = (response.z.width(), response.z.height());
    let (mut band, mut crest) = (vec![false; heights.len()], vec![false; heights.len()]);
    for cell in 0..heights.len() {
        if cell % 16_384 == 0 {
            work.advance(0)?;
        }
        if heights[cell] <= 0.0 {
            continue;
        }
        let strip = response.strip_at(cell);
        let (cos, sin) = direction(response.turn[cell]);
        let (x, y) = ((cell % columns) as f64, (cell / columns) as f64);
        let beside = |d: f64| {
            let (c, r) = ((x - d * sin).round(), (y + d * cos).round());
            let inside = c >= 0.0 && r >= 0.0 && c < columns as f64 && r < rows as f64;
            if inside { heights[r as usize * columns + c as usize] } else { 0.0 }
        };
        let (near, far) = ((0.25 * strip.width).max(1.0), (0.5 * strip.width).max(2.0));
        let best = [-far, -near, near, far].map(beside).into_iter().fold(0.0, f32::max);
        band[cell] = heights[cell] >= BAND * best;
        crest[cell] = heights[cell] >= best && heights[cell] >= beside(1.0).max(beside(-1.0));
    }
    Ok((band, crest))
}

/// Sets empty patches smaller than a quarter of the square of the width around them.
fn close_small_holes(mask: &mut [bool], response: &Response, work: &Work) -> Result<(), Stopped> {
    let columns = response.z.width();
    let mut seen = vec![false; mask.len()];
    for start in 0..mask.len() {
        if start % 65_536 == 0 {
            work.advance(0)?;
        }
        // Every hole has a cell whose neighbour to the west is set.
        if mask[start] || seen[start] || start % columns == 0 || !mask[start - 1] {
            continue;
        }
        let limit = (0.25 * response.strip_at(start - 1).width.powi(2)).max(2.0) as usize;
        let mut patch = vec![start];
        seen[start] = true;
        let mut at = 0;
        while at < patch.len() && patch.len() <= limit {
            for near in around(patch[at], columns, mask.len()).into_iter().step_by(2).flatten() {
                if !mask[near] && !seen[near] {
                    seen[near] = true;
                    patch.push(near);
                }
            }
            at += 1;
        }
        if patch.len() <= limit {
            patch.iter().for_each(|c| mask[*c] = true);
        } else {
            // Another start may belong to a wider strip with a greater limit.
            patch.iter().for_each(|c| seen[*c] = false);
        }
    }
    Ok(())
}

/// Keeps what hangs together with a place beyond the floor.
fn grow(mask: &mut [bool], response: &Response, work: &Work) -> Result<(), Stopped> {
    let columns = response.z.width();
    let mut kept = vec![false; mask.len()];
    let mut waiting = Vec::new();
    for start in 0..mask.len() {
        if start % 65_536 == 0 {
            work.advance(0)?;
        }
        let z = f64::from(response.z.values()[start]);
        if !mask[start] || kept[start] || z < response.strip_at(start).floor {
            continue;
        }
        kept[start] = true;
        waiting.push(start);
        while let Some(cell) = waiting.pop() {
            for near in around(cell, columns, mask.len()).into_iter().flatten() {
                if mask[near] && !kept[near] {
                    kept[near] = true;
                    waiting.push(near);
                }
            }
        }
    }
    mask.copy_from_slice(&kept);
    Ok(())
}

/// The sketch as a network; nodes that no stretch uses are left out.
fn network(sketch: &Sketch, response: &Response, area: f64) -> Network {
    let mut number = vec![None; sketch.nodes.len()];
    let mut network = Network::default();
    let mut node = |n: usize, network: &mut Network| {
        *number[n].get_or_insert_with(|| {
            network.nodes.push(NetworkNode { at: sketch.nodes[n], elevation_m: None });
            network.nodes.len() - 1
        })
    };
    for stretch in &sketch.stretches {
        let (from, to) = (node(stretch.ends[0], &mut network), node(stretch.ends[1], &mut network));
        let confidence = stretch.bridge.unwrap_or_else(|| confidence(stretch, response, area));
        network.reaches.push(Reach {
            from,
            to,
            length: stretch.length(),
            line: Polyline(stretch.line.clone()),
            sense: FlowSense::default(),
            order: None,
            width: stretch
                .bridge
                .is_none()
                .then_some(Width { mean: stretch.width, se: STRIP_SE * stretch.width }),
            stations: Vec::new(),
            origin: if stretch.bridge.is_some() { ReachOrigin::Bridged } else { ReachOrigin::Detected },
            confidence,
        });
    }
    network
}

/// The cell under a point.
pub(super) fn cell_under(response: &Response, p: Point) -> usize {
    let at = |v: f64, n: usize| (v.max(0.0) as usize).min(n - 1);
    at(p.y, response.z.height()) * response.z.width() + at(p.x, response.z.width())
}

/// 1/(1 + F): one channel against the chains of noise as long and as strong that the image holds by chance.
fn confidence(stretch: &Stretch, response: &Response, area: f64) -> f64 {
    1.0 / (1.0 + ln_chance(&[stretch], response, area).clamp(-700.0, 700.0).exp())
}

/// ln F: of how many chains (or trees) of noise as long and as strong as these stretches the image holds.
fn ln_chance(stretches: &[&Stretch], response: &Response, area: f64) -> f64 {
    let count: f64 = stretches.iter().map(|s| s.line.len() as f64).sum();
    let length: f64 = stretches.iter().map(|s| s.length()).sum();
    let (mut z, mut rho, mut step) = (0.0, 0.0, 0.0);
    for p in stretches.iter().flat_map(|s| &s.line) {
        let cell = cell_under(response, *p);
        let strip = response.strip_at(cell);
        z += f64::from(response.z.values()[cell]) / count;
        rho += strip.correlation() / count;
        step += strip.independent_length() / count;
    }
    // F = N p (3p)^{n − 1}
    let p = (DIRECTIONS as f64 * all_above(z, rho)).clamp(1e-300, 1.0);
    let places = (area / (step * step / 3.0)).max(1.0);
    places.ln() + p.ln() + ((length / step).max(1.0) - 1.0) * (WAYS * p).ln()
}

fn cautions(sketch: &Sketch, response: &Response, area: f64) -> Vec<Caution> {
    let mut cautions = Vec::new();
    let found = sketch.stretches.iter().filter(|s| s.bridge.is_none());
    let total: f64 = found.clone().map(Stretch::length).sum();
    let (Some(first), Some(last)) = (response.strips.first(), response.strips.last()) else {
        return cautions;
    };
    let share = |keep: &dyn Fn(&Stretch) -> bool| {
        found.clone().filter(|s| keep(s)).map(Stretch::length).sum::<f64>() / total.max(1e-9)
    };
    let widest = share(&|s| s.width >= 0.99 * last.width);
    if response.strips.len() > 1 && widest > 0.05 {
        let text = format!(
            "{:.0} % of the length found is as wide as the widest channels looked for ({:.0} px): wider ones may be missing",
            100.0 * widest,
            last.width
        );
        cautions.push(Caution::new("widest-reached", text));
    }
    let narrowest = share(&|s| s.width <= 1.01 * first.width);
    if narrowest > 0.5 && first.width < 3.0 {
        let text = format!(
            "{:.0} % of the length found is about {:.0} px wide or less: widths there are hardly resolved",
            100.0 * narrowest,
            first.width
        );
        cautions.push(Caution::new("narrow-channels", text));
    }
    let covered = found.map(|s| s.length() * s.width).sum::<f64>() / area.max(1.0);
    if covered > 0.3 {
        let text = format!(
            "channels cover {:.0} % of the image: the noise floor is set too high by the channels themselves, or a texture is taken for channels",
            100.0 * covered
        );
        cautions.push(Caution::new("crowded", text));
    }
    cautions
}

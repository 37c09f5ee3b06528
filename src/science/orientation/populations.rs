//! Several populations of bedforms in one patch: side by side, or one laid over the other.

use crate::ground::{
    Axis, Grid, LocalFrame, Method, Place, Point, Polygon, Read, Seed, Source, Stopped, Symbol, Work,
};
use crate::numeric::bessel::ln_i0;
use crate::science::axial::effective::effective_number;
use crate::science::axial::interval::{dispersion, half_width};
use crate::science::axial::mixture::{Component, Mixture, MixtureSettings, mixtures};

use super::band::{Band, band_nodes};
use super::ground_shares::{Layer, Layers};
use super::scale::ScaleStep;
use super::separate::held_apart;
use super::spectrum::shares::{Wave, variance_shares};
use super::tensor::{NodeField, TrendNode};

/// The record of populations.
pub static METHOD: Method = Method {
    id: "orientation.populations",
    name: "Populations",
    question: "Do several kinds of bedforms share the patch, which, and how much of it has each?",
    formula: "per band: modes of the node axes by least BIC, joined where the fitted density between two stays above ½ of the lesser top;  E_bm = σ_b² ⟨r_m C (g_E² + g_N²)⟩;  population = modes of one trend over all bands, at its band of greatest E;  two seen in one band must hold ground of their own: V = var⟨d⟩/var d ≥ 0.3, d = (r₁ − r₂)/(r₁ + r₂), ⟨⟩ over three wavelengths;  two are kept if |ΔT| ≥ max(25°, 1.5 √(h₁² + h₂²)) and each has E ≥ 0.05 ΣE",
    symbols: &[
        Symbol { symbol: "b", meaning: "band of scales, half an octave apart", unit: "1" },
        Symbol { symbol: "r_m", meaning: "probability that a node belongs to mode m", unit: "1" },
        Symbol { symbol: "E_bm", meaning: "texture of mode m in band b", unit: "tone²" },
        Symbol {
            symbol: "T, h",
            meaning: "trend of a population and half its 95 % interval by effective n",
            unit: "deg",
        },
        Symbol {
            symbol: "weight",
            meaning: "side by side: share of places where the population's texture, held against its own typical strength, is the stronger; superposed: share of the variance of tone above the background of the spectrum, each bin given to the population nearest in spacing and trend",
            unit: "1",
        },
    ],
    assumptions: &[
        "bedforms of one population differ less in trend than two populations do",
        "side by side, each takes up ground at least as wide as the integration scale",
    ],
    limits: &[
        "two populations of one trend and two spacings are one here: the sweep and the spectrum tell them",
        "side by side, shares of ground were off by up to 0.13 in synthetic fields nine coarse wavelengths wide, and a coarse population of half the amplitude was missed in half of them",
        "populations that cross everywhere at one spacing are seen as one trend between them",
        "the overtones of strongly uneven coarse bedforms fall into the band of fine ones and turn their trend toward the coarse one's",
        "trends closer than 25° are not split; two seen in one band need areas several wavelengths wide, else they are taken for limbs of winding crests, and crests that wind more slowly may be taken for two",
    ],
    sources: &[Source {
        key: "ventifact-populations",
        authors: "this program",
        year: 2026,
        title: "Populations by modes of bands; the mixture itself is Fisher's (axial.mixture), the scales Lindeberg's (orientation.band)",
        published: "rules and thresholds ours, held to synthetic fields",
        locator: "",
        read: Read::Derived,
    }],
};

/// Least angle between two populations, degrees.
const LEAST_APART_DEG: f64 = 25.0;
/// Intervals' quadratic sums two trends must be apart.
const LEAST_REACHES: f64 = 1.5;
/// Least share of the texture of a population, and of the nodes of a band for one of its modes.
const LEAST_SHARE: f64 = 0.05;
const LEAST_MODE: f64 = 0.1;
/// Density between two modes over the lesser of their tops above which they are one.
const DIP: f64 = 0.5;
/// Least V of two trends seen in one band.
const LEAST_HELD: f64 = 0.3;
/// Texture of a trend, over that of another at its greatest band, from which both are seen in that band.
const SEEN: f64 = 0.2;
/// Concentration of the doubled angle below which a mode is background.
const LEAST_KAPPA: f64 = 1.0;
/// Shares of nodes above the noise, in multiples of those noise lets pass, for a band to count.
const TEXTURE: f64 = 5.0;
/// Scales closer than this factor are one band.
const ONE_SCALE: f64 = 1.5;
/// Share of a population's greatest texture that makes a finer band as good.
const NEARLY: f64 = 0.6;
/// Wavelength to which a gradient scale answers most.
const WAVE: f64 = 6.0;
/// Share of common ground from which two populations lie over each other.
const OVERLAP: f64 = 0.5;

/// How populations are looked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PopulationSettings {
    /// Probability with which noise alone may pass a node's coherence.
    pub significance: f64,
    pub logarithm: bool,
    /// Most modes of a band.
    pub most_modes: u32,
}

/// One population, measured in its own band.
#[derive(Clone, Debug, PartialEq)]
pub struct Population {
    pub axis: Axis,
    /// Half of the 95 % interval by effective n, degrees.
    pub half_deg: f64,
    pub band: Band,
    /// Share of ground or of texture; all sum to 1.
    pub weight: f64,
    /// Whether another population lies over the same ground.
    pub superposed: bool,
    pub field: NodeField,
    /// Probability of each node of `field` to belong here, 0 for those within the noise.
    pub membership: Vec<f64>,
}

/// The populations of a patch, the heaviest first; empty where there are not at least two.
///
/// # Errors
/// [`Stopped`].
pub fn populations(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    sweep: &[(ScaleStep, NodeField)],
    settings: &PopulationSettings,
    seed: Seed,
    work: &Work,
) -> Result<Vec<Population>, Stopped> {
    let Some(bounds) = patch.bounds() else { return Ok(Vec::new()) };
    let centre = bounds.centre();
    let Some(frame) = place.local_frame(centre) else { return Ok(Vec::new()) };
    let ground = Ground { centre, frame };
    work.phase("populations", 0);
    let candidates = candidates(sweep, ground, settings, seed, work)?;
    if candidates.len() < 2 {
        return Ok(Vec::new());
    }
    let mut found = Vec::new();
    for candidate in &candidates {
        found.extend(measure(image, patch, place, candidate, &candidates, ground, settings, seed, work)?);
    }
    let mut found = apart(found);
    if found.len() < 2 {
        return Ok(Vec::new());
    }
    weigh(&mut found, image, patch, place, ground, settings, work)?;
    found.sort_by(|a, b| b.weight.total_cmp(&a.weight));
    Ok(found)
}

/// Pixels to a plane that touches the ground at the middle of the patch.
#[derive(Clone, Copy)]
struct Ground {
    centre: Point,
    frame: LocalFrame,
}

impl Ground {
    fn of(&self, p: Point) -> Point {
        let (east, north) = self.frame.ground(p.x - self.centre.x, p.y - self.centre.y);
        Point::new(east, north)
    }
}

/// A trend at a scale that may be a population.
#[derive(Clone, Debug)]
struct Candidate {
    axis: Axis,
    scale_px: f64,
    /// E of its greatest band.
    texture: f64,
    /// Which step of the sweep that is.
    step: usize,
    membership: Vec<f64>,
    /// Trends that alternate with it over the same ground.
    limbs: Vec<Axis>,
}

impl Candidate {
    /// Angle to its trend or to the nearest of its limbs, degrees.
    fn to(&self, axis: Axis) -> f64 {
        self.limbs.iter().map(|limb| limb.separation(axis)).fold(self.axis.separation(axis), f64::min)
    }
}

/// Modes of every band, gathered by trend.
fn candidates(
    sweep: &[(ScaleStep, NodeField)],
    ground: Ground,
    settings: &PopulationSettings,
    seed: Seed,
    work: &Work,
) -> Result<Vec<Candidate>, Stopped> {
    let textures: Vec<f64> = sweep.iter().map(|(_, field)| texture(field, None)).collect();
    let greatest = textures.iter().copied().fold(0.0, f64::max);
    let mut seen: Vec<Candidate> = Vec::new();
    for (i, ((step, field), all)) in sweep.iter().zip(&textures).enumerate() {
        if step.share < TEXTURE * settings.significance || *all < LEAST_SHARE * greatest {
            continue;
        }
        for group in groups(field, ground, settings, seed, work)? {
            let texture = texture(field, Some(&group.membership));
            let scale_px = field.gradient_scale_px;
            let Group { axis, membership } = group;
            seen.push(Candidate { axis, scale_px, texture, step: i, membership, limbs: Vec::new() });
        }
    }
    // The strongest first: the others join it where they run alike.
    seen.sort_by(|a, b| b.texture.total_cmp(&a.texture));
    let mut kept: Vec<Candidate> = Vec::new();
    for candidate in &seen {
        if kept.iter().any(|k| k.to(candidate.axis) < LEAST_APART_DEG) {
            continue;
        }
        match kept.iter_mut().find(|k| alternate(k, candidate, &seen, sweep, ground)) {
            Some(k) => k.limbs.push(candidate.axis),
            None => kept.push(candidate.clone()),
        }
    }
    // Under broader bedforms the finest band that is nearly as strong holds least of their slopes.
    let broadest = kept.iter().map(|k| k.scale_px).fold(0.0, f64::max);
    for k in kept.iter_mut().filter(|k| k.scale_px * ONE_SCALE <= broadest) {
        let alike = seen.iter().filter(|c| k.to(c.axis) < LEAST_APART_DEG);
        let strong = alike.filter(|c| c.texture >= NEARLY * k.texture);
        k.scale_px = strong.map(|c| c.scale_px).fold(k.scale_px, f64::min);
    }
    let sum: f64 = kept.iter().map(|k| k.texture).sum();
    kept.retain(|k| k.texture >= LEAST_SHARE * sum);
    Ok(kept)
}

/// Whether two trends seen in the greatest band of either do not hold ground of their own there.
fn alternate(
    a: &Candidate,
    b: &Candidate,
    seen: &[Candidate],
    sweep: &[(ScaleStep, NodeField)],
    ground: Ground,
) -> bool {
    let mingled = |own: &Candidate, other: &Candidate| {
        let field = &sweep[own.step].1;
        let near = |c: &&Candidate| {
            let off = c.axis.separation(other.axis);
            c.step == own.step && off < LEAST_APART_DEG && off < c.axis.separation(own.axis)
        };
        let Some(there) = seen.iter().filter(near).find(|c| c.texture >= SEEN * own.texture) else {
            return false;
        };
        let both = own.membership.iter().zip(&there.membership);
        let places: Vec<(Point, f64, f64)> =
            field.nodes.iter().zip(both).map(|(n, (r, s))| (ground.of(n.at), *r, *s)).collect();
        // Overtones wind with the broad crests they belong to.
        let coarser = (other.scale_px / field.gradient_scale_px).max(1.0);
        held_apart(&places, coarser * node_spacing(field)) < LEAST_HELD
    };
    mingled(a, b) || mingled(b, a)
}

/// E = σ² ⟨r C energy⟩ over all nodes, r = 0 within the noise.
fn texture(field: &NodeField, membership: Option<&[f64]>) -> f64 {
    let sum: f64 = field
        .nodes
        .iter()
        .enumerate()
        .filter(|(_, n)| n.significant)
        .map(|(i, n)| membership.map_or(1.0, |m| m[i]) * n.coherence * n.energy)
        .sum();
    field.gradient_scale_px.powi(2) * sum / field.nodes.len().max(1) as f64
}

/// Nodes of a field that share a trend.
struct Group {
    axis: Axis,
    membership: Vec<f64>,
}

/// The distinct modes of a field's significant nodes, each of a tenth of them at least.
fn groups(
    field: &NodeField,
    ground: Ground,
    settings: &PopulationSettings,
    seed: Seed,
    work: &Work,
) -> Result<Vec<Group>, Stopped> {
    let picked: Vec<usize> = (0..field.nodes.len()).filter(|i| field.nodes[*i].significant).collect();
    let phi: Vec<f64> = picked.iter().map(|i| field.nodes[*i].axis.doubled()).collect();
    let at: Vec<Point> = picked.iter().map(|i| ground.of(field.nodes[*i].at)).collect();
    let number =
        effective_number(&phi, None, &at, node_spacing(field), field.integration_scale_ground, work)?;
    let fit =
        MixtureSettings { most_modes: settings.most_modes, background: true, n_eff: number.test.value() };
    let Some(best) = mixtures(&phi, None, fit, seed, work)?.into_iter().next() else {
        return Ok(Vec::new());
    };
    let parts = distinct(&best);
    let mut groups = Vec::new();
    for part in &parts {
        if part.iter().map(|c| best.components[*c].weight).sum::<f64>() < LEAST_MODE {
            continue;
        }
        let mut membership = vec![0.0; field.nodes.len()];
        let (mut cos, mut sin) = (0.0, 0.0);
        for (i, phi) in picked.iter().zip(&phi) {
            let r = if parts.len() == 1 { 1.0 } else { part.iter().map(|c| share(&best, *c, *phi)).sum() };
            membership[*i] = r;
            cos += r * phi.cos();
            sin += r * phi.sin();
        }
        groups.push(Group { axis: Axis::from_doubled(f64::atan2(sin, cos)), membership });
    }
    Ok(groups)
}

fn node_spacing(field: &NodeField) -> f64 {
    field.node_step_px * field.integration_scale_ground / field.integration_scale_px
}

/// ω f(φ) of one mode.
fn density(c: &Component, phi: f64) -> f64 {
    c.weight * (c.kappa * (phi - c.mean).cos() - ln_i0(c.kappa)).exp() / std::f64::consts::TAU
}

fn whole_density(m: &Mixture, phi: f64) -> f64 {
    m.background.unwrap_or(0.0) / std::f64::consts::TAU
        + m.components.iter().map(|c| density(c, phi)).sum::<f64>()
}

/// Probability that an angle comes from one mode.
fn share(m: &Mixture, component: usize, phi: f64) -> f64 {
    let all = whole_density(m, phi);
    if all > 0.0 { density(&m.components[component], phi) / all } else { 0.0 }
}

/// Modes that stand apart: those joined by a density above half of the lesser top are one;
/// so are those closer than 25°. Modes so wide that they are background are left out.
fn distinct(m: &Mixture) -> Vec<Vec<usize>> {
    let narrow: Vec<usize> =
        (0..m.components.len()).filter(|c| m.components[*c].kappa >= LEAST_KAPPA).collect();
    let mut parts: Vec<Vec<usize>> = narrow.into_iter().map(|c| vec![c]).collect();
    let one = |a: usize, b: usize| {
        let (from, to) = (m.components[a].mean, m.components[b].mean);
        let way = (to - from).sin().atan2((to - from).cos());
        let lesser = whole_density(m, from).min(whole_density(m, to));
        let least =
            (1..64).map(|i| whole_density(m, from + way * f64::from(i) / 64.0)).fold(lesser, f64::min);
        0.5 * way.abs().to_degrees() < LEAST_APART_DEG || least > DIP * lesser
    };
    let mut i = 0;
    while i < parts.len() {
        let near =
            (i + 1..parts.len()).find(|j| parts[i].iter().any(|a| parts[*j].iter().any(|b| one(*a, *b))));
        match near {
            Some(j) => {
                let other = parts.swap_remove(j);
                parts[i].extend(other);
                i = 0;
            }
            None => i += 1,
        }
    }
    parts
}

/// A candidate in its own band: broader bedforms are taken out where another candidate is broader.
#[allow(clippy::too_many_arguments)]
fn measure(
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    candidate: &Candidate,
    all: &[Candidate],
    ground: Ground,
    settings: &PopulationSettings,
    seed: Seed,
    work: &Work,
) -> Result<Option<Population>, Stopped> {
    let without_broader = all.iter().any(|other| other.scale_px >= ONE_SCALE * candidate.scale_px);
    let band = Band { scale_px: candidate.scale_px, without_broader };
    let field = band_nodes(image, patch, place, band, settings.significance, settings.logarithm, work)?;
    let near = |axis: Axis| {
        candidate.to(axis) <= LEAST_APART_DEG && all.iter().all(|other| candidate.to(axis) <= other.to(axis))
    };
    let mut membership = vec![0.0; field.nodes.len()];
    for group in groups(&field, ground, settings, seed, work)?.iter().filter(|g| near(g.axis)) {
        membership.iter_mut().zip(&group.membership).for_each(|(m, g)| *m += g);
    }
    let picked: Vec<usize> = (0..field.nodes.len()).filter(|i| membership[*i] > 0.0).collect();
    let phi: Vec<f64> = picked.iter().map(|i| field.nodes[*i].axis.doubled()).collect();
    let weights: Vec<f64> = picked.iter().map(|i| membership[*i]).collect();
    let at: Vec<Point> = picked.iter().map(|i| ground.of(field.nodes[*i].at)).collect();
    let (spacing, kernel) = (node_spacing(&field), field.integration_scale_ground);
    let number = effective_number(&phi, Some(&weights), &at, spacing, kernel, work)?;
    let half = half_width(dispersion(&phi, Some(&weights)), number.mean.standard_reach(0.95));
    let Some(half) = half.filter(|_| !picked.is_empty()) else { return Ok(None) };
    let (mut cos, mut sin) = (0.0, 0.0);
    for (phi, w) in phi.iter().zip(&weights) {
        cos += w * phi.cos();
        sin += w * phi.sin();
    }
    let axis = Axis::from_doubled(f64::atan2(sin, cos));
    let half_deg = 0.5 * half.to_degrees();
    Ok(Some(Population { axis, half_deg, band, weight: 0.0, superposed: false, field, membership }))
}

/// Those whose trends differ by more than chance from all stronger ones (they come strongest first).
fn apart(found: Vec<Population>) -> Vec<Population> {
    let mut kept: Vec<Population> = Vec::new();
    for p in found {
        let differs = |q: &Population| {
            p.axis.separation(q.axis) >= LEAST_APART_DEG.max(LEAST_REACHES * p.half_deg.hypot(q.half_deg))
        };
        if kept.iter().all(differs) {
            kept.push(p);
        }
    }
    kept
}

/// Weights, and which lie over one another.
fn weigh(
    found: &mut [Population],
    image: &Grid<f32>,
    patch: &Polygon,
    place: &Place,
    ground: Ground,
    settings: &PopulationSettings,
    work: &Work,
) -> Result<(), Stopped> {
    let layers: Vec<Layer> = found
        .iter()
        .map(|p| {
            let texture = |i: usize| p.membership[i] * p.field.nodes[i].coherence * p.field.nodes[i].energy;
            let at = |i: usize| ground.of(p.field.nodes[i].at);
            let nodes = (0..p.field.nodes.len()).map(|i| (at(i), texture(i))).collect();
            Layer { nodes, step: node_spacing(&p.field) }
        })
        .collect();
    let layers = Layers::of(&layers);
    let count = found.len();
    for (i, population) in found.iter_mut().enumerate() {
        population.superposed = (0..count).any(|j| j != i && layers.overlap(i, j) > OVERLAP);
    }
    let weights = if found.iter().any(|p| p.superposed) {
        let wave = |p: &Population| {
            let texture = |(n, m): (&TrendNode, &f64)| (n.at, m * n.coherence * n.energy);
            let texture = p.field.nodes.iter().zip(&p.membership).map(texture).collect();
            Wave { axis: p.axis, spacing_px: WAVE * p.band.scale_px, texture }
        };
        let waves: Vec<Wave> = found.iter().map(wave).collect();
        variance_shares(image, patch, place, settings.logarithm, &waves, work)?
    } else {
        None
    };
    let weights = weights.unwrap_or_else(|| layers.shares());
    found.iter_mut().zip(weights).for_each(|(p, w)| p.weight = w);
    Ok(())
}

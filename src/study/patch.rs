//! One patch measured: pixels, spectrum, trend, statistics, verdicts, sentence.

use std::sync::Arc;

use crate::files::raster::RasterError;
use crate::ground::{Axis, Caution, Point, Seed, Stopped, Work};
use crate::science::axial::{self, AxialSample, Nodes, Summary, SummarySettings};
use crate::science::orientation::scale::{INTEGRATION_RATIO, coherent_scale, scale_sweep};
use crate::science::orientation::{self, NodeField, Peak, Spectrum, TensorSettings, TrendNode};

use super::backwards;
use super::cautions;
use super::claim;
use super::crests;
use super::light;
use super::obstacles;
use super::populations;
use super::verdict::verdict;
use super::window::{self, Detail, PatchPixels};
use super::winds::{self, WindStudy};
use super::{
    ImageKind, ModeFinding, Node, OpenRaster, Patch, PatchFinding, PatternFinding, RasterEntry, Sheet,
    SpectrumFinding, SpectrumPicture, TrendFinding, fingerprint, grains, sentence,
};

/// Measures and judges a patch; in words what stood against it.
///
/// # Errors
/// [`Stopped`].
pub fn patch_finding(
    sheet: &Sheet,
    patch: &Patch,
    entry: &RasterEntry,
    open: &OpenRaster,
    judges: &[&Arc<WindStudy>],
    detail: Detail,
    work: &Work,
) -> Result<Result<PatchFinding, String>, Stopped> {
    work.phase(&format!("reading {}", patch.name), 0);
    let pixels = match window::read(open, entry, patch, detail, work) {
        Ok(pixels) => pixels,
        Err(RasterError::Stopped(stopped)) => return Err(stopped),
        Err(error) => return Ok(Err(error.to_string())),
    };
    if pixels.image.is_empty() || pixels.valid_fraction == 0.0 {
        return Ok(Err("no valid pixel lies inside its outline".into()));
    }
    let seed = sheet.seed.child(&format!("patch {}", patch.id.0));
    let (spectrum, scales) = choose_scale(sheet, entry, &pixels, work)?;
    let field = measure_trend(sheet, entry, &pixels, &scales, work)?;
    let (trend, axial_cautions) = summarise(sheet, &pixels, &field, seed, work)?;
    let spectrum_finding = spectrum_finding(&spectrum, &pixels);
    let mut verdicts = Vec::new();
    for winds in judges {
        let mut judged = verdict(sheet, patch, &trend, winds, work)?;
        judged
            .cautions
            .extend(sheet.wind(winds.finding.id).and_then(|w| winds::other_body(w, &open.place.body)));
        verdicts.push(judged);
    }
    let backwards = backwards::of_patch(sheet, patch, &trend, &[], work)?;
    let mut birth = Vec::new();
    let mut birth_cautions = Vec::new();
    for WindStudy { finding: record, .. } in judges.iter().map(|winds| &***winds) {
        let Some(sand) = &record.sand else { continue };
        let born =
            grains::birth(&spectrum_finding, open.place.unit(), (record.id, record.name.as_str()), sand);
        birth_cautions.extend(born.as_ref().and_then(|born| grains::caution(born, sand)));
        birth.extend(born);
    }
    let mut cautions = open.cautions.clone();
    cautions.extend(axial_cautions);
    cautions.extend(spectrum.cautions.iter().cloned());
    cautions.extend(cautions::of_patch(&trend, &spectrum_finding, &field, &pixels, entry));
    cautions.extend(birth_cautions);
    cautions.dedup_by(|a, b| a.code == b.code && a.text == b.text);
    let mut finding = PatchFinding {
        id: patch.id,
        name: patch.name.clone(),
        raster: patch.raster,
        fingerprint: fingerprint::of_patch(sheet, patch),
        unit: open.place.unit(),
        area: pixels.area,
        valid_fraction: pixels.valid_fraction,
        centre: patch.outline.bounds().and_then(|b| open.place.lonlat_of(b.centre())),
        trend,
        spectrum: spectrum_finding,
        verdicts,
        backwards,
        sentence: String::new(),
        cautions,
        birth,
        crests: Err("not traced at a first look".into()),
        pattern: PatternFinding::default(),
        obstacles: None,
    };
    if detail == Detail::Exact {
        let (trend, spectrum) = (&finding.trend, &finding.spectrum);
        finding.pattern.light = light::of_trend(trend, entry);
        finding.crests =
            crests::study(sheet, patch, &pixels, entry, trend, spectrum, finding.unit, None, work)?;
        finding.obstacles = obstacles::study(sheet, patch, &open.place, &finding.trend, seed, work)?;
        let ground = populations::Ground { sheet, patch, entry, open, pixels: &pixels, judges, seed };
        populations::study(&ground, &mut finding, work)?;
    }
    if detail == Detail::Exact {
        let trend_only = claim::caution(&finding);
        finding.cautions.extend(trend_only);
    }
    finding.sentence = sentence::of_patch(&finding);
    Ok(Ok(finding))
}

/// Spectrum and tensor looked at together: the spectrum's spacing sets the scale unless the texture is
/// clearly more coherent at another, as with broad dunes under fine grain; then the spacing is
/// looked for anew around that scale.
pub(super) fn choose_scale(
    sheet: &Sheet,
    entry: &RasterEntry,
    pixels: &PatchPixels,
    work: &Work,
) -> Result<(Spectrum, Scales), Stopped> {
    let (s, factor) = (&sheet.settings.spectrum, pixels.factor as f64);
    let logarithm = entry.kind == ImageKind::Radar;
    let settings = orientation::SpectrumSettings {
        window_px: s.window_px.map(|px| px / factor),
        // Averaged pixels still hold waves of four of their own.
        shortest_spacing_px: (s.shortest_spacing_px / factor).max(4.0f64.min(s.shortest_spacing_px)),
        longest_spacing_px: s.longest_spacing_px.map(|px| px / factor),
        significance: s.significance,
        logarithm,
    };
    let (image, outline, place) = (&pixels.image, &pixels.outline, &pixels.place);
    let mut spectrum = orientation::spectrum(image, outline, place, &settings, work)?;
    let fine = fine_pixel(pixels);
    let of_spacing = regular_peak(&spectrum).map(|p| (p.spacing / fine / 6.0).clamp(1.0, 16.0));
    let noise_level = sheet.settings.trend.significance;
    let steps = scale_sweep(image, outline, place, logarithm, noise_level, work)?;
    let sigma = coherent_scale(&steps, of_spacing);
    if let Some(sigma) = sigma.filter(|sigma| of_spacing.is_none_or(|own| (sigma / own).ln().abs() > 0.4)) {
        let around = orientation::SpectrumSettings {
            shortest_spacing_px: settings.shortest_spacing_px.max(3.0 * sigma),
            longest_spacing_px: Some(settings.longest_spacing_px.unwrap_or(f64::INFINITY).min(15.0 * sigma)),
            ..settings
        };
        let first = spectrum;
        spectrum = orientation::spectrum(image, outline, place, &around, work)?;
        if let Some(fine_texture) = regular_peak(&first) {
            spectrum.cautions.push(Caution::new(
                "other-scale",
                format!(
                    "A texture at {:.0}° and {:.1} pixels is as regular, but the ground is more coherent at a scale of {:.0} pixels, where trend and spacing are taken.",
                    fine_texture.axis.deg(),
                    fine_texture.spacing / fine,
                    6.0 * sigma
                ),
            ));
        }
    }
    Ok((spectrum, Scales::of(sigma, pixels)))
}

/// A peak that passed its test and is a texture too: with power around it, one axis and one spacing. A
/// camera's grain or a resampling can raise a single bin without either.
pub(super) fn regular_peak(s: &Spectrum) -> Option<Peak> {
    s.peak.filter(|p| {
        let [low, high] = p.spacing_ci95;
        s.defined && p.contrast > 0.0 && p.axis_ci95_half_deg < 45.0 && high < 3.0 * low
    })
}

/// Ground size of the finer pixel direction at the middle of the patch.
pub(super) fn fine_pixel(pixels: &PatchPixels) -> f64 {
    let frame = pixels.outline.bounds().and_then(|b| pixels.place.local_frame(b.centre()));
    frame.map_or(1.0, |f| f.pixel_size().into_iter().fold(f64::INFINITY, f64::min))
}

pub(super) fn measure_trend(
    sheet: &Sheet,
    entry: &RasterEntry,
    pixels: &PatchPixels,
    own: &Scales,
    work: &Work,
) -> Result<NodeField, Stopped> {
    let (s, factor) = (&sheet.settings.trend, pixels.factor as f64);
    let stated = |setting: Option<f64>, own: f64| setting.map_or(own, |px| px / factor);
    let settings = TensorSettings {
        gradient_scale_px: stated(s.gradient_scale_px, own.gradient),
        integration_scale_px: stated(s.integration_scale_px, own.integration),
        node_step_px: stated(s.node_step_px, own.step),
        significance: s.significance,
        logarithm: entry.kind == ImageKind::Radar,
    };
    orientation::trend_nodes(&pixels.image, &pixels.outline, &pixels.place, &settings, work)
}

/// The scales a patch is measured at when the user leaves them open, image pixels.
pub(super) struct Scales {
    gradient: f64,
    integration: f64,
    step: f64,
}

impl Scales {
    /// From the gradient scale: σ = λ/6, where a derivative of Gaussian still answers to a spacing λ and
    /// least to noise; ρ = 3σ, half a wave; a node every ρ, fewer on ground so wide that forty thousand
    /// are enough. Ground without texture is looked at with σ = 2 px.
    fn of(sigma: Option<f64>, pixels: &PatchPixels) -> Self {
        const MOST_NODES: f64 = 40_000.0;
        let gradient = sigma.unwrap_or(2.0);
        let integration = INTEGRATION_RATIO * gradient;
        let step = integration.max((pixels.outline.area() / MOST_NODES).sqrt());
        Self { gradient, integration, step }
    }
}

/// Whether a field of nodes claims a trend, and the numbers behind it.
pub(super) struct Claim {
    pub defined: bool,
    /// Several times as many nodes pass the noise floor as chance lets pass.
    pub has_texture: bool,
    /// Of all nodes, and of those that passed.
    pub test: Summary,
    pub shown: Summary,
    pub axes: Vec<Axis>,
}

/// Whether a trend is preferred is asked of ALL nodes: noise has no say in which are counted, so
/// the test keeps its level on ground without texture. The trend itself is that of the nodes that
/// passed the noise floor, since the others only blur it.
pub(super) fn claim(
    sheet: &Sheet,
    pixels: &PatchPixels,
    field: &NodeField,
    resamples: u32,
    seed: Seed,
    work: &Work,
) -> Result<Claim, Stopped> {
    let settings = SummarySettings { significance: sheet.settings.statistics.significance, resamples };
    let positions = ground_positions(pixels, &field.nodes);
    let passed: Vec<usize> = (0..field.nodes.len()).filter(|i| field.nodes[*i].significant).collect();
    let every: Vec<usize> = (0..field.nodes.len()).collect();
    let axes_of = |picked: &[usize]| picked.iter().map(|i| field.nodes[*i].axis).collect::<Vec<Axis>>();
    let spacing = field.node_step_px * field.integration_scale_ground / field.integration_scale_px;
    let summary_of = |picked: &[usize]| {
        let at: Vec<Point> = picked.iter().map(|i| positions[*i]).collect();
        let nodes = Nodes { at: &at, spacing, kernel_sigma: field.integration_scale_ground };
        let axes = axes_of(picked);
        let sample = AxialSample { axes: &axes, weights: None, nodes: Some(nodes) };
        axial::summarise(&sample, settings, seed, work)
    };
    let test = summary_of(&every)?;
    let shown = summary_of(&passed)?;
    // By chance alone `significance` of the nodes pass; a texture must show at several times as many.
    let has_texture = passed.len() as f64 > 5.0 * sheet.settings.trend.significance * every.len() as f64;
    // An interval of all axes leaves no line to draw.
    let defined = test.preferred && has_texture && shown.interval.half_deg.is_some();
    Ok(Claim { defined, has_texture, test, shown, axes: axes_of(&passed) })
}

/// Statistics of the trend field.
pub(super) fn summarise(
    sheet: &Sheet,
    pixels: &PatchPixels,
    field: &NodeField,
    seed: Seed,
    work: &Work,
) -> Result<(TrendFinding, Vec<Caution>), Stopped> {
    let s = &sheet.settings.statistics;
    let Claim { defined, has_texture, test, shown, axes } =
        claim(sheet, pixels, field, s.resamples, seed, work)?;
    let modes = if has_texture {
        let sample = AxialSample { axes: &axes, weights: None, nodes: None };
        axial::modes(&sample, shown.n_eff_test, s.most_modes, seed, work)?
    } else {
        Vec::new()
    };
    let factor = pixels.factor as f64;
    let trend = TrendFinding {
        defined,
        axis: shown.mean.filter(|_| defined),
        ci95_half_deg: shown.interval.half_deg.filter(|_| defined),
        ci95_source: shown.interval.source,
        resultant_length: shown.resultant_length,
        resultant_length_all: test.resultant_length,
        kappa_doubled: (shown.n > 0).then_some(shown.kappa),
        spread_deg: shown.spread_deg,
        n: shown.n,
        n_all: field.nodes.len(),
        n_eff: shown.n_eff_mean,
        correlation_length: shown.correlation_length,
        rayleigh_p: test.rayleigh_p,
        modes: modes
            .into_iter()
            .map(|m| ModeFinding { axis: m.axis, weight: m.weight, kappa_doubled: m.kappa_doubled })
            .collect(),
        nodes: field
            .nodes
            .iter()
            .map(|n| Node {
                at: Point::new(pixels.origin.x + factor * n.at.x, pixels.origin.y + factor * n.at.y),
                axis: n.axis,
                coherence: n.coherence,
                significant: n.significant,
            })
            .collect(),
        rose: axial::rose::rose(&axes, None, s.rose_bin_deg),
        rose_bin_deg: s.rose_bin_deg,
        density: axial::density::density_by_degree(&axes, None, density_bandwidth(&shown)),
        gradient_scale_px: factor * field.gradient_scale_px,
        integration_scale_px: factor * field.integration_scale_px,
        node_step_px: factor * field.node_step_px,
        coherence_floor: field.coherence_floor,
    };
    Ok((trend, if defined { shown.cautions } else { test.cautions }))
}

/// Nodes on a plane that touches the ground at the middle of the patch, ground units.
pub(super) fn ground_positions(pixels: &PatchPixels, nodes: &[TrendNode]) -> Vec<Point> {
    let centre = pixels.outline.bounds().map_or(Point::default(), |b| b.centre());
    let frame = pixels.place.local_frame(centre);
    let on_ground = |p: Point| {
        frame.map_or(p, |f| {
            let (east, north) = f.ground(p.x - centre.x, p.y - centre.y);
            Point::new(east, north)
        })
    };
    nodes.iter().map(|n| on_ground(n.at)).collect()
}

/// The plug-in bandwidth with the effective number, since nodes repeat one another.
pub(super) fn density_bandwidth(summary: &Summary) -> f64 {
    axial::density::plug_in(summary.n_eff_mean.max(2.0), summary.kappa.max(0.05))
}

pub(super) fn spectrum_finding(s: &Spectrum, pixels: &PatchPixels) -> SpectrumFinding {
    let peak = regular_peak(s);
    SpectrumFinding {
        defined: peak.is_some(),
        axis: peak.map(|p| p.axis),
        axis_ci95_half_deg: peak.map(|p| p.axis_ci95_half_deg),
        spacing: peak.map(|p| p.spacing),
        spacing_ci95: peak.map(|p| p.spacing_ci95),
        p: s.p,
        spread_deg: peak.and_then(|p| p.spread_deg),
        windows: s.windows,
        windows_with_peak: s.windows_with_peak,
        window_px: (s.window_px * pixels.factor as f64).round() as usize,
        cycles: s.cycles.filter(|_| peak.is_some()),
        picture: s
            .picture
            .as_ref()
            .map(|p| SpectrumPicture { log_ratio: p.log_ratio.clone(), edge_frequency: p.edge_frequency }),
        profile: s.profile.clone(),
    }
}

//! The populations of a patch: trend by scale, plateaus, and each population measured and judged by itself.

use std::sync::Arc;

use crate::ground::{Axis, Caution, LocalFrame, Point, Seed, Stopped, Work};
use crate::science::axial::{self, AxialSample, Nodes, SummarySettings};
use crate::science::crest::{CrestLine, Crests, Junction};
use crate::science::orientation::band::band_sweep;
use crate::science::orientation::plateau::plateaus;
use crate::science::orientation::populations::{Population, PopulationSettings, populations};
use crate::science::orientation::scale::ScaleStep;
use crate::science::orientation::{self, Peak, TrendNode};

use super::patch::{density_bandwidth, fine_pixel, ground_positions, regular_peak};
use super::verdict::verdict;
use super::window::PatchPixels;
use super::winds::{self, WindStudy};
use super::{
    ImageKind, Node, OpenRaster, Patch, PatchFinding, PatternFinding, PlateauFinding, PopulationFinding,
    PopulationSource, RasterEntry, ScaleFinding, Sheet, SpectrumFinding, TrendFinding, backwards, crests,
};

/// A name given to a population holds for trends so near.
const NAMED_DEG: f64 = 20.0;
/// A population's spectral peak is sought so near its trend, and its crests at least so near.
const PEAK_DEG: f64 = 20.0;
const CREST_DEG: f64 = 25.0;
/// Wavelength to which a gradient scale answers most.
const WAVE: f64 = 6.0;

/// What the pattern of a patch is measured from.
pub(super) struct Ground<'a> {
    pub sheet: &'a Sheet,
    pub patch: &'a Patch,
    pub entry: &'a RasterEntry,
    pub open: &'a OpenRaster,
    pub pixels: &'a PatchPixels,
    pub judges: &'a [&'a Arc<WindStudy>],
    pub seed: Seed,
}

/// Scales, plateaus and populations of a patch, laid into its `pattern`; what follows for its cautions too.
///
/// # Errors
/// [`Stopped`].
pub(super) fn study(ground: &Ground, finding: &mut PatchFinding, work: &Work) -> Result<(), Stopped> {
    let Ground { sheet, entry, pixels, seed, .. } = *ground;
    let (image, outline, place) = (&pixels.image, &pixels.outline, &pixels.place);
    let logarithm = entry.kind == ImageKind::Radar;
    let significance = sheet.settings.trend.significance;
    work.phase("trend by scale", 0);
    let sweep = band_sweep(image, outline, place, significance, logarithm, work)?;
    let steps: Vec<ScaleStep> = sweep.iter().map(|s| s.0).collect();
    let to_full = pixels.factor as f64;
    let pattern: &mut PatternFinding = &mut finding.pattern;
    let fine = fine_pixel(pixels);
    pattern.scales = steps
        .iter()
        .map(|s| ScaleFinding {
            scale_px: to_full * s.gradient_scale_px,
            spacing: WAVE * s.gradient_scale_px * fine,
            coherence: s.beyond_noise,
            share: s.share,
            axis: s.axis,
            resultant_length: s.resultant_length,
        })
        .collect();
    pattern.plateaus = plateaus(&steps)
        .into_iter()
        .map(|p| PlateauFinding {
            scales: p.scales,
            axis: p.axis,
            resultant_length: p.resultant_length,
            scale_px: to_full * steps[p.best].gradient_scale_px,
        })
        .collect();
    let most_modes = sheet.settings.statistics.most_modes;
    let settings = PopulationSettings { significance, logarithm, most_modes };
    let found = populations(image, outline, place, &sweep, &settings, seed.child("populations"), work)?;
    for population in &found {
        let one = one(ground, population, finding, work)?;
        finding.pattern.populations.push(one);
    }
    let populations = &finding.pattern.populations;
    if !populations.is_empty() && finding.backwards.is_some() {
        finding.backwards = backwards::of_patch(sheet, ground.patch, &finding.trend, populations, work)?;
    }
    finding.cautions.extend(cautions(finding));
    Ok(())
}

/// A population with all that a patch has.
fn one(
    ground: &Ground,
    population: &Population,
    whole: &PatchFinding,
    work: &Work,
) -> Result<PopulationFinding, Stopped> {
    let Ground { sheet, patch, entry, open, pixels, judges, .. } = *ground;
    let (trend, mut cautions) = trend(ground, population, work)?;
    let peak = spectrum_peak(ground, population, work)?;
    let spectrum = SpectrumFinding {
        defined: peak.is_some(),
        axis: peak.map(|p| p.axis),
        axis_ci95_half_deg: peak.map(|p| p.axis_ci95_half_deg),
        // Without a peak its scale says about how far apart its crests are.
        spacing: Some(peak.map_or(WAVE * population.band.scale_px * fine_pixel(pixels), |p| p.spacing)),
        spacing_ci95: peak.map(|p| p.spacing_ci95),
        ..SpectrumFinding::default()
    };
    let only = Only {
        axis: population.axis,
        within_deg: trend.spread_deg.unwrap_or(0.0).max(CREST_DEG),
        spacing: spectrum.spacing,
    };
    let crests = crests::study(sheet, patch, pixels, entry, &trend, &spectrum, whole.unit, Some(only), work)?;
    let mut verdicts = Vec::new();
    for winds in judges {
        let mut judged = verdict(sheet, patch, &trend, winds, work)?;
        let other = sheet.wind(winds.finding.id).and_then(|w| winds::other_body(w, &open.place.body));
        judged.cautions.extend(other);
        verdicts.push(judged);
    }
    if peak.is_none() {
        let text = "The spectrum has no peak of this trend near its scale: its spacing is not known.";
        cautions.push(Caution::new("no-spacing", text));
    }
    Ok(PopulationFinding {
        name: name(patch, trend.axis.unwrap_or(population.axis)),
        source: if population.superposed { PopulationSource::Scale } else { PopulationSource::Mixture },
        weight: population.weight,
        trend,
        spacing: peak.map(|p| p.spacing),
        spacing_ci95: peak.map(|p| p.spacing_ci95),
        crests,
        verdicts,
        cautions,
    })
}

/// The user's name for the population of a trend, the nearest within 20°; else the trend in words.
fn name(patch: &Patch, axis: Axis) -> String {
    patch
        .populations
        .iter()
        .map(|named| (named.axis.separation(axis), named))
        .filter(|(off, _)| *off <= NAMED_DEG)
        .min_by(|a, b| a.0.total_cmp(&b.0))
        .map_or_else(|| plain_name(axis), |(_, named)| named.name.clone())
}

/// What a population is called that has no name: "trend at 84°".
pub(super) fn plain_name(axis: Axis) -> String {
    format!("trend at {:.0}°", axis.deg().round() % 180.0)
}

/// The statistics of its nodes, each weighted by the probability that it belongs here.
fn trend(
    ground: &Ground,
    population: &Population,
    work: &Work,
) -> Result<(TrendFinding, Vec<Caution>), Stopped> {
    let Ground { sheet, pixels, seed, .. } = *ground;
    let s = &sheet.settings.statistics;
    let field = &population.field;
    let member = |i: &usize| population.membership[*i] > 0.0;
    let picked: Vec<usize> = (0..field.nodes.len()).filter(member).collect();
    let axes: Vec<Axis> = picked.iter().map(|i| field.nodes[*i].axis).collect();
    let weights: Vec<f64> = picked.iter().map(|i| population.membership[*i]).collect();
    let own: Vec<TrendNode> = picked.iter().map(|i| field.nodes[*i]).collect();
    let at = ground_positions(pixels, &own);
    let spacing = field.node_step_px * field.integration_scale_ground / field.integration_scale_px;
    let nodes = Nodes { at: &at, spacing, kernel_sigma: field.integration_scale_ground };
    let sample = AxialSample { axes: &axes, weights: Some(&weights), nodes: Some(nodes) };
    let settings = SummarySettings { significance: s.significance, resamples: s.resamples };
    let shown = axial::summarise(&sample, settings, seed, work)?;
    let factor = pixels.factor as f64;
    let full = |p: Point| Point::new(pixels.origin.x + factor * p.x, pixels.origin.y + factor * p.y);
    let node = |(n, membership): (&TrendNode, &f64)| Node {
        at: full(n.at),
        axis: n.axis,
        coherence: n.coherence,
        significant: *membership > 0.5,
    };
    let trend = TrendFinding {
        defined: shown.interval.half_deg.is_some(),
        axis: shown.mean.filter(|_| shown.interval.half_deg.is_some()),
        ci95_half_deg: shown.interval.half_deg,
        ci95_source: shown.interval.source,
        resultant_length: shown.resultant_length,
        resultant_length_all: shown.resultant_length,
        kappa_doubled: (shown.n > 0).then_some(shown.kappa),
        spread_deg: shown.spread_deg,
        n: population.membership.iter().filter(|m| **m > 0.5).count(),
        n_all: field.nodes.len(),
        n_eff: shown.n_eff_mean,
        correlation_length: shown.correlation_length,
        rayleigh_p: shown.rayleigh_p,
        modes: Vec::new(),
        nodes: field.nodes.iter().zip(&population.membership).map(node).collect(),
        rose: axial::rose::rose(&axes, Some(&weights), s.rose_bin_deg),
        rose_bin_deg: s.rose_bin_deg,
        density: axial::density::density_by_degree(&axes, Some(&weights), density_bandwidth(&shown)),
        gradient_scale_px: factor * field.gradient_scale_px,
        integration_scale_px: factor * field.integration_scale_px,
        node_step_px: factor * field.node_step_px,
        coherence_floor: field.coherence_floor,
    };
    Ok((trend, shown.cautions))
}

/// The peak of the spectrum within 20° of the population's trend and an octave of its scale.
fn spectrum_peak(ground: &Ground, population: &Population, work: &Work) -> Result<Option<Peak>, Stopped> {
    let Ground { sheet, entry, pixels, .. } = *ground;
    let (s, scale) = (&sheet.settings.spectrum, population.band.scale_px);
    let settings = orientation::SpectrumSettings {
        window_px: None,
        shortest_spacing_px: 0.5 * WAVE * scale,
        longest_spacing_px: Some(2.0 * WAVE * scale),
        significance: s.significance,
        logarithm: entry.kind == ImageKind::Radar,
    };
    let along = Some((population.axis, PEAK_DEG));
    let found =
        orientation::spectrum_along(&pixels.image, &pixels.outline, &pixels.place, &settings, along, work)?;
    let ours = |p: &Peak| p.axis.separation(population.axis) <= PEAK_DEG;
    Ok(regular_peak(&found).filter(ours))
}

/// Crests of one population.
#[derive(Clone, Copy, Debug)]
pub(super) struct Only {
    pub axis: Axis,
    /// Lines whose mean direction lies within so many degrees of it are kept.
    pub within_deg: f64,
    /// Crest to crest, ground units.
    pub spacing: Option<f64>,
}

impl Only {
    /// The lines of the population; places where they meet others are kept where two of them stay.
    pub fn of(&self, found: Crests, frame: LocalFrame) -> Crests {
        let kept: Vec<bool> = found.lines.iter().map(|line| self.holds(line, frame)).collect();
        let mut place = vec![None; kept.len()];
        for (new, old) in (0..kept.len()).filter(|i| kept[*i]).enumerate() {
            place[old] = Some(new);
        }
        let junctions = found.junctions.iter().filter_map(|j| {
            let ours = |(line, end): &(usize, usize)| place[*line].map(|new| (new, *end));
            let branches: Vec<(usize, usize)> = j.branches.iter().filter_map(ours).collect();
            let through = place[j.through]?;
            (!branches.is_empty()).then_some(Junction { at: j.at, through, branches })
        });
        let junctions = junctions.collect();
        let lines = found.lines.into_iter().zip(&kept).filter(|(_, kept)| **kept).map(|(line, _)| line);
        Crests { lines: lines.collect(), junctions, ..found }
    }

    fn holds(&self, line: &CrestLine, frame: LocalFrame) -> bool {
        let (mut cos, mut sin) = (0.0, 0.0);
        for w in line.line.0.windows(2) {
            let (east, north) = frame.ground(w[1].x - w[0].x, w[1].y - w[0].y);
            let (length, phi) = (east.hypot(north), Axis::from_east_north(east, north).doubled());
            cos += length * phi.cos();
            sin += length * phi.sin();
        }
        Axis::from_doubled(f64::atan2(sin, cos)).separation(self.axis) <= self.within_deg
    }
}

/// What populations say against the patch's own mean.
fn cautions(finding: &PatchFinding) -> Vec<Caution> {
    let populations = &finding.pattern.populations;
    let (Some(axis), true) = (finding.trend.axis, populations.len() > 1) else { return Vec::new() };
    let nearest = populations.iter().filter_map(|p| p.trend.axis).map(|a| a.separation(axis));
    let off = nearest.fold(90.0, f64::min);
    let half = finding.trend.ci95_half_deg.unwrap_or(0.0).max(5.0);
    let mut text = format!(
        "{} populations share the patch ({}); its spacing, crests and verdict above are those of all together.",
        populations.len(),
        words(finding)
    );
    if off > half {
        text.push_str(&format!(
            " The mean trend ({:.0}°) lies {off:.0}° from the nearest of them: it is a mean of two and no bedform's.",
            axis.deg()
        ));
    }
    vec![Caution::new("populations", text)]
}

/// "trend at 84°, 62 %; trend at 12°, 38 %".
fn words(finding: &PatchFinding) -> String {
    let each = finding.pattern.populations.iter();
    let each: Vec<String> = each.map(|p| format!("{}, {:.0} %", p.name, 100.0 * p.weight)).collect();
    each.join("; ")
}

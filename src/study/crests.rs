//! The crest lines of a patch, and what they say: length, density, spacing, defects.

use crate::ground::{Azimuth, Caution, LengthUnit, Point, Polyline, Stopped, Work};
use crate::science::crest::{
    self, CrestLine, CrestModel, CrestNumbers, Defects, Fit, Forks, Junction, SpacingOnGround,
    SpacingSettings, defects, detect, forks, numbers, spacing,
};

use super::populations::Only;
use super::window::PatchPixels;
use super::{ImageKind, Patch, RasterEntry, Sheet, SpectrumFinding, TrendFinding};

/// Cells traced at the most: tracing holds several grids of that size.
const MOST_CELLS: usize = 1 << 24;
/// Skewness of the response from which a model of crests stands out.
const CLEAR_MODEL: f64 = 0.25;
/// Spacings further apart than this factor disagree.
const DISAGREE: f64 = 1.5;

/// Crests traced in a patch where bedforms are claimed.
#[derive(Clone, Debug, PartialEq)]
pub struct CrestsFinding {
    /// In full-resolution pixels.
    pub lines: Vec<CrestLine>,
    /// Where they meet; places in full-resolution pixels.
    pub junctions: Vec<Junction>,
    /// What a crest looks like here.
    pub model: CrestModel,
    /// How well each model fits, best first.
    pub fits: Vec<Fit>,
    /// Scale of the derivatives, pixels of the measured image.
    pub scale_px: f64,
    /// Full-resolution pixels per pixel of the measured image.
    pub factor: f64,
    /// Lengths in the unit of the patch, as in all that follows.
    pub numbers: CrestNumbers,
    pub spacing: SpacingOnGround,
    pub defects: Defects,
    /// Length of crest by direction, in bins of `rose_bin_deg` from 0°; sums to 1.
    pub rose: Vec<f64>,
    pub rose_bin_deg: f64,
    /// Which way forks open: counted toward `forks_toward`; `None` without forks or trend.
    pub forks: Option<Forks>,
    pub forks_toward: Option<Azimuth>,
    /// The spacing by the spectrum, by transects and by area over length, as far as known.
    pub spacings: [Option<f64>; 3],
    /// Edits of the user that found no line, in full-resolution pixels.
    pub lost_edits: Vec<Point>,
    pub cautions: Vec<Caution>,
}

impl CrestsFinding {
    /// Scale of the derivatives, full-resolution pixels.
    pub fn full_scale_px(&self) -> f64 {
        self.scale_px * self.factor
    }
}

/// Traces crests, of the whole patch or of one population at its own scale; in words why not, where no bedforms are claimed or the patch is too large.
///
/// # Errors
/// [`Stopped`].
pub fn study(
    sheet: &Sheet,
    patch: &Patch,
    pixels: &PatchPixels,
    entry: &RasterEntry,
    trend: &TrendFinding,
    spectrum: &SpectrumFinding,
    unit: LengthUnit,
    only: Option<Only>,
    work: &Work,
) -> Result<Result<CrestsFinding, String>, Stopped> {
    if !trend.defined {
        return Ok(Err("no bedforms are claimed here".into()));
    }
    if pixels.image.len() > MOST_CELLS {
        return Ok(Err(format!("crests are traced in up to {MOST_CELLS} pixels; outline a smaller patch")));
    }
    let Some(frame) = pixels.outline.bounds().and_then(|b| pixels.place.local_frame(b.centre())) else {
        return Ok(Err("the patch has no place on the ground".into()));
    };
    let fine = frame.pixel_size().into_iter().fold(f64::INFINITY, f64::min);
    let (said, wanted) = (&patch.crests, &sheet.settings.crest);
    let factor = pixels.factor as f64;
    let reduced = |p: Point| Point::new((p.x - pixels.origin.x) / factor, (p.y - pixels.origin.y) / factor);
    let settings = crest::CrestSettings {
        model: said.model.or(wanted.model),
        scale_px: wanted.scale_px.filter(|_| only.is_none()),
        spacing_px: spectrum
            .spacing
            .filter(|_| spectrum.defined)
            .or(only.and_then(|only| only.spacing))
            .map(|s| s / fine),
        logarithm: entry.kind == ImageKind::Radar,
        excluded: said.masks.iter().map(|mask| mask.map(reduced)).collect(),
        tone_limits: said.tone_limits,
        significance: wanted.significance,
        bridge_scales: wanted.bridge_scales,
        least_length_scales: wanted.least_length_scales,
        tolerance_px: wanted.tolerance_px,
    };
    let found = detect(&pixels.image, &pixels.outline, &settings, work)?;
    let found = match only {
        Some(only) => only.of(found, frame),
        None => found,
    };
    let scale_px = found.scales_px.first().copied().unwrap_or(0.0);
    let numbers = numbers(&found.lines, &pixels.outline, frame);
    let longest = pixels.outline.bounds().map_or(0.0, |b| b.width().hypot(b.height())) * fine;
    let transects =
        SpacingSettings { step: 4.0 * scale_px * fine, longest, own_beyond: 8.0 * scale_px * fine };
    let spacing = spacing(&found.lines, &pixels.outline, frame, transects, work)?;
    let defects = defects(&found.lines, &found.junctions, numbers.total_length, spacing.quartiles[1]);
    let mut cautions = defects.cautions.clone();
    if found.fits.first().is_none_or(|fit| fit.skewness < CLEAR_MODEL) {
        let text =
            "Neither ridges nor slip faces stand out: crest lines are drawn on a wave of no clear side.";
        cautions.push(Caution::new("crest-model", text));
    }
    let by_spectrum = spectrum.spacing.filter(|_| spectrum.defined);
    if let (Some(transects), Some(spectrum)) = (spacing.quartiles[1], by_spectrum)
        && (transects / spectrum).ln().abs() > DISAGREE.ln()
    {
        cautions.push(Caution::new(
            "spacings-disagree",
            format!(
                "Transects from crest to crest give a median spacing of {transects:.0} {0}, the spectrum {spectrum:.0} {0}: crests are missed or doubled, or there are two scales.",
                unit.symbol()
            ),
        ));
    }
    let rose_bin_deg = sheet.settings.statistics.rose_bin_deg;
    let rose = crest::length_rose(&found.lines, frame, rose_bin_deg);
    let forks_toward = trend.axis.map(|axis| axis.azimuth()).filter(|_| !found.junctions.is_empty());
    let reach = 8.0 * scale_px * fine;
    let polarity = forks_toward.map(|toward| forks(&found.lines, &found.junctions, frame, toward, reach));
    let full = |p: &Point| Point::new(pixels.origin.x + p.x * factor, pixels.origin.y + p.y * factor);
    let full_line = |line: CrestLine| CrestLine {
        line: Polyline(line.line.0.iter().map(full).collect()),
        bridged_px: line.bridged_px * factor,
        ..line
    };
    let junctions = found.junctions.iter().map(|j| Junction { at: full(&j.at), ..j.clone() }).collect();
    Ok(Ok(CrestsFinding {
        lines: found.lines.into_iter().map(full_line).collect(),
        junctions,
        model: found.model,
        fits: found.fits,
        scale_px,
        factor,
        spacings: [by_spectrum, spacing.quartiles[1], spacing.stereology],
        numbers,
        spacing,
        defects,
        rose,
        rose_bin_deg,
        forks: polarity,
        forks_toward,
        lost_edits: Vec::new(),
        cautions,
    }))
}

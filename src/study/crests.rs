//! The crest lines of a patch, traced and edited, and what they say: length, density, spacing, defects.

use crate::ground::{Azimuth, Caution, LengthUnit, Point, Polyline, Stopped, Work};
use crate::science::crest::{
    self, CrestLine, CrestModel, CrestNumbers, Crests, Defects, EditGround, Edited, Fit, Forks, Frames,
    Junction, SpacingOnGround, SpacingSettings, defects, detect_on_ground, edit, forks, numbers, spacing,
};

use super::crest_edits::{self, Pixels};
use super::populations::Only;
use super::window::PatchPixels;
use super::{ImageKind, Patch, RasterEntry, Sheet, SpectrumFinding, TrendFinding, crest_words};

/// Cells traced at the most, as tracing holds several grids of that size; larger pictures are averaged.
const MOST_CELLS: usize = 1 << 24;
/// Scale of what a patch without traced crests says, pixels, where nothing else sets it.
const PLAIN_SCALE: f64 = 2.0;

/// Crests of a patch: traced where bedforms are claimed, edited by the user, or drawn by hand alone. All numbers are
/// those of the edited lines.
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

/// Traces crests and applies the user's edits, of the whole patch or of one population at its own scale; in words why
/// there are none: no trend is claimed or only what is drawn counts, and nothing is drawn.
///
/// # Errors
/// [`Stopped`].
#[allow(clippy::too_many_arguments)]
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
    let untraced = if patch.crests.drawn_only {
        Some("only what is drawn counts".to_owned())
    } else if !trend.defined {
        Some("no bedforms are claimed here".to_owned())
    } else {
        None
    };
    if let Some(why) = untraced.as_ref().filter(|_| patch.crests.strokes.is_empty()) {
        let nothing = if patch.crests.drawn_only { ", and nothing is drawn" } else { "" };
        return Ok(Err(format!("{why}{nothing}")));
    }
    let Some(frame) = pixels.outline.bounds().and_then(|b| Frames::new(&pixels.place, b.centre())) else {
        return Ok(Err("the patch has no place on the ground".into()));
    };
    let pixel = frame.middle().pixel_size();
    let fine = pixel.into_iter().fold(f64::INFINITY, f64::min);
    let (said, wanted) = (&patch.crests, &sheet.settings.crest);
    let at = Pixels { origin: pixels.origin, factor: pixels.factor as f64 };
    let by_spectrum = spectrum.spacing.filter(|_| spectrum.defined);
    let settings = crest::CrestSettings {
        model: said.model.or(wanted.model),
        scale_px: wanted.scale_px.filter(|_| only.is_none()),
        spacing_px: by_spectrum.or(only.and_then(|only| only.spacing)).map(|s| s / fine),
        logarithm: entry.kind == ImageKind::Radar,
        excluded: said.masks.iter().map(|mask| mask.map(|p| at.reduced(p))).collect(),
        tone_limits: said.tone_limits,
        significance: wanted.significance,
        bridge_scales: wanted.bridge_scales,
        least_length_scales: wanted.least_length_scales,
        tolerance_px: wanted.tolerance_px,
    };
    let traced = match &untraced {
        None => detect_on_ground(&pixels.image, &pixels.outline, pixel, &settings, MOST_CELLS, work)?,
        Some(_) => untraced_crests(&settings),
    };
    let ground = EditGround { image: &pixels.image, outline: &pixels.outline, excluded: &settings.excluded };
    let Edited { crests: found, lost } = edit(traced, &crest_edits::reduced(said, at), ground, work)?;
    let (found, lost) = match only {
        // An edit may well belong to another population: none is lost here.
        Some(only) => (only.of(found, frame.middle()), Vec::new()),
        None => (found, lost),
    };
    if let Some(why) = untraced.as_ref().filter(|_| found.lines.is_empty()) {
        return Ok(Err(format!("{why}, and nothing drawn lies in the patch")));
    }
    let scale_px = found.scales_px.first().copied().unwrap_or(0.0);
    let numbers = numbers(&found.lines, &pixels.outline, &frame);
    let longest = pixels.outline.bounds().map_or(0.0, |b| b.width().hypot(b.height())) * fine;
    let transects =
        SpacingSettings { step: 4.0 * scale_px * fine, longest, own_beyond: 8.0 * scale_px * fine };
    let spacing = spacing(&found.lines, &pixels.outline, &frame, transects, work)?;
    let defects = defects(&found.lines, &found.junctions, numbers.total_length, spacing.quartiles[1]);
    let spacings = [by_spectrum, spacing.quartiles[1], spacing.stereology];
    let mut cautions = defects.cautions.clone();
    cautions.extend(match &untraced {
        None => crest_words::of_tracing(&found, by_spectrum.is_some()),
        Some(why) => vec![crest_words::only_drawn(why)],
    });
    cautions.extend(crest_words::spacings(spacings, unit));
    cautions.extend(crest_words::lines(&found.lines));
    cautions.extend(crest_words::lost(lost.len()));
    let rose_bin_deg = sheet.settings.statistics.rose_bin_deg;
    let rose = crest::length_rose(&found.lines, &frame, rose_bin_deg);
    let forks_toward = trend.axis.map(|axis| axis.azimuth()).filter(|_| !found.junctions.is_empty());
    let reach = 8.0 * scale_px * fine;
    let polarity = forks_toward.map(|toward| forks(&found.lines, &found.junctions, &frame, toward, reach));
    let full_line = |line: CrestLine| CrestLine {
        line: Polyline(line.line.0.iter().map(|p| at.full(*p)).collect()),
        bridged_px: line.bridged_px * at.factor,
        by_hand_px: line.by_hand_px * at.factor,
        ..line
    };
    let junctions = found.junctions.iter().map(|j| Junction { at: at.full(j.at), ..j.clone() }).collect();
    Ok(Ok(CrestsFinding {
        lines: found.lines.into_iter().map(full_line).collect(),
        junctions,
        model: found.model,
        fits: found.fits,
        scale_px,
        factor: at.factor,
        spacings,
        numbers,
        spacing,
        defects,
        rose,
        rose_bin_deg,
        forks: polarity,
        forks_toward,
        lost_edits: lost.into_iter().map(|p| at.full(p)).collect(),
        cautions,
    }))
}

/// No traced line at the scale the settings or the spacing ask for; its model is the stated one, bright ridges
/// where none is stated.
fn untraced_crests(settings: &crest::CrestSettings) -> Crests {
    let model = settings.model.unwrap_or(CrestModel::BrightRidge);
    let scale = settings.scale_px.or(settings.spacing_px.map(|s| crest::suited_scale(model, s)));
    let scale = scale.filter(|s| s.is_finite()).unwrap_or(PLAIN_SCALE).max(1.0);
    Crests {
        lines: Vec::new(),
        junctions: Vec::new(),
        model,
        fits: Vec::new(),
        clear: false,
        sense: None,
        floor: 0.0,
        strong: 0.0,
        thresholds: [0.0; 2],
        scales_px: vec![scale],
        side_px: 1.0,
    }
}

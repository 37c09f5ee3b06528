//! The crest lines of a patch, and what they say: length, density, spacing, defects.

use crate::ground::{Caution, LengthUnit, Polyline, Stopped, Work};
use crate::science::crest::{
    CrestLine, CrestModel, CrestNumbers, CrestSettings, Defects, SpacingOnGround, SpacingSettings, defects,
    detect, numbers, spacing,
};

use super::window::PatchPixels;
use super::{ImageKind, RasterEntry, SpectrumFinding, TrendFinding};

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
    /// What a crest looks like here.
    pub model: CrestModel,
    /// Scale of the derivatives, pixels of the measured image.
    pub scale_px: f64,
    /// Lengths in the unit of the patch, as in all that follows.
    pub numbers: CrestNumbers,
    pub spacing: SpacingOnGround,
    pub defects: Defects,
    pub cautions: Vec<Caution>,
}

/// Traces crests; in words why not, where no bedforms are claimed or the patch is too large.
///
/// # Errors
/// [`Stopped`].
pub fn study(
    pixels: &PatchPixels,
    entry: &RasterEntry,
    trend: &TrendFinding,
    spectrum: &SpectrumFinding,
    unit: LengthUnit,
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
    let settings = CrestSettings {
        spacing_px: spectrum.spacing.filter(|_| spectrum.defined).map(|s| s / fine),
        logarithm: entry.kind == ImageKind::Radar,
        ..CrestSettings::default()
    };
    let found = detect(&pixels.image, &pixels.outline, &settings, work)?;
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
    let factor = pixels.factor as f64;
    let full = |line: CrestLine| CrestLine {
        line: Polyline(
            line.line
                .0
                .iter()
                .map(|p| {
                    crate::ground::Point::new(pixels.origin.x + p.x * factor, pixels.origin.y + p.y * factor)
                })
                .collect(),
        ),
        bridged_px: line.bridged_px * factor,
        ..line
    };
    let lines = found.lines.into_iter().map(full).collect();
    Ok(Ok(CrestsFinding { lines, model: found.model, scale_px, numbers, spacing, defects, cautions }))
}

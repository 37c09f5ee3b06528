//! Injection and recovery: synthetic bedforms of known trend are laid into a patch's own texture under its own light
//! and sought again, so that one knows what would have been seen there and what would not.

mod ground;
mod matched;
mod tries;
mod words;

use crate::files::raster::RasterError;
use crate::ground::{Axis, Caution, Stopped, Work};
use crate::numeric::separable::smooth_valid;
use crate::science::orientation::TensorSettings;
use crate::science::orientation::scale::INTEGRATION_RATIO;
use crate::science::scene::inject::Bedforms;
use crate::science::scene::recover::Response;

use super::window::{self, Detail, PatchPixels};
use super::{
    OpenRaster, Patch, PatchFinding, RasterEntry, RecoveredTrend, RecoveryFinding, RefitFinding, Sheet,
    fingerprint,
};
use ground::Wanted;
use matched::{Own, bounded, matched};
use tries::{Trial, recovered};

/// Spread of the crests laid in where the patch shows no trend, degrees.
const SPREAD_DEG: f64 = 10.0;
/// Spacing where the patch shows none, full-resolution pixels.
const SPACING_PX: f64 = 8.0;
/// Tone of the bedforms over the scatter of the texture where the patch shows no pattern.
const FAINT: f64 = 0.25;
/// Fewest pixels of the measured image from crest to crest.
const LEAST_SPACING: f64 = 3.0;
/// R̄ below which the axis of a field without preference says nothing.
const LEAST_LENGTH: f64 = 0.05;

/// Lays bedforms into the texture of a measured patch and seeks them again; in words why that cannot be done.
///
/// # Errors
/// [`Stopped`].
pub fn recovery(
    sheet: &Sheet,
    patch: &Patch,
    entry: &RasterEntry,
    open: &OpenRaster,
    finding: &PatchFinding,
    work: &Work,
) -> Result<Result<RecoveryFinding, String>, Stopped> {
    let s = &sheet.settings.recovery;
    if s.trends == 0 {
        return Ok(Err("the settings lay no trends in (recovery.trends is 0)".into()));
    }
    work.phase(&format!("reading {}", patch.name), 0);
    let pixels = match window::read(open, entry, patch, Detail::Exact, work) {
        Ok(pixels) => pixels,
        Err(RasterError::Stopped(stopped)) => return Err(stopped),
        Err(error) => return Ok(Err(error.to_string())),
    };
    let Some(fine) = fine_pixel(&pixels) else {
        return Ok(Err("the patch has no place on the ground".into()));
    };
    let spacing = s.spacing.or_else(|| own_spacing(finding, fine)).unwrap_or(SPACING_PX * fine);
    // Lengths in pixels of the image as measured.
    let spacing_px = spacing / (fine * pixels.factor as f64);
    if spacing_px.is_nan() || spacing_px < LEAST_SPACING {
        return Ok(Err(format!(
            "bedforms {spacing_px:.1} pixels apart are finer than the patch can show; lay in wider ones"
        )));
    }
    let tensor = scales(sheet, finding, spacing_px, pixels.factor);
    let window = f64::from(s.window_px) / pixels.factor as f64;
    let wanted = Wanted { window, spacing: spacing_px, scale: tensor.gradient_scale_px };
    let Some(mut ground) = ground::cut(&pixels, entry.kind, &wanted, work)? else {
        return Ok(Err("no valid pixel lies inside its outline".into()));
    };
    drop(pixels);
    let own = finding.trend.defined || finding.spectrum.defined;
    if own {
        ground.empty(own_spacing(finding, fine).unwrap_or(spacing), work)?;
    }
    let by = ground.averaged as f64;
    let light = entry.light_from;
    let mut trial = Trial {
        sheet,
        light,
        bedforms: Bedforms {
            trend: light.map_or(Axis::from_deg(0.0), |from| from.axis().perpendicular()),
            spacing,
            height: s.steepness * spacing,
            spread_deg: SPREAD_DEG,
            defects: s.defects,
            lee_clockwise: true,
        },
        tone_per_slope: 1.0,
        tensor: TensorSettings {
            gradient_scale_px: tensor.gradient_scale_px / by,
            integration_scale_px: tensor.integration_scale_px / by,
            node_step_px: tensor.node_step_px / by,
            ..tensor
        },
        seed: sheet.seed.child(&format!("patch {}", patch.id.0)).child("recovery"),
        ground: &ground,
    };
    let pattern = (trial.ground.removed > 0.0).then(|| trial.ground.removed.sqrt());
    let behind = match (finding.trend.axis, finding.trend.spread_deg, pattern.or(s.tone_per_slope)) {
        (Some(axis), Some(spread_deg), Some(_)) => {
            let tone = pattern.filter(|_| s.tone_per_slope.is_none());
            trial.tone_per_slope = s.tone_per_slope.unwrap_or(1.0);
            matched(&mut trial, &Own { axis, spread_deg, tone }, work)?
        }
        _ => None,
    };
    if behind.is_none() {
        trial.tone_per_slope = match s.tone_per_slope {
            Some(stated) => stated,
            None => faint(&trial, pattern, work)?,
        };
    }
    if let Some(stated) = s.spread_deg {
        trial.bedforms.spread_deg = stated;
    }
    let seen = trial.run(work)?;
    let response = Response::pooled(seen.iter().flatten().map(|seen| &seen.response));
    let mut trends: Vec<_> = trial
        .trends()
        .into_iter()
        .zip(&seen)
        .map(|(trend, seen)| recovered(trend, seen, s.tolerance_deg))
        .collect();
    trends.sort_by(|a, b| a.trend.deg().total_cmp(&b.trend.deg()));
    let [(uniform_resultant, axis), (by_contrast, _), (by_energy, _)] = response.resultants();
    let mut found = RecoveryFinding {
        patch: patch.id,
        name: patch.name.clone(),
        fingerprint: fingerprint::of_recovery(sheet, patch),
        unit: finding.unit,
        light_from: light,
        spacing,
        height: trial.bedforms.height,
        tone_per_slope: trial.tone_per_slope,
        defects: s.defects,
        spread_deg: trial.bedforms.spread_laid_deg(),
        window_px: ground.side,
        missed: words::missed(&trends),
        trends,
        uniform_resultant,
        uniform_weighted: [by_contrast, by_energy],
        uniform_axis: (uniform_resultant > LEAST_LENGTH).then_some(axis),
        corrected: None,
        sentence: String::new(),
        cautions: Vec::new(),
    };
    found.corrected = behind.zip(finding.trend.axis).map(|(axis, measured)| RefitFinding {
        axis,
        resultant_length: across_light(&found),
        turn_deg: axis.turn_from(measured),
    });
    found.sentence = words::sentence(&found);
    found.cautions = cautions(&trial, behind, work)?;
    Ok(Ok(found))
}

/// Ground size of the finer pixel direction at full resolution, in the middle of the patch.
fn fine_pixel(pixels: &PatchPixels) -> Option<f64> {
    let frame = pixels.outline.bounds().and_then(|b| pixels.place.local_frame(b.centre()))?;
    let fine = frame.pixel_size().into_iter().fold(f64::INFINITY, f64::min) / pixels.factor as f64;
    (fine.is_finite() && fine > 0.0).then_some(fine)
}

/// The spacing of the patch's own pattern: of its spectrum, else six gradient scales where it has a trend.
fn own_spacing(finding: &PatchFinding, fine: f64) -> Option<f64> {
    let spectrum = finding.spectrum.spacing.filter(|_| finding.spectrum.defined);
    let by_scale = finding.trend.defined.then_some(6.0 * finding.trend.gradient_scale_px * fine);
    spectrum.or(by_scale)
}

/// The scales the patch was measured at; where it shows no trend, those that suit the bedforms laid in. Image pixels.
fn scales(sheet: &Sheet, finding: &PatchFinding, spacing_px: f64, factor: usize) -> TensorSettings {
    let (s, trend, factor) = (&sheet.settings.trend, &finding.trend, factor as f64);
    let choose = |stated: Option<f64>, own: f64, laid: f64| {
        stated.map_or(if trend.defined { own / factor } else { laid }, |px| px / factor)
    };
    let gradient_scale_px =
        choose(s.gradient_scale_px, trend.gradient_scale_px, (spacing_px / 6.0).clamp(1.0, 16.0));
    let integration_scale_px =
        choose(s.integration_scale_px, trend.integration_scale_px, INTEGRATION_RATIO * gradient_scale_px);
    TensorSettings {
        gradient_scale_px,
        integration_scale_px,
        // A very large patch has nodes further apart than a window of it needs.
        node_step_px: s.node_step_px.map_or(integration_scale_px, |px| px / factor),
        significance: s.significance,
        // Tone is additive already.
        logarithm: false,
    }
}

/// The tone a slope of one adds where no trend of the patch is matched: as the pattern taken out shows right across
/// the light, or a quarter of the texture's scatter.
fn faint(trial: &Trial, pattern: Option<f64>, work: &Work) -> Result<f64, Stopped> {
    let image = &trial.ground.pixels.image;
    let tone = match pattern {
        Some(tone) => tone,
        None => {
            let sigma = trial.ground.frame.pixel_size().map(|size| trial.bedforms.spacing / size);
            let large = smooth_valid(image, sigma, work)?;
            let (mut square, mut n) = (0.0, 0.0f64);
            for i in 0..image.len() {
                let (col, row) = (i % image.width(), i / image.width());
                if let Some(v) = image.get(col, row) {
                    square += (f64::from(v) - f64::from(large.at(col, row))).powi(2);
                    n += 1.0;
                }
            }
            FAINT * (square / n.max(1.0)).sqrt()
        }
    };
    let slope = trial.slope_at(trial.bedforms.trend, work)?;
    // Ground without any texture at all still gets bedforms of some tone.
    Ok(if slope > 0.0 && tone > 0.0 { tone / slope } else { 1.0 })
}

/// R̄ of bedforms like the patch's where the light shows them best.
fn across_light(found: &RecoveryFinding) -> f64 {
    let across = found.light_from.map(|from| from.axis().perpendicular());
    let off = |t: &RecoveredTrend| across.map_or(0.0, |across| t.trend.separation(across));
    let best = found.trends.iter().min_by(|a, b| off(a).total_cmp(&off(b)));
    best.map_or(0.0, |t| t.resultant_length)
}

fn cautions(trial: &Trial, behind: Option<Axis>, work: &Work) -> Result<Vec<Caution>, Stopped> {
    let mut found = Vec::new();
    let mut say = |code, text: String| found.push(Caution::new(code, text));
    if trial.light.is_none() {
        say(
            "recovery-no-light",
            "Nobody said where the light comes from: bedforms were laid in as if it showed all trends alike."
                .into(),
        );
    }
    if behind.is_some_and(|axis| bounded(axis, trial.light)) {
        say("recovery-strength", "The patch's trend lies so near the light that its bedforms may be far stronger than they show: those laid in are as strong as 0.3 of the light would allow.".into());
    }
    if trial.ground.part {
        say(
            "recovery-window",
            format!(
                "Bedforms were sought in {0} × {0} pixels of the patch; over all of it fainter ones would show.",
                trial.ground.side
            ),
        );
    }
    if let Some(axis) = trial.texture_claims(work)? {
        say(
            "recovery-residue",
            format!(
                "The texture without its pattern still claims a trend at {:.0}°: not all of the pattern could be taken out.",
                axis.deg()
            ),
        );
    }
    Ok(found)
}

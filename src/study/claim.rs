//! Whether a trend is one of bedforms: drainage, bedrock and seams have trends too.

use crate::ground::Caution;

use super::PatchFinding;

/// Spectrum and tensor may differ by so many degrees where one of them follows the crests' skew.
const SAME_TREND_DEG: f64 = 15.0;
/// Transects and spectrum may differ by this factor: that of a pattern of which every second crest is missed, as happens
/// at four to six pixels from crest to crest.
const SAME_SPACING: f64 = 2.0;

/// Bedforms repeat: the spectrum has a peak that passes its test, its trend is that of the texture, and the
/// crests, traced without regard to it, stand at its spacing. In words what speaks against, where the patch has a
/// trend; nothing is claimed of a patch without one.
///
/// # Errors
/// Why the trend is no bedforms'.
pub fn bedforms(finding: &PatchFinding) -> Result<(), String> {
    let Some(axis) = finding.trend.axis.filter(|_| finding.trend.defined) else {
        return Err("there is no preferred trend".into());
    };
    let spectrum = &finding.spectrum;
    let (Some(regular), Some(spacing), true) = (spectrum.axis, spectrum.spacing, spectrum.defined) else {
        return Err("nothing repeats at a regular spacing".into());
    };
    let off = axis.separation(regular);
    if off > SAME_TREND_DEG {
        return Err(format!("what repeats runs {off:.0}° off the trend"));
    }
    let crests = finding.crests.as_ref().map_err(|why| format!("no crests tell ({why})"))?;
    match crests.spacings[1] {
        Some(transects) if (transects / spacing).ln().abs() <= SAME_SPACING.ln() => Ok(()),
        Some(transects) => {
            Err(format!("crests stand {:.1} times as far apart as what repeats", transects / spacing))
        }
        None => Err("too few crests face each other to tell their spacing".into()),
    }
}

/// A trend that is no bedforms'.
pub fn caution(finding: &PatchFinding) -> Option<Caution> {
    let why = bedforms(finding).err().filter(|_| finding.trend.defined)?;
    Some(Caution::new(
        "trend-only",
        format!(
            "A trend, but no claim of bedforms: {why}. Drainage, bedrock, seams and streaks have trends too."
        ),
    ))
}

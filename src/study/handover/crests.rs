//! Crest lines handed over in `findings.json`.

use serde_json::{Value as Json, json};

use crate::science::crest::{CrestOrigin, End};
use crate::study::CrestsFinding;

/// The member `crests` of a patch; lengths in its unit.
pub fn json(crests: &Result<CrestsFinding, String>) -> Json {
    let c = match crests {
        Ok(c) => c,
        Err(why) => return json!({ "refused": why }),
    };
    let n = &c.numbers;
    let [by_spectrum, by_transects, by_area] = c.spacings;
    json!({
        "model": c.model.name(), "scale_px": c.scale_px, "full_scale_px": c.full_scale_px(),
        "fits": c.fits.iter().map(|f| json!({ "model": f.model.name(), "skewness": f.skewness })).collect::<Vec<_>>(),
        "count": n.count, "length": n.total_length,
        "origins": origins(c),
        "density": n.density, "mean_length": n.lengths.exponential_mean(), "plain_mean_length": n.plain_mean_length,
        "cut_by_border": n.lengths.cut, "axis_deg": n.azimuth.map(|(axis, _)| axis.deg()),
        "resultant_length": n.azimuth.map(|(_, r)| r), "sinuosity": n.sinuosity,
        "rose": { "bin_deg": c.rose_bin_deg, "shares": c.rose },
        "spacing": {
            "p25": c.spacing.quartiles[0], "median": c.spacing.quartiles[1], "p75": c.spacing.quartiles[2],
            "uncensored_median": c.spacing.uncensored_median, "stereology": c.spacing.stereology,
            "transects": c.spacing.transects.whole, "transects_cut": c.spacing.transects.cut,
        },
        "spacings": { "spectrum": by_spectrum, "transects": by_transects, "area_over_length": by_area },
        "ends": c.defects.ends, "forks": c.defects.forks, "crossings": c.defects.crossings,
        "cut_ends": c.defects.cut_ends,
        "ends_per_length": c.defects.ends_per_length, "with_forks_per_length": c.defects.with_forks_per_length,
        "dimensionless": c.defects.dimensionless,
        "fork_polarity": c.forks.zip(c.forks_toward).map(|(f, toward)| json!({
            "toward_deg": toward.deg(), "toward": f.toward, "away": f.away, "unclear": f.unclear, "p": f.p,
        })),
        "junctions": c.junctions.iter().map(|j| json!({
            "at_px": j.at, "arms": j.branches.len() + 2, "crest": j.through + 1,
            "branches": j.branches.iter().map(|(line, _)| line + 1).collect::<Vec<_>>(),
        })).collect::<Vec<_>>(),
        "lost_edits_px": c.lost_edits,
        "cautions": c.cautions,
    })
}

/// Lines by where they come from, and the share of the length that was laid by hand.
fn origins(c: &CrestsFinding) -> Json {
    let count = |origin| c.lines.iter().filter(|l| l.origin == origin).count();
    let total: f64 = c.lines.iter().map(|l| l.line.length()).sum();
    let by_hand: f64 = c.lines.iter().map(|l| l.by_hand_px).sum();
    json!({
        "traced": count(CrestOrigin::Traced), "edited": count(CrestOrigin::Edited),
        "drawn": count(CrestOrigin::Drawn), "imported": count(CrestOrigin::Imported),
        "accepted": c.lines.iter().filter(|l| l.accepted).count(),
        "by_hand_share": (total > 0.0).then(|| by_hand / total),
    })
}

/// One word for an end.
pub(super) fn end_name(end: End) -> &'static str {
    match end {
        End::Free => "free",
        End::Junction => "junction",
        End::Border => "border",
        End::Gap => "gap",
        End::Closed => "closed",
    }
}

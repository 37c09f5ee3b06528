//! The numbers of the crests of a patch as a table.

use crate::ground::LengthUnit;
use crate::science::crest::CrestOrigin;
use crate::study::CrestsFinding;

use super::super::numbers::{self, count};
use super::super::sketch::Sketch;
use super::super::words::{area, brief, table};
use super::super::{Figure, Theme};

/// Count, length, density, direction, how they were traced and what a hand did.
pub fn crest_numbers(crests: &CrestsFinding, unit: LengthUnit, width_mm: f64, theme: &Theme) -> Figure {
    let n = &crests.numbers;
    let length = |v: f64| numbers::length(v, unit, 3);
    let density = match unit {
        LengthUnit::Metre => format!("{} km/km²", brief(1000.0 * n.density)),
        LengthUnit::Pixel => format!("{} per px", brief(n.density)),
    };
    let mut rows = vec![
        ("crests", count(n.count)),
        ("length in all", length(n.total_length)),
        ("ground", area(n.area, unit)),
        ("density", density),
    ];
    match n.lengths.restricted_mean() {
        Some(mean) if n.lengths.whole > 0 => rows.push(("mean length", length(mean))),
        Some(longest) => rows.push(("mean length", format!("open: all cut, up to {}", length(longest)))),
        None => {}
    }
    if let Some((axis, resultant)) = n.azimuth {
        let text = format!("{}°, R\u{304} {:.2}", numbers::angle(axis.deg(), 1, 180.0), resultant);
        rows.push(("mean azimuth", text));
    }
    if let Some(sinuosity) = n.sinuosity {
        rows.push(("sinuosity", numbers::fixed(sinuosity, 3)));
    }
    rows.extend(origins(crests));
    rows.push(("traced as", traced_as(crests)));
    rows.push(("scale", format!("{} px", numbers::plain(crests.full_scale_px(), 1))));
    let bridged: f64 = crests.lines.iter().map(|l| l.bridged_px).sum();
    let drawn: f64 = crests.lines.iter().map(|l| l.line.length()).sum();
    if bridged > 0.0 && drawn > 0.0 {
        rows.push(("gaps bridged", format!("{} of length", numbers::percent(bridged / drawn))));
    }
    if !crests.lost_edits.is_empty() {
        rows.push(("edits that met no line", count(crests.lost_edits.len())));
    }
    let rows: Vec<(String, String)> = rows.into_iter().map(|(name, text)| (name.to_owned(), text)).collect();
    let mut sketch = Sketch::default();
    let height = table(&mut sketch, &rows, 0.0, width_mm, theme);
    sketch.finish(width_mm, height)
}

/// How many lines come from where, and how much of the length a hand laid.
fn origins(crests: &CrestsFinding) -> Vec<(&'static str, String)> {
    let of = |origin| crests.lines.iter().filter(|l| l.origin == origin).count();
    let kinds = [
        (CrestOrigin::Traced, "traced"),
        (CrestOrigin::Edited, "edited"),
        (CrestOrigin::Drawn, "drawn"),
        (CrestOrigin::Imported, "imported"),
    ];
    let told: Vec<String> = kinds
        .into_iter()
        .filter(|(origin, _)| of(*origin) > 0)
        .map(|(origin, name)| format!("{} {name}", count(of(origin))))
        .collect();
    let mut rows = vec![("by origin", told.join(", "))];
    let accepted = crests.lines.iter().filter(|l| l.accepted).count();
    if accepted > 0 {
        rows.push(("looked at and let stand", count(accepted)));
    }
    let (by_hand, all): (f64, f64) =
        crests.lines.iter().fold((0.0, 0.0), |(h, a), l| (h + l.by_hand_px, a + l.line.length()));
    if by_hand > 0.0 && all > 0.0 {
        rows.push(("laid by hand", format!("{} of length", numbers::percent((by_hand / all).min(1.0)))));
    }
    rows
}

fn traced_as(crests: &CrestsFinding) -> String {
    let fit = crests.fits.iter().find(|fit| fit.model == crests.model);
    let skewness = fit.map_or(String::new(), |fit| format!(", skewness {}", numbers::fixed(fit.skewness, 2)));
    format!("{}{skewness}", crests.model.name())
}

//! A comparison in one plain sentence.

use crate::ground::LengthUnit;
use crate::science::crest::Shift;
use crate::study::sentence::length;
use crate::study::{ComparisonFinding, TrendFinding};

use super::OTHER_LOOK_DEG;

pub(super) fn sentence(f: &ComparisonFinding) -> String {
    let [a, b] = &f.raster_names;
    let mut parts = vec![trends(f)];
    parts.extend(looks(f));
    parts.push(match &f.shift {
        Ok(shift) => movement(shift, f.unit, f.years),
        Err(why) => format!("how far crests moved is not known: {why}"),
    });
    format!(
        "{} on “{a}” and “{b}”, {:.0} % of it shown by both: {}.",
        f.patch_name,
        100.0 * f.overlap,
        parts.join("; ")
    )
}

fn trends(f: &ComparisonFinding) -> String {
    let said = |t: &TrendFinding| match (t.axis, t.ci95_half_deg) {
        (Some(axis), Some(half)) => format!("{:.0}° ± {}°", axis.deg() % 180.0, degrees(half)),
        _ => "no preferred trend".into(),
    };
    let both = format!("trend {} and {}", said(&f.trends[0]), said(&f.trends[1]));
    let Some(test) = f.axes.tests.first() else {
        return format!("{both}, with too little independent ground to compare them");
    };
    let p = if test.p < 1e-4 { "p below 0.0001".to_owned() } else { format!("p = {:.3}", test.p) };
    let by = match (f.axes.difference_deg, f.axes.difference_ci95_deg) {
        (Some(d), Some([low, high])) => format!(" by {d:.1}° ({low:.1}° to {high:.1}°)"),
        (Some(d), None) => format!(" by {d:.1}°"),
        _ => String::new(),
    };
    if f.axes.differ {
        format!("{both}: they differ{by} ({}, {p})", test.name)
    } else {
        let within = if by.is_empty() { String::new() } else { format!(", apart{by}") };
        format!("{both}{within}: no difference is shown ({}, {p})", test.name)
    }
}

fn looks(f: &ComparisonFinding) -> Option<String> {
    let looks = f.looks.filter(|l| l.apart_deg > OTHER_LOOK_DEG)?;
    let apart = format!("the looks stand {:.0}° apart", looks.apart_deg);
    Some(match (f.axes.differ, looks.may_explain) {
        (true, true) => {
            let refit = looks.refit_deg.map_or(String::new(), |d| {
                format!(" (with each look’s weight taken out the trends lie {:.0}° apart)", d.abs())
            });
            format!(
                "{apart}, which alone can make such a difference{refit}, so it is no proof of a change on the ground"
            )
        }
        (true, false) => format!(
            "{apart}, but draw trends apart another way or less far, so they do not explain the difference"
        ),
        (false, _) => {
            format!("{apart} and still show one trend, so that it is the ground’s and not the light’s")
        }
    })
}

fn movement(shift: &Shift, unit: LengthUnit, years: Option<f64>) -> String {
    let sign = if shift.median < 0.0 { -1.0 } else { 1.0 };
    let toward = if sign < 0.0 { shift.toward.reversed() } else { shift.toward };
    let [low, high] = if sign < 0.0 { [-shift.ci95[1], -shift.ci95[0]] } else { shift.ci95 };
    let signed = |x: f64| if x < 0.0 { format!("−{}", length(-x, unit)) } else { length(x, unit) };
    let interval = format!("{} to {}", signed(low), signed(high));
    let crests = format!("{} crests, {:.0} % of their length matched", shift.crests, 100.0 * shift.share);
    if low <= 0.0 {
        return format!("crests did not move measurably ({interval} toward {:.0}°; {crests})", toward.deg());
    }
    let rate = years.map_or(String::new(), |y| {
        let back = if y < 0.0 { ", backward in time" } else { "" };
        format!(", {} a year{back}", length(sign * shift.median / y.abs(), unit))
    });
    format!(
        "crests moved {} ({interval}) toward {:.0}°{rate} ({crests})",
        length(sign * shift.median, unit),
        toward.deg()
    )
}

/// Whole degrees from 10° on, one decimal below.
fn degrees(half: f64) -> String {
    if half >= 9.95 { format!("{half:.0}") } else { format!("{half:.1}") }
}

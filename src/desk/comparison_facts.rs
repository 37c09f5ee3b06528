//! Two pictures of one ground as rows.

use crate::plate::numbers;
use crate::study::ComparisonFinding;

use super::facts::{Fact, fact};

/// What a comparison says, row by row.
pub fn comparison(c: &ComparisonFinding) -> Vec<Fact> {
    let degrees = |x: f64| format!("{}°", numbers::fixed(x, 1));
    let mut facts =
        vec![fact("Shown by both", numbers::percent(c.overlap), "Share of the patch; all else is left out.")];
    for (label, trend) in ["First trend", "Second trend"].into_iter().zip(&c.trends) {
        let words = trend.axis.map_or_else(
            || "no preferred trend".to_owned(),
            |axis| numbers::axis_with_interval(axis, trend.ci95_half_deg),
        );
        facts.push(
            fact(label, words, "Of the common ground, at one scale in both pictures.").by("axial.mean"),
        );
    }
    if let Some(d) = c.axes.difference_deg {
        let interval = c
            .axes
            .difference_ci95_deg
            .map_or(String::new(), |[low, high]| format!(" ({} to {})", degrees(low), degrees(high)));
        let method = if c.axes.pairs.is_some() { "axial.paired" } else { "axial.two-samples" };
        facts.push(
            fact("Second less first", degrees(d) + &interval, "Clockwise, with its 95 % interval.")
                .by(method),
        );
    }
    for test in &c.axes.tests {
        facts.push(
            fact(
                test.name,
                format!("{}; {}", numbers::p_value(test.p), test.remark),
                "At the effective numbers.",
            )
            .by(test.method),
        );
    }
    if let Some(looks) = c.looks {
        facts.push(fact(
            "Looks apart",
            degrees(looks.apart_deg),
            "Angle between the axes of both looks; beyond 30° they may show different trends.",
        ));
        facts.extend(looks.refit_deg.map(|d| {
            fact(
                "Without the looks’ weight",
                degrees(d),
                "Second less first trend, each node weighted against its own look.",
            )
            .by("orientation.look-bias")
        }));
    }
    if let Ok(shift) = &c.shift {
        let length = |x: f64| numbers::length(x, c.unit, 3);
        let mut row = |label, value: String, hint| facts.push(fact(label, value, hint).by("crest.shift"));
        row(
            "Crests moved",
            format!(
                "{} toward {}°",
                numbers::length_with_interval(shift.median, Some(shift.ci95), c.unit),
                numbers::fixed(shift.toward.deg(), 0)
            ),
            "Median over points of the crests, square to them; below 0 the other way. Interval by crests redrawn.",
        );
        if let Some(years) = c.years {
            row("A year", length(shift.median / years), "The median over the years between the pictures.");
        }
        row(
            "Matched",
            format!(
                "{} of {} points on {} crests",
                numbers::percent(shift.share),
                numbers::count((shift.matched as f64 / shift.share.max(1e-9)).round() as usize),
                numbers::count(shift.crests)
            ),
            "Points of the first crests that met a crest of the second.",
        );
        if let Some(chance) = shift.chance {
            row(
                "By chance",
                format!("{} matched; {}", numbers::percent(chance.share), numbers::p_value(chance.p)),
                "With the second crests laid elsewhere: the share matched, and how often movements agreed as closely.",
            );
        }
        if let Some(vector) = shift.vector {
            let [e, n] = vector.east_north;
            row(
                "As one vector",
                format!("{} east, {} north", length(e), length(n)),
                "One movement of all crests, which their different directions tell.",
            );
        }
    }
    facts
}

//! The populations of a patch and its three spacings as rows of label and value.

use crate::ground::LengthUnit;
use crate::plate::numbers;
use crate::study::{CrestsFinding, PatchFinding, PopulationFinding, PopulationSource};

use super::facts::{Fact, fact};

/// Spacings further apart than this factor disagree.
const DISAGREE: f64 = 1.5;

/// What is said of the populations above the rows; in plain words where there is one only.
pub fn sentence(finding: &PatchFinding) -> String {
    let pattern = &finding.pattern;
    let swept = pattern.scales.len();
    match pattern.populations.as_slice() {
        [] | [_] if swept == 0 => "The patch was not looked at on several scales yet.".to_owned(),
        [] | [_] => format!(
            "One population: neither the spread of the axes nor a sweep over {swept} scales tells a second trend \
             apart."
        ),
        many => {
            let superposed = many.iter().any(|p| p.source == PopulationSource::Scale);
            let how = if superposed {
                "One lies upon another: at another scale the ground has another trend."
            } else {
                "They lie side by side, or cross at one scale."
            };
            format!("{} populations. {how}", many.len())
        }
    }
}

/// One population.
pub fn population(found: &PopulationFinding, unit: LengthUnit) -> Vec<Fact> {
    let trend = &found.trend;
    let (share, by) = match found.source {
        PopulationSource::Mixture => ("of the nodes", "axial.mixture"),
        PopulationSource::Scale => ("of the texture at its scale", "orientation.plateau"),
    };
    let axis = trend.axis.map_or("no preferred trend".to_owned(), |axis| {
        numbers::axis_with_interval(axis, trend.ci95_half_deg)
    });
    let spacing = found.spacing.map_or("no peak of its trend".to_owned(), |spacing| {
        numbers::length_with_interval(spacing, found.spacing_ci95, unit)
    });
    let mut facts = vec![
        fact("Trend", axis, "Mean axis of its nodes, with its 95 % interval.").by("axial.mean"),
        fact(
            "Share",
            format!("{} {share}", numbers::percent(found.weight)),
            "How much of the ground is its.",
        )
        .by(by),
        fact("Spacing", spacing, "Where the spectrum has a peak of its trend.").by("orientation.spectrum"),
        fact(
            "Resultant length",
            numbers::fixed(trend.resultant_length, 2),
            "Of its own nodes: 0 = no alignment, 1 = all axes equal.",
        )
        .by("axial.mean"),
        fact(
            "Effective samples",
            format!("{} of {} nodes", numbers::significant(trend.n_eff, 3), trend.n),
            "Neighbours say the same thing.",
        )
        .by("axial.effective-number"),
    ];
    let crests = match &found.crests {
        Ok(crests) => format!(
            "{}, {} in all",
            numbers::count(crests.numbers.count),
            numbers::length(crests.numbers.total_length, unit, 3)
        ),
        Err(why) => format!("none: {why}"),
    };
    facts.push(fact("Crests", crests, "Traced at its scale, kept within its trend.").by("crest.curvilinear"));
    for verdict in found.verdicts.iter().filter(|v| v.refused.is_none()) {
        if let Some(obliquity) = verdict.obliquity_deg {
            let value = format!("{:.0}° from where the sand goes ({})", obliquity, verdict.winds_name);
            facts.push(
                fact("Obliquity", value, "0° along the resultant, 90° across.").by("alignment.obliquity"),
            );
        }
    }
    facts
}

/// The spacing by the spectrum, by transects and by area, side by side; empty where crests are not traced.
pub fn spacings(crests: &CrestsFinding, unit: LengthUnit) -> Vec<Fact> {
    let [spectrum, transects, area] = crests.spacings;
    let value = |spacing: Option<f64>| {
        spacing.map_or("not known".to_owned(), |spacing| numbers::length(spacing, unit, 3))
    };
    let mut facts = vec![
        fact("By the spectrum", value(spectrum), "Wavelength of the strongest peak.")
            .by("orientation.spectrum"),
        fact(
            "From crest to crest",
            value(transects),
            "Median of transects square to the crests, those cut at the border counted as such.",
        )
        .by("crest.spacing"),
        fact("Area over length", value(area), "What crests would be apart if they ran side by side.")
            .by("crest.spacing"),
    ];
    facts.extend(disagreement(crests.spacings).map(|words| {
        fact(
            "Agreement",
            words,
            "Apart by more than half, crests are missed or doubled, or there are two scales.",
        )
    }));
    facts
}

/// How far apart the known ones of the three are; `None` with fewer than two.
fn disagreement(spacings: [Option<f64>; 3]) -> Option<String> {
    let known: Vec<f64> = spacings.into_iter().flatten().filter(|s| *s > 0.0 && s.is_finite()).collect();
    let (low, high) = known.iter().fold((f64::INFINITY, 0.0f64), |(a, b), s| (a.min(*s), b.max(*s)));
    (known.len() > 1).then(|| {
        let factor = high / low;
        let words = if factor > DISAGREE { "they disagree" } else { "they agree" };
        format!("{words}: {} times apart", numbers::fixed(factor, 2))
    })
}

#[cfg(test)]
mod tests {
    use super::disagreement;

    #[test]
    fn three_spacings_are_held_against_each_other() {
        let words = |a, b, c| disagreement([a, b, c]).unwrap_or_default();
        assert_eq!(words(Some(100.0), Some(130.0), None), "they agree: 1.30 times apart");
        assert_eq!(words(Some(200.0), Some(100.0), Some(120.0)), "they disagree: 2.00 times apart");
        assert_eq!(words(Some(200.0), None, Some(f64::NAN)), "");
    }
}

//! What the light may have done to a trend, and what bedforms laid into the patch say of it, as rows and sentences.

use crate::ground::Azimuth;
use crate::plate::numbers;
use crate::science::orientation::look::{HOLE_DEG, NEAR_DEG};
use crate::study::{LightFinding, RecoveryFinding, RefitFinding, TrendFinding};

use super::facts::{Fact, fact};

const LOOK: &str = "orientation.look-bias";

/// What the light could have done, in a sentence or two.
pub fn sentence(trend: &TrendFinding, light: &LightFinding) -> String {
    let [axis, hole] = [90.0, 0.0].map(|turn| axis_words(light.from.rotated(turn)));
    let Some(off) = light.from_bias_deg else {
        return format!(
            "No trend is claimed here. Light from {} hides crests near {hole} and shows those near {axis} best.",
            azimuth_words(light.from)
        );
    };
    let measured = numbers::fixed(trend.resultant_length, 2);
    let [_, energy] = light.by_light.map(|r| numbers::fixed(r, 2));
    if light.suspect {
        format!(
            "The light alone could have made this trend: it lies {off:.0}° from {axis}, where light from {} shows \
             crests best, and its R̄ of {measured} is no more than the {energy} that a field without preference \
             would show. A second picture under another light would tell.",
            azimuth_words(light.from)
        )
    } else if off <= NEAR_DEG {
        format!(
            "The trend lies {off:.0}° from {axis}, where light from {} shows crests best, but its R̄ of {measured} \
             is more than the {energy} that light alone could give.",
            azimuth_words(light.from)
        )
    } else {
        format!(
            "The light did not make this trend: light from {} would show one near {axis}, and it lies {off:.0}° \
             away. Crests near {hole} would hardly show.",
            azimuth_words(light.from)
        )
    }
}

/// A trend held against the light.
pub fn light(trend: &TrendFinding, light: &LightFinding) -> Vec<Fact> {
    let mut facts = Vec::new();
    if let Some(off) = light.from_bias_deg {
        facts.push(fact(
            "Trend from light + 90°",
            format!("{}°", numbers::fixed(off, 1)),
            "Crests square to the light show best; a trend close to that may be the light's work.",
        ));
    }
    let [contrast, energy] = light.by_light.map(|r| numbers::fixed(r, 2));
    facts.push(fact(
        "R̄ as measured",
        numbers::fixed(trend.resultant_length, 2),
        "How aligned the nodes are that passed the noise floor.",
    ));
    facts.push(fact(
        "R̄ by light alone",
        format!("{contrast} by contrast, {energy} by gradient energy"),
        "What crests of all trends alike would show under this light.",
    ));
    facts.extend(light.refit.map(|refit| refitted("Refitted against the light", refit)));
    let [seen, expected] = light.near_light.map(numbers::percent);
    facts.push(fact(
        "Nodes near the light",
        format!("{seen} within {HOLE_DEG:.0}°; {expected} without preference"),
        "Crests along the light hardly show: few nodes there are a hole in what can be seen, not in nature.",
    ));
    facts.into_iter().map(|fact| fact.by(LOOK)).collect()
}

fn refitted(label: &'static str, refit: RefitFinding) -> Fact {
    fact(
        label,
        format!("{}, R̄ {}", turned(refit), numbers::fixed(refit.resultant_length, 2)),
        "Nodes that show faintly under this light count for more, up to 1/0.3 times.",
    )
}

/// An axis and how far it is turned from the trend as measured.
fn turned(refit: RefitFinding) -> String {
    let way = if refit.turn_deg < 0.0 { "counter-clockwise" } else { "clockwise" };
    let (axis, turn) = (numbers::fixed(refit.axis.deg(), 1), numbers::fixed(refit.turn_deg.abs(), 1));
    format!("{axis}°, turned {turn}° {way}")
}

/// What bedforms laid into a patch say.
pub fn recovery(found: &RecoveryFinding) -> Vec<Fact> {
    let length = |value: f64| numbers::length(value, found.unit, 3);
    let mut facts = vec![
        fact(
            "Laid in",
            format!(
                "{} apart, {} high, defects {}",
                length(found.spacing),
                length(found.height),
                short(found.defects)
            ),
            "Spacing, height and defect density of the bedforms laid in.",
        ),
        fact(
            "Tone of a slope of one",
            numbers::significant(found.tone_per_slope, 3),
            "What a slope of one toward the light adds to the tone (to ln of intensity for radar).",
        ),
        fact(
            "Ground",
            format!("{} px a side, {}", found.window_px, tries(found)),
            "Taken out of the patch with its speckle, tone and gaps.",
        ),
        fact(
            "All trends alike would show",
            format!("R̄ {}{}", numbers::fixed(found.uniform_resultant, 2), along(found)),
            "What a field without preference would look like here: a trend no stronger than this says little.",
        ),
    ];
    if let Some(corrected) = found.corrected {
        facts.push(fact(
            "Trend less its bias",
            turned(corrected),
            "The patch's own trend, less what trends near it were found off by.",
        ));
    }
    facts
}

fn along(found: &RecoveryFinding) -> String {
    found.uniform_axis.map_or(String::new(), |axis| format!(" along {:.0}°", axis.deg()))
}

fn tries(found: &RecoveryFinding) -> String {
    let most = found.trends.iter().map(|t| t.tries).max().unwrap_or(0);
    format!("{} trends × {most} fields", found.trends.len())
}

fn short(value: f64) -> String {
    numbers::plain(value, 2)
}

fn azimuth_words(azimuth: Azimuth) -> String {
    format!("{:.0}°", azimuth.deg())
}

fn axis_words(azimuth: Azimuth) -> String {
    format!("{:.0}°", azimuth.axis().deg())
}

#[cfg(test)]
mod tests {
    use super::{light, sentence};
    use crate::ground::{Axis, Azimuth};
    use crate::study::{LightFinding, RefitFinding, TrendFinding};

    fn found(off: f64, suspect: bool) -> (TrendFinding, LightFinding) {
        let trend = TrendFinding {
            defined: true,
            axis: Some(Axis::from_deg(52.0)),
            resultant_length: 0.42,
            ..TrendFinding::default()
        };
        let light = LightFinding {
            from: Azimuth::from_deg(312.0),
            from_bias_deg: Some(off),
            by_light: [1.0 / 3.0, 0.5],
            suspect,
            refit: Some(RefitFinding { axis: Axis::from_deg(55.1), resultant_length: 0.3, turn_deg: 3.1 }),
            near_light: [0.04, 0.12],
        };
        (trend, light)
    }

    #[test]
    fn what_the_light_could_do_is_said_in_words() {
        let (trend, lit) = found(10.0, true);
        let words = sentence(&trend, &lit);
        assert!(words.contains("could have made") && words.contains("10° from 42°"), "{words}");
        let (trend, lit) = found(40.0, false);
        assert!(sentence(&trend, &lit).contains("near 42°, and it lies 40° away"));
        assert!(sentence(&trend, &lit).contains("near 132° would hardly"));
        let (trend, lit) = found(10.0, false);
        assert!(sentence(&trend, &lit).contains("more than the 0.50"));
        let none = LightFinding { from_bias_deg: None, ..lit };
        assert!(sentence(&trend, &none).contains("No trend is claimed"));
    }

    #[test]
    fn every_row_names_the_method_that_made_it() {
        let (trend, lit) = found(10.0, true);
        let rows = light(&trend, &lit);
        assert_eq!(rows.len(), 5);
        assert!(rows.iter().all(|row| row.record().is_some()));
        assert!(rows.iter().any(|row| row.value == "55.1°, turned 3.1° clockwise, R̄ 0.30"), "{rows:?}");
    }
}

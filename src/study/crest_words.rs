//! Cautions about the crests of a patch.

use crate::ground::{Caution, LengthUnit};
use crate::science::crest::{CrestLine, CrestOrigin, Crests};

/// Strong crests stand so many noise floors high where speckle hardly breaks them: on synthetic crests ends and
/// forks are then counted within a tenth.
const CLEAR_OF_NOISE: f64 = 2.4;
/// Averaging from which on it is worth a word.
const AVERAGED: f64 = 1.05;
/// A scale of so many averaged pixels loses nothing.
const FINE_ENOUGH: f64 = 1.5;
/// Spacings further apart than this factor disagree.
const DISAGREE: f64 = 1.5;
/// Traced lines of less confidence are doubtful until the user lets them stand.
const DOUBTFUL: f64 = 0.25;
/// Share of the length that may be doubtful.
const MOST_DOUBTFUL: f64 = 0.25;

/// What weakens a tracing: no model stands out, crests hardly stand above speckle, or the picture was averaged
/// more than its scale allows.
pub fn of_tracing(crests: &Crests, spacing_known: bool) -> Vec<Caution> {
    let mut cautions = Vec::new();
    if !crests.clear {
        let text = "Neither ridges nor slip faces stand out: crest lines are drawn on a wave of no clear side, along its bright ridges where nobody chose.";
        cautions.push(Caution::new("crest-model", text));
    }
    if !crests.lines.is_empty() && crests.floor > 0.0 && crests.strong < CLEAR_OF_NOISE * crests.floor {
        let text = format!(
            "Even strong crests stand only {:.1} times above what noise alone reaches: some ends and forks are made by noise, so their numbers are an upper bound.",
            crests.strong / crests.floor
        );
        cautions.push(Caution::new("crests-in-noise", text));
    }
    let scale = crests.scales_px.first().copied().unwrap_or(0.0);
    if crests.side_px > AVERAGED && !(spacing_known && scale >= FINE_ENOUGH * crests.side_px) {
        let text = format!(
            "Crests are traced on pixels averaged {0:.1} × {0:.1}, because the patch is large: those closer than {1:.0} pixels are lost.",
            crests.side_px,
            4.0 * crests.side_px
        );
        cautions.push(Caution::new("crests-averaged", text));
    }
    cautions
}

/// Nothing was traced.
pub fn only_drawn(why: &str) -> Caution {
    Caution::new("crests-only-drawn", format!("No crest was traced ({why}): all lines are the user's."))
}

/// The spacings by spectrum, transects and area over length lie further apart than a factor of 1.5.
pub fn spacings(found: [Option<f64>; 3], unit: LengthUnit) -> Option<Caution> {
    let names = ["the spectrum", "transects from crest to crest", "area over crest length"];
    let known: Vec<(f64, &str)> = found
        .into_iter()
        .zip(names)
        .filter_map(|(spacing, name)| Some((spacing.filter(|s| *s > 0.0)?, name)))
        .collect();
    let least = known.iter().map(|(s, _)| *s).fold(f64::INFINITY, f64::min);
    let most = known.iter().map(|(s, _)| *s).fold(0.0, f64::max);
    (most > DISAGREE * least).then(|| {
        let digits = if least < 10.0 { 1 } else { 0 };
        let said: Vec<String> =
            known.iter().map(|(s, name)| format!("{s:.digits$} {} by {name}", unit.symbol())).collect();
        let text = format!(
            "Spacings disagree ({}): crests are missed or doubled, leave part of the patch bare, or there are two scales.",
            said.join(", ")
        );
        Caution::new("spacings-disagree", text)
    })
}

/// What the lines owe to the hand, and how much of the rest is doubtful.
pub fn lines(lines: &[CrestLine]) -> Vec<Caution> {
    let mut cautions = Vec::new();
    let total: f64 = lines.iter().map(|l| l.line.length()).sum();
    if total <= 0.0 {
        return cautions;
    }
    let by_hand = lines.iter().map(|l| l.by_hand_px).sum::<f64>() / total;
    if by_hand > 0.0 {
        let touched = lines.iter().filter(|l| l.by_hand_px > 0.0).count();
        cautions.push(Caution::new(
            "crests-by-hand",
            format!(
                "{} of the crest length was laid by hand or came out of a file, on {touched} of {} lines.",
                percent(by_hand),
                lines.len()
            ),
        ));
    }
    let doubtful = |l: &&CrestLine| l.origin == CrestOrigin::Traced && !l.accepted && l.confidence < DOUBTFUL;
    let length = lines.iter().filter(doubtful).map(|l| l.line.length()).sum::<f64>() / total;
    if length > MOST_DOUBTFUL {
        cautions.push(Caution::new(
            "crests-doubtful",
            format!(
                "{} traced lines with {} of the crest length have a confidence below {DOUBTFUL}, and nobody has let them stand.",
                lines.iter().filter(doubtful).count(),
                percent(length)
            ),
        ));
    }
    cautions
}

/// Edits that found no line.
pub fn lost(count: usize) -> Option<Caution> {
    let text = match count {
        0 => return None,
        1 => "An edit of the crests found no line where it was made; it is marked on the table.".to_owned(),
        n => format!(
            "{n} edits of the crests found no line where they were made; they are marked on the table."
        ),
    };
    Some(Caution::new("crest-edits-lost", text))
}

fn percent(share: f64) -> String {
    if share < 0.01 { "less than 1 %".into() } else { format!("{:.0} %", 100.0 * share) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn any_two_of_three_spacings_may_disagree() {
        let metres = LengthUnit::Metre;
        assert!(spacings([Some(100.0), Some(140.0), Some(149.0)], metres).is_none());
        let caution = spacings([None, Some(140.0), Some(211.0)], metres).unwrap();
        assert!(caution.text.contains("140 m by transects"), "{}", caution.text);
        assert!(!caution.text.contains("spectrum"));
        assert!(spacings([None, None, Some(211.0)], metres).is_none());
        assert!(spacings([None; 3], metres).is_none());
    }
}
